package law

import "sort"

// Tiers is a discrete law: energy Energy[i] with probability Weight[i]. Made by NewTiers, which sorts, shifts the lowest
// level to 0 and normalises.
type Tiers struct{ energy, weight []float64 }

// NewTiers returns the law of the given levels. Weights must be positive and the slices equally long.
func NewTiers(energy, weight []float64) Tiers {
	order := make([]int, len(energy))
	total := 0.0
	for i := range order {
		order[i] = i
		total += weight[i]
	}
	sort.SliceStable(order, func(a, b int) bool { return energy[order[a]] < energy[order[b]] })
	t := Tiers{make([]float64, len(order)), make([]float64, len(order))}
	for i, k := range order {
		t.energy[i] = energy[k] - energy[order[0]]
		t.weight[i] = weight[k] / total
	}
	return t
}

func (p Tiers) Density(float64) float64 { return 0 }

func (p Tiers) Cumulative(eps float64) float64 {
	sum := 0.0
	for i, e := range p.energy {
		if e <= eps {
			sum += p.weight[i]
		}
	}
	return sum
}

func (p Tiers) Quantile(u float64) float64 {
	sum := 0.0
	for i, w := range p.weight {
		if sum += w; u < sum {
			return p.energy[i]
		}
	}
	return p.energy[len(p.energy)-1]
}

func (p Tiers) Support() (low, high float64) { return 0, p.energy[len(p.energy)-1] }
func (p Tiers) Mean() float64 {
	sum := 0.0
	for i, e := range p.energy {
		sum += p.weight[i] * e
	}
	return sum
}
func (p Tiers) Edge() Edge                         { return Edge{Atom: p.weight[0]} }
func (p Tiers) Levels() (energy, weight []float64) { return p.energy, p.weight }
