// Package exact holds the few functions whose last bit decides who is chosen: the same arguments give the same result on
// every processor and in every browser. Products that could be fused with a sum are converted explicitly, which the Go
// specification makes a rounding point.
package exact

import "math"

const (
	ln2High = 6.93147180369123816490e-01
	ln2Low  = 1.90821492927058770002e-10
	log2E   = 1.44269504088896338700e+00
)

// Exp returns e^x, error below 1 ulp. Argument reduction x = k ln 2 + r, |r| <= ln(2)/2, then the rational
// approximation of FDLIBM e_exp.c (Sun Microsystems 1993; coefficients by Remez).
func Exp(x float64) float64 {
	switch {
	case math.IsNaN(x) || math.IsInf(x, 1):
		return x
	case x > 709.782712893384:
		return math.Inf(1)
	case x < -745.2:
		return 0
	case math.Abs(x) < 1.0/(1<<28):
		return 1 + x
	}
	k := int(math.Floor(float64(log2E*x) + 0.5))
	hi := x - float64(float64(k)*ln2High)
	lo := float64(float64(k) * ln2Low)
	r := hi - lo
	t := float64(r * r)
	c := float64(t*4.13813679705723846039e-08) - 1.65339022054652515390e-06
	c = float64(t*c) + 6.61375632143793436117e-05
	c = float64(t*c) - 2.77777777770155933842e-03
	c = float64(t*c) + 1.66666666666666019037e-01
	c = r - float64(t*c)
	y := 1 - ((lo - float64(r*c)/(2-c)) - hi)
	if k < -1020 || k > 1020 {
		return math.Ldexp(y, k)
	}
	return y * math.Float64frombits(uint64(k+1023)<<52)
}

// Log returns ln x, error below 1 ulp: x = 2^k f, sqrt(1/2) < f < sqrt(2), then the series of FDLIBM e_log.c in
// s = (f-1)/(f+1) (Sun Microsystems 1993).
func Log(x float64) float64 {
	switch {
	case math.IsNaN(x) || math.IsInf(x, 1):
		return x
	case x < 0:
		return math.NaN()
	case x == 0:
		return math.Inf(-1)
	}
	var f1 float64
	var e int
	if b := math.Float64bits(x); b>>52 > 0 && b>>52 < 0x7ff {
		f1, e = math.Float64frombits(b&(1<<52-1)|1022<<52), int(b>>52)-1022
	} else {
		f1, e = math.Frexp(x)
	}
	if f1 < math.Sqrt2/2 {
		f1 *= 2
		e--
	}
	f, k := f1-1, float64(e)
	s := f / (2 + f)
	s2 := float64(s * s)
	s4 := float64(s2 * s2)
	t1 := 6.666666666666735130e-01 + float64(s4*(2.857142874366239149e-01+float64(s4*(1.818357216161805012e-01+float64(s4*1.479819860511658591e-01)))))
	t2 := 3.999999999940941908e-01 + float64(s4*(2.222219843214978396e-01+float64(s4*1.531383769920937332e-01)))
	r := float64(s2*t1) + float64(s4*t2)
	half := float64(0.5 * float64(f*f))
	return float64(k*ln2High) - ((half - (float64(s*(half+r)) + float64(k*ln2Low))) - f)
}

// Pow returns x^y = exp(y ln x) for x >= 0; relative error about |y ln x| ulp, enough for a weight.
func Pow(x, y float64) float64 {
	if y == 0 {
		return 1
	}
	if x == 0 {
		if y < 0 {
			return math.Inf(1)
		}
		return 0
	}
	return Exp(float64(y * Log(x)))
}
