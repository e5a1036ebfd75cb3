package standing

import (
	"testing"

	"preponder/sim/bose"
	"preponder/sim/law"
)

func TestSentences(t *testing.T) {
	for _, c := range []struct {
		l             law.Law
		beta          float64
		ceiling       float64
		heading, line string
	}{
		{law.Power{Theta: 1}, 3, 0, "Condensate", "In endless growth the fittest few together keep 68 % of all links."},
		{law.Power{Theta: 1}, 0, 0, "Level field", "First movers lead, and every share shrinks as the network grows."},
		{law.Uniform{}, 1, 0, "The fit get richer", "Fitter members overtake, yet every share shrinks. In endless growth the lead halves each time the network grows 30-fold."},
		{law.Lognormal{Sigma: 1}, 1, 0, "Records", "This law has no top fitness: fitter members take over in turn, for ever."},
		{law.Power{Theta: 1}, 3, .15, "Condensate, shared", "The ceiling of 15 % splits the core. What the leader may not take goes to the next fittest."},
		{law.Power{Theta: 1}, 1, .15, "The fit get richer, with a ceiling", "No member takes links while it holds 15 % of all."},
		{law.Power{Theta: .003}, 30, 0, "The fit get richer", "Fitter members overtake, yet every share shrinks. On paper the lead fades, but not at any size a network can reach."},
	} {
		s, err := bose.Solve(c.l, c.beta, bose.Rule{Links: 2})
		if err != nil {
			t.Fatal(err)
		}
		v := Describe(Facts{Solution: s, Ceiling: c.ceiling, Kernel: 1, Links: 2})
		if v.Heading != c.heading || v.Line != c.line {
			t.Errorf("%#v at %g: %q %q", c.l, c.beta, v.Heading, v.Line)
		}
	}
}

func TestLeversOutsideTheTheory(t *testing.T) {
	s, err := bose.Solve(law.Power{Theta: 1}, 3, bose.Rule{Links: 2})
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		f             Facts
		regime        bose.Regime
		line, because string
	}{
		{Facts{Kernel: 1.2}, bose.Gelation, "With a kernel above 1 one member takes nearly all links in endless growth, whatever the fitness.", "Figures and curves are those of the rule without: condensate."},
		{Facts{Kernel: 1.2, Distinct: true, Links: 4}, bose.Gelation, "With a kernel above 1 a few members take nearly all links in endless growth; distinct partners keep each at 25 % or below.", "Figures and curves are those of the rule without: condensate."},
		{Facts{Kernel: 0.5}, bose.Sublinear, "With a kernel below 1 every share fades in endless growth, whatever the fitness.", "Figures and curves are those of the rule without: condensate."},
		{Facts{Kernel: 2, Outside: []string{"fading", "a levy"}, Ceiling: .1}, bose.Unknown, "The theory of endless growth does not cover fading, a levy, a ceiling and a kernel; the outlook answers.", "Figures and curves are those of the rule without: condensate."},
		{Facts{Kernel: 1, Outside: []string{"expiry"}}, bose.Unknown, "The theory of endless growth does not cover expiry; the outlook answers.", "Figures and curves are those of the rule without: condensate."},
	} {
		c.f.Solution = s
		if v := Describe(c.f); v.Regime != c.regime || v.Line != c.line || v.Reason != c.because {
			t.Errorf("%+v: %+v", c.f, v)
		}
	}
}

func TestAtSize(t *testing.T) {
	drawn, err := law.NewDrawn([]law.Knot{{Density: 1e-30}, {Eps: 1, Density: 2}})
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		l    law.Law
		beta float64
		n    float64
		want string
	}{
		{law.Power{Theta: 1}, 1, 20000, ""},
		{law.Power{Theta: 1}, 3, 20000, "At the planned 20,000 members the pull is still 19 % to 34 % short of its value in endless growth; theory is within 10 % only between 10¹² and 10¹⁵ members. For your size, go by the outlook."},
		{drawn, 3, 20000, "On paper only: up to the planned size it behaves like a condensate, and the fittest still gain share. At the planned 20,000 members the pull is still 19 % to 34 % short of its value in endless growth; theory is within 10 % only between 10¹² and 10¹⁵ members. For your size, go by the outlook."},
		{law.Lognormal{Sigma: 1}, 1, 5000, "Among 5,000 members the fittest is expected at 38 times the middle fitness (24 to 83 in 95 of 100 networks), and about 9 of them were fitter than all before. The outlook shows how large a share that brings."},
	} {
		rule := bose.Rule{Links: 2}
		s, err := bose.Solve(c.l, c.beta, rule)
		if err != nil {
			t.Fatal(err)
		}
		f := Facts{Solution: s, Kernel: 1, Links: 2, Planned: c.n, Beta: c.beta}
		if s.Regime == bose.Records {
			top := bose.TopOf(c.l, c.n)
			f.Top = &top
		} else {
			f.Reach = bose.NewReach(c.l, c.beta, s.BetaMu, rule)
		}
		if got := Describe(f).AtSize; got != c.want {
			t.Errorf("%#v at %g: %q, want %q", c.l, c.beta, got, c.want)
		}
	}
}

func TestPercent(t *testing.T) {
	for x, want := range map[float64]string{.41: "41 %", .0999: "10 %", .0123: "1.2 %", .00456: "0.46 %", .00001: "less than 0.01 %", 1: "100 %", .9999: "more than 99.9 %"} {
		if got := Percent(x); got != want {
			t.Errorf("%g: %q, want %q", x, got, want)
		}
	}
}
