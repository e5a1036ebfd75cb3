package evidence

import (
	"slices"
	"sort"
)

// A History is a log as the likelihood needs it: members numbered by arrival, links in groups of equal time.
//
//   - A member arrives with the first group that names it.
//   - A row whose target arrived in the same group or never before is a link but no choice.
//   - Rows of one group do not see one another.
//   - The choice set of a row: members that arrived in an earlier group, less the source; if no pair repeats in the log,
//     less the source's earlier picks too.
type History struct {
	Names          []string
	Source, Target []int32 // of every link, in order of time
	Group          []int32 // first link of each group, and the number of links at the end
	Arrived        []int32 // group in which each member arrived, not decreasing
	Choices        int
	ByNewcomers    int // choices made by members that arrive with them
	Unchosen       int // members that first appear as somebody's target
	Repeats        int // links whose pair stood in the log before
	Replies        int // links whose target had linked to their source before
	LeftOut        int // of those, left out
	Treatment
}

// NewHistory orders the rows.
func NewHistory(l *Rows) *History { return NewHistoryOf(l, Treatment{}) }

// NewHistoryOf orders the rows and treats them as asked.
func NewHistoryOf(l *Rows, how Treatment) *History {
	order := make([]int32, len(l.Time))
	for i := range order {
		order[i] = int32(i)
	}
	sort.SliceStable(order, func(a, b int) bool { return l.Time[order[a]] < l.Time[order[b]] })
	h := &History{Treatment: how}
	number := make([]int32, len(l.Names))
	for i := range number {
		number[i] = -1
	}
	seen := map[uint64]bool{}
	pairOf := func(a, b int32) uint64 { return uint64(a)<<32 | uint64(uint32(b)) }
	last := 0.0
	for _, row := range order {
		reply := seen[pairOf(l.Target[row], l.Source[row])]
		again := seen[pairOf(l.Source[row], l.Target[row])]
		seen[pairOf(l.Source[row], l.Target[row])] = true
		if reply {
			h.Replies++
			if how.LeaveReplies {
				h.LeftOut++
				continue
			}
		}
		if again {
			h.Repeats++
		}
		if len(h.Target) == 0 || l.Time[row] != last {
			h.Group = append(h.Group, int32(len(h.Target)))
		}
		last = l.Time[row]
		for k, old := range [2]int32{l.Source[row], l.Target[row]} {
			if number[old] < 0 {
				number[old] = int32(len(h.Names))
				h.Names = append(h.Names, l.Names[old])
				h.Arrived = append(h.Arrived, int32(len(h.Group)-1))
				if k == 1 {
					h.Unchosen++
				}
			}
		}
		s, t := number[l.Source[row]], number[l.Target[row]]
		h.Source, h.Target = append(h.Source, s), append(h.Target, t)
	}
	h.Group = append(h.Group, int32(len(h.Target)))
	h.countChoices()
	return h
}

func (h *History) countChoices() {
	h.Choices, h.ByNewcomers = 0, 0
	for g := range h.Groups() {
		for i := h.Group[g]; i < h.Group[g+1]; i++ {
			if h.choice(i, g) {
				h.Choices++
				if int(h.Arrived[h.Source[i]]) == g {
					h.ByNewcomers++
				}
			}
		}
	}
}

// Until returns the history as it was when a share of the log's links had been made, to the end of a group.
func (h *History) Until(share float64) *History {
	g := sort.Search(h.Groups(), func(g int) bool { return float64(h.Group[g+1]) >= share*float64(len(h.Target)) })
	g = min(g+1, h.Groups())
	links := h.Group[g]
	members := sort.Search(h.Members(), func(j int) bool { return int(h.Arrived[j]) >= g })
	p := &History{Names: h.Names[:members], Source: h.Source[:links], Target: h.Target[:links], Group: h.Group[:g+1], Arrived: h.Arrived[:members], Repeats: h.Repeats, Treatment: h.Treatment}
	p.countChoices()
	return p
}

// Groups returns how many different times the log has.
func (h *History) Groups() int { return len(h.Group) - 1 }

// Members returns how many members the log names.
func (h *History) Members() int { return len(h.Names) }

func (h *History) choice(i int32, group int) bool {
	return int(h.Arrived[h.Target[i]]) < group && (!h.NewcomersOnly || int(h.Arrived[h.Source[i]]) == group)
}

// PerArrival returns m, the choices per arrival.
func (h *History) PerArrival() float64 {
	return float64(h.Choices) / float64(max(1, h.Members()-h.founders()))
}

// founders are the members of the first group: nobody was there to be chosen.
func (h *History) founders() int {
	n, _ := slices.BinarySearch(h.Arrived, 1)
	return n
}

// Before returns the number of links before the v-th member arrived; with v = Members all of them.
func (h *History) Before(v int) int {
	if v >= h.Members() {
		return len(h.Target)
	}
	return int(h.Group[h.Arrived[v]])
}

// Received returns the links each member has received.
func (h *History) Received() []int32 {
	d := make([]int32, h.Members())
	for _, j := range h.Target {
		d[j]++
	}
	return d
}
