package main

import (
	"bytes"
	"compress/gzip"
	"encoding/json"
	"errors"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"

	"preponder/sim/internal/near"
)

func answer(t *testing.T, in string, args ...string) (string, error) {
	t.Helper()
	var out bytes.Buffer
	err := run(args, strings.NewReader(in), &out)
	return out.String(), err
}

func TestWalkThrough(t *testing.T) {
	dir := t.TempDir()
	file := func(name, text string) string {
		path := filepath.Join(dir, name)
		if err := os.WriteFile(path, []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
		return path
	}
	must := func(args ...string) string {
		t.Helper()
		out, err := answer(t, "", args...)
		if err != nil {
			t.Fatalf("%v: %v", args, err)
		}
		return out
	}
	log := file("larkmoor.csv", must("sample"))
	// Packed by gzip (RFC 1952) it says the same; cut off it is refused.
	var packed bytes.Buffer
	z := gzip.NewWriter(&packed)
	if _, err := z.Write([]byte(must("sample"))); err != nil || z.Close() != nil {
		t.Fatal(err)
	}
	if must("read", file("larkmoor.csv.gz", packed.String())) != must("read", log) {
		t.Error("packed, the log says otherwise")
	}
	if _, err := answer(t, "", "read", file("cut.gz", packed.String()[:packed.Len()/2])); err == nil || !strings.Contains(err.Error(), "cannot be unpacked") {
		t.Errorf("a file cut off: %v", err)
	}
	read := map[string]any{}
	if err := json.Unmarshal([]byte(must("read", log, "--map", "source=source,target=3")), &read); err != nil {
		t.Fatal(err)
	}
	if read["verdict"] != "condensate" || read["members"] != 5000.0 {
		t.Errorf("the sample reads as %v with %v members", read["verdict"], read["members"])
	}
	book := file("book.json", must("read", log, "--condensed"))
	whole := must("outlook", book, "--runs", "0-9")
	a, b := file("a.json", must("outlook", book, "--runs", "0-3", "--partial")), file("b.json", must("outlook", "--partial", "--runs", "4-9", book))
	if must("gather", b, a) != whole {
		t.Error("two parts gathered give another answer than one run")
	}
	grown := filepath.Join(dir, "grown.csv")
	must("grow", file("one.json", `{"casebook":1,"entries":[{"growth":{"members":50}}]}`), "--log", grown)
	if lines, err := os.ReadFile(grown); err != nil || strings.Count(string(lines), "\n") != 99 {
		t.Errorf("the log of 50 members has %d lines, %v", strings.Count(string(lines), "\n"), err)
	}
}

// What the command writes is read by networkx and igraph (Debian's python3-networkx and python3-igraph), and agrees.
func TestExportsAreRead(t *testing.T) {
	python := near.Python(t, "networkx, igraph")
	dir := t.TempDir()
	file := func(name string) string { return filepath.Join(dir, name) }
	_, err := answer(t, `{"casebook":1,"entries":[{"sharpness":2,"growth":{"members":3000,"links":3}}]}`, "grow", "-", "--graphml", file("a.graphml"), "--log", file("a.csv"), "--degrees", file("d.csv"))
	if err != nil {
		t.Fatal(err)
	}
	out, err := exec.Command(python, "testdata/graph.py", file("a.graphml"), file("a.csv"), file("d.csv")).CombinedOutput()
	if err != nil {
		t.Fatalf("%v: %s", err, out)
	}
	want := `{"networkx": [3000, 8997, true], "igraph": [3000, 8997, true], "csv": [3000, 8997], "degrees agree": true, "edges agree": true, "energies agree": true}`
	if string(out) != want {
		t.Errorf("%s, want %s", out, want)
	}
}

func TestVary(t *testing.T) {
	out, err := answer(t, `{"casebook":1,"entries":[{"sharpness":3}]}`, "solve", "-", "--vary", "theta=0.5:2:0.5")
	if err != nil {
		t.Fatal(err)
	}
	lines := strings.Split(strings.TrimSpace(out), "\r\n")
	if len(lines) != 5 || !strings.HasPrefix(lines[0], "theta,regime,groundIntegral,") || !strings.HasPrefix(lines[2], "1,condensate,0.32029014638202") {
		t.Errorf("%q", lines)
	}
	// A row is what solve says of the same case.
	one, err := answer(t, `{"casebook":1,"entries":[{"sharpness":3,"law":{"family":"power","theta":0.5}}]}`, "solve", "-")
	if err != nil {
		t.Fatal(err)
	}
	if i := strings.Split(lines[1], ",")[2]; !strings.Contains(one, `"groundIntegral": `+i) {
		t.Errorf("ground integral %s is not that of solve", i)
	}
}

func TestMisuseAndBadInput(t *testing.T) {
	for _, c := range []struct {
		args   []string
		in     string
		misuse bool
		says   string
	}{
		{nil, "", true, "say what to do"},
		{[]string{"fly"}, "", true, `"fly"`},
		{[]string{"solve"}, "", true, "name one file"},
		{[]string{"solve", "-", "--wrong"}, "", true, "-wrong"},
		{[]string{"outlook", "-", "--runs", "many"}, "{}", true, "--runs"},
		{[]string{"gather"}, "", true, "parts"},
		{[]string{"solve", "-", "--vary", "sharpness"}, "{}", true, "--vary takes"},
		{[]string{"solve", "-", "--vary", "sharpness=0:1:0"}, "{}", true, "by a step above 0"},
		{[]string{"solve", "-", "--vary", "sharpness=0:1:1e-9"}, "{}", true, "more than 100000 rows"},
		{[]string{"solve", "-", "--vary", "wind=0:1:1"}, `{"casebook":1,"entries":[{}]}`, false, `no field "wind"`},
		{[]string{"solve", "-", "--vary", "theta=-2:1:1"}, `{"casebook":1,"entries":[{}]}`, false, "theta of the power law is -2"},
		{[]string{"solve", "-"}, "{}", false, "not a casebook"},
		{[]string{"solve", "-"}, "hello", false, "not a Preponder code"},
		{[]string{"solve", "-", "--entry", "4"}, `{"casebook":1,"entries":[{}]}`, false, "There is no entry 4"},
		{[]string{"read", "-"}, "", false, "The file is empty"},
		{[]string{"read", "-", "--map", "source=x"}, "a,b\n1,2\n", false, `no column "x"`},
		{[]string{"solve", "nowhere.json"}, "", false, "nowhere.json"},
	} {
		_, err := answer(t, c.in, c.args...)
		if err == nil || errors.Is(err, errUsage) != c.misuse || !strings.Contains(err.Error(), c.says) {
			t.Errorf("%v: %v", c.args, err)
		}
	}
}
