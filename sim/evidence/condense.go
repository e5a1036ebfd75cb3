package evidence

import (
	"fmt"
	"math"
	"sort"

	"preponder/sim/growth"
	"preponder/sim/internal/exact"
	"preponder/sim/law"
	"preponder/sim/share"
)

// Sizes of what a casebook keeps of a log.
const topMembers, explained, pathPoints = 16, 6, 20 // explained: members whose links are split by origin

// Limits checked on the way in.
const maxSingles, maxClasses, maxMembers = 200, 20000, growth.MaxMembers

// A Range is an interval on the page and in files; null stands for an absent or infinite value.
type Range struct {
	Estimate *float64 `json:"estimate"`
	Low      *float64 `json:"low"`
	High     *float64 `json:"high"`
}

// A Check says whether the model fits the log.
type Check struct {
	Verdict string   `json:"verdict"` // "fits", "reservations" or "does not fit"
	Reasons []string `json:"reasons"`
}

// A Member is one of the largest: where it stands and why.
type Member struct {
	ID      string     `json:"id"`
	Links   int32      `json:"links"`
	Arrived int32      `json:"arrived"` // rank of arrival, from 0
	Fitness *Range     `json:"fitness,omitempty"`
	Spread  [2]float64 `json:"spread,omitempty"` // mean and standard deviation of ln fitness
	Origin  *Split     `json:"origin,omitempty"`
}

// A Split is mean x early x good x chance = links chosen.
type Split struct {
	Mean   float64    `json:"mean"`
	Early  float64    `json:"early"`
	Good   float64    `json:"good"`
	Chance float64    `json:"chance"`
	Range  [2]float64 `json:"range"` // 95 % of good
}

// A Class is the members with equal links and alike fitness: links, mean and standard deviation of ln fitness, count.
type Class [4]float64

// A Track is how shares went.
type Track struct {
	Members []int32   `json:"members"`
	Share   []float64 `json:"share"`
	Top4    []float64 `json:"top4"`
	HHI     []float64 `json:"hhi"`
}

// Condensed is what a casebook keeps of a log: enough for the verdict and the outlook, no raw link.
type Condensed struct {
	Label      string         `json:"label"`
	Named      bool           `json:"named"` // ids are those of the log, not masked
	Rows       int            `json:"rows"`
	Used       int            `json:"used"`
	LeftOut    map[string]int `json:"leftOut"`
	Members    int            `json:"members"`
	Links      int            `json:"links"`
	Choices    int            `json:"choices"`
	PerArrival float64        `json:"perArrival"`
	Top4       float64        `json:"top4"`
	HHI        float64        `json:"hhi"`
	Gini       float64        `json:"gini"`
	Verdict    string         `json:"verdict"`
	Ground     Range          `json:"groundIntegral"`
	Margin     Range          `json:"margin"`
	NoTop      bool           `json:"noTop"`
	Rule       Rule           `json:"rule"`
	Check      Check          `json:"check"`
	Notes      []string       `json:"notes"`
	Law        *Law           `json:"law"`
	Draws      []Law          `json:"draws"`
	Top        []Member       `json:"top"`
	Classes    []Class        `json:"classes"`
	Track      Track          `json:"track"`
	Forecast   *Forecast      `json:"forecast,omitempty"`
}

// Condense keeps of rows and study what a casebook needs.
func Condense(l *Rows, s *Study, label string) *Condensed {
	h := s.history
	received := h.Received()
	spread := share.Of(received)
	c := &Condensed{Label: label, Named: true, Rows: l.Read, Used: spread.Links, LeftOut: map[string]int{}, Members: h.Members(), Links: spread.Links, Choices: h.Choices,
		PerArrival: round(h.PerArrival(), 6), Top4: spread.Top4, HHI: spread.HHI, Gini: spread.Gini, Verdict: s.Verdict, NoTop: s.NoTop, Rule: s.Rule.trimmed(), Law: s.Law, Draws: []Law{}, Classes: []Class{}, Notes: h.notes()}
	for _, p := range l.Problems {
		c.LeftOut[p.Reason] = p.Count
	}
	if h.LeftOut > 0 {
		c.LeftOut[answers] = h.LeftOut
	}
	if s.Law != nil {
		c.Ground, c.Margin = ranged(s.Ground), ranged(s.Margin)
		c.Law.trim()
		for _, d := range s.Draws {
			d.trim()
			c.Draws = append(c.Draws, d)
		}
	}
	if c.Law != nil && (c.PerArrival < 1 || c.PerArrival > growth.MaxLinks) {
		s.Reasons = append(s.Reasons, fmt.Sprintf("Newcomers bring %.2g links each on average; networks are grown forward with 1 to %d, so no outlook is given.", c.PerArrival, growth.MaxLinks))
		c.Law, c.Draws = nil, []Law{}
	}
	c.Forecast = s.Forecast.trimmed()
	c.Check = s.check(c.Notes)
	c.keepMembers(s, received)
	path := share.Along(h.Target, h.Before, min(10, h.Members()), h.Members(), pathPoints, nil)
	c.Track = Track{path.Members, rounds(path.Share, 4), rounds(path.Top4, 4), rounds(path.HHI, 0)}
	return c
}

func (s *Study) check(notes []string) Check {
	c := Check{Verdict: "fits", Reasons: s.Reasons}
	if c.Reasons == nil {
		c.Reasons = []string{}
	}
	switch {
	case s.Verdict == None || s.Verdict == Forecasted:
		c.Verdict = "does not fit"
	case len(s.Reasons)+len(notes) > 0:
		c.Verdict = "reservations"
	}
	return c
}

// answers is the reason for which replies are left out.
const answers = "it answers an earlier link"

// notes are what a reader must know of the log, each with its count.
func (h *History) notes() []string {
	out := []string{}
	links := len(h.Target)
	if part := h.Unchosen - 1; part*50 > h.Members() {
		out = append(out, fmt.Sprintf("%d %% of members first appear as somebody's target, not by choosing.", int(math.Round(100*float64(part)/float64(h.Members())))))
	}
	if h.Choices > 0 && !h.NewcomersOnly && h.ByNewcomers*10 < h.Choices*9 {
		out = append(out, fmt.Sprintf("%d %% of choices are made by members already there, %d %% by newcomers.", int(math.Round(100-100*float64(h.ByNewcomers)/float64(h.Choices))), int(math.Round(100*float64(h.ByNewcomers)/float64(h.Choices)))))
	}
	switch all := links + h.LeftOut; {
	case h.LeftOut > 0:
		out = append(out, fmt.Sprintf("%d links that answer an earlier one, %d %% of all, are left out.", h.LeftOut, int(math.Round(100*float64(h.LeftOut)/float64(all)))))
	case h.Replies*50 > all:
		out = append(out, fmt.Sprintf("%d %% of all links answer an earlier link.", int(math.Round(100*float64(h.Replies)/float64(all)))))
	}
	if h.NewcomersOnly {
		out = append(out, "Only the choices of newcomers are scored; the links of members already there count as links held.")
	}
	if h.Repeats > 0 {
		out = append(out, fmt.Sprintf("%d links repeat a pair that is already linked; they count as choices of their own.", h.Repeats))
	}
	if h.Members() >= MinMembers && h.Members() < SureMembers {
		out = append(out, fmt.Sprintf("With %d members the regime is usually undecided; about %d are needed.", h.Members(), SureMembers))
	}
	return out
}

// keepMembers keeps the largest one by one and the rest in classes.
func (c *Condensed) keepMembers(s *Study, received []int32) {
	h := s.history
	top := share.Largest(received, topMembers)
	if len(top) > 0 && received[top[len(top)-1]] == 0 {
		for len(top) > 0 && received[top[len(top)-1]] == 0 {
			top = top[:len(top)-1]
		}
	}
	var origins []Origin
	if s.Fitness != nil {
		origins = s.Origins(top[:min(explained, len(top))])
	}
	single := map[int32]bool{}
	for i, j := range top {
		single[j] = true
		m := Member{ID: h.Names[j], Links: received[j], Arrived: j}
		if s.Fitness != nil {
			p := s.Fitness[j]
			r := ranged(Interval{p.mean, p.low, p.high})
			m.Fitness, m.Spread = &r, [2]float64{round(p.log, 4), round(p.sd, 4)}
			if i < explained {
				o := origins[i]
				m.Origin = &Split{sig(o.Mean), sig(o.Early), sig(o.Good), sig(o.Chance), [2]float64{sig(o.GoodLow), sig(o.GoodHigh)}}
			}
		}
		c.Top = append(c.Top, m)
	}
	if s.Fitness == nil {
		return
	}
	type key struct{ n, bin int32 }
	at := map[key][3]float64{} // sum of ln fitness, of its square with the spread, count
	for j, n := range received {
		if single[int32(j)] {
			continue
		}
		p := s.Fitness[j]
		k := key{n, int32(math.Floor(p.log / 0.5))}
		a := at[k]
		at[k] = [3]float64{a[0] + p.log, a[1] + p.log*p.log + p.sd*p.sd, a[2] + 1}
	}
	for k, a := range at {
		mean := a[0] / a[2]
		c.Classes = append(c.Classes, Class{float64(k.n), round(mean, 3), round(math.Sqrt(math.Max(0, a[1]/a[2]-mean*mean)), 3), a[2]})
	}
	sort.Slice(c.Classes, func(i, k int) bool {
		a, b := c.Classes[i], c.Classes[k]
		return a[0] > b[0] || (a[0] == b[0] && a[1] > b[1])
	})
}

// Start returns the network as the log left it, for growth under law l: run 0 spreads the members of a class evenly over
// what is known of them, other runs draw from it, keyed by seed. Members come in the order of Top, then of Classes.
func (c *Condensed) Start(l law.Law, seed uint32, run int) *growth.Start {
	s := &growth.Start{}
	low, high := l.Support()
	key := exact.Key(seed, exact.Posterior)
	add := func(links int32, log, sd, middle float64) {
		if run == 0 {
			log += float64(sd * exact.Normal(middle))
		} else {
			log += float64(sd * exact.Normal(exact.Unit(exact.Bits(key, uint64(len(s.Energy)), uint64(run)))))
		}
		e := c.top(run) - log
		if !math.IsInf(low, -1) {
			e = math.Max(e, 0)
		}
		if low == high {
			e = low
		}
		s.Energy = append(s.Energy, e)
		s.Received = append(s.Received, links)
	}
	for _, m := range c.Top {
		add(m.Links, m.Spread[0], m.Spread[1], 0.5)
	}
	for _, k := range c.Classes {
		for i := range int(k[3]) {
			add(int32(k[0]), k[1], k[2], (float64(i)+0.5)/k[3])
		}
	}
	s.Rank = make([]float32, len(s.Energy))
	for j, e := range s.Energy {
		s.Rank[j] = float32(l.Cumulative(e))
	}
	return s
}

// LawOf returns the law for a run: run 0 the best fit, other runs the law draws in turn.
func (c *Condensed) LawOf(run int) Law {
	if run == 0 || len(c.Draws) == 0 {
		return *c.Law
	}
	return c.Draws[(run-1)%len(c.Draws)]
}

func (c *Condensed) top(run int) float64 { return c.LawOf(run).Top }

// Masked returns the evidence with its members named by order of arrival and without the label of its file.
func (c *Condensed) Masked() *Condensed {
	m := *c
	m.Named, m.Label = false, ""
	m.Top = append([]Member(nil), c.Top...)
	for i := range m.Top {
		m.Top[i].ID = fmt.Sprintf("M%d", m.Top[i].Arrived)
	}
	return &m
}

// Verify refuses evidence that could not have come from Condense.
func (c *Condensed) Verify() error {
	switch {
	case c.Members < 1 || c.Members > maxMembers || c.Links < 0 || c.Links > maxMembers*growth.MaxLinks:
		return fmt.Errorf("it speaks of %d members and %d links; at most %d members are allowed", c.Members, c.Links, maxMembers)
	case len(c.Top) > maxSingles || len(c.Classes) > maxClasses || len(c.Draws) > 100:
		return fmt.Errorf("it holds %d members one by one and %d classes; %d and %d are allowed", len(c.Top), len(c.Classes), maxSingles, maxClasses)
	case len(c.Track.Share) != len(c.Track.Members) || len(c.Track.Top4) != len(c.Track.Members) || len(c.Track.HHI) != len(c.Track.Members):
		return fmt.Errorf("its shares over size are of unequal length")
	}
	if err := c.Forecast.verify(); err != nil {
		return err
	}
	if c.Law == nil {
		return nil
	}
	for _, l := range append([]Law{*c.Law}, c.Draws...) {
		if err := l.verify(); err != nil {
			return err
		}
	}
	if !(c.PerArrival >= 0.01 && c.PerArrival <= growth.MaxLinks) {
		return fmt.Errorf("links per newcomer are %g; 0.01 to %d are allowed", c.PerArrival, growth.MaxLinks)
	}
	members, links := 0.0, 0.0
	for _, m := range c.Top {
		members++
		links += float64(m.Links)
		if m.Links < 0 || !(math.Abs(m.Spread[0]) < 1e3 && m.Spread[1] >= 0 && m.Spread[1] < 1e3) {
			return fmt.Errorf("the member %q has values out of range", m.ID)
		}
	}
	for _, k := range c.Classes {
		if k[0] < 0 || k[3] < 1 || k[0] != math.Floor(k[0]) || k[3] != math.Floor(k[3]) || !(math.Abs(k[1]) < 1e3 && k[2] >= 0 && k[2] < 1e3) {
			return fmt.Errorf("a class of members has values out of range")
		}
		members += k[3]
		links += k[0] * k[3]
	}
	if int(members) != c.Members || int(links) != c.Links {
		return fmt.Errorf("its members and classes add up to %.0f members and %.0f links, not to the %d and %d it names", members, links, c.Members, c.Links)
	}
	return nil
}

// verify refuses a law out of range.
func (l Law) verify() error {
	if math.Abs(l.Top) > 100 || l.Stretch < 0 || l.Stretch > 1e6 {
		return fmt.Errorf("a fitted law has values out of range")
	}
	if l.Family == "tiers" {
		k := len(l.Values) / 2
		if k < 1 || k > 8 || len(l.Values)%2 != 0 {
			return fmt.Errorf("a fitted law of tiers has %d values", len(l.Values))
		}
		for _, w := range l.Values[k:] {
			if !(w > 0) {
				return fmt.Errorf("a fitted law of tiers has a weight that is not above 0")
			}
		}
		return nil
	}
	f, err := law.FamilyNamed(l.Family)
	if err != nil {
		return err
	}
	if len(l.Values) != len(f.Fields) {
		return fmt.Errorf("a fitted %s law has %d values instead of %d", l.Family, len(l.Values), len(f.Fields))
	}
	return f.Check(l.Values)
}

func ranged(i Interval) Range { return Range{finite(i.Estimate), finite(i.Low), finite(i.High)} }

func finite(v float64) *float64 {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return nil
	}
	v = sig(v)
	return &v
}

// sig keeps four digits: more than the log can tell, few enough for a link.
func sig(v float64) float64 {
	if v == 0 || math.IsNaN(v) || math.IsInf(v, 0) {
		return v
	}
	return round(v, 3-int(math.Floor(math.Log10(math.Abs(v)))))
}

func round(v float64, digits int) float64 {
	p := math.Pow(10, float64(digits))
	if r := math.Round(v*p) / p; !math.IsNaN(r) && !math.IsInf(r, 0) {
		return r
	}
	return v
}

func rounds(v []float64, digits int) []float64 {
	out := make([]float64, len(v))
	for i, x := range v {
		out[i] = round(x, digits)
	}
	return out
}

func (r Rule) trimmed() Rule {
	for _, v := range []*float64{&r.Gain, &r.Kernel, &r.HeadStart, &r.Fading, &r.Idling, &r.OpenShare, &r.OpenGain, &r.Bits.Fitness, &r.Bits.Extended} {
		*v = round(*v, 4)
	}
	return r
}

func (l *Law) trim() {
	l.Values = append([]float64(nil), l.Values...)
	for i, v := range l.Values {
		l.Values[i] = sig(v)
	}
	l.Stretch, l.Top = sig(l.Stretch), round(l.Top, 4)
}
