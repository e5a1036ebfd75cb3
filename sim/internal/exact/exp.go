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

// roots[j] is 2^(j/64), to the nearest float64.
var roots = [64]float64{
	1.0, 1.0108892860517005, 1.0218971486541166, 1.0330248790212284, 1.0442737824274138, 1.0556451783605572, 1.0671404006768237, 1.0787607977571199,
	1.0905077326652577, 1.102382583307841, 1.1143867425958924, 1.1265216186082418, 1.1387886347566916, 1.1511892299529827, 1.1637248587775775, 1.1763969916502812,
	1.189207115002721, 1.202156731452703, 1.215247359980469, 1.22848053610687, 1.241857812073484, 1.255380757024691, 1.2690509571917332, 1.2828700160787783,
	1.2968395546510096, 1.3109612115247644, 1.3252366431597413, 1.339667524053303, 1.3542555469368927, 1.3690024229745905, 1.383909881963832, 1.3989796725383112,
	1.4142135623730951, 1.42961333839197, 1.4451808069770467, 1.460917794180647, 1.4768261459394993, 1.4929077282912648, 1.5091644275934228, 1.5255981507445384,
	1.5422108254079407, 1.559004400237837, 1.5759808451078865, 1.593142151342267, 1.6104903319492543, 1.6280274218573478, 1.645755478153965, 1.6636765803267364,
	1.681792830507429, 1.7001063537185235, 1.718619298122478, 1.7373338352737062, 1.7562521603732995, 1.7753764925265212, 1.7947090750031072, 1.8142521755003989,
	1.8340080864093424, 1.8539791250833855, 1.8741676341103, 1.8945759815869656, 1.9152065613971474, 1.9360617934922943, 1.9571441241754002, 1.978456026387951,
}

// shift added to a small number rounds it to a whole one, which then stands in the last bits of the sum.
const shift = 3 << 51

// Exp returns e^x, error below 1 ulp: x = n ln(2)/64 + r, |r| <= ln(2)/128, then the Taylor series of e^r and a table of
// 2^(n/64) (Tang, ACM Trans. Math. Softw. 15, 144, 1989).
func Exp(x float64) float64 {
	if !(x > -700 && x < 700) {
		return farExp(x)
	}
	shifted := float64(x*(64*log2E)) + shift
	n := shifted - shift
	r := (x - float64(n*(ln2High/64))) - float64(n*(ln2Low/64))
	p := float64(r*(1.0/120)) + 1.0/24
	p = float64(r*p) + 1.0/6
	p = float64(r*p) + 0.5
	p = float64(float64(r*r)*p) + r
	k := int64(math.Float64bits(shifted))
	t := roots[k&63]
	return (t + float64(t*p)) * math.Float64frombits(uint64(k<<46>>52+1023)<<52)
}

// Weights sets w to the upper half of exp(-beta (eps - unit)) as a float32, rounded down, for exponents up to 88; what lies
// below exp(-86) becomes that. Before it is rounded the value is right to 1e-6, from below and by 3e-7 at least.
func Weights(w []uint16, eps []float64, beta, unit float64) {
	for i, e := range eps[:len(w)] {
		x := beta * (unit - e)
		if x < -86 {
			x = -86
		}
		shifted := x*(64*log2E) + shift
		n := shifted - shift
		r := x - n*(math.Ln2/64)
		p := r + r*r*(0.5+r*(1.0/6))
		k := int64(math.Float64bits(shifted))
		t := roots[k&63] * (1 - 5e-7)
		w[i] = uint16(math.Float32bits(float32((t+t*p)*math.Float64frombits(uint64(k<<46>>52+1023)<<52))) >> 16)
	}
}

// farExp is Exp where the result is near the ends of the range, or past them.
func farExp(x float64) float64 {
	switch {
	case math.IsNaN(x) || math.IsInf(x, 1):
		return x
	case x > 709.782712893384:
		return math.Inf(1)
	case x < -745.2:
		return 0
	}
	half := Exp(x / 2)
	return float64(half * half)
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
