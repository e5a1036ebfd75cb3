package main

import (
	"bytes"
	"compress/gzip"
	"encoding/json"
	"fmt"
	"io"
	"slices"
	"strconv"
	"strings"

	"preponder/sim/evidence"
	"preponder/sim/service"
	"preponder/sim/wire"
)

// read reads a log and prints what it says, or with --condensed a casebook that the page opens.
func (c *call) read() error {
	data, err := c.file()
	if err == nil {
		data, err = unpacked(data)
	}
	if err != nil {
		return err
	}
	column := wire.Column{Name: "file", Bytes: data}
	p, err := c.ask("look", nil, column)
	if err != nil {
		return err
	}
	var preview evidence.Preview
	if err := json.Unmarshal(p.Body, &preview); err != nil {
		return err
	}
	if err := remap(&preview, c.mapping); err != nil {
		return err
	}
	preview.Mapping.Treatment = c.treatment
	if p, err = c.ask("read", map[string]any{"mapping": preview.Mapping, "label": c.args[0]}, column); err != nil {
		return err
	}
	var report service.ReadReport
	if err := json.Unmarshal(p.Body, &report); err != nil {
		return err
	}
	if p, err = c.ask("study", nil); err != nil {
		return err
	}
	if c.keep {
		return c.condensed(p.Body)
	}
	b, err := describe(report, p.Body)
	if err != nil {
		return err
	}
	return c.print(b)
}

// unpacked returns what a file packed by gzip (RFC 1952) holds, any other as it is.
func unpacked(data []byte) ([]byte, error) {
	if !bytes.HasPrefix(data, []byte{0x1f, 0x8b}) {
		return data, nil
	}
	z, err := gzip.NewReader(bytes.NewReader(data))
	if err != nil {
		return nil, fmt.Errorf("the file is packed and cannot be unpacked: %w", err)
	}
	out, err := io.ReadAll(io.LimitReader(z, evidence.MaxBytes+1))
	if err != nil {
		return nil, fmt.Errorf("the file is packed and cannot be unpacked: %w", err)
	}
	if len(out) > evidence.MaxBytes {
		return nil, fmt.Errorf("unpacked the file has more than the %d MiB that are allowed; nothing was loaded", evidence.MaxBytes>>20)
	}
	return out, nil
}

// remap applies --map source=..,target=..,time=..; a column is named or numbered from 1.
func remap(p *evidence.Preview, text string) error {
	if text == "" {
		return nil
	}
	set := map[string]*int{"source": &p.Mapping.Source, "target": &p.Mapping.Target, "time": &p.Mapping.Time}
	for _, pair := range strings.Split(text, ",") {
		name, column, found := strings.Cut(pair, "=")
		at := set[name]
		if !found || at == nil {
			return fmt.Errorf("%w: --map takes source=COLUMN,target=COLUMN,time=COLUMN", errUsage)
		}
		k := slices.Index(p.Columns, column)
		if n, err := strconv.Atoi(column); k < 0 && err == nil {
			k = n - 1
		}
		if k < 0 || k >= len(p.Columns) {
			return fmt.Errorf("there is no column %q; the columns are %s", column, strings.Join(p.Columns, ", "))
		}
		*at = k
	}
	return nil
}

// condensed prints a casebook with the evidence and, where it holds, an entry that starts from it.
func (c *call) condensed(body json.RawMessage) error {
	var s struct{ Evidence, Entry json.RawMessage }
	if err := json.Unmarshal(body, &s); err != nil {
		return err
	}
	entries := []json.RawMessage{[]byte(`{"title": "New entry"}`)}
	if s.Entry != nil {
		entries[0] = s.Entry
	}
	b, err := json.Marshal(map[string]any{"casebook": 1, "title": "From " + c.args[0], "entries": entries, "evidence": s.Evidence})
	if err != nil {
		return err
	}
	return c.print(b)
}

// describe puts report and study into the shape of the command.
func describe(r service.ReadReport, body json.RawMessage) (json.RawMessage, error) {
	var s struct {
		Evidence                    evidence.Condensed
		Heading, Meaning, Explained string
		Caution                     string
	}
	if err := json.Unmarshal(body, &s); err != nil {
		return nil, err
	}
	e := s.Evidence
	top := []map[string]any{}
	for _, m := range e.Top {
		row := map[string]any{"id": m.ID, "links": m.Links, "arrived": m.Arrived}
		if m.Fitness != nil {
			row["fitness"] = m.Fitness
		}
		if m.Origin != nil {
			row["early"], row["good"] = m.Origin.Early, m.Origin.Good
		}
		top = append(top, row)
	}
	out := map[string]any{
		"rows": r.Rows, "used": r.Used, "leftOut": e.LeftOut, "members": r.Members, "links": r.Links, "choices": r.Choices,
		"leader": map[string]any{"id": r.Leader.ID, "links": r.Leader.Links, "share": r.Leader.Share}, "top4": r.Top4, "hhi": r.HHI, "gini": r.Gini,
		"verdict": e.Verdict, "heading": s.Heading, "meaning": s.Meaning, "caution": s.Caution,
		"groundIntegral": e.Ground, "margin": e.Margin, "rule": e.Rule, "check": e.Check, "notes": e.Notes, "top": top,
		"kernel": evidence.Range{Estimate: &e.Rule.Kernel}, "openShare": evidence.Range{Estimate: &e.Rule.OpenShare},
		"backTest": nil, "holdOut": nil, "forecast": e.Forecast,
	}
	if f := e.Forecast; f != nil {
		out["backTest"] = map[string]any{"inside": f.Past.Inside, "of": 3, "factor": f.Factor}
		out["holdOut"] = f.Bits
	}
	return json.Marshal(out)
}
