package evidence

import (
	"math"
	"slices"
)

// A Rule says what the log shows of the rule of growth.
type Rule struct {
	Plain     bool    `json:"plain"`
	Gain      float64 `json:"gain"` // in log-likelihood, of kernel, ageing and recent activity over the plain rule
	Kernel    float64 `json:"kernel"`
	HeadStart float64 `json:"headStart"`
	Fading    float64 `json:"fading"`
	Idling    float64 `json:"idling"`
	OpenShare float64 `json:"openShare"`
	OpenGain  float64 `json:"openGain"`
	Bits      Bits    `json:"bits"`
	Leading   string  `json:"leading"` // the term that departs most from the plain rule: "idling", "fading", "kernel", "openShare"
}

// Bits is what the models explain of each choice, in bits over equal fitness, in the log itself.
type Bits struct {
	Fitness  float64 `json:"fitness"`  // plain rule with fitness
	Extended float64 `json:"extended"` // with kernel, ageing and recent activity too
}

// Gains above these deny the plain rule: with four terms chi-square gives p < 0.001 at 10 (method of the project); the
// open share has one term on the edge of its range.
const plainGain, openGain = 10, 6

// A mixed is a fit with a free law: terms, law and the fitness of every member.
type mixed struct {
	h       *History
	eta     []float64
	weights []float64
	logLik  float64
	sums    sums
}

func newMixed(h *History) *mixed {
	return &mixed{h: h, eta: ones(h.Members())}
}

// settle alternates the pass over the log and the law until the likelihood moves less than tol.
func (m *mixed) settle(t Terms, rounds, em int, tol float64) float64 {
	return m.alternate(t, rounds, em, tol, exposures)
}

// alternate is settle with what is wanted of the last pass. The gradient belongs to the fitness that pass was made with.
func (m *mixed) alternate(t Terms, rounds, em int, tol float64, final want) float64 {
	last := math.Inf(-1)
	for round := range rounds {
		w := exposures
		if round == rounds-1 {
			w = final
		}
		m.sums = pass(m.h, m.eta, t, w)
		list, of := cells(m.sums.chosen, m.sums.exposure)
		g := newGrid(list, true)
		var l float64
		m.weights, l = g.free(list, m.weights, em, 0.002)
		m.logLik = m.sums.logLik + l
		if math.Abs(m.logLik-last) < tol {
			if w != final {
				m.sums = pass(m.h, m.eta, t, final)
			}
			break
		}
		last = m.logLik
		m.assign(g, list, of)
	}
	return m.logLik
}

// assign sets every member's fitness to its posterior mean, the mean of all being 1; the law moves with the scale.
func (m *mixed) assign(g *grid, list []cell, of []int32) {
	mean := make([]float64, len(list))
	sum := 0.0
	for i, c := range list {
		top, all := 0.0, 0.0
		for k, x := range g.x[i] {
			p := m.weights[k] * g.kernel[i][k]
			all += p
			top += p * math.Exp(x)
		}
		mean[i] = top / math.Max(all, 1e-300)
		sum += mean[i] * c.count
	}
	scale := sum / float64(len(of))
	for j := range m.eta {
		m.eta[j] = math.Max(mean[of[j]]/scale, 1e-9)
	}
}

// climb maximises over the terms by quasi-Newton steps. The gradient is exact: that of the choice likelihood at the
// posterior means. The first metric is the outer product of the scores, which bounds the curvature from above, so the
// first steps are short, never wild.
func (m *mixed) climb(t Terms, free bool, step func() error) (Terms, float64, error) {
	value := func(x [features]float64) (float64, [features]float64) {
		at := Terms{x[0], x[1], x[2], x[3]}
		if free {
			l := m.alternate(at, 4, 12, 0.1, slopes)
			return l, m.sums.gradient
		}
		m.sums = pass(m.h, m.eta, at, slopes)
		return m.sums.logLik, m.sums.gradient
	}
	x := [features]float64{t.Alpha, t.LogKappa, t.Nu, t.Mu}
	l, g := value(x)
	inverse := m.metric()
	for range 40 {
		if err := step(); err != nil {
			return t, l, err
		}
		d := apply(inverse, g)
		slope := 0.0
		for i := range d {
			d[i] = math.Max(-0.4, math.Min(0.4, d[i]))
			slope += d[i] * g[i]
		}
		if slope < 0.15 {
			break
		}
		size, moved := 1.0, false
		for range 6 {
			next := x
			for i := range next {
				next[i] += size * d[i]
			}
			next = bounded(next)
			ln, gn := value(next)
			if ln > l+1e-4*size*slope {
				inverse = improve(inverse, next, x, gn, g)
				gain := ln - l
				x, l, g = next, ln, gn
				moved = gain > 0.05
				break
			}
			size /= 3
		}
		if !moved {
			break
		}
	}
	value(x)
	return Terms{x[0], x[1], x[2], x[3]}, l, nil
}

func bounded(x [features]float64) [features]float64 {
	low := [features]float64{-0.5, -6, -1, -1}
	high := [features]float64{3, 6, 3, 3}
	for i := range x {
		x[i] = math.Max(low[i], math.Min(high[i], x[i]))
	}
	return x
}

type matrix [features][features]float64

func apply(a matrix, v [features]float64) (out [features]float64) {
	for i := range a {
		for k := range v {
			out[i] += a[i][k] * v[k]
		}
	}
	return out
}

// metric returns a diagonal first guess of the inverse curvature: typical spreads of ln tickets, ln age and ln idleness
// over the choices.
func (m *mixed) metric() matrix {
	n := float64(max(1, m.h.Choices))
	return matrix{{1 / (0.5 * n)}, {0, 1 / (0.1 * n)}, {0, 0, 1 / (1.0 * n)}, {0, 0, 0, 1 / (2.0 * n)}}
}

// improve is the update of Broyden, Fletcher, Goldfarb and Shanno for a maximum (inverse of minus the curvature).
func improve(h matrix, x, was, g, gWas [features]float64) matrix {
	var s, y [features]float64
	sy := 0.0
	for i := range s {
		s[i], y[i] = x[i]-was[i], gWas[i]-g[i]
		sy += s[i] * y[i]
	}
	if sy <= 1e-12 {
		return h
	}
	hy := apply(h, y)
	yhy := 0.0
	for i := range y {
		yhy += y[i] * hy[i]
	}
	for i := range s {
		for k := range s {
			h[i][k] += (1+yhy/sy)*s[i]*s[k]/sy - (hy[i]*s[k]+s[i]*hy[k])/sy
		}
	}
	return h
}

// testPlain compares the plain rule, fitness free, with kernel, ageing and recent activity added, from two starts, and
// looks for links dealt to anyone alike. It returns the rule, the plain fit and the extended one with its terms.
func testPlain(h *History, step func(done float64) error) (rule Rule, plain, extended *mixed, terms Terms, err error) {
	done := 0.0
	tick := func() error {
		done += (0.97 - done) * 0.06
		return step(done)
	}
	m := h.PerArrival()
	plainTerms := Terms{1, math.Log(m), 0, 0}
	plain = newMixed(h)
	equal := pass(h, plain.eta, plainTerms, exposures).logLik - float64(h.Choices)
	plain.settle(plainTerms, 12, 40, 0.02)
	if err := tick(); err != nil {
		return Rule{}, nil, nil, terms, err
	}
	rule = Rule{Bits: Bits{Fitness: perChoice(plain.logLik-equal, h.Choices)}, Kernel: 1}
	rule.OpenShare, rule.OpenGain = openShare(h, plain, plainTerms)
	var best float64
	if h.Choices <= largeLog {
		extended, terms, best, err = fromTwo(h, plain, plainTerms, tick)
	} else {
		// A large log is searched from where the search in its first part ended.
		part := h.Until(float64(largeLog) / 2 / float64(h.Choices))
		before := newMixed(part)
		before.settle(plainTerms, 12, 40, 0.02)
		if _, terms, _, err = fromTwo(part, before, plainTerms, tick); err == nil {
			extended = plain.copy()
			if terms, _, err = extended.climb(terms, true, tick); err == nil {
				best = extended.settle(terms, 8, 40, 0.02)
			}
		}
	}
	if err != nil {
		return rule, nil, nil, terms, err
	}
	var metric [features]float64
	rule.Gain = math.Max(0, best-plain.logLik)
	rule.Bits.Extended = math.Max(rule.Bits.Fitness, perChoice(best-equal, h.Choices))
	rule.Kernel, rule.Fading, rule.Idling = terms.Alpha, terms.Nu, terms.Mu
	rule.HeadStart = math.Exp(terms.LogKappa) - m
	rule.Plain = rule.Gain < plainGain && rule.OpenGain < openGain
	if !rule.Plain {
		n := float64(h.Choices)
		metric = [features]float64{math.Abs(terms.Alpha-1) * math.Sqrt(0.5*n), 0, math.Abs(terms.Nu) * math.Sqrt(n), math.Abs(terms.Mu) * math.Sqrt(2*n)}
		switch top := math.Max(metric[0], math.Max(metric[2], metric[3])); {
		case rule.Gain < plainGain:
			rule.Leading = "openShare"
		case metric[3] == top:
			rule.Leading = "idling"
		case metric[2] == top:
			rule.Leading = "fading"
		default:
			rule.Leading = "kernel"
		}
	}
	return rule, plain, extended, terms, nil
}

// largeLog is how many choices make a log that is searched in two steps; the tests lower it.
var largeLog = 80000

// fromTwo fits the extended rule from two starts, the plain fit and equal fitness, and returns the better: there can be two
// maxima far apart.
func fromTwo(h *History, plain *mixed, plainTerms Terms, tick func() error) (best *mixed, terms Terms, l float64, err error) {
	l = math.Inf(-1)
	for start := range 2 {
		ext := newMixed(h)
		from := plainTerms
		if start == 0 {
			ext = plain.copy()
		} else if from, _, err = ext.climb(plainTerms, false, tick); err != nil {
			return nil, terms, l, err
		}
		t, _, err := ext.climb(from, true, tick)
		if err != nil {
			return nil, terms, l, err
		}
		if v := ext.settle(t, 8, 40, 0.02); v > l {
			best, terms, l = ext, t, v
		}
	}
	return best, terms, l, nil
}

// copy returns a fit that starts where m stands.
func (m *mixed) copy() *mixed {
	return &mixed{h: m.h, eta: slices.Clone(m.eta), weights: slices.Clone(m.weights)}
}

func perChoice(l float64, choices int) float64 { return l / float64(max(1, choices)) / math.Ln2 }

// openShare maximises sum ln(1 - r + r/(N_i p_i)) over r in [0, 1], p_i the chance of each choice under the plain fit.
func openShare(h *History, m *mixed, t Terms) (r, gain float64) {
	s := pass(h, m.eta, t, chances)
	ratio := make([]float64, len(s.chance))
	for i, p := range s.chance {
		ratio[i] = 1 / (p * float64(s.present[i]))
	}
	r = 0.05
	for range 200 {
		sum := 0.0
		for _, q := range ratio {
			sum += r * q / (1 - r + r*q)
		}
		r = sum / float64(max(1, len(ratio)))
	}
	for _, q := range ratio {
		gain += math.Log(1 - r + r*q)
	}
	return r, math.Max(0, gain)
}
