package evidence

import (
	"bytes"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"
	"time"
	"unicode/utf8"
)

// Limits of a log.
const (
	MaxRows  = 2_000_000
	MaxBytes = 256 << 20
)

// A Mapping says how the columns of a file are read. A Time of -1 takes the order of rows.
type Mapping struct {
	Comma  string `json:"comma"` // "," ";" or a tab
	Header bool   `json:"header"`
	Source int    `json:"source"`
	Target int    `json:"target"`
	Time   int    `json:"time"`
	Treatment
}

// A Treatment says which links count as choices.
type Treatment struct {
	LeaveReplies  bool `json:"leaveReplies"`  // links that answer an earlier one are left out
	NewcomersOnly bool `json:"newcomersOnly"` // only choices of members that arrive with them are scored; all links count as held
}

// A Preview is the first rows of a file and the guess how to read them.
type Preview struct {
	Columns []string   `json:"columns"`
	Rows    [][]string `json:"rows"`
	Mapping Mapping    `json:"mapping"`
	Why     string     `json:"why"`
}

// A Rows is a log as read: links in the order of the file, and what was left out.
type Rows struct {
	Source, Target []int32
	Time           []float64
	Names          []string // of the members by number
	Read           int
	Problems       []Problem
}

// A Problem is a kind of row that could not be used: how many, and the first of them.
type Problem struct {
	Reason string   `json:"reason"`
	Count  int      `json:"count"`
	First  []string `json:"first"`
}

// shown is how many rows of a problem are quoted.
const shown = 5

// Look guesses how a file is to be read.
func Look(data []byte) (Preview, error) {
	data, latin := text(data)
	if len(data) == 0 {
		return Preview{}, errors.New("the file is empty")
	}
	comma := separator(data)
	r := reader(data, comma)
	var rows [][]string
	for len(rows) < 200 {
		row, err := r.Read()
		if err == io.EOF {
			break
		}
		if err == nil {
			rows = append(rows, row)
		}
	}
	if len(rows) == 0 || len(rows[0]) < 2 {
		return Preview{}, errors.New("a link log needs at least two columns, source and target, separated by comma, semicolon or tab; only one was found")
	}
	p := Preview{Mapping: Mapping{Comma: string(comma), Time: -1, Source: -1, Target: -1}}
	p.byName(rows[0])
	p.byContent(rows, comma)
	if latin {
		p.Why += "; the letters are not UTF-8, so they are read as Latin-1"
	}
	for i, name := range rows[0] {
		if p.Mapping.Header {
			p.Columns = append(p.Columns, strings.TrimSpace(name))
		} else {
			p.Columns = append(p.Columns, fmt.Sprintf("column %d", i+1))
		}
	}
	p.Rows = rows[:min(len(rows), 9)]
	if p.Mapping.Header {
		p.Rows = p.Rows[1:]
	}
	if len(p.Rows) > 8 {
		p.Rows = p.Rows[:8]
	}
	return p, nil
}

// names that columns commonly carry, first match wins.
var names = map[string][]string{
	"source": {"source", "from", "newcomer", "chooser", "signer", "buyer", "sender", "citing", "referrer", "src"},
	"target": {"target", "to", "chosen", "signed", "supplier", "receiver", "cited", "referred", "dst"},
	"time":   {"time", "date", "datetime", "timestamp", "when", "day", "year", "t"},
}

func (p *Preview) byName(first []string) {
	set := map[string]*int{"source": &p.Mapping.Source, "target": &p.Mapping.Target, "time": &p.Mapping.Time}
	for kind, at := range set {
		for _, name := range names[kind] {
			for i, cell := range first {
				if *at < 0 && strings.EqualFold(strings.TrimSpace(cell), name) {
					*at = i
					p.Mapping.Header = true
				}
			}
		}
	}
	if p.Mapping.Header {
		p.Why = "columns recognised by their names"
	}
}

// byContent fills in what the names left open: a time column is one that reads as a time nearly everywhere; members are
// the first two columns left.
func (p *Preview) byContent(rows [][]string, comma rune) {
	body := rows[min(1, len(rows)-1):]
	m := &p.Mapping
	times := func(c int) bool {
		good := 0
		for _, row := range body {
			if c < len(row) {
				if _, err := parseTime(row[c], comma); err == nil {
					good++
				}
			}
		}
		return good*10 >= len(body)*9
	}
	if !m.Header {
		p.Why = "columns guessed from their content"
	}
	if m.Time < 0 && (len(rows[0]) > 2 || m.Header) {
		for _, c := range timeOrder(body) {
			if c != m.Source && c != m.Target && times(c) {
				m.Time = c
				break
			}
		}
	}
	for c := range rows[0] {
		if c == m.Time || c == m.Source || c == m.Target {
			continue
		}
		if m.Source < 0 {
			m.Source = c
		} else if m.Target < 0 {
			m.Target = c
		}
	}
	if !m.Header && m.Time >= 0 && m.Time < len(rows[0]) {
		_, err := parseTime(rows[0][m.Time], comma)
		m.Header = err != nil && len(rows) > 1 && times(m.Time)
	}
	if m.Time < 0 {
		p.Why += "; no time found, so the order of rows is taken"
	}
}

// timeOrder returns the columns in the order they are tried as times: dates first, then from the left.
func timeOrder(rows [][]string) []int {
	var dates, rest []int
	for c := range rows[0] {
		if _, err := strconv.ParseFloat(strings.TrimSpace(rows[0][c]), 64); err != nil {
			dates = append(dates, c)
		} else {
			rest = append(rest, c)
		}
	}
	return append(dates, rest...)
}

// text returns the letters of a file as UTF-8 without a byte order mark; a file that is not UTF-8 is taken for Latin-1
// (ISO 8859-1), whose bytes are the first 256 characters of Unicode.
func text(data []byte) (utf []byte, latin bool) {
	data = bytes.TrimPrefix(data, []byte("\ufeff"))
	if utf8.Valid(data) {
		return data, false
	}
	out := make([]byte, 0, len(data)+len(data)/8)
	for _, b := range data {
		out = utf8.AppendRune(out, rune(b))
	}
	return out, true
}

// separator picks the sign that splits the first lines into the most columns, the same number in each.
func separator(data []byte) rune {
	best, most := ',', 0
	for _, c := range []rune{',', ';', '\t'} {
		r := reader(data, c)
		width, rows := 0, 0
		for rows < 20 {
			row, err := r.Read()
			if err != nil {
				break
			}
			if rows++; rows == 1 || len(row) < width {
				width = len(row)
			}
		}
		if width > most {
			best, most = c, width
		}
	}
	return best
}

func reader(data []byte, comma rune) *csv.Reader {
	r := csv.NewReader(bytes.NewReader(data))
	r.Comma = comma
	r.FieldsPerRecord = -1
	return r
}

var layouts = []string{time.RFC3339Nano, "2006-01-02", "2006-01-02T15:04:05", "2006-01-02 15:04:05", "2006-01-02 15:04", "2006-01-02T15:04", "2006-01-02 15:04:05Z07:00", "2006-01-02T15:04:05.999999999", "2006-01"}

var (
	errTime     = errors.New("the time is neither a number nor an ISO 8601 date")
	errNegative = errors.New("the time is negative")
)

// parseTime reads a number or an ISO 8601 date, date and time with or without zone (UTC where none is given).
func parseTime(cell string, comma rune) (float64, error) {
	cell = strings.TrimSpace(cell)
	text := cell
	if comma != ',' && strings.Count(cell, ",") == 1 && !strings.Contains(cell, ".") {
		text = strings.Replace(cell, ",", ".", 1)
	}
	if v, err := strconv.ParseFloat(text, 64); err == nil {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return 0, errTime
		}
		if v < 0 {
			return 0, errNegative
		}
		return v, nil
	}
	for _, layout := range layouts {
		if t, err := time.Parse(layout, cell); err == nil {
			return float64(t.UnixMilli()) / 1000, nil
		}
	}
	return 0, errTime
}

// Read reads a log by a mapping. Rows that cannot be used are counted by reason, the first of them quoted, and reading
// goes on. step is called with the share done.
func Read(data []byte, m Mapping, step func(done float64) error) (*Rows, error) {
	if len(data) > MaxBytes {
		return nil, fmt.Errorf("the file has %d MiB; %d are allowed", len(data)>>20, MaxBytes>>20)
	}
	data, _ = text(data)
	if m.Source < 0 || m.Target < 0 || m.Source == m.Target {
		return nil, errors.New("choose two different columns, one for the source and one for the target of a link")
	}
	comma := []rune(m.Comma)
	if len(comma) != 1 || !strings.ContainsRune(",;\t", comma[0]) {
		return nil, errors.New("the separator must be a comma, a semicolon or a tab")
	}
	r := reader(data, comma[0])
	r.ReuseRecord = true
	l := &Rows{}
	numbers := map[string]int32{}
	number := func(name string) int32 {
		n, known := numbers[name]
		if !known {
			n = int32(len(l.Names))
			name = strings.Clone(name)
			numbers[name] = n
			l.Names = append(l.Names, name)
		}
		return n
	}
	for first := true; ; first = false {
		row, err := r.Read()
		if err == io.EOF {
			break
		}
		if first && m.Header {
			continue
		}
		if l.Read++; l.Read > MaxRows {
			return nil, fmt.Errorf("the log has more than %d rows, which is the limit; nothing was loaded", MaxRows)
		}
		if l.Read%20000 == 0 && step != nil {
			if err := step(float64(r.InputOffset()) / float64(len(data))); err != nil {
				return nil, err
			}
		}
		var broken *csv.ParseError
		if errors.As(err, &broken) {
			l.refuse("the quoting is broken", broken.StartLine, []string{broken.Err.Error()})
			continue
		}
		line, _ := r.FieldPos(0)
		if reason := l.take(row, m, comma[0], number); reason != "" {
			l.refuse(reason, line, row)
		}
	}
	return l, nil
}

// take adds a row, or returns the reason why it cannot be used.
func (l *Rows) take(row []string, m Mapping, comma rune, number func(string) int32) string {
	cell := func(c int) string {
		if c >= len(row) {
			return ""
		}
		return strings.TrimSpace(row[c])
	}
	source, target := cell(m.Source), cell(m.Target)
	if source == "" || target == "" || (m.Time >= 0 && cell(m.Time) == "") {
		return "a field is missing"
	}
	at := float64(l.Read)
	if m.Time >= 0 {
		var err error
		if at, err = parseTime(cell(m.Time), comma); err != nil {
			return err.Error()
		}
	}
	if source == target {
		return "the member links to itself"
	}
	l.Source = append(l.Source, number(source))
	l.Target = append(l.Target, number(target))
	l.Time = append(l.Time, at)
	return ""
}

func (l *Rows) refuse(reason string, line int, row []string) {
	at := -1
	for i := range l.Problems {
		if l.Problems[i].Reason == reason {
			at = i
		}
	}
	if at < 0 {
		l.Problems = append(l.Problems, Problem{Reason: reason, First: []string{}})
		at = len(l.Problems) - 1
	}
	p := &l.Problems[at]
	if p.Count++; len(p.First) < shown {
		text := strings.Join(row, ", ")
		if r := []rune(text); len(r) > 80 {
			text = string(r[:80]) + "…"
		}
		p.First = append(p.First, fmt.Sprintf("line %d: %s", line, text))
	}
}
