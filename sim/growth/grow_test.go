package growth

import (
	"fmt"
	"math"
	"testing"

	"gonum.org/v1/gonum/stat"
	"gonum.org/v1/gonum/stat/distuv"

	"preponder/sim/bose"
	"preponder/sim/internal/exact"
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

// TestAgainstEnumeration compares newcomers' choices, many seeds, with the exact probabilities of all histories, walked
// straight from the definitions in MODEL.md: every lever alone and in combinations, from one member and from a start.
func TestAgainstEnumeration(t *testing.T) {
	start := &Start{Energy: []float64{0.9, 0.3, 0.6, 0.5}, Received: []int32{4, 1, 0, 3}}
	// From a start two newcomers come; from one member five, each of the energy of the only level.
	base := Params{Law: law.NewTiers([]float64{0}, []float64{1}), Sharpness: 2, Links: 2, Members: 6, Start: start}
	// Two newcomers after members one of whom is the fittest for good.
	dull := base
	dull.Start = &Start{Energy: []float64{0, 0.3, 0.3002, 0.0003}, Received: []int32{4, 1, 0, 3}}
	dull.Law = law.NewTiers([]float64{0}, []float64{1})
	young := Params{Law: law.NewTiers([]float64{0}, []float64{1}), Links: 1, Members: 6}
	cases := []struct {
		name string
		from Params
		set  func(p *Params)
	}{
		{"plain", base, func(p *Params) {}},
		{"sharp", base, func(p *Params) { p.Sharpness = 9 }},
		{"head start", base, func(p *Params) { p.HeadStart = 1.5 }},
		{"open share", base, func(p *Params) { p.OpenShare = 0.4 }},
		{"distinct", base, func(p *Params) { p.Distinct = true }},
		{"ceiling", base, func(p *Params) { p.Ceiling = 0.3 }},
		{"ceiling for all", base, func(p *Params) { p.Ceiling = 0.01; p.Distinct = true; p.Links = 3 }},
		{"distinct, sharp", base, func(p *Params) { p.Distinct = true; p.Sharpness = 40 }},
		{"ceiling, sharp", base, func(p *Params) { p.Ceiling = 0.2; p.Sharpness = 2000 }},
		{"ceiling, distinct, open, head start", base, func(p *Params) { p.Ceiling = 0.3; p.Distinct = true; p.OpenShare = 0.3; p.HeadStart = 2 }},
		{"open and ceiling", base, func(p *Params) { p.Ceiling = 0.3; p.OpenShare = 0.7 }},
		{"three links at once", base, func(p *Params) { p.Links = 3; p.Members = 5 }},
		{"kernel 2", base, func(p *Params) { p.Kernel = 2 }},
		{"kernel 0.5", base, func(p *Params) { p.Kernel = 0.5 }},
		{"kernel 0", base, func(p *Params) { p.Kernel = UniformKernel }},
		{"kernel 3 from one", young, func(p *Params) { p.Kernel = 3 }},
		{"fading", young, func(p *Params) { p.Fading = 1.3 }},
		{"idling", young, func(p *Params) { p.Idling = 1.7 }},
		{"fading and idling", young, func(p *Params) { p.Fading, p.Idling = 3, 0.5 }},
		{"fading from a start", base, func(p *Params) { p.Fading = 2 }},
		{"levy", base, func(p *Params) { p.LevyAbove, p.LevyRate = 0.2, 0.8 }},
		{"levy of all above nothing", base, func(p *Params) { p.LevyRate = 1 }},
		{"levy from one", young, func(p *Params) { p.LevyAbove, p.LevyRate = 0.4, 0.9 }},
		{"expiry", young, func(p *Params) { p.Expiry = 2 }},
		{"expiry of a start", base, func(p *Params) { p.Expiry = 1; p.Members = 7; p.Links = 1 }},
		{"expiry and levy", young, func(p *Params) { p.Expiry = 3; p.LevyAbove, p.LevyRate = 0.3, 0.5 }},
		{"expiry and ceiling", young, func(p *Params) { p.Expiry = 1; p.Ceiling = 0.5 }},
		{"kernel, expiry, levy", young, func(p *Params) { p.Kernel = 1.5; p.Expiry = 2; p.LevyAbove, p.LevyRate = 0.3, 0.5 }},
		{"kernel, distinct, ceiling", base, func(p *Params) { p.Kernel = 1.5; p.Distinct = true; p.Ceiling = 0.3 }},
		{"idling, open share, head start", young, func(p *Params) { p.Idling = 1; p.OpenShare = 0.3; p.HeadStart = 2 }},
		{"kernel, distinct, nobody fitter comes", dull, func(p *Params) { p.Kernel = 1.5; p.Distinct = true }},
		{"sharp, distinct, ceiling, nobody fitter comes", dull, func(p *Params) { p.Distinct = true; p.Ceiling = 0.4; p.Sharpness = 3000 }},
		{"idling, distinct, ceiling, nobody fitter comes", dull, func(p *Params) { p.Idling = 1; p.Distinct = true; p.Ceiling = 0.4; p.Sharpness = 3000 }},
		{"all at once", base, func(p *Params) {
			p.Kernel, p.Fading, p.Idling, p.HeadStart, p.OpenShare, p.Distinct, p.Ceiling, p.LevyAbove, p.LevyRate, p.Expiry = 1.4, 0.6, 0.9, 0.5, 0.2, true, 0.4, 0.25, 0.5, 1
		}},
	}
	runs := 60000
	if testing.Short() {
		runs = 8000
	}
	for _, c := range cases {
		p := c.from
		c.set(&p)
		from, made := 1, 0
		if p.Start != nil {
			from = len(p.Start.Energy)
			for _, d := range p.Start.Received {
				made += int(d)
			}
		}
		want := map[string]float64{}
		enumerate(p, from, want)
		got := map[string]float64{}
		for seed := range uint32(runs) {
			p.Seed = seed
			n := grow(t, p)
			got[fmt.Sprint(n.Targets[made:])]++
		}
		total, chi, cells := 0.0, 0.0, 0
		small, smallGot := 0.0, 0.0
		for key, w := range want {
			total += w
			w *= float64(runs)
			if w < 8 {
				small, smallGot = small+w, smallGot+got[key]
				continue
			}
			chi += (got[key] - w) * (got[key] - w) / w
			cells++
		}
		for key := range got {
			if want[key] == 0 {
				t.Fatalf("%s: %s was drawn, but cannot be", c.name, key)
			}
		}
		near.Rel(t, c.name+": enumeration adds up", total, 1, 1e-12)
		if small > 8 {
			chi += (smallGot - small) * (smallGot - small) / small
			cells++
		}
		if z := (chi - float64(cells)) / math.Sqrt(2*float64(cells)); z > 4.5 {
			t.Errorf("%s: chi-square %.0f over %d cells", c.name, chi, cells)
		}
	}
}

// A past is the choices of each newcomer, in order.
type past [][]int32

// enumerate walks all histories and adds up their probabilities.
func enumerate(p Params, from int, out map[string]float64) {
	var walk func(done past, now []int32, weight float64)
	walk = func(done past, now []int32, weight float64) {
		v := from + len(done)
		if v == p.Members {
			all := []int32{}
			for _, n := range done {
				all = append(all, n...)
			}
			out[fmt.Sprint(all)] += weight
			return
		}
		m := int(p.Links)
		if p.Distinct {
			m = min(m, v)
		}
		if len(now) == m {
			walk(append(append(past(nil), done...), now), nil, weight)
			return
		}
		for j, q := range chances(p, from, done, now) {
			if q > 0 {
				walk(done, append(append([]int32(nil), now...), int32(j)), weight*q)
			}
		}
	}
	walk(nil, nil, 1)
}

// chances returns the probabilities of the next link of the newcomer at hand, from the definitions alone.
func chances(p Params, from int, done past, now []int32) []float64 {
	energy := make([]float64, from+len(done))
	if p.Start != nil {
		copy(energy, p.Start.Energy)
	}
	return weigh(p, from, energy, done, now)
}

// chancesOf is chances for the first link of the newcomer after a history from one member, of any energies.
func chancesOf(p Params, energy []float64, done past) []float64 {
	return weigh(p, 1, energy, done, nil)
}

func weigh(p Params, from int, energy []float64, done past, now []int32) []float64 {
	v := from + len(done)
	all, counting, last := make([]float64, v), make([]float64, v), make([]int, v)
	links, live := 0.0, 0.0
	for j := range v {
		last[j] = j
		if j < from && p.Start != nil {
			d := float64(p.Start.Received[j])
			all[j] += d
			links += d
			if p.Expiry == 0 || v-(from-1) <= p.Expiry { // made when the start ended
				counting[j] += d
				live += d
			}
		}
	}
	for i, choices := range done {
		u := from + i
		for _, j := range choices {
			all[j]++
			links++
			last[j] = u
			if p.Expiry == 0 || v-u <= p.Expiry {
				counting[j]++
				live++
			}
		}
	}
	taken := func(j int) bool { return p.Distinct && has(now, int32(j)) }
	closed := func(j int) bool { return p.Ceiling > 0 && all[j] > 0 && all[j] >= p.Ceiling*links }
	free := 0
	for j := range v {
		if !taken(j) && !closed(j) {
			free++
		}
	}
	ok := func(j int) bool { return !taken(j) && (free == 0 || !closed(j)) }
	least := math.Inf(1)
	for j := range v {
		if ok(j) {
			least = math.Min(least, energy[j])
		}
	}
	alpha := map[float64]float64{0: 1, UniformKernel: 0}[p.Kernel]
	if p.Kernel > 0 {
		alpha = p.Kernel
	}
	fit, open := make([]float64, v), make([]float64, v)
	sumFit, sumOpen := 0.0, 0.0
	for j := range v {
		if ok(j) {
			d := counting[j]
			if p.LevyRate > 0 {
				d = math.Min(d, p.LevyAbove*live) + (1-p.LevyRate)*math.Max(0, d-p.LevyAbove*live)
			}
			fit[j] = math.Exp(-p.Sharpness*(energy[j]-least)) * math.Pow(p.Links+p.HeadStart+d, alpha) * math.Pow(float64(v-j), -p.Fading) * math.Pow(float64(v-last[j]), -p.Idling)
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
		{Law: law.Power{Theta: 1}, Sharpness: 1e6, Links: 2, Kernel: 3, Distinct: true},
		{Law: law.Power{Theta: 1}, Sharpness: 50, Links: 2, Kernel: 3, Ceiling: .05, Fading: 3, Idling: 3},
		{Law: law.Power{Theta: 1}, Sharpness: 1e6, Links: 2, LevyAbove: .01, LevyRate: 1, Expiry: 1},
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
	// Sharpness moves by 1 % in each phase, and the law by 1 % of its exponent: members keep their rank in it.
	for _, c := range []struct {
		name     string
		from, to Params
	}{
		{"fit-get-rich", Params{Law: law.Power{Theta: 1}, Sharpness: 1}, Params{Law: law.Power{Theta: 1}, Sharpness: 1.01}},
		{"near the transition", Params{Law: law.Power{Theta: 1}, Sharpness: 1.4}, Params{Law: law.Power{Theta: 1}, Sharpness: 1.414}},
		{"condensate", Params{Law: law.Power{Theta: 1}, Sharpness: 3}, Params{Law: law.Power{Theta: 1}, Sharpness: 3.03}},
		{"the law", Params{Law: law.Power{Theta: 1}, Sharpness: 3}, Params{Law: law.Power{Theta: 1.01}, Sharpness: 3}},
	} {
		c.from.Links, c.from.Members, c.from.Seed = 2, 20000, 1
		c.to.Links, c.to.Members, c.to.Seed = 2, 20000, 1
		a, b := grow(t, c.from), grow(t, c.to)
		same := 0
		for i := range a.Targets {
			if a.Targets[i] == b.Targets[i] {
				same++
			}
		}
		share := float64(same) / float64(len(a.Targets))
		t.Logf("%s: %.3f of the links stay", c.name, share)
		if share < 0.9 {
			t.Errorf("%s: %.3f of the links stay in place", c.name, share)
		}
	}
}

// TestRungsAgainstScan grows the same network by the tree's bounds and straight from the weights: the shares of links by
// level must agree, since an error in climbing rungs would bias the old or the idle.
func TestRungsAgainstScan(t *testing.T) {
	p := Params{Law: law.Power{Theta: 1}, Sharpness: 1, Links: 2, Members: 300, Kernel: 1.2, Fading: .8, Idling: .7}
	const runs = 600
	tenths := func(d []int32) (out [10]float64) {
		for j, k := range d {
			out[j*10/len(d)] += float64(k)
		}
		return out
	}
	var tree, scan [10][runs]float64
	for i := range runs {
		p.Seed = uint32(i)
		n := grow(t, p)
		a := tenths(n.Received(n.Members))
		p.Seed += 10000
		b := tenths(slowly(t, p))
		for k := range a {
			tree[k][i], scan[k][i] = a[k], b[k]
		}
	}
	for k := range tree {
		a, sa := stat.MeanStdDev(tree[k][:], nil)
		b, sb := stat.MeanStdDev(scan[k][:], nil)
		if z := (a - b) / math.Sqrt((sa*sa+sb*sb)/runs); math.Abs(z) > 4 {
			t.Errorf("members of the %d. tenth hold %.2f links by the tree, %.2f by the weights, z = %.1f", k+1, a, b, z)
		}
	}
}

// TestStartWithHistory goes on from a network that was grown here: what the next newcomer chooses must not depend on
// whether growth paused.
func TestStartWithHistory(t *testing.T) {
	p := Params{Law: law.Power{Theta: 1}, Sharpness: 2, Links: 2, Members: 60, Seed: 4, Fading: .5, Idling: 1, Expiry: 20}
	base := grow(t, p)
	start := &Start{Energy: base.Energy, Received: base.Received(60), History: base}
	done := past{}
	for v := 1; v < 60; v++ {
		done = append(done, base.Targets[base.LinksBefore(v):base.LinksBefore(v+1)])
	}
	q := p
	q.Start = &Start{Energy: base.Energy[:1], Received: []int32{0}}
	want := chancesOf(q, base.Energy, done)
	const runs = 20000
	got := make([]float64, 60)
	for seed := range uint32(runs) {
		p.Seed, p.Members, p.Start = seed, 61, start
		n := grow(t, p)
		got[n.Targets[len(base.Targets)]]++
	}
	chi, cells := 0.0, 0
	for j, w := range want {
		if e := w * runs; e > 5 {
			chi += (got[j] - e) * (got[j] - e) / e
			cells++
		}
	}
	if z := (chi - float64(cells)) / math.Sqrt(2*float64(cells)); z > 4.5 {
		t.Errorf("chi-square %.0f over %d members", chi, cells)
	}
}

// slowly grows a network from the definitions, every weight computed anew for every link.
func slowly(t *testing.T, p Params) []int32 {
	t.Helper()
	r := exact.Key(p.Seed, 99)
	energy := make([]float64, p.Members)
	received, last := make([]int32, p.Members), make([]int, p.Members)
	next := uint64(0)
	unit := func() float64 { next++; return exact.Unit(exact.Bits(r, next, 0)) }
	for v := range p.Members {
		energy[v], last[v] = p.Law.Quantile(unit()), v
		if v == 0 {
			continue
		}
		w := make([]float64, v)
		sum := 0.0
		for j := range v {
			w[j] = math.Exp(-p.Sharpness*energy[j]) * math.Pow(p.Links+float64(received[j]), p.Kernel) * math.Pow(float64(v-j), -p.Fading) * math.Pow(float64(v-last[j]), -p.Idling)
			sum += w[j]
		}
		var to []int
		for range int(p.Links) {
			x, j := unit()*sum, 0
			for x -= w[0]; x >= 0 && j+1 < v; x -= w[j] {
				j++
			}
			to = append(to, j)
		}
		for _, j := range to {
			received[j]++
			last[j] = v
		}
	}
	return received
}

// How levers cost: against the plain rule in the same run.
func BenchmarkLevers(b *testing.B) {
	for _, c := range []struct {
		name string
		set  func(p *Params)
	}{{"plain", func(p *Params) {}}, {"head start", func(p *Params) { p.HeadStart = 2 }}, {"open share", func(p *Params) { p.OpenShare = .2 }}, {"distinct", func(p *Params) { p.Distinct = true }}, {"ceiling", func(p *Params) { p.Ceiling = .1 }},
		{"levy", func(p *Params) { p.LevyAbove, p.LevyRate = .05, .5 }}, {"expiry", func(p *Params) { p.Expiry = 10000 }}, {"kernel", func(p *Params) { p.Kernel = 1.2 }}, {"fading", func(p *Params) { p.Fading = 1 }}, {"idling", func(p *Params) { p.Idling = 1 }}} {
		b.Run(c.name, func(b *testing.B) {
			p := Params{Law: law.Power{Theta: 1}, Sharpness: 3, Links: 2, Members: 1e5, Seed: 1}
			c.set(&p)
			for b.Loop() {
				grow(b, p)
			}
			b.ReportMetric(2e5*float64(b.N)/b.Elapsed().Seconds()/1e6, "Mlinks/s")
		})
	}
}

func BenchmarkGrow(b *testing.B) {
	for _, c := range []struct {
		name  string
		sharp float64
	}{{"level", 0}, {"fit-get-rich", 1}, {"condensate", 3}} {
		for _, size := range []int{1e3, 1e5, 1e6, 1e7} {
			b.Run(fmt.Sprintf("%s/%d", c.name, size), func(b *testing.B) {
				for b.Loop() {
					grow(b, Params{Law: law.Power{Theta: 1}, Sharpness: c.sharp, Links: 2, Members: size, Seed: 1})
				}
				b.ReportMetric(2*float64(size)*float64(b.N)/b.Elapsed().Seconds()/1e6, "Mlinks/s")
			})
		}
	}
}

func TestBetaMuAlong(t *testing.T) {
	begun := grow(t, Params{Law: law.Uniform{}, Sharpness: 2, Links: 2, Members: 300, Seed: 9})
	for _, p := range []Params{{Law: law.Power{Theta: 1}, Sharpness: 3, Links: 2, HeadStart: 1, Members: 900, Seed: 2},
		{Law: law.Uniform{}, Sharpness: 2, Links: 1.7, Members: 900, Seed: 3, Start: &Start{Energy: begun.Energy, Received: begun.Received(300)}}} {
		n := grow(t, p)
		z := n.Pulls()
		sizes := []int32{300, 301, 420, 900}
		for i, got := range z.Along(sizes) {
			near.Abs(t, "beta mu", got, z.BetaMu(n.Received(int(sizes[i]))), 1e-11)
		}
	}
}
