package law

import (
	"math"

	"preponder/sim/internal/exact"
)

// Uniform is the law whose exp(-eps) is uniform on [low, 1], 0 <= low < 1:
//
//	p(eps) = exp(-eps) / (1 - low) on [0, -ln low].
type Uniform struct{ Low float64 }

func (p Uniform) Density(eps float64) float64 {
	if _, high := p.Support(); eps < 0 || eps > high {
		return 0
	}
	return math.Exp(-eps) / (1 - p.Low)
}

func (p Uniform) Cumulative(eps float64) float64 {
	return math.Min(1, -math.Expm1(-math.Max(eps, 0))/(1-p.Low))
}

func (p Uniform) Quantile(u float64) float64 {
	x := float64((1 - p.Low) * u)
	if x < 1e-5 {
		return x + float64(x*x)/2 + float64(float64(x*x)*x)/3
	}
	return -exact.Log(1 - x)
}

func (p Uniform) Support() (low, high float64) { return 0, -math.Log(p.Low) }

// Mean returns E[-ln x] for x uniform on [low, 1]: 1 + low ln(low)/(1 - low).
func (p Uniform) Mean() float64 {
	if p.Low == 0 {
		return 1
	}
	return 1 + p.Low*math.Log(p.Low)/(1-p.Low)
}

func (p Uniform) Edge() Edge { return Edge{Theta: 0, Scale: 1 / (1 - p.Low)} }
