package law

import (
	"fmt"
	"math"
	"sync"

	"preponder/sim/internal/double"
	"preponder/sim/internal/exact"
	"preponder/sim/internal/gauss"
)

// Formula is a law whose density is proportional to an expression in the energy e on [0, top]. Made by NewFormula.
type Formula struct {
	text    string
	f       expression
	top     float64
	total   float64
	panels  *panels
	breaks  []float64
	unsure  float64
	missed  float64 // mass over energy that the panels leave open
	largest float64
	// the leading term of the density times e, in 31 digits, and ln e below which it is right; NaN where it was not found
	theta, scale double.Number
	sure         float64
	close        func() (Close, bool) // closely, once
}

// recent keeps the formulas made last: while something else is dragged the same one is asked for in every frame.
var recent struct {
	sync.Mutex
	list []Formula
}

const mostRecent = 8

// mostPanels a formula is cut into, and mostCalls of functions at one point of each: a formula is made or refused within
// 50 ms, in the browser too.
const mostPanels, mostCalls = 700, 3000

// NewFormula returns the law with this density. Errors say where the expression stops making sense, or at which energy
// its value is no density.
func NewFormula(text string, top float64) (Formula, error) {
	recent.Lock()
	defer recent.Unlock()
	for _, f := range recent.list {
		if f.text == text && f.top == top {
			return f, nil
		}
	}
	f, err := newFormula(text, top)
	if err == nil {
		recent.list = append(recent.list[max(0, len(recent.list)+1-mostRecent):], f)
	}
	return f, err
}

func newFormula(text string, top float64) (Formula, error) {
	if !(top > 0 && top <= 1e6) {
		return Formula{}, fmt.Errorf("the formula ends at energy %g; the end must be above 0 and at most 1e6", top)
	}
	f, err := parse(text)
	if err != nil {
		return Formula{}, fmt.Errorf("the formula cannot be read, %w", err)
	}
	p := Formula{text: text, f: f, top: top}
	if err := p.survey(); err != nil {
		return Formula{}, err
	}
	edge, unsure, err := p.findEdge()
	if err != nil {
		return Formula{}, err
	}
	p.unsure = unsure
	p.refine(&edge)
	p.panels = &panels{edge: edge}
	low := math.Min(exact.Log(top)-1, math.Max(exact.Log(top)-60, exact.Log(edge.Below)))
	bad := -1.0
	g := func(x float64) float64 {
		e := math.Min(top, exact.Exp(x))
		v := f.value(e)
		if !(v >= 0 && v <= math.MaxFloat64) {
			if bad < 0 || e < bad {
				bad = e
			}
			return 0
		}
		return float64(v * e)
	}
	at, ok := p.panels.cut(g, low, exact.Log(top), min(mostPanels, mostCalls/f.calls))
	switch {
	case bad >= 0:
		return Formula{}, p.refuse(bad)
	case !ok:
		return Formula{}, fmt.Errorf("the formula varies too finely, or grows without bound, near e = %.4g; it cannot be integrated there", at)
	}
	p.total = p.panels.normalise()
	if !(p.total > 1e-250 && p.total < 1e250) {
		return Formula{}, fmt.Errorf("the formula integrates to %.3g over 0 to %g; it must be a finite number above 0", p.total, top)
	}
	for _, q := range p.panels.list {
		if q.unsettled() {
			p.missed += q.doubt() * exact.Exp(-q.low)
		}
	}
	for _, q := range p.panels.list[1:] {
		p.breaks = append(p.breaks, exact.Exp(q.low))
	}
	p.close = sync.OnceValues(p.closely)
	return p, nil
}

// refuse says why the value at e is no density.
func (p *Formula) refuse(e float64) error {
	switch v := p.f.value(e); {
	case v < 0:
		return fmt.Errorf("the density is negative, %.4g, at e = %.6g; a density is 0 or more everywhere from 0 to %g", v, e, p.top)
	case math.IsInf(v, 1):
		return fmt.Errorf("the density is infinite at e = %.6g", e)
	default:
		return fmt.Errorf("the density has no value at e = %.6g", e)
	}
}

// survey looks at the density on an even grid, so that what is wrong is said by its simplest place.
func (p *Formula) survey() error {
	const n = 512
	for i := 1; i <= n; i++ {
		e := p.top * float64(i) / n
		v := p.f.value(e)
		if !(v >= 0 && v <= math.MaxFloat64) {
			return p.refuse(e)
		}
		p.largest = math.Max(p.largest, v)
	}
	if v := p.f.value(0); v < 0 {
		return p.refuse(0)
	}
	if p.largest == 0 {
		return fmt.Errorf("the density is 0 everywhere from 0 to %g", p.top)
	}
	return nil
}

// findEdge finds the leading term Scale e^Theta of the density at e = 0, and how sure its exponent is.
//
// Where the value at 0 is a number above 0 the exponent is 0. Elsewhere it is the slope of ln p over ln e, taken where
// two neighbouring slopes agree best: small energies hide the next term, too small ones drown in rounding.
func (p *Formula) findEdge() (Edge, float64, error) {
	const steps = 900 // halvings
	if v := p.f.value(0); v > 0 && v <= math.MaxFloat64 {
		below := p.top
		for k := 1; k < steps; k++ {
			if below = math.Ldexp(p.top, -k); math.Abs(p.f.value(below)/v-1) <= 4e-16 {
				break
			}
		}
		return Edge{Theta: 0, Scale: v, Below: below}, 0, nil
	}
	slope := make([]float64, 0, steps)
	first := 0 // halvings before the first slope: the far end may have vanished
	for k := 1; k < steps; k++ {
		a, b := p.f.value(math.Ldexp(p.top, -k-1)), p.f.value(math.Ldexp(p.top, -k))
		if !(a > 0 && b > 0) || math.IsInf(a, 0) || math.IsInf(b, 0) {
			if len(slope) > 3 {
				break
			}
			slope, first = slope[:0], k
			continue
		}
		slope = append(slope, (exact.Log(b)-exact.Log(a))/math.Ln2)
	}
	best, doubt := -1, math.Inf(1)
	for k := 0; k+2 < len(slope); k++ {
		d := math.Max(math.Abs(slope[k]-slope[k+1]), math.Abs(slope[k+1]-slope[k+2]))
		if d < doubt {
			best, doubt = k, d
		}
		if d < 3e-14 {
			break
		}
	}
	if best < 0 || doubt > 0.02 {
		return p.thin()
	}
	theta := slope[best]
	unsure := 3 * doubt
	if doubt > 3e-14 {
		unsure = math.Max(10*doubt, math.Abs(theta-slope[best/2])/4)
	}
	if near := math.Round(theta*64) / 64; math.Abs(theta-near) <= math.Max(unsure, 1e-12) {
		theta = near
	}
	if theta <= -1+unsure {
		return Edge{}, 0, fmt.Errorf("the density rises like e^%.3g at e = 0, too steeply to be integrated; the exponent must be above -1", theta)
	}
	below := math.Ldexp(p.top, -first-best-2)
	return Edge{Theta: theta, Scale: exact.Exp(exact.Log(p.f.value(below)) - float64(theta*exact.Log(below))), Below: below}, unsure, nil
}

// refine finds the leading term in 31 digits where it stands out from the next one by more than float64 can see: the
// slope of ln p over ln e where two slopes far apart agree best. The edge takes over its exponent.
func (p *Formula) refine(edge *Edge) {
	p.theta, p.scale = double.Of(math.NaN()), double.Of(math.NaN())
	if edge.Scale == 0 || edge.Theta <= 0 {
		return
	}
	value := func(x float64) double.Number { return p.f.closely(double.Of(x).Exp()).Log() }
	const step, apart = 16, 4
	best, where := math.Inf(1), 0.0
	var theta, last double.Number
	for x := exact.Log(p.top) - step; x > -600; x -= step {
		slope := value(x).Minus(value(x - apart)).Over(double.Of(apart))
		if !slope.Finite() {
			break
		}
		miss := math.Abs(slope.Minus(last).Float())
		if last.Finite() && x < exact.Log(p.top)-step && miss < best {
			best, where, theta = miss, x, slope
		}
		last = slope
		if miss < 1e-25 {
			break
		}
	}
	if !(best < 1e-19) || math.Abs(theta.Float()-edge.Theta) > math.Max(10*p.unsure, 1e-9) {
		return
	}
	if near := math.Round(theta.Float()*64) / 64; math.Abs(theta.Minus(double.Of(near)).Float()) < 1e-20 {
		theta = double.Of(near)
	}
	p.theta, p.scale = theta, value(where).Minus(theta.Times(double.Of(where))).Exp()
	p.sure = where
	p.unsure = 10 * best
	edge.Theta, edge.Scale = theta.Float(), p.scale.Float()
}

// thin handles a density without a leading power: 0 on a stretch, which is refused, or thinner than any power.
func (p *Formula) thin() (Edge, float64, error) {
	low, high := 0.0, p.top
	for range 200 { // the end of the stretch where the value is 0
		if m := (low + high) / 2; p.f.value(m) > 0 {
			high = m
		} else {
			low = m
		}
	}
	if p.f.value(1.01*high) > 1e-250*p.largest {
		return Edge{}, 0, fmt.Errorf("the density is 0 from e = 0 to %.4g; the fittest members have energy 0, so move the formula there, with (e + %.4g) in place of e", high, high)
	}
	return Edge{Theta: 50, Scale: 0, Below: high}, 0, nil
}

// Density returns the normalised value; below the energies where it can be told from rounding, the leading term.
func (p Formula) Density(eps float64) float64 {
	switch {
	case eps < 0 || eps > p.top:
		return 0
	case eps < p.panels.edge.Below && eps > 0:
		return p.panels.edge.Scale * math.Pow(eps, p.panels.edge.Theta)
	}
	return math.Max(0, p.f.value(eps)/p.total)
}

func (p Formula) Cumulative(eps float64) float64 {
	switch {
	case eps <= 0:
		return 0
	case eps >= p.top:
		return 1
	}
	return p.panels.cumulative(eps)
}

func (p Formula) Quantile(u float64) float64   { return math.Min(p.top, p.panels.quantile(u)) }
func (p Formula) Support() (low, high float64) { return 0, p.top }

// Mean sums over the panels; what lies below them adds less than the energy they begin at.
func (p Formula) Mean() float64 {
	sum := 0.0
	for _, q := range p.panels.list {
		for i, t := range gauss.Nodes {
			g, _ := q.g.At(t)
			sum += q.width / 2 * gauss.Weights[i] * g * math.Exp(q.low+q.width*(t+1)/2)
		}
	}
	return sum + p.panels.below()*math.Exp(p.panels.list[0].low)*(p.panels.edge.Theta+1)/(p.panels.edge.Theta+2)
}

func (p Formula) Edge() Edge                       { return p.panels.edge }
func (p Formula) Knots() []float64                 { return p.breaks }
func (p Formula) EdgeUncertainty() (theta float64) { return p.unsure }

// Missed returns a bound of what the panels leave open of the mean of 1/e.
func (p Formula) Missed() float64 { return p.missed }
