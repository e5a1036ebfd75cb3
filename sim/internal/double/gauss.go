package double

import (
	"math"
	"sync"
)

// Gauss returns the nodes, ascending, and weights of the n-point Gauss-Legendre rule on [-1, 1]: zeros of P_n by Newton's
// method, weights 2/((1-x^2) P_n'(x)^2) (Abramowitz & Stegun 25.4.29).
func Gauss(n int) (nodes, weights []Number) {
	nodes, weights = make([]Number, n), make([]Number, n)
	for i := range n {
		x := Of(-math.Cos(math.Pi * (float64(i) + 0.75) / (float64(n) + 0.5)))
		var slope Number
		for range 8 {
			p, before := x, One
			for k := 1; k < n; k++ {
				next := x.Times(p).By(float64(2*k + 1)).Minus(before.By(float64(k))).Over(Of(float64(k + 1)))
				before, p = p, next
			}
			slope = before.Minus(x.Times(p)).By(float64(n)).Over(One.Minus(x.Times(x)))
			x = x.Minus(p.Over(slope))
		}
		nodes[i] = x
		weights[i] = Of(2).Over(One.Minus(x.Times(x)).Times(slope).Times(slope))
	}
	return nodes, weights
}

// Sixteen returns the 16-point rule, computed once.
var Sixteen = sync.OnceValues(func() (nodes, weights []Number) { return Gauss(16) })
