package scene

// Budgets of strokes: at leisure, on a phone, and while something moves.
const Full, Small, Quick = 6000, 2500, 1200

// Shot says how a picture was painted elsewhere, and what there is to tell of it.
type Shot struct {
	View  View   `json:"view"`
	Theme string `json:"theme"`
	Told  Told   `json:"told"`
}

// Told is what the page needs to lay its labels over a picture, in CSS pixels.
type Told struct {
	CX           float64   `json:"cx"`
	CY           float64   `json:"cy"`
	R            float64   `json:"r"`
	Members      int       `json:"members"`
	Links        int       `json:"links"`
	OneStrokeFor float64   `json:"oneStrokeFor"`
	Rings        []float64 `json:"rings"`
	Leader       *Spot     `json:"leader,omitempty"`
	Next         *Spot     `json:"next,omitempty"`
	Label        *Point    `json:"label,omitempty"`
	Capped       []int32   `json:"capped"`
}

// Spot is where a member lies.
type Spot struct {
	Member int32   `json:"member"`
	Share  float64 `json:"share"`
	X      float64 `json:"x"`
	Y      float64 `json:"y"`
	R      float64 `json:"r"`
}

// Point is a place.
type Point struct {
	X float64 `json:"x"`
	Y float64 `json:"y"`
}

// Tell returns what there is to tell of a picture of v.
func (p Picture) Tell(v View) Told {
	s := v.Scale
	t := Told{CX: p.CX / s, CY: p.CY / s, R: p.R / s, Members: v.Members, Links: p.Links, OneStrokeFor: p.OneStrokeFor, Capped: []int32{}}
	for _, r := range p.Rings {
		t.Rings = append(t.Rings, r/s)
	}
	spot := func(d Disc) *Spot { return &Spot{d.Member, d.Share, d.X / s, d.Y / s, d.R / s} }
	if p.Leader >= 0 {
		t.Leader = spot(p.Discs[p.Leader])
		t.Label = &Point{p.Label.X / s, p.Label.Y / s}
		if p.Leader > 0 {
			t.Next = spot(p.Discs[p.Leader-1])
		}
	}
	for _, d := range p.Discs {
		if d.Capped {
			t.Capped = append(t.Capped, d.Member)
		}
	}
	return t
}
