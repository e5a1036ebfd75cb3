// Package wire is the protocol between page, engine and stage; site/src/engine/wire.ts is its twin.
//
// A packet is a length, a JSON head and raw little-endian columns:
//
//	uint32  length of the head in bytes
//	head    {"v": 1, "id": 7, "kind": "grow", "body": {...}, "columns": [{"name": "targets", "type": "i32", "length": 10}]}
//	padding with spaces inside the head to a multiple of 8, so that columns lie aligned
//	columns in order, each padded with zeros to a multiple of 8
//
// Non-finite numbers go as null. Seeds are uint32; digests and anything wider are strings. Leftover bytes are an error.
package wire

import (
	"encoding/json"
	"math"
	"strconv"
)

// Version of the protocol.
const Version = 1

// Num is a number that may be absent: NaN and infinities go as null, and null comes back as NaN.
type Num float64

func (n Num) MarshalJSON() ([]byte, error) {
	if f := float64(n); math.IsNaN(f) || math.IsInf(f, 0) {
		return []byte("null"), nil
	}
	return json.Marshal(float64(n))
}

func (n *Num) UnmarshalJSON(b []byte) error {
	if string(b) == "null" {
		*n = Num(math.NaN())
		return nil
	}
	f, err := strconv.ParseFloat(string(b), 64)
	*n = Num(f)
	return err
}

// Nums converts a slice.
func Nums(v []float64) []Num {
	out := make([]Num, len(v))
	for i, x := range v {
		out[i] = Num(x)
	}
	return out
}
