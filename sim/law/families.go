package law

import (
	"fmt"
	"math"
	"strings"
)

// A Field is one parameter of a family: what the page draws a slider from and the case file is checked against.
type Field struct {
	Name    string     `json:"name"`
	Label   string     `json:"label"`
	Low     float64    `json:"low"`  // least value allowed
	High    float64    `json:"high"` // largest value allowed
	Open    bool       `json:"open"` // Low itself is not allowed
	Slide   [2]float64 `json:"slide"`
	Step    float64    `json:"step"`
	Default float64    `json:"default"`
	Help    string     `json:"help"`
}

// A Family is a kind of law with its parameters.
type Family struct {
	Name    string  `json:"name"`
	Title   string  `json:"title"`
	Formula string  `json:"formula"`
	Help    string  `json:"help"`
	Fields  []Field `json:"fields"`
	Listed  bool    `json:"listed"` // offered in the page; others come from a file or from evidence
	make    func(v []float64) Law
}

// Families lists the laws this program knows, in the order the page offers them.
var Families = []Family{
	{Name: "power", Title: "Power", Formula: "p(ε) = (θ+1) ε^θ on 0 to 1", Help: "θ above 0: few members near the top fitness", Listed: true,
		Fields: []Field{{Name: "theta", Label: "Edge exponent θ", Low: -1, High: 50, Open: true, Slide: [2]float64{-0.9, 5}, Step: 0.05, Default: 1,
			Help: "how thin the law is at the fittest end; a condensate needs θ above 0"}},
		make: func(v []float64) Law { return Power{v[0]} }},
	{Name: "beta", Title: "Beta", Formula: "exp(−ε) ~ Beta(a, b)", Help: "fitness between 0 and 1 with two shapes", Listed: true,
		Fields: []Field{
			{Name: "a", Label: "Low end a", Low: 0, High: 100, Open: true, Slide: [2]float64{0.1, 8}, Step: 0.05, Default: 1, Help: "large: few members of low fitness"},
			{Name: "b", Label: "Top end b", Low: 0, High: 50, Open: true, Slide: [2]float64{0.1, 8}, Step: 0.05, Default: 3, Help: "large: few members near the top fitness"}},
		make: func(v []float64) Law { return Beta{v[0], v[1]} }},
	{Name: "uniform", Title: "Uniform", Formula: "exp(−ε) uniform on low to 1", Help: "every fitness in the range equally likely; never a condensate", Listed: true,
		Fields: []Field{{Name: "low", Label: "Lowest fitness", Low: 0, High: 0.999, Slide: [2]float64{0, 0.99}, Step: 0.01, Default: 0, Help: "fitness of the least fit member at sharpness 1"}},
		make:   func(v []float64) Law { return Uniform{v[0]} }},
	{Name: "gamma", Title: "Gamma", Formula: "ε ~ Gamma(shape, scale)", Help: "energies without an upper end", Listed: true,
		Fields: []Field{
			{Name: "shape", Label: "Shape", Low: 0, High: 50, Open: true, Slide: [2]float64{0.1, 8}, Step: 0.05, Default: 2, Help: "a condensate needs a shape above 1"},
			{Name: "scale", Label: "Scale", Low: 0, High: 1e6, Open: true, Slide: [2]float64{0.05, 5}, Step: 0.05, Default: 1, Help: "typical distance of a member from the top, in energy"}},
		make: func(v []float64) Law { return Gamma{v[0], v[1]} }},
	{Name: "lognormal", Title: "Log-normal", Formula: "ln fitness ~ Normal(0, σ²)", Help: "no top fitness: a fitter newcomer always comes", Listed: true,
		Fields: []Field{{Name: "sigma", Label: "Spread σ", Low: 0, High: 20, Open: true, Slide: [2]float64{0.05, 3}, Step: 0.05, Default: 1, Help: "standard deviation of ln fitness at sharpness 1"}},
		make:   func(v []float64) Law { return Lognormal{v[0]} }},
}

// Shaped lists the laws that are made of more than numbers in a range: levels, knots, an expression.
var Shaped = []Family{
	{Name: "tiers", Title: "Levels", Formula: "a few energies, each with its weight", Help: "members come in a few grades; the fittest grade holds an atom, so never a condensate", Listed: true, Fields: []Field{}},
	{Name: "drawn", Title: "Drawn", Formula: "straight lines from knot to knot", Help: "a density drawn by hand, normalised by the program", Listed: true, Fields: []Field{}},
	{Name: "formula", Title: "Formula", Formula: "p(ε) in proportion to a formula in e", Help: "a density written in the energy e, on 0 to an end", Listed: true,
		Fields: []Field{{Name: "top", Label: "Ends at energy", Low: 0, High: 1e6, Open: true, Slide: [2]float64{0.1, 10}, Step: 0.1, Default: 2, Help: "the density is 0 beyond"}}},
}

// FamilyNamed returns the family, or an error that names the known ones.
func FamilyNamed(name string) (Family, error) {
	var known []string
	for _, f := range Families {
		if f.Name == name {
			return f, nil
		}
		known = append(known, f.Name)
	}
	return Family{}, fmt.Errorf("the law %q is not known to this version; it knows %s, tiers, drawn and formula", name, strings.Join(known, ", "))
}

// Make returns the law with the given parameters, which must lie in the ranges of the rows.
func (f Family) Make(v []float64) Law { return f.make(v) }

// Check returns an error naming the first value outside its range.
func (f Family) Check(v []float64) error {
	for i, row := range f.Fields {
		if bad := v[i] < row.Low || v[i] > row.High || (row.Open && v[i] == row.Low) || math.IsNaN(v[i]); bad {
			least := "at least"
			if row.Open {
				least = "above"
			}
			return fmt.Errorf("%s of the %s law is %g; it must be %s %g and at most %g", row.Name, f.Name, v[i], least, row.Low, row.High)
		}
	}
	return nil
}
