package growth

import (
	"math"

	"preponder/sim/internal/exact"
	"preponder/sim/internal/sums"
)

// A wide number is m 2^e: weights of a sharp law lie further apart than floating point reaches.
type wide struct {
	m float64 // 0, or from 1 on
	e int
}

// wideOf returns exp(x).
func wideOf(x float64) wide {
	if math.IsInf(x, -1) {
		return wide{}
	}
	e := math.Floor(x / math.Ln2)
	return wide{exact.Exp(x - float64(e*math.Ln2)), int(e)}
}

// A wideTree is a sums.Tree of wide numbers; it takes the place of one whose weights have vanished.
type wideTree struct{ level [][]wide }

func newWideTree(leaves int) *wideTree {
	t := &wideTree{}
	for n := max(leaves, 1); ; n = (n + sums.Fan - 1) / sums.Fan {
		t.level = append(t.level, make([]wide, (n+sums.Fan-1)/sums.Fan*sums.Fan))
		if n == 1 {
			return t
		}
	}
}

// parts returns the children of node i in units of the largest of them, and their sum.
func parts(nodes []wide, i int) (c [sums.Fan]float64, sum float64, e int) {
	e = math.MinInt
	for _, w := range nodes[i*sums.Fan : i*sums.Fan+sums.Fan] {
		if w.m > 0 {
			e = max(e, w.e)
		}
	}
	for k, w := range nodes[i*sums.Fan : i*sums.Fan+sums.Fan] {
		if w.m > 0 && w.e > e-1100 {
			c[k] = math.Ldexp(w.m, w.e-e)
			sum += c[k]
		}
	}
	return c, sum, e
}

func (t *wideTree) set(j int, w wide) {
	t.level[0][j] = w
	for k := range len(t.level) - 1 {
		j /= sums.Fan
		t.sum(k, j)
	}
}

// sum brings node i above level k up to date.
func (t *wideTree) sum(k, i int) {
	_, s, e := parts(t.level[k], i)
	if s == 0 {
		t.level[k+1][i] = wide{}
		return
	}
	m, more := math.Frexp(s)
	t.level[k+1][i] = wide{2 * m, e + more - 1}
}

func (t *wideTree) fill(n int, weight func(j int) wide) {
	for j := range t.level[0] {
		t.level[0][j] = wide{}
		if j < n {
			t.level[0][j] = weight(j)
		}
	}
	for k := range len(t.level) - 1 {
		for i := range len(t.level[k]) / sums.Fan {
			t.sum(k, i)
		}
	}
}

func (t *wideTree) empty() bool { return t.level[len(t.level)-1][0].m == 0 }

// find returns the leaf at the share u of all weights, 0 < u < 1.
func (t *wideTree) find(u float64) int {
	i := 0
	for k := len(t.level) - 2; k >= 0; k-- {
		c, sum, _ := parts(t.level[k], i)
		s, rest := sums.Among(c[:], float64(u*sum))
		u = math.Max(0, math.Min(rest/c[s], 1))
		i = i*sums.Fan + s
	}
	return i
}
