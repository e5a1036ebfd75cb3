package evidence

import (
	"fmt"
	"math"
)

// Caution stands beside every verdict on a log.
const Caution = "A screening model: it does not define a market, prove harm or replace the rules that apply to you. Concentration thresholds differ by jurisdiction; take qualified advice before acting on members."

// Sentence says why the plain rule does not hold.
func (r Rule) Sentence() string {
	const head = "This network does not grow by the plain rule: "
	const tail = ", so no condensate verdict is given."
	switch r.Leading {
	case "idling":
		if r.Idling > 0 {
			return head + fmt.Sprintf("who was active lately counts (weight halves when idle grows %s-fold)", fold(r.Idling)) + tail
		}
		return head + "members that were idle lately are chosen more, not less" + tail
	case "fading":
		if r.Fading > 0 {
			return head + fmt.Sprintf("age counts against a member (weight halves when age grows %s-fold)", fold(r.Fading)) + tail
		}
		return head + fmt.Sprintf("age counts for a member beyond the links it holds (weight doubles when age grows %s-fold)", fold(-r.Fading)) + tail
	case "openShare":
		return head + fmt.Sprintf("about %.0f %% of the links go to any member alike, whatever its fitness", 100*r.OpenShare) + tail
	}
	return head + fmt.Sprintf("links held attract new ones with the exponent %.2f instead of 1", r.Kernel) + tail
}

// fold returns the growth factor x with x^-exponent = 1/2.
func fold(exponent float64) string {
	x := math.Pow(2, 1/exponent)
	switch {
	case x > 1000:
		return "more than 1,000"
	case x >= 10:
		return fmt.Sprintf("%.0f", x)
	}
	return fmt.Sprintf("%.1f", x)
}

// Explained says how much of the choices fitness and the other terms explain.
func (r Rule) Explained() string {
	return fmt.Sprintf("Under the plain rule fitness explains %.2f bits of each choice; with recent activity, age and links held free it is %.2f, over equal members.", r.Bits.Fitness, r.Bits.Extended)
}

// Words for the verdicts: a heading, and what it means.
func (c Condensed) Words() (heading, meaning string) {
	switch c.Verdict {
	case Condensate:
		heading = "Heading for a condensate"
		meaning = fmt.Sprintf("Ever more of all links gathers on the very fittest: in endless growth %s.", c.core())
		if c.NoTop {
			meaning += " No top in sight: a fitter newcomer can still take over."
		}
	case FitGetRich:
		heading = "The fit get richer"
		meaning = "Fitter members overtake, yet every member's share fades in the end."
	case Level:
		heading = "Level field"
		meaning = "No difference in fitness is visible in this log: first movers lead, and every share fades as the network grows."
	case Undecided:
		heading = "Undecided"
		meaning = "The log cannot tell whether a condensate forms. " + c.open()
	default:
		heading = "No verdict"
		if c.Verdict == Forecasted {
			heading = "A forecast, not a verdict"
		}
		if len(c.Check.Reasons) > 0 {
			meaning = c.Check.Reasons[0]
		}
	}
	if c.Members < SureMembers && (c.Verdict == Condensate || c.Verdict == FitGetRich) {
		meaning += fmt.Sprintf(" Take it with care: with %d members a verdict is rarely sure.", c.Members)
	}
	return heading, meaning
}

// core says which share of links gathers on the fittest, from both ends of the interval.
func (c Condensed) core() string {
	low, high := 1-value(c.Ground.High), 1-value(c.Ground.Low)
	return fmt.Sprintf("the fittest few together keep %.0f to %.0f %% of all links", 100*math.Max(low, 0), 100*high)
}

func (c Condensed) open() string {
	switch {
	case c.Ground.Estimate == nil:
		return "None of the laws of fitness known here fits it."
	case c.Ground.High == nil:
		return fmt.Sprintf("The margin is at least %.2g with no upper end; a condensate needs it below 1.", value(c.Margin.Low))
	}
	return fmt.Sprintf("The margin is %.2g to %.2g; a condensate needs it below 1.", value(c.Margin.Low), value(c.Margin.High))
}

func value(p *float64) float64 {
	if p == nil {
		return math.Inf(1)
	}
	return *p
}
