package law

import (
	"math"

	"preponder/sim/internal/exact"
)

// Lognormal is the law with ln fitness ~ Normal(0, sigma^2) at sharpness 1: energies ~ Normal(0, sigma^2), unbounded
// below, so there is no ground level.
type Lognormal struct{ Sigma float64 }

func (p Lognormal) Density(eps float64) float64 {
	z := eps / p.Sigma
	return math.Exp(-z*z/2) / (p.Sigma * math.Sqrt(2*math.Pi))
}

func (p Lognormal) Cumulative(eps float64) float64 { return 0.5 * math.Erfc(-eps/(p.Sigma*math.Sqrt2)) }
func (p Lognormal) Quantile(u float64) float64     { return float64(p.Sigma * exact.Normal(u)) }
func (p Lognormal) Support() (low, high float64)   { return math.Inf(-1), math.Inf(1) }
func (p Lognormal) Mean() float64                  { return 0 }
func (p Lognormal) Edge() Edge                     { return Edge{} }
