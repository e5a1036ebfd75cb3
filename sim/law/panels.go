package law

import (
	"math"
	"sort"

	"preponder/sim/internal/exact"
	"preponder/sim/internal/gauss"
)

// panels are a density as polynomials in x = ln e, g(x) = p(e^x) e^x, on intervals that follow one another up to the top;
// below them stands the leading term of the edge.
type panels struct {
	edge Edge // not normalised before normalise
	list []panel
}

// A panel is one interval of ln e.
type panel struct {
	low, width float64
	g          gauss.Series
	before     float64 // mass below the panel
}

const (
	resolved   = 1e-13 // of the last coefficients against the largest
	negligible = 3e-13 // of a panel's doubt against all mass
	thinnest   = 1e-15 // panels are not cut below this width: a jump lies there
)

// cut fills in panels for the mass density g from low to high in ln e; false where it varies too finely for so many panels,
// with the place.
func (p *panels) cut(g func(x float64) float64, low, high float64, most int) (at float64, ok bool) {
	first := int(math.Ceil(high - low))
	total := 0.0
	var todo []panel
	for i := range first {
		a := low + float64((high-low)*float64(i))/float64(first)
		todo = append(todo, fit(g, a, (high-low)/float64(first)))
		total += todo[i].mass()
	}
	for len(todo) > 0 {
		q := todo[len(todo)-1]
		todo = todo[:len(todo)-1]
		if !q.unsettled() || q.doubt() <= negligible*total || q.width < thinnest {
			p.list = append(p.list, q)
			continue
		}
		if len(p.list)+len(todo) > most {
			return math.Exp(q.low), false
		}
		todo = append(todo, fit(g, q.low, q.width/2), fit(g, q.low+q.width/2, q.width/2))
	}
	sort.Slice(p.list, func(i, j int) bool { return p.list[i].low < p.list[j].low })
	return 0, true
}

func fit(g func(x float64) float64, low, width float64) panel {
	var v [gauss.Points]float64
	for i, t := range gauss.Nodes {
		v[i] = g(low + float64(width*(t+1))/2)
	}
	return panel{low: low, width: width, g: gauss.Through(v)}
}

// doubt is the mass of the last coefficients.
func (q panel) doubt() float64 {
	sum := 0.0
	for _, c := range q.g[gauss.Points-3:] {
		sum += math.Abs(c)
	}
	return sum * q.width
}

// unsettled tells whether the last coefficients are more than rounding.
func (q panel) unsettled() bool {
	most := 0.0
	for _, c := range q.g {
		most = math.Max(most, math.Abs(c))
	}
	return q.doubt() > resolved*most*q.width
}

func (q panel) mass() float64 { return float64(q.width * q.g[0]) }

// below returns the mass under the panels: Scale e^(Theta+1)/(Theta+1).
func (p *panels) below() float64 {
	if p.edge.Scale == 0 {
		return 0
	}
	return exact.Exp(exact.Log(p.edge.Scale)+float64((p.edge.Theta+1)*p.list[0].low)) / (p.edge.Theta + 1)
}

// normalise scales all mass to 1 and returns what it was.
func (p *panels) normalise() float64 {
	total := p.below()
	for _, q := range p.list {
		total += q.mass()
	}
	p.edge.Scale /= total
	sum := p.below()
	for i := range p.list {
		q := &p.list[i]
		for k := range q.g {
			q.g[k] /= total
		}
		q.before = sum
		sum += q.mass()
	}
	return total
}

func (p *panels) cumulative(e float64) float64 {
	x := exact.Log(e)
	if x <= p.list[0].low {
		return exact.Exp(exact.Log(p.edge.Scale)+float64((p.edge.Theta+1)*x)) / (p.edge.Theta + 1)
	}
	i := sort.Search(len(p.list), func(i int) bool { return p.list[i].low > x }) - 1
	q := p.list[i]
	_, mass := q.g.At(math.Min(1, 2*(x-q.low)/q.width-1))
	return math.Min(1, q.before+float64(mass*q.width/2))
}

// quantile solves cumulative = u inside one panel, by Newton's method kept inside it by bisection.
func (p *panels) quantile(u float64) float64 {
	if u <= p.list[0].before {
		return exact.Exp((exact.Log(float64(u*(p.edge.Theta+1))) - exact.Log(p.edge.Scale)) / (p.edge.Theta + 1))
	}
	i := sort.Search(len(p.list), func(i int) bool { return p.list[i].before >= u }) - 1
	q := p.list[i]
	want := (u - q.before) / (q.width / 2)
	low, high := -1.0, 1.0
	t := math.Max(-1, math.Min(1, want/q.g[0]-1))
	for range 60 {
		value, sum := q.g.At(t)
		if sum > want {
			high = t
		} else {
			low = t
		}
		next := t - (sum-want)/value
		if !(next >= low && next <= high) {
			next = (low + high) / 2
		}
		if math.Abs(next-t) < 1e-15 {
			t = next
			break
		}
		t = next
	}
	return exact.Exp(q.low + float64(q.width*(t+1))/2)
}
