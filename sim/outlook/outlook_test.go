package outlook

import (
	"encoding/json"
	"reflect"
	"testing"

	"gonum.org/v1/gonum/stat"

	"preponder/sim/growth"
	"preponder/sim/internal/near"
	"preponder/sim/law"
)

func plan() Plan {
	return Plan{Growth: growth.Params{Law: law.Power{Theta: 1}, Sharpness: 3, Links: 2, Members: 300, Seed: 1}, Horizon: 1200, Limit: .2, About: "test"}
}

func quiet(float64) error { return nil }

func TestGatherOfPartsIsOneRun(t *testing.T) {
	p := plan()
	whole, err := New(p, 0, 24, quiet)
	if err != nil {
		t.Fatal(err)
	}
	var parts []*Part
	for _, r := range [][2]int{{16, 24}, {0, 5}, {5, 16}} {
		part, err := New(p, r[0], r[1], quiet)
		if err != nil {
			t.Fatal(err)
		}
		b, _ := json.Marshal(part) // as it travels
		back := &Part{}
		if err := json.Unmarshal(b, back); err != nil {
			t.Fatal(err)
		}
		parts = append(parts, back)
	}
	a, err := Gather([]*Part{whole})
	if err != nil {
		t.Fatal(err)
	}
	b, err := Gather(parts)
	if err != nil {
		t.Fatal(err)
	}
	if !reflect.DeepEqual(a, b) {
		t.Error("three parts give another outlook than one run")
	}
	if _, err := Gather(append(parts, parts[0])); err == nil {
		t.Error("a run counted twice")
	}
	other := *parts[0]
	other.Plan = "x"
	if _, err := Gather([]*Part{parts[1], &other}); err == nil {
		t.Error("parts of two plans gathered")
	}
}

func TestQuantilesAgainstGonum(t *testing.T) {
	v := []float64{1, 2, 4, 8, 16, 32, 64, 128, 256, 512, 1024}
	q := quantiles([]float64{1024, 1, 512, 2, 256, 4, 128, 8, 64, 16, 32})
	near.Rel(t, "median", q.Q50, 32, 1e-15)
	near.Rel(t, "tenth", q.Q10, 2, 1e-15)
	near.Rel(t, "mean", q.Mean, stat.Mean(v, nil), 1e-15)
	c := chance(0, 200)
	if c.Chance != 0 || c.Error < 0.006 {
		t.Errorf("no run in 200 is no certainty: %+v", c)
	}
}

func TestTodayAgrees(t *testing.T) {
	p := plan()
	part, err := New(p, 0, 2, quiet)
	if err != nil {
		t.Fatal(err)
	}
	for _, r := range part.Runs {
		near.Rel(t, "share today", r.Share[0], part.Today, 1e-12)
	}
	p.Horizon = 300
	if _, err := New(p, 0, 1, quiet); err == nil {
		t.Error("a horizon that lies behind is accepted")
	}
}
