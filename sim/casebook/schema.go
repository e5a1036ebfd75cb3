// Package casebook is the document: an ordered list of entries about one network, and its evidence.
package casebook

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"strings"

	"preponder/sim/evidence"
)

// Version of the case format this program reads and writes.
const Version = 1

// A Casebook is the whole document. Every entry is complete by itself; omitted fields take their defaults.
type Casebook struct {
	Casebook int                 `json:"casebook"`
	Title    string              `json:"title"`
	Entries  []Entry             `json:"entries"`
	Evidence *evidence.Condensed `json:"evidence"`
}

// An Entry is one situation of the network.
type Entry struct {
	Title     string  `json:"title"`
	Note      string  `json:"note"`
	Law       Law     `json:"law"`
	Sharpness float64 `json:"sharpness"`
	Growth    Growth  `json:"growth"`
	Outlook   Outlook `json:"outlook"`
}

// Growth says how the network grows.
type Growth struct {
	Links      float64 `json:"links"`
	Members    int     `json:"members"`
	Seed       uint32  `json:"seed"`
	Start      string  `json:"start"`
	Kernel     float64 `json:"kernel"`
	HeadStart  float64 `json:"headStart"`
	OpenShare  float64 `json:"openShare"`
	Distinct   bool    `json:"distinct"`
	Ceiling    float64 `json:"ceiling"`
	Levy       Levy    `json:"levy"`
	Fading     float64 `json:"fading"`
	Idling     float64 `json:"idling"`
	Expiry     int     `json:"expiry"`
	LeversFrom int     `json:"leversFrom"`
}

// A Levy counts tickets above a share for less.
type Levy struct {
	Above float64 `json:"above"`
	Rate  float64 `json:"rate"`
}

// Outlook says how far and how often the network is grown forward.
type Outlook struct {
	Horizon int     `json:"horizon"`
	Runs    int     `json:"runs"`
	Limit   float64 `json:"limit"`
}

// NewEntry returns an entry with every default.
func NewEntry() Entry {
	return Entry{
		Law:       Law{Family: "power", Values: map[string]float64{"theta": 1}},
		Sharpness: 1,
		Growth:    Growth{Links: 2, Members: 5000, Seed: 1, Start: "one", Kernel: 1},
		Outlook:   Outlook{Horizon: 20000, Runs: 200, Limit: 0.2},
	}
}

func (e *Entry) UnmarshalJSON(data []byte) error {
	type plain Entry
	p := plain(NewEntry())
	d := json.NewDecoder(bytes.NewReader(data))
	d.DisallowUnknownFields()
	if err := d.Decode(&p); err != nil {
		return err
	}
	*e = Entry(p)
	return nil
}

// Read decodes and checks a casebook. Errors are sentences.
func Read(data []byte) (Casebook, error) {
	var c Casebook
	var version struct {
		Casebook *int `json:"casebook"`
	}
	if err := json.Unmarshal(data, &version); err != nil {
		return c, fmt.Errorf("this is not a casebook: %s", plainly(err))
	}
	switch {
	case version.Casebook == nil:
		return c, errors.New("this is not a casebook: the field \"casebook\" with its version is missing")
	case *version.Casebook > Version:
		return c, fmt.Errorf("this casebook is of version %d; this program reads version %d. Open it with a newer Preponder", *version.Casebook, Version)
	case *version.Casebook < 1:
		return c, fmt.Errorf("a casebook of version %d does not exist", *version.Casebook)
	}
	d := json.NewDecoder(bytes.NewReader(data))
	d.DisallowUnknownFields()
	if err := d.Decode(&c); err != nil {
		return c, fmt.Errorf("the casebook cannot be read: %s", plainly(err))
	}
	if _, err := d.Token(); err != io.EOF {
		return c, errors.New("the casebook cannot be read: something follows after its end")
	}
	return c, c.Check()
}

// plainly turns a decoder's message into plain words.
func plainly(err error) string {
	var syntax *json.SyntaxError
	var kind *json.UnmarshalTypeError
	switch {
	case errors.As(err, &syntax):
		return fmt.Sprintf("it is broken at byte %d (%s)", syntax.Offset, strings.TrimPrefix(syntax.Error(), "json: "))
	case errors.As(err, &kind):
		return fmt.Sprintf("the field %q holds a %s where a %s belongs", kind.Field, kind.Value, kind.Type)
	case errors.Is(err, io.ErrUnexpectedEOF) || errors.Is(err, io.EOF):
		return "it ends too early"
	}
	return strings.TrimPrefix(err.Error(), "json: ")
}
