package scene

import "math"

// A ray gathers strokes of a star.
type ray struct{ count, reach float64 }

// A star is a member large enough to gather its strokes into rays.
type star struct {
	rays   []ray
	phase  float64
	jitter []float64
}

// strokes samples the links, nested in the budget so that a stroke never comes back, and lays ink where links land.
func (l *layout) strokes(p *Picture) {
	if l.links == 0 || l.v.Strokes == 0 {
		return
	}
	keep := float64(l.v.Strokes) / float64(l.links)
	drawn := min(float64(l.links), float64(l.v.Strokes))
	p.OneStrokeFor = max(1, 1/keep)
	ink := 0.22 * min(1.5, math.Pow(2500/drawn, 0.35))
	width := 0.75
	if drawn < 2000 {
		width = 0.9
	}
	width *= l.v.Scale
	whole := 0.17 * (1 - smooth((math.Log(float64(l.links))-math.Log(1200))/(math.Log(9000)-math.Log(1200))))
	stars := l.stars()
	l.held(stars, drawn)
	for v := l.first(); v < l.n; v++ {
		first, end := int(l.c.Before[v]), int(l.c.Before[v+1])
		if v+1 > l.n {
			end = l.links
		}
		for k := first; k < min(end, l.links); k++ {
			if keep < 1 && hash(uint64(k)) >= keep {
				continue
			}
			l.stroke(p, stars, v, k, ink, width, whole)
		}
	}
	l.spokes(p, stars, drawn)
	if f := l.v.Following; f >= 0 && f < l.n {
		l.follow(p, int32(f))
	}
}

// first is the first member whose choices are known.
func (l *layout) first() int {
	if l.c.From > 1 {
		return l.c.From
	}
	return 0
}

// held gives the stars of a network read from a log their spokes: as many links as each held there, spread evenly, since
// who gave them is not known.
func (l *layout) held(stars map[int32]*star, drawn float64) {
	if l.c.From <= 1 {
		return
	}
	log := map[int32]float64{}
	for _, j := range l.c.Targets[:min(int(l.c.Before[min(l.c.From, l.n)]), l.links)] {
		if stars[j] != nil {
			log[j]++
		}
	}
	for j, s := range stars {
		reach := l.r * min(1, 0.07+1.55*math.Sqrt(l.share(j)))
		for i := range s.rays {
			s.rays[i] = ray{count: log[j] / float64(l.links) * drawn / float64(len(s.rays)), reach: l.radius(j) + 0.35*reach*(0.7+0.6*hash(uint64(j)<<8+uint64(i)+3))}
		}
	}
}

func smooth(t float64) float64 {
	t = max(0, min(1, t))
	return t * t * (3 - 2*t)
}

func (l *layout) stars() map[int32]*star {
	stars := map[int32]*star{}
	for j := range l.received {
		k := int32(j)
		if s := l.share(k); s >= starShare || k == l.top {
			n := max(11, int(math.Round(36*math.Sqrt(s/0.3))))
			st := &star{rays: make([]ray, n), phase: 2 * math.Pi * hash(uint64(j)+7), jitter: make([]float64, n)}
			for i := range st.jitter {
				st.jitter[i] = (hash(uint64(j)<<8+uint64(i)) - 0.5) * 0.5
			}
			stars[k] = st
		}
	}
	return stars
}

// angle returns the direction of a ray.
func (s *star) angle(i int) float64 {
	return s.phase + (float64(i)+s.jitter[i])*2*math.Pi/float64(len(s.rays))
}

// nearest returns the ray nearest to a direction.
func (s *star) nearest(a float64) int {
	n := len(s.rays)
	k := int(math.Round((a - s.phase) / (2 * math.Pi) * float64(n)))
	return ((k % n) + n) % n
}

// stroke draws link k of newcomer v.
func (l *layout) stroke(p *Picture, stars map[int32]*star, v, k int, ink, width, whole float64) {
	t := l.c.Targets[k]
	sx, sy := l.place(int32(v))
	tx, ty := l.place(t)
	dx, dy := sx-tx, sy-ty
	dist := math.Hypot(dx, dy)
	if dist < 1 {
		return
	}
	tone := Tone(float64(l.c.Pull[t]))
	ember := t == l.top
	if whole > 0.004 && (l.v.Strokes >= 2000 || k%3 == 0) { // while something moves, one in three will do
		l.bow(p, sx, sy, tx, ty, width, whole, tone, ember)
	}
	share := l.share(t)
	reach := l.r * min(2.2, 0.07+1.55*math.Sqrt(share)) * (0.7 + 0.6*hash(uint64(k)+99))
	length := min(dist, reach)
	ux, uy := dx/dist, dy/dist
	s := stars[t]
	if s == nil {
		r := l.radius(t)
		mx, my := tx+ux*(r+length)/2, ty+uy*(r+length)/2
		p.Strokes = append(p.Strokes,
			Stroke{X0: tx + ux*length, Y0: ty + uy*length, X1: mx, Y1: my, W0: width, W1: width, Alpha: 0.55 * ink, Tone: tone, Ember: ember},
			Stroke{X0: mx, Y0: my, X1: tx + ux*r, Y1: ty + uy*r, W0: width, W1: width, Alpha: 1.25 * ink, Tone: tone, Ember: ember})
		return
	}
	i := s.nearest(math.Atan2(dy, dx))
	s.rays[i].count++
	join := 0.46 * length
	s.rays[i].reach = max(s.rays[i].reach, join)
	sin, cos := math.Sincos(s.angle(i))
	curve(p, tx+ux*length, ty+uy*length, tx+ux*0.76*length, ty+uy*0.76*length, tx+cos*join, ty+sin*join, width, 0.7*ink, 1.2*ink, tone, ember)
}

// pieces a curve is cut into.
const pieces = 4

// curve appends a quadratic from (x0,y0) by way of (cx,cy) to (x1,y1), its alpha rising towards the end.
func curve(p *Picture, x0, y0, cx, cy, x1, y1, width, from, to, tone float64, ember bool) {
	px, py := x0, y0
	for i := 1; i <= pieces; i++ {
		t := float64(i) / pieces
		a, b, c := (1-t)*(1-t), 2*t*(1-t), t*t
		x, y := a*x0+b*cx+c*x1, a*y0+b*cy+c*y1
		p.Strokes = append(p.Strokes, Stroke{X0: px, Y0: py, X1: x, Y1: y, W0: width, W1: width, Alpha: from + (to-from)*(t-0.5/pieces), Tone: tone, Ember: ember})
		px, py = x, y
	}
}

// bow appends a whole link, bent 12 % towards the centre.
func (l *layout) bow(p *Picture, sx, sy, tx, ty, width, alpha, tone float64, ember bool) {
	mx, my := (sx+tx)/2, (sy+ty)/2
	cx, cy := mx+0.24*(l.cx-mx), my+0.24*(l.cy-my)
	px, py := sx, sy
	for i := 1; i <= pieces; i++ {
		t := float64(i) / pieces
		a, b, c := (1-t)*(1-t), 2*t*(1-t), t*t
		x, y := a*sx+b*cx+c*tx, a*sy+b*cy+c*ty
		p.Under = append(p.Under, Stroke{X0: px, Y0: py, X1: x, Y1: y, W0: width, W1: width, Alpha: alpha, Tone: tone, Ember: ember})
		px, py = x, y
	}
}

// spokes appends the tapered spokes of all stars, rivals first.
func (l *layout) spokes(p *Picture, stars map[int32]*star, drawn float64) {
	one := func(j int32, s *star) {
		x, y := l.place(j)
		tone := Tone(float64(l.c.Pull[j]))
		for i, r := range s.rays {
			if r.count == 0 {
				continue
			}
			w, alpha := 0.17*l.r*math.Sqrt(r.count/drawn), 0.9
			if j != l.top {
				w, alpha = 0.8*w, 0.55
			}
			w = min(w, 0.9*l.radius(j))
			sin, cos := math.Sincos(s.angle(i))
			in := 0.8 * l.radius(j)
			p.Spokes = append(p.Spokes, Stroke{X0: x + cos*in, Y0: y + sin*in, X1: x + cos*r.reach, Y1: y + sin*r.reach, W0: w, W1: 0.3 * l.v.Scale, Alpha: alpha, Tone: tone, Ember: j == l.top})
		}
	}
	for j := range l.received {
		if s := stars[int32(j)]; s != nil && int32(j) != l.top {
			one(int32(j), s)
		}
	}
	if s := stars[l.top]; s != nil {
		one(l.top, s)
	}
}

// followed is how many incoming links of a followed member are drawn whole.
const followed = 400

// follow draws the links of one member whole, in ink.
func (l *layout) follow(p *Picture, j int32) {
	alpha := 0.5
	if l.received[j] > 120 {
		alpha = 0.28
	}
	x, y := l.place(j)
	n := 0
	for v := l.first(); v < l.n && n < followed; v++ {
		for k := l.c.Before[v]; k < l.c.Before[v+1] && int(k) < l.links; k++ {
			if l.c.Targets[k] == j || int32(v) == j {
				sx, sy := l.place(int32(v))
				tx, ty := l.place(l.c.Targets[k])
				w := 0.9
				if int32(v) == j {
					sx, sy, w = x, y, 1.8
				}
				p.Spokes = append(p.Spokes, Stroke{X0: sx, Y0: sy, X1: tx, Y1: ty, W0: w * l.v.Scale, W1: w * l.v.Scale, Alpha: alpha, Ink: true})
				n++
			}
		}
	}
}
