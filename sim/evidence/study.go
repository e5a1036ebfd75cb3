package evidence

import (
	"fmt"
	"math"
)

// MinMembers and MinChoices are the least a log must hold before anything is estimated from it; below SureMembers the
// regime is usually undecided.
const MinMembers, MinChoices, SureMembers = 100, 200, 2000

// The verdicts on a log.
const (
	Condensate = "condensate"
	FitGetRich = "fit-get-rich"
	Level      = "level"     // no difference in fitness visible
	Undecided  = "undecided" // the log cannot tell
	Forecasted = "forecast"  // the plain rule does not hold: a forecast stands in the place of a verdict
	None       = "none"      // no verdict and no forecast; the check says why
)

// A Study is what a log says.
type Study struct {
	Verdict  string
	Rule     Rule
	Reasons  []string // why there is no limit verdict
	Ground   Interval // ground integral
	Margin   Interval
	NoTop    bool // a law without a top fits as well
	Law      *Law
	Draws    []Law
	Fitness  []posterior // by member
	Forecast *Forecast   // where the plain rule does not hold
	plain    *mixed
	history  *History
}

// An Interval is an estimate with its 95 per cent interval; infinities stand for themselves.
type Interval struct{ Estimate, Low, High float64 }

// Report says how far a study has come.
type Report func(done float64, what string) error

// Examine tests the plain rule and, where it holds, estimates fitness, law and regime.
func Examine(h *History, report Report) (*Study, error) {
	s := &Study{Verdict: None, history: h, Rule: Rule{Kernel: 1}}
	if h.Members() < MinMembers || h.Choices < MinChoices {
		s.Reasons = append(s.Reasons, fmt.Sprintf("The log holds %d members and %d choices; estimates need at least %d and %d. Shares are shown.", h.Members(), h.Choices, MinMembers, MinChoices))
		return s, nil
	}
	if distinctTargets(h) < 2 {
		s.Reasons = append(s.Reasons, "Every choice went to one and the same member, so there is nothing to compare it with. Shares are shown.")
		return s, nil
	}
	rule, plain, extended, terms, err := testPlain(h, func(done float64) error { return report(0.4*done, "testing the plain rule") })
	if err != nil {
		return nil, err
	}
	s.Rule, s.plain = rule, plain
	if !s.Rule.Plain {
		s.Reasons = append(s.Reasons, s.Rule.Sentence())
		s.Forecast, err = forecast(h, extended, terms, func(done float64) error { return report(0.4+0.6*done, "growing the log on") })
		switch {
		case err != nil:
			return nil, err
		case s.Forecast == nil:
			s.Reasons = append(s.Reasons, fmt.Sprintf("No forecast is given: it could not be tested on so short a log, which has %d choices of the %d needed.", h.Choices, forecastChoices))
		default:
			s.Reasons = append(s.Reasons, s.Forecast.sentences()...)
			if s.Forecast.Given {
				s.Verdict = Forecasted
			}
		}
		return s, nil
	}
	return s, s.fitLaws(report)
}

func distinctTargets(h *History) int {
	seen := map[int32]bool{}
	for g := range h.Groups() {
		for i := h.Group[g]; i < h.Group[g+1] && len(seen) < 2; i++ {
			if h.choice(i, g) {
				seen[h.Target[i]] = true
			}
		}
	}
	return len(seen)
}

// Margins of the choice between families, in AIC and in log-likelihood.
const (
	levelWithin  = 4  // equal fitness this near the best: no difference is visible
	stepsBeyond  = 16 // discrete tiers this far ahead of every continuous law: steps
	keepWithin   = 6  // continuous laws this near the best are all kept
	tiersWithin  = 4  // tiers this near: the upper end is open
	ceilingAbove = 12 // the free law this far above the best: none of ours fits
)

// fitLaws fits every family to the plain rule, keeps those the log cannot tell apart, and decides.
func (s *Study) fitLaws(report Report) error {
	list, of := cells(s.plain.sums.chosen, s.plain.sums.exposure)
	j := &judge{list: list, grid: newGrid(list, false), base: s.plain.sums.logLik}
	var fits []fit
	var starts [][3]float64
	best := math.Inf(1)
	for i, shape := range shapes {
		if err := report(0.5+0.05*float64(i), "fitting the law of fitness"); err != nil {
			return err
		}
		f, at := j.best(shape, shape.start)
		f, at = j.best(shape, at)
		fits, starts = append(fits, f), append(starts, at)
		best = math.Min(best, f.aic())
	}
	logn := j.lognormal()
	best = math.Min(best, logn.aic())
	equal := fit{l: j.equal(), params: 1}
	tiers := j.tiers(s.plain.eta)
	free := s.plain.logLik
	top := math.Max(math.Max(fits[0].l, fits[1].l), math.Max(fits[2].l, logn.l))
	all := math.Min(best, tiers.aic())
	s.spread(j, of, fits, logn, tiers, best)
	switch {
	case equal.aic() <= all+levelWithin:
		s.Verdict = Level
		s.Ground = Interval{math.Inf(1), math.NaN(), math.Inf(1)}
		s.Law = &Law{Family: "tiers", Values: []float64{0, 1}}
		s.Draws = nil
	case tiers.aic() < best-stepsBeyond:
		s.Ground = Interval{math.Inf(1), math.Inf(1), math.Inf(1)}
		s.Law, s.Draws = &tiers.law, nil
		s.Verdict = FitGetRich
	case free-math.Max(top, tiers.l) > ceilingAbove:
		s.Verdict = Undecided
		s.Reasons = append(s.Reasons, "None of the laws of fitness known here fits this log, so the ground integral is not to be trusted.")
		s.Ground = Interval{math.NaN(), math.NaN(), math.NaN()}
	default:
		return s.decide(j, fits, starts, logn, tiers, best, report)
	}
	s.Margin = s.Ground // R = 1 under the plain rule
	return nil
}

// equal returns the log-likelihood of equal fitness on the judge's cells, its scale free.
func (j *judge) equal() float64 {
	n, e := 0.0, 0.0
	for _, c := range j.list {
		n += c.count * c.n
		e += c.count * c.e
	}
	return j.base + n*math.Log(n/e) - n
}

// tiers returns the better of two and three levels.
func (j *judge) tiers(eta []float64) fit {
	best := fit{l: math.Inf(-1)}
	for k := 2; k <= 3; k++ {
		x, w, l := levels(j.list, eta, k)
		f := fit{l: j.base + l, params: float64(2*k - 1)}
		if best.l > math.Inf(-1) && f.aic() >= best.aic() {
			continue
		}
		top := math.Inf(-1)
		for _, v := range x {
			top = math.Max(top, v)
		}
		f.law = Law{Family: "tiers", Top: top}
		for _, v := range x {
			f.law.Values = append(f.law.Values, top-v)
		}
		f.law.Values = append(f.law.Values, w...)
		best = f
	}
	return best
}

// decide takes the union of the intervals of the families kept.
func (s *Study) decide(j *judge, fits []fit, starts [][3]float64, logn, tiers fit, best float64, report Report) error {
	s.Ground = Interval{Low: math.Inf(1), High: 0}
	found := math.Inf(1)
	for i, f := range fits {
		if f.aic() > best+keepWithin {
			continue
		}
		if err := report(0.68+0.1*float64(i), "finding how sure the estimate is"); err != nil {
			return err
		}
		low, high := j.interval(shapes[i], f, starts[i])
		s.Ground.Low, s.Ground.High = math.Min(s.Ground.Low, low), math.Max(s.Ground.High, high)
		if f.aic() < found {
			found, s.Ground.Estimate = f.aic(), f.law.ground()
		}
	}
	if s.NoTop = logn.aic() <= best+keepWithin; s.NoTop {
		s.Ground.Low = 0
		s.Ground.High = math.Max(s.Ground.High, 0)
		if logn.aic() < found {
			s.Ground.Estimate = 0
		}
	}
	if tiers.aic() <= best+tiersWithin {
		s.Ground.High = math.Inf(1)
	}
	s.Margin = s.Ground // R = 1 under the plain rule
	switch {
	case s.Margin.High < 1:
		s.Verdict = Condensate
	case s.Margin.Low > 1:
		s.Verdict = FitGetRich
	default:
		s.Verdict = Undecided
	}
	return nil
}

// spread sets law, law draws and the posterior of every member, under the family of best AIC.
func (s *Study) spread(j *judge, of []int32, fits []fit, logn, tiers fit, best float64) {
	pick := logn
	for _, f := range fits {
		if f.aic() < pick.aic() {
			pick = f
		}
	}
	if tiers.aic() < best-stepsBeyond {
		pick = tiers
	}
	s.Law = &pick.law
	weights := j.grid.weigh(pick.law.mass())
	posts := make([]posterior, len(j.list))
	for i := range j.list {
		posts[i] = j.grid.posterior(i, weights[i])
	}
	s.Fitness = make([]posterior, len(of))
	for k, c := range of {
		s.Fitness[k] = posts[c]
	}
	s.Draws = j.draws(fits, logn, best)
}

// An Origin splits a member's links: mean x early x good x chance = links.
type Origin struct{ Mean, Early, Good, Chance, GoodLow, GoodHigh float64 }

// Origins returns why the given members hold what they hold: mean = choices per member; early = what arriving when it did
// would give at equal fitness; good = its own fitness against the field it met; chance the rest.
//
//	n0 = kappa (prod over later groups (1 + c/Z0) - 1),  Z0 = kappa N + links so far
//	n1 = kappa (exp(eta_j sum c/Z) - 1)
func (s *Study) Origins(members []int32) []Origin {
	h, kappa := s.history, s.history.PerArrival()
	n := h.Members()
	mean := float64(h.Choices) / float64(n)
	early, field := make([]float64, h.Groups()+1), make([]float64, h.Groups()+1)
	eta := s.plain.eta
	here, links, z := 0, 0.0, 0.0
	for g := range h.Groups() {
		c := 0.0
		for i := h.Group[g]; i < h.Group[g+1]; i++ {
			if h.choice(i, g) {
				c++
			}
		}
		early[g+1], field[g+1] = early[g], field[g]
		if c > 0 && z > 0 {
			early[g+1] += math.Log1p(c / (kappa*float64(here) + links))
			field[g+1] += c / z
		}
		for here < n && int(h.Arrived[here]) == g {
			z += eta[here] * kappa
			here++
		}
		for i := h.Group[g]; i < h.Group[g+1]; i++ {
			links++
			z += eta[h.Target[i]]
		}
	}
	last := h.Groups()
	var out []Origin
	for _, j := range members {
		g := int(h.Arrived[j]) + 1
		n0 := kappa * math.Expm1(early[last]-early[min(g, last)])
		of := func(fitness float64) float64 {
			return kappa * math.Expm1(fitness*(field[last]-field[min(g, last)]))
		}
		p := s.Fitness[j]
		n1 := of(p.mean)
		o := Origin{Mean: mean, Early: n0 / mean, Good: n1 / n0, Chance: float64(s.plain.sums.chosen[j]) / n1}
		o.GoodLow, o.GoodHigh = of(p.low)/n0, of(p.high)/n0
		out = append(out, o)
	}
	return out
}
