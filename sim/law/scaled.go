package law

import "math"

// Scaled is a law with every energy multiplied by By > 0.
type Scaled struct {
	Law Law
	By  float64
}

func (p Scaled) Density(eps float64) float64    { return p.Law.Density(eps/p.By) / p.By }
func (p Scaled) Cumulative(eps float64) float64 { return p.Law.Cumulative(eps / p.By) }
func (p Scaled) Quantile(u float64) float64     { return float64(p.By * p.Law.Quantile(u)) }
func (p Scaled) Support() (low, high float64) {
	low, high = p.Law.Support()
	return low * p.By, high * p.By
}

func (p Scaled) Mean() float64 { return p.By * p.Law.Mean() }

func (p Scaled) Edge() Edge {
	e := p.Law.Edge()
	e.Scale *= math.Pow(p.By, -e.Theta-1)
	e.Below *= p.By
	return e
}

// Knots are those of the law, scaled.
func (p Scaled) Knots() []float64 {
	var out []float64
	if pieced, ok := p.Law.(Pieced); ok {
		for _, k := range pieced.Knots() {
			out = append(out, k*p.By)
		}
	}
	return out
}
