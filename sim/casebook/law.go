package casebook

import (
	"bytes"
	"encoding/json"
	"fmt"
	"sort"

	"preponder/sim/law"
)

// MaxTiers bounds a discrete law.
const MaxTiers = 64

// A Law names a family and its values, as in the case format:
//
//	{"family": "power", "theta": 1}
//	{"family": "tiers", "tiers": [{"energy": 0, "weight": 1}]}
//	{"family": "evidence"}    the law read from the casebook's log
type Law struct {
	Family string
	Values map[string]float64
	Tiers  []Tier
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

func (l Law) MarshalJSON() ([]byte, error) {
	out := map[string]any{"family": l.Family}
	for k, v := range l.Values {
		out[k] = v
	}
	if len(l.Tiers) > 0 {
		out["tiers"] = l.Tiers
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

// check fills in defaults and refuses what the family does not know.
func (l *Law) check(hasEvidence bool) error {
	switch l.Family {
	case "":
		return fmt.Errorf("law: the family is missing")
	case "evidence":
		if !hasEvidence {
			return fmt.Errorf("law: the entry takes its law from evidence, but the casebook holds none; read a log first or choose a family")
		}
		if len(l.Values) > 0 || len(l.Tiers) > 0 {
			return fmt.Errorf("law: the family \"evidence\" takes no values")
		}
		return nil
	case "tiers":
		return l.checkTiers()
	}
	f, err := law.FamilyNamed(l.Family)
	if err != nil {
		return err
	}
	known := map[string]bool{}
	for _, row := range f.Fields {
		known[row.Name] = true
		if _, given := l.Values[row.Name]; !given {
			l.Values[row.Name] = row.Default
		}
	}
	for _, name := range sortedKeys(l.Values) {
		if !known[name] {
			return fmt.Errorf("law: the %s law has no field %q", l.Family, name)
		}
	}
	return f.Check(l.values(f))
}

func (l *Law) checkTiers() error {
	if len(l.Values) > 0 {
		return fmt.Errorf("law: the family \"tiers\" has no field %q", sortedKeys(l.Values)[0])
	}
	if len(l.Tiers) == 0 || len(l.Tiers) > MaxTiers {
		return fmt.Errorf("law: a tiers law has 1 to %d levels; this one has %d", MaxTiers, len(l.Tiers))
	}
	for i, t := range l.Tiers {
		if !(t.Weight > 0) || t.Weight > 1e12 || t.Energy < -1e6 || t.Energy > 1e6 {
			return fmt.Errorf("law: level %d has energy %g and weight %g; weights must be above 0, energies between -1e6 and 1e6", i+1, t.Energy, t.Weight)
		}
	}
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
	if l.Family == "tiers" {
		var e, w []float64
		for _, t := range l.Tiers {
			e, w = append(e, t.Energy), append(w, t.Weight)
		}
		return law.NewTiers(e, w)
	}
	f, err := law.FamilyNamed(l.Family)
	if err != nil {
		panic("casebook: unchecked law: " + err.Error())
	}
	return f.Make(l.values(f))
}
