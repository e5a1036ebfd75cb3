// Package outlook grows a network forward many times and says where its leader's share may go. Runs are numbered and
// keyed, so any range can be made anywhere and parts are merged by number.
package outlook

import (
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"fmt"

	"preponder/sim/evidence"
	"preponder/sim/growth"
	"preponder/sim/internal/exact"
	"preponder/sim/share"
)

// sizes is how many sizes between now and the horizon are kept of a run.
const sizes = 25

// A Plan is what to grow: the network of Growth as it stands at its size, then on to Horizon, each run by itself. With
// evidence every run draws law and fitness from what the log leaves open.
type Plan struct {
	Growth   growth.Params
	Evidence *evidence.Condensed // nil: the network of Growth itself
	Horizon  int
	Limit    float64 // share of all links
	About    string  // stands for everything that decides the runs
}

// A Run is where one run ended. Shares along the common sizes.
type Run struct {
	Number int       `json:"run"`
	Share  []float64 `json:"share"`
	Top4   float64   `json:"top4"`
	HHI    float64   `json:"hhi"`
	Same   bool      `json:"same"`   // today's leader still leads at the horizon
	Leader float64   `json:"leader"` // today's leader's own share then
}

// A Part is a range of runs of one plan.
type Part struct {
	Plan    string  `json:"plan"` // of what: parts of one plan agree
	Members int     `json:"members"`
	Horizon int     `json:"horizon"`
	Limit   float64 `json:"limit"`
	Sizes   []int32 `json:"sizes"`
	Today   float64 `json:"today"` // leader's share now
	Runs    []Run   `json:"runs"`
}

// New makes the part with runs from..to-1. step is called after each run with the share done.
func New(p Plan, from, to int, step func(done float64) error) (*Part, error) {
	members := p.Growth.Members
	if p.Evidence != nil {
		members = p.Evidence.Members
	}
	if p.Horizon <= members {
		return nil, fmt.Errorf("the outlook goes to %d members, but the network has %d already; plan for more", p.Horizon, members)
	}
	part := &Part{Plan: p.id(), Members: members, Horizon: p.Horizon, Limit: p.Limit, Sizes: share.Sizes(members, p.Horizon, sizes)}
	base := p.Growth.Start
	if p.Evidence == nil {
		n, err := growth.Grow(p.Growth, step0(step))
		if err != nil {
			return nil, err
		}
		base = &growth.Start{Energy: n.Energy, Received: n.Received(members)}
		if p.Growth.Timed() {
			base.History = n
		}
	} else {
		base = p.Evidence.Start(p.Evidence.LawOf(0).Make(), p.Growth.Seed, 0)
	}
	now := share.Of(base.Received)
	part.Today = now.Share
	for k := from; k < to; k++ {
		r, err := p.run(k, base, now.Leader, part.Sizes, func(done float64) error {
			return step((float64(k-from) + done) / float64(to-from))
		})
		if err != nil {
			return nil, err
		}
		part.Runs = append(part.Runs, r)
	}
	return part, nil
}

func step0(step func(float64) error) func(float64) error {
	return func(float64) error { return step(0) }
}

// run grows the k-th network from the base.
func (p Plan) run(k int, base *growth.Start, leader int, at []int32, step func(float64) error) (Run, error) {
	g := p.Growth
	g.Members, g.Start = p.Horizon, base
	g.Seed = uint32(exact.Bits(exact.Key(p.Growth.Seed, exact.Extra), uint64(k), 7))
	if p.Evidence != nil {
		g.Law = p.Evidence.LawOf(k + 1).Make()
		g.Start = p.Evidence.Start(g.Law, p.Growth.Seed, k+1)
	}
	n, err := growth.Grow(g, step)
	if err != nil {
		return Run{}, err
	}
	path := share.Along(n.Targets, n.LinksBefore, int(at[0]), p.Horizon, len(at), []int32{int32(leader)})
	last := len(path.Members) - 1
	return Run{Number: k, Share: path.Share, Top4: path.Top4[last], HHI: path.HHI[last], Same: int(path.Leader[last]) == leader, Leader: path.Followed[0][last]}, nil
}

// id names the plan by its content.
func (p Plan) id() string {
	b, err := json.Marshal([]any{p.About, p.Horizon})
	if err != nil {
		panic("outlook: " + err.Error())
	}
	sum := sha256.Sum256(b)
	return hex.EncodeToString(sum[:8])
}
