//go:build js

// Command stage is the Ebiten stage in its own document: bytes and settings in, places of labels out.
//
// It sets on its window: stage.load(Uint8Array), stage.set(json), stage.pick(x, y), stage.place(member), stage.end(); and
// calls stageSaid(json) when a picture is painted and stageBusy(flag) when motion begins and ends. The arrays must be of
// its own window.
package main

import (
	"encoding/json"
	"fmt"
	"syscall/js"

	"github.com/hajimehoshi/ebiten/v2"

	"preponder/render/scene"
	"preponder/render/view"
	"preponder/sim/wire"
)

// A game that can be ended from the page.
type game struct {
	*view.Game
	ended bool
}

func (g *game) Update() error {
	if g.ended {
		return ebiten.Termination
	}
	return g.Game.Update()
}

func main() {
	g := &game{Game: view.New()}
	window := js.Global()
	g.Painted = func(t scene.Told) { window.Call("stageSaid", said(t)) }
	g.Busy = func(on bool) { window.Call("stageBusy", on) }
	call := func(f func(args []js.Value) any) js.Func {
		return js.FuncOf(func(_ js.Value, args []js.Value) (out any) {
			defer func() {
				if r := recover(); r != nil {
					fmt.Println("stage:", r)
					out = nil
				}
			}()
			return f(args)
		})
	}
	window.Set("stage", js.ValueOf(map[string]any{
		"load": call(func(args []js.Value) any {
			data := make([]byte, args[0].Length())
			js.CopyBytesToGo(data, args[0])
			p, err := wire.Decode(data)
			if err != nil {
				panic(err)
			}
			var head struct {
				From int `json:"from"`
			}
			if err := json.Unmarshal(p.Body, &head); err != nil {
				panic(err)
			}
			c := scene.Columns{Targets: p.Column("targets").Int32, Before: p.Column("before").Int32, Rank: p.Column("rank").Float32, Pull: p.Column("pull").Float32, From: head.From}
			if pix := p.Column("rgba").Bytes; len(pix) > 0 {
				var shot scene.Shot
				if err := json.Unmarshal(p.Column("shot").Bytes, &shot); err != nil {
					panic(err)
				}
				g.LoadPainted(c, pix, shot)
				return nil
			}
			g.Load(c)
			return nil
		}),
		"set": call(func(args []js.Value) any {
			var s view.Settings
			if err := json.Unmarshal([]byte(args[0].String()), &s); err != nil {
				panic(err)
			}
			g.Set(s)
			return nil
		}),
		"pick": call(func(args []js.Value) any { return g.Pick(args[0].Float(), args[1].Float()) }),
		"place": call(func(args []js.Value) any {
			x, y, r := g.Place(args[0].Int())
			return []any{x, y, r}
		}),
		"end": call(func([]js.Value) any { g.ended = true; return nil }),
	}))
	ebiten.SetTPS(ebiten.SyncWithFPS)
	ebiten.SetScreenClearedEveryFrame(false)
	window.Call("stageSaid", `{"ready":true}`)
	if err := ebiten.RunGame(g); err != nil {
		fmt.Println("stage:", err)
	}
}

func said(t scene.Told) string {
	b, err := json.Marshal(t)
	if err != nil {
		panic(err)
	}
	return string(b)
}
