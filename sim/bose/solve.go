package bose

import (
	"errors"
	"fmt"
	"math"

	"preponder/sim/law"
)

// A Regime is where a network stands in endless growth.
type Regime string

// The regimes. Records: no ground level, fitter members take over for ever. Gelation and sublinear: what a kernel above
// and below 1 leads to, whatever the law (Krapivsky, Redner and Leyvraz, PRL 85, 4629, 2000). Unknown: the rule is outside
// the theory.
const (
	Level      Regime = "level"
	FitGetRich Regime = "fit-get-rich"
	Condensate Regime = "condensate"
	Records    Regime = "records"
	Gelation   Regime = "gelation"
	Sublinear  Regime = "sublinear"
	Unknown    Regime = "unknown"
)

// A Rule is what the theory needs to know of the growth: links of a newcomer m, head start a, open share r.
type Rule struct{ Links, HeadStart, OpenShare float64 }

// Balance returns
//
//	R = m (1 - r) / (m (1 + r) + a),
//
// the value the ground integral is weighed against; 1 in the plain model. Derived by us from the continuum theory.
func (r Rule) Balance() float64 {
	return r.Links * (1 - r.OpenShare) / (r.Links*(1+r.OpenShare) + r.HeadStart)
}

// A Solution is the standing of a network in endless growth. Infinite values are +Inf, absent ones NaN.
type Solution struct {
	Regime            Regime
	Balance           float64 // R
	GroundIntegral    float64 // I(0)
	Margin            float64 // I(0)/R, a condensate below 1
	Mu                float64 // chemical potential, <= 0; NaN without a ground level or at sharpness 0
	BetaMu            float64 // beta * mu, also where beta is 0
	Condensate        float64 // share of all links that gathers on the fittest few, n0
	LeaderExponent    float64 // leader's share ~ N^LeaderExponent
	Halving           float64 // growth factor over which the lead halves; +Inf in a condensate
	CriticalSharpness float64 // NaN where none exists
	DissolveHeadStart float64 // head start that alone dissolves a condensate; NaN elsewhere
	DissolveOpenShare float64 // open share that alone dissolves it; NaN elsewhere
	MeanFitness       float64 // E[exp(-beta eps)]
	DegreeExponent    float64 // P(k) ~ k^-DegreeExponent, up to logarithms, = 1 + 1/f(0); NaN in records
	BetaMuSlope       float64 // d(beta mu)/d ln beta
	MuSlope           float64 // d mu/d beta; 0 in a condensate
	Errors            Errors
}

// Errors are estimates of relative errors: of rounding, of what is unsure about the edge of the law, and of how far the
// equation carries them.
type Errors struct{ GroundIntegral, Mu, CriticalSharpness float64 }

// betaLow and betaHigh bound the search for a critical sharpness.
const betaLow, betaHigh = 1e-30, 1e6

// muLeast is the smallest -mu the solver distinguishes from 0.
const muLeast = 1e-300

// Solve returns the standing of a network with law l at sharpness beta >= 0. Relative error of I(0), mu and the critical
// sharpness <= 1e-9.
//
//	mu:  I(beta, mu) = R if I(beta, 0) >= R, else 0
//	n0 = (1 - r) - ((1 + r) + a/m) I(beta, 0) in a condensate
func Solve(l law.Law, beta float64, rule Rule) (Solution, error) {
	nan := math.NaN()
	s := Solution{Balance: rule.Balance(), CriticalSharpness: nan, DissolveHeadStart: nan, DissolveOpenShare: nan, Mu: nan}
	low, high := l.Support()
	if beta == 0 || low == high || s.Balance == 0 {
		f := s.Balance / (1 + s.Balance)
		s.Regime, s.GroundIntegral, s.Margin, s.BetaMu, s.MeanFitness = Level, math.Inf(1), math.Inf(1), math.Log(f), 1
		s.lead(f)
		if low == 0 && high > 0 && beta == 0 {
			s.CriticalSharpness = NewSpectrum(l).Critical(s.Balance)
		}
		if beta > 0 {
			s.Mu = s.BetaMu / beta
		}
		if s.Balance == 0 {
			s.MeanFitness = meanFitness(l, beta)
		}
		return s, nil
	}
	if math.IsInf(low, -1) {
		s.Regime, s.BetaMu, s.GroundIntegral, s.Margin, s.LeaderExponent, s.Halving, s.MeanFitness, s.DegreeExponent = Records, nan, nan, nan, nan, nan, nan, nan
		return s, nil
	}
	return NewSpectrum(l).Solve(beta, rule)
}

// meanFitness returns E[exp(-beta eps)], 1 where the law has no ground level to measure from.
func meanFitness(l law.Law, beta float64) float64 {
	if low, _ := l.Support(); math.IsInf(low, -1) {
		return 1
	}
	return NewSpectrum(l).Mean(func(e float64) float64 { return math.Exp(-beta * e) })
}

// Solve is the package's Solve for a law with a ground level and at least two energies, at sharpness beta > 0.
func (s *Spectrum) Solve(beta float64, rule Rule) (Solution, error) {
	nan := math.NaN()
	r := rule.Balance()
	out := Solution{Balance: r, DissolveHeadStart: nan, DissolveOpenShare: nan}
	out.GroundIntegral = s.GroundIntegral(beta, 0)
	out.Margin = out.GroundIntegral / r
	out.CriticalSharpness = s.Critical(r)
	out.MeanFitness = s.Mean(func(e float64) float64 { return math.Exp(-beta * e) })
	rounding := s.rounding(beta, out.GroundIntegral)
	out.Errors = Errors{rounding, 0, rounding} // d ln I/d ln beta is -1 or steeper
	surplus, miss := out.GroundIntegral-r, rounding*out.GroundIntegral
	if math.Abs(surplus) < nearby*r {
		if d, m, ok := s.surplus(beta, rule.precisely()); ok && m < miss {
			surplus, miss = d, m
		}
	}
	if surplus < 0 {
		i := out.GroundIntegral
		out.Regime = Condensate
		out.Condensate = -surplus * ((1 + rule.OpenShare) + rule.HeadStart/rule.Links)
		out.DissolveHeadStart = rule.Links * (1/i - 1)
		out.DissolveOpenShare = (1 - i) / (1 + i)
		out.lead(1)
		return out, nil
	}
	out.Regime = FitGetRich
	mu, err := s.mu(beta, r, surplus)
	if err != nil {
		return out, fmt.Errorf("the chemical potential at sharpness %g was not found: %w", beta, err)
	}
	out.Mu, out.BetaMu = mu, beta*mu
	out.lead(math.Exp(out.BetaMu))
	byBeta, byMu := s.slopes(beta, out.BetaMu)
	out.BetaMuSlope = -byBeta / byMu
	out.MuSlope = (out.BetaMuSlope - out.BetaMu) / (beta * beta)
	out.Errors.Mu = 1e-14 + miss/(-out.BetaMu*byMu)
	return out, nil
}

// rounding estimates the relative error of the ground integral: of summation, and of an edge exponent found numerically.
func (s *Spectrum) rounding(beta, integral float64) float64 {
	summation := 2e-15
	if open, ok := s.law.(interface{ Missed() float64 }); ok && beta > 0 {
		summation += open.Missed() / (beta * integral)
	}
	uncertain, ok := s.law.(interface{ EdgeUncertainty() float64 })
	if !ok || s.edge.Below == 0 || math.IsInf(integral, 1) || s.edge.Theta <= 0 {
		return summation
	}
	under := s.edge.Scale * math.Pow(s.edge.Below, s.edge.Theta) / (beta * s.edge.Theta)
	return summation + uncertain.EdgeUncertainty()*under/integral*(1/s.edge.Theta+groundReach)
}

// lead fills in what follows from the leader's dynamic exponent f(0).
func (s *Solution) lead(f float64) {
	s.LeaderExponent = f - 1
	s.DegreeExponent = 1 + 1/f
	s.Halving = math.Pow(2, 1/(1-f))
}

// exactMu and drawnMu are the last steps in ln(-mu) of the search for mu: for figures, and for curves. The error after a
// step is about its square.
const exactMu, drawnMu = 1e-14, 1e-3

// Mu returns the chemical potential: I(beta, mu) = r, for 0 < r <= I(beta, 0). Newton's method in ln(-mu), kept inside a
// bracket: -ln(1 + 1/r)/beta is at or below the root, because every energy is >= 0. A root nearer to 0 than 1e-300 is
// returned as -1e-300.
func (s *Spectrum) Mu(beta, r float64) (float64, error) { return s.mu(beta, r, math.NaN()) }

// mu is Mu where I(beta, 0) - r is known as well, NaN if not.
func (s *Spectrum) mu(beta, r, surplus float64) (float64, error) {
	if surplus < nearby*r && s.edge.Theta > 0 {
		return s.heat(beta).nearTransition(surplus)
	}
	return s.heat(beta).potential(r, math.Log(math.Log1p(1/r)/beta)-1, exactMu)
}

// errNoConvergence comes with the best mu so far.
var errNoConvergence = errors.New("it was still moving after 200 steps")

// toward returns where a search goes on from x: to next where that lies between low and high, else to their middle; done
// tells that it has arrived, within tol.
func toward(x, next, low, high, tol float64) (to float64, done bool) {
	if math.Abs(next-x) < tol*math.Max(1, math.Abs(x)) {
		return next, true
	}
	if !(next > low && next < high) {
		return (low + high) / 2, high-low < tol
	}
	return next, false
}

// potential searches for mu from ln(-mu) = start until a step is smaller than tol.
func (h *heated) potential(r, start, tol float64) (float64, error) {
	least := math.Log(muLeast)
	low, high := least, math.Log(math.Log1p(1/r)/h.beta)
	ground := math.NaN() // I(0), found only where mu may be close to 0
	if !h.leveled() && h.edge.Theta > 0 {
		ground = h.GroundIntegral(h.beta, 0)
	}
	// Where the density is a number p0 > 0 up to the ground level, I = const - p0 ln(-mu)/beta once mu is far below all else.
	deep := math.Min(h.base, h.top-math.Log(math.Max(1, h.beta))) - 25
	if !h.leveled() && h.edge.Theta == 0 && deep > least {
		if i, _ := h.integralAndSlope(-math.Exp(deep)); i < r {
			return -math.Max(muLeast, math.Exp(deep-(r-i)*h.beta/h.edge.Scale)), nil
		}
		low = deep
	}
	y := math.Max(low, math.Min(start, high))
	for range 200 {
		i, slope := h.integralAndSlope(-math.Exp(y))
		if i > r {
			low = y
		} else {
			high = y
		}
		// ln I is nearly straight in ln(-mu); near the transition ln(I(0) - I) is.
		next := y - math.Log(i/r)*i/slope
		if r > 0.7*ground && i < ground {
			next = y - math.Log((ground-r)/(ground-i))*(ground-i)/slope
		}
		if next <= least && low == least {
			if h.GroundIntegral(h.beta, -muLeast) <= r {
				return -muLeast, nil
			}
		}
		done := false
		if y, done = toward(y, next, low, high, tol); done {
			return -math.Exp(y), nil
		}
	}
	return -math.Exp(y), errNoConvergence
}

// nearTransition solves I(beta, 0) - I(beta, mu) = surplus by Newton's method between ln of both sides, in ln(-mu), kept
// inside a bracket; the left side is a sum of positive terms. Where -mu is far below every other scale and the edge
// exponent theta is well below 1 the left side is
//
//	(Scale/beta) (-mu)^theta pi/sin(pi theta).
func (h *heated) nearTransition(surplus float64) (float64, error) {
	low, high := math.Log(muLeast), math.Log(math.Log1p(1/(h.GroundIntegral(h.beta, 0)-surplus))/h.beta)
	y := math.Log(surplus / h.beta)
	if theta := h.edge.Theta; theta < 0.9 {
		y = math.Log(surplus*h.beta*math.Sin(math.Pi*theta)/(math.Pi*h.edge.Scale)) / theta
		if y < math.Min(h.base, h.top-math.Log(math.Max(1, h.beta)))-40/(1-theta) {
			return -math.Exp(math.Max(y, low)), nil
		}
	}
	y = math.Max(low, math.Min(y, high))
	for range 200 {
		gap, slope := h.gap(-math.Exp(y))
		if gap < surplus {
			low = y
		} else {
			high = y
		}
		next := y + math.Log(surplus/gap)*gap/slope
		done := false
		if y, done = toward(y, next, low, high, exactMu); done {
			return -math.Exp(y), nil
		}
	}
	return -math.Exp(y), errNoConvergence
}

// Critical returns the sharpness at which a condensate begins, I(beta, 0) = r, or NaN where the law allows none up to 1e6.
// There is never more than one: d ln I/d ln beta = -∫ p x n (n+1)/∫ p n <= -1, since x (n+1) = x/(1 - exp(-x)) >= 1.
func (s *Spectrum) Critical(r float64) float64 {
	if s.leveled() || s.edge.Theta <= 0 {
		return math.NaN()
	}
	// Newton's method in ln beta for ln I, kept inside the bounds by bisection.
	low, high := math.Log(betaLow), math.Log(betaHigh)
	x := -math.Log(s.Mean(func(e float64) float64 { return e })) // about the scale of the law
	x = math.Max(low, math.Min(x, high))
	step := math.Inf(1)
	for range 200 {
		i, slope := s.groundAndSlope(math.Exp(x))
		miss := math.Log(i / r)
		if miss > 0 {
			low = x
		} else {
			high = x
		}
		next := x - miss*i/slope
		if next >= math.Log(betaHigh) && high == math.Log(betaHigh) {
			if i, _ := s.groundAndSlope(betaHigh); i > r {
				return math.NaN()
			}
		}
		before := step
		step = math.Abs(next - x)
		// Steps that are small and grow again are rounding.
		if step < 1e-12 && step >= before {
			return math.Exp(next)
		}
		done := false
		if x, done = toward(x, next, low, high, 1e-15); done {
			return math.Exp(x)
		}
	}
	return math.Exp(x)
}

// Occupation returns the mean number of links above the open share's floor, in units of m(1+r)+a, that a member of
// energy eps holds:
//
//	n = 1 / (exp(beta (eps - mu)) - 1).
//
// +Inf at the ground level of a condensate.
func Occupation(betaEps, betaMu float64) float64 { return 1 / math.Expm1(betaEps-betaMu) }

// Exponent returns the dynamic exponent f = exp(-beta (eps - mu)): a member's tickets grow as (t/t0)^f.
func Exponent(betaEps, betaMu float64) float64 { return math.Exp(betaMu - betaEps) }
