package service

import (
	"encoding/json"
	"fmt"

	"preponder/sim/casebook"
	"preponder/sim/outlook"
	"preponder/sim/standing"
	"preponder/sim/wire"
)

// planOf returns the outlook of an entry. Titles and notes do not count; all else does.
func planOf(c casebook.Casebook, k int) (outlook.Plan, error) {
	e := c.Entries[k]
	p := outlook.Plan{Growth: c.Params(k), Horizon: e.Outlook.Horizon, Limit: e.Outlook.Limit}
	about := casebook.Entry{Law: e.Law, Sharpness: e.Sharpness, Growth: e.Growth}
	var evidence any
	if e.Growth.Start == "evidence" {
		p.Evidence = c.Evidence
		evidence = []any{c.Evidence.Law, c.Evidence.Draws, c.Evidence.Classes, c.Evidence.Members}
	}
	b, err := json.Marshal([]any{about, evidence})
	p.About = string(b)
	return p, err
}

// runOutlook answers with the runs from..to-1 of an entry.
func runOutlook(_ *Engine, p wire.Packet, step Step) (reply, error) {
	var ask struct {
		entryRequest
		From, To int
	}
	if err := json.Unmarshal(p.Body, &ask); err != nil {
		return reply{}, err
	}
	_, c, err := entryOf(p)
	if err != nil {
		return reply{}, err
	}
	if ask.From < 0 || ask.To <= ask.From || ask.To > casebook.MaxRuns {
		return reply{}, fmt.Errorf("runs %d to %d are no range within 0 to %d", ask.From, ask.To-1, casebook.MaxRuns-1)
	}
	plan, err := planOf(c, ask.Entry)
	if err != nil {
		return reply{}, err
	}
	part, err := outlook.New(plan, ask.From, ask.To, func(done float64) error { return step(done, "growing the network forward") })
	return reply{body: part}, err
}

// Gathered is an outlook with its sentences.
type Gathered struct {
	*outlook.Outlook
	Sentences []string `json:"sentences"`
}

// gather merges parts.
func gather(_ *Engine, p wire.Packet, _ Step) (reply, error) {
	var ask struct {
		Parts []*outlook.Part `json:"parts"`
		Limit *float64        `json:"limit"` // counts passing another limit than the parts were made for
	}
	if err := json.Unmarshal(p.Body, &ask); err != nil {
		return reply{}, fmt.Errorf("a part cannot be read: %w", err)
	}
	if ask.Limit != nil && len(ask.Parts) > 0 && ask.Parts[0] != nil {
		if !(*ask.Limit >= 0 && *ask.Limit <= 1) {
			return reply{}, fmt.Errorf("limit is %g; it must be from 0 to 1", *ask.Limit)
		}
		ask.Parts[0].Limit = *ask.Limit
	}
	o, err := outlook.Gather(ask.Parts)
	if err != nil {
		return reply{}, err
	}
	return reply{body: Gathered{o, sentences(o)}}, nil
}

func sentences(o *outlook.Outlook) []string {
	s := o.LeaderShare
	out := []string{
		fmt.Sprintf("At %s members the leader holds %s of all links in the middle of %d runs, and %s to %s in 95 of 100.", casebook.Number(float64(o.Horizon)), standing.Percent(s.Q50), o.Runs, standing.Percent(s.Q025), standing.Percent(s.Q975)),
	}
	if o.Past.Limit > 0 {
		out = append(out, fmt.Sprintf("It passes %s in %s of runs (± %.1f points).", standing.Percent(o.Past.Limit), wholePercent(o.Past.Chance.Chance), 100*o.Past.Error))
	}
	return append(out, fmt.Sprintf("Today's leader still leads in %s of runs (± %.1f points).", wholePercent(o.SameLeader.Chance), 100*o.SameLeader.Error))
}

func wholePercent(x float64) string { return fmt.Sprintf("%.0f %%", 100*x) }
