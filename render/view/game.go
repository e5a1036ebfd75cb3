package view

import (
	"math"

	"github.com/hajimehoshi/ebiten/v2"

	"preponder/render/raster"
	"preponder/render/scene"
)

// Ticks of a tween.
const tweenTicks = 54

// A Game is the stage. Its methods are called from one goroutine at a time.
type Game struct {
	in      inbox
	picture scene.Picture
	view    scene.View
	theme   raster.Theme
	canvas  *raster.Canvas
	base    *ebiten.Image
	dirty   bool // canvas newer than base
	width   int
	height  int
	scale   float64
	arrival float64
	marks   []mark
	leader  int32 // shown last, -1 = none
	shown   int   // members shown last
	spare   *ebiten.Image

	stale bool // the picture on show was painted elsewhere, and is not yet arranged here

	// Painted is called after every new picture, Busy when motion begins and ends.
	Painted func(scene.Told)
	Busy    func(bool)
	busy    bool
}

// New returns a stage.
func New() *Game {
	return &Game{leader: -1, scale: 1, in: inbox{settings: Settings{Follow: -1, Hover: -1, Zoom: 1}}}
}

// Load takes a network.
func (g *Game) Load(c scene.Columns) { g.in.load(c) }

// LoadPainted takes a network with its picture, painted elsewhere while something is dragged. A picture of another view
// than the present one is not shown: the network is painted here.
func (g *Game) LoadPainted(c scene.Columns, pix []byte, shot scene.Shot) {
	s := g.in.settings
	s.Members = shot.View.Members
	if g.canvas == nil || len(pix) != len(g.canvas.Pix) || g.wanted(s, false) != shot.View || s.Theme != shot.Theme {
		g.Load(c)
		return
	}
	g.in.columns, g.in.settings, g.in.fresh, g.in.repaint = c, s, true, false
	g.view, g.shown = shot.View, s.Members
	copy(g.canvas.Pix, pix)
	g.dirty, g.stale = true, true
	g.leader = -1
	if shot.Told.Leader != nil {
		g.leader = shot.Told.Leader.Member
	}
	if g.Painted != nil {
		g.Painted(shot.Told)
	}
}

// Set takes what is wanted of it.
func (g *Game) Set(s Settings) { g.in.set(s) }

// Pick returns the member under a point in CSS pixels, or -1.
func (g *Game) Pick(x, y float64) int {
	if g.stale {
		g.picture, g.stale = scene.Again(g.picture, g.in.columns, g.view), false
	}
	return scene.Pick(g.picture, x*g.scale, y*g.scale)
}

// Place returns where a member lies and its radius, in CSS pixels.
func (g *Game) Place(member int) (x, y, r float64) {
	x, y, r = scene.Place(g.in.columns, g.view, member)
	return x / g.scale, y / g.scale, r / g.scale
}

// Update moves the stage by one tick.
func (g *Game) Update() error {
	moving := g.tween()
	if g.in.repaint || moving {
		g.paint(moving)
		g.in.repaint = false
	}
	g.in.fresh = false
	g.step()
	g.tell(moving || len(g.marks) > 0)
	return nil
}

// tween slides the arrangement towards what is wanted.
func (g *Game) tween() bool {
	to := 0.0
	if g.in.settings.Arrival {
		to = 1
	}
	if g.arrival == to {
		return false
	}
	if g.in.settings.Still {
		g.arrival = to
	} else {
		g.arrival += math.Copysign(1.0/tweenTicks, to-g.arrival)
		if math.Abs(g.arrival-to) < 0.5/tweenTicks {
			g.arrival = to
		}
	}
	g.in.repaint = true
	return g.arrival != to
}

// ease is cubic in and out.
func ease(t float64) float64 {
	if t < 0.5 {
		return 4 * t * t * t
	}
	return 1 - math.Pow(2-2*t, 3)/2
}

// wanted returns the view that settings ask for.
func (g *Game) wanted(s Settings, moving bool) scene.View {
	strokes := scene.Full
	if s.Small {
		strokes = scene.Small
	}
	if moving || s.Quick {
		strokes = scene.Quick
	}
	return scene.View{Width: float64(g.width), Height: float64(g.height), Scale: g.scale, Members: s.Members, Arrival: ease(g.arrival), Strokes: strokes,
		Zoom: s.Zoom, PanX: s.PanX, PanY: s.PanY, Ceiling: s.Ceiling, Following: s.Follow, Label: s.Label}
}

// paint arranges and paints the picture.
func (g *Game) paint(moving bool) {
	if g.width == 0 || g.height == 0 {
		return
	}
	s := g.in.settings
	g.view = g.wanted(s, moving)
	g.theme = raster.Named(s.Theme)
	g.picture, g.stale = scene.Again(g.picture, g.in.columns, g.view), false
	g.canvas = raster.NewCanvas(g.width, g.height, g.canvas)
	raster.Paint(g.canvas, g.picture, g.theme)
	g.dirty = true
	g.arrivals()
	if g.Painted != nil {
		g.Painted(g.picture.Tell(g.view))
	}
}

// tell says when motion begins and ends.
func (g *Game) tell(busy bool) {
	if busy != g.busy && g.Busy != nil {
		g.busy = busy
		g.Busy(busy)
	}
}

// Layout keeps one picture pixel per device pixel.
func (g *Game) Layout(width, height int) (int, int) {
	scale := ebiten.Monitor().DeviceScaleFactor()
	w, h := int(float64(width)*scale), int(float64(height)*scale)
	if w != g.width || h != g.height || scale != g.scale {
		g.width, g.height, g.scale = w, h, scale
		g.in.repaint = true
	}
	return 16, 16
}

// Draw touches its small screen, so that the final screen is drawn.
func (g *Game) Draw(screen *ebiten.Image) { screen.Set(0, 0, nothing) }

// DrawFinalScreen paints: one blit, then the marks.
func (g *Game) DrawFinalScreen(screen ebiten.FinalScreen, _ *ebiten.Image, _ ebiten.GeoM) {
	if g.canvas == nil {
		return
	}
	if g.base == nil || g.base.Bounds().Dx() != g.canvas.Width || g.base.Bounds().Dy() != g.canvas.Height {
		if g.base != nil {
			g.base.Deallocate()
		}
		g.base = ebiten.NewImageWithOptions(bounds(g.canvas.Width, g.canvas.Height), &ebiten.NewImageOptions{Unmanaged: true})
		g.dirty = true
	}
	if g.dirty {
		g.base.WritePixels(g.canvas.Pix)
		g.dirty = false
	}
	screen.DrawImage(g.base, &ebiten.DrawImageOptions{Blend: ebiten.BlendCopy})
	g.drawMarks(screen)
}
