package service

import (
	"encoding/json"
	"fmt"
	"slices"
	"strconv"
	"strings"

	"preponder/sim/growth"
	"preponder/sim/wire"
)

// exportMembers is how many members one part of an export covers: a large network is written piece by piece.
const exportMembers = 100_000

// An exporter writes a network in one format: what stands before, each member, each newcomer's links, what stands after.
type exporter struct {
	before string
	member func(b []byte, n *growth.Network, j int) []byte
	links  func(b []byte, n *growth.Network, v int) []byte
	after  string
}

// exporters by what they are called.
//
//	log      time,source,target as RFC 4180 has it; the time is the newcomer's number
//	degrees  member,arrived,energy,links,share
//	graphml  GraphML 1.0 (graphml.graphdrawing.org): nodes with energy and links received, directed edges with their time
func exporters(name func(j int) string, received []int32) map[string]exporter {
	return map[string]exporter{
		"log": {before: "time,source,target\r\n", links: func(b []byte, n *growth.Network, v int) []byte {
			for _, j := range n.Targets[n.LinksBefore(v):n.LinksBefore(v+1)] {
				b = append(strconv.AppendInt(b, int64(v), 10), ',')
				b = append(append(b, cell(name(v))...), ',')
				b = append(append(b, cell(name(int(j)))...), "\r\n"...)
			}
			return b
		}},
		"degrees": {before: "member,arrived,energy,links,share\r\n", member: func(b []byte, n *growth.Network, j int) []byte {
			b = append(append(b, cell(name(j))...), ',')
			b = append(strconv.AppendInt(b, int64(j), 10), ',')
			b = append(strconv.AppendFloat(b, n.Energy[j], 'g', -1, 64), ',')
			b = append(strconv.AppendInt(b, int64(received[j]), 10), ',')
			return append(strconv.AppendFloat(b, float64(received[j])/float64(max(1, len(n.Targets))), 'g', 6, 64), "\r\n"...)
		}},
		"graphml": {
			before: `<?xml version="1.0" encoding="UTF-8"?>
<graphml xmlns="http://graphml.graphdrawing.org/xmlns" xmlns:xsi="http://www.w3.org/2001/XMLSchema-instance" xsi:schemaLocation="http://graphml.graphdrawing.org/xmlns http://graphml.graphdrawing.org/xmlns/1.0/graphml.xsd">
<key id="label" for="node" attr.name="label" attr.type="string"/>
<key id="energy" for="node" attr.name="energy" attr.type="double"/>
<key id="links" for="node" attr.name="links" attr.type="int"/>
<key id="time" for="edge" attr.name="time" attr.type="int"/>
<graph id="network" edgedefault="directed">
`,
			member: func(b []byte, n *growth.Network, j int) []byte {
				b = append(strconv.AppendInt(append(b, `<node id="n`...), int64(j), 10), `"><data key="label">`...)
				b = append(append(b, escape.Replace(name(j))...), `</data><data key="energy">`...)
				b = append(strconv.AppendFloat(b, n.Energy[j], 'g', -1, 64), `</data><data key="links">`...)
				return append(strconv.AppendInt(b, int64(received[j]), 10), "</data></node>\n"...)
			},
			links: func(b []byte, n *growth.Network, v int) []byte {
				for _, j := range n.Targets[n.LinksBefore(v):n.LinksBefore(v+1)] {
					b = strconv.AppendInt(append(b, `<edge source="n`...), int64(v), 10)
					b = strconv.AppendInt(append(b, `" target="n`...), int64(j), 10)
					b = append(strconv.AppendInt(append(b, `"><data key="time">`...), int64(v), 10), "</data></edge>\n"...)
				}
				return b
			},
			after: "</graph>\n</graphml>\n",
		},
	}
}

var escape = strings.NewReplacer("&", "&amp;", "<", "&lt;", ">", "&gt;", `"`, "&quot;")

// cell writes a CSV field as RFC 4180 has it.
func cell(s string) string {
	if strings.ContainsAny(s, "\",\r\n") {
		return `"` + strings.ReplaceAll(s, `"`, `""`) + `"`
	}
	return s
}

// export answers with one part of the network grown last in a format, and how many parts there are. Links a log left are
// not in it: who made them is not kept.
func export(e *Engine, p wire.Packet, step Step) (reply, error) {
	var ask struct {
		What string `json:"what"`
		Part int    `json:"part"` // from 0
	}
	if err := json.Unmarshal(p.Body, &ask); err != nil {
		return reply{}, err
	}
	n := e.network
	if n == nil {
		return reply{}, fmt.Errorf("no network has been grown yet")
	}
	if e.received == nil {
		e.received = n.Received(n.Members)
	}
	x, known := exporters(e.name, e.received)[ask.What]
	if !known {
		return reply{}, fmt.Errorf("networks are written as log, degrees or graphml, not as %q", ask.What)
	}
	pieces := (n.Members + exportMembers - 1) / exportMembers
	var plan []func(b []byte, n *growth.Network, v int) []byte
	for _, f := range []func(b []byte, n *growth.Network, v int) []byte{x.member, x.links} {
		if f != nil {
			plan = append(plan, slices.Repeat([]func([]byte, *growth.Network, int) []byte{f}, pieces)...)
		}
	}
	if ask.Part < 0 || ask.Part >= len(plan) {
		return reply{}, fmt.Errorf("there is no part %d; there are %d", ask.Part+1, len(plan))
	}
	var b []byte
	if ask.Part == 0 {
		b = append(b, x.before...)
	}
	first := ask.Part % pieces * exportMembers
	linking := x.links != nil && ask.Part >= len(plan)-pieces
	for v := first; v < min(first+exportMembers, n.Members); v++ {
		if v%4096 == 0 {
			if err := step((float64(ask.Part)+float64(v-first)/exportMembers)/float64(len(plan)), "writing the network"); err != nil {
				return reply{}, err
			}
		}
		if linking && v < n.From() && n.From() > 1 {
			continue // made in the log
		}
		b = plan[ask.Part](b, n, v)
	}
	if ask.Part == len(plan)-1 {
		b = append(b, x.after...)
	}
	return reply{body: map[string]any{"parts": len(plan)}, columns: []wire.Column{{Name: "file", Bytes: b}}}, nil
}

// logOf returns the whole log of a small network.
func logOf(n *growth.Network) []byte {
	x := exporters(func(j int) string { return "M" + strconv.Itoa(j) }, nil)["log"]
	b := []byte(x.before)
	for v := n.From(); v < n.Members; v++ {
		b = x.links(b, n, v)
	}
	return b
}
