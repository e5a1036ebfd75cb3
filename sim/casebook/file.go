package casebook

import (
	"bytes"
	"encoding/json"
)

// File returns the casebook as a case file: every field written out, indented.
func (c Casebook) File() ([]byte, error) {
	b, err := json.MarshalIndent(c, "", " ")
	return append(b, '\n'), err
}

// Compact returns the casebook as JSON with defaults left out. The same casebook gives the same bytes.
func (c Casebook) Compact() ([]byte, error) {
	out := map[string]any{"casebook": c.Casebook}
	if c.Title != "" {
		out["title"] = c.Title
	}
	if c.Evidence != nil {
		out["evidence"] = c.Evidence
	}
	var entries []any
	for _, e := range c.Entries {
		kept, err := without(e, NewEntry())
		if err != nil {
			return nil, err
		}
		entries = append(entries, kept)
	}
	out["entries"] = entries
	return json.Marshal(out)
}

// without returns v as an object less the fields that equal those of the default. A law is kept whole or not at all.
func without(v, standard any) (map[string]json.RawMessage, error) {
	a, err := object(v)
	if err != nil {
		return nil, err
	}
	b, err := object(standard)
	if err != nil {
		return nil, err
	}
	for k, x := range a {
		y := b[k]
		if bytes.Equal(x, y) {
			delete(a, k)
			continue
		}
		if k != "law" && len(x) > 0 && x[0] == '{' && len(y) > 0 {
			inner, err := without(x, y)
			if err != nil {
				return nil, err
			}
			if a[k], err = json.Marshal(inner); err != nil {
				return nil, err
			}
		}
	}
	return a, nil
}

func object(v any) (map[string]json.RawMessage, error) {
	b, ok := v.(json.RawMessage)
	if !ok {
		var err error
		if b, err = json.Marshal(v); err != nil {
			return nil, err
		}
	}
	var m map[string]json.RawMessage
	err := json.Unmarshal(b, &m)
	return m, err
}
