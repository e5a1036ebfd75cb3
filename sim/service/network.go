package service

import (
	"encoding/json"
	"fmt"
	"math"
	"sort"
	"strconv"

	"preponder/sim/bose"
	"preponder/sim/casebook"
	"preponder/sim/growth"
	"preponder/sim/law"
	"preponder/sim/share"
	"preponder/sim/standing"
	"preponder/sim/wire"
)

// An entryRequest asks about one entry of a casebook.
type entryRequest struct {
	Casebook json.RawMessage `json:"casebook"`
	Entry    int             `json:"entry"` // from 0
	Curves   bool            `json:"curves"`
	Reach    bool            `json:"reach"`   // also how far the planned size is from endless growth: some 20 ms
	Planned  int             `json:"planned"` // size to speak of, 0 = the horizon of the entry's outlook
	Columns  bool            `json:"columns"`
	Digest   bool            `json:"digest"`
}

func entryOf(p wire.Packet) (entryRequest, casebook.Casebook, error) {
	var ask entryRequest
	if err := json.Unmarshal(p.Body, &ask); err != nil {
		return ask, casebook.Casebook{}, err
	}
	c, err := casebook.Read(ask.Casebook)
	if err == nil && (ask.Entry < 0 || ask.Entry >= len(c.Entries)) {
		err = fmt.Errorf("there is no entry %d; the casebook has %d", ask.Entry+1, len(c.Entries))
	}
	return ask, c, err
}

// Solved is the standing of an entry in endless growth.
type Solved struct {
	Regime            bose.Regime      `json:"regime"`
	Reason            string           `json:"reason,omitempty"`
	Balance           wire.Num         `json:"balance"`
	GroundIntegral    wire.Num         `json:"groundIntegral"`
	Margin            wire.Num         `json:"margin"`
	Mu                wire.Num         `json:"mu"`
	BetaMu            wire.Num         `json:"betaMu"`
	Condensate        wire.Num         `json:"condensate"`
	LeaderExponent    wire.Num         `json:"leaderExponent"`
	Halving           wire.Num         `json:"halving"`
	CriticalSharpness wire.Num         `json:"criticalSharpness"`
	MeanFitness       wire.Num         `json:"meanFitness"`
	DegreeExponent    wire.Num         `json:"degreeExponent"`
	MuSlope           wire.Num         `json:"muSlope"` // d mu/d sharpness
	Edge              Edge             `json:"edge"`
	Errors            Errors           `json:"errors"`
	Records           *Records         `json:"records,omitempty"`
	Reach             *Reach           `json:"reach,omitempty"`
	Dissolve          Dissolve         `json:"dissolve"`
	Verdict           standing.Verdict `json:"verdict"`
	Curves            *Curves          `json:"curves,omitempty"`
}

// Edge is the leading term of the density at the ground level.
type Edge struct {
	Theta       wire.Num `json:"theta"`       // exponent; null where there is no ground level
	Uncertainty wire.Num `json:"uncertainty"` // of an exponent found numerically
	Atom        float64  `json:"atom"`        // share of members at the ground level itself
}

// Errors are estimated relative errors.
type Errors struct {
	GroundIntegral    wire.Num `json:"groundIntegral"`
	Mu                wire.Num `json:"mu"`
	CriticalSharpness wire.Num `json:"criticalSharpness"`
}

// Records is the fittest of today's members where there is no top fitness: log10 of its fitness over the middle one.
type Records struct {
	Members int     `json:"members"`
	Low     float64 `json:"low"`
	Mid     float64 `json:"mid"`
	High    float64 `json:"high"`
	Count   float64 `json:"count"`
}

// Reach is how far the planned size is from endless growth, as a share of the pull there, and the sizes between which it
// comes within 10 %; null past 1e30.
type Reach struct {
	Members int      `json:"members"`
	Low     float64  `json:"low"`
	High    float64  `json:"high"`
	Early   wire.Num `json:"early"`
	Late    wire.Num `json:"late"`
}

// Dissolve are the levers that alone dissolve a condensate.
type Dissolve struct {
	HeadStart wire.Num `json:"headStart"`
	OpenShare wire.Num `json:"openShare"`
}

// Curves for the page.
type Curves struct {
	Eps        []wire.Num `json:"eps"`
	Density    []wire.Num `json:"density"`
	Exponent   []wire.Num `json:"exponent"`
	Occupation []wire.Num `json:"occupation"`
	Pull       []wire.Num `json:"pull"`           // log10 of fitness over its mean
	Fitness    []wire.Num `json:"fitness"`        // exp(-beta eps), falling
	OfFitness  []wire.Num `json:"fitnessDensity"` // p/(beta fitness); both empty at sharpness 0
	Beta       []wire.Num `json:"beta"`
	BetaMu     []wire.Num `json:"betaMuOver"`
	Levels     []Level    `json:"levels"` // of a discrete law
}

// columns returns the curves as raw numbers, by the names they have in JSON.
func (c *Curves) columns() []wire.Column {
	var out []wire.Column
	for _, col := range []struct {
		name string
		v    []wire.Num
	}{{"eps", c.Eps}, {"density", c.Density}, {"exponent", c.Exponent}, {"occupation", c.Occupation}, {"pull", c.Pull}, {"fitness", c.Fitness}, {"fitnessDensity", c.OfFitness}, {"beta", c.Beta}, {"betaMuOver", c.BetaMu}} {
		f := make([]float32, len(col.v))
		for i, v := range col.v {
			f[i] = float32(v)
		}
		out = append(out, wire.Column{Name: col.name, Float32: f})
	}
	return out
}

// Level of a discrete law.
type Level struct {
	Eps     wire.Num `json:"eps"`
	Weight  wire.Num `json:"weight"`
	Fitness wire.Num `json:"fitness"`
	Pull    wire.Num `json:"pull"` // log10 of fitness over its mean
}

// solve answers with the standing of an entry.
func solve(_ *Engine, p wire.Packet, _ Step) (reply, error) {
	ask, c, err := entryOf(p)
	if err != nil {
		return reply{}, err
	}
	e := c.Entries[ask.Entry]
	l, beta := c.LawOf(ask.Entry)
	rule := bose.Rule{Links: e.Growth.Links, HeadStart: e.Growth.HeadStart, OpenShare: e.Growth.OpenShare}
	s, err := bose.Solve(l, beta, rule)
	if err != nil {
		return reply{}, err
	}
	facts := standing.Facts{Solution: s, Ceiling: e.Growth.Ceiling, Kernel: e.Growth.Kernel, Outside: outside(e.Growth), Distinct: e.Growth.Distinct, Links: e.Growth.Links, Late: e.Growth.LeversFrom, Planned: float64(e.Outlook.Horizon), Beta: beta}
	if ask.Planned > 0 {
		facts.Planned = float64(ask.Planned)
	}
	out := Solved{Balance: wire.Num(s.Balance), GroundIntegral: wire.Num(s.GroundIntegral), Margin: wire.Num(s.Margin),
		Mu: wire.Num(s.Mu), BetaMu: wire.Num(s.BetaMu), Condensate: wire.Num(s.Condensate), LeaderExponent: wire.Num(s.LeaderExponent), Halving: wire.Num(s.Halving),
		CriticalSharpness: wire.Num(s.CriticalSharpness), MeanFitness: wire.Num(s.MeanFitness), DegreeExponent: wire.Num(s.DegreeExponent), MuSlope: wire.Num(s.MuSlope),
		Edge: edgeOf(l), Errors: Errors{wire.Num(s.Errors.GroundIntegral), wire.Num(s.Errors.Mu), wire.Num(s.Errors.CriticalSharpness)},
		Dissolve: Dissolve{wire.Num(s.DissolveHeadStart), wire.Num(s.DissolveOpenShare)}}
	switch {
	case s.Regime == bose.Records:
		top := bose.TopOf(l, float64(e.Growth.Members))
		facts.Top = &top
		out.Records = &Records{e.Growth.Members, -beta * top.High / math.Ln10, -beta * top.Mid / math.Ln10, -beta * top.Low / math.Ln10, top.Records}
	case ask.Reach && s.Regime != bose.Level && s.Balance > 0:
		r := bose.NewReach(l, beta, s.BetaMu, rule)
		facts.Reach = r
		low, high := r.Pull(facts.Planned)
		early, late := r.Within(0.1)
		out.Reach = &Reach{int(facts.Planned), low, high, wire.Num(early), wire.Num(late)}
	}
	v := standing.Describe(facts)
	out.Regime, out.Reason, out.Verdict = v.Regime, v.Reason, v
	r := reply{}
	if ask.Curves {
		out.Curves = curvesOf(l, beta, rule, s)
		if ask.Columns { // numbers as text would take longer than the solver
			r.columns = out.Curves.columns()
			out.Curves = &Curves{Levels: out.Curves.Levels}
		}
	}
	r.body = out
	return r, nil
}

// outside names the levers in force, but kernel and ceiling, that the theory does not cover.
func outside(g casebook.Growth) []string {
	var names []string
	for _, r := range []struct {
		on   bool
		name string
	}{{g.Fading > 0, "fading"}, {g.Idling > 0, "idling"}, {g.Levy.Rate > 0, "a levy"}, {g.Expiry > 0, "expiry"}} {
		if r.on {
			names = append(names, r.name)
		}
	}
	return names
}

func edgeOf(l law.Law) Edge {
	if low, _ := l.Support(); math.IsInf(low, -1) {
		return Edge{Theta: wire.Num(math.NaN()), Uncertainty: wire.Num(math.NaN())}
	}
	e := l.Edge()
	out := Edge{wire.Num(e.Theta), 0, e.Atom}
	if found, ok := l.(interface{ EdgeUncertainty() float64 }); ok {
		out.Uncertainty = wire.Num(found.EdgeUncertainty())
	}
	if e.Atom > 0 {
		out.Theta = wire.Num(math.NaN())
	}
	return out
}

func curvesOf(l law.Law, beta float64, rule bose.Rule, s bose.Solution) *Curves {
	c := bose.CurvesOf(l, beta, rule, s)
	out := &Curves{Eps: wire.Nums(c.Eps), Density: wire.Nums(c.Density), Exponent: wire.Nums(c.Exponent), Occupation: wire.Nums(c.Occupation), Beta: wire.Nums(c.Beta), BetaMu: wire.Nums(c.Mu), Levels: []Level{}}
	pull := func(e float64) wire.Num { return wire.Num((-beta*e - math.Log(s.MeanFitness)) / math.Ln10) }
	for _, e := range c.Eps {
		out.Pull = append(out.Pull, pull(e))
	}
	for i, e := range c.Eps {
		if f := math.Exp(-beta * e); f > 0 && beta > 0 && len(c.Density) > i {
			out.Fitness, out.OfFitness = append(out.Fitness, wire.Num(f)), append(out.OfFitness, wire.Num(c.Density[i]/(beta*f)))
		}
	}
	if levels, ok := l.(law.Leveled); ok {
		energy, weight := levels.Levels()
		for i := range energy {
			out.Levels = append(out.Levels, Level{wire.Num(energy[i]), wire.Num(weight[i]), wire.Num(math.Exp(-beta * energy[i])), pull(energy[i])})
		}
	}
	return out
}

// Grown is a network in figures.
type Grown struct {
	Members     int           `json:"members"`
	From        int           `json:"from"`
	Links       int           `json:"links"`
	Leader      Leader        `json:"leader"`
	Top4        float64       `json:"top4"`
	HHI         float64       `json:"hhi"`
	Gini        float64       `json:"gini"`
	LeadChanges int           `json:"leadChanges"`
	MuAtSize    wire.Num      `json:"muAtSize"`
	BetaMu      wire.Num      `json:"betaMuAtSize"`
	Digest      string        `json:"digest,omitempty"`
	Ranking     []Standing    `json:"ranking,omitempty"`
	Reigns      []share.Reign `json:"reigns,omitempty"`
	Path        *Path         `json:"path,omitempty"`
	Tail        *Tail         `json:"tail,omitempty"`
	Counted     []Counted     `json:"counted,omitempty"`
}

// Leader of a network.
type Leader struct {
	ID      string  `json:"id"`
	Share   float64 `json:"share"`
	Energy  float64 `json:"energy"`
	Fitness float64 `json:"fitness"` // exp(-sharpness energy)
	Arrived int     `json:"arrived"`
}

// Standing of one of the largest members.
type Standing struct {
	ID     string  `json:"id"`
	Member int32   `json:"member"`
	Share  float64 `json:"share"`
	Energy float64 `json:"energy"`
}

// Path is shares over size; Followed those of the members in Ranking.
type Path struct {
	Members  []int32     `json:"members"`
	Leader   []int32     `json:"leader"`
	Share    []float64   `json:"share"`
	Top4     []float64   `json:"top4"`
	HHI      []float64   `json:"hhi"`
	Gini     []float64   `json:"gini"`
	BetaMu   []wire.Num  `json:"betaMu"` // null where the theory does not cover the rule
	Followed [][]float64 `json:"followed"`
	Levels   [][]float64 `json:"levels"` // share of all links held within each of Bands
}

// Bands are the shares of the law, from the fittest on, within which links are counted over size.
var Bands = []float64{0.001, 0.01, 0.1, 0.5}

// levels returns the share of all links that members within each of Bands hold at these sizes, ascending.
func levels(n *growth.Network, sizes []int32) [][]float64 {
	band := make([]uint8, n.Members)
	for j := range band {
		band[j] = uint8(sort.SearchFloat64s(Bands, n.Rank(j)))
	}
	held := make([]int, len(Bands)+1)
	out := make([][]float64, len(Bands))
	at := 0
	for _, size := range sizes {
		end := n.LinksBefore(int(size))
		for _, j := range n.Targets[at:end] {
			held[band[j]]++
		}
		at = end
		within := 0
		for b := range out {
			within += held[b]
			out[b] = append(out[b], float64(within)/float64(max(end, 1)))
		}
	}
	return out
}

// columns returns the path as raw numbers, by the names they have in JSON.
func (p Path) columns() []wire.Column {
	short := func(name string, v []float64) wire.Column {
		f := make([]float32, len(v))
		for i, x := range v {
			f[i] = float32(x)
		}
		return wire.Column{Name: "path." + name, Float32: f}
	}
	mu := make([]float64, len(p.BetaMu))
	for i, v := range p.BetaMu {
		mu[i] = float64(v)
	}
	out := []wire.Column{{Name: "path.members", Int32: p.Members}, {Name: "path.leader", Int32: p.Leader}, short("share", p.Share), short("top4", p.Top4), short("hhi", p.HHI), short("gini", p.Gini), short("betaMu", mu)}
	for i, f := range p.Followed {
		out = append(out, short("followed."+strconv.Itoa(i), f))
	}
	for i, f := range p.Levels {
		out = append(out, short("levels."+strconv.Itoa(i), f))
	}
	return out
}

// Tail is the share of members that hold at least so many links.
type Tail struct {
	Links []int32   `json:"links"`
	Share []float64 `json:"share"`
}

// Counted is the occupation counted among members of like energy, with its standard error.
type Counted struct {
	Eps     float64 `json:"eps"`
	N       float64 `json:"n"`
	Error   float64 `json:"error"`
	Members int     `json:"members"`
}

const pathPoints, tailPoints, followed = 200, 60, 5

// grow answers with the network of an entry; its columns go to the stage.
func grow(e *Engine, p wire.Packet, step Step) (reply, error) {
	ask, c, err := entryOf(p)
	if err != nil {
		return reply{}, err
	}
	n, err := growth.Grow(c.Params(ask.Entry), func(done float64) error { return step(0.9*done, "growing the network") })
	if err != nil {
		return reply{}, err
	}
	received := n.Received(n.Members)
	s := share.Of(received)
	g := c.Entries[ask.Entry].Growth
	covered := g.Kernel == 1 && len(outside(g)) == 0
	z := n.Pulls()
	betaMu := math.NaN() // outside the theory it would not be the pull newcomers feel
	if covered {
		betaMu = z.BetaMu(received)
	}
	name := namer(c, n.From())
	e.network, e.received, e.name = n, received, name
	out := Grown{Members: n.Members, From: n.From(), Links: len(n.Targets), Top4: s.Top4, HHI: s.HHI, Gini: s.Gini, BetaMu: wire.Num(betaMu), MuAtSize: wire.Num(betaMu / n.Sharpness),
		Leader: Leader{name(s.Leader), s.Share, n.Energy[s.Leader], math.Exp(-n.Sharpness * n.Energy[s.Leader]), s.Leader}}
	path := share.Along(n.Targets, n.LinksBefore, n.From(), n.Members, pathPoints, s.Ranking[:min(followed, len(s.Ranking))])
	out.LeadChanges = path.LeadChanges()
	if ask.Digest {
		out.Digest = n.Digest()
	}
	r := reply{}
	if ask.Columns {
		for _, j := range s.Ranking {
			out.Ranking = append(out.Ranking, Standing{name(int(j)), j, float64(received[j]) / float64(s.Links), n.Energy[j]})
		}
		out.Reigns = path.Reigns
		full := Path{path.Members, path.Leader, path.Share, path.Top4, path.HHI, path.Gini, make([]wire.Num, len(path.Members)), path.Followed, levels(n, path.Members)}
		for i := range full.BetaMu {
			full.BetaMu[i] = wire.Num(math.NaN())
		}
		if covered {
			full.BetaMu = wire.Nums(z.Along(path.Members))
		}
		t := share.TailOf(received, tailPoints)
		out.Tail = &Tail{t.Links, t.Share}
		out.Counted = []Counted{}
		if covered {
			out.Counted = counted(n, received)
		}
		r.columns = append(columns(n, z), full.columns()...)
		out.Path = &Path{}
	}
	r.body = out
	return r, nil
}

// namer names members: those of evidence by their ids, others M and their number.
func namer(c casebook.Casebook, from int) func(j int) string {
	return func(j int) string {
		if from > 1 && c.Evidence != nil {
			if j < len(c.Evidence.Top) {
				return c.Evidence.Top[j].ID
			}
			if j < from {
				return fmt.Sprintf("one of %d", from)
			}
		}
		return "M" + strconv.Itoa(j)
	}
}

// columns are what the stage draws: targets, rank in the law, log10 of the pull over its mean; links before each member
// where they are no plain multiple.
func columns(n *growth.Network, z growth.Pulls) []wire.Column {
	shift := -z.LogMean()
	pull, rank := make([]float32, n.Members), make([]float32, n.Members)
	for j, e := range n.Energy {
		rank[j] = float32(n.Rank(j))
		pull[j] = float32((shift - n.Sharpness*e) / math.Ln10)
	}
	before := make([]int32, n.Members+1)
	for v := range before {
		before[v] = int32(n.LinksBefore(v))
	}
	return []wire.Column{{Name: "targets", Int32: n.Targets}, {Name: "before", Int32: before}, {Name: "rank", Float32: rank}, {Name: "pull", Float32: pull}}
}

// Columns returns what there is to draw of the network grown last, and the members it began with; nil before any.
func (e *Engine) Columns() ([]wire.Column, int) {
	if e.network == nil {
		return nil, 0
	}
	return columns(e.network, e.network.Pulls()), e.network.From()
}

// edges of the bins in which links are counted: shares of the law from the fittest on.
var edges = []float64{0, .001, .003, .01, .02, .04, .07, .11, .16, .22, .3, .4, .5, .6, .7, .8, .9, 1}

// binFrom is the bin of every thousandth, of which the edges are whole multiples.
var binFrom = func() (b [1001]uint8) {
	k := 0
	for i := range b {
		for k+2 < len(edges) && float64(i) >= 1000*edges[k+1]-0.5 {
			k++
		}
		b[i] = uint8(k)
	}
	return b
}()

func binOf(rank float64) int { return int(binFrom[int(1000*rank)]) }

// counted returns the occupation of each bin of energy,
//
//	n = (mean links received - m r) / (m (1 + r) + a).
func counted(n *growth.Network, received []int32) []Counted {
	type bin struct{ members, links, square, eps float64 }
	bins := make([]bin, len(edges)-1)
	for j, d := range received {
		b := &bins[binOf(n.Rank(j))]
		b.members++
		b.links += float64(d)
		b.square += float64(d) * float64(d)
		b.eps += n.Energy[j]
	}
	unit := n.Links*(1+n.OpenShare) + n.HeadStart
	out := []Counted{}
	for _, b := range bins {
		if b.members == 0 {
			continue
		}
		mean := b.links / b.members
		spread := math.Sqrt(math.Max(0, b.square/b.members-mean*mean) / b.members)
		out = append(out, Counted{b.eps / b.members, (mean - n.Links*n.OpenShare) / unit, spread / unit, int(b.members)})
	}
	return out
}

// member answers with what is known of one member of the network grown last, among its first "size" members.
func member(e *Engine, p wire.Packet, _ Step) (reply, error) {
	var ask struct {
		Member, Size int
	}
	if err := json.Unmarshal(p.Body, &ask); err != nil {
		return reply{}, err
	}
	n := e.network
	if n == nil || ask.Member < 0 || ask.Size > n.Members || ask.Member >= ask.Size {
		return reply{}, fmt.Errorf("there is no member %d in a network of %d", ask.Member, ask.Size)
	}
	received := n.Received(ask.Size)
	rank, links := 1, n.LinksBefore(ask.Size)
	mean := 0.0
	for j, d := range received {
		if d > received[ask.Member] || (d == received[ask.Member] && j < ask.Member) {
			rank++
		}
		mean += math.Exp(-n.Sharpness * (n.Energy[j] - n.Energy[ask.Member]))
	}
	chose := []int32{}
	if ask.Member >= n.From() || n.From() == 1 {
		chose = n.Targets[n.LinksBefore(ask.Member):n.LinksBefore(ask.Member+1)]
	}
	return reply{body: map[string]any{
		"links": received[ask.Member], "share": float64(received[ask.Member]) / math.Max(1, float64(links)), "rank": rank, "of": ask.Size,
		"energy": n.Energy[ask.Member], "within": n.Rank(ask.Member), "pull": float64(ask.Size) / mean, "chose": chose, "arrived": ask.Member,
	}}, nil
}
