package law

import (
	"math"

	"gonum.org/v1/gonum/mathext"

	"preponder/sim/internal/exact"
)

// Beta is the law whose exp(-eps) has the Beta(a, b) distribution, a, b > 0:
//
//	p(eps) = exp(-a eps) (1 - exp(-eps))^(b-1) / B(a, b),   eps >= 0.
type Beta struct{ A, B float64 }

func (p Beta) Density(eps float64) float64 { return p.Densities()(eps) }

// Densities returns Density with its factor computed once.
func (p Beta) Densities() func(eps float64) float64 {
	norm := p.logNorm()
	return func(eps float64) float64 {
		if eps <= 0 {
			return 0
		}
		return math.Exp(-p.A*eps + (p.B-1)*math.Log(-math.Expm1(-eps)) - norm)
	}
}

func (p Beta) logNorm() float64 {
	return exact.LogGamma(p.A) + exact.LogGamma(p.B) - exact.LogGamma(p.A+p.B)
}

// Cumulative returns P(energy <= eps) = I_(1-x)(b, a), x = exp(-eps).
func (p Beta) Cumulative(eps float64) float64 {
	if eps <= 0 {
		return 0
	}
	gap := gapOf(eps)
	return exact.Beta(p.B, p.A, gap, exact.Exp(-eps))
}

// gapOf returns 1 - exp(-eps), the same bits everywhere.
func gapOf(eps float64) float64 {
	if eps < 1e-5 {
		return eps - float64(eps*eps)/2 + float64(float64(eps*eps)*eps)/6
	}
	return 1 - exact.Exp(-eps)
}

func (p Beta) Quantile(u float64) float64 {
	return quantile(u, p.Cumulative, func(e float64) float64 {
		return exact.Exp(float64(-p.A*e) + float64((p.B-1)*exact.Log(gapOf(e))) - p.logNorm())
	}, p.start(u))
}

// start returns the leading term of the quantile at whichever end of the law is nearer.
func (p Beta) start(u float64) float64 {
	ground := exact.Exp((exact.Log(u) + exact.Log(p.B) + p.logNorm()) / p.B)
	if ground < 0.3 {
		return ground
	}
	far := -(exact.Log(1-u) + exact.Log(p.A) + p.logNorm()) / p.A
	return math.Max(far, 0.3)
}

func (p Beta) Support() (low, high float64) { return 0, math.Inf(1) }

// Mean returns E[-ln x] = psi(a+b) - psi(a), psi the digamma function.
func (p Beta) Mean() float64 { return mathext.Digamma(p.A+p.B) - mathext.Digamma(p.A) }
func (p Beta) Edge() Edge {
	return Edge{Theta: p.B - 1, Scale: math.Exp(-p.logNorm())}
}
