package bose

import (
	"math"

	"preponder/sim/law"
)

// TopFitness says how fit the fittest of a network is expected to be under a law without a ground level.
type TopFitness struct {
	Members        float64
	Low, Mid, High float64 // energies of the fittest: in 95 of 100 networks between, half of them below Mid
	Records        float64 // expected number of members fitter than all before: 1 + 1/2 + ... + 1/n (Renyi 1962)
}

// TopOf returns the distribution of the least energy of n members: P(least > eps) = (1 - P(eps))^n.
func TopOf(l law.Law, n float64) TopFitness {
	at := func(q float64) float64 { return l.Quantile(-math.Expm1(math.Log1p(-q) / n)) }
	// The harmonic number by its asymptotic series (Abramowitz & Stegun 6.3.18), exact to 1e-8 from n = 2 on.
	h := math.Log(n) + eulerGamma + 1/(2*n) - 1/(12*n*n) + 1/(120*math.Pow(n, 4)) - 1/(252*math.Pow(n, 6))
	return TopFitness{n, at(.025), at(.5), at(.975), h}
}
