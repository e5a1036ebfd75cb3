package law_test

import (
	"fmt"
	"math"
	"strings"
	"testing"
	"time"

	"preponder/sim/internal/gauss"
	"preponder/sim/internal/near"
	"preponder/sim/law"
)

func drawn(t testing.TB, k ...law.Knot) law.Drawn {
	t.Helper()
	l, err := law.NewDrawn(k)
	if err != nil {
		t.Fatal(err)
	}
	return l
}

func formula(t testing.TB, text string, top float64) law.Formula {
	t.Helper()
	l, err := law.NewFormula(text, top)
	if err != nil {
		t.Fatal(err)
	}
	return l
}

// check holds a law to what every law promises.
func check(t *testing.T, l law.Law) {
	t.Helper()
	name := fmt.Sprintf("%T", l)
	low, high := l.Support()
	before := math.Inf(-1)
	for _, u := range []float64{1e-12, 1e-6, 1e-3, .01, .1, .25, .5, .75, .9, .99, .999999} {
		e := l.Quantile(u)
		if e < low || e > high || e < before {
			t.Errorf("%s: quantile(%g) = %g outside %g to %g, or below the one before", name, u, e, low, high)
		}
		before = e
		if _, leveled := l.(law.Leveled); !leveled {
			near.Rel(t, name+" cumulative of quantile", l.Cumulative(e), u, 1e-10+1e-16/u)
		}
	}
	// The mean is that of the quantiles, in the middle of a thousand equal shares.
	mean, spread := 0.0, 0.0
	for i := range 2000 {
		e := l.Quantile((float64(i) + .5) / 2000)
		mean += e / 2000
		spread += math.Abs(e) / 2000
	}
	near.Abs(t, name+" mean", l.Mean(), mean, 4e-3*spread)
	if _, leveled := l.(law.Leveled); leveled {
		return
	}
	// The density integrates to the cumulative, in panels that end at the knots.
	a, b := l.Quantile(.02), l.Quantile(.98)
	ends := []float64{a, b}
	if p, ok := l.(law.Pieced); ok {
		ends = ends[:1]
		for _, k := range p.Knots() {
			if k > a && k < b {
				ends = append(ends, k)
			}
		}
		ends = append(ends, b)
	}
	sum := 0.0
	for i := 1; i < len(ends); i++ {
		const parts = 60
		at := func(x float64) float64 { return l.Density(x) }
		from, to := ends[i-1], ends[i]
		if from > 0 { // in ln e, since laws may be steep at 0
			from, to = math.Log(from), math.Log(to)
			at = func(x float64) float64 { return l.Density(math.Exp(x)) * math.Exp(x) }
		}
		for k := range parts {
			w := (to - from) / parts
			for j, x := range gauss.Nodes {
				sum += gauss.Weights[j] * w / 2 * at(from+w*(float64(k)+(x+1)/2))
			}
		}
	}
	near.Rel(t, name+" mass", sum, .96, 1e-9)
	if e := l.Edge(); low == 0 && e.Scale > 0 {
		x := 1e-9
		if e.Below > 0 {
			x = math.Min(x, e.Below)
		}
		near.Rel(t, name+" edge", l.Density(x), e.Scale*math.Pow(x, e.Theta), 1e-6)
	}
}

func TestLaws(t *testing.T) {
	for _, l := range []law.Law{
		law.Power{Theta: 1}, law.Power{Theta: -.5}, law.Beta{A: 2, B: .5}, law.Beta{A: .3, B: 4}, law.Uniform{Low: .2}, law.Gamma{Shape: .4, Scale: 3}, law.Gamma{Shape: 9, Scale: .1}, law.Lognormal{Sigma: 2},
		law.NewTiers([]float64{3, 1, 2}, []float64{1, 2, 3}), law.Scaled{Law: law.Power{Theta: 2}, By: 3},
		drawn(t, law.Knot{}, law.Knot{Eps: .2, Density: .8}, law.Knot{Eps: .4, Density: .1}, law.Knot{Eps: .8, Density: 2}, law.Knot{Eps: 1.3}),
		drawn(t, law.Knot{Eps: -1, Density: 2}, law.Knot{Eps: 5}), law.Scaled{Law: drawn(t, law.Knot{Density: 1}, law.Knot{Eps: 1, Density: 3}, law.Knot{Eps: 2}), By: .5},
		formula(t, "e*(2-e)", 2), formula(t, "exp(-e)*sqrt(e)", 30), formula(t, "1/sqrt(e)", 1), formula(t, "abs(e-0.3)+max(0, e-1)", 2), formula(t, "1-cos(e)", 3), formula(t, "exp(-1/e)", 1), formula(t, "e^3*(1+0.9*sin(30*e))", 1),
	} {
		check(t, l)
	}
}

func TestFormulasThatAreFamilies(t *testing.T) {
	// The same law by two roads: a formula, and the closed form of a family.
	for _, c := range []struct {
		text string
		top  float64
		l    law.Law
	}{{"e^1.5", 1, law.Power{Theta: 1.5}}, {"exp(-e/2)*e", 120, law.Gamma{Shape: 2, Scale: 2}}, {"exp(-e)", math.Ln2, law.Uniform{Low: .5}}, {"e^-0.5", 1, law.Power{Theta: -.5}}} {
		f := formula(t, c.text, c.top)
		for _, u := range []float64{1e-9, .001, .2, .5, .9, .999} {
			near.Rel(t, c.text, f.Quantile(u), c.l.Quantile(u), 1e-11)
		}
		near.Abs(t, c.text+" exponent", f.Edge().Theta, c.l.Edge().Theta, 1e-12)
	}
}

func TestDrawnLaw(t *testing.T) {
	// A triangle 2(1-e) on [0, 1]: F = 1 - (1-e)^2, mean 1/3.
	l := drawn(t, law.Knot{Eps: 4, Density: 7}, law.Knot{Eps: 5})
	for _, u := range []float64{.01, .3, .99} {
		near.Rel(t, "triangle", l.Quantile(u), 1-math.Sqrt(1-u), 1e-14)
	}
	near.Rel(t, "mean", l.Mean(), 1./3, 1e-15)
	// Stretches of density 0 at the ends are cut off: the fittest have energy 0.
	l = drawn(t, law.Knot{}, law.Knot{Eps: 1}, law.Knot{Eps: 2, Density: 1}, law.Knot{Eps: 3}, law.Knot{Eps: 4})
	if _, high := l.Support(); high != 2 || l.Edge().Theta != 1 {
		t.Errorf("cut to %g, exponent %g", high, l.Edge().Theta)
	}
	for _, c := range []struct {
		knots []law.Knot
		want  string
	}{
		{[]law.Knot{{}}, "needs at least 2 knots; this one has 1"},
		{[]law.Knot{{}, {Eps: 1}}, "density 0 everywhere"},
		{[]law.Knot{{Eps: 1, Density: 1}, {Eps: 1, Density: 2}}, "knot 2 lies at energy 1, not above the one before it at 1"},
		{[]law.Knot{{Density: 1}, {Eps: 1, Density: -2}}, "knot 2 has density -2"},
		{[]law.Knot{{Density: 1}, {Eps: math.Inf(1), Density: 2}}, "knot 2 lies at energy +Inf"},
		{[]law.Knot{{Density: 1}, {Eps: 2e6, Density: 2}}, "energies are from -1e6 to 1e6"},
	} {
		if _, err := law.NewDrawn(c.knots); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%v: %v, want %q", c.knots, err, c.want)
		}
	}
}

func TestSketch(t *testing.T) {
	for _, l := range []law.Law{law.Power{Theta: 1}, law.Power{Theta: 3}, law.Power{Theta: -.3}, law.Beta{A: 2, B: 3}, law.Beta{A: 4, B: .7}, law.Uniform{}, law.Gamma{Shape: 2, Scale: 1}, law.Lognormal{Sigma: 1}, formula(t, "e^2*(1+0.8*sin(9*e))", 2),
		law.NewTiers([]float64{0, 1, 3}, []float64{.2, .3, .5})} {
		knots := law.Sketch(l, 14)
		d, err := law.NewDrawn(knots)
		if err != nil || len(knots) > 14 {
			t.Errorf("%#v: %v, %v", l, knots, err)
			continue
		}
		// The share of members on the wrong side of any energy stays small.
		low, _ := l.Support()
		if math.IsInf(low, -1) {
			low = l.Quantile(.003)
		}
		for _, u := range []float64{.05, .2, .4, .6, .8, .95} {
			if _, leveled := l.(law.Leveled); leveled {
				near.Abs(t, fmt.Sprintf("%#v sketched", l), d.Quantile(u), l.Quantile(u), .11)
				continue
			}
			near.Abs(t, fmt.Sprintf("%#v sketched", l), d.Cumulative(l.Quantile(u)-low), u, .03)
		}
	}
}

func TestFormulaIsRefused(t *testing.T) {
	for _, c := range []struct {
		text string
		top  float64
		want string
	}{
		{"", 1, "at character 1: the formula is empty"},
		{"2e", 1, "at character 2: an operator is missing"},
		{"e*", 1, "at character 3: the formula ends too early"},
		{"(e", 1, "at character 3: a closing bracket is missing"},
		{"e)", 1, "at character 2: this bracket closes nothing"},
		{"e**2", 1, "powers are written with ^"},
		{"p = e", 1, `at character 1: "p" is not known`},
		{"exp e", 1, "exp needs its argument in brackets"},
		{"pow(e)", 1, "pow takes 2 arguments, not 1"},
		{"1..2", 1, `at character 3: "." means nothing here`},
		{"e; e", 1, `";" means nothing here`},
		{strings.Repeat("e+", 120) + "e", 1, "has 241 characters; 200 are allowed"},
		{strings.Repeat("(", 90) + "e" + strings.Repeat(")", 90), 1, "nested too deeply"},
		{"e-0.5", 1, "the density is negative, -0.498, at e = 0.00195"},
		{"1/(e-0.5)^2", 1, "infinite at e = 0.5"},
		{"1/abs(e-0.3)", 1, "near e = 0.3"},
		{"1/(e-0.5)", 2, "negative"},
		{"ln(e)", 1, "the density is negative"},
		{"1/e", 1, "rises like e^-1 at e = 0, too steeply"},
		{"0*e", 1, "the density is 0 everywhere"},
		{"max(0, e-0.25)", 1, "the density is 0 from e = 0 to 0.25"},
		{"sqrt(0.5-e)", 1, "the density has no value at e = 0.501"},
		{"sin(1e5*e)+1", 1, "varies too finely"},
		{"1", 0, "the end must be above 0"},
		{"1e300*1e300", 1, "infinite"},
	} {
		if _, err := law.NewFormula(c.text, c.top); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%q: %v, want %q", c.text, err, c.want)
		}
	}
}

func FuzzFormula(f *testing.F) {
	for _, s := range []string{"e*(2-e)", "exp(-e)*sqrt(e)", "1-cos(e)", "max(0,e-.3)^2", "1e3^e", "pow(e,-0.3)/tanh(e)", "sin(e)^2", "((((", "2e", "e^e^e", "exp(-e)*e*1e-9", "−e·π"} {
		f.Add(s, 1.0)
	}
	f.Fuzz(func(t *testing.T, text string, top float64) {
		begun := time.Now()
		l, err := law.NewFormula(text, top)
		if d := time.Since(begun); d > 2*time.Second { // 50 ms on a quiet machine; a hang is what this finds
			t.Fatalf("%q took %v", text, d)
		}
		if err != nil {
			return
		}
		for _, u := range []float64{1e-9, .3, .999} {
			if e := l.Quantile(u); !(e >= 0 && e <= top) {
				t.Fatalf("%q on %g: quantile(%g) = %g", text, top, u, e)
			}
		}
		if e := l.Edge(); math.IsNaN(e.Scale) || math.IsNaN(e.Theta) || e.Theta <= -1 {
			t.Fatalf("%q: edge %+v", text, e)
		}
	})
}

func FuzzDrawn(f *testing.F) {
	f.Add(0.0, 1.0, 0.5, 2.0, 1.0, 0.0)
	f.Add(0.0, 1e-300, 1e-300, 1.0, 1e6, 1e12)
	f.Fuzz(func(t *testing.T, a, p, b, q, c, r float64) {
		l, err := law.NewDrawn([]law.Knot{{Eps: a, Density: p}, {Eps: b, Density: q}, {Eps: c, Density: r}})
		if err != nil {
			return
		}
		_, high := l.Support()
		for _, u := range []float64{1e-9, .3, .999} {
			if e := l.Quantile(u); !(e >= 0 && e <= high) {
				t.Fatalf("%v %v %v: quantile(%g) = %g", a, b, c, u, e)
			}
		}
	})
}
