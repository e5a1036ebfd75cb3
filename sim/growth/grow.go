package growth

import (
	"math"
	"runtime"

	"preponder/sim/internal/exact"
	"preponder/sim/internal/sums"
)

const (
	tries   = 64   // by rejection, before the exact weighted draw
	between = 4096 // newcomers between two calls of step
)

// Grow grows the network. step is called now and then with the share done and may end the growth with an error, which
// Grow returns; it may be nil.
func Grow(p Params, step func(done float64) error) (*Network, error) {
	return growBy(p, step, runtime.GOMAXPROCS(0))
}

// growBy is Grow with so many workers; with none newcomers are drawn one by one.
func growBy(p Params, step func(done float64) error, workers int) (*Network, error) {
	n := &Network{Params: p, from: 1}
	defer func() { n.Params = p }()
	if p.Start != nil {
		n.from = len(p.Start.Energy)
	}
	g := &grower{Network: n, levers: p, key: exact.Key(p.Seed, exact.Links), extra: exact.Key(p.Seed, exact.Extra), energies: exact.Key(p.Seed, exact.Energies), workers: workers}
	g.endow(p.Links + p.HeadStart)
	if g.LeversFrom > g.from {
		g.off()
		g.endow(p.Links)
	}
	g.makeRoom()
	for v := range n.from {
		if p.Start == nil {
			g.place(v)
		} else {
			n.Energy[v] = p.Start.Energy[v]
		}
	}
	g.gauge()
	g.prepare(n.from)
	heard := n.from
	for v := n.from; v < p.Members; {
		if step != nil && v-heard >= between {
			heard = v
			if err := step(float64(v-n.from) / float64(p.Members-n.from)); err != nil {
				return nil, err
			}
		}
		if v == p.LeversFrom {
			g.pullLevers()
		}
		if g.swiftly() {
			to := p.Members
			if p.LeversFrom > v {
				to = p.LeversFrom
			}
			if next := g.swift(v, to); next > v {
				v = next
				continue
			}
		}
		g.newcomer(v)
		g.join(v)
		v++
	}
	return n, nil
}

// endow gives every member so many tickets of its own.
func (g *grower) endow(own float64) {
	g.own = own
	g.whole = own == math.Floor(own) && own <= 2*MaxLinks // then all tickets together are a number below 2^32
}

// mildest is the largest number whose exponential float32 holds.
const mildest = 85

// gauge chooses the unit of weights, looking at the members there are: the fitness of the best of them, for good, where
// the law has no one far fitter; else always the best so far.
func (g *grower) gauge() {
	for v := range g.from {
		g.best = math.Min(g.best, g.Energy[v])
	}
	g.unit, g.top = g.best, 1
	low, _ := g.Law.Support()
	g.mild = g.Sharpness == 0 || float64(g.Sharpness*(g.best-low)) <= mildest
	if g.mild {
		g.light = make([]uint16, g.Members)
	}
	for v := range g.from {
		g.present(v)
	}
}

// weigh returns the fitness of member v, in the unit of weights.
func (g *grower) weigh(v int) float64 {
	return exact.Exp(float64(-g.Sharpness * (g.Energy[v] - g.unit)))
}

// heavy makes the weights in full, which drawing one by one needs.
func (g *grower) heavy(v int) {
	if g.weight != nil {
		return
	}
	g.weight = make([]float64, g.Members)
	for j := range v {
		g.weight[j] = g.weigh(j)
	}
}

// A grower is a network in the making.
type grower struct {
	*Network
	levers      Params  // as asked for; Network's own are plain until LeversFrom
	own         float64 // tickets a member has before it receives any
	whole       bool    // and whether that is a small whole number
	key, extra  uint64
	energies    uint64
	mild        bool       // the unit of weights stays
	unit        float64    // energy whose fitness is the unit of weights
	light       []uint16   // weights to three digits, while they are mild
	weight      []float64  // weights in full; nil while newcomers are drawn side by side
	best        float64    // energy of the best so far
	top         float64    // and its weight
	received    []int32    // kept only where a lever or the tree needs it
	expired     []int32    // of those, links that count no more; kept with received under expiry
	live        int        // the first link that counts
	closed      []int32    // members at the ceiling
	levied      []int32    // members above the levy's share, kept with the tree
	tree        *sums.Tree // nil while rejection works
	wide        *wideTree  // of the same weights, where they vanish; nil where they do not
	ages        *ages      // under a kernel, fading or idling: then the tree stays
	untilReject int        // links left before rejection is tried again
	chosen      []int32    // by the newcomer at hand, for Distinct
	workers     int
	lanes       []*lanes
	starts      []int  // links before each of the newcomers drawn side by side
	bests       []best // the best member before each of them
}

// pullLevers puts the levers in force, at the size they were asked for.
func (g *grower) pullLevers() {
	if g.LeversFrom <= g.from {
		return
	}
	g.Network.Params = g.levers
	g.endow(g.Links + g.HeadStart)
	g.tree, g.wide = nil, nil
	g.prepare(g.LeversFrom)
}

// off takes the levers out of force.
func (g *grower) off() {
	p := &g.Network.Params
	p.HeadStart, p.OpenShare, p.Ceiling, p.Distinct, p.Kernel, p.Fading, p.Idling, p.LevyAbove, p.LevyRate, p.Expiry = 0, 0, 0, false, 0, 0, 0, 0, 0, 0
}

// prepare makes what the levers in force need to know of the v members there are.
func (g *grower) prepare(v int) {
	g.expire(v)
	if g.Ceiling > 0 || g.LevyRate > 0 {
		g.count()
	}
	if g.Ceiling > 0 {
		for j := range v {
			g.watch(int32(j))
		}
	}
	if g.alpha() != 1 || g.Fading > 0 || g.Idling > 0 {
		g.heavy(v)
		g.ages = g.newAges(v)
		g.plant(v)
	}
}

// expire takes links made more than Expiry arrivals before newcomer v out of count. The links of a start count as made
// when it ended.
func (g *grower) expire(v int) {
	if g.Expiry == 0 {
		return
	}
	to, _ := g.linksOf(v - g.Expiry)
	for ; g.live < to; g.live++ {
		if g.expired != nil {
			j := g.Targets[g.live]
			g.expired[j]++
			g.stir(j)
		}
	}
}

func (g *grower) makeRoom() {
	p := g.Params
	g.Energy = make([]float64, p.Members)
	g.best = math.Inf(1)
	whole := p.Links == math.Floor(p.Links) && p.Start == nil && !(g.levers.Distinct && p.LeversFrom > 1)
	if whole {
		g.Targets = make([]int32, 0, g.LinksBefore(p.Members))
	} else {
		g.Targets = startTargets(p)
		g.first = make([]int32, 1, p.Members-g.from+1)
		g.first[0] = int32(len(g.Targets))
	}
}

// startTargets lays the links of the start out as targets, room for the rest behind them.
func startTargets(p Params) []int32 {
	if p.Start == nil {
		return make([]int32, 0, int(float64(p.Members)*(p.Links+1)))
	}
	links := 0
	for _, d := range p.Start.Received {
		links += int(d)
	}
	t := make([]int32, 0, links+int(float64(p.Members-len(p.Start.Energy))*(p.Links+1)))
	if p.Start.History != nil {
		return append(t, p.Start.History.Targets...)
	}
	for j, d := range p.Start.Received {
		for range d {
			t = append(t, int32(j))
		}
	}
	return t
}

// linksOf returns where the links of newcomer u begin and end among the targets; nowhere where that is not known.
func (g *grower) linksOf(u int) (first, end int) {
	switch {
	case u >= g.from && u < g.Members:
		return g.LinksBefore(u), g.LinksBefore(u + 1)
	case u > 0 && g.Start != nil && g.Start.History != nil:
		return g.Start.History.LinksBefore(u), g.Start.History.LinksBefore(u + 1)
	}
	return 0, 0
}

// count fills in the links received so far, and which of them have expired.
func (g *grower) count() {
	g.received = make([]int32, g.Members)
	for _, j := range g.Targets {
		g.received[j]++
	}
	if g.Expiry > 0 {
		g.expired = make([]int32, g.Members)
		for _, j := range g.Targets[:g.live] {
			g.expired[j]++
		}
	}
}

// join lets member v come.
func (g *grower) join(v int) {
	g.place(v)
	g.present(v)
}

// place gives member v its energy.
func (g *grower) place(v int) {
	g.Energy[v] = g.Law.Quantile(exact.Unit(exact.Bits(g.energies, uint64(v), 0)))
}

// present lets member v be chosen from. Where the unit of weights is the best so far a new best rescales them all: that
// happens about ln N times, and costs N steps in all on average.
func (g *grower) present(v int) {
	e := g.Energy[v]
	if g.mild {
		w := g.weigh(v)
		exact.Weights(g.light[v:v+1], g.Energy[v:v+1], g.Sharpness, g.unit)
		if g.weight != nil {
			g.weight[v] = w
		}
		if e < g.best {
			g.best, g.top = e, w
		}
		g.stir(int32(v))
		return
	}
	if g.weight == nil {
		g.heavy(v)
	}
	if e < g.best {
		g.best, g.unit = e, e
		for j := range v {
			g.weight[j] = g.weigh(j)
		}
		g.weight[v] = 1
		if g.tree != nil {
			g.plant(v + 1)
		}
		return
	}
	g.weight[v] = g.weigh(v)
	g.stir(int32(v))
}

// linksFor returns how many links newcomer v brings.
func (g *grower) linksFor(v int) int {
	links := int(g.Links)
	if part := g.Links - math.Floor(g.Links); part > 0 && exact.Unit(exact.Bits(g.extra, uint64(v), 1)) < part {
		links++
	}
	if g.Distinct {
		links = min(links, v)
	}
	return links
}

// openly tells whether a link is dealt to any member alike.
func (g *grower) openly(index uint64) bool {
	return exact.Unit(exact.Bits(g.extra, index, 0)) < g.OpenShare
}

// newcomer draws the links of member v and notes them.
func (g *grower) newcomer(v int) {
	g.heavy(v)
	before := len(g.Targets)
	for range g.linksFor(v) {
		j := g.draw(v, before)
		g.chosen = append(g.chosen, j)
		if g.Distinct {
			g.hide(j)
		}
	}
	g.Targets = append(g.Targets, g.chosen...)
	if g.first != nil {
		g.first = append(g.first, int32(len(g.Targets)))
	}
	g.settle(v)
	g.chosen = g.chosen[:0]
}

// settle brings counts, ceiling and tree up to date after newcomer v, for the one after it.
func (g *grower) settle(v int) {
	for _, j := range g.chosen {
		if g.received != nil {
			g.received[j]++
		}
	}
	if g.ages != nil {
		g.age(v)
	}
	g.expire(v + 1)
	if g.Ceiling > 0 {
		was := g.closed
		g.closed = nil
		for _, j := range was {
			g.watch(j)
		}
		for _, j := range g.chosen {
			g.watch(j)
		}
		for _, j := range was {
			g.stir(j)
		}
		for _, j := range g.closed {
			g.stir(j)
		}
	}
	if g.tree == nil {
		return
	}
	for _, j := range g.chosen {
		g.stir(j)
	}
	if g.LevyRate > 0 {
		g.levy()
	}
	if g.untilReject -= len(g.chosen); g.untilReject <= 0 && g.ages == nil {
		g.tree, g.wide = nil, nil
		if g.swiftly() {
			g.weight = nil
		}
		if g.Ceiling == 0 && g.LevyRate == 0 {
			g.received, g.expired = nil, nil
		}
	}
}

// stir brings the leaf of j up to date, where there is a tree.
func (g *grower) stir(j int32) {
	if g.tree != nil {
		g.tree.Set(int(j), g.pull(j))
	}
	if g.wide != nil {
		g.wide.set(int(j), g.widePull(j))
	}
}

// hide takes j out of the trees for the rest of the newcomer at hand.
func (g *grower) hide(j int32) {
	if g.tree != nil {
		g.tree.Set(int(j), 0)
	}
	if g.wide != nil {
		g.wide.set(int(j), wide{})
	}
}

// levy brings members above the levy's share up to date: what they pull moves with all links.
func (g *grower) levy() {
	was := g.levied
	g.levied = nil
	for _, list := range [2][]int32{was, g.chosen} {
		for _, j := range list {
			g.stir(j)
			if g.over(j) && !has(g.levied, j) {
				g.levied = append(g.levied, j)
			}
		}
	}
}

// counting returns the links received that j still counts.
func (g *grower) counting(j int32) float64 {
	if g.expired != nil {
		return float64(g.received[j] - g.expired[j])
	}
	return float64(g.received[j])
}

// free returns how many links received a member may hold before the levy takes its part.
func (g *grower) free() float64 { return float64(g.LevyAbove * float64(len(g.Targets)-g.live)) }

func (g *grower) over(j int32) bool { return g.counting(j) > g.free() }

// tickets returns T_j, what is left of it under the levy.
func (g *grower) tickets(j int32) float64 {
	d := g.counting(j)
	if g.LevyRate > 0 {
		d = g.left(d)
	}
	return g.own + d
}

// left returns what the levy leaves of d links received.
func (g *grower) left(d float64) float64 {
	if f := g.free(); d > f {
		return f + float64((1-g.LevyRate)*(d-f))
	}
	return d
}

// watch puts j on the list of members at the ceiling if it stands there.
func (g *grower) watch(j int32) {
	if g.received[j] > 0 && float64(g.received[j]) >= float64(g.Ceiling*float64(len(g.Targets))) && !has(g.closed, j) {
		g.closed = append(g.closed, j)
	}
}

// pull returns the weight of j relative to the best fitness, 0 at the ceiling; under fading and idling a bound of it.
func (g *grower) pull(j int32) float64 {
	if has(g.closed, j) {
		return 0
	}
	t := g.tickets(j)
	if g.ages == nil {
		return float64(g.weight[j] * t)
	}
	return float64(float64(g.weight[j]*g.raised(t)) * g.bound(j))
}

// widePull is pull without an end to its range.
func (g *grower) widePull(j int32) wide {
	if has(g.closed, j) {
		return wide{}
	}
	w := float64(-g.Sharpness*(g.Energy[j]-g.unit)) + float64(g.alpha()*exact.Log(g.tickets(j)))
	if g.ages != nil {
		w += exact.Log(g.bound(j))
	}
	return wideOf(w)
}

// logPull returns the logarithm of the weight of j, its fitness relative to the best.
func (g *grower) logPull(j int32) float64 {
	w := float64(-g.Sharpness*(g.Energy[j]-g.unit)) + float64(g.alpha()*exact.Log(g.tickets(j)))
	if g.ages != nil {
		w += g.logAge(j)
	}
	return w
}

func has(list []int32, j int32) bool {
	for _, k := range list {
		if k == j {
			return true
		}
	}
	return false
}

// barred reports whether the next link of the newcomer at hand may not go to j.
func (g *grower) barred(j int32) bool {
	return (g.Distinct && has(g.chosen, j)) || has(g.closed, j)
}

// draw returns the member the next link of newcomer v goes to; links is the number made before v came.
func (g *grower) draw(v, links int) int32 {
	index := uint64(links + len(g.chosen))
	if g.OpenShare > 0 && g.openly(index) {
		return g.drawAny(v, index)
	}
	if g.tree != nil {
		return g.drawExact(v, index)
	}
	own := float64(g.own * float64(v))
	targets := g.Targets[g.live:links]
	all := own + float64(len(targets))
	plain := len(g.closed) == 0 && !g.Distinct
	for try := range uint64(tries) {
		bits := exact.Bits(g.key, index, try)
		j := g.holder(bits, v, own, targets)
		w := g.weight[j]
		if g.LevyRate > 0 && g.byLink(bits, own, all) {
			d := g.counting(j)
			w = float64(w * (g.left(d) / d))
		}
		if float64(g.chance(bits, all)*g.top) < w && (plain || !g.barred(j)) {
			return j
		}
	}
	g.plant(v)
	return g.drawExact(v, index)
}

// drawAny returns a member drawn uniformly from those that may take the link.
func (g *grower) drawAny(v int, index uint64) int32 {
	for try := range uint64(tries) {
		j := int32(exact.Unit(exact.Bits(g.extra, index, try+2)) * float64(v))
		if !g.barred(j) {
			return j
		}
	}
	return g.scan(v, exact.Unit(exact.Bits(g.extra, index, tries+2)), func(int) float64 { return 0 })
}

// plant builds the sum tree over the first v members. It stays for a share of v links, so that planting costs a bounded
// number of steps a link.
func (g *grower) plant(v int) {
	if g.received == nil {
		g.count()
	}
	if g.tree == nil {
		g.tree = sums.New(g.Members)
		g.untilReject = max(1000, v/4)
	}
	g.levied = nil
	g.tree.Fill(v, func(j int) float64 {
		if g.LevyRate > 0 && g.over(int32(j)) {
			g.levied = append(g.levied, int32(j))
		}
		if g.barred(int32(j)) {
			return 0
		}
		return g.pull(int32(j))
	})
	g.wide = nil
}

// drawExact returns a member with the exact probability, from the tree, or from the wide one where no member with weight
// above the smallest number is open; under fading and idling trees hold bounds, and a draw is taken in the share its weight
// has of the bound. Where nobody is open it compares in logs.
func (g *grower) drawExact(v int, index uint64) int32 {
	vanished := g.tree.Total() <= 1e-280
	if vanished && g.wide == nil {
		g.wide = newWideTree(g.Members)
		g.wide.fill(v, func(j int) wide {
			if g.barred(int32(j)) {
				return wide{}
			}
			return g.widePull(int32(j))
		})
	}
	for try := uint64(tries); try < 4*tries && !(vanished && g.wide.empty()); try++ {
		bits := exact.Bits(g.key, index, try)
		u := exact.Unit(bits)
		var j int32
		if vanished {
			j = int32(g.wide.find(u))
		} else {
			j = int32(g.tree.Find(float64(u * g.tree.Total())))
		}
		if g.ages == nil || exact.Unit(exact.Again(bits)) < g.share(j) {
			return j
		}
	}
	return g.scan(v, exact.Unit(exact.Bits(g.key, index, 4*tries)), func(j int) float64 { return g.logPull(int32(j)) })
}

// scan draws from exp(logWeight) over the members that are not barred; if all are, over those not chosen yet.
func (g *grower) scan(v int, u float64, logWeight func(j int) float64) int32 {
	open := func(j int) bool { return !g.barred(int32(j)) }
	top := math.Inf(-1)
	for j := range v {
		if open(j) {
			top = math.Max(top, logWeight(j))
		}
	}
	if math.IsInf(top, -1) {
		open = func(j int) bool { return !g.Distinct || !has(g.chosen, int32(j)) }
		for j := range v {
			if open(j) {
				top = math.Max(top, logWeight(j))
			}
		}
	}
	sum, last := 0.0, 0
	for j := range v {
		if open(j) {
			sum += exact.Exp(logWeight(j) - top)
			last = j
		}
	}
	at := float64(u * sum)
	for j := range v {
		if open(j) {
			if at -= exact.Exp(logWeight(j) - top); at < 0 {
				return int32(j)
			}
		}
	}
	return int32(last)
}
