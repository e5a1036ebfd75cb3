package service

import (
	"encoding/json"
	"errors"
	"fmt"
	"slices"
	"strconv"
	"strings"

	"preponder/sim/casebook"
	"preponder/sim/evidence"
	"preponder/sim/growth"
	"preponder/sim/law"
	"preponder/sim/wire"
)

// tables answers with what the page draws its controls from, and the demo casebook.
func tables(*Engine, wire.Packet, Step) (reply, error) {
	return reply{body: map[string]any{
		"families": slices.Concat(law.Families, law.Shaped), "levers": growth.Levers, "caution": evidence.Caution,
		"demo": casebook.Demo(), "demoOpen": casebook.DemoOpen, "newEntry": casebook.NewEntry(),
		"limits": map[string]any{"members": growth.MaxMembers, "links": growth.MaxLinks, "sharpness": casebook.MaxSharpness, "runs": casebook.MaxRuns,
			"rows": evidence.MaxRows, "bytes": evidence.MaxBytes, "code": casebook.MaxCode, "title": casebook.MaxTitle, "knots": casebook.MaxKnots, "tiers": casebook.MaxTiers, "formula": law.MaxExpression, "note": casebook.MaxNote},
	}}, nil
}

// open reads a case file from the column "file".
func open(_ *Engine, p wire.Packet, _ Step) (reply, error) {
	data := p.Column("file").Bytes
	if len(data) > 16<<20 {
		return reply{}, fmt.Errorf("the case file has %d MiB; 16 are allowed", len(data)>>20)
	}
	c, err := casebook.Read(data)
	return reply{body: map[string]any{"casebook": c}}, err
}

// decode reads a code or a link.
func decode(_ *Engine, p wire.Packet, _ Step) (reply, error) {
	var ask struct {
		Code string `json:"code"`
	}
	if err := json.Unmarshal(p.Body, &ask); err != nil {
		return reply{}, err
	}
	c, err := casebook.Decode(ask.Code)
	return reply{body: map[string]any{"casebook": c}}, err
}

type document struct {
	Casebook json.RawMessage `json:"casebook"`
	Names    bool            `json:"names"`
}

// documentOf reads the casebook a request is about.
func documentOf(p wire.Packet) (casebook.Casebook, document, error) {
	var d document
	if err := json.Unmarshal(p.Body, &d); err != nil {
		return casebook.Casebook{}, d, err
	}
	c, err := casebook.Read(d.Casebook)
	return c, d, err
}

// encode answers with the code of a casebook and what it holds. Names of members stay out unless asked for.
func encode(_ *Engine, p wire.Packet, _ Step) (reply, error) {
	c, d, err := documentOf(p)
	if err != nil {
		return reply{}, err
	}
	holds := fmt.Sprintf("%d entries with their titles and notes", len(c.Entries))
	if len(c.Entries) == 1 {
		holds = "one entry with its title and note"
	}
	if c.Evidence != nil {
		if !d.Names {
			c.Evidence = c.Evidence.Masked()
			holds += ", and the evidence in condensed form: counts, estimates and shares, members by order of arrival, no name and no single link"
		} else {
			holds += fmt.Sprintf(", and the evidence in condensed form, with the names of the %d largest members", len(c.Evidence.Top))
		}
	}
	code, err := c.Code()
	return reply{body: map[string]any{"code": code, "holds": holds}}, err
}

// file answers with the case file.
func file(_ *Engine, p wire.Packet, _ Step) (reply, error) {
	c, d, err := documentOf(p)
	if err != nil {
		return reply{}, err
	}
	if c.Evidence != nil && !d.Names {
		c.Evidence = c.Evidence.Masked()
	}
	b, err := c.File()
	return reply{columns: []wire.Column{{Name: "file", Bytes: b}}}, err
}

// lawCheck answers whether a law can be used: while it is typed, before it enters the casebook.
func lawCheck(_ *Engine, p wire.Packet, _ Step) (reply, error) {
	var ask struct {
		Law json.RawMessage `json:"law"`
	}
	if err := json.Unmarshal(p.Body, &ask); err != nil {
		return reply{}, err
	}
	l, err := casebook.ReadLaw(ask.Law)
	if err != nil {
		out := map[string]any{"fault": sentence(strings.TrimPrefix(err.Error(), "law: ")), "at": 0}
		var place *law.SyntaxError
		if errors.As(err, &place) {
			out["at"] = place.At
		}
		return reply{body: out}, nil
	}
	return reply{body: map[string]any{"law": l}}, nil
}

// sketchKnots is how many knots a law that becomes a drawn one gets.
const sketchKnots = 14

// sketch answers with the knots of a drawn law close to that of an entry.
func sketch(_ *Engine, p wire.Packet, _ Step) (reply, error) {
	ask, c, err := entryOf(p)
	if err != nil {
		return reply{}, err
	}
	l, _ := c.LawOf(ask.Entry)
	knots := [][2]float64{}
	for _, k := range law.Sketch(l, sketchKnots) {
		short := func(v float64) float64 {
			s, _ := strconv.ParseFloat(strconv.FormatFloat(v, 'g', 4, 64), 64)
			return s
		}
		if n := len(knots); n == 0 || short(k.Eps) > knots[n-1][0] {
			knots = append(knots, [2]float64{short(k.Eps), short(k.Density)})
		}
	}
	return reply{body: map[string]any{"knots": knots}}, nil
}
