package bose

import (
	"math"

	"preponder/sim/internal/double"
	"preponder/sim/law"
)

// nearby is the relative distance of I(0) from R below which their difference is taken in 31 digits: there the last digits
// of float64 would decide mu.
const nearby = 1e-3

// precisely returns R in 31 digits.
func (r Rule) precisely() double.Number {
	m, open := double.Of(r.Links), double.Of(r.OpenShare)
	return m.Times(double.One.Minus(open)).Over(m.Times(double.One.Plus(open)).Plus(double.Of(r.HeadStart)))
}

// surplus returns I(beta, 0) - r and its absolute error; false where the law is known in float64 only.
//
// Both I(0) and the mass of the law are summed over 16-point panels in ln e, short where the integrand turns and longer
// towards the ground level, where it is a plain power; what lies below them is added in closed form.
func (s *Spectrum) surplus(beta float64, r double.Number) (diff, miss float64, ok bool) {
	closely, ok := s.law.(law.Closely)
	if !ok || s.leveled() || s.edge.Theta <= 0 {
		return 0, 0, false
	}
	c, ok := closely.Closely()
	if !ok {
		return 0, 0, false
	}
	var integral, mass double.Number
	b := double.Of(beta)
	add := func(nodes []law.Node) {
		for _, n := range nodes {
			mass = mass.Plus(n.Mass)
			if up := n.E.Times(b); up.Float() < 100 {
				integral = integral.Plus(n.Mass.Over(up.Expm1()))
			}
		}
	}
	theta := c.Theta.Float()
	last := len(c.Ends) - 1
	turn := math.Min(-math.Log(beta), c.Ends[last].Float()) - 1
	plain := math.Min(turn-50, c.Below)
	high, ends := c.Ends[last], c.Ends[:last]
	if c.Nodes != nil {
		add(c.Nodes)
		high, ends = c.Ends[0], nil
	}
	var panel []law.Node
	for {
		x := high.Float()
		if tail := math.Exp(theta*x) / beta / theta * c.Scale.Float(); x < plain || x < turn && tail < 1e-28*integral.Float() {
			break
		}
		width := c.Widest()
		if x < turn {
			width = math.Min(width+0.4*(turn-x), 8/(1+theta))
		}
		low := high.Minus(double.Of(width))
		if n := len(ends); n > 0 && low.Less(ends[n-1]) {
			low, ends = ends[n-1], ends[:n-1]
		}
		panel = c.Between(panel[:0], low, high)
		add(panel)
		high = low
	}
	if grounded := c.Scale.Times(high.Times(c.Theta).Exp()); grounded.Float() > 0 {
		integral = integral.Plus(grounded.Over(b.Times(c.Theta)))
		mass = mass.Plus(grounded.Times(high.Exp()).Over(c.Theta.Plus(double.One)))
	}
	i := integral.Over(mass)
	d := i.Minus(r)
	if !d.Finite() {
		return 0, 0, false
	}
	return d.Float(), 1e-21*i.Float() + c.Doubt/beta, true
}
