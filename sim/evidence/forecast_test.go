package evidence

import (
	"encoding/json"
	"fmt"
	"os/exec"
	"strings"
	"testing"

	"preponder/sim/internal/near"
)

// holdAgainst forecasts a log from a cut and holds the forecast against a later one.
func holdAgainst(t *testing.T, h *History, from, to float64) (BackTest, float64) {
	t.Helper()
	past, truth := h.Until(from), h.Until(to)
	quiet := func(float64) error { return nil }
	_, _, m, terms, err := testPlain(past, quiet)
	if err != nil {
		t.Fatal(err)
	}
	half, _, err := halfLife(past, terms, false, func() error { return nil })
	if err != nil {
		t.Fatal(err)
	}
	f, err := newFuture(past, m, terms, half, float64(len(truth.Target))/float64(len(past.Target))-1).run(quiet)
	if err != nil {
		t.Fatal(err)
	}
	return f.against(truth)
}

// The source is the Debian package debian-keyring: the signatures between the keys of its main ring. The forecast from
// 40, 55 and 70 % of them, held against what happened.
func TestForecastOfTheKeyring(t *testing.T) {
	log, err := exec.Command("bash", "../../site/test/keyring.sh").Output()
	if err != nil || strings.Count(string(log), "\n") < 5000 {
		near.Missing(t, "debian-keyring and gpg")
	}
	rows, err := Read(log, mustLook(t, log), func(float64) error { return nil })
	if err != nil {
		t.Fatal(err)
	}
	h := NewHistory(rows)
	inside := 0
	for _, cut := range [][2]float64{{.4, .7}, {.55, .85}, {.7, 1}} {
		b, factor := holdAgainst(t, h, cut[0], cut[1])
		t.Logf("from %.0f to %.0f %%: %d of 3 inside, factor %.2f, missed by %.3f, shares that stay by %.3f", 100*cut[0], 100*cut[1], b.Inside, factor, b.Errors[0], b.Errors[1])
		inside += b.Inside
		if b.Errors[0] >= b.Errors[1] {
			t.Errorf("from %.0f %%: shares that stay would have done better", 100*cut[0])
		}
	}
	if inside < 8 {
		t.Errorf("%d of 9 true shares inside", inside)
	}
	// The whole of it. Parameters and bits within the spread of the method's own fits of this log (project's notes: kernel
	// .32, fading .19, idling .75; 2.18 bits of the last 30 % of the choices over equal fitness).
	s, err := Examine(h, quiet)
	if err != nil {
		t.Fatal(err)
	}
	f := s.Forecast
	if s.Verdict != Forecasted || f == nil || !f.Given {
		t.Fatalf("%s, %+v", s.Verdict, f)
	}
	for _, c := range []struct {
		name             string
		got, want, about float64
	}{{"kernel", s.Rule.Kernel, .32, .06}, {"fading", s.Rule.Fading, .19, .06}, {"idling", s.Rule.Idling, .75, .03}, {"held-out bits", f.Bits.Fitness + f.Bits.Rest, 2.18, .1}} {
		if c.got < c.want-c.about || c.got > c.want+c.about {
			t.Errorf("%s: %.3f, want %.2f", c.name, c.got, c.want)
		}
	}
	c := Condense(rows, s, "keyring")
	if err := c.Verify(); err != nil {
		t.Error(err)
	}
	b, err := json.Marshal(c.Forecast)
	if err != nil || len(b) > 6000 {
		t.Errorf("%d bytes, %v", len(b), err)
	}
	said := strings.Join(c.Check.Reasons, " ")
	for _, part := range []string{"does not grow by the plain rule", "today's leader goes from 1.4 % of all links to", "half as many links again", "Lasting fitness explains", "Forecast tested on this log"} {
		if !strings.Contains(said, part) {
			t.Errorf("%q is not said: %s", part, said)
		}
	}
}

func mustLook(t *testing.T, log []byte) Mapping {
	t.Helper()
	p, err := Look(log)
	if err != nil {
		t.Fatal(err)
	}
	return p.Mapping
}

// Logs of the generator of the tests, which knows nothing of this code: recent activity, ageing and a kernel other than 1.
func TestForecastOfOtherWorlds(t *testing.T) {
	inside, of := 0, 0
	for seed := range uint64(3) {
		for _, w := range []world{{n: 2500, m: 3, fitness: betaFitness(3), alpha: 0.8, mu: 0.5}, {n: 2500, m: 3, fitness: equalFitness, alpha: 0.6, nu: 0.3, mu: 0.3}} {
			w.seed = 40 + seed
			b, factor := holdAgainst(t, NewHistory(w.grow()), .5, .75)
			t.Logf("alpha %g nu %g mu %g: %d of 3 inside, factor %.2f", w.alpha, w.nu, w.mu, b.Inside, factor)
			inside += b.Inside
			of += 3
		}
	}
	if inside < of*14/18 { // 95 % bands; leader, top ten and today's leader hang together
		t.Errorf("%d of %d true shares inside", inside, of)
	}
}

func TestForecastIsRefused(t *testing.T) {
	s, h := examine(t, world{n: 250, m: 2, fitness: equalFitness, alpha: 1, mu: 1.2, seed: 3})
	if s.Rule.Plain || s.Forecast != nil || s.Verdict != None || !strings.Contains(strings.Join(s.Reasons, " "), "so short a log") {
		t.Errorf("%d choices: %s, %v", h.Choices, s.Verdict, s.Reasons)
	}
	for _, f := range []*Forecast{{}, {Links: []int32{5, 3}}, {Links: []int32{3, 5}, Factor: 1, Same: 2}} {
		if f.verify() == nil {
			t.Errorf("%+v passes", f)
		}
	}
}

// In a log where nearly everyone has picked everyone paths end, and their shares stay.
func TestPathsEnd(t *testing.T) {
	l := &Rows{}
	for i := range 20 {
		l.Names = append(l.Names, fmt.Sprint("x", i))
		for j := range int32(i) {
			l.Source, l.Target, l.Time = append(l.Source, int32(i)), append(l.Target, j), append(l.Time, float64(i))
		}
	}
	for i := range int32(20) {
		for j := i + 1; j < 19; j++ {
			l.Source, l.Target, l.Time = append(l.Source, i), append(l.Target, j), append(l.Time, float64(20+len(l.Time)))
		}
	}
	h := NewHistory(l)
	m, terms, err := fitExtended(h, Terms{1, 0.7, 0, 0}, func() error { return nil })
	if err != nil {
		t.Fatal(err)
	}
	f := newFuture(h, m, terms, 0, 3)
	shares, _ := f.path(1)
	for s := range shares {
		if len(shares[s]) != len(f.sizes) || shares[s][len(f.sizes)-1] != shares[s][len(f.sizes)-2] {
			t.Errorf("shares %v", shares[s])
		}
	}
}

// Paths make the links asked for, to members that are there, never to the source, never the same pair twice.
func TestPathsAreLogs(t *testing.T) {
	h := randomHistory(5, false)
	m, terms, err := fitExtended(h, Terms{1, 0.7, 0, 0}, func() error { return nil })
	if err != nil {
		t.Fatal(err)
	}
	f := newFuture(h, m, terms, 0.2, 0.5)
	for k := range uint32(20) {
		var grown *History
		f.seen = func(h *History) { grown = h }
		shares, _ := f.path(k)
		if len(shares[0]) != len(f.sizes) || len(grown.Target) < int(f.sizes[len(f.sizes)-1]) {
			t.Fatalf("%d sizes, %d links", len(shares[0]), len(grown.Target))
		}
		pairs := map[[2]int32]bool{}
		for i, s := range grown.Source {
			target := grown.Target[i]
			if s == target || int(s) >= len(grown.Arrived) || int(target) >= len(grown.Arrived) {
				t.Fatalf("link %d from %d to %d of %d members", i, s, target, len(grown.Arrived))
			}
			if pairs[[2]int32{s, target}] {
				t.Fatalf("%d links to %d twice", s, target)
			}
			pairs[[2]int32{s, target}] = true
		}
	}
}
