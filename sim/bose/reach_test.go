package bose_test

import (
	"math"
	"testing"

	"preponder/sim/bose"
	"preponder/sim/growth"
	"preponder/sim/law"
)

// Grown networks lie between the two ways to let members begin, to a tenth; both tend to endless growth.
func TestReachAgainstGrownNetworks(t *testing.T) {
	rules := map[string]bose.Rule{"plain": {Links: 2}, "head start": {Links: 2, HeadStart: 3}, "open share": {Links: 2, OpenShare: .3}}
	for _, c := range []struct {
		l    law.Law
		beta float64
		rule string
	}{{law.Power{Theta: 1}, 3, "plain"}, {law.Power{Theta: 1}, 1, "plain"}, {law.Power{Theta: 2}, 5, "head start"}, {law.Power{Theta: .5}, 1, "open share"}, {law.Beta{A: 2, B: 4}, 2, "plain"}, {law.Uniform{}, 3, "plain"},
		{law.NewTiers([]float64{0, 1, 2}, []float64{.01, .4, .5}), 3, "plain"}} {
		rule := rules[c.rule]
		sol, err := bose.Solve(c.l, c.beta, rule)
		if err != nil {
			t.Fatal(err)
		}
		reach := bose.NewReach(c.l, c.beta, sol.BetaMu, rule)
		for _, n := range []int{300, 3000, 12000} {
			const runs = 16
			mean := 0.0
			for seed := range uint32(runs) {
				net, err := growth.Grow(growth.Params{Law: c.l, Sharpness: c.beta, Links: rule.Links, HeadStart: rule.HeadStart, OpenShare: rule.OpenShare, Members: n, Seed: seed}, func(float64) error { return nil })
				if err != nil {
					t.Fatal(err)
				}
				mean += math.Exp(sol.BetaMu-net.BetaMu(net.Received(n))) / runs
			}
			if low, high := reach.Pull(float64(n)); mean < low-.1 || mean > high+.1 {
				t.Errorf("%#v at %g, %s, %d members: pull %.3f of endless growth, expected between %.3f and %.3f", c.l, c.beta, c.rule, n, mean, low, high)
			}
		}
		if low, _ := reach.Pull(1e29); sol.Regime == bose.FitGetRich && low < .99 {
			t.Errorf("%#v at %g: the pull tends to %.3f of endless growth", c.l, c.beta, low)
		}
	}
}
