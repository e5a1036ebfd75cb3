package growth

import (
	"encoding/json"
	"flag"
	"os"
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
	// The first is the one pinned since the first version.
	if got["plain"] != "d8bb7181b7bd9f7ca9d4f6d597d73883ec76e3b4809c7e3d36b1da0b8bfb28f5" {
		t.Errorf("the plain network of 5,000 members is %s", got["plain"])
	}
}
