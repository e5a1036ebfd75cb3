package evidence

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"preponder/sim/internal/near"
)

func quiet(float64, string) error { return nil }

func examine(t *testing.T, w world) (*Study, *History) {
	t.Helper()
	h := NewHistory(w.grow())
	s, err := Examine(h, quiet)
	if err != nil {
		t.Fatal(err)
	}
	return s, h
}

// TestVerdicts is a small calibration with fixed seeds: networks grown by a generator of its own under a known law.
func TestVerdicts(t *testing.T) {
	for _, c := range []struct {
		name      string
		w         world
		ground    float64
		want      string // the verdict due
		never     []string
		decided   int // of three seeds at least
		intervals int // of three that must cover
	}{
		{"beta 1/2", world{n: 6000, m: 2, fitness: betaFitness(3), alpha: 1}, 0.5, Condensate, []string{FitGetRich, Level, None}, 1, 2},
		{"power", world{n: 5000, m: 2, fitness: powerFitness(1, 3), alpha: 1}, 1 - 0.6771, Condensate, []string{FitGetRich, Level, None}, 3, 2},
		{"beta 3", world{n: 6000, m: 2, fitness: betaFitness(4.0 / 3), alpha: 1}, 3, FitGetRich, []string{Condensate, Level, None}, 1, 2},
		{"equal", world{n: 3000, m: 2, fitness: equalFitness, alpha: 1}, math.Inf(1), Level, []string{Condensate, None}, 2, 3},
	} {
		decided, covered := 0, 0
		for seed := range uint64(3) {
			c.w.seed = 100 + seed
			s, _ := examine(t, c.w)
			if s.Verdict == c.want {
				decided++
			}
			for _, v := range c.never {
				if s.Verdict == v {
					t.Errorf("%s, seed %d: %s (%v)", c.name, seed, v, s.Reasons)
				}
			}
			if !(s.Ground.Low > c.ground) && !(s.Ground.High < c.ground) {
				covered++
			}
		}
		if decided < c.decided || covered < c.intervals {
			t.Errorf("%s: %d of 3 decided, %d intervals cover", c.name, decided, covered)
		}
	}
}

// TestPlainRuleDenied: a log grown by another rule must never be called a condensate. Bounds on the terms are those of
// the method's own study at this size, about four standard deviations.
func TestPlainRuleDenied(t *testing.T) {
	for _, c := range []struct {
		name    string
		w       world
		leading string
		read    func(r Rule) float64
		want    float64
	}{
		{"recent activity", world{n: 5000, m: 2, fitness: betaFitness(2), alpha: 1, mu: .2}, "idling", func(r Rule) float64 { return r.Idling }, .2},
		{"ageing", world{n: 5000, m: 2, fitness: betaFitness(2), alpha: 1, nu: .3}, "fading", func(r Rule) float64 { return r.Fading }, .3},
		{"kernel", world{n: 5000, m: 2, fitness: betaFitness(2), alpha: 1.3}, "kernel", func(r Rule) float64 { return r.Kernel }, 1.3},
		{"open share", world{n: 10000, m: 2, fitness: betaFitness(3), alpha: 1, open: .2}, "", nil, 0},
	} {
		c.w.seed = 7
		s, _ := examine(t, c.w)
		if s.Verdict != Forecasted && s.Verdict != None || s.Rule.Plain {
			t.Errorf("%s: %s, gain %.1f", c.name, s.Verdict, s.Rule.Gain)
		}
		if c.read != nil {
			near.Abs(t, c.name, c.read(s.Rule), c.want, 0.12)
			if s.Rule.Leading != c.leading {
				t.Errorf("%s: led by %s", c.name, s.Rule.Leading)
			}
		}
	}
}

// Large logs are searched from where the search in their first part ended: to the same terms and the same gain, and no
// plain log is denied for it.
func TestLargeLogsLikeSmallOnes(t *testing.T) {
	search := func(w world, large int) Rule {
		was := largeLog
		largeLog = large
		defer func() { largeLog = was }()
		rule, _, _, _, err := testPlain(NewHistory(w.grow()), func(float64) error { return nil })
		if err != nil {
			t.Fatal(err)
		}
		return rule
	}
	for _, w := range []world{{n: 5000, m: 2, fitness: betaFitness(2), alpha: 1, mu: .2, seed: 7}, {n: 5000, m: 2, fitness: betaFitness(2), alpha: 1.3, seed: 7}} {
		small, large := search(w, 80000), search(w, 5000)
		t.Logf("%+v\n%+v", small, large)
		near.Abs(t, "gain", large.Gain, small.Gain, 0.1*small.Gain+6)
		near.Abs(t, "kernel", large.Kernel, small.Kernel, 0.1)
		near.Abs(t, "idling", large.Idling, small.Idling, 0.06)
		if large.Plain {
			t.Errorf("taken for plain: %+v", large)
		}
	}
	if r := search(world{n: 5000, m: 2, fitness: betaFitness(3), alpha: 1, seed: 8}, 5000); !r.Plain {
		t.Errorf("a plain log is denied: %+v", r)
	}
}

func TestOriginsMultiplyToLinks(t *testing.T) {
	s, h := examine(t, world{n: 2500, m: 2, fitness: betaFitness(3), alpha: 1, seed: 4})
	members := []int32{0, 5, 100, 2000}
	for i, o := range s.Origins(members) {
		near.Rel(t, "mean x early x good x chance", o.Mean*o.Early*o.Good*o.Chance, float64(s.plain.sums.chosen[members[i]]), 1e-9)
	}
	c := Condense(h.rows(), s, "test")
	if err := c.Verify(); err != nil {
		t.Error(err)
	}
	start := c.Start(c.Law.Make(), 1, 3)
	if len(start.Energy) != c.Members {
		t.Errorf("%d members start, %d stand", len(start.Energy), c.Members)
	}
}

func TestNoOutlookOutsideWhatGrows(t *testing.T) {
	s, h := examine(t, world{n: 300, m: 70, fitness: betaFitness(3), alpha: 1, seed: 4})
	c := Condense(h.rows(), s, "test")
	if err := c.Verify(); err != nil || c.Law != nil {
		t.Errorf("70 links a newcomer: %v, %v", err, c.Law)
	}
	if s.Verdict != None && !strings.Contains(strings.Join(c.Check.Reasons, " "), "Newcomers bring 7") {
		t.Errorf("reasons %v", c.Check.Reasons)
	}
}

// rows turns a history back into rows.
func (h *History) rows() *Rows {
	l := &Rows{Names: h.Names, Read: len(h.Target)}
	for g := range h.Groups() {
		for i := h.Group[g]; i < h.Group[g+1]; i++ {
			l.Source, l.Target, l.Time = append(l.Source, h.Source[i]), append(l.Target, h.Target[i]), append(l.Time, float64(g))
		}
	}
	return l
}

func TestSameLogInOtherClothes(t *testing.T) {
	w := world{n: 1500, m: 2, fitness: betaFitness(3), alpha: 1, seed: 2}
	a, _ := examine(t, w)
	l := w.grow()
	r := rand.New(rand.NewPCG(5, 5))
	order := r.Perm(len(l.Time))
	shuffled := &Rows{}
	for _, i := range order { // another order of rows, other names, other times
		shuffled.Source, shuffled.Target = append(shuffled.Source, l.Source[i]), append(shuffled.Target, l.Target[i])
		shuffled.Time = append(shuffled.Time, math.Sqrt(l.Time[i])+3)
	}
	for _, n := range l.Names {
		shuffled.Names = append(shuffled.Names, "other "+n)
	}
	b, err := Examine(NewHistory(shuffled), quiet)
	if err != nil {
		t.Fatal(err)
	}
	near.Rel(t, "ground integral", b.Ground.Estimate, a.Ground.Estimate, 0.02)
	if a.Verdict != b.Verdict {
		t.Errorf("%s, then %s", a.Verdict, b.Verdict)
	}
}

func TestRefusals(t *testing.T) {
	for name, l := range map[string]*Rows{
		"empty":       {},
		"99 members":  world{n: 99, m: 3, fitness: equalFitness, alpha: 1}.grow(),
		"199 choices": world{n: 200, m: 1, fitness: equalFitness, alpha: 1}.grow(),
		"one takes all": world{n: 400, m: 1, fitness: func() func(*rand.Rand) float64 {
			k := 0
			return func(*rand.Rand) float64 { k++; return math.Pow(1e-9, float64(k)) }
		}(), alpha: 1}.grow(),
	} {
		s, err := Examine(NewHistory(l), quiet)
		if err != nil {
			t.Fatal(err)
		}
		if s.Verdict != None || len(s.Reasons) == 0 {
			t.Errorf("%s: %s %v", name, s.Verdict, s.Reasons)
		}
	}
}
