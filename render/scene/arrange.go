package scene

import (
	"cmp"
	"math"
	"slices"
)

// Sizes of the level of detail.
const (
	seatShare, seats = 0.012, 24 // members this large keep apart
	starShare        = 0.004     // members this large gather strokes into rays
	ownDots          = 4000
	ownRadius        = 0.9
	washRings        = 20
)

// Arrange returns the picture of a view.
func Arrange(c Columns, v View) Picture { return Again(Picture{}, c, v) }

// Again is Arrange into the memory of a picture that is not needed any more.
func Again(old Picture, c Columns, v View) Picture {
	l := newLayout(c, v)
	l.takeSeats()
	p := Picture{CX: l.cx, CY: l.cy, R: l.r, Scale: v.Scale, Leader: -1, Links: l.links, OneStrokeFor: 1,
		Wash: old.Wash[:0], Grain: old.Grain[:0], Rings: old.Rings[:0], Under: old.Under[:0], Strokes: old.Strokes[:0], Spokes: old.Spokes[:0], Discs: old.Discs[:0]}
	for _, q := range RingShares {
		p.Rings = append(p.Rings, l.r*Radius(q))
	}
	l.wash(&p)
	l.members(&p)
	l.strokes(&p)
	p.Label = l.label(&p)
	return p
}

// takeSeats turns large members along their ring until no two large discs touch; older ones keep their place.
func (l *layout) takeSeats() {
	if l.links == 0 {
		return
	}
	var large []int32
	for j := range l.received {
		if l.share(int32(j)) >= seatShare {
			large = append(large, int32(j))
		}
	}
	if len(large) > seats {
		slices.SortFunc(large, func(a, b int32) int { return cmp.Compare(l.received[b], l.received[a]) })
		large = large[:seats]
		slices.Sort(large)
	}
	gap := 5 * l.v.Scale
	for i, j := range large {
		clear := func() bool {
			x, y := l.place(j)
			for _, k := range large[:i] {
				a, b := l.place(k)
				if math.Hypot(a-x, b-y) < l.radius(j)+l.radius(k)+gap {
					return false
				}
			}
			return true
		}
		side := 1.0
		if hash(uint64(j)) < 0.5 {
			side = -1
		}
		for step := 0; step < 180 && !clear(); step++ {
			turn := float64(step/2+1) * 2 * math.Pi / 180
			if step%2 == 1 {
				turn = -turn
			}
			l.turn(j, side*turn)
		}
	}
}

// wash tells how many links the levels hold: 20 rings, smoothed, falling outwards.
func (l *layout) wash(p *Picture) {
	var links, members [washRings]float64
	m := 1.0
	if l.n > 1 {
		m = max(1, float64(l.links)/float64(l.n-1))
	}
	for j, d := range l.received {
		p := l.at[j]
		k := min(int(math.Sqrt(float64(p.x*p.x+p.y*p.y))*washRings), washRings-1)
		links[k] += float64(d)
		members[k]++
	}
	value := make([]float64, washRings)
	for k := range value {
		value[k] = (links[k] + 12*m) / (m*members[k] + 12*m)
	}
	// Pool neighbours until the values fall outwards.
	for changed := true; changed; {
		changed = false
		for k := 0; k+1 < washRings; k++ {
			if value[k] < value[k+1]-1e-9 {
				wa, wb := members[k]+12, members[k+1]+12
				mean := (value[k]*wa + value[k+1]*wb) / (wa + wb)
				value[k], value[k+1] = mean, mean
				changed = true
			}
		}
	}
	for _, v := range value {
		x := (math.Log10(v) - 0.12) / 1.5
		p.Wash = append(p.Wash, math.Pow(max(0, min(1, x)), 0.8))
	}
}

// members splits the members into discs and crowd.
func (l *layout) members(p *Picture) {
	need := ownRadius * l.v.Scale / l.dot
	atLeast := int32(math.Ceil(need * need * float64(l.links)))
	all := l.n <= ownDots && !l.v.Bare
	if !all {
		count := 0
		for _, d := range l.received {
			if d >= atLeast {
				count++
			}
		}
		if limit := map[bool]int{true: 16, false: ownDots}[l.v.Bare]; count > limit {
			sorted := slices.Clone(l.received)
			slices.Sort(sorted)
			atLeast = sorted[len(sorted)-limit] + 1
		}
	}
	m := max(1, float64(l.links)/max(1, float64(l.n-1)))
	for j := range l.received {
		k := int32(j)
		tone := Tone(float64(l.c.Pull[j]))
		x, y := l.place(k)
		if all || l.received[j] >= max(atLeast, 1) || k == l.top || j == l.v.Following {
			p.Discs = append(p.Discs, Disc{Member: k, X: x, Y: y, R: l.radius(k), Tone: tone, Share: l.share(k), Leader: k == l.top, Faint: l.received[j] == 0,
				Capped: l.v.Ceiling > 0 && l.received[j] > 0 && l.share(k) >= 0.97*l.v.Ceiling})
			continue
		}
		p.Grain = append(p.Grain, Grain{x, y, 0.6 + 0.4*min(3, float64(l.received[j])/m), tone})
	}
	slices.SortStableFunc(p.Discs, func(a, b Disc) int {
		if a.Leader != b.Leader {
			if a.Leader {
				return 1
			}
			return -1
		}
		return cmp.Compare(a.Share, b.Share)
	})
	if n := len(p.Discs); n > 0 && p.Discs[n-1].Leader {
		p.Leader = n - 1
	}
}

// A Label is where the leader's plate goes: the middle of it.
type Label struct{ X, Y float64 }

// labelWidth and labelHeight of the plate in CSS pixels.
const labelWidth, labelHeight = 164, 28

// label tries the sides of the leader and takes the one where the plate covers the least.
func (l *layout) label(p *Picture) Label {
	if p.Leader < 0 {
		return Label{}
	}
	d := p.Discs[p.Leader]
	size := max(1, l.v.Label) * l.v.Scale
	w, h := labelWidth*size, labelHeight*size
	out := d.R + 14*l.v.Scale
	var best Label
	least := math.Inf(1)
	try := func(x, y, cost float64) {
		over := cost
		if x-w/2 < 0 || x+w/2 > l.v.Width || y-h/2 < 0 || y+h/2 > l.v.Height {
			over += w * h
		}
		for _, e := range p.Discs {
			if e.R < 5*l.v.Scale {
				continue
			}
			dx := max(0, min(x+w/2, e.X+e.R)-max(x-w/2, e.X-e.R))
			dy := max(0, min(y+h/2, e.Y+e.R)-max(y-h/2, e.Y-e.R))
			over += dx * dy
		}
		if over < least {
			least, best = over, Label{x, y}
		}
	}
	try(d.X-out-w/2, d.Y, 0)
	try(d.X+out+w/2, d.Y, 1)
	try(d.X, d.Y-out-h/2, 2)
	try(d.X, d.Y+out+h/2, 3)
	for k := range 12 {
		s, c := math.Sincos(float64(k) * math.Pi / 6)
		try(d.X+c*(0.34*l.r+w/2), d.Y+s*0.34*l.r, 200)
	}
	return best
}

// Pick returns the member whose dot is nearest to a point, within 14 CSS pixels of its rim, or -1.
func Pick(p Picture, x, y float64) int {
	best, least := -1, 14*p.Scale
	for i := len(p.Discs) - 1; i >= 0; i-- {
		d := p.Discs[i]
		gap := max(0, math.Hypot(d.X-x, d.Y-y)-d.R)
		if gap < least {
			best, least = int(d.Member), gap
		}
		if gap == 0 {
			break
		}
	}
	if best >= 0 {
		return best
	}
	for _, g := range p.Grain {
		if gap := math.Hypot(g.X-x, g.Y-y); gap < least/2 {
			least = 2 * gap
		}
	}
	return best
}

// Place returns where a member lies in a view and the radius of its dot.
func Place(c Columns, v View, member int) (x, y, r float64) {
	l := newLayout(c, v)
	if member < 0 || member >= l.n {
		return math.NaN(), math.NaN(), 0
	}
	l.takeSeats()
	x, y = l.place(int32(member))
	return x, y, l.radius(int32(member))
}
