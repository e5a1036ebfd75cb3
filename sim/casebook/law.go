package casebook

import (
	"bytes"
	"encoding/json"
	"fmt"
	"sort"

	"preponder/sim/law"
)

// MaxTiers and MaxKnots bound discrete and drawn laws.
const MaxTiers, MaxKnots = 64, 64

// A Law names a family and its values, as in the case format:
//
//	{"family": "power", "theta": 1}
//	{"family": "tiers", "tiers": [{"energy": 0, "weight": 1}]}
//	{"family": "drawn", "knots": [[0, 0], [0.5, 2], [1, 0]]}
//	{"family": "formula", "density": "e*(1-e)", "top": 1}
//	{"family": "evidence"}    the law read from the casebook's log
type Law struct {
	Family  string
	Values  map[string]float64
	Tiers   []Tier
	Knots   [][2]float64 // energy, density
	Density string
	made    law.Law // by check
}

// A Tier is one level of a discrete law.
type Tier struct {
	Energy float64 `json:"energy"`
	Weight float64 `json:"weight"`
}

func (l *Law) UnmarshalJSON(data []byte) error {
	var raw map[string]json.RawMessage
	if err := json.Unmarshal(data, &raw); err != nil {
		return fmt.Errorf("law: %w", err)
	}
	*l = Law{Values: map[string]float64{}}
	for _, name := range sortedKeys(raw) {
		var err error
		switch name {
		case "family":
			err = json.Unmarshal(raw[name], &l.Family)
		case "tiers":
			d := json.NewDecoder(bytes.NewReader(raw[name]))
			d.DisallowUnknownFields()
			err = d.Decode(&l.Tiers)
		case "knots":
			l.Knots, err = readKnots(raw[name])
		case "density":
			err = json.Unmarshal(raw[name], &l.Density)
		default:
			var v float64
			err = json.Unmarshal(raw[name], &v)
			l.Values[name] = v
		}
		if err != nil {
			return fmt.Errorf("law, field %q: %w", name, err)
		}
	}
	return nil
}

// readKnots reads pairs: an array of another length would be filled up or cut off by the decoder.
func readKnots(data []byte) ([][2]float64, error) {
	var rows [][]float64
	if err := json.Unmarshal(data, &rows); err != nil {
		return nil, err
	}
	out := make([][2]float64, len(rows))
	for i, r := range rows {
		if len(r) != 2 {
			return nil, fmt.Errorf("knot %d has %d numbers; a knot is an energy and a density", i+1, len(r))
		}
		out[i] = [2]float64{r[0], r[1]}
	}
	return out, nil
}

func (l Law) MarshalJSON() ([]byte, error) {
	out := map[string]any{"family": l.Family}
	for k, v := range l.Values {
		out[k] = v
	}
	if len(l.Tiers) > 0 {
		out["tiers"] = l.Tiers
	}
	if len(l.Knots) > 0 {
		out["knots"] = l.Knots
	}
	if l.Family == "formula" {
		out["density"] = l.Density
	}
	return json.Marshal(out)
}

func sortedKeys[V any](m map[string]V) []string {
	var keys []string
	for k := range m {
		keys = append(keys, k)
	}
	sort.Strings(keys)
	return keys
}

// check fills in defaults, refuses what the family does not know, and makes the distribution.
func (l *Law) check(hasEvidence bool) error {
	if err := l.fieldsOf(); err != nil {
		return fmt.Errorf("law: %w", err)
	}
	var err error
	switch l.Family {
	case "evidence":
		if !hasEvidence {
			return fmt.Errorf("law: the entry takes its law from evidence, but the casebook holds none; read a log first or choose a family")
		}
	case "tiers":
		err = l.checkTiers()
	case "drawn":
		err = l.draw()
	case "formula":
		l.made, err = law.NewFormula(l.Density, l.Values["top"])
	default:
		var f law.Family
		if f, err = law.FamilyNamed(l.Family); err == nil {
			if err = f.Check(l.values(f)); err == nil {
				l.made = f.Make(l.values(f))
			}
		}
	}
	if err != nil {
		return fmt.Errorf("law: %w", err)
	}
	return nil
}

// ReadLaw reads and checks a law that stands alone.
func ReadLaw(data []byte) (Law, error) {
	var l Law
	if err := json.Unmarshal(data, &l); err != nil {
		return l, err
	}
	if l.Family == "evidence" {
		return l, fmt.Errorf("law: the law of the evidence cannot be checked alone")
	}
	return l, l.check(false)
}

// fieldsOf fills in defaults and refuses fields the family does not have.
func (l *Law) fieldsOf() error {
	if l.Family == "" {
		return fmt.Errorf("the family is missing")
	}
	known := map[string]bool{}
	switch l.Family {
	case "evidence", "tiers", "drawn":
	case "formula":
		known["top"] = true
		if _, given := l.Values["top"]; !given {
			l.Values["top"] = 1
		}
		if l.Density == "" {
			return fmt.Errorf("the formula is empty; write a density in the energy e, as e*(2-e)")
		}
	default:
		f, err := law.FamilyNamed(l.Family)
		if err != nil {
			return err
		}
		for _, row := range f.Fields {
			known[row.Name] = true
			if _, given := l.Values[row.Name]; !given {
				l.Values[row.Name] = row.Default
			}
		}
	}
	for _, name := range sortedKeys(l.Values) {
		if !known[name] {
			return fmt.Errorf("the %s law has no field %q", l.Family, name)
		}
	}
	for _, r := range []struct {
		name, family string
		given        bool
	}{{"tiers", "tiers", len(l.Tiers) > 0}, {"knots", "drawn", len(l.Knots) > 0}, {"density", "formula", l.Density != ""}} {
		if r.given && l.Family != r.family {
			return fmt.Errorf("the %s law has no field %q", l.Family, r.name)
		}
	}
	return nil
}

func (l *Law) checkTiers() error {
	if len(l.Tiers) == 0 || len(l.Tiers) > MaxTiers {
		return fmt.Errorf("a tiers law has 1 to %d levels; this one has %d", MaxTiers, len(l.Tiers))
	}
	var e, w []float64
	for i, t := range l.Tiers {
		if !(t.Weight > 0) || t.Weight > 1e12 || t.Energy < -1e6 || t.Energy > 1e6 {
			return fmt.Errorf("level %d has energy %g and weight %g; weights must be above 0, energies between -1e6 and 1e6", i+1, t.Energy, t.Weight)
		}
		e, w = append(e, t.Energy), append(w, t.Weight)
	}
	l.made = law.NewTiers(e, w)
	return nil
}

func (l *Law) draw() error {
	if len(l.Knots) > MaxKnots {
		return fmt.Errorf("a drawn law has at most %d knots; this one has %d", MaxKnots, len(l.Knots))
	}
	var knots []law.Knot
	for _, k := range l.Knots {
		knots = append(knots, law.Knot{Eps: k[0], Density: k[1]})
	}
	made, err := law.NewDrawn(knots)
	if err != nil {
		return err
	}
	l.made = made
	return nil
}

func (l Law) values(f law.Family) []float64 {
	var v []float64
	for _, row := range f.Fields {
		v = append(v, l.Values[row.Name])
	}
	return v
}

// Make returns the distribution of a checked law that is not "evidence".
func (l Law) Make() law.Law {
	if l.made == nil {
		panic("casebook: unchecked law " + l.Family)
	}
	return l.made
}
