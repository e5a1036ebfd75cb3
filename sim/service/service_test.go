package service

import (
	"encoding/json"
	"strings"
	"testing"

	"preponder/sim/casebook"
	"preponder/sim/growth"
	"preponder/sim/internal/near"
	"preponder/sim/law"
	"preponder/sim/wire"
)

func ask(t *testing.T, e *Engine, kind string, body any, columns ...wire.Column) wire.Packet {
	t.Helper()
	b, err := json.Marshal(body)
	if err != nil {
		t.Fatal(err)
	}
	return e.Handle(wire.Packet{ID: 3, Kind: kind, Body: b, Columns: columns}, func(float64, string) error { return nil })
}

func answer[T any](t *testing.T, p wire.Packet) (out T) {
	t.Helper()
	if p.Kind != "done" || p.ID != 3 {
		t.Fatalf("%s %d: %s", p.Kind, p.ID, p.Body)
	}
	if err := json.Unmarshal(p.Body, &out); err != nil {
		t.Fatal(err)
	}
	return out
}

// TestLarkmoorLog walks the chain: the sample log, its verdict, an entry that starts from it, an outlook, a link.
func TestLarkmoorLog(t *testing.T) {
	e := &Engine{}
	log := ask(t, e, "sample", nil).Column("file")
	preview := answer[struct{ Mapping json.RawMessage }](t, ask(t, e, "look", nil, log))
	report := answer[ReadReport](t, ask(t, e, "read", map[string]any{"mapping": preview.Mapping, "label": "larkmoor.csv"}, log))
	if report.Members != 5000 || report.Links != 9998 || len(report.Problems) != 0 {
		t.Errorf("read %+v", report)
	}
	s := answer[struct {
		Evidence json.RawMessage
		Entry    casebook.Entry
		Heading  string
	}](t, ask(t, e, "study", nil))
	if s.Heading != "Heading for a condensate" {
		t.Errorf("the sample log says %q", s.Heading)
	}
	book, err := json.Marshal(map[string]any{"casebook": 1, "entries": []any{s.Entry}, "evidence": s.Evidence})
	if err != nil {
		t.Fatal(err)
	}
	s.Entry.Outlook.Horizon = 8000
	part := ask(t, e, "outlook", map[string]any{"casebook": json.RawMessage(book), "from": 0, "to": 6})
	o := answer[Gathered](t, ask(t, e, "gather", map[string]any{"parts": []json.RawMessage{part.Body}}))
	near.Rel(t, "leader today", o.Today, report.Leader.Share, 1e-12)
	code := answer[struct{ Code, Holds string }](t, ask(t, e, "encode", map[string]any{"casebook": json.RawMessage(book)}))
	if len(code.Code) > 4000 {
		t.Errorf("a link with evidence takes %d characters", len(code.Code))
	}
	t.Logf("%d characters: %s", len(code.Code), code.Holds)
	back := answer[struct{ Casebook json.RawMessage }](t, ask(t, e, "decode", map[string]any{"code": code.Code}))
	again := ask(t, e, "outlook", map[string]any{"casebook": back.Casebook, "from": 0, "to": 6})
	if string(again.Body) != string(part.Body) {
		t.Error("the link gives another outlook")
	}
}

func TestFailuresAreSentences(t *testing.T) {
	e := &Engine{}
	demo, _ := casebook.Demo().File()
	for _, c := range []struct {
		kind string
		body any
		says string
	}{
		{"fly", nil, "does not know"},
		{"solve", map[string]any{"casebook": map[string]any{"casebook": 1}}, "The casebook has no entry."},
		{"solve", map[string]any{"casebook": json.RawMessage(demo), "entry": 9}, "There is no entry 10"},
		{"decode", map[string]any{"code": "x"}, "This is not a Preponder code"},
		{"study", nil, "No log has been read yet."},
		{"export", nil, "No network has been grown yet."},
		{"read", map[string]any{"mapping": map[string]any{"comma": ",", "source": 0, "target": 0}}, "Choose two different columns"},
		{"gather", map[string]any{"parts": []any{}}, "no part"},
	} {
		p := ask(t, e, c.kind, c.body)
		var f Failure
		if err := json.Unmarshal(p.Body, &f); err != nil || p.Kind != "failed" || !strings.Contains(f.Sentence, c.says) {
			t.Errorf("%s: %s %s", c.kind, p.Kind, p.Body)
		}
	}
}

func TestCancel(t *testing.T) {
	e := &Engine{}
	demo, _ := casebook.Demo().File()
	body, _ := json.Marshal(map[string]any{"casebook": json.RawMessage(demo), "entry": 0, "from": 0, "to": 200})
	steps := 0
	p := e.Handle(wire.Packet{ID: 3, Kind: "outlook", Body: body}, func(float64, string) error {
		if steps++; steps > 5 {
			return ErrCancelled
		}
		return nil
	})
	var f Failure
	if err := json.Unmarshal(p.Body, &f); err != nil || !f.Cancelled {
		t.Errorf("%s", p.Body)
	}
}

func FuzzHandle(f *testing.F) {
	demo, _ := casebook.Demo().File()
	for kind := range kinds {
		f.Add(kind, []byte(`{"casebook":`+string(demo)+`,"entry":0,"from":0,"to":1}`), []byte("a,b\nc,a\n"))
	}
	f.Fuzz(func(t *testing.T, kind string, body, file []byte) {
		if len(body) > 2000 || len(file) > 2000 || strings.Contains(string(body), "0000") {
			return // no big networks here
		}
		e := &Engine{}
		steps := 0
		p := e.Handle(wire.Packet{Kind: kind, Body: body, Columns: []wire.Column{{Name: "file", Bytes: file}}}, func(float64, string) error {
			if steps++; steps > 50 {
				return ErrCancelled
			}
			return nil
		})
		var fail Failure
		if p.Kind == "failed" && json.Unmarshal(p.Body, &fail) == nil && fail.Fault && !strings.Contains(fail.Sentence, "does not know") {
			t.Errorf("%s: %s", kind, fail.Sentence)
		}
	})
}

func TestLawsAlone(t *testing.T) {
	var e Engine
	ask := func(kind, body string) string {
		return string(e.Handle(wire.Packet{ID: 1, Kind: kind, Body: []byte(body)}, func(float64, string) error { return nil }).Body)
	}
	for body, want := range map[string]string{
		`{"law":{"family":"formula","density":"e*(2-","top":2}}`:       `{"at":6,"fault":"The formula cannot be read, at character 6: the formula ends too early."}`,
		`{"law":{"family":"formula","density":"e-1","top":2}}`:         `"at":0,"fault":"The density is negative`,
		`{"law":{"family":"drawn","knots":[[0,1],[1,0,2]]}}`:           `knot 2 has 3 numbers`,
		`{"law":{"family":"drawn","knots":[[0,1],[1,0]],"theta":1}}`:   `no field \"theta\"`,
		`{"law":{"family":"power","theta":1,"knots":[[0,1],[1,0]]}}`:   `no field \"knots\"`,
		`{"law":{"family":"drawn","knots":[[0,1],[1,0]]}}`:             `{"law":{"family":"drawn","knots":[[0,1],[1,0]]}}`,
		`{"law":{"family":"formula","density":"e * (2 - e)","top":2}}`: `"density":"e * (2 - e)"`,
		`{"law":{"family":"formula","density":""}}`:                    `The formula is empty`,
	} {
		if got := ask("law", body); !strings.Contains(got, want) {
			t.Errorf("%s: %s, want %s", body, got, want)
		}
	}
	if got := ask("sketch", `{"casebook":{"casebook":1,"entries":[{"law":{"family":"power","theta":1}}]},"entry":0}`); got != `{"knots":[[0,0],[1,2]]}` {
		t.Errorf("a straight law is sketched as %s", got)
	}
}

// Links by level, against a recount at every size.
func TestLevels(t *testing.T) {
	n, err := growth.Grow(growth.Params{Law: law.Power{Theta: 1}, Sharpness: 3, Links: 2, Members: 3000, Seed: 5}, nil)
	if err != nil {
		t.Fatal(err)
	}
	sizes := []int32{2, 10, 500, 3000}
	got := levels(n, sizes)
	for k, size := range sizes {
		for b, within := range Bands {
			held, all := 0, 0
			for j, d := range n.Received(int(size)) {
				all += int(d)
				if n.Law.Cumulative(n.Energy[j]) <= within {
					held += int(d)
				}
			}
			near.Rel(t, "share held", got[b][k], float64(held)/float64(all), 1e-12)
		}
	}
}
