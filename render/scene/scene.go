// Package scene arranges a network as the level disc: plain values in, plain shapes out. It draws nothing and knows no
// engine.
//
// A member lies at angle i pi (3 - sqrt 5) - pi/2 and radius
//
//	r = R sqrt(0.7 q + 0.3 q^0.35)
//
// where q is the share of the law that is fitter (levels) or the share of members that came earlier (arrivals). The crowd
// is nearly even, the middle open, and a change of arrangement slides dots along their own ray.
package scene

import "math"

// Columns are a network as the engine sends it.
type Columns struct {
	Targets []int32   // of each link
	Before  []int32   // links before each member, and all of them at the end
	Rank    []float32 // share of the law fitter than the member
	Pull    []float32 // log10 of its pull over the mean
	From    int       // members the growth began with; links among them have no known chooser
}

// Members returns how many members the columns hold.
func (c Columns) Members() int { return len(c.Rank) }

// A View says what is wanted of them.
type View struct {
	Width, Height float64 // pixels
	Scale         float64 // pixels per CSS pixel
	Members       int     // how much of the growth
	Arrival       float64 // 0 levels, 1 arrivals, between: on the way
	Strokes       int     // budget
	Zoom          float64 // 1 or more
	PanX, PanY    float64 // of the disc's centre, in its radii
	Ceiling       float64 // 0 = none
	Following     int     // member followed, -1 = none
	Bare          bool    // no room for rulers: small pictures
	Label         float64 // size of the leader's plate, 1 on a desk
}

// A Disc is a member with a dot of its own.
type Disc struct {
	Member  int32
	X, Y, R float64
	Tone    float64 // 0 strong to 1 weak
	Share   float64
	Leader  bool
	Capped  bool
	Faint   bool // no link received
}

// A Stroke is ink between two points, tapering in width, in the colour of the member it leads to.
type Stroke struct {
	X0, Y0, X1, Y1 float64
	W0, W1         float64
	Alpha          float64
	Tone           float64
	Ember          bool
	Ink            bool
}

// A Picture is everything there is to paint, in paint order by slice.
type Picture struct {
	CX, CY, R    float64
	Scale        float64
	Wash         []float64 // alpha of 20 rings, from the middle
	Grain        []Grain
	Rings        []float64 // radii of the level rings
	Under        []Stroke  // whole links of small networks
	Strokes      []Stroke
	Spokes       []Stroke
	Discs        []Disc // by share, smallest first, the leader last
	Leader       int    // index in Discs, -1 = none
	OneStrokeFor float64
	Links        int
	Label        Label
}

// Grain is a member of the crowd: one pixel.
type Grain struct {
	X, Y   float64
	Weight float64
	Tone   float64
}

// RingShares are the shares of the law the rings stand for.
var RingShares = []float64{0.0001, 0.001, 0.01, 0.1, 0.5}

// Radius returns r/R for q in [0, 1].
func Radius(q float64) float64 { return math.Sqrt(0.7*q + 0.3*math.Pow(q, 0.35)) }

// ranked are the radii of members by their ranks, which stay while anything but the seed changes.
var ranked struct{ rank, radius []float32 }

// radii returns Radius of each rank.
func radii(rank []float32) []float32 {
	same := 0
	for same < min(len(rank), len(ranked.rank)) && rank[same] == ranked.rank[same] {
		same++
	}
	if same < len(rank) {
		ranked.rank, ranked.radius = append(ranked.rank[:same], rank[same:]...), ranked.radius[:same]
		for _, q := range rank[same:] {
			ranked.radius = append(ranked.radius, float32(Radius(float64(q))))
		}
	}
	return ranked.radius[:len(rank)]
}

// golden is the angle between members one after another.
var golden = math.Pi * (3 - math.Sqrt(5))

// Tone returns the place on the colour ramp of a pull, given as log10 over the mean.
func Tone(pull float64) float64 {
	x := (pull + toneReach) * (toneSteps / (2 * toneReach))
	if !(x > 0) {
		return 1
	}
	return tones[min(int(x+0.5), toneSteps)]
}

// tones of pulls from -toneReach to toneReach, at whose ends the ramp has ended.
const toneReach, toneSteps = 2.5, 4096

var tones = func() (t [toneSteps + 1]float64) {
	for i := range t {
		pull := 2*toneReach*float64(i)/toneSteps - toneReach
		t[i] = max(0, min(1, 0.56-math.Copysign(0.37*math.Pow(math.Abs(pull), 0.6), pull)))
	}
	return t
}()

// A layout places members for one view.
type layout struct {
	c        Columns
	v        View
	n        int
	links    int
	received []int32
	radii    []float32 // of the levels
	at       []spot    // of every member, in radii of the disc from its middle
	cx, cy   float64
	r        float64 // radius of the disc with zoom
	dot      float64 // radius a share of 1 would have
	top      int32
}

type spot struct{ x, y float32 }

func newLayout(c Columns, v View) *layout {
	n := max(0, min(v.Members, c.Members()))
	l := &layout{c: c, v: v, n: n, top: -1, received: make([]int32, n), at: make([]spot, n), radii: radii(c.Rank[:n])}
	if n > 0 {
		l.links = int(c.Before[n])
	}
	for _, j := range c.Targets[:l.links] {
		l.received[j]++
	}
	turns := directions(n)
	for j, d := range l.received {
		if d > 0 && (l.top < 0 || d > l.received[l.top]) {
			l.top = int32(j)
		}
		r := float32(l.out(int32(j)))
		l.at[j] = spot{r * turns[j].x, r * turns[j].y}
	}
	r := Fit(v)
	z := max(1, v.Zoom)
	l.r = r * z
	l.cx = v.Width/2 + v.PanX*l.r
	l.cy = v.Height/2 + v.PanY*l.r
	if !v.Bare {
		l.cy -= 18 * v.Scale
		l.cx -= aside(v)
	}
	l.dot = r * math.Sqrt(0.03) * math.Sqrt(z)
	return l
}

// known directions of the members, the same in every view.
var known []spot

func directions(n int) []spot {
	for j := len(known); j < n; j++ {
		s, c := math.Sincos(angle(j))
		known = append(known, spot{float32(c), float32(s)})
	}
	return known
}

func angle(j int) float64 { return math.Mod(float64(j)*golden, 2*math.Pi) - math.Pi/2 }

// narrow is the width in CSS pixels below which figures stand above the picture, not beside it.
const narrow = 600

// aside is how far left of the middle the disc lies, to leave room for the figures on its right.
func aside(v View) float64 {
	if w := v.Width / v.Scale; w < narrow || v.Label > 1 {
		return 0
	}
	return 36 * v.Scale
}

// Fit returns the radius of the disc that fits the view.
func Fit(v View) float64 {
	if v.Bare {
		return max(4, min(v.Width, v.Height)/2-1)
	}
	w, h := v.Width/v.Scale, v.Height/v.Scale
	if w >= narrow {
		w -= 96
	}
	return max(20, min(h-62, w-24)/2-10) * v.Scale
}

func (l *layout) share(j int32) float64 {
	if l.links == 0 {
		return 0
	}
	return float64(l.received[j]) / float64(l.links)
}

// out returns how far out a member lies, in radii of the disc.
func (l *layout) out(j int32) float64 {
	a := l.v.Arrival
	r := 0.0
	if a < 1 {
		r = (1 - a) * float64(l.radii[j])
	}
	if a > 0 {
		r += a * Radius((float64(j)+0.5)/float64(l.n))
	}
	return r
}

// turn moves a member along its ring.
func (l *layout) turn(j int32, by float64) {
	r := l.out(j)
	s, c := math.Sincos(angle(int(j)) + by)
	l.at[j] = spot{float32(r * c), float32(r * s)}
}

func (l *layout) place(j int32) (x, y float64) {
	p := l.at[j]
	return l.cx + l.r*float64(p.x), l.cy + l.r*float64(p.y)
}

// radius returns the radius of a member's dot in pixels.
func (l *layout) radius(j int32) float64 {
	floor := 0.8
	switch {
	case l.n <= 1000:
		floor = 1.7
	case l.n <= 5000:
		floor = 1.0
	}
	if j == l.top {
		floor = 4
	}
	if l.v.Bare {
		floor = 0.8
	}
	if r := l.dot * math.Sqrt(l.share(j)); r > floor*l.v.Scale {
		return r
	}
	return floor * l.v.Scale
}

// hash is a small mixer for choices that must not beat against the golden angle.
func hash(x uint64) float64 {
	x *= 0x9E3779B97F4A7C15
	x ^= x >> 31
	x *= 0xBF58476D1CE4E5B9
	x ^= x >> 29
	return float64(x>>11) / (1 << 53)
}
