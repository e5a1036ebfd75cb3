// Package view is the Ebiten game that shows a scene: one blit of the painted picture, and a few moving marks on top. It
// repaints only when something changes.
package view

import (
	"preponder/render/scene"
)

// Settings are what the page asks of the stage.
type Settings struct {
	Members int     `json:"members"`
	Arrival bool    `json:"arrival"`
	Theme   string  `json:"theme"`
	Zoom    float64 `json:"zoom"`
	PanX    float64 `json:"panX"`
	PanY    float64 `json:"panY"`
	Ceiling float64 `json:"ceiling"`
	Follow  int     `json:"follow"` // -1 = none
	Hover   int     `json:"hover"`  // -1 = none
	Quick   bool    `json:"quick"`  // something is being dragged or played: fewer strokes
	Playing bool    `json:"playing"`
	Still   bool    `json:"still"` // no motion
	Small   bool    `json:"small"` // a phone: fewer strokes
	Label   float64 `json:"label"` // size of the leader's plate, 1 on a desk
}

// An inbox keeps the newest of what came in.
type inbox struct {
	columns  scene.Columns
	settings Settings
	fresh    bool // something came since the last tick
	repaint  bool // and the picture must be painted again
}

func (b *inbox) load(c scene.Columns) {
	b.columns = c
	b.fresh, b.repaint = true, true
}

func (b *inbox) set(s Settings) {
	was := b.settings
	was.Hover, was.Playing = s.Hover, s.Playing
	if was != s {
		b.repaint = true
	}
	b.settings = s
	b.fresh = true
}
