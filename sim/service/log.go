package service

import (
	"encoding/json"
	"errors"
	"fmt"
	"math"

	"preponder/sim/casebook"
	"preponder/sim/evidence"
	"preponder/sim/growth"
	"preponder/sim/law"
	"preponder/sim/share"
	"preponder/sim/wire"
)

// look guesses how the file in the column "file" is to be read.
func look(_ *Engine, p wire.Packet, _ Step) (reply, error) {
	data := p.Column("file").Bytes
	if len(data) > evidence.MaxBytes {
		return reply{}, fmt.Errorf("the file has %d MiB; %d are allowed", len(data)>>20, evidence.MaxBytes>>20)
	}
	preview, err := evidence.Look(data)
	return reply{body: preview}, err
}

// ReadReport is what reading a log gives at once.
type ReadReport struct {
	Rows     int                `json:"rows"`
	Used     int                `json:"used"`
	Problems []evidence.Problem `json:"problems"`
	Members  int                `json:"members"`
	Links    int                `json:"links"`
	Choices  int                `json:"choices"`
	Leader   LogLeader          `json:"leader"`
	Top4     float64            `json:"top4"`
	HHI      float64            `json:"hhi"`
	Gini     float64            `json:"gini"`
}

// LogLeader is the member of a log that holds most links.
type LogLeader struct {
	ID    string  `json:"id"`
	Links int32   `json:"links"`
	Share float64 `json:"share"`
}

// read reads the file in the column "file" by a mapping and keeps it for study.
func read(e *Engine, p wire.Packet, step Step) (reply, error) {
	var ask struct {
		Mapping evidence.Mapping `json:"mapping"`
		Label   string           `json:"label"`
	}
	if err := json.Unmarshal(p.Body, &ask); err != nil {
		return reply{}, err
	}
	rows, err := evidence.Read(p.Column("file").Bytes, ask.Mapping, func(done float64) error { return step(done, "reading the log") })
	if err != nil {
		return reply{}, err
	}
	if len(rows.Time) == 0 {
		reason := "it holds no row"
		if len(rows.Problems) > 0 {
			reason = fmt.Sprintf("none of its %d rows can be used: %s in %s", rows.Read, rows.Problems[0].Reason, rows.Problems[0].First[0])
		}
		return reply{}, errors.New("nothing was read from the file; " + reason + ". Check separator and columns; dates are written like 2024-01-31, or take the order of rows as time")
	}
	e.rows, e.history, e.label = rows, evidence.NewHistoryOf(rows, ask.Mapping.Treatment), ask.Label
	received := e.history.Received()
	s := share.Of(received)
	if rows.Problems == nil {
		rows.Problems = []evidence.Problem{}
	}
	return reply{body: ReadReport{rows.Read, s.Links, rows.Problems, e.history.Members(), s.Links, e.history.Choices,
		LogLeader{e.history.Names[s.Leader], received[s.Leader], s.Share}, s.Top4, s.HHI, s.Gini}}, nil
}

// study examines the log read last.
func study(e *Engine, _ wire.Packet, step Step) (reply, error) {
	if e.history == nil {
		return reply{}, errors.New("no log has been read yet")
	}
	s, err := evidence.Examine(e.history, evidence.Report(step))
	if err != nil {
		return reply{}, err
	}
	c := evidence.Condense(e.rows, s, e.label)
	heading, meaning := c.Words()
	body := map[string]any{"evidence": c, "heading": heading, "meaning": meaning, "explained": c.Rule.Explained(), "caution": evidence.Caution}
	if c.Law != nil {
		body["entry"] = entryFrom(c)
	}
	return reply{body: body}, nil
}

// words answers with heading and meaning of evidence kept in a casebook.
func words(_ *Engine, p wire.Packet, _ Step) (reply, error) {
	var ask struct {
		Evidence *evidence.Condensed `json:"evidence"`
	}
	if err := json.Unmarshal(p.Body, &ask); err != nil {
		return reply{}, err
	}
	if ask.Evidence == nil {
		return reply{}, errors.New("there is no evidence to speak of")
	}
	heading, meaning := ask.Evidence.Words()
	return reply{body: map[string]any{"heading": heading, "meaning": meaning, "explained": ask.Evidence.Rule.Explained()}}, nil
}

// entryFrom is the entry a log opens with: its network as it stands, planned to grow fourfold.
func entryFrom(c *evidence.Condensed) casebook.Entry {
	e := casebook.NewEntry()
	e.Title, e.Note = "From the log", fmt.Sprintf("%s members and %s links as the log left them.", casebook.Number(float64(c.Members)), casebook.Number(float64(c.Links)))
	e.Law = casebook.Law{Family: "evidence"}
	e.Growth.Start = "evidence"
	e.Growth.Members = c.Members
	e.Growth.Links = math.Max(1, c.PerArrival)
	e.Outlook.Horizon = min(4*c.Members, growth.MaxMembers)
	return e
}

// sample answers with the Larkmoor link log: the demo's network under the plain rule, grown from a seed of its own.
func sample(_ *Engine, _ wire.Packet, step Step) (reply, error) {
	n, err := growth.Grow(growth.Params{Law: law.Power{Theta: 1}, Sharpness: 3, Links: 2, Members: 5000, Seed: 20}, nil)
	if err != nil {
		return reply{}, err
	}
	b := logOf(n)
	return reply{columns: []wire.Column{{Name: "file", Bytes: b}}}, err
}
