package evidence

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"sort"

	"preponder/sim/internal/exact"
	tree "preponder/sim/internal/sums"
	"preponder/sim/share"
	"preponder/sim/standing"
)

// Cuts of the forecast, as shares of the log: how much longer it looks ahead, where the test on the log's own past is
// made and where it is held against the truth, and how much of a log serves to fit what the rest is predicted by.
const (
	ahead            = 0.5
	testFrom, testTo = 0.4, 0.7
	trained          = 0.7
)

// paths of a forecast, and the sizes at which shares are noted; forecastChoices is the least a log must hold, and
// mostWidening the factor past which no forecast is given.
const (
	paths, forecastSizes = 100, 13
	forecastChoices      = 600
	mostWidening         = 4
)

// halves are the half-lives tried for what a member's past says of its fitness, as shares of the log; 0 is no drift.
var halves = []float64{0, 0.4, 0.2, 0.1, 0.05, 0.025}

// A Forecast is how shares go on if the network grows on as it did: by the extended rule, fitness drifting, with who is
// active when, who joins and how often as in the last 30 % of the log. Shares are of all links.
type Forecast struct {
	Given  bool     `json:"given"`
	Links  []int32  `json:"links"`  // sizes, from now on
	Leader Band     `json:"leader"` // whoever leads
	Ten    Band     `json:"topTen"`
	Today  Band     `json:"today"` // today's leader
	Same   float64  `json:"same"`  // share of paths in which it still leads at the end
	Half   float64  `json:"half"`  // half-life of fitness, share of the log; 0 = none
	Bits   HeldOut  `json:"bits"`
	Past   BackTest `json:"past"`
	Factor float64  `json:"factor"` // by which the bands are widened for it
}

// HeldOut is what explains the last 30 % of the choices, fitted to the first 70 %, in bits a choice over equal fitness.
type HeldOut struct {
	Fitness float64 `json:"fitness"` // lasting fitness
	Rest    float64 `json:"rest"`    // recent activity, age and links held
}

// A Band holds quantiles of a share at the sizes of a forecast.
type Band struct {
	Q025 []float64 `json:"q025"`
	Q10  []float64 `json:"q10"`
	Q50  []float64 `json:"q50"`
	Q90  []float64 `json:"q90"`
	Q975 []float64 `json:"q975"`
}

// A BackTest is a forecast from 40 % of the log, not widened, beside what happened by 70 %.
type BackTest struct {
	Links  []int32    `json:"links"`
	Leader Band       `json:"leader"`
	Truth  []float64  `json:"truth"` // the leader's true share
	Inside int        `json:"inside"`
	Errors [2]float64 `json:"errors"` // mean size of ln(median/truth): of the forecast, and of shares that stay
}

// forecast makes the forecast of a log whose extended rule has been fitted: terms and fitness.
func forecast(h *History, fitted *mixed, terms Terms, step func(done float64) error) (*Forecast, error) {
	past, truth := h.Until(testFrom), h.Until(testTo)
	if h.Choices < forecastChoices || past.Until(trained).Choices < forecastChoices/10 {
		return nil, nil
	}
	f := &Forecast{}
	done := 0.0
	tick := func() error {
		done += (0.5 - done) * 0.05
		return step(done)
	}
	var err error
	if f.Half, f.Bits, err = halfLife(h, terms, true, tick); err != nil {
		return nil, err
	}
	// The test on the past sees nothing after its cut, its half-life neither; only the search for the terms begins at what
	// the whole log says.
	half, _, err := halfLife(past, terms, false, tick)
	if err != nil {
		return nil, err
	}
	m, t, err := fitExtended(past, terms, tick)
	if err != nil {
		return nil, err
	}
	then, err := newFuture(past, m, t, half, float64(len(truth.Target))/float64(len(past.Target))-1).run(func(d float64) error { return step(0.5 + 0.25*d) })
	if err != nil {
		return nil, err
	}
	f.Past, f.Factor = then.against(truth)
	now, err := newFuture(h, fitted, terms, f.Half, ahead).run(func(d float64) error { return step(0.75 + 0.25*d) })
	if err != nil {
		return nil, err
	}
	f.Given = f.Factor <= mostWidening
	f.Links, f.Same = now.sizes, now.same
	f.Leader, f.Ten, f.Today = now.band(0).widened(f.Factor), now.band(1).widened(f.Factor), now.band(2).widened(f.Factor)
	return f, nil
}

// fitExtended fits the extended rule, fitness free, starting from these terms.
func fitExtended(h *History, t Terms, tick func() error) (*mixed, Terms, error) {
	m := newMixed(h)
	t, _, err := m.climb(t, true, tick)
	if err != nil {
		return nil, t, err
	}
	m.settle(t, 8, 40, 0.02)
	return m, t, nil
}

// halfLife fits the extended rule to the first part of a log and returns the half-life of fitness under which it predicts
// the choices of the rest best; with bits, what of them it explains too.
func halfLife(h *History, terms Terms, explain bool, tick func() error) (float64, HeldOut, error) {
	first := h.Until(trained)
	m, t, err := fitExtended(first, terms, tick)
	if err != nil {
		return 0, HeldOut{}, err
	}
	// held returns the log-likelihood of the later choices.
	held := func(eta []float64, t Terms) float64 {
		l := 0.0
		for _, p := range pass(h, eta, t, chances).chance[first.Choices:] {
			l += math.Log(p)
		}
		return l
	}
	best, found := math.Inf(-1), 0.0
	for _, half := range halves {
		if err := tick(); err != nil {
			return 0, HeldOut{}, err
		}
		p := newPosteriors(first, m, t, half, 0)
		eta := make([]float64, h.Members())
		for j := range eta {
			if eta[j] = p.prior; j < first.Members() {
				eta[j] = p.mean(j)
			}
		}
		if l := held(eta, t); l > best {
			best, found = l, half
		}
	}
	if !explain {
		return found, HeldOut{}, nil
	}
	even := newMixed(first)
	same, _, err := even.climb(t, false, tick)
	if err != nil {
		return 0, HeldOut{}, err
	}
	equal := held(ones(h.Members()), Terms{1, math.Log(first.PerArrival()), 0, 0})
	rest := held(ones(h.Members()), same)
	n := h.Choices - first.Choices
	return found, HeldOut{perChoice(best-rest, n), perChoice(rest-equal, n)}, nil
}

// posteriors are what is known of every member's fitness, older choices counting less.
type posteriors struct {
	grid    *grid
	of      []int32
	weights []float64 // of the law at the atoms
	sums    [][]float64
	law     []float64 // sums of the law
	prior   float64   // its mean
}

// newPosteriors takes them half choices (a share of the log) old when they count half, once more aged by so many choices.
func newPosteriors(h *History, m *mixed, t Terms, half, later float64) *posteriors {
	n, e := make([]float64, h.Members()), m.sums.exposure
	for j, c := range m.sums.chosen {
		n[j] = float64(c)
	}
	if half > 0 {
		s := recently(h, m.eta, t, half*float64(h.Choices))
		n, e = s.recent, s.exposure
		fade := math.Exp2(-later / (half * float64(h.Choices)))
		for j := range n {
			n[j] *= fade
			e[j] *= fade
		}
	}
	list, of := cellsOf(n, e)
	p := &posteriors{grid: newGrid(list, true), of: of, weights: m.weights}
	for i := range list {
		p.sums = append(p.sums, running(m.weights, p.grid.kernel[i]))
	}
	p.law = running(m.weights, nil)
	for k, x := range p.grid.x[0] {
		p.prior += m.weights[k] * math.Exp(x)
	}
	return p
}

// running returns the sums of w times v, up to each place; of w where v is nil.
func running(w, v []float64) []float64 {
	out, sum := make([]float64, len(w)), 0.0
	for k := range w {
		if v == nil {
			sum += w[k]
		} else {
			sum += w[k] * v[k]
		}
		out[k] = sum
	}
	return out
}

func (p *posteriors) mean(j int) float64 {
	return p.grid.posterior(int(p.of[j]), p.weights).mean
}

// draw returns a fitness from the posterior of member j, or from the law where j is none of those.
func (p *posteriors) draw(j int, u, within float64) float64 {
	sums := p.law
	if j < len(p.of) {
		sums = p.sums[p.of[j]]
	}
	k := min(sort.SearchFloat64s(sums, u*sums[len(sums)-1]), len(sums)-1)
	return math.Exp(p.grid.x[0][k] + p.grid.step[0]*(within-0.5))
}

// A future grows a log on.
type future struct {
	h      *History
	base   *passer // at the end of the log
	post   *posteriors
	events []event // of the log's last part, group by group
	starts []int   // first event of each of its groups
	leader int32   // today
	sizes  []int32
	rooms  [2]int // members and groups there may be
	shares [3][][]float64
	same   float64
	seen   func(h *History) // for tests: what a path has grown
}

// An event is a link of the log as a pattern: who links, and whether the target is chosen.
type event struct {
	source, target int32 // as in the log, to tell them apart within a group
	lag            int32 // rows before the group in which the source was active last; 0 for a newcomer
	asTarget       bool  // then as target
	unseen         bool  // the target is a newcomer
}

// newFuture prepares paths that add a share of the links there are.
func newFuture(h *History, m *mixed, t Terms, half, more float64) *future {
	added := more * float64(len(h.Target))
	f := &future{h: h, post: newPosteriors(h, m, t, half, added/2*float64(h.Choices)/float64(len(h.Target)))}
	first := sort.Search(h.Groups(), func(g int) bool { return float64(h.Group[g]) >= trained*float64(len(h.Target)) })
	first = max(1, min(first, h.Groups()-1))
	last, asTarget := make([]int32, h.Members()), make([]bool, h.Members())
	newcomers := 0
	for g := range h.Groups() {
		from, end := h.Group[g], h.Group[g+1]
		if g >= first {
			f.starts = append(f.starts, len(f.events))
			seen := map[int32]bool{}
			for i := from; i < end; i++ {
				s, t := h.Source[i], h.Target[i]
				e := event{source: s, target: t, unseen: int(h.Arrived[t]) == g}
				if int(h.Arrived[s]) < g {
					e.lag, e.asTarget = from-last[s], asTarget[s]
				}
				f.events = append(f.events, e)
				for _, j := range [2]int32{s, t} {
					if int(h.Arrived[j]) == g && !seen[j] {
						seen[j] = true
						newcomers++
					}
				}
			}
		}
		for i := from; i < end; i++ {
			last[h.Source[i]], asTarget[h.Source[i]] = i, false
			last[h.Target[i]], asTarget[h.Target[i]] = i, true
		}
	}
	f.starts = append(f.starts, len(f.events))
	rounds := int(added)/len(f.events) + 2
	f.rooms = [2]int{h.Members() + rounds*newcomers, h.Groups() + rounds*(len(f.starts)-1)}
	f.base = newPasser(h, ones(f.rooms[0]), t, slopes, f.rooms[0], f.rooms[1]) // slopes: ages and idle times, whatever the terms
	f.base.run(exposures)
	for j, picked := range f.base.picks {
		f.base.picks[j] = slices.Clip(picked)
	}
	for j := range h.Members() {
		if f.base.at[j].links > f.base.at[f.leader].links {
			f.leader = int32(j)
		}
	}
	for k := range forecastSizes {
		f.sizes = append(f.sizes, int32(len(h.Target)+int(math.Round(added*float64(k)/(forecastSizes-1)))))
	}
	return f
}

func ones(n int) []float64 {
	v := make([]float64, n)
	for i := range v {
		v[i] = 1
	}
	return v
}

// run grows all paths.
func (f *future) run(step func(done float64) error) (*future, error) {
	same := 0
	for k := range paths {
		if err := step(float64(k) / paths); err != nil {
			return nil, err
		}
		shares, still := f.path(uint32(k))
		for s := range shares {
			f.shares[s] = append(f.shares[s], shares[s])
		}
		if still {
			same++
		}
	}
	f.same = float64(same) / paths
	return f, nil
}

// path grows the log on once, keyed by its number, and returns the shares of whoever leads, of the top ten and of today's
// leader at every size, and whether the latter still leads.
func (f *future) path(number uint32) (shares [3][]float64, still bool) {
	key, next := exact.Key(number, exact.Futures), uint64(0)
	unit := func() float64 { next++; return exact.Unit(exact.Bits(key, next, 0)) }
	h := &History{Source: slices.Clone(f.h.Source), Target: slices.Clone(f.h.Target), Group: slices.Clone(f.h.Group), Arrived: slices.Clone(f.h.Arrived), Repeats: f.h.Repeats}
	eta := make([]float64, f.rooms[0])
	for j := range eta {
		eta[j] = f.post.draw(j, unit(), unit())
	}
	p := f.base.clone(h, eta)
	at := int(unit() * float64(len(f.starts)-1))
	for {
		now, leads := noted(p.received(), len(h.Target), f.leader)
		// A network in which everyone has picked everyone grows no further: its shares stay.
		stuck := h.Groups() == f.rooms[1]
		for len(shares[0]) < len(f.sizes) && (stuck || len(h.Target) >= int(f.sizes[len(shares[0])])) {
			for s, v := range now {
				shares[s] = append(shares[s], v)
			}
		}
		if len(shares[0]) == len(f.sizes) {
			if f.seen != nil {
				f.seen(h)
			}
			return shares, leads
		}
		for next := int(f.sizes[len(shares[0])]); len(h.Target) < next && h.Groups() < f.rooms[1]; at = (at + 1) % (len(f.starts) - 1) {
			f.group(p, f.events[f.starts[at]:f.starts[at+1]], unit)
		}
	}
}

// group adds one group by the pattern of events.
func (f *future) group(p *passer, events []event, unit func() float64) {
	h := p.h
	g, from := h.Groups(), len(h.Target)
	p.age(g)
	as := map[int32]int32{} // members of the pattern here
	newcomer := func(old int32) int32 {
		j, known := as[old]
		if !known {
			j = int32(len(h.Arrived))
			h.Arrived = append(h.Arrived, int32(g))
			as[old] = j
		}
		return j
	}
	for _, e := range events {
		var s, t int32
		switch known, ok := as[e.source]; {
		case ok:
			s = known
		case e.lag == 0:
			s = newcomer(e.source)
		default:
			row := max(0, from-int(e.lag))
			if s = h.Source[row]; e.asTarget {
				s = h.Target[row]
			}
			as[e.source] = s
		}
		if e.unseen {
			t = newcomer(e.target)
		} else if t = p.take(s, unit); t < 0 {
			continue // every member has been picked by this one
		}
		if s == t {
			continue
		}
		h.Source, h.Target = append(h.Source, s), append(h.Target, t)
	}
	// Rows that could not be made may leave newcomers without a link: they join all the same, with the next group.
	h.Group = append(h.Group, int32(len(h.Target)))
	p.update(g)
	for j := p.here; j < len(h.Arrived); j++ {
		p.touch(int32(j), g)
	}
}

// take draws a target for a source, by weight; -1 where none is open.
func (p *passer) take(source int32, unit func() float64) int32 {
	for range 200 {
		t := int32(p.tree.Find(unit() * p.tree.Total()))
		if t != source && (p.picks == nil || !slices.Contains(p.picks[source], t)) {
			return t
		}
	}
	return -1
}

// received returns the links each member has received.
func (p *passer) received() []int32 {
	v := make([]int32, len(p.at))
	for j := range v {
		v[j] = p.at[j].links
	}
	return v
}

// clone returns a passer that goes on from here with another history and fitness, and draws targets.
func (p *passer) clone(h *History, eta []float64) *passer {
	c := *p
	c.h, c.steep = h, false
	c.at, c.lnOf, c.powerOf, c.picks = slices.Clone(p.at), slices.Clone(p.lnOf), slices.Clone(p.powerOf), slices.Clone(p.picks)
	for j := range c.at {
		c.at[j].eta = eta[j]
	}
	c.ageDue, c.idleDue = p.ageDue.clone(), p.idleDue.clone()
	c.tree = tree.New(len(eta))
	c.tree.Fill(len(eta), func(j int) float64 { return eta[j] * c.at[j].w })
	return &c
}

func (c calendar) clone() calendar {
	return calendar{slices.Clone(c.head), slices.Clone(c.node), c.spare}
}

// noted returns the shares a forecast speaks of, those of whoever leads, of the top ten and of one member, and whether that
// member leads.
func noted(received []int32, links int, member int32) (shares [3]float64, leads bool) {
	top := share.Largest(received, 10)
	sum := 0
	for _, j := range top {
		sum += int(received[j])
	}
	most, all := received[top[0]], float64(links)
	return [3]float64{float64(most) / all, float64(sum) / all, float64(received[member]) / all}, received[member] == most
}

// band returns the quantiles of one of the three shares over the paths.
func (f *future) band(which int) Band {
	var b Band
	for k := range f.sizes {
		v := make([]float64, 0, paths)
		for _, p := range f.shares[which] {
			v = append(v, p[k])
		}
		slices.Sort(v)
		at := func(q float64) float64 { return share.Quantile(v, q) }
		b.Q025, b.Q10, b.Q50, b.Q90, b.Q975 = append(b.Q025, at(.025)), append(b.Q10, at(.1)), append(b.Q50, at(.5)), append(b.Q90, at(.9)), append(b.Q975, at(.975))
	}
	return b
}

// widened multiplies the logarithmic distance of every quantile from the median.
func (b Band) widened(by float64) Band {
	wide := func(q []float64) []float64 {
		out := make([]float64, len(q))
		for k, v := range q {
			out[k] = math.Min(1, b.Q50[k]*math.Pow(math.Max(v, 1e-9)/math.Max(b.Q50[k], 1e-9), by))
		}
		return out
	}
	return Band{wide(b.Q025), wide(b.Q10), b.Q50, wide(b.Q90), wide(b.Q975)}
}

// against holds a forecast against what happened, and returns the factor by which it was too sure: the root mean square of
// the three misses at the end, in units of the spread of the paths.
func (f *future) against(truth *History) (BackTest, float64) {
	t := BackTest{Links: f.sizes, Leader: f.band(0)}
	received := make([]int32, truth.Members())
	at := 0
	var begin, end [3]float64
	for k, size := range f.sizes {
		for ; at < min(int(size), len(truth.Target)); at++ {
			received[truth.Target[at]]++
		}
		end, _ = noted(received, at, f.leader)
		t.Truth = append(t.Truth, end[0])
		if k == 0 {
			begin = end
		}
	}
	square := 0.0
	last := len(f.sizes) - 1
	for s := range end {
		b := f.band(s)
		middle, low, high := math.Log(b.Q50[last]), math.Log(math.Max(b.Q025[last], 1e-9)), math.Log(b.Q975[last])
		spread := math.Max((high-low)/(2*1.96), 0.01)
		miss := math.Log(math.Max(end[s], 1e-9)) - middle
		square += miss * miss / (spread * spread)
		if end[s] >= b.Q025[last] && end[s] <= b.Q975[last] {
			t.Inside++
		}
		t.Errors[0] += math.Abs(miss) / 3
		t.Errors[1] += math.Abs(math.Log(math.Max(end[s], 1e-9)/begin[s])) / 3
	}
	return t, math.Max(1, math.Sqrt(square/3))
}

// sentences say what the forecast is worth: what it says, what explains the choices, how it did on the past.
func (f *Forecast) sentences() []string {
	var out []string
	last := len(f.Links) - 1
	if f.Given {
		out = append(out, fmt.Sprintf("If it grows on as it did, today's leader goes from %s of all links to %s (%s to %s) by the time there are half as many links again; still leading: %.0f in 100.",
			standing.Percent(f.Today.Q50[0]), standing.Percent(f.Today.Q50[last]), standing.Percent(f.Today.Q025[last]), standing.Percent(f.Today.Q975[last]), 100*f.Same))
	}
	fitness := "less than 0.01"
	if f.Bits.Fitness >= 0.01 {
		fitness = fmt.Sprintf("%.2f", f.Bits.Fitness)
	}
	out = append(out, fmt.Sprintf("Lasting fitness explains %s bits of each of the last 30 %% of choices; recent activity, age and links already held explain %.2f.", fitness, math.Max(0, f.Bits.Rest)))
	if !f.Given {
		return append(out, "No forecast from this log: tested on its own past, the forecast missed by far more than it allowed for.")
	}
	d := fmt.Sprintf("Forecast tested on this log: made at 40 %%, true at 70 %%: %d of 3 inside.", f.Past.Inside)
	if f.Factor >= 1.05 {
		d += fmt.Sprintf(" The fan is widened %.1f times for it.", f.Factor)
	}
	if f.Past.Errors[0] > f.Past.Errors[1] {
		d += fmt.Sprintf(" It missed by more than shares that had simply stayed would have (%.0f %% against %.0f %%).", 100*f.Past.Errors[0], 100*f.Past.Errors[1])
	}
	return append(out, d)
}

// bands returns all bands of a forecast with the sizes they belong to.
func (f *Forecast) bands() map[*Band][]int32 {
	return map[*Band][]int32{&f.Leader: f.Links, &f.Ten: f.Links, &f.Today: f.Links, &f.Past.Leader: f.Past.Links}
}

func (b *Band) quantiles() [5]*[]float64 {
	return [5]*[]float64{&b.Q025, &b.Q10, &b.Q50, &b.Q90, &b.Q975}
}

// trimmed keeps four digits.
func (f *Forecast) trimmed() *Forecast {
	if f == nil {
		return nil
	}
	t := *f
	short := func(v []float64) []float64 {
		out := make([]float64, len(v))
		for i, x := range v {
			out[i] = sig(x)
		}
		return out
	}
	for b := range t.bands() {
		for _, q := range b.quantiles() {
			*q = short(*q)
		}
	}
	t.Past.Truth = short(t.Past.Truth)
	for _, v := range []*float64{&t.Bits.Fitness, &t.Bits.Rest, &t.Past.Errors[0], &t.Past.Errors[1], &t.Factor} {
		*v = sig(*v)
	}
	return &t
}

// verify refuses a forecast that could not have come from here.
func (f *Forecast) verify() error {
	if f == nil {
		return nil
	}
	bad := errors.New("its forecast has values out of range")
	share := func(v []float64, n int) bool {
		for _, x := range v {
			if !(x >= 0 && x <= 1) {
				return false
			}
		}
		return len(v) == n
	}
	for b, sizes := range f.bands() {
		if len(sizes) < 2 || len(sizes) > 100 || !slices.IsSorted(sizes) || sizes[0] < 1 {
			return bad
		}
		for _, q := range b.quantiles() {
			if !share(*q, len(sizes)) {
				return bad
			}
		}
	}
	if !share(f.Past.Truth, len(f.Past.Links)) || !(f.Same >= 0 && f.Same <= 1 && f.Half >= 0 && f.Half <= 1 && f.Factor >= 1 && f.Past.Inside >= 0 && f.Past.Inside <= 3) {
		return bad
	}
	return nil
}
