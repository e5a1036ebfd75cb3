package law

import "math"

// Sketch returns at most n >= 3 knots of a drawn law close to l: straight lines from knot to knot, put where the density
// bends most. Ends that run to infinity are cut where 0.3 % of the members lie beyond, steep edges where 0.1 % lie below;
// levels become narrow peaks.
func Sketch(l Law, n int) []Knot {
	if leveled, ok := l.(Leveled); ok {
		return peaks(leveled, n)
	}
	low, high := l.Support()
	if math.IsInf(low, -1) {
		low = l.Quantile(0.003)
	}
	if math.IsInf(high, 1) {
		high = l.Quantile(0.997)
	}
	// Candidates close together near the ground level; the first stands for what lies below it.
	const grid = 400
	at := make([]Knot, grid+1)
	for i := range at {
		x := float64(i) / grid
		e := low + (high-low)*x*x
		at[i] = Knot{e - low, l.Density(math.Min(e, math.Nextafter(high, low)))}
	}
	if d := l.Density(low); low == 0 && l.Edge().Theta < 0 || math.IsInf(d, 0) {
		first := math.Max(l.Quantile(0.001)-low, 1e-12)
		at[0].Density = math.Max(at[1].Density, l.Density(low+first))
	} else if low == 0 && l.Edge().Theta == 0 {
		at[0].Density = l.Edge().Scale
	}
	kept := []int{0, grid}
	for len(kept) < n {
		worst, place, after := 0.0, -1, 0
		for k := 1; k < len(kept); k++ {
			a, b := at[kept[k-1]], at[kept[k]]
			for i := kept[k-1] + 1; i < kept[k]; i++ {
				line := a.Density + (b.Density-a.Density)*(at[i].Eps-a.Eps)/(b.Eps-a.Eps)
				if miss := math.Abs(at[i].Density-line) * math.Sqrt(b.Eps-a.Eps); miss > worst {
					worst, place, after = miss, i, k
				}
			}
		}
		if place < 0 || worst < 1e-4/math.Sqrt(high-low) {
			break
		}
		kept = append(kept[:after], append([]int{place}, kept[after:]...)...)
	}
	var out []Knot
	for _, i := range kept {
		out = append(out, at[i])
	}
	return out
}

// peaks turns the heaviest levels into triangles a fifth of the least gap wide, half a one at the ground level.
func peaks(l Leveled, n int) []Knot {
	energy, weight := l.Levels()
	gap := math.Inf(1)
	for i := 1; i < len(energy); i++ {
		gap = math.Min(gap, energy[i]-energy[i-1])
	}
	if math.IsInf(gap, 1) {
		gap = 1
	}
	w := gap / 5
	var out []Knot
	for i, e := range energy {
		if len(out)+3 > n {
			break
		}
		if e == 0 {
			out = append(out, Knot{0, 2 * weight[i] / w}, Knot{w, 0})
		} else {
			out = append(out, Knot{e - w/2, 0}, Knot{e, 2 * weight[i] / w}, Knot{e + w/2, 0})
		}
	}
	return out
}
