// Package bose solves the Bose gas of a growing network: energies from a law, one boson per link.
package bose

import (
	"math"
	"sort"

	"gonum.org/v1/gonum/integrate/quad"

	"preponder/sim/internal/gauss"
	"preponder/sim/law"
)

// A Spectrum is a law cut into nodes in ln eps, so that one sum gives any of its integrals for every sharpness and
// chemical potential. Panels are so short in ln eps that the nearest pole of 1/(exp(beta(eps-mu))-1), at distance pi in
// ln eps, costs less than 1e-15; they end at the knots of a law in pieces; what lies below the lowest node is added in
// closed form from the edge of the law.
type Spectrum struct {
	law       law.Law
	density   func(eps float64) float64
	edge      law.Edge
	lowest    float64 // nodes begin at ln eps = lowest
	top       float64 // and end at ln eps = top
	width     float64 // of a panel
	unit      float64 // factor on every mass
	base      float64 // the edge alone is right below here
	rule      rule
	panels    []bound   // from the top down
	knots     []float64 // in ln eps, ascending, those not reached yet
	eps, mass []float64
}

// A bound is where a panel ends: ln eps, and the nodes above it.
type bound struct {
	low   float64
	nodes int
}

// A rule is nodes and weights on [-1, 1].
type rule struct{ nodes, weights []float64 }

// fine is for figures; coarse, right to about 1e-8, for lines that are drawn.
var (
	fine   = rule{gauss.Nodes[:], gauss.Weights[:]}
	coarse = func() rule { // 8 points
		r := rule{make([]float64, 8), make([]float64, 8)}
		quad.Legendre{}.FixedLocations(r.nodes, r.weights, -1, 1)
		return r
	}()
)

// NewSpectrum prepares a law with a ground level.
func NewSpectrum(l law.Law) *Spectrum { return newSpectrum(l, fine) }

func newSpectrum(l law.Law, r rule) *Spectrum {
	s := &Spectrum{law: l, density: l.Density, edge: l.Edge(), rule: r, unit: 1}
	if often, ok := l.(law.Often); ok {
		s.density = often.Densities()
	}
	if levels, ok := l.(law.Leveled); ok {
		s.eps, s.mass = levels.Levels()
		return s
	}
	_, high := l.Support()
	if math.IsInf(high, 1) {
		high = l.Quantile(0.9)
		for l.Density(high)*high > 1e-24 {
			high *= 1.2
		}
	}
	s.top = math.Log(high)
	s.width = math.Min(1.4, 8/(1+math.Max(s.edge.Theta, 0)))
	s.lowest = s.top
	if pieced, ok := l.(law.Pieced); ok {
		for _, k := range pieced.Knots() {
			if x := math.Log(k); k > 0 && x < s.top {
				s.knots = append(s.knots, x)
			}
		}
		sort.Float64s(s.knots)
	}
	s.base = s.top - 40
	if s.edge.Below > 0 {
		s.base = math.Min(s.base, math.Log(s.edge.Below))
	}
	s.reach(s.base)
	// The nodes hold all of the law: what their masses miss of 1 is rounding that all of them share.
	s.unit = 1 / s.Mean(func(float64) float64 { return 1 })
	for i := range s.mass {
		s.mass[i] *= s.unit
	}
	s.edge.Scale *= s.unit
	return s
}

func (s *Spectrum) leveled() bool { return s.edge.Atom > 0 || s.width == 0 }

// reach extends the nodes down to ln eps <= to.
func (s *Spectrum) reach(to float64) {
	if s.leveled() {
		return
	}
	for s.lowest > to {
		end := s.lowest - s.width
		for n := len(s.knots); n > 0 && s.knots[n-1] >= s.lowest; n-- {
			s.knots = s.knots[:n-1]
		}
		if n := len(s.knots); n > 0 && s.knots[n-1] > end {
			end = s.knots[n-1]
		}
		s.panel(end)
		s.lowest = end
		s.panels = append(s.panels, bound{end, len(s.eps)})
	}
}

// narrow panels lie around kinks: one node tells their mass and place.
const narrow = 1e-8

// panel adds the nodes between ln eps = low and the lowest so far.
func (s *Spectrum) panel(low float64) {
	center, half := (s.lowest+low)/2, (s.lowest-low)/2
	add := func(x, weight float64) {
		e := math.Exp(x)
		if d := s.density(e); d > 0 {
			s.eps = append(s.eps, e)
			s.mass = append(s.mass, half*weight*d*e*s.unit)
		}
	}
	if half < narrow {
		add(center, 2)
		return
	}
	for i, x := range s.rule.nodes {
		add(center+half*x, s.rule.weights[i])
	}
}

// groundReach is how far below the smallest scale of the integrand the nodes go: the closed form used beneath is right
// to that relative size.
const groundReach = 38 // e^-38 = 3e-17

// GroundIntegral returns I(beta, mu) for mu <= 0:
//
//	I = ∫ p(eps) / (exp(beta (eps - mu)) - 1) d eps
//
// relative error <= 1e-12 where the law is smooth; +Inf at mu = 0 when the edge exponent is <= 0 or the ground level
// holds an atom. Power law: ((theta+1)/theta) D_theta(beta)/beta, D as in Abramowitz & Stegun 27.1.1.
func (s *Spectrum) GroundIntegral(beta, mu float64) float64 {
	if beta == 0 {
		if mu == 0 {
			return math.Inf(1)
		}
		panic("bose: at sharpness 0 only beta*mu has a meaning")
	}
	if s.leveled() {
		if mu == 0 {
			return math.Inf(1) // the atom at the ground level
		}
		return s.sum(beta, mu, len(s.eps))
	}
	theta := s.edge.Theta
	if mu == 0 && theta <= 0 {
		return math.Inf(1)
	}
	b := s.upTo(beta, mu)
	sum := s.sum(beta, mu, b.nodes)
	if mu == 0 {
		return sum + s.edge.Scale*math.Exp(theta*b.low)/(beta*theta)
	}
	return sum + s.edge.Scale*math.Exp((theta+1)*b.low)/(theta+1)/math.Expm1(-beta*mu)
}

// upTo returns the panel down to which nodes are needed: far below every scale of the integrand.
func (s *Spectrum) upTo(beta, mu float64) bound { return s.within(beta, mu, groundReach) }

// within is upTo with another distance below the smallest scale.
func (s *Spectrum) within(beta, mu, distance float64) bound {
	if s.leveled() {
		return bound{nodes: len(s.eps)}
	}
	scale := math.Min(-math.Log(beta), s.top)
	if mu < 0 {
		scale = math.Min(scale, math.Log(-mu))
	}
	to := math.Min(scale-distance, s.base)
	s.reach(to)
	return s.panels[sort.Search(len(s.panels), func(i int) bool { return s.panels[i].low <= to })]
}

// sum returns the sum over the first n nodes.
func (s *Spectrum) sum(beta, mu float64, n int) float64 {
	var t total
	for i, e := range s.eps[:n] {
		t.add(i, s.mass[i]/math.Expm1(beta*(e-mu)))
	}
	return t.value()
}

// A total adds up blocks of terms, and the blocks by Neumaier's compensated summation: the last digits decide mu near the
// transition.
type total struct{ block, sum, rest float64 }

func (t *total) add(i int, v float64) {
	t.block += v
	if i&15 == 15 {
		t.close()
	}
}

func (t *total) close() {
	v := t.sum + t.block
	if math.Abs(t.sum) >= math.Abs(t.block) {
		t.rest += (t.sum - v) + t.block
	} else {
		t.rest += (t.block - v) + t.sum
	}
	t.sum, t.block = v, 0
}

func (t *total) value() float64 {
	t.close()
	return t.sum + t.rest
}

// A heated spectrum is one at a sharpness: exp(beta eps) - 1 of the nodes is kept, so that another mu costs no function,
//
//	exp(x + y) - 1 = a + b + a b,   a = exp(x) - 1,   b = exp(y) - 1,
//
// without cancellation, since none of the terms is negative.
type heated struct {
	*Spectrum
	beta float64
	up   []float64 // exp(beta eps) - 1
}

func (s *Spectrum) heat(beta float64) *heated { return &heated{Spectrum: s, beta: beta} }

// fill brings the nodes up to n.
func (h *heated) fill(n int) {
	for i := len(h.up); i < n; i++ {
		h.up = append(h.up, math.Expm1(h.beta*h.eps[i]))
	}
}

// warm raises the sharpness by step, where by holds exp(step eps) - 1 of the nodes there were.
func (h *heated) warm(step float64, by []float64) {
	h.beta += step
	h.up = h.up[:min(len(h.up), len(by))]
	for i, b := range by[:len(h.up)] {
		a := h.up[i]
		h.up[i] = a + b + a*b
	}
}

// vast is where 1/(exp(x)-1) is 0 to rounding and its square would overflow.
const vast = 1e150

// integralAndSlope returns I and its derivative with respect to ln(-mu), mu < 0; the slope is always negative.
func (h *heated) integralAndSlope(mu float64) (i, slope float64) {
	b := h.upTo(h.beta, mu)
	h.fill(b.nodes)
	y := math.Expm1(-h.beta * mu)
	var t total
	for k, a := range h.up[:b.nodes] {
		u := a + y + a*y
		if u > vast {
			continue
		}
		n := h.mass[k] / u
		t.add(k, n)
		slope += n + n/u
	}
	if !h.leveled() {
		n := h.edge.Scale * math.Exp((h.edge.Theta+1)*b.low) / (h.edge.Theta + 1) / y
		t.add(15, n)
		slope += n + n/y
	}
	return t.value(), h.beta * mu * slope
}

// gap returns I(beta, 0) - I(beta, mu), mu < 0, and its derivative with respect to ln(-mu), for a positive edge exponent.
// Half the distance is enough, since what lies below is known to second order.
func (h *heated) gap(mu float64) (gap, slope float64) {
	b := h.within(h.beta, mu, groundReach/2)
	h.fill(b.nodes)
	y := math.Expm1(-h.beta * mu)
	for k, a := range h.up[:b.nodes] {
		u := a + y + a*y
		if u > vast {
			continue
		}
		n := h.mass[k] / u
		gap += n * (1 + a) * (y / a)
		slope += n + n/u
	}
	theta := h.edge.Theta
	below := h.edge.Scale * math.Exp((theta+1)*b.low) / (theta + 1) / y
	gap += h.edge.Scale*math.Exp(theta*b.low)/(h.beta*theta) - below
	slope += below + below/y
	return gap, -h.beta * mu * slope
}

// groundAndSlope returns I(beta, 0) and its derivative with respect to ln beta, for a positive edge exponent.
func (s *Spectrum) groundAndSlope(beta float64) (i, slope float64) {
	b := s.upTo(beta, 0)
	var t total
	for k, e := range s.eps[:b.nodes] {
		x := beta * e
		u := math.Expm1(x)
		if u > vast {
			continue
		}
		n := s.mass[k] / u
		t.add(k, n)
		slope -= x * (n + n/u)
	}
	n := s.edge.Scale * math.Exp(s.edge.Theta*b.low) / (beta * s.edge.Theta)
	t.add(15, n)
	return t.value(), slope - n
}

// slopes returns dI/dlnbeta and dI/dbmu at fixed beta mu = bmu < 0, or at bmu = 0 where it is finite:
//
//	-∫ p x n (n+1),   ∫ p n (n+1),   x = beta eps, n = 1/(exp(x - bmu) - 1).
func (s *Spectrum) slopes(beta, bmu float64) (byBeta, byMu float64) {
	for k, e := range s.eps {
		x := beta * e
		if x-bmu > 700 {
			continue
		}
		u := math.Expm1(x - bmu)
		w := s.mass[k] / u * (u + 1) / u
		byBeta -= w * x
		byMu += w
	}
	if !s.leveled() && bmu < 0 {
		u := math.Expm1(-bmu)
		byMu += s.edge.Scale * math.Exp((s.edge.Theta+1)*s.lowest) / (s.edge.Theta + 1) / u * (u + 1) / u
	}
	return byBeta, byMu
}

// Mean returns E[g(eps)] over the law.
func (s *Spectrum) Mean(g func(eps float64) float64) float64 {
	sum := 0.0
	for i, e := range s.eps {
		sum += s.mass[i] * g(e)
	}
	if !s.leveled() {
		sum += s.edge.Scale * math.Exp((s.edge.Theta+1)*s.lowest) / (s.edge.Theta + 1) * g(0)
	}
	return sum
}
