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
		v := Describe(Facts{Solution: s, Ceiling: c.ceiling, Links: 2})
		if v.Heading != c.heading || v.Line != c.line {
			t.Errorf("%#v at %g: %q %q", c.l, c.beta, v.Heading, v.Line)
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
