package raster

import (
	"math"
	"unsafe"

	"preponder/render/scene"
)

// A Canvas is an RGBA picture, opaque.
type Canvas struct {
	Width, Height int
	Pix           []byte
	pix           []uint32 // the same bytes, a pixel each: red lowest, opaque
	at            placed
	distance      []uint16
}

// NewCanvas returns a canvas, in the memory of old where it suffices.
func NewCanvas(width, height int, old *Canvas) *Canvas {
	n := width * height
	c := &Canvas{Width: width, Height: height}
	if old != nil {
		c.pix, c.at, c.distance = old.pix, old.at, old.distance
	}
	if cap(c.pix) < n {
		c.pix = make([]uint32, n)
	}
	c.pix = c.pix[:n]
	c.Pix = unsafe.Slice((*byte)(unsafe.Pointer(unsafe.SliceData(c.pix))), 4*n) // every target of ours is little-endian
	return c
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
	for i, d := range c.distance[:len(c.pix)] {
		c.pix[i] = table[d]
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
	// Tones and weights in steps: a crowd is many members and few shades.
	const shades, weights, heaviest = 64, 32, 2
	var tone [shades + 1]Colour
	for i := range tone {
		tone[i] = t.At(float64(i) / shades)
	}
	var cover [weights + 1]float64
	for i := range cover {
		cover[i] = t.grain * (1 - math.Exp(-g*heaviest*float64(i)/weights))
	}
	for _, m := range p.Grain {
		c.blend(int(m.X), int(m.Y), tone[int(m.Tone*shades+0.5)], cover[min(int(m.Weight*(weights/heaviest)+0.5), weights)])
	}
}

func (c *Canvas) blend(x, y int, col Colour, a float64) {
	if x < 0 || y < 0 || x >= c.Width || y >= c.Height || a <= 0 {
		return
	}
	o := y*c.Width + x
	c.pix[o] = over(c.pix[o], uint32(col[0])|uint32(col[2])<<16, uint32(col[1]), uint32(a*256))
}

// over lays a colour, its red and blue in one word and its green in another, over a pixel with a cover of part in 256.
func over(d, redBlue, green, part uint32) uint32 {
	return 255<<24 | (d&0xff00ff*(256-part)+redBlue*part+0x800080)>>8&0xff00ff | (d>>8&0xff*(256-part)+green*part+0x80)&0xff00
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

// Line paints a line whose width goes from w0 to w1, by coverage across its longer axis. Places across are in 1/65536 of
// a pixel, coverage in 1/256.
func (c *Canvas) Line(x0, y0, x1, y1, w0, w1 float64, col Colour, alpha float64) {
	across, along := c.Width, 1 // pixels from one to the next across and along the line
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
	if !(dx >= 1e-6) || x1 <= 0 || x0 >= float64(end) {
		return
	}
	slope := (y1 - y0) / dx
	lean := math.Sqrt(1+slope*slope) / 2 // half the width along the shorter axis
	taper := (w1 - w0) / dx * lean
	first, last := max(0, int(x0)), min(end-1, int(x1))
	redBlue, green := uint32(col[0])|uint32(col[2])<<16, uint32(col[1])
	top := int64(far) << 16
	full := 256 * alpha
	// Both edges at the middle of the first column, and how far they move from one to the next, in 2^-32 of a pixel.
	const unit = 1 << 32
	at := float64(first) + 0.5 - x0
	low, lower := int64(unit*(y0-w0*lean+(slope-taper)*at)), int64(unit*(slope-taper))
	high, higher := int64(unit*(y0+w0*lean+(slope+taper)*at)), int64(unit*(slope+taper))
	pix, whole := c.pix, int64(full)
	for i := first; i <= last; i++ {
		a, from, to := whole, low>>16, high>>16
		low, high = low+lower, high+higher
		if i == first || i == last {
			left, right := max(float64(i), x0), min(float64(i+1), x1)
			a = int64((right - left) * full)
			at := (left+right)/2 - x0
			y, h := y0+slope*at, w0*lean+taper*at
			from, to = int64(65536*(y-h)), int64(65536*(y+h))
		}
		from, to = max(0, from), min(top, to)
		o := int(from>>16)*across + i*along
		for k := from &^ 0xffff; k < to; k += 1 << 16 {
			part := uint32((min(k+1<<16, to) - max(k, from)) * a >> 16)
			pix[o] = over(pix[o], redBlue, green, part)
			o += across
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
