package raster

import (
	"encoding/binary"
	"math"

	"preponder/render/scene"
)

// A Canvas is an RGBA picture, opaque.
type Canvas struct {
	Width, Height int
	Pix           []byte
	at            placed
	distance      []uint16
}

// NewCanvas returns a canvas, reusing the bytes of old where they suffice.
func NewCanvas(width, height int, old *Canvas) *Canvas {
	n := 4 * width * height
	if old != nil && cap(old.Pix) >= n {
		return &Canvas{width, height, old.Pix[:n], old.at, old.distance}
	}
	return &Canvas{Width: width, Height: height, Pix: make([]byte, n)}
}

// Paint paints a whole picture.
func Paint(c *Canvas, p scene.Picture, t Theme) {
	c.ground(p, t)
	c.grain(p, t)
	for _, r := range p.Rings {
		c.dashedRing(p.CX, p.CY, r, p.Scale, t.Ring, 0.8)
	}
	c.ring(p.CX, p.CY, p.R, p.Scale, t.Rim, 1)
	for _, s := range p.Under {
		c.stroke(s, t, t.under)
	}
	for _, s := range p.Strokes {
		c.stroke(s, t, t.inkGain)
	}
	for _, s := range p.Spokes {
		c.stroke(s, t, 1)
	}
	c.discs(p, t)
}

func (c *Canvas) discs(p scene.Picture, t Theme) {
	halo := 1.5 * p.Scale
	for _, d := range p.Discs {
		if d.Leader {
			c.Disc(d.X, d.Y, d.R+5.25*p.Scale+p.Scale, t.Plate, 0.9)
			c.ring(d.X, d.Y, d.R+5.25*p.Scale, 2*p.Scale, t.Ember, 1)
			c.Disc(d.X, d.Y, d.R+1.5*p.Scale, t.Plate, 1)
			c.Disc(d.X, d.Y, d.R, t.Ember, 1)
		} else {
			alpha := 1.0
			if d.Faint {
				alpha = 0.6
			}
			if d.R > 4*p.Scale {
				c.Disc(d.X, d.Y, d.R+halo, t.Plate, 1)
			}
			c.Disc(d.X, d.Y, d.R, t.At(d.Tone), alpha)
		}
		if d.Capped {
			gap := 5.0
			if d.Leader {
				gap = 9
			}
			c.dashedRing(d.X, d.Y, d.R+gap*p.Scale, 1.8*p.Scale, t.Ink, 1)
		}
	}
}

// steps of the wash from the middle to the rim.
const steps = 512

// ground fills background, plate and wash: every pixel by its distance from the middle, which is kept from picture to
// picture of the same size.
func (c *Canvas) ground(p scene.Picture, t Theme) {
	if at := (placed{c.Width, c.Height, p.CX, p.CY, p.R}); at != c.at {
		c.at = at
		c.measure()
	}
	var table [steps + 2]uint32
	pack := func(col Colour) uint32 {
		return uint32(col[0]) | uint32(col[1])<<8 | uint32(col[2])<<16 | 255<<24
	}
	wash := t.At(t.washTone)
	for i := range steps + 1 {
		a := 0.0
		if last := len(p.Wash) - 1; last >= 0 {
			x := float64(i)/steps*float64(len(p.Wash)) - 0.5
			k := max(0, min(int(x), last))
			f := max(0, min(1, x-float64(k)))
			a = t.washAlpha * (p.Wash[k]*(1-f) + p.Wash[min(k+1, last)]*f)
		}
		col := t.Plate
		for j := range col {
			col[j] += a * (wash[j] - col[j])
		}
		table[i] = pack(col)
	}
	table[steps+1] = pack(t.Back)
	for i, d := range c.distance {
		binary.LittleEndian.PutUint32(c.Pix[4*i:], table[d])
	}
}

// placed says for which picture distances were measured.
type placed struct {
	width, height int
	cx, cy, r     float64
}

// measure fills in the step of the wash each pixel lies on; beyond the rim the one after the last.
func (c *Canvas) measure() {
	c.distance = make([]uint16, c.Width*c.Height)
	for y := range c.Height {
		dy := float64(y) + 0.5 - c.at.cy
		row := c.distance[y*c.Width : (y+1)*c.Width]
		for x := range row {
			dx := float64(x) + 0.5 - c.at.cx
			row[x] = steps + 1
			if d := math.Sqrt(dx*dx+dy*dy) / c.at.r; d <= 1 {
				row[x] = uint16(d * steps)
			}
		}
	}
}

// grain paints the crowd, one pixel a member, thinned where it would close.
func (c *Canvas) grain(p scene.Picture, t Theme) {
	density := float64(len(p.Grain)) / max(1, math.Pi*p.R*p.R)
	g := 1.1
	if density > 0.35 {
		g = 1.1 * math.Pow(0.35/density, 0.8)
	}
	for _, m := range p.Grain {
		c.blend(int(m.X), int(m.Y), t.At(m.Tone), t.grain*(1-math.Exp(-g*m.Weight)))
	}
}

func (c *Canvas) blend(x, y int, col Colour, a float64) {
	if x < 0 || y < 0 || x >= c.Width || y >= c.Height || a <= 0 {
		return
	}
	q := c.Pix[4*(y*c.Width+x) : 4*(y*c.Width+x)+3 : 4*(y*c.Width+x)+3]
	k := int32(a * 256)
	q[0] += byte((int32(col[0]) - int32(q[0])) * k >> 8)
	q[1] += byte((int32(col[1]) - int32(q[1])) * k >> 8)
	q[2] += byte((int32(col[2]) - int32(q[2])) * k >> 8)
}

func (c *Canvas) stroke(s scene.Stroke, t Theme, gain float64) {
	col := t.At(s.Tone)
	switch {
	case s.Ember:
		col = t.Ember
	case s.Ink:
		col = t.Ink
	}
	c.Line(s.X0, s.Y0, s.X1, s.Y1, s.W0, s.W1, col, min(1, s.Alpha*gain))
}

// Line paints a line whose width goes from w0 to w1, by coverage across its longer axis.
func (c *Canvas) Line(x0, y0, x1, y1, w0, w1 float64, col Colour, alpha float64) {
	across, along := 4*c.Width, 4 // bytes from pixel to pixel across and along the line
	far, end := c.Height, c.Width
	if steep := math.Abs(y1-y0) > math.Abs(x1-x0); steep {
		x0, y0, x1, y1 = y0, x0, y1, x1
		across, along = along, across
		far, end = end, far
	}
	if x0 > x1 {
		x0, y0, x1, y1, w0, w1 = x1, y1, x0, y0, w1, w0
	}
	dx := x1 - x0
	if dx < 1e-6 {
		return
	}
	slope := (y1 - y0) / dx
	lean := math.Sqrt(1+slope*slope) / 2 // half the width along the shorter axis
	taper := (w1 - w0) / dx
	r, g, b := int32(col[0]), int32(col[1]), int32(col[2])
	alpha *= 256
	for i := max(0, int(x0)); i <= min(end-1, int(x1)); i++ {
		from, to := max(float64(i), x0), min(float64(i+1), x1)
		cover := (to - from) * alpha
		if cover <= 0 {
			continue
		}
		at := (from+to)/2 - x0
		y := y0 + slope*at
		half := (w0 + taper*at) * lean
		low, high := max(0, y-half), min(float64(far), y+half)
		for k := int(low); float64(k) < high; k++ {
			a := int32((min(float64(k+1), high) - max(float64(k), low)) * cover)
			o := k*across + i*along
			q := c.Pix[o : o+3 : o+3]
			q[0] += byte((r - int32(q[0])) * a >> 8)
			q[1] += byte((g - int32(q[1])) * a >> 8)
			q[2] += byte((b - int32(q[2])) * a >> 8)
		}
	}
}

// Disc paints a filled disc.
func (c *Canvas) Disc(x, y, r float64, col Colour, alpha float64) {
	full := min(1, 2*r) * alpha
	for j := max(0, int(y-r-1)); j <= min(c.Height-1, int(y+r+1)); j++ {
		dy := float64(j) + 0.5 - y
		inner, outer := (r-0.5)*(r-0.5)-dy*dy, (r+0.5)*(r+0.5)
		for i := max(0, int(x-r-1)); i <= min(c.Width-1, int(x+r+1)); i++ {
			dx := float64(i) + 0.5 - x
			switch d2 := dx*dx + dy*dy; {
			case dx*dx <= inner && r > 0.5:
				c.blend(i, j, col, full)
			case d2 < outer:
				c.blend(i, j, col, alpha*min(1, min(r+0.5-math.Sqrt(d2), 2*r)))
			}
		}
	}
}

// ring paints a circle of the given width.
func (c *Canvas) ring(x, y, r, w float64, col Colour, alpha float64) {
	c.arcs(x, y, r, w, col, alpha, 0, 0)
}

func (c *Canvas) dashedRing(x, y, r, w float64, col Colour, alpha float64) {
	c.arcs(x, y, r, w, col, alpha, 1.5*w, 3.5*w)
}

// arcs paints a circle, dashed if dash is above 0, as short lines.
func (c *Canvas) arcs(x, y, r, w float64, col Colour, alpha, dash, gap float64) {
	if r < 1 {
		return
	}
	around := 2 * math.Pi * r
	step := min(4*max(1, w), around/24)
	period := step
	if dash > 0 {
		n := max(6, math.Round(around/(dash+gap)))
		period, step = around/n, dash
	}
	for s := 0.0; s < around-1e-6; s += period {
		a, b := s/r, (s+step)/r
		sa, ca := math.Sincos(a)
		sb, cb := math.Sincos(b)
		c.Line(x+r*ca, y+r*sa, x+r*cb, y+r*sb, w, w, col, alpha)
	}
}
