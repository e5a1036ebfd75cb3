package bose

import (
	"math"

	"preponder/sim/law"
)

// Curves are what the page draws of one solution.
type Curves struct {
	Eps, Density, Exponent, Occupation []float64 // over energies
	Beta, Mu                           []float64 // beta*mu over sharpness
}

// curvePoints over energies, muPoints over sharpness.
const curvePoints, muPoints = 400, 56

// CurvesOf returns the curves of any law; one without a ground level has a density only.
func CurvesOf(l law.Law, beta float64, rule Rule, sol Solution) Curves {
	low, high := l.Support()
	if math.IsInf(low, -1) {
		var c Curves
		a, b := l.Quantile(0.003), l.Quantile(0.997)
		for i := range curvePoints {
			e := a + (b-a)*float64(i)/(curvePoints-1)
			c.Eps, c.Density = append(c.Eps, e), append(c.Density, l.Density(e))
		}
		return c
	}
	if low == high {
		return Curves{}
	}
	return NewSpectrum(l).Curves(beta, rule, sol)
}

// Curves returns the law, f, n over its energies, and mu over sharpness from 0 to twice what matters.
func (s *Spectrum) Curves(beta float64, rule Rule, sol Solution) Curves {
	var c Curves
	_, high := s.law.Support()
	if math.IsInf(high, 1) {
		high = s.law.Quantile(0.995)
	}
	for i := range curvePoints {
		x := (float64(i) + 0.02) / (curvePoints - 1)
		e := math.Min(high, high*x*x) // closer together near the ground level
		c.Eps = append(c.Eps, e)
		c.Density = append(c.Density, s.law.Density(e))
		c.Exponent = append(c.Exponent, Exponent(beta*e, sol.BetaMu))
		c.Occupation = append(c.Occupation, Occupation(beta*e, sol.BetaMu))
	}
	top := muAxis(beta, sol.CriticalSharpness)
	r := rule.Balance()
	if r == 0 {
		return c // every link is dealt to anyone: there is no potential
	}
	if !s.leveled() {
		s = newSpectrum(s.law, coarse)
	}
	step := top / muPoints
	h := s.heat(step)
	var by []float64    // exp(step eps) - 1: what one step does to every node
	var past [3]float64 // ln(-beta mu) at the last three points, newest first: the next is guessed from them
	for i := 1; i <= muPoints; i++ {
		mu := 0.0
		if i > 1 {
			for k := len(by); k < len(h.up); k++ {
				by = append(by, math.Expm1(step*h.eps[k]))
			}
			h.warm(step, by)
		}
		switch {
		case h.beta >= sol.CriticalSharpness:
		case i <= 3:
			mu, _ = h.potential(r, math.Log(math.Log1p(1/r)/h.beta)-1, exactMu)
		default:
			mu, _ = h.potential(r, 3*(past[0]-past[1])+past[2]-math.Log(h.beta), drawnMu)
		}
		past = [3]float64{math.Log(-h.beta * mu), past[0], past[1]}
		c.Beta, c.Mu = append(c.Beta, top*float64(i)/muPoints), append(c.Mu, h.beta*mu)
	}
	return c
}

// muAxis returns the end of the sharpness axis: the same while sharpness is dragged below it, so the curve stands still.
func muAxis(beta, critical float64) float64 {
	least := 10.0
	if !math.IsNaN(critical) {
		least = math.Max(least, 2*critical)
	}
	if beta <= least {
		return least
	}
	return math.Pow(2, math.Ceil(math.Log2(beta)))
}
