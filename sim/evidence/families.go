package evidence

import (
	"math"

	"gonum.org/v1/gonum/optimize"

	"preponder/sim/bose"
	"preponder/sim/law"
)

// A Law is a fitted law: energies of a family with its values, stretched, below a top of ln fitness (on the scale where
// the mean fitness of the members is 1).
type Law struct {
	Family  string    `json:"family"`
	Values  []float64 `json:"values"`            // in the order of the family's fields; of tiers: energies, then weights
	Stretch float64   `json:"stretch,omitempty"` // 0 means 1
	Top     float64   `json:"top"`
}

// Make returns the distribution of energies.
func (l Law) Make() law.Law {
	var out law.Law
	if l.Family == "tiers" {
		k := len(l.Values) / 2
		out = law.NewTiers(l.Values[:k], l.Values[k:])
	} else {
		f, err := law.FamilyNamed(l.Family)
		if err != nil {
			panic("evidence: unchecked law: " + err.Error())
		}
		out = f.Make(l.Values)
	}
	if l.Stretch > 0 && l.Stretch != 1 {
		out = law.Scaled{Law: out, By: l.Stretch}
	}
	return out
}

// mass returns the mass of ln eta between two values.
func (l Law) mass() massLaw {
	d := l.Make()
	return func(low, high float64) float64 { return d.Cumulative(l.Top-low) - d.Cumulative(l.Top-high) }
}

// ground returns the ground integral of the law at sharpness 1; 0 where there is no top.
func (l Law) ground() float64 {
	switch l.Family {
	case "lognormal":
		return 0
	case "beta":
		if l.Values[1] <= 1 {
			return math.Inf(1)
		}
		return l.Values[0] / (l.Values[1] - 1)
	}
	return bose.NewSpectrum(l.Make()).GroundIntegral(1, 0)
}

// A shape is a continuous family with a top as the fit sees it: q is the exponent at the top (density ~ (1-x)^(q-1)), a
// the parameter that spreads it.
type shape struct {
	name  string
	make  func(a, q, top float64) Law
	start [3]float64 // ln a, ln q, top
	// spread returns a for the given q and ground integral.
	spread func(q, ground float64) float64
}

var shapes = []shape{
	{"beta", func(a, q, top float64) Law { return Law{Family: "beta", Values: []float64{a, q}, Top: top} },
		[3]float64{0, math.Log(2), 1}, func(q, ground float64) float64 { return ground * (q - 1) }},
	{"power", func(b, q, top float64) Law {
		return Law{Family: "power", Values: []float64{q - 1}, Stretch: b, Top: top}
	}, [3]float64{math.Log(2), math.Log(2), 1}, func(q, ground float64) float64 {
		return bose.NewSpectrum(law.Power{Theta: q - 1}).Critical(ground)
	}},
	{"gamma", func(s, q, top float64) Law { return Law{Family: "gamma", Values: []float64{q, s}, Top: top} },
		[3]float64{math.Log(0.5), math.Log(2), 1}, func(q, ground float64) float64 {
			return bose.NewSpectrum(law.Gamma{Shape: q, Scale: 1}).Critical(ground)
		}},
}

// Bounds of the search: beyond them the families are alike.
const maxQ, maxA, minA, maxTop = 40, 60, 1e-3, 12

// A fit is a family at its maximum.
type fit struct {
	law    Law
	l      float64
	params float64
}

func (f fit) aic() float64 { return -2*f.l + 2*f.params }

// maximise climbs f from x by the simplex of Nelder and Mead and returns the best point.
func maximise(f func(x []float64) float64, x []float64, size float64, evaluations int) ([]float64, float64) {
	p := optimize.Problem{Func: func(x []float64) float64 {
		if v := f(x); !math.IsNaN(v) && !math.IsInf(v, 0) {
			return -v
		}
		return 1e300
	}}
	r, err := optimize.Minimize(p, x, &optimize.Settings{FuncEvaluations: evaluations, Converger: &optimize.FunctionConverge{Absolute: 0.004, Iterations: 12}},
		&optimize.NelderMead{SimplexSize: size})
	if r == nil || (err != nil && math.IsNaN(r.F)) {
		return x, math.Inf(-1)
	}
	return r.X, -r.F
}

// A judge evaluates laws on fixed cells.
type judge struct {
	list []cell
	grid *grid
	base float64 // what the choices add that no law changes
}

func (j *judge) value(l Law) float64 { return j.base + j.grid.logLik(j.list, j.grid.weigh(l.mass())) }

// best fits one family.
func (j *judge) best(s shape, start [3]float64) (fit, [3]float64) {
	x, l := maximise(func(x []float64) float64 {
		if !inside(math.Exp(x[0]), math.Exp(x[1]), x[2]) {
			return math.Inf(-1)
		}
		return j.value(s.make(math.Exp(x[0]), math.Exp(x[1]), x[2]))
	}, start[:], 0.3, 160)
	at := [3]float64{x[0], x[1], x[2]}
	return fit{s.make(math.Exp(x[0]), math.Exp(x[1]), x[2]), l, 3}, at
}

func inside(a, q, top float64) bool {
	return a >= minA && a <= maxA && q >= 0.02 && q <= maxQ && math.Abs(top) <= maxTop
}

// lognormal fits the family without a top.
func (j *judge) lognormal() fit {
	x, l := maximise(func(x []float64) float64 {
		if s := math.Exp(x[1]); s > 10 || s < 1e-3 || math.Abs(x[0]) > maxTop {
			return math.Inf(-1)
		}
		return j.value(Law{Family: "lognormal", Values: []float64{math.Exp(x[1])}, Top: x[0]})
	}, []float64{0, math.Log(0.6)}, 0.3, 100)
	return fit{Law{Family: "lognormal", Values: []float64{math.Exp(x[1])}, Top: x[0]}, l, 2}
}

// profile returns the best likelihood of a family among laws with the given ground integral; +Inf: any q <= 1.
func (j *judge) profile(s shape, ground float64, start *[3]float64) float64 {
	if math.IsInf(ground, 1) {
		_, l := maximise(func(x []float64) float64 {
			if x[1] > 0 || !inside(math.Exp(x[0]), math.Exp(x[1]), x[2]) {
				return math.Inf(-1)
			}
			return j.value(s.make(math.Exp(x[0]), math.Exp(x[1]), x[2]))
		}, []float64{start[0], math.Min(start[1], -0.02), start[2]}, -0.15, 110)
		return l
	}
	x, l := maximise(func(x []float64) float64 {
		q := 1 + math.Exp(x[0])
		a := s.spread(q, ground)
		if !inside(a, q, x[1]) {
			return math.Inf(-1)
		}
		return j.value(s.make(a, q, x[1]))
	}, []float64{math.Log(math.Max(math.Exp(start[1])-1, 0.05)), start[2]}, 0.2, 60)
	if !math.IsInf(l, -1) {
		start[1], start[2] = math.Log(1+math.Exp(x[0])), x[1]
	}
	return l
}

// drop is half the 95 per cent point of chi-square with one degree of freedom.
const drop = 1.92

// interval returns the ground integrals within 1.92 of the family's maximum.
func (j *judge) interval(s shape, f fit, at [3]float64) (low, high float64) {
	i := f.law.ground()
	floor := f.l - drop
	ok := func(ground float64, from *[3]float64) bool { return j.profile(s, ground, from) >= floor }
	from := at
	start := math.Min(i, 20)
	high = math.Inf(1)
	if !math.IsInf(i, 1) {
		infinite := from
		if !ok(math.Inf(1), &infinite) {
			high = j.edge(start, 2, ok, from)
		}
	}
	return j.edge(start, 0.5, ok, from), high
}

// edge walks from inside by the factor until outside, then halves the step in the logarithm to 4 per cent.
func (j *judge) edge(inside, factor float64, ok func(float64, *[3]float64) bool, from [3]float64) float64 {
	inside = math.Max(inside, 1e-3)
	outside := inside * factor
	for ok(outside, &from) {
		if outside < 1e-3 {
			return 0
		}
		if outside > 1e3 {
			return math.Inf(1)
		}
		inside, outside = outside, outside*factor
	}
	for range 40 {
		if math.Abs(math.Log(inside/outside)) < 0.04 {
			break
		}
		mid := math.Sqrt(inside * outside)
		try := from
		if ok(mid, &try) {
			inside, from = mid, try
		} else {
			outside = mid
		}
	}
	return math.Sqrt(inside * outside)
}
