package evidence

import (
	"fmt"
	"math"
	"math/rand/v2"
	"sort"
)

// A world is a rule to grow a synthetic log by, straight from the definition and apart from the production code.
type world struct {
	n, m          int
	fitness       func(r *rand.Rand) float64
	alpha, nu, mu float64
	open, head    float64
	seed          uint64
}

// grow returns the log of a world: an O(N) weight scan a newcomer, cumulative sums and bisection a link.
func (w world) grow() *Rows {
	r := rand.New(rand.NewPCG(w.seed, 77))
	l := &Rows{}
	eta, d, last := make([]float64, w.n), make([]int, w.n), make([]int, w.n)
	cum := make([]float64, w.n)
	for v := range w.n {
		l.Names = append(l.Names, fmt.Sprint("M", v))
		if v > 0 {
			sum := 0.0
			for j := range v {
				t := float64(w.m) + w.head + float64(d[j])
				if w.alpha != 1 {
					t = math.Pow(t, w.alpha)
				}
				if w.nu != 0 {
					t *= math.Pow(float64(v-j), -w.nu)
				}
				if w.mu != 0 {
					t *= math.Pow(float64(v-last[j]), -w.mu)
				}
				sum += eta[j] * t
				cum[j] = sum
			}
			for range w.m {
				j := sort.SearchFloat64s(cum[:v], r.Float64()*sum)
				if r.Float64() < w.open {
					j = r.IntN(v)
				}
				l.Source, l.Target, l.Time = append(l.Source, int32(v)), append(l.Target, int32(j)), append(l.Time, float64(v))
			}
			for _, j := range l.Target[len(l.Target)-w.m:] {
				d[j]++
				last[j] = v
			}
		}
		eta[v], last[v] = w.fitness(r), v
	}
	return l
}

// betaFitness is Beta(1, b): I(0) = 1/(b-1).
func betaFitness(b float64) func(*rand.Rand) float64 {
	return func(r *rand.Rand) float64 { return 1 - math.Pow(r.Float64(), 1/b) }
}

// powerFitness is exp(-beta eps), eps of the power law.
func powerFitness(theta, beta float64) func(*rand.Rand) float64 {
	return func(r *rand.Rand) float64 { return math.Exp(-beta * math.Pow(r.Float64(), 1/(theta+1))) }
}

func equalFitness(*rand.Rand) float64 { return 1 }
