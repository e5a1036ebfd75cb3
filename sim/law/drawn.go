package law

import (
	"fmt"
	"math"
	"sort"
)

// A Knot of a drawn law: a density, up to a common factor, at an energy.
type Knot struct{ Eps, Density float64 }

// Drawn is a law whose density runs in straight lines from knot to knot. Made by NewDrawn, which moves the lowest energy
// of positive density to 0 and normalises.
type Drawn struct {
	eps, density []float64
	before       []float64 // mass below each knot
	raw, height  []float64 // as given
}

// A Pieced law is smooth only between its knots.
type Pieced interface {
	// Knots returns the energies, ascending, at which the density or a derivative may jump.
	Knots() []float64
}

// NewDrawn returns the law through the knots, or an error that names the first one that cannot be. Leading and trailing
// stretches of density 0 are cut off.
func NewDrawn(knots []Knot) (Drawn, error) {
	if len(knots) < 2 {
		return Drawn{}, fmt.Errorf("a drawn law needs at least 2 knots; this one has %d", len(knots))
	}
	for i, k := range knots {
		if !(math.Abs(k.Eps) <= 1e6) {
			return Drawn{}, fmt.Errorf("knot %d lies at energy %g; energies are from -1e6 to 1e6", i+1, k.Eps)
		}
		if !(k.Density >= 0 && k.Density <= 1e12) {
			return Drawn{}, fmt.Errorf("knot %d has density %g; densities are from 0 to 1e12", i+1, k.Density)
		}
		if i > 0 && !(k.Eps > knots[i-1].Eps && k.Eps-knots[i-1].Eps >= 1e-300) {
			return Drawn{}, fmt.Errorf("knot %d lies at energy %g, not above the one before it at %g", i+1, k.Eps, knots[i-1].Eps)
		}
	}
	for len(knots) >= 2 && knots[0].Density == 0 && knots[1].Density == 0 {
		knots = knots[1:]
	}
	for n := len(knots); n >= 2 && knots[n-1].Density == 0 && knots[n-2].Density == 0; n-- {
		knots = knots[:n-1]
	}
	p := Drawn{}
	total := 0.0
	for i, k := range knots {
		p.eps = append(p.eps, k.Eps-knots[0].Eps)
		p.density = append(p.density, k.Density)
		p.raw, p.height = append(p.raw, k.Eps), append(p.height, k.Density)
		if i > 0 {
			total += float64((p.eps[i] - p.eps[i-1]) * (p.density[i] + p.density[i-1]) / 2)
		}
		p.before = append(p.before, total)
	}
	if !(total > 0) || math.IsInf(total, 0) {
		return Drawn{}, fmt.Errorf("the drawn law has density 0 everywhere; lift at least one knot")
	}
	for i := range p.density {
		p.density[i] /= total
		p.before[i] /= total
	}
	return p, nil
}

// piece returns the index of the piece that holds eps.
func (p Drawn) piece(eps float64) int {
	return max(0, min(sort.SearchFloat64s(p.eps, eps)-1, len(p.eps)-2))
}

func (p Drawn) slope(i int) float64 {
	return (p.density[i+1] - p.density[i]) / (p.eps[i+1] - p.eps[i])
}

func (p Drawn) Density(eps float64) float64 {
	if eps < 0 || eps > p.eps[len(p.eps)-1] {
		return 0
	}
	i := p.piece(eps)
	w := p.eps[i+1] - p.eps[i]
	t := (eps - p.eps[i]) / w
	return p.density[i]*(1-t) + p.density[i+1]*t
}

func (p Drawn) Cumulative(eps float64) float64 {
	switch last := len(p.eps) - 1; {
	case eps <= 0:
		return 0
	case eps >= p.eps[last]:
		return 1
	}
	i := p.piece(eps)
	h := eps - p.eps[i]
	return p.before[i] + h*(p.density[i]+p.slope(i)*h/2)
}

// Quantile solves before + p h + s h^2/2 = u for h in its piece, in the form that loses no digits.
func (p Drawn) Quantile(u float64) float64 {
	i := max(0, min(sort.SearchFloat64s(p.before, u)-1, len(p.eps)-2))
	rest, d := math.Max(0, u-p.before[i]), p.density[i]
	root := math.Sqrt(math.Max(0, float64(d*d)+2*float64(p.slope(i)*rest)))
	if d+root == 0 {
		return p.eps[i]
	}
	return math.Min(p.eps[i+1], p.eps[i]+2*rest/(d+root))
}

func (p Drawn) Support() (low, high float64) { return 0, p.eps[len(p.eps)-1] }

func (p Drawn) Edge() Edge {
	d, s := p.density[0], p.slope(0)
	if d > 0 {
		return Edge{Theta: 0, Scale: d, Below: 1e-17 * math.Min(p.eps[1], d/math.Max(math.Abs(s), 1e-300))}
	}
	return Edge{Theta: 1, Scale: s, Below: p.eps[1]}
}

// Knots returns the energies of the knots.
func (p Drawn) Knots() []float64 { return p.eps }

// Mean returns the mean energy: the sum over pieces of w (p0 (2 e0 + e1) + p1 (e0 + 2 e1))/6.
func (p Drawn) Mean() float64 {
	sum := 0.0
	for i := range len(p.eps) - 1 {
		a, b := p.eps[i], p.eps[i+1]
		sum += (b - a) * (p.density[i]*(2*a+b) + p.density[i+1]*(a+2*b)) / 6
	}
	return sum
}
