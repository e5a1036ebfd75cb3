// Package share measures how links are spread: leader, CR4, HHI, Gini, and how they went as the network grew.
//
// A member's share is the links it received over all links. HHI is in points, the sum of squared percentages (0 to
// 10,000). Gini is over all members, those without a link included.
package share

import "slices"

// Spread describes one network.
type Spread struct {
	Links   int
	Leader  int // oldest of the members that hold most; -1 without links
	Share   float64
	Top4    float64
	HHI     float64
	Gini    float64
	Ranking []int32 // members by links received, the eight largest at most
}

// Of measures the links received by each member.
func Of(received []int32) Spread {
	s := Spread{Leader: -1}
	sum, square := 0.0, 0.0
	for _, d := range received {
		s.Links += int(d)
		square += float64(d) * float64(d)
	}
	if s.Links == 0 {
		return s
	}
	sum = float64(s.Links)
	s.Ranking = Largest(received, 8)
	s.Leader = int(s.Ranking[0])
	s.Share = float64(received[s.Leader]) / sum
	for i, j := range s.Ranking {
		if i < 4 {
			s.Top4 += float64(received[j]) / sum
		}
	}
	s.HHI = 1e4 * square / (sum * sum)
	s.Gini = Gini(received)
	return s
}

// Largest returns the k members that hold most links, older first among equals.
func Largest(received []int32, k int) []int32 {
	var top []int32
	for j, d := range received {
		if len(top) == k && d <= received[top[k-1]] {
			continue
		}
		at := len(top)
		for at > 0 && received[top[at-1]] < d {
			at--
		}
		top = slices.Insert(top, at, int32(j))
		if len(top) > k {
			top = top[:k]
		}
	}
	return top
}

// Quantile returns the value below which a share p of the values lies, by linear interpolation between order statistics
// (type 7 of Hyndman and Fan, 1996).
func Quantile(ascending []float64, p float64) float64 {
	h := p * float64(len(ascending)-1)
	i := int(h)
	if i+1 >= len(ascending) {
		return ascending[len(ascending)-1]
	}
	return ascending[i] + (h-float64(i))*(ascending[i+1]-ascending[i])
}

// Gini returns the Gini coefficient of the values, 0 when all are equal:
//
//	G = 2 sum i x_(i) / (n sum x) - (n + 1)/n,   x sorted increasing, i from 1.
//
// No small-sample correction: one owner among n gives 1 - 1/n.
func Gini(values []int32) float64 {
	top := int32(0)
	for _, d := range values {
		top = max(top, d)
	}
	// Sorted by counting; the few values far above the rest are sorted by themselves.
	dense := min(top+1, 4096)
	count := make([]int, dense)
	var far []int32
	for _, d := range values {
		if d < dense {
			count[d]++
		} else {
			far = append(far, d)
		}
	}
	slices.Sort(far)
	sum := gathered{members: float64(len(values))}
	for d, c := range count {
		sum.add(float64(c), float64(d))
	}
	for _, d := range far {
		sum.add(1, float64(d))
	}
	return sum.gini()
}

// gathered is what of a Gini coefficient has been summed, values ascending.
type gathered struct{ members, sum, weighted, rank float64 }

// add takes in so many equal values.
func (g *gathered) add(count, value float64) {
	g.weighted += value * (count*g.rank + count*(count+1)/2)
	g.rank += count
	g.sum += count * value
}

func (g *gathered) gini() float64 {
	if g.sum == 0 {
		return 0
	}
	return 2*g.weighted/(g.members*g.sum) - (g.members+1)/g.members
}
