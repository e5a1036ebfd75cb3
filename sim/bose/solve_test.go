package bose

import (
	"math"
	"testing"

	"preponder/sim/internal/near"
	"preponder/sim/law"
)

var plain = Rule{Links: 2}

func TestUniformFitness(t *testing.T) {
	// Bianconi & Barabasi, Europhys. Lett. 54, 436 (2001): C = 1.255 for uniform fitness; further digits from the closed
	// form 1/C = 1 + W0(-2 exp(-2))/2, derived by us.
	s, err := Solve(law.Uniform{}, 1, plain)
	if err != nil {
		t.Fatal(err)
	}
	near.Rel(t, "C", math.Exp(-s.BetaMu), 1.25500097491597526577, 1e-12)
	if s.Regime != FitGetRich || !math.IsInf(s.GroundIntegral, 1) {
		t.Errorf("uniform fitness: %v with I(0) = %g", s.Regime, s.GroundIntegral)
	}
	// Gamma energies with k = 1 are the same law (identity, derived).
	g, _ := Solve(law.Gamma{Shape: 1, Scale: 1}, 1, plain)
	near.Rel(t, "gamma k=1", g.BetaMu, s.BetaMu, 1e-11)
}

func TestDebyeFunctions(t *testing.T) {
	// I(beta, 0) = ((theta+1)/theta) D_theta(beta)/beta. D_n in the normalisation of Abramowitz & Stegun 27.1.1; rows of
	// x = 1 and 10 stand in the tests of the GNU Scientific Library, x = 0.5 to 12 digits by mpmath.
	rows := []struct{ n, x, d float64 }{
		{1, 1, 0.777504634112}, {2, 1, 0.707878475628}, {3, 1, 0.674415564078}, {4, 1, 0.654874068887},
		{1, .5, .881927156791}, {2, .5, .843721193347}, {3, .5, .824962968976}, {4, .5, .813845691720},
		{1, 10, .164443465680}, {2, 10, .0479714980201}, {3, 10, .0192957656903}, {4, 10, .00967367556027},
	}
	for _, r := range rows {
		got := NewSpectrum(law.Power{Theta: r.n}).GroundIntegral(r.x, 0)
		near.Rel(t, "Debye", got, (r.n+1)/r.n*r.d/r.x, 5e-12)
	}
}

func TestCriticalSharpness(t *testing.T) {
	// Values by mpmath from the Debye form and by direct quadrature, for the power law in the plain model.
	rows := []struct{ theta, beta float64 }{
		{0.25, 3.717024087594}, {0.5, 2.14763794092105}, {1, 1.40505421657848}, {2, 1.04495572092475},
		{3, 0.926670046514883}, {5, 0.832727877247781}, {10, 0.762715464786766},
	}
	for _, r := range rows {
		near.Rel(t, "beta_c", NewSpectrum(law.Power{Theta: r.theta}).Critical(1), r.beta, 1e-11)
	}
	// Gamma energies: zeros of the Hurwitz zeta form (DLMF 25.11.1), by mpmath.
	for _, r := range []struct{ k, beta float64 }{{1.25, 3.113940345391968}, {1.5, 1.485271163746884}, {2, 0.719635576728254}, {3, 0.353368307094373}, {4, 0.234087504468495}} {
		near.Rel(t, "gamma beta_c", NewSpectrum(law.Gamma{Shape: r.k, Scale: 1}).Critical(1), r.beta, 1e-11)
	}
	// The closed form extended to infinite energies, T > [zeta(theta+1) Gamma(theta+2)]^(-1/(theta+1)) (Bianconi and
	// Barabasi, Phys. Rev. Lett. 86, 5632, from memory), is a lower bound on the critical temperature only.
	if b := NewSpectrum(law.Power{Theta: 1}).Critical(1); 1/b <= 0.551328895421792 {
		t.Errorf("critical temperature %g below the published bound", 1/b)
	}
	if !math.IsNaN(NewSpectrum(law.Power{Theta: 0}).Critical(1)) {
		t.Error("a gas in two dimensions condenses")
	}
}

func TestChemicalPotential(t *testing.T) {
	rows := []struct{ theta, beta, mu float64 }{ // by mpmath
		{1, 1, -0.131336881744079}, {1, 0.5, -0.765828375794237}, {2, 1, -0.0232842558629507}, {0.5, 1, -0.209096340860765},
		{0, 1, -0.313261687518223}, // closed form mu = -ln(1 + exp(-beta))/beta, derived
	}
	for _, r := range rows {
		s, err := Solve(law.Power{Theta: r.theta}, r.beta, plain)
		if err != nil {
			t.Fatal(err)
		}
		near.Rel(t, "mu", s.Mu, r.mu, 1e-11)
	}
}

func TestCondensate(t *testing.T) {
	rows := []struct{ theta, beta, share float64 }{ // 1 - I, by mpmath
		{1, 2, 0.39305271539}, {1, 5, 0.87164952092}, {1, 10, 0.967111306864}, {2, 2, 0.630188017007}, {2, 5, 0.948301252183}, {.5, 5, 0.691603721488},
	}
	for _, r := range rows {
		s, _ := Solve(law.Power{Theta: r.theta}, r.beta, plain)
		near.Rel(t, "condensate", s.Condensate, r.share, 1e-10)
	}
	// Beta fitness: E[eta/(1-eta)] = a/(b-1); the condition is that of Borgs, Chayes, Daskalakis and Roch (STOC 2007), the
	// corollary for Beta laws ours.
	for _, r := range []struct{ a, b float64 }{{1, 3}, {2, 4}, {.5, 3}, {2, 5}, {1, 2}} {
		near.Rel(t, "Beta", NewSpectrum(law.Beta{A: r.a, B: r.b}).GroundIntegral(1, 0), r.a/(r.b-1), 1e-11)
	}
	// Fit-get-rich Beta laws: C with E[eta/(C-eta)] = 1, also (a/((a+b)C)) 2F1(1,a+1;a+b+1;1/C) = 1, by mpmath.
	for _, r := range []struct{ a, b, c float64 }{{1, 1, 1.255000974915975}, {1, 1.5, 1.094215641514786}, {2, 2, 1.174252582500823}, {2, 1, 1.462410299792367}} {
		s, _ := Solve(law.Beta{A: r.a, B: r.b}, 1, plain)
		near.Rel(t, "C of Beta", math.Exp(-s.BetaMu), r.c, 1e-11)
	}
	// Kingman's house of cards, J. Appl. Prob. 15 (1978): mutation 1/2, atom at the top fitness = (1 - I)/2, the same
	// share counted over link ends. Uniform q: mean fitness w = C/2 (mapping derived).
	s, _ := Solve(law.Uniform{}, 1, plain)
	near.Rel(t, "Kingman w", math.Exp(-s.BetaMu)/2, 0.627500487457987633, 1e-12)
}

func TestGammaEnergies(t *testing.T) {
	// Hurwitz zeta: I = (beta s)^-k zeta(k, 1 + 1/(beta s)); closed values pi^2/6 - 1 and so on.
	rows := []struct{ k, bs, i float64 }{
		{2, 1, math.Pi*math.Pi/6 - 1}, {3, 1, 0.202056903159594285}, {1.5, 1, 1.61237534868548834},
		{2, .5, 4 * (math.Pi*math.Pi/6 - 1.25)}, {2, 2, math.Pi*math.Pi/8 - 1},
	}
	for _, r := range rows {
		near.Rel(t, "gamma I", NewSpectrum(law.Gamma{Shape: r.k, Scale: r.bs}).GroundIntegral(1, 0), r.i, 1e-11)
	}
}

func TestFreeGasInThreeDimensions(t *testing.T) {
	// Without an upper cut-off n lambda^3 = zeta(3/2) = 2.612 at the transition (any textbook): p = (3/2) sqrt(eps) up to
	// e_max, beta*e_max large, gives I = (3/2) Gamma(3/2) zeta(3/2) beta^(-3/2).
	i := NewSpectrum(law.Power{Theta: 0.5}).GroundIntegral(400, 0)
	near.Rel(t, "zeta(3/2)", i*math.Pow(400, 1.5)/1.5/math.Gamma(1.5), 2.6123753486854883433, 1e-11)
}

func TestIdentities(t *testing.T) {
	laws := []law.Law{law.Power{Theta: 1}, law.Power{Theta: -.5}, law.Power{Theta: .01}, law.Beta{A: 2, B: .4}, law.Beta{A: .3, B: 1.7}, law.Uniform{Low: .3}, law.Gamma{Shape: 2.5, Scale: .3},
		law.NewTiers([]float64{0, .5, 2}, []float64{.1, .3, .6})}
	rules := []Rule{{Links: 2}, {Links: 1, HeadStart: 3}, {Links: 5, OpenShare: .3}, {Links: 3, HeadStart: .5, OpenShare: .1}}
	for _, l := range laws {
		s := NewSpectrum(l)
		near.Rel(t, "mass", s.Mean(func(float64) float64 { return 1 }), 1, 1e-11)
		for _, rule := range rules {
			for _, beta := range []float64{.01, .7, 3, 40, 1e4} {
				sol, err := s.Solve(beta, rule)
				if err != nil {
					t.Fatalf("%#v at %g: %v", l, beta, err)
				}
				if sol.Regime == FitGetRich && sol.Mu > -muLeast {
					t.Errorf("%#v at %g: mu %g", l, beta, sol.Mu)
				}
				if sol.Regime == FitGetRich && sol.Mu < -muLeast {
					near.Rel(t, "I(mu) = R", s.GroundIntegral(beta, sol.Mu), rule.Balance(), 1e-11)
				}
				// Closed forms that dissolve a condensate bring the margin to 1.
				if sol.Regime == Condensate && rule.HeadStart == 0 && rule.OpenShare == 0 {
					near.Rel(t, "a*", sol.GroundIntegral/Rule{rule.Links, sol.DissolveHeadStart, 0}.Balance(), 1, 1e-11)
					// 1 - r* loses the digits that r* is close to 1.
					near.Rel(t, "r*", sol.GroundIntegral/Rule{rule.Links, 0, sol.DissolveOpenShare}.Balance(), 1, 1e-14/(1-sol.DissolveOpenShare)+1e-11)
				}
			}
		}
	}
}

func TestLevelAndRecords(t *testing.T) {
	s, _ := Solve(law.Power{Theta: 1}, 0, plain)
	if s.Regime != Level || math.Abs(s.LeaderExponent+0.5) > 1e-15 || math.Abs(s.Halving-4) > 1e-12 {
		t.Errorf("level: %+v", s) // first movers' links grow as the square root of time
	}
	// Open share 1: fitness counts for nothing.
	for _, l := range []law.Law{law.Power{Theta: 1}, law.Lognormal{Sigma: 1}, law.NewTiers([]float64{0, 1}, []float64{1, 1})} {
		s, err := Solve(l, 3, Rule{Links: 2, OpenShare: 1})
		if err != nil || s.Regime != Level || s.LeaderExponent != -1 || s.Halving != 2 {
			t.Errorf("open share 1: %+v, %v", s, err)
		}
		CurvesOf(l, 3, Rule{Links: 2, OpenShare: 1}, s)
		if s, err = Solve(l, 3, Rule{Links: 2, OpenShare: 1 - 1e-9}); err != nil {
			t.Errorf("open share just below 1: %+v, %v", s, err)
		}
	}
	if s, _ := Solve(law.Lognormal{Sigma: 1}, 1, plain); s.Regime != Records {
		t.Errorf("lognormal: %v", s.Regime)
	}
}

func BenchmarkSolveWithCurves(b *testing.B) {
	for b.Loop() {
		s := NewSpectrum(law.Power{Theta: 1})
		sol, _ := s.Solve(3, plain)
		s.Curves(3, plain, sol)
	}
}
