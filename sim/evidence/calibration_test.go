package evidence

import (
	"flag"
	"math"
	"math/rand/v2"
	"testing"
)

var (
	networks = flag.Int("networks", 2, "networks a setting of the calibration study")
	size     = flag.Int("size", 1200, "their members")
)

// TestCalibration is the calibration study: networks grown by the generator of the tests, which knows nothing of this
// code, under laws whose ground integral is known, and how often interval and verdict are right. Every run of the tests
// makes a small one; ./build.sh bench evidence [networks] [size] prints one of any size. Bounds are those of the project's
// method: intervals cover in 91 of 100, verdicts are wrong and the plain rule denied in 2 of 100 at most.
func TestCalibration(t *testing.T) {
	infinite := math.Inf(1)
	share := func(part, low float64) func(r *rand.Rand) float64 {
		return func(r *rand.Rand) float64 {
			if r.Float64() < part {
				return 1
			}
			return low
		}
	}
	for _, c := range []struct {
		name   string
		w      world
		ground float64 // NaN: the plain rule does not hold
	}{
		{"Beta, I0 1/2", world{fitness: betaFitness(3)}, 0.5},
		{"Beta, I0 1", world{fitness: betaFitness(2)}, 1},
		{"Beta, I0 3", world{fitness: betaFitness(4. / 3)}, 3},
		{"power, b 3", world{fitness: powerFitness(1, 3)}, 1 - 0.6771},
		{"power, b 0.8", world{fitness: powerFitness(1, 0.8)}, 2.04},
		{"gamma, q 2, s 1", world{fitness: func(r *rand.Rand) float64 { return r.Float64() * r.Float64() }}, math.Pi*math.Pi/6 - 1},
		{"lognormal, sd 1/2", world{fitness: func(r *rand.Rand) float64 { return math.Exp(r.NormFloat64() / 2) }}, 0},
		{"equal", world{fitness: equalFitness}, infinite},
		{"two tiers", world{fitness: share(0.2, 0.3)}, infinite},
		{"open share 0.2", world{fitness: betaFitness(3), open: 0.2}, math.NaN()},
		{"ageing 0.3", world{fitness: betaFitness(2), nu: 0.3}, math.NaN()},
		{"kernel 1.3", world{fitness: betaFitness(2), alpha: 1.3}, math.NaN()},
		{"recent activity 0.2", world{fitness: betaFitness(2), mu: 0.2}, math.NaN()},
	} {
		t.Run(c.name, func(t *testing.T) {
			t.Parallel()
			count := map[string]int{}
			covered, denied, wrong := 0, 0, 0
			for k := range *networks {
				w := c.w
				w.n, w.m, w.seed = *size, 2, uint64(5000+k)
				if w.alpha == 0 {
					w.alpha = 1
				}
				s, _ := examine(t, w)
				count[s.Verdict]++
				if !s.Rule.Plain {
					denied++
					continue
				}
				if !(s.Ground.Low > c.ground) && !(s.Ground.High < c.ground) {
					covered++
				}
				switch {
				case s.Verdict == Condensate && !(c.ground < 1), (s.Verdict == FitGetRich || s.Verdict == Level) && c.ground < 1:
					wrong++
				}
			}
			if math.IsNaN(c.ground) {
				if *size >= 10000 && denied < *networks {
					t.Errorf("%s: noticed in %d of %d", c.name, denied, *networks)
				}
				t.Logf("%-20s plain rule denied in %d of %d; verdicts %v", c.name, denied, *networks, count)
				return
			}
			if wrong*50 > *networks || denied*50 > *networks || covered*100 < 91*(*networks-denied) {
				t.Errorf("%s: covered %d of %d, denied %d, wrong %d", c.name, covered, *networks-denied, denied, wrong)
			}
			t.Logf("%-20s covered %d of %d, plain rule denied in %d, wrong verdicts %d; %v", c.name, covered, *networks-denied, denied, wrong, count)
		})
	}
}
