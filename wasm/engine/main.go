//go:build js

// Command engine is the core in a worker: bytes in, bytes out. Requests run as goroutines that give the worker a turn
// between slices, so that a newer request or a cancel is heard.
//
// It sets engineReceive(Uint8Array) on the worker and calls enginePost(Uint8Array) with replies and enginePause(func) to
// be called back after pending messages.
package main

import (
	"encoding/json"
	"syscall/js"
	"time"

	"preponder/sim/service"
	"preponder/sim/wire"
)

const (
	slice = 8 * time.Millisecond   // of work between two turns
	often = 100 * time.Millisecond // between two reports of progress
)

var (
	engine    service.Engine
	cancelled = map[uint32]bool{}
)

func main() {
	js.Global().Set("engineReceive", js.FuncOf(func(_ js.Value, args []js.Value) any {
		data := make([]byte, args[0].Length())
		js.CopyBytesToGo(data, args[0])
		receive(data)
		return nil
	}))
	select {}
}

func receive(data []byte) {
	p, err := wire.Decode(data)
	if err != nil {
		b, _ := json.Marshal(service.Failure{Sentence: "The engine got a message it cannot read: " + err.Error() + ".", Fault: true})
		post(wire.Packet{ID: p.ID, Kind: "failed", Body: b})
		return
	}
	if p.Kind == "cancel" {
		cancelled[p.ID] = true
		return
	}
	go func() {
		var out wire.Packet
		if p.Kind == "picture" {
			out = picture(p)
		} else {
			out = engine.Handle(p, turns(p.ID))
			if p.Kind == "grow" {
				out = withPicture(p, out)
			}
		}
		delete(cancelled, p.ID)
		post(out)
	}()
}

// turns returns the step of a request: it gives the worker a turn every few milliseconds, reports progress, and ends the
// work once it is cancelled.
func turns(id uint32) service.Step {
	begun := time.Now()
	last, said := begun, begun
	return func(done float64, what string) error {
		now := time.Now()
		if now.Sub(last) < slice {
			return nil
		}
		if now.Sub(said) > often {
			said = now
			b, err := json.Marshal(map[string]any{"done": done, "what": what, "seconds": now.Sub(begun).Seconds()})
			if err != nil {
				return err
			}
			post(wire.Packet{ID: id, Kind: "progress", Body: b})
		}
		pause()
		last = time.Now()
		if cancelled[id] {
			return service.ErrCancelled
		}
		return nil
	}
}

// pause waits until the worker has heard its messages.
func pause() {
	ch := make(chan struct{}, 1)
	wake := js.FuncOf(func(js.Value, []js.Value) any { ch <- struct{}{}; return nil })
	js.Global().Call("enginePause", wake)
	<-ch
	wake.Release()
}

func post(p wire.Packet) {
	data := wire.Encode(p)
	out := js.Global().Get("Uint8Array").New(len(data))
	js.CopyBytesToJS(out, data)
	js.Global().Call("enginePost", out)
}
