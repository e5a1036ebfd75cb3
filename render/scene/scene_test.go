package scene

import (
	"math"
	"testing"
)

// grown is a small network: member v links to one of the first nine and to 0.
func grown(n int) Columns {
	c := Columns{From: 1, Before: []int32{0}}
	for v := range n {
		if v > 0 {
			c.Targets = append(c.Targets, int32(v%min(v, 9)), 0)
		}
		c.Before = append(c.Before, int32(len(c.Targets)))
		c.Rank = append(c.Rank, float32(hash(uint64(v)+5)))
		c.Pull = append(c.Pull, float32(2*hash(uint64(v)+9)-1))
	}
	return c
}

func desk(n int) View {
	return View{Width: 1000, Height: 800, Scale: 1, Members: n, Strokes: 6000, Following: -1, Zoom: 1}
}

func TestRadiusIsThatOfTheSpecification(t *testing.T) {
	// Table of the visual specification: r/R at q = 1e-4, 1e-3, 0.01, 0.1, 0.5.
	for q, want := range map[float64]float64{1e-4: 0.110, 1e-3: 0.166, 0.01: 0.259, 0.1: 0.452, 0.5: 0.765, 1: 1} {
		if got := Radius(q); math.Abs(got-want) > 0.001 {
			t.Errorf("q = %g: %g, want %g", q, got, want)
		}
	}
}

func TestEveryMemberIsDrawnOnceInsideTheDisc(t *testing.T) {
	for _, n := range []int{1, 2, 50, 3000, 20000} {
		for _, arrival := range []float64{0, 0.5, 1} {
			v := desk(n)
			v.Arrival = arrival
			p := Arrange(grown(n), v)
			if len(p.Discs)+len(p.Grain) != n {
				t.Errorf("%d members: %d discs and %d grains", n, len(p.Discs), len(p.Grain))
			}
			for _, d := range p.Discs {
				if math.Hypot(d.X-p.CX, d.Y-p.CY) > p.R*1.0001 {
					t.Errorf("member %d lies outside", d.Member)
				}
			}
			if n > 1 && (p.Leader != len(p.Discs)-1 || p.Discs[p.Leader].Member != 0) {
				t.Error("the leader is not drawn last")
			}
		}
	}
}

func TestLargeMembersDoNotTouch(t *testing.T) {
	p := Arrange(grown(4000), desk(4000))
	var large []Disc
	for _, d := range p.Discs {
		if d.Share >= seatShare {
			large = append(large, d)
		}
	}
	if len(large) < 3 {
		t.Fatalf("%d large members", len(large))
	}
	for i, a := range large {
		for _, b := range large[:i] {
			if gap := math.Hypot(a.X-b.X, a.Y-b.Y) - a.R - b.R; gap < 4.99 {
				t.Errorf("%d and %d are %.1f apart", a.Member, b.Member, gap)
			}
		}
	}
}

func TestStrokesAreNested(t *testing.T) {
	c := grown(5000)
	few, many := desk(5000), desk(5000)
	few.Strokes, many.Strokes = 500, 3000
	seen := map[[2]float64]bool{}
	for _, s := range Arrange(c, many).Strokes {
		seen[[2]float64{math.Round(s.X0), math.Round(s.Y0)}] = true
	}
	for _, s := range Arrange(c, few).Strokes {
		if !seen[[2]float64{math.Round(s.X0), math.Round(s.Y0)}] {
			t.Fatal("a stroke of the small budget is missing from the large one")
		}
	}
}

func TestPickIsTheInverseOfPlace(t *testing.T) {
	c := grown(3000)
	for _, zoom := range []float64{1, 4} {
		v := desk(3000)
		v.Zoom, v.PanX = zoom, 0.1
		p := Arrange(c, v)
		for _, d := range p.Discs[len(p.Discs)-5:] {
			if got := Pick(p, d.X, d.Y); got != int(d.Member) {
				t.Errorf("zoom %g: picked %d on member %d", zoom, got, d.Member)
			}
			if x, y, _ := Place(c, v, int(d.Member)); math.Hypot(x-d.X, y-d.Y) > 1e-9 {
				t.Errorf("member %d has two places", d.Member)
			}
		}
		if Pick(p, -50000, -50000) != -1 {
			t.Error("picked where nothing is")
		}
	}
}
