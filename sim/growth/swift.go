package growth

import (
	"math"
	"slices"
	"sync"

	"preponder/sim/internal/exact"
	"preponder/sim/law"
)

// Under the plain rule, with or without a head start and an open share, the links of many newcomers are drawn side by side:
// first all tickets, then the members they lead to, then those members' weights, then who is accepted; who is not tries
// again in the next round. Each of these loops reads many places of memory at once, and none branches on chance. A link
// whose ticket lies among the links drawn at the same time waits, and is drawn after them, in order. Since draws are keyed
// the outcome is the same as one by one, however many are drawn at a time and on however many processors.

// lane is how many links one worker draws at a time: a power of 2.
const lane = 512

// apart is the least ratio of members present to newcomers drawn at a time: so few links wait.
const apart = 64

// widest is how many newcomers are drawn at a time at most, by all workers, and shared from how many on they share.
const widest, shared = 32768, 512

// A lanes is the room of one worker.
type lanes struct {
	seats   [lane]seat
	link    [lane]int32  // links still open: their seats
	at      [lane]int32  // the link whose target the ticket leads to, or ^ the member whose own it is
	to      [lane]int32  // the member it leads to
	height  [lane]uint16 // what that member's weight must exceed, as the upper half of a float32
	weight  [lane]uint16
	late    [lane]int32 // links whose ticket is not yet known
	odd     [lane]int32 // places above whose height is still to be found
	waiting []waiting
}

// A seat is what is known of a link to be drawn.
type seat struct {
	who      int32   // its newcomer
	received int32   // tickets of links received
	own      int32   // members' own tickets, where they are whole
	top      float32 // weight of the best member, over 2^32
}

// A waiting link: its number, the newcomer it is of, and the try it has come to.
type waiting struct {
	link int
	who  int32
	try  int32
}

// swiftly tells whether newcomers may be drawn side by side.
func (g *grower) swiftly() bool {
	return g.workers > 0 && g.mild && g.tree == nil && g.ages == nil && !g.Distinct && g.Ceiling == 0 && g.LevyRate == 0 && g.Expiry == 0
}

// swift lets newcomers v to to-1 come, or fewer of them, and returns the next one to come; v itself where it must be drawn
// one by one.
func (g *grower) swift(v, to int) int {
	n, workers := min(to-v, lane/max(int(math.Ceil(g.Links)), 1), max(1, v/apart)), 1
	if g.workers > 1 && v/apart >= shared && to-v >= shared {
		n, workers = min(to-v, v/apart, widest), g.workers
	}
	before := len(g.Targets)
	g.starts, g.bests = slices.Grow(g.starts[:0], n+1)[:n+1], slices.Grow(g.bests[:0], n)[:n]
	end := before
	if m := int(g.Links); float64(m) == g.Links {
		for i := range g.starts {
			g.starts[i] = before + m*i
		}
		end += m * n
	} else {
		for i := range n {
			g.starts[i] = end
			end += g.linksFor(v + i)
		}
		g.starts[n] = end
	}
	g.arrive(v, v+n, workers)
	g.Targets = slices.Grow(g.Targets, end-before)[:end]
	for len(g.lanes) < workers {
		g.lanes = append(g.lanes, &lanes{})
	}
	each(workers, v, v+n, func(w, from, to int) { g.lanes[w].draw(g, v, before, from, to) })
	stop := v + n
	for _, l := range g.lanes[:workers] {
		for _, a := range l.waiting {
			if int(a.who) >= stop {
				break
			}
			if !g.drawLate(a, v) {
				stop = int(a.who)
			}
		}
	}
	// A link that no try placed ends the stretch before its newcomer.
	g.Targets = g.Targets[:g.starts[stop-v]]
	if stop < v+n {
		g.best, g.top = g.bests[stop-v].energy, g.bests[stop-v].weight
	}
	if g.first != nil {
		for _, k := range g.starts[1 : stop-v+1] {
			g.first = append(g.first, int32(k))
		}
	}
	return stop
}

// each splits a range among workers and waits for them.
func each(workers, from, to int, do func(worker, from, to int)) {
	if workers == 1 {
		do(0, from, to)
		return
	}
	var all sync.WaitGroup
	for w := range workers {
		all.Go(func() { do(w, from+(to-from)*w/workers, from+(to-from)*(w+1)/workers) })
	}
	all.Wait()
}

// best member before a newcomer.
type best struct{ energy, weight float64 }

// arrive gives newcomers their energies and weights, and notes who was best before each.
func (g *grower) arrive(from, to, workers int) {
	each(workers, from, to, func(_, from, to int) {
		rank := g.Energy[from:to]
		for i := range rank {
			rank[i] = exact.Unit(exact.Bits(g.energies, uint64(from+i), 0))
		}
		law.Quantiles(g.Law, rank)
		exact.Weights(g.light[from:to], g.Energy[from:to], g.Sharpness, g.unit)
	})
	now := best{g.best, g.top}
	for i, e := range g.Energy[from:to] {
		g.bests[i] = now
		if e < now.energy {
			now = best{e, g.weigh(from + i)}
		}
	}
	g.best, g.top = now.energy, now.weight
}

// draw draws the links of newcomers from to to-1; v is the first of all that are drawn at the same time and before the
// number of links there were.
func (l *lanes) draw(g *grower, v, before, from, to int) {
	l.waiting = l.waiting[:0]
	own, openly := int32(0), g.OpenShare > 0
	if g.whole {
		own = int32(g.own)
	}
	for from < to {
		base, n, waited := g.starts[from-v], 0, len(l.waiting)
		next := from
		for ; next < to; next++ {
			first, end := g.starts[next-v], g.starts[next-v+1]
			if end-base > lane {
				break
			}
			one := seat{who: int32(next), received: int32(first), own: int32(next) * own, top: float32(g.bests[next-v].weight * (1.0 / (1 << 32)))}
			for range end - first {
				l.seats[n&(lane-1)] = one
				n++
			}
		}
		open := 0
		for k := range n {
			if openly && g.openly(uint64(base+k)) {
				g.Targets[base+k] = g.drawAny(int(l.seats[k].who), uint64(base+k))
				continue
			}
			l.link[open&(lane-1)] = int32(k)
			open++
		}
		for try := 0; open > 0; try++ {
			if try == tries {
				for _, k := range l.link[:open] {
					l.waiting = append(l.waiting, waiting{base + int(k), l.seats[k].who, tries})
				}
				break
			}
			if g.whole {
				open = l.propose(g, base, before, try, open)
			} else {
				open = l.proposeReal(g, base, before, try, open)
			}
			open = l.decide(g, v, base, before, try, open)
		}
		slices.SortFunc(l.waiting[waited:], func(a, b waiting) int { return a.link - b.link })
		from = next
	}
}

// propose draws a ticket for each open link and says where it leads; links whose ticket is not yet known leave to wait.
func (l *lanes) propose(g *grower, base, before, try, open int) int {
	part, key := partOf(g.own), exact.Try(g.key, uint64(try))
	n, late, odd := 0, 0, 0
	for i := range open {
		k := l.link[i&(lane-1)]
		seat := &l.seats[k&(lane-1)]
		s, _ := ticket(exact.Bits(key, uint64(base+int(k)), 0), uint64(uint32(seat.own)+uint32(seat.received)))
		r := int(s>>32) - int(seat.own)
		if r >= before {
			l.late[late&(lane-1)] = k
			late++
			continue
		}
		if uint32(s) < fine {
			l.odd[odd&(lane-1)] = int32(n)
			odd++
		}
		owned := int32(r >> 63) // -1 for a member's own ticket, 0 for a link's
		l.at[n&(lane-1)] = ^owner(s>>32, part)&owned | int32(r)&^owned
		l.height[n&(lane-1)] = uint16(math.Float32bits(float32(uint32(s))*seat.top) >> 16)
		l.link[n&(lane-1)] = k
		n++
	}
	for _, i := range l.odd[:odd] {
		k := l.link[i]
		l.height[i] = l.seats[k].heightOf(finer(exact.Bits(key, uint64(base+int(k)), 0)))
	}
	l.wait(base, try, late)
	return n
}

// heightOf returns what a weight must exceed where chance is a number between 0 and 1.
func (s seat) heightOf(chance float64) uint16 {
	return uint16(math.Float32bits(float32(chance*(1<<32))*s.top) >> 16)
}

// wait puts the late links on the list of those that wait.
func (l *lanes) wait(base, try, late int) {
	for _, k := range l.late[:late] {
		l.waiting = append(l.waiting, waiting{base + int(k), l.seats[k].who, int32(try)})
	}
}

// proposeReal is propose where a member's own tickets are no whole number.
func (l *lanes) proposeReal(g *grower, base, before, try, open int) int {
	inv, key := 1/g.own, exact.Try(g.key, uint64(try))
	n, late := 0, 0
	for i := range open {
		k := l.link[i&(lane-1)]
		seat := &l.seats[k&(lane-1)]
		bits := exact.Bits(key, uint64(base+int(k)), 0)
		own := float64(g.own * float64(seat.who))
		x := float64(exact.Unit(bits) * (own + float64(seat.received)))
		r := x - own
		if r >= float64(before) {
			l.late[late&(lane-1)] = k
			late++
			continue
		}
		at := int32(r)
		if r < 0 {
			at = ^min(int32(x*inv), seat.who-1)
		}
		l.at[n&(lane-1)] = at
		l.height[n&(lane-1)] = seat.heightOf(exact.Unit(exact.Again(bits)))
		l.link[n&(lane-1)] = k
		n++
	}
	l.wait(base, try, late)
	return n
}

// decide looks up whom the tickets lead to and places the links that are accepted; it returns how many are still open.
func (l *lanes) decide(g *grower, v, base, before, try, n int) int {
	n &= 2*lane - 1
	targets, light, placed := g.Targets[:max(before, 1)], g.light, g.Targets[base:]
	for i, at := range l.at[:n] {
		owned := at >> 31
		l.to[i] = ^at&owned | targets[at&^owned]&^owned
	}
	for i, j := range l.to[:n] {
		l.weight[i] = light[j]
	}
	open := 0
	for i, j := range l.to[:n] {
		k, w, h := l.link[i], l.weight[i], l.height[i]
		placed[k] = j
		l.link[open&(lane-1)] = k
		no := int((uint64(w) - uint64(h)) >> 63) // 1 where h > w: bits of positive numbers stand in their order
		if h-w <= 1 {                            // too close for halves of a float32 to tell
			no = 1
			who, received := int(l.seats[k].who), float64(l.seats[k].received)
			if g.accepts(exact.Bits(g.key, uint64(base+int(k)), uint64(try)), float64(g.own*float64(who))+received, g.bests[who-v].weight, j) {
				no = 0
			}
		}
		open += no
	}
	return open
}

// drawLate draws a link that waited, once all before it are drawn; false where no try placed it.
func (g *grower) drawLate(a waiting, v int) bool {
	who := int(a.who)
	first := g.starts[who-v]
	own := float64(g.own * float64(who))
	for try := uint64(a.try); try < tries; try++ {
		bits := exact.Bits(g.key, uint64(a.link), try)
		j := g.holder(bits, who, own, g.Targets[:first])
		if g.accepts(bits, own+float64(first), g.bests[who-v].weight, j) {
			g.Targets[a.link] = j
			return true
		}
	}
	return false
}

// fine is where the lower half of 64 bits is too coarse a number between 0 and 1.
const fine = 1 << 24

// ticket returns the number of a ticket among all, below 2^32, in its upper half; the lower half and rest are a number
// between 0 and 1 that is left over, of 64 bits.
func ticket(bits, all uint64) (s, rest uint64) {
	rest = (bits & math.MaxUint32) * all
	return (bits>>32)*all + rest>>32, rest & math.MaxUint32
}

// finer replaces what a ticket leaves over where that is below fine/2^32.
func finer(bits uint64) float64 {
	return float64(exact.Unit(exact.Again(bits)) * (float64(fine) / (1 << 32)))
}

// partOf returns 1/own, for a whole number, in units of 2^-38, rounded up.
func partOf(own float64) uint64 { return uint64(1<<38)/uint64(own) + 1 }

// owner returns the member whose own ticket this is. Rounding does no harm: place is below own 10^7, own at most 128.
func owner(place, part uint64) int32 { return int32(place * part >> 38) }

// holder returns the member of the ticket that newcomer v draws with these bits; own are the members' own tickets together.
func (g *grower) holder(bits uint64, v int, own float64, targets []int32) int32 {
	if g.whole {
		s, _ := ticket(bits, uint64(own)+uint64(len(targets)))
		if r := int(s>>32) - int(own); r >= 0 {
			return targets[r]
		}
		return owner(s>>32, partOf(g.own))
	}
	x := float64(exact.Unit(bits) * (own + float64(len(targets))))
	if r := x - own; r >= 0 {
		return targets[min(int(r), len(targets)-1)]
	}
	return min(int32(x*(1/g.own)), int32(v-1))
}

// byLink tells whether the ticket drawn with these bits is of a link received.
func (g *grower) byLink(bits uint64, own, all float64) bool {
	if g.whole {
		s, _ := ticket(bits, uint64(int64(all)))
		return int(s>>32) >= int(own)
	}
	return float64(exact.Unit(bits)*all) >= own
}

// accepts tells whether the draw of member j with these bits, among so many tickets, stands: with the share its weight has
// of the best.
func (g *grower) accepts(bits uint64, all, top float64, j int32) bool {
	return float64(g.chance(bits, all)*top) < g.weigh(int(j))
}

// chance returns the number between 0 and 1 that decides whether a draw stands.
func (g *grower) chance(bits uint64, all float64) float64 {
	if !g.whole {
		return exact.Unit(exact.Again(bits))
	}
	s, rest := ticket(bits, uint64(int64(all)))
	if uint32(s) < fine {
		return finer(bits)
	}
	return exact.Unit(s<<32 | rest)
}
