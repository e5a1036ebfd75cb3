package share

import (
	"math"
	"slices"
	"sort"
)

// held is the share of growth for which a new leader must last before the change counts.
const held = 1.05

// A Path is how a network's shares went as it grew, at sizes spaced evenly in the logarithm.
type Path struct {
	Members  []int32
	Leader   []int32
	Share    []float64
	Top4     []float64
	HHI      []float64
	Gini     []float64
	Reigns   []Reign
	Followed [][]float64 // shares of the members asked for, along Members
}

// A Reign is a stretch of growth under one leader: from From members until the next reign begins.
type Reign struct {
	Leader int32 `json:"leader"`
	From   int32 `json:"from"`
}

// LeadChanges counts the changes of leader.
func (p Path) LeadChanges() int { return max(0, len(p.Reigns)-1) }

// Along follows the targets, in order, of a network of the given members; before(v) is the number of links made before
// member v came. It starts at size from. follow names members whose own shares are wanted.
func Along(targets []int32, before func(v int) int, from, members, points int, follow []int32) Path {
	var p Path
	t := tally{received: make([]int32, members), having: make([]int32, crowd)}
	for _, j := range targets[:before(from)] {
		t.add(j)
	}
	p.Followed = make([][]float64, len(follow))
	sizes := Sizes(max(from, 2), members, points)
	next, at := 0, before(from)
	var reigns []Reign
	for v := from; v <= members; v++ {
		for end := before(v); at < end; at++ {
			t.add(targets[at])
		}
		if at > 0 && (len(reigns) == 0 || reigns[len(reigns)-1].Leader != t.leader()) {
			reigns = append(reigns, Reign{t.leader(), int32(v)})
		}
		for next < len(sizes) && int(sizes[next]) == v {
			p.note(&t, v, follow)
			next++
		}
	}
	p.Reigns = Lasting(reigns, members)
	return p
}

func (p *Path) note(t *tally, v int, follow []int32) {
	if t.links == 0 {
		return
	}
	l := float64(t.links)
	p.Members = append(p.Members, int32(v))
	p.Leader = append(p.Leader, t.leader())
	p.Share = append(p.Share, float64(t.received[t.leader()])/l)
	top := 0.0
	for _, j := range t.top[:t.filled] {
		top += float64(t.received[j])
	}
	p.Top4 = append(p.Top4, top/l)
	p.HHI = append(p.HHI, 1e4*t.square/(l*l))
	p.Gini = append(p.Gini, t.gini(v))
	for i, j := range follow {
		p.Followed[i] = append(p.Followed[i], float64(t.received[j])/l)
	}
}

// Sizes returns up to points whole sizes from low to high, both included, evenly spaced in the logarithm.
func Sizes(low, high, points int) []int32 {
	var s []int32
	for i := range points {
		x := float64(i) / float64(max(points-1, 1))
		n := int32(math.Round(float64(low) * math.Pow(float64(high)/float64(low), x)))
		if len(s) == 0 || n > s[len(s)-1] {
			s = append(s, n)
		}
	}
	return s
}

// Lasting drops reigns that ended within 5 % of growth and joins what they parted. The last reign stays.
func Lasting(reigns []Reign, members int) []Reign {
	var out []Reign
	for i, r := range reigns {
		end := float64(members)
		if i+1 < len(reigns) {
			end = float64(reigns[i+1].From)
		}
		last := i == len(reigns)-1
		if !last && end < held*float64(r.From) {
			continue
		}
		if len(out) > 0 && out[len(out)-1].Leader == r.Leader {
			continue
		}
		out = append(out, r)
	}
	return out
}

// crowd is up to how many links members are counted by their number of links.
const crowd = 1024

// A tally counts links as they come: the top four, the sum of squares and how many members hold how many are kept up to
// date at every link.
type tally struct {
	received []int32
	links    int
	square   float64
	top      [4]int32
	filled   int
	having   []int32 // members with so many links, from 1 on
	far      []int32 // members with crowd links or more
}

// gini returns the Gini coefficient of the first v members, as Gini does.
func (t *tally) gini(v int) float64 {
	sum := gathered{members: float64(v)}
	most := min(int(t.received[t.leader()])+1, crowd)
	none := v - len(t.far)
	for _, c := range t.having[1:most] {
		none -= int(c)
	}
	sum.add(float64(none), 0)
	for d, c := range t.having[1:most] {
		sum.add(float64(c), float64(d+1))
	}
	above := make([]int32, len(t.far))
	for i, j := range t.far {
		above[i] = t.received[j]
	}
	slices.Sort(above)
	for _, d := range above {
		sum.add(1, float64(d))
	}
	return sum.gini()
}

func (t *tally) leader() int32 { return t.top[0] }

func (t *tally) add(j int32) {
	d := t.received[j]
	t.square += float64(2*d + 1)
	t.received[j] = d + 1
	t.links++
	if d < crowd {
		t.having[d]--
		if d+1 < crowd {
			t.having[d+1]++
		} else {
			t.far = append(t.far, j)
		}
	}
	at := 0
	for at < t.filled && t.top[at] != j {
		at++
	}
	if at == t.filled {
		if t.filled < len(t.top) {
			t.filled++
		} else if at--; t.received[t.top[at]] > d {
			return
		}
		t.top[at] = j
	}
	for at > 0 && t.received[t.top[at-1]] < d+1 {
		t.top[at], t.top[at-1] = t.top[at-1], t.top[at]
		at--
	}
}

// A Tail is how many members hold at least so many links: Share of them hold Links or more.
type Tail struct {
	Links []int32
	Share []float64
}

// TailOf returns the tail at up to points values evenly spaced in the logarithm, from 1 link to the most that any holds.
func TailOf(received []int32, points int) Tail {
	var t Tail
	most := int32(0)
	for _, d := range received {
		most = max(most, d)
	}
	if most == 0 {
		return t
	}
	t.Links = Sizes(1, int(most), points)
	count := make([]int, len(t.Links))
	for _, d := range received {
		if k := sort.Search(len(t.Links), func(i int) bool { return t.Links[i] > d }); k > 0 {
			count[k-1]++
		}
	}
	t.Share = make([]float64, len(count))
	sum := 0
	for k := len(count) - 1; k >= 0; k-- {
		sum += count[k]
		t.Share[k] = float64(sum) / float64(len(received))
	}
	return t
}
