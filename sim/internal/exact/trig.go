package exact

import "math"

// halfPi in three parts, as FDLIBM e_rem_pio2.c has it.
const (
	halfPi1 = 1.57079632673412561417e+00
	halfPi2 = 6.07710050630396597660e-11
	halfPi3 = 2.02226624879595063154e-21
)

// turn returns r with x = q pi/2 + r, |r| <= pi/4, and q modulo 4; good to an ulp or so for |x| <= 1e6.
func turn(x float64) (r float64, q int) {
	k := math.Floor(float64(x*(2/math.Pi)) + 0.5)
	r = x - float64(k*halfPi1)
	r -= float64(k * halfPi2)
	r -= float64(k * halfPi3)
	return r, int(math.Mod(k, 4)+4) % 4
}

// Sin returns sin x for |x| <= 1e6, NaN beyond. Series of FDLIBM k_sin.c and k_cos.c (Sun Microsystems 1993).
func Sin(x float64) float64 {
	if !(math.Abs(x) <= 1e6) {
		return math.NaN()
	}
	r, q := turn(x)
	return [4]func(float64) float64{sine, cosine, func(r float64) float64 { return -sine(r) }, func(r float64) float64 { return -cosine(r) }}[q](r)
}

// Cos returns cos x for |x| <= 1e6, NaN beyond.
func Cos(x float64) float64 {
	if !(math.Abs(x) <= 1e6) {
		return math.NaN()
	}
	r, q := turn(x)
	return [4]func(float64) float64{cosine, func(r float64) float64 { return -sine(r) }, func(r float64) float64 { return -cosine(r) }, sine}[q](r)
}

func sine(r float64) float64 {
	z := float64(r * r)
	return r + float64(float64(r*z)*horner(z, 1.58969099521155010221e-10, -2.50507602534068634195e-08, 2.75573137070700676789e-06, -1.98412698298579493134e-04, 8.33333333332248946124e-03, -1.66666666666666324348e-01))
}

func cosine(r float64) float64 {
	z := float64(r * r)
	return 1 - (float64(0.5*z) - float64(float64(z*z)*horner(z, -1.13596475577881948265e-11, 2.08757232129817482790e-09, -2.75573143513906633035e-07, 2.48015872894767294178e-05, -1.38888888888741095749e-03, 4.16666666666666019037e-02)))
}
