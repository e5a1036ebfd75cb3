package law

import (
	"math"

	"preponder/sim/internal/exact"
)

// Gamma is the law of energies with shape k and scale s, both > 0:
//
//	p(eps) = eps^(k-1) exp(-eps/s) / (s^k Gamma(k)),   eps >= 0.
type Gamma struct{ Shape, Scale float64 }

func (p Gamma) Density(eps float64) float64 { return p.Densities()(eps) }

// Densities returns Density with its factor computed once.
func (p Gamma) Densities() func(eps float64) float64 {
	norm := exact.LogGamma(p.Shape)
	return func(eps float64) float64 {
		if eps <= 0 {
			return 0
		}
		x := eps / p.Scale
		return math.Exp((p.Shape-1)*math.Log(x)-x-norm) / p.Scale
	}
}

func (p Gamma) Cumulative(eps float64) float64 { return exact.Gamma(p.Shape, eps/p.Scale) }

func (p Gamma) Quantile(u float64) float64 {
	k := p.Shape
	unit := func(x float64) float64 { return exact.Gamma(k, x) }
	density := func(x float64) float64 {
		return exact.Exp(float64((k-1)*exact.Log(x)) - x - exact.LogGamma(k))
	}
	start := exact.Exp((exact.Log(u) + exact.LogGamma(k+1)) / k)
	if start > 0.3*k { // Wilson and Hilferty (1931)
		z := exact.Normal(u)
		c := 1 - 1/float64(9*k) + z/float64(3*math.Sqrt(k))
		if c > 0 {
			start = float64(k * float64(float64(c*c)*c))
		}
	}
	return float64(p.Scale * quantile(u, unit, density, start))
}

func (p Gamma) Support() (low, high float64) { return 0, math.Inf(1) }
func (p Gamma) Mean() float64                { return p.Shape * p.Scale }
func (p Gamma) Edge() Edge {
	return Edge{Theta: p.Shape - 1, Scale: math.Exp(-exact.LogGamma(p.Shape) - p.Shape*math.Log(p.Scale))}
}
