// Package root finds zeros of continuous functions between two bounds.
package root

import (
	"errors"
	"math"
)

var (
	// ErrNoConvergence means the bracket was still wider than asked after the last step.
	ErrNoConvergence = errors.New("no convergence")
	// ErrNoBracket means the function has the same sign at both ends.
	ErrNoBracket = errors.New("no change of sign")
)

// steps bounds the work: bisection alone halves 1e300 below any float64 in fewer.
const steps = 300

// Brent returns x in [a, b] with f(x) = 0, |error| <= tol + 4 ulp. Brent (1973), Algorithms for Minimization without
// Derivatives, chapter 4. The best x so far comes with the error.
func Brent(f func(float64) float64, a, b, tol float64) (float64, error) {
	fa, fb := f(a), f(b)
	if fa == 0 {
		return a, nil
	}
	if fb == 0 {
		return b, nil
	}
	if (fa > 0) == (fb > 0) || math.IsNaN(fa) || math.IsNaN(fb) {
		return a, ErrNoBracket
	}
	c, fc := a, fa
	d := b - a
	e := d
	for range steps {
		if (fb > 0) == (fc > 0) {
			c, fc = a, fa
			d = b - a
			e = d
		}
		if math.Abs(fc) < math.Abs(fb) {
			a, b, c = b, c, b
			fa, fb, fc = fb, fc, fb
		}
		tight := 4e-16*math.Abs(b) + tol/2
		half := (c - b) / 2
		if math.Abs(half) <= tight || fb == 0 {
			return b, nil
		}
		if math.Abs(e) < tight || math.Abs(fa) <= math.Abs(fb) {
			d, e = half, half
		} else if d, e = interpolate(a, b, c, fa, fb, fc, half, tight, d, e); e == 0 {
			d, e = half, half
		}
		a, fa = b, fb
		if math.Abs(d) > tight {
			b += d
		} else {
			b += math.Copysign(tight, half)
		}
		fb = f(b)
	}
	return b, ErrNoConvergence
}

// interpolate returns the step by inverse quadratic or secant interpolation and the step before it, or zeros where
// bisection is safer.
func interpolate(a, b, c, fa, fb, fc, half, tight, d, e float64) (float64, float64) {
	s := fb / fa
	var p, q float64
	if a == c {
		p, q = 2*half*s, 1-s
	} else {
		q = fa / fc
		r := fb / fc
		p = s * (2*half*q*(q-r) - (b-a)*(r-1))
		q = (q - 1) * (r - 1) * (s - 1)
	}
	if p > 0 {
		q = -q
	}
	p = math.Abs(p)
	if 2*p < math.Min(3*half*q-math.Abs(tight*q), math.Abs(e*q)) {
		return p / q, d
	}
	return 0, 0
}
