// Package standing says where a network stands, in words: regime, margin, and what holds at its own size.
package standing

import (
	"fmt"
	"math"
	"strings"

	"preponder/sim/bose"
)

// Facts are what a verdict speaks of.
type Facts struct {
	Solution bose.Solution
	Ceiling  float64  // 0 = none
	Kernel   float64  // 1 in the plain rule
	Outside  []string // other levers the theory does not cover, by their names in a sentence
	Distinct bool
	Links    float64
	Late     int // size at which levers begin, 0 = from the start
	Planned  float64
	Reach    *bose.Reach      // how far sizes are from endless growth; nil where not asked for
	Top      *bose.TopFitness // in records, at today's size
	Beta     float64
}

// A Verdict is what an entry folds down to.
type Verdict struct {
	Regime  bose.Regime `json:"regime"`
	Heading string      `json:"heading"`
	Line    string      `json:"line"`   // one sentence on endless growth
	Reason  string      `json:"reason"` // why the theory does not speak, or what it leaves out
	Margin  string      `json:"margin"` // the margin in words
	AtSize  string      `json:"atSize"` // where the planned size is far from endless growth: how far, and from what size on not
}

// near is how close the pull must come to that of endless growth for the theory to speak of a size.
const near = 0.1

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
		v.AtSize = records(f)
	default:
		v.Heading, v.Line = "No limit verdict", "The theory of endless growth does not cover this rule; the outlook answers."
	}
	if f.Reach != nil && f.Planned > 1 {
		v.AtSize = atSize(f)
	}
	if len(f.Outside) > 0 || f.Kernel != 1 {
		v.outside(f)
	} else if f.Ceiling > 0 {
		v.AtSize = ""
		v.lever(f, s)
	} else if f.Distinct && s.Regime == bose.Condensate {
		v.Reason = fmt.Sprintf("Distinct partners keep any one member at %s of all links or below.", Percent(1/math.Max(1, f.Links)))
	}
	return v
}

// outside rewrites the verdict where levers are in force that the theory does not cover.
func (v *Verdict) outside(f Facts) {
	names := f.Outside
	if f.Ceiling > 0 {
		names = append(names, "a ceiling")
	}
	plain := v.Heading
	v.AtSize = ""
	v.Reason = fmt.Sprintf("Figures and curves are those of the rule without: %s.", lower(plain))
	switch {
	case len(names) == 0 && f.Kernel > 1:
		v.Regime, v.Heading = bose.Gelation, "Gelation"
		v.Line = "With a kernel above 1 one member takes nearly all links in endless growth, whatever the fitness."
		if f.Distinct {
			v.Line = fmt.Sprintf("With a kernel above 1 a few members take nearly all links in endless growth; distinct partners keep each at %s or below.", Percent(1/math.Max(1, f.Links)))
		}
	case len(names) == 0:
		v.Regime, v.Heading = bose.Sublinear, "Sublinear"
		v.Line = "With a kernel below 1 every share fades in endless growth, whatever the fitness."
	default:
		if f.Kernel != 1 {
			names = append(names, "a kernel")
		}
		list := names[0]
		if n := len(names); n > 1 {
			list = strings.Join(names[:n-1], ", ") + " and " + names[n-1]
		}
		v.Regime, v.Heading = bose.Unknown, "No limit verdict"
		v.Line = fmt.Sprintf("The theory of endless growth does not cover %s; the outlook answers.", list)
	}
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

// atSize says how far the planned size is from endless growth; nothing where the theory speaks of it.
func atSize(f Facts) string {
	low, high := f.Reach.Pull(f.Planned)
	if low > 1-near {
		return ""
	}
	early, late := f.Reach.Within(near)
	when := "at no size a network can reach"
	switch {
	case math.IsInf(late, 1) && !math.IsInf(early, 1):
		when = fmt.Sprintf("from about %s members at the earliest", size(early))
	case !math.IsInf(late, 1) && math.Round(math.Log10(early)) == math.Round(math.Log10(late)):
		when = fmt.Sprintf("from about %s members on", size(late))
	case !math.IsInf(late, 1):
		when = fmt.Sprintf("only between %s and %s members", size(early), size(late))
	}
	short := fmt.Sprintf("%s short of", Percent(1-low))
	if a, b := Percent(1-high), Percent(1-low); a != b && high < 1 {
		short = fmt.Sprintf("%s to %s short of", a, b)
	}
	text := fmt.Sprintf("At the planned %s members the pull is still %s its value in endless growth; theory is within 10 %% %s. For your size, go by the outlook.", size(f.Planned), short, when)
	if f.Solution.Regime == bose.FitGetRich && high*math.Exp(-f.Solution.BetaMu) < 1 {
		return "On paper only: up to the planned size it behaves like a condensate, and the fittest still gain share. " + text
	}
	return text
}

// records says what can be said at a size where no limit exists.
func records(f Facts) string {
	if f.Top == nil {
		return ""
	}
	t := f.Top
	return fmt.Sprintf("Among %s members the fittest is expected at %s times the middle fitness (%s to %s in 95 of 100 networks), and about %.0f of them were fitter than all before. The outlook shows how large a share that brings.",
		size(t.Members), fold(-f.Beta*t.Mid), fold(-f.Beta*t.High), fold(-f.Beta*t.Low), t.Records)
}

// fold writes exp(x).
func fold(x float64) string {
	switch v := math.Exp(x); {
	case x > math.Log(1e6):
		return tenTo(x / math.Ln10)
	case v >= 100:
		return size(v)
	default:
		return fmt.Sprintf("%.2g", v)
	}
}

// tenTo writes a power of ten, its exponent rounded.
func tenTo(x float64) string {
	raised := strings.NewReplacer("-", "⁻", "0", "⁰", "1", "¹", "2", "²", "3", "³", "4", "⁴", "5", "⁵", "6", "⁶", "7", "⁷", "8", "⁸", "9", "⁹")
	return "10" + raised.Replace(fmt.Sprintf("%.0f", x))
}

// size writes a number of members: to two digits above 100,000, as a power of ten above a thousand million.
func size(n float64) string {
	if n > 1e9 {
		return tenTo(math.Log10(n))
	}
	if n > 1e5 {
		unit := math.Pow(10, math.Floor(math.Log10(n))-1)
		n = math.Round(n/unit) * unit
	}
	s := fmt.Sprintf("%.0f", n)
	for i := len(s) - 3; i > 0; i -= 3 {
		s = s[:i] + "," + s[i:]
	}
	return s
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
	return "by a factor of " + tenTo(math.Log10(x))
}
