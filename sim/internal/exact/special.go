package exact

import "math"

// LogGamma returns ln Gamma(x), x > 0, absolute error about 1e-14 (1 + |value|): the recurrence lifts x past 15, then
// Stirling's series (Abramowitz & Stegun 6.1.41).
func LogGamma(x float64) float64 {
	shift := 0.0
	for x < 15 {
		shift += Log(x)
		x++
	}
	z := 1 / float64(x*x)
	series := 1.0 / 1188
	for _, c := range [...]float64{-1.0 / 1680, 1.0 / 1260, -1.0 / 360, 1.0 / 12} {
		series = float64(series*z) + c
	}
	return float64((x-0.5)*Log(x)) - x + 0.91893853320467274178 + series/x - shift
}

// Beta returns the regularised incomplete beta function I_x(a, b) where y = 1-x is given by the caller, so that neither
// end loses digits. Continued fraction 26.5.8 of Abramowitz & Stegun by Lentz's method.
func Beta(a, b, x, y float64) float64 {
	if x <= 0 {
		return 0
	}
	if y <= 0 {
		return 1
	}
	if x > (a+1)/(a+b+2) {
		return 1 - Beta(b, a, y, x)
	}
	front := Exp(float64(a*Log(x)) + float64(b*Log(y)) + LogGamma(a+b) - LogGamma(a) - LogGamma(b))
	c, d := 1.0, 1/guard(1-float64((a+b)*x)/(a+1))
	h := d
	for i := 1; i < 2000; i++ {
		m := float64(i)
		even := float64(float64(m*(b-m))*x) / float64((a+2*m-1)*(a+2*m))
		d = 1 / guard(1+float64(even*d))
		c = guard(1 + even/c)
		h = float64(h * float64(d*c))
		odd := -float64(float64((a+m)*(a+b+m))*x) / float64((a+2*m)*(a+2*m+1))
		d = 1 / guard(1+float64(odd*d))
		c = guard(1 + odd/c)
		step := float64(d * c)
		h = float64(h * step)
		if math.Abs(step-1) < 3e-16 {
			break
		}
	}
	return float64(front*h) / a
}

// Gamma returns the regularised lower incomplete gamma function P(a, x): series 6.5.29 of Abramowitz & Stegun below
// x = a+1, continued fraction 6.5.31 above.
func Gamma(a, x float64) float64 {
	if x <= 0 {
		return 0
	}
	front := Exp(float64(a*Log(x)) - x - LogGamma(a))
	if x < a+1 {
		term := 1 / a
		sum := term
		for n := 1.0; n < 5000 && term > sum*1e-17; n++ {
			term = float64(term*x) / (a + n)
			sum += term
		}
		return float64(front * sum)
	}
	b := x + 1 - a
	c, d := 1/1e-300, 1/b
	h := d
	for i := 1.0; i < 5000; i++ {
		an := -float64(i * (i - a))
		b += 2
		d = 1 / guard(float64(an*d)+b)
		c = guard(b + an/c)
		step := float64(d * c)
		h = float64(h * step)
		if math.Abs(step-1) < 3e-16 {
			break
		}
	}
	return 1 - float64(front*h)
}

func guard(x float64) float64 {
	if math.Abs(x) < 1e-300 {
		return 1e-300
	}
	return x
}

// Normal returns the standard normal quantile for 0 < u < 1: Acklam's rational start (from memory, relative error
// 1e-9), then one Halley step with the distribution function from the incomplete gamma function.
func Normal(u float64) float64 {
	if u <= 0 {
		return math.Inf(-1)
	}
	if u >= 1 {
		return math.Inf(1)
	}
	if u > 0.5 {
		return -Normal(1 - u)
	}
	var x float64
	if u < 0.02425 {
		q := math.Sqrt(float64(-2 * Log(u)))
		x = horner(q, -7.784894002430293e-03, -3.223964580411365e-01, -2.400758277161838, -2.549732539343734, 4.374664141464968, 2.938163982698783) /
			horner(q, 7.784695709041462e-03, 3.224671290700398e-01, 2.445134137142996, 3.754408661907416, 1)
	} else {
		q := u - 0.5
		r := float64(q * q)
		x = float64(q*horner(r, -3.969683028665376e+01, 2.209460984245205e+02, -2.759285104469687e+02, 1.383577518672690e+02, -3.066479806614716e+01, 2.506628277459239)) /
			horner(r, -5.447609879822406e+01, 1.615858368580409e+02, -1.556989798598866e+02, 6.680131188771972e+01, -1.328068155288572e+01, 1)
	}
	e := float64(0.5*(1-Gamma(0.5, float64(x*x)/2))) - u
	step := float64(float64(e*2.5066282746310002) * Exp(float64(x*x)/2))
	return x - step/(1+float64(x*step)/2)
}

func horner(x float64, c ...float64) float64 {
	s := 0.0
	for _, a := range c {
		s = float64(s*x) + a
	}
	return s
}
