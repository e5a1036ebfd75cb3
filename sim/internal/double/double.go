// Package double computes with sums of two float64, about 31 digits, for the few figures that are a small difference of
// large ones. Products that could be fused with a sum are converted explicitly, as in package exact.
package double

import (
	"math"

	"preponder/sim/internal/exact"
)

// A Number is the unevaluated sum hi + lo, |lo| at most half a unit in the last place of hi. Its range is that of float64
// up to about 1e290; past it results are NaN.
type Number struct{ hi, lo float64 }

// Constants to 31 digits.
var (
	Ln2 = Number{0.6931471805599453, 2.3190468138462996e-17}
	Pi  = Number{3.141592653589793, 1.2246467991473532e-16}
	One = Number{1, 0}
)

// Of returns x.
func Of(x float64) Number { return Number{hi: x} }

// Float returns the nearest float64.
func (a Number) Float() float64 { return a.hi }

// Finite tells whether a is a number.
func (a Number) Finite() bool { return !math.IsNaN(a.hi+a.lo) && !math.IsInf(a.hi, 0) }

// twoSum returns a + b and its rounding error (Knuth, The Art of Computer Programming, vol. 2, 4.2.2, theorem B).
func twoSum(a, b float64) (s, e float64) {
	s = a + b
	v := s - a
	return s, (a - (s - v)) + (b - v)
}

// quick is twoSum for |a| >= |b|.
func quick(a, b float64) Number {
	s := a + b
	return Number{s, b - (s - a)}
}

// split cuts a into two halves of 26 bits (Dekker, Numer. Math. 18, 224, 1971).
func split(a float64) (hi, lo float64) {
	t := float64(134217729 * a)
	hi = t - (t - a)
	return hi, a - hi
}

// twoProduct returns a b and its rounding error.
func twoProduct(a, b float64) (p, e float64) {
	p = float64(a * b)
	ah, al := split(a)
	bh, bl := split(b)
	return p, ((float64(ah*bh) - p) + float64(ah*bl) + float64(al*bh)) + float64(al*bl)
}

func (a Number) Plus(b Number) Number {
	s, e := twoSum(a.hi, b.hi)
	t, f := twoSum(a.lo, b.lo)
	r := quick(s, e+t)
	return quick(r.hi, r.lo+f)
}

func (a Number) Minus(b Number) Number { return a.Plus(b.Negated()) }
func (a Number) Negated() Number       { return Number{-a.hi, -a.lo} }

func (a Number) Times(b Number) Number {
	p, e := twoProduct(a.hi, b.hi)
	return quick(p, e+(float64(a.hi*b.lo)+float64(a.lo*b.hi)))
}

// By returns a b.
func (a Number) By(b float64) Number {
	p, e := twoProduct(a.hi, b)
	return quick(p, e+float64(a.lo*b))
}

// Over returns a/b by long division.
func (a Number) Over(b Number) Number {
	q := a.hi / b.hi
	r := a.Minus(b.By(q))
	q2 := r.hi / b.hi
	r = r.Minus(b.By(q2))
	return quick(q, q2).Plus(Of(r.hi / b.hi))
}

// Scaled returns a 2^k, exact.
func (a Number) Scaled(k int) Number { return Number{math.Ldexp(a.hi, k), math.Ldexp(a.lo, k)} }

// Less tells whether a < b.
func (a Number) Less(b Number) bool { return a.hi < b.hi || a.hi == b.hi && a.lo < b.lo }

// Abs returns |a|.
func (a Number) Abs() Number {
	if a.hi < 0 {
		return a.Negated()
	}
	return a
}

// Sqrt returns the square root by one step of Newton's method.
func (a Number) Sqrt() Number {
	if a.hi <= 0 {
		return Of(math.Sqrt(a.hi))
	}
	q := math.Sqrt(a.hi)
	p, e := twoProduct(q, q)
	return quick(q, (a.Minus(Number{p, e}).hi)/(2*q))
}

// inverse[n] is 1/n!.
var inverse = func() (f [30]Number) {
	f[0] = One
	for n := 1; n < len(f); n++ {
		f[n] = f[n-1].Over(Of(float64(n)))
	}
	return f
}()

// roots[j] is 2^(j/64).
var roots = func() (t [64]Number) {
	t[0] = One
	root := Of(2)
	for bit := 32; bit >= 1; bit /= 2 {
		root = root.Sqrt()
		for j := bit; j < 64; j += bit {
			if j&bit != 0 && j&(bit-1) == 0 {
				t[j] = t[j&^bit].Times(root)
			}
		}
	}
	return t
}()

// reduced returns 2^(n/64), as a table entry and a power of 2, and s = e^r - 1, with x = n ln(2)/64 + r: the Taylor series,
// whose terms past the sixth are too small for their second half to count.
func reduced(x Number) (root Number, k int, s Number) {
	n := int(math.Floor(x.hi*(64/math.Ln2) + 0.5))
	r := x.Minus(Ln2.By(float64(n)).Scaled(-6))
	rest := 0.0
	for i := 12; i >= 7; i-- {
		rest = float64(rest*r.hi) + inverse[i].hi
	}
	s = Of(float64(rest * r.hi))
	for i := 6; i >= 1; i-- {
		s = s.Plus(inverse[i]).Times(r)
	}
	return roots[n&63], n >> 6, s
}

// Exp returns e^a.
func (a Number) Exp() Number {
	switch {
	case a.hi > 700:
		return Of(exact.Exp(a.hi))
	case a.hi < -740:
		return Number{}
	}
	root, k, s := reduced(a)
	return root.Plus(root.Times(s)).Scaled(k)
}

// Expm1 returns e^a - 1 without cancellation.
func (a Number) Expm1() Number {
	if a.hi > 700 || a.hi < -80 {
		return a.Exp().Minus(One)
	}
	root, k, s := reduced(a)
	if k == 0 && root == One {
		return s
	}
	root = root.Scaled(k)
	return root.Times(s).Plus(root.Minus(One))
}

// Log returns ln a by one step of Newton's method.
func (a Number) Log() Number {
	y := exact.Log(a.hi)
	if math.IsInf(y, 0) || math.IsNaN(y) {
		return Of(y)
	}
	m, k := math.Frexp(a.hi)
	f := Number{m, math.Ldexp(a.lo, -k)}
	z := Of(exact.Log(m))
	z = z.Plus(f.Times(z.Negated().Exp()).Minus(One))
	return z.Plus(Ln2.By(float64(k)))
}

// Power returns a^b for a > 0; whole powers up to 64 by multiplication, also of a <= 0.
func (a Number) Power(b Number) Number {
	if n := math.Abs(b.hi); b.lo == 0 && n == math.Floor(n) && n <= 64 {
		p, q := One, a
		for k := int(n); k > 0; k >>= 1 {
			if k&1 == 1 {
				p = p.Times(q)
			}
			if k > 1 {
				q = q.Times(q)
			}
		}
		if b.hi < 0 {
			return One.Over(p)
		}
		return p
	}
	if a.hi <= 0 {
		return Of(math.Pow(a.hi, b.hi)) // 0, infinite or not a number
	}
	return b.Times(a.Log()).Exp()
}

// SinCos returns sin a and cos a: a is reduced to a quarter of a half turn or less, then the Taylor series.
func (a Number) SinCos() (sin, cos Number) {
	half := Pi.Scaled(-1)
	q := math.Floor(a.hi/half.hi + 0.5)
	x := a.Minus(half.By(q))
	square := x.Times(x)
	const far = 16 // terms from here on are too small for their second half to count
	s, c := 0.0, 0.0
	for n := len(inverse) - 2; n >= far; n -= 2 {
		s = inverse[n+1].hi - float64(s*square.hi)
		c = inverse[n].hi - float64(c*square.hi)
	}
	sin, cos = Of(s), Of(c)
	for n := far - 2; n >= 0; n -= 2 {
		sin = inverse[n+1].Minus(sin.Times(square))
		cos = inverse[n].Minus(cos.Times(square))
	}
	sin = sin.Times(x)
	switch int(math.Mod(q, 4)+4) % 4 {
	case 1:
		return cos, sin.Negated()
	case 2:
		return sin.Negated(), cos.Negated()
	case 3:
		return cos.Negated(), sin
	}
	return sin, cos
}
