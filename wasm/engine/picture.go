//go:build js

package main

import (
	"encoding/json"

	"preponder/render/raster"
	"preponder/render/scene"
	"preponder/sim/service"
	"preponder/sim/wire"
)

// picture paints the network grown last: entry marks, the printed picture, and the still picture where there is no
// WebGL.
func picture(p wire.Packet) wire.Packet {
	var ask struct {
		Width, Height int
		Scale         float64
		Members       int
		Arrival       bool
		Theme         string
		Ceiling       float64
		Strokes       int
		Bare          bool
		Following     int
		Zoom          float64
	}
	ask.Following = -1
	fail := func(s string) wire.Packet {
		b, _ := json.Marshal(service.Failure{Sentence: s, Fault: true})
		return wire.Packet{ID: p.ID, Kind: "failed", Body: b}
	}
	if err := json.Unmarshal(p.Body, &ask); err != nil {
		return fail(err.Error())
	}
	if ask.Width < 1 || ask.Height < 1 || ask.Width > 4096 || ask.Height > 4096 {
		return fail("A picture may be at most 4,096 pixels wide and high.")
	}
	packet, from := engine.Columns()
	if packet == nil {
		return fail("No network has been grown yet.")
	}
	p.Columns = packet
	c := scene.Columns{Targets: p.Column("targets").Int32, Before: p.Column("before").Int32, Rank: p.Column("rank").Float32, Pull: p.Column("pull").Float32, From: from}
	v := scene.View{Width: float64(ask.Width), Height: float64(ask.Height), Scale: max(ask.Scale, 0.5), Members: ask.Members, Strokes: ask.Strokes, Zoom: ask.Zoom, Ceiling: ask.Ceiling, Following: ask.Following, Bare: ask.Bare}
	if ask.Arrival {
		v.Arrival = 1
	}
	canvas := raster.NewCanvas(ask.Width, ask.Height, nil)
	raster.Paint(canvas, scene.Arrange(c, v), raster.Named(ask.Theme))
	return wire.Packet{ID: p.ID, Kind: "done", Columns: []wire.Column{{Name: "rgba", Bytes: canvas.Pix}}}
}
