package view

import (
	"image"
	"image/color"
	"math"

	"github.com/hajimehoshi/ebiten/v2"

	"preponder/render/raster"
	"preponder/render/scene"
)

// A mark is something that moves on the picture for a while: a newcomer's link falling to its member, or the rings of a
// change of lead. Motion counts ticks.
type mark struct {
	age, life      int
	x0, y0, x1, y1 float64
	pulse          bool
}

// Lives in ticks, and how many links may fall at once.
const fallTicks, pulseTicks, mostFalling = 39, 72, 40

var nothing = color.RGBA{}

func bounds(w, h int) image.Rectangle { return image.Rect(0, 0, w, h) }

// arrivals starts marks for what changed since the last picture.
func (g *Game) arrivals() {
	s, was := g.in.settings, g.shown
	g.shown = s.Members
	leader := int32(-1)
	var at scene.Disc
	if g.picture.Leader >= 0 {
		at = g.picture.Discs[g.picture.Leader]
		leader = at.Member
	}
	changed := g.leader >= 0 && leader >= 0 && leader != g.leader
	g.leader = leader
	if s.Still || !s.Playing || was >= s.Members {
		return
	}
	if changed {
		g.marks = append(g.marks, mark{life: pulseTicks, x0: at.X, y0: at.Y, pulse: true})
	}
	c := g.in.columns
	for v := max(was, s.Members-4); v < s.Members && v < c.Members(); v++ {
		x, y, _ := scene.Place(c, g.view, v)
		for k := c.Before[v]; k < c.Before[v+1]; k++ {
			if len(g.marks) >= mostFalling {
				return
			}
			tx, ty, _ := scene.Place(c, g.view, int(c.Targets[k]))
			g.marks = append(g.marks, mark{life: fallTicks, x0: x, y0: y, x1: tx, y1: ty})
		}
	}
}

// step ages the marks.
func (g *Game) step() {
	kept := g.marks[:0]
	for _, m := range g.marks {
		if m.age++; m.age < m.life {
			kept = append(kept, m)
		}
	}
	g.marks = kept
}

func (g *Game) drawMarks(screen ebiten.FinalScreen) {
	p := pen{to: screen, white: g.white()}
	for _, m := range g.marks {
		t := float64(m.age) / float64(m.life)
		if m.pulse {
			for i, w := range [2]float64{3, 1.5} {
				if u := t - 0.12*float64(i); u > 0 {
					p.ring(m.x0, m.y0, u*g.picture.R, w*g.scale, g.theme.Ember, 1-u)
				}
			}
			continue
		}
		f := math.Pow(t, 1.7)
		x, y := m.x0+f*(m.x1-m.x0), m.y0+f*(m.y1-m.y0)
		p.ring(m.x0, m.y0, (15-11*t)*g.scale, g.scale, g.theme.Ink, 0.8*(1-t))
		p.disc(x, y, 3.3*g.scale, g.theme.Plate, 1)
		p.disc(x, y, 2.3*g.scale, g.theme.Ink, 1)
	}
	s := g.in.settings
	if s.Follow >= 0 {
		g.around(p, s.Follow, 7, true)
	}
	if s.Hover >= 0 && s.Hover != s.Follow {
		g.around(p, s.Hover, 5, false)
	}
}

// around rings a member in ink; with ticks for the one that is followed.
func (g *Game) around(p pen, member int, gap float64, ticks bool) {
	x, y, r := scene.Place(g.in.columns, g.view, member)
	if math.IsNaN(x) {
		return
	}
	r += gap * g.scale
	p.ring(x, y, r, 2*g.scale, g.theme.Ink, 1)
	if ticks {
		for i := range 4 {
			s, c := math.Sincos(float64(i) * math.Pi / 2)
			p.line(x+c*r, y+s*r, x+c*(r+6*g.scale), y+s*(r+6*g.scale), 2*g.scale, g.theme.Ink)
		}
	}
}

// white is one white pixel for triangles.
func (g *Game) white() *ebiten.Image {
	if g.spare == nil {
		g.spare = ebiten.NewImage(3, 3)
		g.spare.Fill(color.White)
	}
	return g.spare.SubImage(image.Rect(1, 1, 2, 2)).(*ebiten.Image)
}

// A pen draws feathered shapes as triangles: edges fade to nothing over a pixel.
type pen struct {
	to    ebiten.FinalScreen
	white *ebiten.Image
}

func vertex(x, y float64, c raster.Colour, a float64) ebiten.Vertex {
	f := float32(a)
	return ebiten.Vertex{DstX: float32(x), DstY: float32(y), SrcX: 1, SrcY: 1, ColorR: float32(c[0]/255) * f, ColorG: float32(c[1]/255) * f, ColorB: float32(c[2]/255) * f, ColorA: f}
}

func (p pen) fill(v []ebiten.Vertex, i []uint16) {
	p.to.DrawTriangles(v, i, p.white, &ebiten.DrawTrianglesOptions{ColorScaleMode: ebiten.ColorScaleModePremultipliedAlpha})
}

// bands draws circles of the given radii and alphas, joined.
func (p pen) bands(x, y float64, radii, alphas []float64, c raster.Colour) {
	n := max(16, min(96, int(radii[len(radii)-1])*2))
	var v []ebiten.Vertex
	var idx []uint16
	k := len(radii)
	for i := range n {
		s, co := math.Sincos(2 * math.Pi * float64(i) / float64(n))
		for b, r := range radii {
			v = append(v, vertex(x+co*r, y+s*r, c, alphas[b]))
		}
		a, z := uint16(i*k), uint16((i+1)%n*k)
		for b := range uint16(k - 1) {
			idx = append(idx, a+b, a+b+1, z+b, z+b, a+b+1, z+b+1)
		}
	}
	p.fill(v, idx)
}

func (p pen) ring(x, y, r, w float64, c raster.Colour, a float64) {
	if r > 1 && a > 0 {
		p.bands(x, y, []float64{math.Max(0, r-w/2-0.5), math.Max(0, r-w/2+0.5), r + w/2 - 0.5, r + w/2 + 0.5}, []float64{0, a, a, 0}, c)
	}
}

func (p pen) disc(x, y, r float64, c raster.Colour, a float64) {
	p.bands(x, y, []float64{0, math.Max(0, r-0.5), r + 0.5}, []float64{a, a, 0}, c)
}

func (p pen) line(x0, y0, x1, y1, w float64, c raster.Colour) {
	d := math.Hypot(x1-x0, y1-y0)
	if d == 0 {
		return
	}
	nx, ny := -(y1-y0)/d*w/2, (x1-x0)/d*w/2
	p.fill([]ebiten.Vertex{vertex(x0+nx, y0+ny, c, 1), vertex(x1+nx, y1+ny, c, 1), vertex(x1-nx, y1-ny, c, 1), vertex(x0-nx, y0-ny, c, 1)}, []uint16{0, 1, 2, 0, 2, 3})
}
