package law

import (
	"math"

	"preponder/sim/internal/exact"
)

// quantile solves cumulative(x) = u for x > 0 by Newton's method in ln x, kept between bounds by bisection.
// Relative error about 1e-13; a fixed sequence of operations, so the same bits on every machine.
func quantile(u float64, cumulative, density func(float64) float64, start float64) float64 {
	low, high := math.Inf(-1), math.Inf(1)
	y := exact.Log(math.Max(start, 1e-300))
	for range 200 {
		x := exact.Exp(y)
		miss := cumulative(x) - u
		if miss > 0 {
			high = y
		} else {
			low = y
		}
		slope := float64(density(x) * x)
		next := y - miss/slope
		if !(next > low && next < high) || math.Abs(next-y) > 3 {
			switch {
			case math.IsInf(low, -1):
				next = y - 2
			case math.IsInf(high, 1):
				next = y + 2
			default:
				next = (low + high) / 2
			}
		}
		if math.Abs(next-y) < 1e-13 {
			return exact.Exp(next)
		}
		y = next
	}
	return exact.Exp(y)
}
