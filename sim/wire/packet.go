package wire

import (
	"bytes"
	"encoding/binary"
	"encoding/json"
	"fmt"
	"math"
)

// MaxHead bounds the head of a packet.
const MaxHead = 64 << 20

// A Packet is one message.
type Packet struct {
	ID      uint32
	Kind    string
	Body    json.RawMessage
	Columns []Column
}

// A Column is raw data beside the head: one of Bytes, Int32 or Float32 is set.
type Column struct {
	Name    string
	Bytes   []byte
	Int32   []int32
	Float32 []float32
}

type head struct {
	V       int             `json:"v"`
	ID      uint32          `json:"id"`
	Kind    string          `json:"kind"`
	Body    json.RawMessage `json:"body"`
	Columns []columnHead    `json:"columns"`
}

type columnHead struct {
	Name   string `json:"name"`
	Type   string `json:"type"`
	Length int    `json:"length"`
}

// Column returns the column of that name, empty if there is none.
func (p Packet) Column(name string) Column {
	for _, c := range p.Columns {
		if c.Name == name {
			return c
		}
	}
	return Column{}
}

func (c Column) head() (columnHead, int) {
	switch {
	case c.Int32 != nil:
		return columnHead{c.Name, "i32", len(c.Int32)}, 4 * len(c.Int32)
	case c.Float32 != nil:
		return columnHead{c.Name, "f32", len(c.Float32)}, 4 * len(c.Float32)
	}
	return columnHead{c.Name, "u8", len(c.Bytes)}, len(c.Bytes)
}

// Encode returns the packet's bytes.
func Encode(p Packet) []byte {
	h := head{V: Version, ID: p.ID, Kind: p.Kind, Body: p.Body, Columns: []columnHead{}}
	if h.Body == nil {
		h.Body = json.RawMessage("{}")
	}
	size := 0
	for _, c := range p.Columns {
		ch, n := c.head()
		h.Columns = append(h.Columns, ch)
		size += padded(n)
	}
	var buf bytes.Buffer
	enc := json.NewEncoder(&buf)
	enc.SetEscapeHTML(false)
	if err := enc.Encode(h); err != nil {
		panic("wire: " + err.Error()) // a body that is no JSON is our bug
	}
	text := bytes.TrimRight(buf.Bytes(), "\n")
	for (4+len(text))%8 != 0 {
		text = append(text, ' ')
	}
	out := make([]byte, 0, 4+len(text)+size)
	out = binary.LittleEndian.AppendUint32(out, uint32(len(text)))
	out = append(out, text...)
	for _, c := range p.Columns {
		out = append(out, c.bytes()...)
		for len(out)%8 != 0 {
			out = append(out, 0)
		}
	}
	return out
}

func padded(n int) int { return (n + 7) &^ 7 }

func (c Column) bytes() []byte {
	switch {
	case c.Int32 != nil:
		out := make([]byte, 0, 4*len(c.Int32))
		for _, v := range c.Int32 {
			out = binary.LittleEndian.AppendUint32(out, uint32(v))
		}
		return out
	case c.Float32 != nil:
		out := make([]byte, 0, 4*len(c.Float32))
		for _, v := range c.Float32 {
			out = binary.LittleEndian.AppendUint32(out, math.Float32bits(v))
		}
		return out
	}
	return c.Bytes
}

// Decode reads a packet; the columns of bytes are slices of data.
func Decode(data []byte) (Packet, error) {
	var p Packet
	if len(data) < 4 {
		return p, fmt.Errorf("wire: %d bytes are no packet", len(data))
	}
	n := int(binary.LittleEndian.Uint32(data))
	if n > MaxHead || n > len(data)-4 {
		return p, fmt.Errorf("wire: the head should be %d bytes, %d are there", n, len(data)-4)
	}
	d := json.NewDecoder(bytes.NewReader(data[4 : 4+n]))
	d.DisallowUnknownFields()
	var h head
	if err := d.Decode(&h); err != nil {
		return p, fmt.Errorf("wire: head: %w", err)
	}
	if h.V != Version {
		return p, fmt.Errorf("wire: version %d, this side speaks %d", h.V, Version)
	}
	p = Packet{ID: h.ID, Kind: h.Kind, Body: h.Body}
	rest := data[4+n:]
	for _, ch := range h.Columns {
		c, size, err := read(ch, rest)
		if err != nil {
			return p, err
		}
		p.Columns = append(p.Columns, c)
		if padded(size) > len(rest) {
			return p, fmt.Errorf("wire: column %q is cut off", ch.Name)
		}
		rest = rest[padded(size):]
	}
	if len(rest) > 0 {
		return p, fmt.Errorf("wire: %d bytes left over", len(rest))
	}
	return p, nil
}

func read(ch columnHead, rest []byte) (Column, int, error) {
	width := map[string]int{"u8": 1, "i32": 4, "f32": 4}[ch.Type]
	if width == 0 {
		return Column{}, 0, fmt.Errorf("wire: column %q has the unknown type %q", ch.Name, ch.Type)
	}
	if ch.Length < 0 || ch.Length > len(rest)/width {
		return Column{}, 0, fmt.Errorf("wire: column %q is cut off", ch.Name)
	}
	raw := rest[:ch.Length*width]
	c := Column{Name: ch.Name}
	switch ch.Type {
	case "u8":
		c.Bytes = raw
	case "i32":
		c.Int32 = make([]int32, ch.Length)
		for i := range c.Int32 {
			c.Int32[i] = int32(binary.LittleEndian.Uint32(raw[4*i:]))
		}
	case "f32":
		c.Float32 = make([]float32, ch.Length)
		for i := range c.Float32 {
			c.Float32[i] = math.Float32frombits(binary.LittleEndian.Uint32(raw[4*i:]))
		}
	}
	return c, len(raw), nil
}
