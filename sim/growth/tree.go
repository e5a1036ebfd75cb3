package growth

// A sumTree holds non-negative weights under a binary tree of their sums; parents are recomputed, never adjusted, so no
// rounding error builds up.
type sumTree struct {
	size int // leaves, a power of two
	node []float64
}

func newSumTree(leaves int) *sumTree {
	size := 1
	for size < leaves {
		size *= 2
	}
	return &sumTree{size, make([]float64, 2*size)}
}

func (t *sumTree) total() float64 { return t.node[1] }

func (t *sumTree) set(j int, w float64) {
	i := t.size + j
	t.node[i] = w
	for i >>= 1; i >= 1; i >>= 1 {
		t.node[i] = t.node[2*i] + t.node[2*i+1]
	}
}

func (t *sumTree) fill(n int, weight func(j int) float64) {
	for j := range t.size {
		if j < n {
			t.node[t.size+j] = weight(j)
		} else {
			t.node[t.size+j] = 0
		}
	}
	for i := t.size - 1; i >= 1; i-- {
		t.node[i] = t.node[2*i] + t.node[2*i+1]
	}
}

// find returns the leaf at x on the line of all weights, 0 <= x < total.
func (t *sumTree) find(x float64) int {
	i := 1
	for i < t.size {
		i *= 2
		if left := t.node[i]; x >= left && t.node[i+1] > 0 {
			x -= left
			i++
		}
	}
	return i - t.size
}
