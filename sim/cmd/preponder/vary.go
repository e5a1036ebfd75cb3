package main

import (
	"bufio"
	"encoding/json"
	"fmt"
	"math"
	"strconv"
	"strings"
)

// mostRows of a grid.
const mostRows = 100000

// A grid is one parameter and its values: name=from:to:step.
type grid struct {
	name           string
	from, to, step float64
}

func readGrid(s string) (grid, error) {
	wrong := fmt.Errorf("%w: --vary takes a parameter and its values, like sharpness=0.5:8:0.1", errUsage)
	name, rest, found := strings.Cut(s, "=")
	parts := strings.Split(rest, ":")
	if !found || name == "" || len(parts) != 3 {
		return grid{}, wrong
	}
	var v [3]float64
	for i, p := range parts {
		var err error
		if v[i], err = strconv.ParseFloat(p, 64); err != nil || math.IsInf(v[i], 0) || math.IsNaN(v[i]) {
			return grid{}, wrong
		}
	}
	g := grid{name, v[0], v[1], v[2]}
	switch {
	case g.step <= 0 || g.to < g.from:
		return g, fmt.Errorf("%w: --vary goes up from %g to %g by a step above 0, not by %g", errUsage, g.from, g.to, g.step)
	case (g.to-g.from)/g.step >= mostRows:
		return g, fmt.Errorf("%w: --vary asks for more than %d rows", errUsage, mostRows)
	}
	return g, nil
}

// values are from, from+step and so on to to, rounded to what was written.
func (g grid) values() []float64 {
	n := int(math.Floor((g.to-g.from)/g.step + 1e-9))
	var out []float64
	for i := range n + 1 {
		v, _ := strconv.ParseFloat(strconv.FormatFloat(g.from+float64(i)*g.step, 'g', 12, 64), 64)
		out = append(out, v)
	}
	return out
}

// columns of the CSV after the varied parameter, named as in the JSON of solve.
var varied = []string{"regime", "groundIntegral", "margin", "mu", "condensate", "leaderExponent", "halving", "criticalSharpness", "meanFitness", "degreeExponent", "muSlope"}

// vary writes the standing over a grid of one parameter as CSV.
func (c *call) varying() error {
	g, err := readGrid(c.vary)
	if err != nil {
		return err
	}
	raw, err := c.casebook()
	if err != nil {
		return err
	}
	var book map[string]json.RawMessage
	var entries []map[string]any
	if err := json.Unmarshal(raw, &book); err != nil {
		return err
	}
	if err := json.Unmarshal(book["entries"], &entries); err != nil {
		return err
	}
	if c.entry < 1 || c.entry > len(entries) {
		return fmt.Errorf("there is no entry %d; the casebook has %d", c.entry, len(entries))
	}
	out := bufio.NewWriter(c.out)
	fmt.Fprintf(out, "%s,%s\r\n", g.name, strings.Join(varied, ","))
	for _, v := range g.values() {
		entries[c.entry-1] = with(entries[c.entry-1], g.name, v)
		if book["entries"], err = json.Marshal(entries); err != nil {
			return err
		}
		p, err := c.ask("solve", map[string]any{"casebook": book, "entry": c.entry - 1})
		if err != nil {
			return fmt.Errorf("at %s %g: %w", g.name, v, err)
		}
		var answer map[string]any
		if err := json.Unmarshal(p.Body, &answer); err != nil {
			return err
		}
		fmt.Fprint(out, strconv.FormatFloat(v, 'g', -1, 64))
		for _, name := range varied {
			switch x := answer[name].(type) {
			case nil:
				fmt.Fprint(out, ",")
			case float64:
				fmt.Fprint(out, ",", strconv.FormatFloat(x, 'g', -1, 64))
			default:
				fmt.Fprint(out, ",", x)
			}
		}
		fmt.Fprint(out, "\r\n")
	}
	return out.Flush()
}

// with sets a parameter where it belongs: the entry itself, its growth, or else its law, which refuses what it lacks.
func with(entry map[string]any, name string, v float64) map[string]any {
	part := map[string]string{"links": "growth", "headStart": "growth", "openShare": "growth", "members": "growth", "ceiling": "growth"}[name]
	if name == "sharpness" {
		entry[name] = v
		return entry
	}
	if part == "" {
		part = "law"
	}
	inner, _ := entry[part].(map[string]any)
	if inner == nil {
		inner = map[string]any{}
		if part == "law" {
			inner["family"] = "power"
		}
		entry[part] = inner
	}
	inner[name] = v
	return entry
}
