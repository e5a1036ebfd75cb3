package share

import (
	"math"
	"math/rand/v2"
	"testing"

	"preponder/sim/internal/near"
)

func TestWorkedExamples(t *testing.T) {
	// 30, 30, 20, 20: HHI 2,600, the worked example of the US Department of Justice page on the index.
	s := Of([]int32{30, 30, 20, 20})
	near.Abs(t, "HHI", s.HHI, 2600, 1e-9)
	near.Abs(t, "CR4", s.Top4, 1, 1e-12)
	// 541 .. 22261: the vector of the R packages ineq and DescTools; figures recomputed from the definitions.
	v := []int32{541, 1463, 2445, 3438, 4437, 5401, 6392, 8304, 11904, 22261}
	s = Of(v)
	near.Abs(t, "Gini", s.Gini, 0.462091130268, 1e-12)
	near.Abs(t, "Herfindahl", s.HHI, 1e4*0.184081230915, 1e-8)
	near.Abs(t, "CR4", s.Top4, 0.733802901511, 1e-12)
	near.Abs(t, "1..5", Gini([]int32{5, 2, 1, 4, 3}), 4.0/15, 1e-14) // textbook example
	near.Abs(t, "one owner of n", Gini([]int32{0, 0, 9000, 0}), 0.75, 1e-14)
}

func TestAlongAgainstRecount(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 2))
	targets := make([]int32, 600)
	for i := range targets {
		v := 1 + i/2
		targets[i] = int32(float64(v) * math.Pow(r.Float64(), 3))
	}
	before := func(v int) int { return 2 * max(v-1, 0) }
	p := Along(targets, before, 1, 301, 60, []int32{0})
	for i, v := range p.Members {
		d := make([]int32, v)
		for _, j := range targets[:before(int(v))] {
			d[j]++
		}
		s := Of(d)
		near.Abs(t, "share", p.Share[i], s.Share, 1e-12)
		near.Abs(t, "top4", p.Top4[i], s.Top4, 1e-12)
		near.Abs(t, "hhi", p.HHI[i], s.HHI, 1e-7)
		near.Abs(t, "gini", p.Gini[i], s.Gini, 1e-12)
		near.Abs(t, "followed", p.Followed[0][i], float64(d[0])/float64(s.Links), 1e-12)
	}
}

func TestLastingReigns(t *testing.T) {
	in := []Reign{{1, 2}, {2, 100}, {1, 103}, {3, 200}, {4, 400}}
	got := Lasting(in, 405)
	want := []Reign{{1, 2}, {3, 200}, {4, 400}}
	if len(got) != len(want) {
		t.Fatalf("got %v", got)
	}
	for i := range want {
		if got[i] != want[i] {
			t.Errorf("got %v, want %v", got, want)
		}
	}
}

// One member that outgrows the crowd, among many.
func TestGiniAlong(t *testing.T) {
	var targets []int32
	for v := 1; v < 6000; v++ {
		targets = append(targets, int32(v/3), 0)
	}
	before := func(v int) int { return 2 * max(v-1, 0) }
	p := Along(targets, before, 1, 6000, 40, nil)
	for i, v := range p.Members {
		d := make([]int32, v)
		for _, j := range targets[:before(int(v))] {
			d[j]++
		}
		near.Abs(t, "gini", p.Gini[i], Gini(d), 1e-12)
	}
}

func TestTail(t *testing.T) {
	tail := TailOf([]int32{5, 2, 1, 0, 0}, 10)
	want := map[int32]float64{1: .6, 2: .4, 3: .2, 4: .2, 5: .2}
	for i, k := range tail.Links {
		if tail.Share[i] != want[k] {
			t.Errorf("%g of the members hold %d links or more, want %g", tail.Share[i], k, want[k])
		}
	}
	if len(tail.Links) != 5 || len(TailOf([]int32{0, 0}, 10).Links) != 0 {
		t.Errorf("tail %v", tail)
	}
}
