package outlook

import (
	"errors"
	"fmt"
	"math"
	"slices"

	"preponder/sim/share"
)

// Quantiles of one figure over the runs.
type Quantiles struct {
	Mean float64 `json:"mean"`
	Q025 float64 `json:"q025"`
	Q10  float64 `json:"q10"`
	Q50  float64 `json:"q50"`
	Q90  float64 `json:"q90"`
	Q975 float64 `json:"q975"`
}

// A Chance is a share of runs with its Monte Carlo error, one standard error of Agresti and Coull (1998): never 0, so
// that few runs are not taken for certainty.
type Chance struct {
	Chance float64 `json:"chance"`
	Error  float64 `json:"error"`
}

// Past is the chance of passing the limit.
type Past struct {
	Limit float64 `json:"limit"`
	Chance
}

// AtSize are the quantiles of the leader's share at one size.
type AtSize struct {
	Members int32 `json:"members"`
	Quantiles
}

// An Outlook is what all runs say together.
type Outlook struct {
	Runs        int       `json:"runs"`
	Members     int       `json:"members"`
	Horizon     int       `json:"horizon"`
	Today       float64   `json:"today"`
	LeaderShare Quantiles `json:"leaderShare"`
	Top4        Quantiles `json:"top4"`
	HHI         Quantiles `json:"hhi"`
	Past        Past      `json:"past"`
	SameLeader  Chance    `json:"sameLeader"`
	BySize      []AtSize  `json:"bySize"`
}

// Gather merges parts of one plan by run number.
func Gather(parts []*Part) (*Outlook, error) {
	if len(parts) == 0 {
		return nil, errors.New("there is no part to gather")
	}
	for _, p := range parts {
		if p == nil {
			return nil, errors.New("a part is empty")
		}
	}
	first := parts[0]
	var runs []Run
	for _, p := range parts {
		if p.Plan != first.Plan {
			return nil, errors.New("the parts come from different cases or settings; gather parts of one outlook only")
		}
		for _, r := range p.Runs {
			if len(r.Share) != len(first.Sizes) {
				return nil, fmt.Errorf("run %d is damaged: it has %d sizes instead of %d", r.Number, len(r.Share), len(first.Sizes))
			}
		}
		runs = append(runs, p.Runs...)
	}
	slices.SortStableFunc(runs, func(a, b Run) int { return a.Number - b.Number })
	for i := 1; i < len(runs); i++ {
		if runs[i].Number == runs[i-1].Number {
			return nil, fmt.Errorf("run %d is in more than one part", runs[i].Number)
		}
	}
	if len(runs) == 0 {
		return nil, errors.New("the parts hold no run")
	}
	o := &Outlook{Runs: len(runs), Members: first.Members, Horizon: first.Horizon, Today: first.Today}
	column := func(f func(r Run) float64) []float64 {
		v := make([]float64, len(runs))
		for i, r := range runs {
			v[i] = f(r)
		}
		return v
	}
	for i, n := range first.Sizes {
		o.BySize = append(o.BySize, AtSize{n, quantiles(column(func(r Run) float64 { return r.Share[i] }))})
	}
	o.LeaderShare = o.BySize[len(o.BySize)-1].Quantiles
	o.Top4 = quantiles(column(func(r Run) float64 { return r.Top4 }))
	o.HHI = quantiles(column(func(r Run) float64 { return r.HHI }))
	past, same := 0, 0
	for _, r := range runs {
		if r.Share[len(r.Share)-1] > first.Limit {
			past++
		}
		if r.Same {
			same++
		}
	}
	o.Past = Past{first.Limit, chance(past, len(runs))}
	o.SameLeader = chance(same, len(runs))
	return o, nil
}

func chance(k, n int) Chance {
	p := float64(k) / float64(n)
	smooth := (float64(k) + 2) / (float64(n) + 4)
	return Chance{p, math.Sqrt(smooth * (1 - smooth) / (float64(n) + 4))}
}

func quantiles(v []float64) Quantiles {
	s := slices.Sorted(slices.Values(v))
	sum := 0.0
	for _, x := range s {
		sum += x
	}
	at := func(p float64) float64 { return share.Quantile(s, p) }
	return Quantiles{sum / float64(len(s)), at(.025), at(.1), at(.5), at(.9), at(.975)}
}
