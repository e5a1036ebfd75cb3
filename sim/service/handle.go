// Package service answers requests: the same for the page, through the engine worker, and for the command. It holds the
// only recover.
package service

import (
	"encoding/json"
	"errors"
	"fmt"
	"runtime/debug"

	"preponder/sim/evidence"
	"preponder/sim/growth"
	"preponder/sim/wire"
)

// ErrCancelled ends a request that nobody waits for any more.
var ErrCancelled = errors.New("cancelled")

// Step is called between slices of work with the share done and what is being done; an error ends the work.
type Step func(done float64, what string) error

// An Engine answers requests one after another and keeps what later ones refer to: the network grown last, the log read
// last.
type Engine struct {
	network  *growth.Network
	received []int32            // by its members
	name     func(j int) string // of its members
	rows     *evidence.Rows
	history  *evidence.History
	label    string
}

// A Failure says why there is no answer.
type Failure struct {
	Sentence  string `json:"sentence"`
	Cancelled bool   `json:"cancelled"`
	Fault     bool   `json:"fault"` // ours, not the user's
}

type reply struct {
	body    any
	columns []wire.Column
}

type handler func(e *Engine, p wire.Packet, step Step) (reply, error)

// kinds maps a request to what answers it.
var kinds map[string]handler

func init() {
	kinds = map[string]handler{
		"tables": tables, "open": open, "decode": decode, "encode": encode, "file": file, "law": lawCheck, "sketch": sketch,
		"solve": solve, "grow": grow, "member": member, "export": export,
		"look": look, "read": read, "study": study, "words": words, "sample": sample,
		"outlook": runOutlook, "gather": gather,
	}
}

// Handle answers one request: a packet of kind "done" or "failed" with the id of the request.
func (e *Engine) Handle(p wire.Packet, step Step) (out wire.Packet) {
	fail := func(f Failure) wire.Packet {
		body, err := json.Marshal(f)
		if err != nil {
			panic(err)
		}
		return wire.Packet{ID: p.ID, Kind: "failed", Body: body}
	}
	defer func() {
		if r := recover(); r != nil {
			fmt.Printf("request %d (%s): %v\n%s", p.ID, p.Kind, r, debug.Stack())
			out = fail(Failure{Sentence: fmt.Sprintf("This is our fault: the request %q failed inside (%v). Your casebook is kept; try again, or change what you asked for.", p.Kind, r), Fault: true})
		}
	}()
	h, known := kinds[p.Kind]
	if !known {
		return fail(Failure{Sentence: fmt.Sprintf("This engine does not know the request %q.", p.Kind), Fault: true})
	}
	r, err := h(e, p, step)
	if errors.Is(err, ErrCancelled) {
		return fail(Failure{Sentence: "Cancelled.", Cancelled: true})
	}
	if err != nil {
		return fail(Failure{Sentence: sentence(err.Error())})
	}
	body, err := json.Marshal(r.body)
	if err != nil {
		panic(err)
	}
	return wire.Packet{ID: p.ID, Kind: "done", Body: body, Columns: r.columns}
}

// sentence makes an error one: a capital first, a stop last.
func sentence(s string) string {
	if s == "" {
		return s
	}
	if c := s[0]; c >= 'a' && c <= 'z' {
		s = string(c-32) + s[1:]
	}
	if s[len(s)-1] != '.' {
		s += "."
	}
	return s
}
