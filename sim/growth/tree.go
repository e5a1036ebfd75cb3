package growth

// fan is how many children a node has: as many sums as fill a line of the processor's cache.
const fan = 8

// A sumTree holds non-negative weights under a tree of their sums; parents are recomputed, never adjusted, so no rounding
// error builds up.
type sumTree struct {
	level [][]float64 // the weights first, then their sums, up to one node
}

func newSumTree(leaves int) *sumTree {
	t := &sumTree{}
	for n := max(leaves, 1); ; n = (n + fan - 1) / fan {
		room := (n + fan - 1) / fan * fan
		t.level = append(t.level, make([]float64, room))
		if n == 1 {
			return t
		}
	}
}

func (t *sumTree) total() float64 { return t.level[len(t.level)-1][0] }

// sum adds up the children of node i of the level above.
func sum(nodes []float64, i int) float64 {
	c := nodes[i*fan : i*fan+fan : i*fan+fan]
	return ((c[0] + c[1]) + (c[2] + c[3])) + ((c[4] + c[5]) + (c[6] + c[7]))
}

func (t *sumTree) set(j int, w float64) {
	nodes := t.level[0]
	nodes[j] = w
	for _, up := range t.level[1:] {
		j /= fan
		up[j] = sum(nodes, j)
		nodes = up
	}
}

func (t *sumTree) fill(n int, weight func(j int) float64) {
	leaves := t.level[0]
	for j := range leaves {
		leaves[j] = 0
		if j < n {
			leaves[j] = weight(j)
		}
	}
	for k, up := range t.level[1:] {
		for i := range len(t.level[k]) / fan {
			up[i] = sum(t.level[k], i)
		}
	}
}

// find returns the leaf at x on the line of all weights, 0 <= x < total.
func (t *sumTree) find(x float64) int {
	i := 0
	for k := len(t.level) - 2; k >= 0; k-- {
		var s int
		s, x = among(t.level[k][i*fan:i*fan+fan], x)
		i = i*fan + s
	}
	return i
}

// among returns which of the weights x falls on, on the line of them all, and how far into it. The last with any weight
// takes what rounding leaves over.
func among(c []float64, x float64) (child int, rest float64) {
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
