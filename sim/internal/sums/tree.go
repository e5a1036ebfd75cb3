// Package sums draws from many weights that change one at a time.
package sums

// Fan is how many children a node has: as many sums as fill a line of the processor's cache.
const Fan = 8

// A Tree holds non-negative weights under a tree of their sums; parents are recomputed, never adjusted, so no rounding
// error builds up.
type Tree struct {
	level [][]float64 // the weights first, then their sums, up to one node
}

// New returns a tree of so many leaves, without weight.
func New(leaves int) *Tree {
	t := &Tree{}
	for n := max(leaves, 1); ; n = (n + Fan - 1) / Fan {
		room := (n + Fan - 1) / Fan * Fan
		t.level = append(t.level, make([]float64, room))
		if n == 1 {
			return t
		}
	}
}

// Total returns the sum of all weights.
func (t *Tree) Total() float64 { return t.level[len(t.level)-1][0] }

// sum adds up the children of node i of the level above.
func sum(nodes []float64, i int) float64 {
	c := nodes[i*Fan : i*Fan+Fan : i*Fan+Fan]
	return ((c[0] + c[1]) + (c[2] + c[3])) + ((c[4] + c[5]) + (c[6] + c[7]))
}

// Set gives leaf j the weight w.
func (t *Tree) Set(j int, w float64) {
	nodes := t.level[0]
	nodes[j] = w
	for _, up := range t.level[1:] {
		j /= Fan
		up[j] = sum(nodes, j)
		nodes = up
	}
}

// Fill gives the first n leaves their weights, all others none.
func (t *Tree) Fill(n int, weight func(j int) float64) {
	leaves := t.level[0]
	for j := range leaves {
		leaves[j] = 0
		if j < n {
			leaves[j] = weight(j)
		}
	}
	for k, up := range t.level[1:] {
		for i := range len(t.level[k]) / Fan {
			up[i] = sum(t.level[k], i)
		}
	}
}

// Find returns the leaf at x on the line of all weights, 0 <= x < total.
func (t *Tree) Find(x float64) int {
	i := 0
	for k := len(t.level) - 2; k >= 0; k-- {
		var s int
		s, x = Among(t.level[k][i*Fan:i*Fan+Fan], x)
		i = i*Fan + s
	}
	return i
}

// Among returns which of the weights x falls on, on the line of them all, and how far into it. The last with any weight
// takes what rounding leaves over.
func Among(c []float64, x float64) (child int, rest float64) {
	for s, w := range c {
		if w > 0 {
			child = s
			if x < w {
				return s, x
			}
			x -= w
		}
	}
	return child, x
}
