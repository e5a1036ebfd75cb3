//go:build js

package main

import (
	"encoding/json"

	"preponder/render/raster"
	"preponder/render/scene"
	"preponder/sim/service"
	"preponder/sim/wire"
)

// A pictureRequest asks for a picture of a network.
type pictureRequest struct {
	scene.View
	Theme string
}

const largest = 4096 // pixels a side

var still struct { // the picture painted last: its memory is used again
	canvas  *raster.Canvas
	picture scene.Picture
}

// paint paints a network of these columns.
func (ask pictureRequest) paint(columns []wire.Column, from int) []byte {
	p := wire.Packet{Columns: columns}
	c := scene.Columns{Targets: p.Column("targets").Int32, Before: p.Column("before").Int32, Rank: p.Column("rank").Float32, Pull: p.Column("pull").Float32, From: from}
	still.canvas = raster.NewCanvas(int(ask.Width), int(ask.Height), still.canvas)
	still.picture = scene.Again(still.picture, c, ask.View)
	raster.Paint(still.canvas, still.picture, raster.Named(ask.Theme))
	return still.canvas.Pix
}

func (ask pictureRequest) fits() bool {
	return ask.Width >= 1 && ask.Height >= 1 && ask.Width <= largest && ask.Height <= largest && ask.Scale > 0
}

// picture paints the network grown last: entry marks, the printed picture, and the still picture where there is no
// WebGL.
func picture(p wire.Packet) wire.Packet {
	ask := pictureRequest{View: scene.View{Following: -1, Scale: 1}}
	fail := func(s string) wire.Packet {
		b, _ := json.Marshal(service.Failure{Sentence: s, Fault: true})
		return wire.Packet{ID: p.ID, Kind: "failed", Body: b}
	}
	if err := json.Unmarshal(p.Body, &ask); err != nil {
		return fail(err.Error())
	}
	if !ask.fits() {
		return fail("A picture may be at most 4,096 pixels wide and high.")
	}
	columns, from := engine.Columns()
	if columns == nil {
		return fail("No network has been grown yet.")
	}
	return wire.Packet{ID: p.ID, Kind: "done", Columns: []wire.Column{{Name: "rgba", Bytes: ask.paint(columns, from)}}}
}

// withPicture adds to a grown network the picture its request asks for as "view", so that the stage only has to show it.
func withPicture(request, out wire.Packet) wire.Packet {
	var ask struct {
		View *pictureRequest `json:"view"`
	}
	if err := json.Unmarshal(request.Body, &ask); err != nil || ask.View == nil || !ask.View.fits() || len(out.Columns) == 0 {
		return out
	}
	_, from := engine.Columns()
	v := ask.View
	if n := len(out.Column("rank").Float32); v.Members <= 0 || v.Members > n {
		v.Members = n
	}
	v.Strokes = scene.Quick
	pix := v.paint(out.Columns, from)
	shot, err := json.Marshal(scene.Shot{View: v.View, Theme: v.Theme, Told: still.picture.Tell(v.View)})
	if err != nil {
		return out
	}
	out.Columns = append(out.Columns, wire.Column{Name: "rgba", Bytes: pix}, wire.Column{Name: "shot", Bytes: shot})
	return out
}
