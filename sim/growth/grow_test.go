package growth

import (
	"fmt"
	"math"
	"testing"

	"gonum.org/v1/gonum/stat/distuv"

	"preponder/sim/bose"
	"preponder/sim/internal/near"
	"preponder/sim/law"
)

func grow(t testing.TB, p Params) *Network {
	t.Helper()
	n, err := Grow(p, nil)
	if err != nil {
		t.Fatal(err)
	}
	return n
}

func TestDegreeLawAtEqualFitness(t *testing.T) {
	// P(k) = 2m(m+1)/(k(k+1)(k+2)), degree k = m + links received: Krapivsky, Redner and Leyvraz, PRL 85, 4629 (2000);
	// Dorogovtsev, Mendes and Samukhin, PRL 85, 4633 (2000). With head start A' the law is a ratio of gamma functions
	// (Dorogovtsev et al., formula from memory; m=2, A'=2: 3/7, 3/14, 0.119047619).
	for _, c := range []struct{ m, head float64 }{{1, 0}, {2, 0}, {3, 0}, {2, 2}, {1, 1}} {
		n := grow(t, Params{Law: law.Power{Theta: 1}, Links: c.m, HeadStart: c.head, Members: 400000, Seed: 11})
		count := make([]float64, 11)
		for _, d := range n.Received(n.Members) {
			count[min(int(d), 10)]++
		}
		want := degreeLaw(c.m, c.head)
		if c.m == 2 && c.head == 2 {
			near.Rel(t, "P(2)", want(0), 3.0/7, 1e-12)
			near.Rel(t, "P(4)", want(2), 0.119047619, 1e-8)
		}
		chi, left := 0.0, 1.0
		for k := range 10 {
			e := want(k) * float64(n.Members)
			chi += (count[k] - e) * (count[k] - e) / e
			left -= want(k)
		}
		e := left * float64(n.Members)
		chi += (count[10] - e) * (count[10] - e) / e
		if p := distuv.ChiSquared(distuv.ChiSquared{K: 10}).Survival(chi); p < 1e-3 {
			t.Errorf("m=%g a=%g: chi-square %.1f over 10, p = %.2g", c.m, c.head, chi, p)
		}
	}
}

// degreeLaw returns the stationary share of members with d links received, tickets m + a + d, from the rate equation
// P(d) = P(d-1) (m+a+d-1)/(m+a+d + (2m+a)/m), P(0) = ((2m+a)/m)/(m+a+(2m+a)/m).
func degreeLaw(m, a float64) func(d int) float64 {
	s := (2*m + a) / m
	return func(d int) float64 {
		p := s / (m + a + s)
		for i := 1; i <= d; i++ {
			p *= (m + a + float64(i) - 1) / (m + a + float64(i) + s)
		}
		return p
	}
}

// TestAgainstEnumeration compares two newcomers' choices, many seeds, with the exact probabilities by enumeration from
// the definition, lever by lever.
func TestAgainstEnumeration(t *testing.T) {
	start := &Start{Energy: []float64{0.9, 0.3, 0.6, 0.5}, Received: []int32{4, 1, 0, 3}}
	base := Params{Law: law.NewTiers([]float64{0}, []float64{1}), Sharpness: 2, Links: 2, Members: 6, Start: start}
	cases := map[string]func(p *Params){
		"plain":               func(p *Params) {},
		"sharp":               func(p *Params) { p.Sharpness = 9 },
		"head start":          func(p *Params) { p.HeadStart = 1.5 },
		"open share":          func(p *Params) { p.OpenShare = 0.4 },
		"distinct":            func(p *Params) { p.Distinct = true },
		"ceiling":             func(p *Params) { p.Ceiling = 0.3 },
		"ceiling for all":     func(p *Params) { p.Ceiling = 0.01; p.Distinct = true; p.Links = 3 },
		"distinct, sharp":     func(p *Params) { p.Distinct = true; p.Sharpness = 40 },
		"ceiling, sharp":      func(p *Params) { p.Ceiling = 0.2; p.Sharpness = 2000 },
		"all levers":          func(p *Params) { p.Ceiling = 0.3; p.Distinct = true; p.OpenShare = 0.3; p.HeadStart = 2 },
		"open and ceiling":    func(p *Params) { p.Ceiling = 0.3; p.OpenShare = 0.7 },
		"three links at once": func(p *Params) { p.Links = 3; p.Members = 5 },
	}
	const runs = 60000
	for name, set := range cases {
		p := base
		set(&p)
		want := map[string]float64{}
		enumerate(p, append([]int32(nil), start.Received...), len(start.Energy), "", 1, want)
		got := map[string]float64{}
		for seed := range uint32(runs) {
			p.Seed = seed
			n := grow(t, p)
			got[fmt.Sprint(n.Targets[8:])]++
		}
		total, chi, cells := 0.0, 0.0, 0
		small, smallGot := 0.0, 0.0
		for key, w := range want {
			total += w
			if w*runs < 8 {
				small, smallGot = small+w, smallGot+got[key]
				continue
			}
			chi += (got[key] - w*runs) * (got[key] - w*runs) / (w * runs)
			cells++
		}
		for key := range got {
			if want[key] == 0 {
				t.Fatalf("%s: %s was drawn, but cannot be", name, key)
			}
		}
		near.Rel(t, name+": enumeration adds up", total, 1, 1e-12)
		if small*runs > 8 {
			chi += (smallGot - small*runs) * (smallGot - small*runs) / (small * runs)
			cells++
		}
		if z := (chi - float64(cells)) / math.Sqrt(2*float64(cells)); z > 4.5 {
			t.Errorf("%s: chi-square %.0f over %d cells", name, chi, cells)
		}
	}
}

// enumerate walks all histories straight from the definition in the package comment.
func enumerate(p Params, received []int32, v int, _ string, weight float64, out map[string]float64) {
	var walk func(done []int32, now []int32, received []int32, v int, weight float64)
	walk = func(done, now, received []int32, v int, weight float64) {
		if v == p.Members {
			out[fmt.Sprint(done)] += weight
			return
		}
		m := int(p.Links)
		if p.Distinct {
			m = min(m, v)
		}
		if len(now) == m {
			after := append([]int32(nil), received...)
			after = append(after, 0)
			for _, j := range now {
				after[j]++
			}
			walk(append(append([]int32(nil), done...), now...), nil, after, v+1, weight)
			return
		}
		for j, q := range chances(p, now, received, v) {
			if q > 0 {
				walk(done, append(append([]int32(nil), now...), int32(j)), received, v, weight*q)
			}
		}
	}
	walk(nil, nil, received, v, weight)
}

func chances(p Params, now, received []int32, v int) []float64 {
	links := 0.0
	for _, d := range received {
		links += float64(d)
	}
	taken := func(j int) bool { return p.Distinct && has(now, int32(j)) }
	closed := func(j int) bool { return p.Ceiling > 0 && received[j] > 0 && float64(received[j]) >= p.Ceiling*links }
	free := 0
	for j := range v {
		if !taken(j) && !closed(j) {
			free++
		}
	}
	least := math.Inf(1)
	energy := func(j int) float64 {
		if j < len(p.Start.Energy) {
			return p.Start.Energy[j]
		}
		return 0
	}
	ok := func(j int) bool { return !taken(j) && (free == 0 || !closed(j)) }
	for j := range v {
		if ok(j) {
			least = math.Min(least, energy(j))
		}
	}
	fit, open := make([]float64, v), make([]float64, v)
	sumFit, sumOpen := 0.0, 0.0
	for j := range v {
		if ok(j) {
			fit[j] = math.Exp(-p.Sharpness*(energy(j)-least)) * (p.Links + p.HeadStart + float64(received[j]))
			open[j] = 1
			sumFit += fit[j]
			sumOpen++
		}
	}
	for j := range v {
		fit[j] = (1-p.OpenShare)*fit[j]/sumFit + p.OpenShare*open[j]/sumOpen
	}
	return fit
}

func TestMeasuredChemicalPotential(t *testing.T) {
	// Z/t = m (1-r) exp(-beta mu) of the continuum theory, within its finite-size error at this size.
	for _, c := range []Params{
		{Law: law.Power{Theta: 1}, Sharpness: 1, Links: 2},
		{Law: law.Power{Theta: 1}, Sharpness: 1, Links: 2, HeadStart: 3, OpenShare: .3},
		{Law: law.Uniform{}, Sharpness: 1, Links: 1},
	} {
		c.Members, c.Seed = 400000, 5
		n := grow(t, c)
		s, err := bose.Solve(c.Law, c.Sharpness, bose.Rule{Links: c.Links, HeadStart: c.HeadStart, OpenShare: c.OpenShare})
		if err != nil {
			t.Fatal(err)
		}
		near.Rel(t, "exp(-beta mu)", math.Exp(-n.BetaMu(n.Received(n.Members))), math.Exp(-s.BetaMu), 0.01)
	}
}

func TestSharpnessNeverHangs(t *testing.T) {
	for _, p := range []Params{
		{Law: law.Power{Theta: 1}, Sharpness: 1e6, Links: 2},
		{Law: law.Power{Theta: 1}, Sharpness: 1e6, Links: 2, Ceiling: .1},
		{Law: law.Power{Theta: 1}, Sharpness: 200, Links: 64, Distinct: true},
		{Law: law.Lognormal{Sigma: 20}, Sharpness: 100, Links: 1, OpenShare: 1, Ceiling: .001},
	} {
		p.Members, p.Seed = 3000, 2
		if n := grow(t, p); n.LinksBefore(n.Members) != len(n.Targets) {
			t.Errorf("%d links, %d expected", len(n.Targets), n.LinksBefore(n.Members))
		}
	}
}

func TestLeversFrom(t *testing.T) {
	base := Params{Law: law.Power{Theta: 1}, Sharpness: 5, Links: 2, Members: 4000, Seed: 3}
	plain := grow(t, base)
	late := base
	late.LeversFrom, late.Ceiling, late.HeadStart, late.Distinct, late.OpenShare = 2000, .1, 2, true, .1
	n := grow(t, late)
	at := n.LinksBefore(2000)
	if at != plain.LinksBefore(2000) {
		t.Fatalf("%d links at 2,000 members, %d without levers", at, plain.LinksBefore(2000))
	}
	for i := range at {
		if n.Targets[i] != plain.Targets[i] {
			t.Fatal("a lever works before its time")
		}
	}
	for v := 2001; v < 4000; v++ {
		if a := n.LinksBefore(v); n.Targets[a] == n.Targets[a+1] {
			t.Fatal("a newcomer has the same partner twice")
		}
	}
}

func TestDraggingKeepsLinks(t *testing.T) {
	a := grow(t, Params{Law: law.Power{Theta: 1}, Sharpness: 3, Links: 2, Members: 20000, Seed: 1})
	b := grow(t, Params{Law: law.Power{Theta: 1}, Sharpness: 3.03, Links: 2, Members: 20000, Seed: 1})
	same := 0
	for i := range a.Targets {
		if a.Targets[i] == b.Targets[i] {
			same++
		}
	}
	if share := float64(same) / float64(len(a.Targets)); share < 0.9 {
		t.Errorf("%.3f of the links stay when sharpness moves by 1 %%", share)
	}
}

func TestDigestIsPinned(t *testing.T) {
	// The same network everywhere: also checked in the browser by the page tests. Made by this program.
	n := grow(t, Params{Law: law.Power{Theta: 1}, Sharpness: 3, Links: 2, Members: 5000, Seed: 1})
	if got := n.Digest(); got != "d8bb7181b7bd9f7ca9d4f6d597d73883ec76e3b4809c7e3d36b1da0b8bfb28f5" {
		t.Errorf("digest %s", got)
	}
}

func BenchmarkGrow(b *testing.B) {
	for _, c := range []struct {
		name  string
		sharp float64
	}{{"level", 0}, {"fit-get-rich", 1}, {"condensate", 3}} {
		for _, size := range []int{1e3, 1e5, 1e6} {
			b.Run(fmt.Sprintf("%s/%d", c.name, size), func(b *testing.B) {
				for b.Loop() {
					grow(b, Params{Law: law.Power{Theta: 1}, Sharpness: c.sharp, Links: 2, Members: size, Seed: 1})
				}
				b.ReportMetric(2*float64(size)*float64(b.N)/b.Elapsed().Seconds()/1e6, "Mlinks/s")
			})
		}
	}
}
