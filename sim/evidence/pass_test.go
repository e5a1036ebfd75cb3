package evidence

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"preponder/sim/internal/near"
)

// randomHistory makes a log with groups of up to five links, some by existing members, some on unseen targets.
func randomHistory(seed uint64, repeats bool) *History {
	r := rand.New(rand.NewPCG(seed, 1))
	l := &Rows{}
	for i := range 90 {
		l.Names = append(l.Names, fmt.Sprint("x", i))
	}
	seen := map[[2]int32]bool{}
	for i, now := 0, 0; i < 400; i++ {
		if r.IntN(2) == 0 {
			now++
		}
		top := int32(min(2+i/3, 89))
		s, t := r.Int32N(top+1), int32(float64(top)*math.Pow(r.Float64(), 2))
		if s == t || (!repeats && seen[[2]int32{s, t}]) {
			continue
		}
		seen[[2]int32{s, t}] = true
		l.Source, l.Target, l.Time = append(l.Source, s), append(l.Target, t), append(l.Time, float64(now))
	}
	return NewHistory(l)
}

// slowPass is the likelihood straight from its definition: a double loop over choices and members.
func slowPass(h *History, eta []float64, t Terms) sums {
	n := h.Members()
	out := sums{exposure: make([]float64, n), chosen: make([]int32, n)}
	weight := func(j, g int) float64 {
		d := 0.0
		active := int(h.Arrived[j])
		for i := int32(0); i < h.Group[g]; i++ {
			if int(h.Target[i]) == j {
				d++
			}
		}
		here := 0
		for k := range n {
			if int(h.Arrived[k]) < g {
				here++
			}
		}
		for q := range g {
			for i := h.Group[q]; i < h.Group[q+1]; i++ {
				if int(h.Target[i]) == j || int(h.Source[i]) == j {
					active = q
				}
			}
		}
		age, idle := classOf(here-j), classOf(g-active)
		return math.Pow(math.Exp(t.LogKappa)+d, t.Alpha) * math.Exp(-t.Nu*octave(age)-t.Mu*octave(idle))
	}
	for g := range h.Groups() {
		w := make([]float64, n)
		for j := range n {
			if int(h.Arrived[j]) < g {
				w[j] = weight(j, g)
			}
		}
		for i := h.Group[g]; i < h.Group[g+1]; i++ {
			if !h.choice(i, g) {
				continue
			}
			allowed := func(j int) bool {
				if w[j] == 0 || j == int(h.Source[i]) {
					return false
				}
				if h.Repeats == 0 {
					for k := int32(0); k < h.Group[g]; k++ {
						if h.Source[k] == h.Source[i] && int(h.Target[k]) == j {
							return false
						}
					}
				}
				return true
			}
			z := 0.0
			for j := range n {
				if allowed(j) {
					z += eta[j] * w[j]
				}
			}
			for j := range n {
				if allowed(j) {
					out.exposure[j] += w[j] / z
				}
			}
			out.chosen[h.Target[i]]++
			out.logLik += math.Log(w[h.Target[i]]) - math.Log(z)
		}
	}
	return out
}

func TestFastPassAgainstDoubleLoop(t *testing.T) {
	for seed := range uint64(6) {
		h := randomHistory(seed, seed%2 == 0)
		r := rand.New(rand.NewPCG(seed, 2))
		eta := make([]float64, h.Members())
		for j := range eta {
			eta[j] = math.Exp(r.NormFloat64())
		}
		for _, terms := range []Terms{{1, math.Log(2), 0, 0}, {0.7, 0.3, 0.4, 0.6}, {1.3, -0.5, -0.2, 0.9}} {
			fast, slow := pass(h, eta, terms, exposures), slowPass(h, eta, terms)
			near.Rel(t, "log-likelihood", fast.logLik, slow.logLik, 1e-10)
			total := 0.0
			for j := range eta {
				near.Abs(t, "exposure", fast.exposure[j], slow.exposure[j], 1e-10*(1+slow.exposure[j]))
				if fast.chosen[j] != slow.chosen[j] {
					t.Fatal("counts differ")
				}
				total += eta[j] * fast.exposure[j]
			}
			near.Rel(t, "sum of eta E = choices", total, float64(h.Choices), 1e-9)
		}
	}
}

// With drift every choice counts half as much as one half choices later: links and exposures choice by choice, from passes
// over ever longer parts of the log.
func TestRecentAgainstParts(t *testing.T) {
	h := randomHistory(3, false)
	terms := Terms{0.7, 0.3, 0.4, 0.6}
	eta := newMixed(h).eta
	const half = 40.0
	got := recently(h, eta, terms, half)
	n, e := make([]float64, h.Members()), make([]float64, h.Members())
	var before sums
	for g := 1; g <= h.Groups(); g++ {
		part := *h
		part.Group = h.Group[:g+1]
		part.countChoices()
		now := pass(&part, eta, terms, exposures)
		if made := part.Choices - choicesOf(before); made > 0 {
			// Rows of one group share their exposure evenly only if few are in it: count each group by its middle.
			first := float64(part.Choices - made)
			for j := range n {
				was, exposed := int32(0), 0.0
				if before.chosen != nil {
					was, exposed = before.chosen[j], before.exposure[j]
				}
				weight := 0.0
				for k := range made {
					weight += math.Exp2((first+float64(k)-float64(h.Choices))/half) / float64(made)
				}
				n[j] += weight * float64(now.chosen[j]-was)
				e[j] += weight * (now.exposure[j] - exposed)
			}
		}
		before = now
	}
	for j := range n {
		near.Abs(t, "links", got.recent[j], n[j], 0.05*(0.2+n[j]))
		near.Abs(t, "exposure", got.exposure[j], e[j], 0.05*(0.2+e[j]))
	}
}

func choicesOf(s sums) int {
	n := 0
	for _, c := range s.chosen {
		n += int(c)
	}
	return n
}

func TestGradientAgainstDifferences(t *testing.T) {
	h := randomHistory(9, false)
	eta := make([]float64, h.Members())
	for j := range eta {
		eta[j] = 1 + 0.3*math.Sin(float64(j))
	}
	at := [features]float64{0.8, 0.2, 0.3, 0.5}
	value := func(x [features]float64) float64 {
		return pass(h, eta, Terms{x[0], x[1], x[2], x[3]}, exposures).logLik
	}
	got := pass(h, eta, Terms{at[0], at[1], at[2], at[3]}, slopes).gradient
	for f := range at {
		up, down := at, at
		up[f] += 1e-5
		down[f] -= 1e-5
		near.Abs(t, "gradient", got[f], (value(up)-value(down))/2e-5, 1e-5)
	}
}
