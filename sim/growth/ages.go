package growth

import (
	"math"
	"math/bits"

	"preponder/sim/internal/exact"
)

// ages is what growth under a kernel, fading or idling knows of its members. Ages and idle times move with every newcomer;
// the tree holds them rounded down to rungs, so a member's leaf changes only when it climbs one, and draws are taken in the
// share the weight has of what its leaf says.
type ages struct {
	now  int     // the newcomer the tree stands for
	last []int32 // newcomer from whom each member last received, or its own number
	rung []int32 // rungs: 1 and up, ascending
	from []int   // the highest rung at or below each power of 2
	fade []float64
	idle []float64 // factors at the rungs
}

// newAges looks at the v members there are.
func (g *grower) newAges(v int) *ages {
	a := &ages{now: v, last: make([]int32, g.Members)}
	for j := range a.last {
		a.last[j] = int32(j)
	}
	for u := range v {
		first, end := g.linksOf(u)
		for _, j := range g.Targets[first:end] {
			a.last[j] = int32(u)
		}
	}
	// So many rungs to an octave that a leaf is at most about four times the weight: fewer rungs cost draws, more of them
	// changes of leaves.
	steps := math.Max(0.5, (g.Fading+g.Idling)/2)
	for k := 0.0; ; k++ {
		r := int32(math.Ceil(exact.Exp(k/steps*math.Ln2) - 1e-9))
		if n := len(a.rung); n > 0 && r <= a.rung[n-1] {
			continue
		}
		a.rung = append(a.rung, r)
		a.fade = append(a.fade, exact.Pow(float64(r), -g.Fading))
		a.idle = append(a.idle, exact.Pow(float64(r), -g.Idling))
		if int(r) > g.Members {
			break
		}
	}
	for octave, k := 1, 0; octave <= g.Members; octave *= 2 {
		for int(a.rung[k+1]) <= octave {
			k++
		}
		a.from = append(a.from, k)
	}
	return a
}

// on returns the highest rung at or below x.
func (a *ages) on(x int) int {
	k := a.from[bits.Len(uint(x))-1]
	for k+1 < len(a.rung) && int(a.rung[k+1]) <= x {
		k++
	}
	return k
}

// raised returns t^alpha.
func (g *grower) raised(t float64) float64 {
	switch a := g.alpha(); a {
	case 0:
		return 1
	case 1:
		return t
	case 2:
		return float64(t * t)
	default:
		return exact.Pow(t, a)
	}
}

// bound returns the factor of age and idle time, both rounded down to a rung.
func (g *grower) bound(j int32) float64 {
	a, f := g.ages, 1.0
	if g.Fading > 0 {
		f = a.fade[a.on(a.now-int(j))]
	}
	if g.Idling > 0 {
		f = float64(f * a.idle[a.on(a.now-int(a.last[j]))])
	}
	return f
}

// share returns the weight of j over what its leaf says.
func (g *grower) share(j int32) float64 {
	a, f := g.ages, 1.0
	if age := a.now - int(j); g.Fading > 0 {
		if r := a.rung[a.on(age)]; int(r) < age {
			f = exact.Pow(float64(age)/float64(r), -g.Fading)
		}
	}
	if idle := a.now - int(a.last[j]); g.Idling > 0 {
		if r := a.rung[a.on(idle)]; int(r) < idle {
			f = float64(f * exact.Pow(float64(idle)/float64(r), -g.Idling))
		}
	}
	return f
}

// logAge returns the logarithm of age^-nu idle^-mu.
func (g *grower) logAge(j int32) float64 {
	a := g.ages
	return float64(-g.Fading*exact.Log(float64(a.now-int(j)))) - float64(g.Idling*exact.Log(float64(a.now-int(a.last[j]))))
}

// age moves on from newcomer v to the one after it: whoever climbs a rung is brought up to date.
func (g *grower) age(v int) {
	a := g.ages
	a.now = v + 1
	for _, j := range g.chosen {
		a.last[j] = int32(v)
	}
	for _, r := range a.rung[1:] {
		u := a.now - int(r)
		if u < 0 {
			return
		}
		if g.Fading > 0 {
			g.stir(int32(u))
		}
		if g.Idling > 0 {
			if g.Fading == 0 && int(a.last[u]) == u {
				g.stir(int32(u))
			}
			first, end := g.linksOf(u)
			for _, j := range g.Targets[first:end] {
				if int(a.last[j]) == u {
					g.stir(j)
				}
			}
		}
	}
}
