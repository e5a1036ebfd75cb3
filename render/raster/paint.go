package raster

import (
	"math"

	"preponder/render/scene"
)

// A Canvas is an RGBA picture, opaque.
type Canvas struct {
	Width, Height int
	Pix           []byte
}

// NewCanvas returns a canvas, reusing the bytes of old where they suffice.
func NewCanvas(width, height int, old *Canvas) *Canvas {
	n := 4 * width * height
	if old != nil && cap(old.Pix) >= n {
		return &Canvas{width, height, old.Pix[:n]}
	}
	return &Canvas{width, height, make([]byte, n)}
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

// ground fills background, plate and wash.
func (c *Canvas) ground(p scene.Picture, t Theme) {
	back := [4]byte{byte(t.Back[0]), byte(t.Back[1]), byte(t.Back[2]), 255}
	wash := t.At(t.washTone)
	const steps = 512
	var table [steps + 2][4]byte
	for i := range table {
		x := float64(i) / steps * float64(len(p.Wash))
		k := min(int(x-0.5+1e-9), len(p.Wash)-1)
		a := 0.0
		if len(p.Wash) > 0 {
			k = max(0, k)
			next := min(k+1, len(p.Wash)-1)
			f := math.Max(0, math.Min(1, x-0.5-float64(k)))
			a = t.washAlpha * (p.Wash[k]*(1-f) + p.Wash[next]*f)
		}
		for j := range 3 {
			table[i][j] = byte(t.Plate[j] + a*(wash[j]-t.Plate[j]))
		}
		table[i][3] = 255
	}
	r2 := p.R * p.R
	for y := range c.Height {
		row := c.Pix[4*y*c.Width : 4*(y+1)*c.Width]
		dy := float64(y) + 0.5 - p.CY
		half := 0.0
		if dy*dy < r2 {
			half = math.Sqrt(r2 - dy*dy)
		}
		from := max(0, min(c.Width, int(math.Ceil(p.CX-half-0.5))))
		to := max(from, min(c.Width, int(math.Floor(p.CX+half-0.5))+1))
		if half == 0 {
			to = from
		}
		for x := range from {
			copy(row[4*x:], back[:])
		}
		for x := from; x < to; x++ {
			dx := float64(x) + 0.5 - p.CX
			copy(row[4*x:], table[int(math.Sqrt((dx*dx+dy*dy)/r2)*steps)][:])
		}
		for x := to; x < c.Width; x++ {
			copy(row[4*x:], back[:])
		}
	}
}

// grain paints the crowd, one pixel a member, thinned where it would close.
func (c *Canvas) grain(p scene.Picture, t Theme) {
	density := float64(len(p.Grain)) / math.Max(1, math.Pi*p.R*p.R)
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
	c.Line(s.X0, s.Y0, s.X1, s.Y1, s.W0, s.W1, col, math.Min(1, s.Alpha*gain))
}

// Line paints a line whose width goes from w0 to w1, by coverage across its longer axis.
func (c *Canvas) Line(x0, y0, x1, y1, w0, w1 float64, col Colour, alpha float64) {
	steep := math.Abs(y1-y0) > math.Abs(x1-x0)
	if steep {
		x0, y0, x1, y1 = y0, x0, y1, x1
	}
	if x0 > x1 {
		x0, y0, x1, y1, w0, w1 = x1, y1, x0, y0, w1, w0
	}
	dx := x1 - x0
	if dx < 1e-6 {
		return
	}
	slope := (y1 - y0) / dx
	lean := math.Sqrt(1 + slope*slope) // width along the shorter axis
	end := c.Width
	if steep {
		end = c.Height
	}
	for i := max(0, int(x0)); i <= min(end-1, int(x1)); i++ {
		cover := math.Min(float64(i+1), x1) - math.Max(float64(i), x0)
		if cover <= 0 {
			continue
		}
		at := math.Max(x0, math.Min(x1, float64(i)+0.5))
		f := (at - x0) / dx
		y := y0 + slope*(at-x0)
		half := (w0 + f*(w1-w0)) * lean / 2
		low, high := y-half, y+half
		for k := int(math.Floor(low)); k <= int(math.Floor(high)); k++ {
			a := math.Min(float64(k+1), high) - math.Max(float64(k), low)
			if steep {
				c.blend(k, i, col, alpha*a*cover)
			} else {
				c.blend(i, k, col, alpha*a*cover)
			}
		}
	}
}

// Disc paints a filled disc.
func (c *Canvas) Disc(x, y, r float64, col Colour, alpha float64) {
	for j := int(y - r - 1); j <= int(y+r+1); j++ {
		for i := int(x - r - 1); i <= int(x+r+1); i++ {
			d := math.Hypot(float64(i)+0.5-x, float64(j)+0.5-y)
			if a := r + 0.5 - d; a > 0 {
				c.blend(i, j, col, alpha*math.Min(1, math.Min(a, 2*r)))
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
	step := math.Min(4*math.Max(1, w), around/24)
	period := step
	if dash > 0 {
		n := math.Max(6, math.Round(around/(dash+gap)))
		period, step = around/n, dash
	}
	for s := 0.0; s < around-1e-6; s += period {
		a, b := s/r, (s+step)/r
		sa, ca := math.Sincos(a)
		sb, cb := math.Sincos(b)
		c.Line(x+r*ca, y+r*sa, x+r*cb, y+r*sb, w, w, col, alpha)
	}
}
