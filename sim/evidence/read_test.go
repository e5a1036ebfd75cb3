package evidence

import (
	"strings"
	"testing"
)

func TestLookGuesses(t *testing.T) {
	for name, c := range map[string]struct {
		data string
		want Mapping
	}{
		"named":           {"time,source,target\n1,a,b\n2,c,a\n", Mapping{Comma: ",", Header: true, Source: 1, Target: 2, Time: 0}},
		"other order":     {"to;when;from\r\nb;2024-01-02;a\r\na;2024-01-03;c\r\n", Mapping{Comma: ";", Header: true, Source: 2, Target: 0, Time: 1}},
		"tabs, no header": {"a\tb\t2024-01-02T10:00:00Z\nc\ta\t2024-01-03T10:00:00Z\n", Mapping{Comma: "\t", Header: false, Source: 0, Target: 1, Time: 2}},
		"bom, two only":   {"\ufeffsource,target\na,b\nc,a\n", Mapping{Comma: ",", Header: true, Source: 0, Target: 1, Time: -1}},
		"unknown header":  {"wer,wen,wann\na,b,2024-01-02\nc,a,2024-01-03\n", Mapping{Comma: ",", Header: true, Source: 0, Target: 1, Time: 2}},
	} {
		p, err := Look([]byte(c.data))
		if err != nil || p.Mapping != c.want {
			t.Errorf("%s: %+v, %v; want %+v", name, p.Mapping, err, c.want)
		}
	}
	for _, data := range []string{"", "one\ntwo\n"} {
		if _, err := Look([]byte(data)); err == nil {
			t.Errorf("%q is taken for a log", data)
		}
	}
}

func TestReadCountsProblems(t *testing.T) {
	data := "time,source,target\n1,a,b\n2,a\n3,c,c\n2O24,d,a\n-4,d,a\n5,\"e \"\"x\"\", y\",\"b\nb\"\n2024-02-30,a,b\n6,f,\"a\"x\n7,g,a\n"
	p, err := Look([]byte(data))
	if err != nil {
		t.Fatal(err)
	}
	l, err := Read([]byte(data), p.Mapping, nil)
	if err != nil {
		t.Fatal(err)
	}
	left := 0
	for _, q := range l.Problems {
		left += q.Count
		t.Log(q)
	}
	if l.Read != 9 || len(l.Time) != 3 || left != 6 || len(l.Problems) != 5 {
		t.Errorf("%d rows, %d used, %d left out for %d reasons", l.Read, len(l.Time), left, len(l.Problems))
	}
	if l.Names[2] != `e "x", y` || l.Names[3] != "b\nb" {
		t.Errorf("names %q", l.Names)
	}
	if !strings.HasPrefix(l.Problems[1].First[0], "line 4: ") {
		t.Errorf("quoted %q", l.Problems[1].First)
	}
}

// Latin-1: byte 0xE9 is é, 0xDF is ß (ISO 8859-1).
func TestLatinLetters(t *testing.T) {
	data := []byte("time,source,target\n1,caf\xe9,Gro\xdfhandel\n2,x,caf\xe9\n")
	p, err := Look(data)
	if err != nil || !strings.Contains(p.Why, "Latin-1") {
		t.Fatalf("%v, %q", err, p.Why)
	}
	l, err := Read(data, p.Mapping, nil)
	if err != nil || len(l.Names) != 3 || l.Names[0] != "café" || l.Names[1] != "Großhandel" {
		t.Errorf("%v, %q", err, l.Names)
	}
}

// a-b, b-a (a reply), c-a, a-c (a reply), d-a, b-a again (a reply that repeats a pair): totals reconcile.
func TestTreatments(t *testing.T) {
	data := []byte("source,target,time\na,b,1\nb,a,2\nc,a,3\na,c,4\nd,a,5\nb,a,6\n")
	p, err := Look(data)
	if err != nil {
		t.Fatal(err)
	}
	l, err := Read(data, p.Mapping, nil)
	if err != nil {
		t.Fatal(err)
	}
	all := NewHistory(l)
	if all.Replies != 3 || all.Repeats != 1 || len(all.Target) != 6 || all.Choices != 5 || all.ByNewcomers != 2 {
		t.Errorf("%+v", all)
	}
	left := NewHistoryOf(l, Treatment{LeaveReplies: true})
	if left.LeftOut != 3 || len(left.Target) != 3 || left.Choices != 2 || left.Members() != 4 || left.Groups() != 3 {
		t.Errorf("%+v", left)
	}
	few := NewHistoryOf(l, Treatment{NewcomersOnly: true})
	if few.Choices != 2 || len(few.Target) != 6 {
		t.Errorf("%+v", few)
	}
	s, err := Examine(left, quiet)
	if err != nil {
		t.Fatal(err)
	}
	c := Condense(l, s, "six")
	sum := c.Used
	for _, n := range c.LeftOut {
		sum += n
	}
	if c.Rows != 6 || sum != 6 || c.LeftOut[answers] != 3 {
		t.Errorf("%d rows, %d used, left out %v", c.Rows, c.Used, c.LeftOut)
	}
}

func TestTimes(t *testing.T) {
	for text, want := range map[string]float64{"12": 12, "1e3": 1000, "1970-01-02": 86400, "1970-01-01T00:01:00Z": 60, "1970-01-01 00:01": 60, "1970-01-01T01:00:00+01:00": 0} {
		if got, err := parseTime(text, ','); err != nil || got != want {
			t.Errorf("%s: %g, %v", text, got, err)
		}
	}
	if got, err := parseTime("3,5", ';'); err != nil || got != 3.5 {
		t.Errorf("decimal comma: %g, %v", got, err)
	}
	for _, text := range []string{"", "x", "NaN", "-1", "2024-13-01", "1970-01-01T00:00:00+25:00"} {
		if v, err := parseTime(text, ','); err == nil {
			t.Errorf("%q reads as %g", text, v)
		}
	}
}

func FuzzRead(f *testing.F) {
	f.Add([]byte("time,source,target\n1,a,b\n"))
	f.Add([]byte("\ufeffa;b\n\"x\"y;z\n"))
	f.Fuzz(func(t *testing.T, data []byte) {
		p, err := Look(data)
		if err != nil {
			return
		}
		l, err := Read(data, p.Mapping, nil)
		if err != nil {
			return
		}
		left := 0
		for _, q := range l.Problems {
			left += q.Count
		}
		if l.Read != len(l.Time)+left {
			t.Errorf("%d read, %d used, %d left out", l.Read, len(l.Time), left)
		}
		h := NewHistory(l)
		if len(h.Target) != len(l.Time) || h.Choices > len(h.Target) {
			t.Error("links lost")
		}
	})
}
