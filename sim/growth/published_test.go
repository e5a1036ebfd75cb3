package growth

import (
	"math"
	"slices"
	"testing"

	"gonum.org/v1/gonum/stat"

	"preponder/sim/law"
)

// z fails the test where a mean of samples is further than 4 standard errors from what it should be.
func z(t *testing.T, what string, samples []float64, want float64) {
	t.Helper()
	mean, sd := stat.MeanStdDev(samples, nil)
	if z := (mean - want) / (sd / math.Sqrt(float64(len(samples)))); math.Abs(z) > 4 {
		t.Errorf("%s: mean %.5g of %d networks, want %.5g (z = %.1f)", what, mean, len(samples), want, z)
	}
}

func TestUniformAttachment(t *testing.T) {
	// The random recursive tree: of n nodes n/2 are leaves on average, variance n/12 (well known; e.g. the survey by Zhang,
	// 2015). Kernel 0 and one link.
	const n, runs = 600, 3000
	var leaves []float64
	for seed := range uint32(runs) {
		net := grow(t, Params{Law: law.Power{Theta: 1}, Links: 1, Kernel: UniformKernel, Members: n, Seed: seed})
		count := 0.0
		for _, d := range net.Received(n) {
			if d == 0 {
				count++
			}
		}
		leaves = append(leaves, count)
	}
	z(t, "leaves", leaves, n/2)
	// The variance of samples has relative standard error sqrt(2/runs).
	if v := stat.Variance(leaves, nil) / (n / 12.); math.Abs(v-1) > 4*math.Sqrt(2./runs) {
		t.Errorf("variance of leaves is %.3f of n/12", v)
	}
}

func TestOneHub(t *testing.T) {
	// Kernel alpha > 2: one node gets every link with probability prod 1/(1 + n^(1-alpha)), n from 1, for the hub of one
	// link; either end may be it. alpha = 3: pi/sinh(pi) = 0.272029054982133, alpha = 4: pi/cosh(pi sqrt(3)/2) =
	// 0.411829422582171 (Krapivsky and Redner, Phys. Rev. E 63, 066123, 2001, from memory). Networks end at some size, so the
	// product does; its limit is checked beside.
	const members, runs = 80, 30000
	for alpha, limit := range map[float64]float64{3: math.Pi / math.Sinh(math.Pi), 4: math.Pi / math.Cosh(math.Pi*math.Sqrt(3)/2)} {
		p, all := 1.0, 1.0
		for n := 1.0; n < 1e6; n++ {
			f := 1 / (1 + math.Pow(n, 1-alpha))
			if all *= f; n <= members-2 {
				p *= f
			}
		}
		if math.Abs(all-limit) > 1e-5 {
			t.Errorf("the product for alpha %g is %g, published %g", alpha, all, limit)
		}
		var one []float64
		for seed := range uint32(runs) {
			net := grow(t, Params{Law: law.NewTiers([]float64{0}, []float64{1}), Links: 1, Kernel: alpha, Members: members, Seed: seed, Start: &Start{Energy: []float64{0, 0}, Received: []int32{0, 0}}})
			hub := 0.0
			if slices.Max(net.Received(members)) == members-2 {
				hub = 1
			}
			one = append(one, hub)
		}
		z(t, "one hub", one, 2*p)
	}
}

func TestZeroTemperature(t *testing.T) {
	// Every newcomer links to the fittest there is: links received after n attachments are distributed as the cycle lengths
	// of a random permutation of n (derived by us through the Feller coupling; Godreche and Luck, J. Stat. Mech. 2008,
	// arXiv 0809.3377, link the process to permutation cycles). n! E[longest]: OEIS A028418.
	longest := []float64{1, 3, 13, 67, 411, 2911, 23563, 213543}
	sharp := func(n int, seed uint32) []int32 {
		return grow(t, Params{Law: law.Power{Theta: 0}, Sharpness: 1e12, Links: 1, Members: n + 1, Seed: seed}).Received(n + 1)
	}
	factorial := 1.0
	for i, total := range longest {
		n := i + 1
		factorial *= float64(n)
		var most []float64
		for seed := range uint32(12000) {
			most = append(most, float64(slices.Max(sharp(n, seed))))
		}
		if n == 1 {
			if most[0] != 1 {
				t.Error("the first link went astray")
			}
			continue
		}
		z(t, "longest", most, total/factorial)
	}
	// Large n: Golomb and Dickman, E[longest]/n = lambda (n + 1/2)/n to 1/n^2 (Gourdon), lambda = 0.62432998854355 (OEIS
	// A084945); variance 0.0369078300649 (Finch, Mathematical Constants, from memory); P(share > 1/2) = ln 2; E[sum of
	// squared shares] = (n+1)/(2n).
	const n, runs = 1500, 3000
	var share, half, squares []float64
	for seed := range uint32(runs) {
		d := sharp(n, seed)
		top, sum := 0.0, 0.0
		for _, k := range d {
			s := float64(k) / n
			top, sum = math.Max(top, s), sum+s*s
		}
		share, squares = append(share, top), append(squares, sum)
		if top > .5 {
			half = append(half, 1)
		} else {
			half = append(half, 0)
		}
	}
	z(t, "Golomb-Dickman", share, 0.62432998854355*(n+.5)/n)
	z(t, "share above a half", half, math.Ln2)
	z(t, "sum of squares", squares, (n+1.)/(2*n))
	if v := stat.Variance(share, nil) / 0.0369078300649; math.Abs(v-1) > 4*math.Sqrt(2./runs) {
		t.Errorf("variance of the largest share is %.3f of that published", v)
	}
}

func TestDegreesUnderUniformFitness(t *testing.T) {
	// The stationary law P(k) for uniform fitness (joint law of degree and fitness: Borgs, Chayes, Daskalakis and Roch, 2007;
	// Dereich and Ortgiese, 2014; values from the rate equation by mpmath), k = links made + links received. At a million
	// members P(m) is still about 6e-4 short of it.
	want := map[float64][]float64{1: {.735448211445, .137404965203, .0501298141983, .024318654463, .0138351777617}, 2: {.598043246242, .174550302009, .0774334792059, .0419339068056, .0255947167022}}
	const members = 500000
	for m, law5 := range want {
		net := grow(t, Params{Law: law.Uniform{}, Sharpness: 1, Links: m, Members: members, Seed: 8})
		count := make([]float64, 5)
		for _, d := range net.Received(members) {
			if d < 5 {
				count[d]++
			}
		}
		for k, p := range law5 {
			if got := count[k] / members; math.Abs(got-p) > 1.2e-3+4*math.Sqrt(p*(1-p)/members) {
				t.Errorf("%g links: P(%g) = %.5f, want %.5f", m, m+float64(k), got, p)
			}
		}
	}
}
