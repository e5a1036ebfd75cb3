// Package standing says where a network stands, in words: regime, margin, and what holds at its own size.
package standing

import (
	"fmt"
	"math"

	"preponder/sim/bose"
)

// Facts are what a verdict speaks of.
type Facts struct {
	Solution bose.Solution
	Ceiling  float64 // 0 = none
	Distinct bool
	Links    float64
	Late     int // size at which levers begin, 0 = from the start
}

// A Verdict is what an entry folds down to.
type Verdict struct {
	Regime  bose.Regime `json:"regime"`
	Heading string      `json:"heading"`
	Line    string      `json:"line"`   // one sentence on endless growth
	Reason  string      `json:"reason"` // why the theory does not speak, or what it leaves out
	Margin  string      `json:"margin"` // the margin in words
}

// Describe returns the verdict.
func Describe(f Facts) Verdict {
	s := f.Solution
	v := Verdict{Regime: s.Regime}
	switch s.Regime {
	case bose.Level:
		v.Heading, v.Line = "Level field", "First movers lead, and every share shrinks as the network grows."
		v.Margin = "all members are equally fit: no condensate at any size"
	case bose.FitGetRich:
		v.Heading, v.Line = "The fit get richer", "Fitter members overtake, yet every share shrinks."
		v.Margin = "the ground level can take all links that newcomers bring"
		if math.IsInf(s.Margin, 1) {
			v.Margin = "no sharpness makes this law condense"
		}
		if s.Halving < 1e12 {
			v.Line += fmt.Sprintf(" In endless growth the lead halves each time the network grows %s.", times(s.Halving))
		} else {
			v.Line += " On paper the lead fades, but not at any size a network can reach."
		}
	case bose.Condensate:
		v.Heading = "Condensate"
		v.Line = fmt.Sprintf("In endless growth the fittest few together keep %s of all links.", Percent(s.Condensate))
		v.Margin = fmt.Sprintf("the levels above the ground can hold only %s of what newcomers bring", Percent(s.Margin))
	case bose.Records:
		v.Heading, v.Line = "Records", "This law has no top fitness: fitter members take over in turn, for ever."
		v.Margin = "without a ground level there is no margin"
	default:
		v.Heading, v.Line = "No limit verdict", "The theory of endless growth does not cover this rule; the outlook answers."
	}
	if f.Ceiling > 0 {
		v.lever(f, s)
	} else if f.Distinct && s.Regime == bose.Condensate {
		v.Reason = fmt.Sprintf("Distinct partners keep any one member at %s of all links or below.", Percent(1/math.Max(1, f.Links)))
	}
	return v
}

// lever rewrites the verdict where a ceiling holds: no limit is known then.
func (v *Verdict) lever(f Facts, s bose.Solution) {
	v.Regime = bose.Unknown
	v.Reason = fmt.Sprintf("The theory does not cover a ceiling. Without it: %s.", lower(v.Heading))
	if s.Regime == bose.Condensate {
		v.Heading = "Condensate, shared"
		v.Line = fmt.Sprintf("The ceiling of %s splits the core. What the leader may not take goes to the next fittest.", Percent(f.Ceiling))
		return
	}
	v.Heading += ", with a ceiling"
	v.Line = fmt.Sprintf("No member takes links while it holds %s of all.", Percent(f.Ceiling))
}

func lower(s string) string {
	if s == "" {
		return s
	}
	return string(s[0]|0x20) + s[1:]
}

// Percent writes a share: whole from 10 %, one decimal from 1 %, two below.
func Percent(x float64) string {
	p := 100 * x
	switch {
	case math.IsNaN(p):
		return "an unknown share"
	case p >= 99.95 && p < 100:
		return "more than 99.9 %"
	case p >= 9.95:
		return fmt.Sprintf("%.0f %%", p)
	case p >= 0.995:
		return fmt.Sprintf("%.1f %%", p)
	case p >= 0.005 || p == 0:
		return fmt.Sprintf("%.2g %%", p)
	}
	return "less than 0.01 %"
}

func times(x float64) string {
	switch {
	case x < 9.95:
		return fmt.Sprintf("%.1f-fold", x)
	case x < 1e4:
		return fmt.Sprintf("%.0f-fold", x)
	case x < 1e6:
		return fmt.Sprintf("%.0f,000-fold", math.Round(x/1e3))
	}
	return fmt.Sprintf("by a factor of 10 to the %.0f", math.Round(math.Log10(x)))
}
