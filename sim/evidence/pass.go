package evidence

import (
	"math"
	"math/bits"

	tree "preponder/sim/internal/sums"
)

// Terms are the exponents of the extended rule
//
//	w_j = (kappa + d_j)^alpha age_j^-nu idle_j^-mu
//
// age in arrivals since j came, idle in moments of the log since j was last source or target, both at least 1 and taken
// constant on half-octaves. Plain: alpha = 1, nu = mu = 0.
type Terms struct{ Alpha, LogKappa, Nu, Mu float64 }

// features is the number of terms: derivatives of ln w by alpha, ln kappa, nu, mu.
const features = 4

// A sums is what one pass over the log yields for given fitness and terms.
type sums struct {
	logLik   float64           // sum over choices of ln w_target - ln Z, without the fitness of the target
	exposure []float64         // E_j = sum over choices whose set holds j of w_j / Z
	chosen   []int32           // n_j
	gradient [features]float64 // of the sum over choices of ln p_target by the terms
	recent   []float64         // n_j, older choices counting less, if asked for; exposure then likewise
	chance   []float64         // p of each choice, if asked for
	present  []int32           // size of its choice set, if asked for
}

// want says what a pass is for beside likelihood and exposures.
type want int

const (
	exposures want = iota
	slopes         // the gradient by the terms, also at the plain rule
	chances        // the chance of every choice
)

// A passer walks the log once, keeping Z = sum eta_j w_j and its derivatives by increments.
type passer struct {
	h     *History
	terms Terms
	plain bool
	steep bool // the gradient is wanted

	out     sums
	at      []place
	s       float64 // sum of 1/Z over choices so far
	count   float64 // what the next choice counts, 1 without drift
	growth  float64 // by which that grows from choice to choice
	z       float64
	zx      [features]float64
	picks   [][]int32 // earlier picks of each source, nil where pairs repeat
	ageDue  calendar
	idleDue calendar
	here    int        // members present
	tree    *tree.Tree // of eta w, where targets are to be drawn

	// Kept so that a change of weight costs no logarithm: ln(kappa + d) and (kappa + d)^alpha of every number of links d met,
	// and the factors of the half-octaves of age and idleness.
	kappa       float64
	lnOf        []float64
	powerOf     []float64
	aged, idled [64]float64
}

// A place is what the walk knows of a member, in one place of memory.
type place struct {
	eta       float64
	w         float64 // its weight now, 0 before arrival
	exposure  float64 // up to the moment when S was last
	last      float64
	links     int32 // received so far
	active    int32 // group of last activity
	age, idle int16 // half-octaves
}

// pass evaluates the conditional likelihood. Cost: O(links + members) plain; the half-octaves add O(log) changes a
// member and activity.
func pass(h *History, eta []float64, t Terms, w want) sums {
	return newPasser(h, eta, t, w, h.Members(), h.Groups()).run(w)
}

// recently is a pass in which a choice counts half as much as one that comes half choices later.
func recently(h *History, eta []float64, t Terms, half float64) sums {
	p := newPasser(h, eta, t, exposures, h.Members(), h.Groups())
	p.growth = math.Exp2(1 / half)
	p.out.recent = make([]float64, h.Members())
	out := p.run(exposures)
	for j := range out.recent {
		out.recent[j] /= p.count
		out.exposure[j] /= p.count
	}
	return out
}

// newPasser returns one that has seen nothing yet, with room for so many members and groups.
func newPasser(h *History, eta []float64, t Terms, w want, n, groups int) *passer {
	p := &passer{h: h, terms: t, plain: t.Alpha == 1 && t.Nu == 0 && t.Mu == 0 && w != slopes, steep: w == slopes,
		at: make([]place, n), count: 1, growth: 1}
	for j := range p.at {
		p.at[j].eta = eta[j]
	}
	p.out = sums{exposure: make([]float64, n), chosen: make([]int32, n)}
	p.kappa = math.Exp(t.LogKappa)
	if !p.plain {
		p.ageDue, p.idleDue = newCalendar(n+1), newCalendar(groups+1)
		p.prepare()
	}
	if h.Repeats == 0 {
		p.picks = make([][]int32, n)
	}
	return p
}

// run walks the whole log.
func (p *passer) run(w want) sums {
	h := p.h
	if w == chances {
		p.out.chance = make([]float64, 0, h.Choices)
		p.out.present = make([]int32, 0, h.Choices)
	}
	for g := range h.Groups() {
		p.age(g)
		for i := h.Group[g]; i < h.Group[g+1]; i++ {
			if h.choice(i, g) {
				p.choose(i, g, w)
			}
		}
		p.update(g)
	}
	for j := range p.out.exposure {
		m := &p.at[j]
		p.out.exposure[j] = m.exposure + m.w*(p.s-m.last)
	}
	return p.out
}

// choose accounts for one choice.
func (p *passer) choose(i int32, g int, w want) {
	src, t := p.h.Source[i], p.h.Target[i]
	z, zx := p.z, p.zx
	barred := 0
	drop := func(k int32) {
		barred++
		z -= p.at[k].eta * p.at[k].w
		if p.steep {
			for f, x := range p.features(k) {
				zx[f] -= p.at[k].eta * p.at[k].w * x
			}
		}
	}
	p.barred(src, g, drop)
	p.barred(src, g, func(k int32) { p.at[k].exposure -= p.count * p.at[k].w / z })
	p.s += p.count / z
	p.out.chosen[t]++
	if p.out.recent != nil {
		p.out.recent[t] += p.count
		p.count *= p.growth
	}
	p.out.logLik += math.Log(p.at[t].w) - math.Log(z)
	if p.steep {
		for f, x := range p.features(t) {
			p.out.gradient[f] += x - zx[f]/z
		}
	}
	if w == chances {
		p.out.chance = append(p.out.chance, p.at[t].eta*p.at[t].w/z)
		p.out.present = append(p.out.present, int32(p.here-barred))
	}
}

// barred calls f for the members present that source may not choose.
func (p *passer) barred(source int32, g int, f func(k int32)) {
	if int(p.h.Arrived[source]) >= g {
		return
	}
	f(source)
	if p.picks != nil {
		for _, k := range p.picks[source] {
			f(k)
		}
	}
}

func (p *passer) features(j int32) [features]float64 {
	t := p.kappa + float64(p.at[j].links)
	return [features]float64{p.lnOf[p.at[j].links], p.terms.Alpha * p.kappa / t, -octaves[p.at[j].age], -octaves[p.at[j].idle]}
}

// prepare fills the tables of the extended rule.
func (p *passer) prepare() {
	p.lnOf, p.powerOf = []float64{p.terms.LogKappa}, []float64{math.Exp(p.terms.Alpha * p.terms.LogKappa)}
	for c := range p.aged {
		p.aged[c] = math.Exp(-p.terms.Nu * octaves[c])
		p.idled[c] = math.Exp(-p.terms.Mu * octaves[c])
	}
}

var octaves = func() (o [64]float64) {
	for c := range o {
		o[c] = octave(int16(c))
	}
	return o
}()

// octave returns the logarithm that stands for a half-octave class.
func octave(class int16) float64 {
	if class == 0 {
		return 0
	}
	return (float64(class) + 0.5) * (math.Ln2 / 2)
}

// leaving holds the first whole number beyond each class.
var leaving = func() (l [60]int) {
	for c := range l {
		l[c] = int(math.Ceil(math.Pow(2, float64(c+1)/2) - 1e-9))
	}
	return l
}()

func leaves(class int16) int { return leaving[class] }

// classOf returns the half-octave of x >= 1.
func classOf(x int) int16 {
	c := int16(max(0, 2*bits.Len(uint(x))-3))
	for x >= leaving[c] {
		c++
	}
	return c
}

// set brings member j's weight up to date.
func (p *passer) set(j int32) {
	m := &p.at[j]
	old := m.w
	var now float64
	if p.plain {
		now = p.kappa + float64(m.links)
	} else {
		now = p.powerOf[m.links] * p.aged[m.age] * p.idled[m.idle]
		if p.steep {
			for f, x := range p.features(j) {
				p.zx[f] += m.eta * now * x
			}
		}
	}
	m.exposure += old * (p.s - m.last)
	m.last = p.s
	p.z += m.eta * (now - old)
	m.w = now
	if p.tree != nil {
		p.tree.Set(int(j), m.eta*now)
	}
}

// unset takes j's weighted features out of the sums before anything it depends on changes.
func (p *passer) unset(j int32) {
	if !p.steep || p.at[j].w == 0 {
		return
	}
	for f, x := range p.features(j) {
		p.zx[f] -= p.at[j].eta * p.at[j].w * x
	}
}

// age moves the members that leave their half-octave of age or idleness before group g.
func (p *passer) age(g int) {
	if p.plain {
		return
	}
	p.idleDue.drain(g, func(j int32) {
		if class := classOf(g - int(p.at[j].active)); class != p.at[j].idle {
			p.unset(j)
			p.at[j].idle = class
			p.set(j)
			p.idleDue.put(int(p.at[j].active)+leaves(class), j)
		}
	})
}

// update adds what group g brought.
func (p *passer) update(g int) {
	first, end := p.h.Group[g], p.h.Group[g+1]
	for i := first; i < end; i++ {
		src, t := p.h.Source[i], p.h.Target[i]
		for _, j := range [2]int32{src, t} {
			p.touch(j, g)
		}
		p.unset(t)
		p.at[t].links++
		if !p.plain {
			for d := len(p.lnOf); d <= int(p.at[t].links); d++ {
				p.lnOf = append(p.lnOf, math.Log(p.kappa+float64(d)))
				p.powerOf = append(p.powerOf, math.Exp(p.terms.Alpha*p.lnOf[d]))
			}
		}
		p.set(t)
		if p.picks != nil {
			p.picks[src] = append(p.picks[src], t)
		}
	}
}

// touch makes j present and active in group g.
func (p *passer) touch(j int32, g int) {
	if p.at[j].w == 0 {
		if !p.plain {
			p.ageDue.put(int(j)+leaves(0), j)
			p.at[j].active = int32(g)
			p.idleDue.put(g+leaves(0), j)
		}
		p.set(j)
		p.here++
		p.grow()
		return
	}
	if p.plain || int(p.at[j].active) == g {
		return
	}
	p.at[j].active = int32(g)
	if p.at[j].idle != 0 {
		p.unset(j)
		p.at[j].idle = 0
		p.set(j)
	}
	p.idleDue.put(g+leaves(0), j)
}

// grow ages the members that leave their half-octave now that one more is here. The age of member j is the number here
// less j.
func (p *passer) grow() {
	if p.plain {
		return
	}
	p.ageDue.drain(p.here, func(j int32) {
		p.unset(j)
		p.at[j].age = classOf(p.here - int(j))
		p.set(j)
		p.ageDue.put(int(j)+leaves(p.at[j].age), j)
	})
}

// A calendar holds members under the moment they are due.
type calendar struct {
	head  []int32
	node  []struct{ member, next int32 }
	spare int32 // first of the nodes free for use
}

func newCalendar(moments int) calendar {
	c := calendar{head: make([]int32, moments), spare: -1}
	for i := range c.head {
		c.head[i] = -1
	}
	return c
}

func (c *calendar) put(at int, j int32) {
	if at >= len(c.head) {
		return
	}
	k := c.spare
	if k >= 0 {
		c.spare = c.node[k].next
	} else {
		k = int32(len(c.node))
		c.node = append(c.node, struct{ member, next int32 }{})
	}
	c.node[k].member, c.node[k].next = j, c.head[at]
	c.head[at] = k
}

// drain calls f for the members due, and empties the moment; f may put members under later ones.
func (c *calendar) drain(at int, f func(j int32)) {
	k := c.head[at]
	c.head[at] = -1
	for k >= 0 {
		next := c.node[k].next
		f(c.node[k].member)
		c.node[k].next = c.spare
		c.spare = k
		k = next
	}
}
