package law

import (
	"math"
	"sort"

	"preponder/sim/internal/double"
	"preponder/sim/internal/exact"
)

// A Closely law can give its density in about 31 digits, for what is a small difference of integrals over it.
type Closely interface {
	// Closely returns the density; false where it has none that can be told so closely.
	Closely() (Close, bool)
}

// A Close density.
type Close struct {
	// Mass returns p(e) e at e = exp(x), up to a factor that is common to all.
	Mass func(x, e double.Number) double.Number
	// Ends are the values of ln e between which Mass is smooth, ascending; the last is the top.
	Ends []double.Number
	// Theta and Scale are the leading term Scale e^(Theta+1) of Mass at the ground level, with the same factor, right to
	// about 1e-21 where ln e is below Below.
	Theta, Scale double.Number
	Below        float64
	// Doubt is a sum over e of the share of the mass that the pieces do not settle.
	Doubt float64
	// Nodes stand for all mass above Ends[0], where a law keeps them: then what depends on it alone is not asked for again.
	Nodes []Node

	half   double.Number // of the last panel
	spread [16]double.Number
}

// A Node is mass, with the factor of Mass, at an energy.
type Node struct{ E, Mass double.Number }

// Between adds the nodes of the 16-point rule between ln e = low and high.
func (c *Close) Between(nodes []Node, low, high double.Number) []Node {
	points, weights := double.Sixteen()
	center, half := high.Plus(low).Scaled(-1), high.Minus(low).Scaled(-1)
	if half != c.half { // e over its value at the center
		for i, t := range points {
			c.spread[i] = half.Times(t).Exp()
		}
		c.half = half
	}
	middle := center.Exp()
	for i, t := range points {
		e := middle.Times(c.spread[i])
		nodes = append(nodes, Node{e, c.Mass(center.Plus(half.Times(t)), e).Times(half).Times(weights[i])})
	}
	return nodes
}

// Widest returns how long panels may be in ln e for 16 points to tell them to 31 digits.
func (c *Close) Widest() float64 { return math.Min(0.8, 6/(1+math.Max(c.Theta.Float(), 0))) }

// point is how short a piece is whose mass may lie at one energy, the mean: what that misses is the square of it.
const point = 1e-8

// keep fills in the nodes.
func (c *Close) keep() {
	for i, low := range c.Ends[:len(c.Ends)-1] {
		high := c.Ends[i+1]
		width := high.Minus(low).Float()
		if width <= 0 {
			continue
		}
		if width < point {
			var mass, moment double.Number
			for _, n := range c.Between(nil, low, high) {
				mass, moment = mass.Plus(n.Mass), moment.Plus(n.Mass.Times(n.E))
			}
			if mass.Float() > 0 {
				c.Nodes = append(c.Nodes, Node{moment.Over(mass), mass})
			}
			continue
		}
		parts := math.Ceil(width / c.Widest())
		step := high.Minus(low).Over(double.Of(parts))
		for k := range int(parts) {
			from := low.Plus(step.By(float64(k)))
			c.Nodes = c.Between(c.Nodes, from, from.Plus(step))
		}
	}
}

// beyond is where a law without a top is cut: exp(-beyond) is below 1e-32.
const beyond = 75

// Closely: e^(theta+1).
func (p Power) Closely() (Close, bool) {
	s := double.Of(p.Theta).Plus(double.One)
	return Close{
		Mass: func(x, _ double.Number) double.Number { return s.Times(x).Exp() },
		Ends: []double.Number{{}}, Theta: double.Of(p.Theta), Scale: double.One, Below: 700,
	}, true
}

// Closely: exp(k x - e/s - a constant that keeps it within range).
func (p Gamma) Closely() (Close, bool) {
	k, s := double.Of(p.Shape), double.Of(p.Scale)
	norm := double.Of(exact.LogGamma(p.Shape) + p.Shape*math.Log(p.Scale))
	top := beyond + 2*p.Shape
	for range 60 {
		top = beyond + p.Shape*math.Log(top)
	}
	return Close{
		Mass: func(x, e double.Number) double.Number { return k.Times(x).Minus(e.Over(s)).Minus(norm).Exp() },
		Ends: []double.Number{double.Of(math.Log(top * p.Scale))}, Theta: k.Minus(double.One), Scale: norm.Negated().Exp(), Below: math.Log(p.Scale) - 50,
	}, true
}

// Closely: exp(-a e) (1 - exp(-e))^(b-1) e, with a constant that keeps it within range.
func (p Beta) Closely() (Close, bool) {
	a, theta, norm := double.Of(p.A), double.Of(p.B).Minus(double.One), double.Of(p.logNorm())
	return Close{
		Mass: func(x, e double.Number) double.Number {
			return theta.Times(e.Negated().Expm1().Negated().Log()).Minus(a.Times(e)).Plus(x).Minus(norm).Exp()
		},
		Ends: []double.Number{double.Of(math.Log((beyond - norm.Float()) / p.A))}, Theta: theta, Scale: norm.Negated().Exp(), Below: -50 - math.Log(1+p.A+p.B),
	}, true
}

// Closely: straight lines from knot to knot.
func (p Drawn) Closely() (Close, bool) {
	var eps []double.Number
	c := Close{Below: 700}
	for i, e := range p.raw {
		eps = append(eps, double.Of(e).Minus(double.Of(p.raw[0])))
		if i > 0 {
			c.Ends = append(c.Ends, eps[i].Log())
		}
	}
	slope := make([]double.Number, len(eps)-1)
	for i := range slope {
		slope[i] = double.Of(p.height[i+1]).Minus(double.Of(p.height[i])).Over(eps[i+1].Minus(eps[i]))
	}
	c.Mass = func(_, e double.Number) double.Number {
		i := max(0, min(sort.Search(len(eps), func(i int) bool { return e.Less(eps[i]) })-1, len(eps)-2))
		return slope[i].Times(e.Minus(eps[i])).Plus(double.Of(p.height[i])).Times(e)
	}
	if p.height[0] > 0 {
		return c, false // no transition
	}
	c.Theta, c.Scale = double.One, slope[0]
	return c, true
}

// Closely is that of the law, moved by ln By.
func (p Scaled) Closely() (Close, bool) {
	inner, ok := p.Law.(Closely)
	if !ok {
		return Close{}, false
	}
	c, ok := inner.Closely()
	if !ok {
		return c, false
	}
	by := double.Of(p.By)
	shift, mass := by.Log(), c.Mass
	c.Mass = func(x, e double.Number) double.Number { return mass(x.Minus(shift), e.Over(by)) }
	ends := c.Ends
	c.Ends = nil
	for _, x := range ends {
		c.Ends = append(c.Ends, x.Plus(shift))
	}
	c.Scale = c.Scale.Times(shift.Times(c.Theta.Plus(double.One)).Negated().Exp())
	c.Below += shift.Float()
	return c, true
}

// mostCloseCalls of functions at one point of each piece: what 31 digits may cost.
const mostCloseCalls = 2500

// Closely evaluates the expression in 31 digits; pieces end where the panels end and where a switch turns. They are found
// when they are first asked for.
func (p Formula) Closely() (Close, bool) { return p.close() }

func (p Formula) closely() (Close, bool) {
	if !p.theta.Finite() || !p.scale.Finite() {
		return Close{}, false
	}
	c := Close{Theta: p.theta, Scale: p.scale, Below: p.sure}
	c.Mass = func(_, e double.Number) double.Number {
		v := p.f.closely(e).Times(e)
		if v.Float() < 0 {
			return double.Number{}
		}
		return v
	}
	top := double.Of(p.top).Log()
	list := p.panels.list
	for i, q := range list {
		a, b := double.Of(q.low), top
		if i+1 < len(list) {
			b = double.Of(list[i+1].low)
		}
		for _, turn := range p.f.switches {
			if x, ok := turning(turn, a, b); ok {
				c.Ends = append(c.Ends, x)
				c.Ends = append(c.Ends, p.grade(x, list[0].low, top.Float())...)
			}
		}
		c.Ends = append(c.Ends, b)
	}
	sort.Slice(c.Ends, func(i, j int) bool { return c.Ends[i].Less(c.Ends[j]) })
	low, budget := list[0].low, 300
	c.Ends = append([]double.Number{double.Of(low)}, c.Ends...)
	for _, b := range c.Ends[1:len(c.Ends):len(c.Ends)] {
		budget = p.settle(&c, low, b.Float(), budget)
		low = b.Float()
	}
	if len(c.Ends)*p.f.calls > mostCloseCalls {
		return Close{}, false
	}
	sort.Slice(c.Ends, func(i, j int) bool { return c.Ends[i].Less(c.Ends[j]) })
	c.keep()
	return c, true
}

// grade returns ends that come closer to x from both sides by halves, where the density is not smooth up to x but, as far as
// float64 tells, a power of the distance: on each piece it is smooth.
func (p *Formula) grade(x double.Number, low, top float64) (ends []double.Number) {
	const halvings, widest = 75, 0.5
	for _, far := range [2]float64{math.Max(low, x.Float()-widest), math.Min(top, x.Float()+widest)} {
		from := double.Of(far)
		for k := 1; k <= halvings; k++ {
			width := from.Minus(x).Float()
			low := math.Min(x.Float(), x.Float()+width)
			if width = math.Abs(width); width == 0 || width > 1e-12 && fit(p.mass, low, width).missed() < closeMiss {
				break
			}
			from = x.Plus(from.Minus(x).Scaled(-1))
			ends = append(ends, from)
		}
	}
	return ends
}

// closeMiss is the share of the mass that 16 points on a piece may miss.
const closeMiss = 1e-21

// missed estimates what the 16-point rule misses of a panel: where coefficients fall geometrically it is about the square
// of the last ones, since the rule is right up to twice their order; where they fall by a power, at a point where the
// density is not smooth, about as much as they are.
func (q panel) missed() float64 {
	most, middle := 0.0, 0.0
	for k, c := range q.g {
		most = math.Max(most, math.Abs(c))
		if k >= 6 && k <= 8 {
			middle += math.Abs(c)
		}
	}
	last := q.doubt() / q.width
	switch {
	case most == 0:
		return 0
	case last < middle/300 || last < 1e-12*most:
		return last * last / most * q.width
	}
	return last * q.width
}

// settle cuts the piece from a to b, in ln e, until 16 points tell each part of it, or adds it to the doubt.
func (p *Formula) settle(c *Close, a, b float64, budget int) int {
	const unseen = 1e-13 // float64 does not see the shape of pieces so short; they lie where others end in steps, see grade
	q := fit(p.mass, a, b-a)
	if q.missed() < closeMiss || b-a <= unseen {
		return budget
	}
	if budget > 0 {
		m := a + (b-a)/2
		c.Ends = append(c.Ends, double.Of(m))
		return p.settle(c, m, b, p.settle(c, a, m, budget-1))
	}
	c.Doubt += q.missed() * math.Exp(-a)
	return budget
}

// mass returns the normalised density times e at e = exp(x).
func (p *Formula) mass(x float64) float64 {
	e := math.Min(p.top, exact.Exp(x))
	return float64(math.Max(0, p.f.value(e))*e) / p.total
}

// turning returns the value of x = ln e in (a, b) at which f changes its sign, by bisection.
func turning(f func(e double.Number) double.Number, a, b double.Number) (double.Number, bool) {
	sign := f(a.Exp()).Float() < 0
	if sign == (f(b.Exp()).Float() < 0) {
		return double.Number{}, false
	}
	for range 110 {
		m := a.Plus(b).Scaled(-1)
		if f(m.Exp()).Float() < 0 == sign {
			a = m
		} else {
			b = m
		}
	}
	return b, true
}
