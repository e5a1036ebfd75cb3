package casebook

import (
	"fmt"
	"math"

	"preponder/sim/growth"
	"preponder/sim/law"
)

// Limits of a casebook.
const (
	MaxEntries   = 200
	MaxTitle     = 200
	MaxNote      = 10000
	MaxSharpness = 1e6
	MaxRuns      = 10000
)

// Check returns an error that names the first thing out of its limits, and fills in what a law leaves out.
func (c *Casebook) Check() error {
	if len(c.Entries) == 0 {
		return fmt.Errorf("the casebook has no entry")
	}
	if len(c.Entries) > MaxEntries {
		return fmt.Errorf("the casebook has %d entries; %d are allowed", len(c.Entries), MaxEntries)
	}
	if len(c.Title) > MaxTitle {
		return fmt.Errorf("the title is %d characters long; %d are allowed", len(c.Title), MaxTitle)
	}
	if c.Evidence != nil {
		if err := c.Evidence.Verify(); err != nil {
			return fmt.Errorf("evidence: %w", err)
		}
	}
	for i := range c.Entries {
		if err := c.Entries[i].check(c); err != nil {
			return fmt.Errorf("entry %d: %w", i+1, err)
		}
	}
	return nil
}

func (e *Entry) check(c *Casebook) error {
	if len(e.Title) > MaxTitle || len(e.Note) > MaxNote {
		return fmt.Errorf("the title may have %d characters and the note %d", MaxTitle, MaxNote)
	}
	if err := e.Law.check(c.Evidence != nil && c.Evidence.Law != nil); err != nil {
		return err
	}
	g := e.Growth
	for _, r := range []struct {
		name      string
		v         float64
		low, high float64
	}{
		{"sharpness", e.Sharpness, 0, MaxSharpness},
		{"links", g.Links, 1, growth.MaxLinks},
		{"members", float64(g.Members), 2, growth.MaxMembers},
		{"leversFrom", float64(g.LeversFrom), 0, growth.MaxMembers},
		{"horizon", float64(e.Outlook.Horizon), 2, growth.MaxMembers},
		{"runs", float64(e.Outlook.Runs), 1, MaxRuns},
		{"limit", e.Outlook.Limit, 0, 1},
	} {
		if !(r.v >= r.low && r.v <= r.high) {
			return fmt.Errorf("%s is %v; it must be from %v to %v", r.name, Number(r.v), Number(r.low), Number(r.high))
		}
	}
	levers := map[string]float64{"headStart": g.HeadStart, "openShare": g.OpenShare, "ceiling": g.Ceiling, "distinct": 0, "levy.rate": g.Levy.Rate, "levy.above": g.Levy.Above, "expiry": float64(g.Expiry),
		"kernel": g.Kernel, "fading": g.Fading, "idling": g.Idling}
	for _, row := range growth.Levers {
		if v := levers[row.Name]; !(v >= row.Low && v <= row.High) {
			return fmt.Errorf("%s is %v; it must be from %v to %v", row.Name, Number(v), Number(row.Low), Number(row.High))
		}
	}
	return e.checkStart(c)
}

func (e *Entry) checkStart(c *Casebook) error {
	switch e.Growth.Start {
	case "one":
		return nil
	case "evidence":
		if c.Evidence == nil || c.Evidence.Law == nil {
			return fmt.Errorf("it starts from evidence, but the casebook holds none to grow from; read a log first or start from one member")
		}
		if least := c.Evidence.Members; e.Growth.Members < least {
			return fmt.Errorf("members is %s, fewer than the %s the log holds", Number(float64(e.Growth.Members)), Number(float64(least)))
		}
		for _, r := range []struct {
			name string
			v    float64
		}{{"fading", e.Growth.Fading}, {"idling", e.Growth.Idling}, {"expiry", float64(e.Growth.Expiry)}} {
			if r.v != 0 {
				return fmt.Errorf("%s is %v, but the evidence of a log does not keep when its members were last active; set %s to 0 or start from one member", r.name, Number(r.v), r.name)
			}
		}
		return nil
	}
	return fmt.Errorf("start is %q; it is \"one\" or \"evidence\"", e.Growth.Start)
}

// Number writes a number for a sentence: whole ones in groups of three.
func Number(v float64) string {
	if v == math.Floor(v) && math.Abs(v) < 1e9 {
		s := fmt.Sprintf("%.0f", v)
		for i := len(s) - 3; i > 0 && s[i-1] != '-'; i -= 3 {
			s = s[:i] + "," + s[i:]
		}
		return s
	}
	return fmt.Sprintf("%g", v)
}

// LawOf returns the distribution and the sharpness of entry k of a checked casebook.
func (c *Casebook) LawOf(k int) (law.Law, float64) {
	e := c.Entries[k]
	if e.Law.Family == "evidence" {
		return c.Evidence.Law.Make(), e.Sharpness
	}
	return e.Law.Make(), e.Sharpness
}

// Params returns the growth of entry k of a checked casebook. A start from evidence takes the middle of what the log
// says of each member.
func (c *Casebook) Params(k int) growth.Params {
	e := c.Entries[k]
	l, beta := c.LawOf(k)
	g := e.Growth
	p := growth.Params{Law: l, Sharpness: beta, Links: g.Links, HeadStart: g.HeadStart, OpenShare: g.OpenShare, Ceiling: g.Ceiling,
		Distinct: g.Distinct, Members: g.Members, Seed: g.Seed, LeversFrom: g.LeversFrom}
	p.Kernel, p.Fading, p.Idling, p.LevyAbove, p.LevyRate, p.Expiry = g.Kernel, g.Fading, g.Idling, g.Levy.Above, g.Levy.Rate, g.Expiry
	switch g.Kernel {
	case 0:
		p.Kernel = growth.UniformKernel
	case 1:
		p.Kernel = 0
	}
	if g.Start == "evidence" {
		p.Start = c.Evidence.Start(l, 0, 0)
	}
	return p
}
