package growth

import (
	"encoding/json"
	"flag"
	"fmt"
	"os"
	"slices"
	"testing"

	"preponder/sim/law"
)

var write = flag.Bool("write", false, "write the digests anew")

// digestCases are the networks whose digests are pinned in testdata/digests.json: every draw and every lever. The page
// tests grow them in the browser, the build for arm64 under an emulator; all must agree to the last bit.
func digestCases(t *testing.T) map[string]Params {
	drawn, err := law.NewDrawn([]law.Knot{{Eps: 0, Density: 0}, {Eps: .2, Density: .8}, {Eps: .4, Density: .1}, {Eps: .8, Density: 2}, {Eps: 1.3, Density: 0}})
	if err != nil {
		t.Fatal(err)
	}
	formula, err := law.NewFormula("e^1.5*(1.2+sin(5*e))*exp(-e)", 2)
	if err != nil {
		t.Fatal(err)
	}
	cases := map[string]Params{
		"plain":       {Law: law.Power{Theta: 1}, Sharpness: 3},
		"beta":        {Law: law.Beta{A: 2, B: 1.5}, Sharpness: 2},
		"gamma":       {Law: law.Gamma{Shape: .7, Scale: 1}, Sharpness: 2},
		"lognormal":   {Law: law.Lognormal{Sigma: 1}, Sharpness: 1},
		"tiers":       {Law: law.NewTiers([]float64{0, .5, 2}, []float64{.1, .3, .6}), Sharpness: 3},
		"drawn":       {Law: drawn, Sharpness: 3},
		"formula":     {Law: formula, Sharpness: 3},
		"levers":      {Law: law.Power{Theta: 1}, Sharpness: 3, HeadStart: .5, OpenShare: .2, Distinct: true, Ceiling: .1},
		"sharp":       {Law: law.Power{Theta: 1}, Sharpness: 1e6, Ceiling: .2},
		"levy":        {Law: law.Uniform{Low: .1}, Sharpness: 5, LevyAbove: .05, LevyRate: .7, Expiry: 1500},
		"kernel":      {Law: law.Power{Theta: .5}, Sharpness: 2, Kernel: 1.15},
		"activity":    {Law: law.Power{Theta: 1}, Sharpness: 2, Fading: .3, Idling: .9},
		"levers late": {Law: law.Power{Theta: 1}, Sharpness: 3, HeadStart: 6, Kernel: .8, LeversFrom: 2000},
	}
	for name, p := range cases {
		p.Links, p.Members, p.Seed = 2, 5000, 1
		cases[name] = p
	}
	// Side by side, with tickets that are no whole numbers.
	cases["parts"] = Params{Law: law.Power{Theta: .7}, Sharpness: 3, Links: 2.3, HeadStart: .37, OpenShare: .15, Members: 20000, Seed: 2}
	return cases
}

func TestDigestsArePinned(t *testing.T) {
	got := map[string]string{}
	for name, p := range digestCases(t) {
		got[name] = grow(t, p).Digest()
	}
	const file = "testdata/digests.json"
	if *write {
		b, err := json.MarshalIndent(got, "", " ")
		if err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(file, append(b, '\n'), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	b, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	want := map[string]string{}
	if err := json.Unmarshal(b, &want); err != nil {
		t.Fatal(err)
	}
	for name := range want {
		if got[name] != want[name] {
			t.Errorf("%s: digest %s, pinned %s", name, got[name], want[name])
		}
	}
	if len(got) != len(want) {
		t.Errorf("%d cases, %d pinned", len(got), len(want))
	}
}

// Drawn one by one, side by side and on several processors, networks are the same to the last link, also where they begin
// from another one or where a lever comes late.
func TestSideBySide(t *testing.T) {
	cases := digestCases(t)
	begun := grow(t, Params{Law: law.Uniform{}, Sharpness: 2, Links: 2, Members: 3000, Seed: 9})
	for _, p := range []Params{
		{Law: law.Uniform{}, Sharpness: 2, Links: 1.7, Members: 60000, Seed: 10, Start: &Start{Energy: begun.Energy, Received: begun.Received(3000)}},
		{Law: law.Power{Theta: 1}, Sharpness: 3, Links: 2, Members: 120000, Seed: 4}, {Law: law.Power{Theta: 0.3}, Sharpness: 20, Links: 3, HeadStart: 0.7, Members: 90000, Seed: 5},
		{Law: law.Uniform{}, Sharpness: 1, Links: 1.4, OpenShare: 0.2, Members: 90000, Seed: 6}, {Law: law.Power{Theta: 1}, Sharpness: 60, Links: 64, Members: 5000, Seed: 7},
		{Law: law.Gamma{Shape: 2, Scale: 1}, Sharpness: 9, Links: 2, Members: 40000, Seed: 8, HeadStart: 3, LeversFrom: 35000},
	} {
		cases[fmt.Sprintf("%T %g %g", p.Law, p.Sharpness, p.Links)] = p
	}
	for name, p := range cases {
		alone, err := growBy(p, nil, 0)
		if err != nil {
			t.Fatal(err)
		}
		for workers := 1; workers <= 3; workers++ {
			together, err := growBy(p, nil, workers)
			if err != nil {
				t.Fatal(err)
			}
			if alone.Digest() != together.Digest() || !slices.Equal(alone.Energy, together.Energy) || !slices.Equal(alone.first, together.first) {
				t.Errorf("%s: %d workers grow another network than one by one", name, workers)
			}
		}
		if p.Members > 3000 && p.LeversFrom == 0 { // a network holds every smaller one
			p.Members = 2 * p.Members / 3
			smaller, err := growBy(p, nil, 2)
			if err != nil {
				t.Fatal(err)
			}
			if !slices.Equal(smaller.Targets, alone.Targets[:len(smaller.Targets)]) {
				t.Errorf("%s: the network of %d members is not held by the larger one", name, p.Members)
			}
		}
	}
}
