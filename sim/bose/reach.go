package bose

import (
	"math"

	"preponder/sim/law"
)

// A Reach says how far networks of finite size are from endless growth, by the continuum theory started from one member:
// with u(eps) the tickets held at energy eps, per member of a large network and per unit of the law,
//
//	du/dx = on(eps, x) (m + a + m r share) + m (1 - r) exp(-beta eps) u/z - u,   z = ∫ p exp(-beta eps) u d eps,
//
// x the logarithm of the size. The pull z/(m (1-r)) tends to exp(-beta mu). Two ways to let members of an energy begin
// enclose what single networks do: late, when the first of them is expected (size exp(-gamma)/P(eps), gamma Euler's
// constant), and early, in proportion to the chance that one has come. Derived by us; held against grown networks in the
// tests, where it is good to about a tenth: an order of magnitude in size.
type Reach struct {
	late, early []float64 // pull at ln size = k*reachStep
	target      float64
}

// reachStep in ln size; sizes up to ReachMost are followed.
const (
	reachStep  = 0.05
	ReachMost  = 1e30
	eulerGamma = 0.5772156649015329
)

// NewReach follows growth under the law at sharpness beta > 0, whose endless growth has the given beta mu.
func NewReach(l law.Law, beta, betaMu float64, rule Rule) *Reach {
	s := NewSpectrum(l)
	if !s.leveled() {
		s = newSpectrum(l, coarse)
	}
	var fit, mass, begin []float64
	total := 0.0
	for i, e := range s.eps {
		below := l.Cumulative(e)
		if s.leveled() {
			below = s.mass[i]
		}
		// Members rarer than one in the largest size have no part in it.
		if s.mass[i] > 0 && below*ReachMost > 0.1 {
			fit, mass, begin = append(fit, math.Exp(-beta*e)), append(mass, s.mass[i]), append(begin, -math.Log(below)-eulerGamma)
			total += s.mass[i]
		}
	}
	r := &Reach{target: math.Exp(-betaMu)}
	r.late = follow(fit, mass, begin, rule, func(gap float64) float64 {
		if gap > 0 {
			return 0
		}
		return 1
	})
	r.early = follow(fit, mass, begin, rule, func(gap float64) float64 {
		if gap < -4 {
			return 1
		}
		return -math.Expm1(-math.Exp(-gap - eulerGamma))
	})
	return r
}

// follow integrates to the largest size by Heun's method and returns the pull at every step.
func follow(fit, mass, begin []float64, rule Rule, on func(gap float64) float64) (pulls []float64) {
	n := len(fit)
	m, open := rule.Links, rule.OpenShare
	u, a, b, mid := make([]float64, n), make([]float64, n), make([]float64, n), make([]float64, n)
	slope := func(u []float64, x float64, out []float64) (pull float64) {
		z := 0.0
		for i := range u {
			z += mass[i] * fit[i] * u[i]
		}
		rate := 0.0
		if z > 0 {
			rate = m * (1 - open) / z
		}
		for i := range u {
			s := on(begin[i] - x)
			out[i] = s*(m+rule.HeadStart+m*open) + rate*fit[i]*u[i] - u[i]
		}
		return z / (m * (1 - open))
	}
	for i := range u {
		u[i] = (m + rule.HeadStart) * on(begin[i])
	}
	most := math.Log(ReachMost)
	for x := 0.0; x <= most; x += reachStep {
		pulls = append(pulls, slope(u, x, a))
		for i := range mid {
			mid[i] = u[i] + reachStep*a[i]
		}
		slope(mid, x+reachStep, b)
		for i := range u {
			u[i] += reachStep * (a[i] + b[i]) / 2
		}
	}
	return pulls
}

// Pull returns between what pulls, Z/(m (1-r) N), a network of n members is expected, over that of endless growth.
func (r *Reach) Pull(n float64) (low, high float64) {
	k := max(0, min(int(math.Log(n)/reachStep), len(r.late)-1))
	a, b := r.late[k]/r.target, r.early[k]/r.target
	return math.Min(a, b), math.Max(a, b)
}

// Within returns between what sizes the pull comes, for good, within a share tol of that of endless growth; +Inf past
// ReachMost.
func (r *Reach) Within(tol float64) (early, late float64) {
	a, b := r.since(r.early, tol), r.since(r.late, tol)
	return math.Min(a, b), math.Max(a, b)
}

func (r *Reach) since(pulls []float64, tol float64) float64 {
	for k := len(pulls) - 1; k >= 0; k-- {
		if math.Abs(pulls[k]/r.target-1) > tol {
			if k == len(pulls)-1 {
				return math.Inf(1)
			}
			return math.Exp(float64(k+1) * reachStep)
		}
	}
	return 1
}
