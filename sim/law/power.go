package law

import (
	"math"

	"preponder/sim/internal/exact"
)

// Power is the law of energies
//
//	p(eps) = (theta+1) eps^theta on [0, 1], theta > -1.
//
// theta = d/2 - 1 is the density of states of a free gas in d dimensions, cut off at 1.
type Power struct{ Theta float64 }

func (p Power) Density(eps float64) float64 {
	if eps <= 0 || eps > 1 {
		return 0
	}
	return (p.Theta + 1) * math.Pow(eps, p.Theta)
}

func (p Power) Cumulative(eps float64) float64 {
	if eps <= 0 {
		return 0
	}
	return math.Pow(math.Min(eps, 1), p.Theta+1)
}

func (p Power) Quantile(u float64) float64 {
	one := [1]float64{u}
	p.quantiles(one[:])
	return one[0]
}

func (p Power) quantiles(u []float64) {
	switch p.Theta {
	case 0:
	case 1:
		for i, x := range u {
			u[i] = math.Sqrt(x)
		}
	default:
		power := 1 / (p.Theta + 1)
		for i, x := range u {
			u[i] = exact.Pow(x, power)
		}
	}
}

func (p Power) Support() (low, high float64) { return 0, 1 }
func (p Power) Mean() float64                { return (p.Theta + 1) / (p.Theta + 2) }
func (p Power) Edge() Edge                   { return Edge{Theta: p.Theta, Scale: p.Theta + 1} }
