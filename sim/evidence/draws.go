package evidence

import (
	"math"

	"preponder/sim/internal/exact"
)

// lawDraws is how many laws stand for what the log leaves open; walkSteps between start and end of the walk that finds
// them.
const lawDraws, walkSteps = 12, 240

// draws returns laws in proportion to how well they explain the log: families by Akaike weight exp(-dAIC/2), their
// parameters by a random walk on the likelihood (Metropolis), thinned. The walk is keyed, so the same log gives the same
// draws.
func (j *judge) draws(fits []fit, logn fit, best float64) []Law {
	weights := []float64{}
	sum := 0.0
	candidates := append(append([]fit(nil), fits...), logn)
	for _, f := range candidates {
		w := math.Exp(-(f.aic() - best) / 2)
		weights = append(weights, w)
		sum += w
	}
	var out []Law
	carry := 0.0
	for i, f := range candidates {
		carry += lawDraws * weights[i] / sum
		n := int(math.Round(carry))
		carry -= float64(n)
		if n > 0 {
			out = append(out, j.walk(f, n, uint32(i))...)
		}
	}
	return out
}

// walk returns n laws of the family of f.
func (j *judge) walk(f fit, n int, seed uint32) []Law {
	key := exact.Key(seed, exact.Families)
	x := coordinates(f.law)
	l := f.l
	size := j.scales(f, x)
	out := []Law{}
	next := uint64(0)
	unit := func() float64 { next++; return exact.Unit(exact.Bits(key, next, 0)) }
	for step := range walkSteps {
		y := append([]float64(nil), x...)
		for i := range y {
			y[i] += size[i] * exact.Normal(unit())
		}
		accept := unit()
		if law, ok := fromCoordinates(f.law.Family, y); ok {
			if v := j.value(law); math.Log(accept) < v-l {
				x, l = y, v
			}
		}
		if (step+1)*n/walkSteps > len(out) {
			law, _ := fromCoordinates(f.law.Family, x)
			out = append(out, law)
		}
	}
	return out
}

// scales returns for each coordinate the step that costs about half a unit of log-likelihood, times 0.9.
func (j *judge) scales(f fit, x []float64) []float64 {
	size := make([]float64, len(x))
	for i := range x {
		step := 0.02
		for range 7 {
			y := append([]float64(nil), x...)
			y[i] += step
			law, ok := fromCoordinates(f.law.Family, y)
			if !ok || f.l-j.value(law) > 0.5 {
				break
			}
			step *= 2
		}
		size[i] = 0.9 * step
	}
	return size
}

func coordinates(l Law) []float64 {
	switch l.Family {
	case "beta":
		return []float64{math.Log(l.Values[0]), math.Log(l.Values[1]), l.Top}
	case "power":
		return []float64{math.Log(l.Stretch), math.Log(l.Values[0] + 1), l.Top}
	case "gamma":
		return []float64{math.Log(l.Values[1]), math.Log(l.Values[0]), l.Top}
	}
	return []float64{math.Log(l.Values[0]), l.Top}
}

func fromCoordinates(family string, x []float64) (Law, bool) {
	if family == "lognormal" {
		s := math.Exp(x[0])
		return Law{Family: family, Values: []float64{s}, Top: x[1]}, s > 1e-3 && s < 10 && math.Abs(x[1]) < maxTop
	}
	for _, s := range shapes {
		if s.name == family {
			a, q := math.Exp(x[0]), math.Exp(x[1])
			return s.make(a, q, x[2]), inside(a, q, x[2])
		}
	}
	return Law{}, false
}
