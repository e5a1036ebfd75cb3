package evidence

import (
	"math"
	"sort"
)

// hub is the number of links above which a member has a cell and nodes of its own.
const hub = 60

// A cell is a set of members with the same links chosen and nearly the same exposure: given fitness eta its members were
// chosen n ~ Poisson(eta E) times.
type cell struct {
	n     float64
	e     float64 // mean exposure
	count float64
}

// cells merges members with equal n <= 60 and ln E within 0.02.
func cells(chosen []int32, exposure []float64) (list []cell, of []int32) {
	n := make([]float64, len(chosen))
	for j, c := range chosen {
		n[j] = float64(c)
	}
	return cellsOf(n, exposure)
}

// cellsOf is cells for numbers of links that need not be whole: those within 1/16 are taken together.
func cellsOf(chosen, exposure []float64) (list []cell, of []int32) {
	type key struct{ n, bin int32 }
	at := map[key]int32{}
	of = make([]int32, len(chosen))
	for j, n := range chosen {
		e := math.Max(exposure[j], 1e-12)
		k := key{int32(math.Round(16 * n)), int32(math.Floor(math.Log(e) / 0.02))}
		if n > hub {
			k.bin = int32(-j - 1e6)
		}
		c, known := at[k]
		if !known {
			c = int32(len(list))
			at[k] = c
			list = append(list, cell{n: math.Round(16*n) / 16})
		}
		list[c].e += e
		list[c].count++
		of[j] = c
	}
	for i := range list {
		list[i].e /= list[i].count
	}
	return list, of
}

// A grid holds ln eta at nodes and, for every cell, exp(n x - e^x E - offset) there.
type grid struct {
	x      [][]float64 // nodes of each cell; cells of few links share one slice
	step   []float64
	kernel [][]float64
	offset []float64
}

// Nodes in ln eta: common to cells of few links, own around ln(n/E) for hubs.
const (
	nodeLow, nodeHigh, nodeStep = -9.0, 7.0, 0.08
	ownLow, ownHigh, ownStep    = -8.0, 6.0, 0.4
	atoms                       = 111
)

func span(low, high, step float64) []float64 {
	var x []float64
	for i := 0; low+float64(i)*step <= high+1e-9; i++ {
		x = append(x, low+float64(i)*step)
	}
	return x
}

// newGrid prepares the cells. With free, all cells use the same 111 atoms.
func newGrid(list []cell, free bool) *grid {
	g := &grid{}
	common, step := span(nodeLow, nodeHigh, nodeStep), nodeStep
	if free {
		step = (nodeHigh - nodeLow) / (atoms - 1)
		common = span(nodeLow, nodeHigh, step)
	}
	for _, c := range list {
		x, h := common, step
		if c.n > hub && !free {
			h = ownStep / math.Sqrt(c.n)
			center := math.Log(c.n / c.e)
			x = span(center+ownLow/math.Sqrt(c.n), center+ownHigh/math.Sqrt(c.n), h)
		}
		off := c.n*math.Log(math.Max(c.n, 1e-300)/c.e) - c.n
		if c.n == 0 {
			off = 0
		}
		k := make([]float64, len(x))
		for i, v := range x {
			k[i] = math.Exp(c.n*v - math.Exp(v)*c.e - off)
		}
		g.x, g.step, g.kernel, g.offset = append(g.x, x), append(g.step, h), append(g.kernel, k), append(g.offset, off)
	}
	return g
}

// A massLaw gives the mass of ln eta in an interval.
type massLaw func(low, high float64) float64

// weigh returns the masses of the law at the nodes of each cell; shared nodes share the slice.
func (g *grid) weigh(mass massLaw) [][]float64 {
	out := make([][]float64, len(g.x))
	var sharedOf, shared []float64
	for i, x := range g.x {
		if len(sharedOf) == len(x) && &sharedOf[0] == &x[0] {
			out[i] = shared
			continue
		}
		m := make([]float64, len(x))
		for k, v := range x {
			m[k] = mass(v-g.step[i]/2, v+g.step[i]/2)
		}
		if g.step[i] == nodeStep {
			sharedOf, shared = x, m
		}
		out[i] = m
	}
	return out
}

// logLik returns sum over members of ln INT eta^n exp(-eta E) dG.
func (g *grid) logLik(list []cell, weights [][]float64) float64 {
	sum := 0.0
	for i, c := range list {
		sum += c.count * (math.Log(math.Max(dot(weights[i], g.kernel[i]), 1e-300)) + g.offset[i])
	}
	return sum
}

func dot(a, b []float64) float64 {
	s := 0.0
	for i, x := range a {
		s += x * b[i]
	}
	return s
}

// A posterior says what is known of the fitness of the members of one cell: mean of eta; mean and standard deviation of
// ln eta; the 2.5 and 97.5 per cent points of eta.
type posterior struct{ mean, log, sd, low, high float64 }

func (g *grid) posterior(i int, weights []float64) posterior {
	total, mean, log, square := 0.0, 0.0, 0.0, 0.0
	for k, x := range g.x[i] {
		p := weights[k] * g.kernel[i][k]
		total += p
		mean += p * math.Exp(x)
		log += p * x
		square += p * x * x
	}
	if total == 0 {
		return posterior{mean: 1, low: math.NaN(), high: math.NaN()}
	}
	out := posterior{mean: mean / total, log: log / total}
	out.sd = math.Sqrt(math.Max(0, square/total-out.log*out.log))
	at := func(share float64) float64 {
		sum := 0.0
		for k, x := range g.x[i] {
			if p := weights[k] * g.kernel[i][k] / total; sum+p >= share {
				return math.Exp(x + g.step[i]*((share-sum)/p-0.5))
			} else {
				sum += p
			}
		}
		return math.Exp(g.x[i][len(g.x[i])-1])
	}
	out.low, out.high = at(0.025), at(0.975)
	return out
}

// free fits weights on the common atoms by EM (Laird 1978), starting from w or from equal weights, and returns them with
// the log-likelihood. It stops when a round gains less than tol.
func (g *grid) free(list []cell, w []float64, rounds int, tol float64) ([]float64, float64) {
	k := len(g.x[0])
	if w == nil {
		w = make([]float64, k)
		for i := range w {
			w[i] = 1 / float64(k)
		}
	}
	total := 0.0
	for _, c := range list {
		total += c.count
	}
	last := math.Inf(-1)
	for range rounds {
		next := make([]float64, k)
		l := 0.0
		for i, c := range list {
			f := dot(w, g.kernel[i])
			if f <= 0 {
				f = 1e-300
			}
			l += c.count * (math.Log(f) + g.offset[i])
			r := c.count / f / total
			for a, q := range g.kernel[i] {
				next[a] += r * w[a] * q
			}
		}
		w = next
		if l-last < tol {
			return w, l
		}
		last = l
	}
	return w, last
}

// levels fits k atoms anywhere (EM), started at quantiles of the fitted means, and returns them with the log-likelihood.
func levels(list []cell, means []float64, k int) (x, w []float64, l float64) {
	sorted := append([]float64(nil), means...)
	sort.Float64s(sorted)
	eta := make([]float64, k)
	w = make([]float64, k)
	for a := range eta {
		eta[a] = sorted[int((float64(a)+0.5)/float64(k)*float64(len(sorted)))]
		if a == k-1 {
			eta[a] = sorted[len(sorted)*99/100]
		}
		eta[a] = math.Max(eta[a], 1e-4) * (1 + 0.2*float64(a))
		w[a] = 1 / float64(k)
	}
	last := math.Inf(-1)
	p := make([]float64, k)
	for range 400 {
		n, e, c := make([]float64, k), make([]float64, k), make([]float64, k)
		l = 0
		total := 0.0
		for _, m := range list {
			f, off := 0.0, math.Inf(-1)
			for a := range eta {
				p[a] = math.Log(w[a]) + m.n*math.Log(eta[a]) - eta[a]*m.e
				off = math.Max(off, p[a])
			}
			for a := range p {
				p[a] = math.Exp(p[a] - off)
				f += p[a]
			}
			l += m.count * (math.Log(f) + off)
			total += m.count
			for a := range p {
				r := m.count * p[a] / f
				n[a] += r * m.n
				e[a] += r * m.e
				c[a] += r
			}
		}
		for a := range eta {
			eta[a] = math.Max(n[a], 1e-9) / math.Max(e[a], 1e-9)
			w[a] = math.Max(c[a]/total, 1e-12)
		}
		if l-last < 1e-4 {
			break
		}
		last = l
	}
	for _, v := range eta {
		x = append(x, math.Log(v))
	}
	return x, w, l
}
