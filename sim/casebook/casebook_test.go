package casebook

import (
	"bytes"
	"encoding/json"
	"strings"
	"testing"
)

func TestDemoGoesRound(t *testing.T) {
	c := Demo()
	file, err := c.File()
	if err != nil {
		t.Fatal(err)
	}
	back, err := Read(file)
	if err != nil {
		t.Fatal(err)
	}
	again, _ := back.File()
	if !bytes.Equal(file, again) {
		t.Error("the case file changes when it is read and written")
	}
	code, err := c.Code()
	if err != nil {
		t.Fatal(err)
	}
	t.Logf("demo: %d characters", len(code))
	linked, err := Decode("file:///somewhere/preponder.html#c=" + code)
	if err != nil {
		t.Fatal(err)
	}
	if again, _ = linked.File(); !bytes.Equal(file, again) {
		t.Error("the link loses something")
	}
	one := Casebook{Casebook: 1, Title: "Larkmoor parts exchange", Entries: []Entry{c.Entries[1]}}
	if code, _ = one.Code(); len(code) > 300 {
		t.Errorf("one plain entry takes %d characters", len(code))
	}
}

func TestCodesThatFail(t *testing.T) {
	code, _ := Demo().Code()
	altered := []byte(code)
	altered[40] ^= 1
	for name, c := range map[string]struct{ code, says string }{
		"cut":           {code[:len(code)/2], "cut off"},
		"altered":       {string(altered), "altered"},
		"later version": {"9" + code[1:], "version 9"},
		"no code":       {"hello", "not a Preponder code"},
		"huge":          {"1." + strings.Repeat("A", MaxCode), "allowed"},
		"empty":         {"", "not a Preponder code"},
	} {
		if _, err := Decode(c.code); err == nil || !strings.Contains(err.Error(), c.says) {
			t.Errorf("%s: %v", name, err)
		}
	}
}

func TestReadNamesWhatIsWrong(t *testing.T) {
	entry := func(s string) string { return `{"casebook":1,"entries":[` + s + `]}` }
	for _, c := range []struct{ file, says string }{
		{``, "not a casebook"},
		{`{"entries":[]}`, `"casebook"`},
		{`{"casebook":7,"entries":[]}`, "version 7"},
		{`{"casebook":1,"entries":[]}`, "no entry"},
		{entry(`{"sharpnes":1}`), `"sharpnes"`},
		{entry(`{"growth":{"link":1}}`), `"link"`},
		{entry(`{"sharpness":-1}`), "sharpness is -1"},
		{entry(`{"sharpness":"x"}`), "sharpness"},
		{entry(`{"growth":{"members":20000000}}`), "members is 20,000,000; it must be from 2 to 10,000,000"},
		{entry(`{"growth":{"links":65}}`), "links is 65"},
		{entry(`{"growth":{"fading":3.5}}`), "fading is 3.5; it must be from 0 to 3"},
		{entry(`{"growth":{"start":"evidence"}}`), "holds none"},
		{entry(`{"law":{"family":"evidence"}}`), "holds none"},
		{entry(`{"law":{"family":"cauchy"}}`), `"cauchy"`},
		{entry(`{"law":{"family":"power","theta":-1}}`), "theta"},
		{entry(`{"law":{"family":"power","tetha":1}}`), `"tetha"`},
		{entry(`{"law":{"family":"tiers","tiers":[]}}`), "1 to 64 levels"},
		{entry(`{}`) + "x", "byte"},
	} {
		if _, err := Read([]byte(c.file)); err == nil || !strings.Contains(err.Error(), c.says) {
			t.Errorf("%s: %v; want it to say %q", c.file, err, c.says)
		}
	}
}

func FuzzRead(f *testing.F) {
	file, _ := Demo().File()
	f.Add(file)
	f.Add([]byte(`{"casebook":1,"entries":[{"law":{"family":"tiers","tiers":[{"energy":0,"weight":1}]}}]}`))
	f.Fuzz(func(t *testing.T, data []byte) {
		c, err := Read(data)
		if err != nil {
			return
		}
		file, err := c.File()
		if err != nil {
			t.Fatal(err)
		}
		if _, err := Read(file); err != nil {
			t.Fatalf("own file refused: %v", err)
		}
		compact, err := c.Compact()
		if err != nil || !json.Valid(compact) {
			t.Fatal(err)
		}
		if d, err := Read(compact); err != nil {
			t.Fatalf("own compact form refused: %v", err)
		} else if again, _ := d.File(); !bytes.Equal(again, file) {
			t.Fatal("the compact form says something else")
		}
		for k := range c.Entries {
			c.LawOf(k)
		}
	})
}

func FuzzDecode(f *testing.F) {
	code, _ := Demo().Code()
	f.Add(code)
	f.Fuzz(func(t *testing.T, code string) { _, _ = Decode(code) })
}
