package wire

import (
	"bytes"
	"encoding/json"
	"flag"
	"os"
	"path/filepath"
	"testing"
)

// go test ./sim/wire -write makes the golden packets anew.
var write = flag.Bool("write", false, "write testdata")

var golden = map[string]Packet{
	"request":  {ID: 7, Kind: "solve", Body: json.RawMessage(`{"casebook":{"casebook":1,"entries":[{"title":"Größe “ε”","sharpness":1.5}]},"entry":0}`)},
	"progress": {ID: 7, Kind: "progress", Body: json.RawMessage(`{"done":0.25,"what":"growing the network","seconds":0.5}`)},
	"done": {ID: 4294967295, Kind: "done", Body: json.RawMessage(`{"margin":null,"members":3}`), Columns: []Column{
		{Name: "targets", Int32: []int32{0, 0, 1, -1, 2147483647}}, {Name: "pull", Float32: []float32{0.5, -1.25, 3e-20}}, {Name: "file", Bytes: []byte("a,b\r\n")}}},
	"failed": {ID: 1, Kind: "failed", Body: json.RawMessage(`{"sentence":"The casebook has no entry.","cancelled":false,"fault":false}`)},
	"cancel": {ID: 12, Kind: "cancel", Body: json.RawMessage(`{}`)},
	"empty":  {ID: 0, Kind: "", Body: json.RawMessage(`{}`), Columns: []Column{{Name: "file", Bytes: []byte{}}}},
}

func TestGoldenPackets(t *testing.T) {
	for name, p := range golden {
		path := filepath.Join("testdata", name+".packet")
		if *write {
			if err := os.WriteFile(path, Encode(p), 0o644); err != nil {
				t.Fatal(err)
			}
		}
		want, err := os.ReadFile(path)
		if err != nil {
			t.Fatal(err)
		}
		if got := Encode(p); !bytes.Equal(got, want) {
			t.Errorf("%s: other bytes than the golden packet", name)
		}
		back, err := Decode(want)
		if err != nil {
			t.Fatalf("%s: %v", name, err)
		}
		if again := Encode(back); !bytes.Equal(again, want) {
			t.Errorf("%s: decoding and encoding changes it", name)
		}
	}
}

func TestBrokenPackets(t *testing.T) {
	whole := Encode(golden["done"])
	for n := range whole {
		if _, err := Decode(whole[:n]); err == nil {
			t.Errorf("the first %d of %d bytes are taken for a packet", n, len(whole))
		}
	}
	if _, err := Decode(append(whole, 0)); err == nil {
		t.Error("a byte left over is not noticed")
	}
}

func FuzzDecode(f *testing.F) {
	for _, p := range golden {
		f.Add(Encode(p))
	}
	f.Fuzz(func(t *testing.T, data []byte) {
		p, err := Decode(data)
		if err != nil {
			return
		}
		if _, err := Decode(Encode(p)); err != nil {
			t.Errorf("read, but not read again: %v", err)
		}
	})
}

func TestNum(t *testing.T) {
	b, err := json.Marshal(Nums([]float64{1.5, 1 / zero(), -1 / zero(), zero() / zero()}))
	if err != nil || string(b) != "[1.5,null,null,null]" {
		t.Errorf("%s, %v", b, err)
	}
	var n []Num
	if err := json.Unmarshal(b, &n); err != nil || n[0] != 1.5 || n[1] == n[1] {
		t.Errorf("%v, %v", n, err)
	}
}

func zero() float64 { return 0 }
