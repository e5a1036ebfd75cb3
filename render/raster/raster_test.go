package raster

import (
	"math"
	"testing"

	"preponder/render/scene"
)

func TestInkAddsUp(t *testing.T) {
	// A line of width w and length l covers w l pixels, whatever its direction; a disc pi r^2.
	for _, c := range []struct {
		name string
		want float64
		draw func(c *Canvas)
	}{
		{"level line", 40 * 3, func(c *Canvas) { c.Line(10, 30.3, 50, 30.3, 3, 3, Colour{255, 0, 0}, 1) }},
		{"steep line", 40 * 2, func(c *Canvas) { c.Line(30.7, 10, 30.7, 50, 2, 2, Colour{255, 0, 0}, 1) }},
		{"slanted line", 50 * 2, func(c *Canvas) { c.Line(10, 10, 40, 50, 2, 2, Colour{255, 0, 0}, 1) }},
		{"thin line", 40 * 0.5, func(c *Canvas) { c.Line(10, 30.5, 50, 30.5, 0.5, 0.5, Colour{255, 0, 0}, 1) }},
		{"taper", 40 * 2, func(c *Canvas) { c.Line(10, 30.5, 50, 30.5, 4, 0, Colour{255, 0, 0}, 1) }},
		{"disc", math.Pi * 100, func(c *Canvas) { c.Disc(30, 30, 10, Colour{255, 0, 0}, 1) }},
	} {
		canvas := NewCanvas(60, 60, nil)
		c.draw(canvas)
		sum := 0.0
		for i := 0; i < len(canvas.Pix); i += 4 {
			sum += float64(canvas.Pix[i]) / 255
		}
		if math.Abs(sum-c.want) > 0.05*c.want+1 {
			t.Errorf("%s covers %.1f pixels, want %.1f", c.name, sum, c.want)
		}
	}
}

func TestPaintOutsideTheCanvas(t *testing.T) {
	canvas := NewCanvas(20, 20, nil)
	canvas.Line(-50, -20, 90, 300, 3, 8, Light.Ink, 1)
	canvas.Disc(-3, 25, 9, Light.Ink, 1)
	canvas.ring(10, 10, 500, 2, Light.Ink, 1)
	Paint(canvas, scene.Picture{CX: 10, CY: 10, R: 200, Scale: 1, Leader: -1, Wash: []float64{0.2, 0.1}}, Dark)
	for i := 3; i < len(canvas.Pix); i += 4 {
		if canvas.Pix[i] != 255 {
			t.Fatal("a hole in the picture")
		}
	}
}
