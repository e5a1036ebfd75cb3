// Command preponder answers the requests of the page from a terminal.
//
//	preponder solve CASE [--entry k] [--curves] [--vary sharpness=0.5:8:0.1]
//	preponder grow CASE [--entry k] [--log FILE.csv] [--degrees FILE.csv] [--graphml FILE.graphml]
//	preponder read LOG.csv[.gz] [--map source=..,target=..,time=..] [--leave-replies] [--newcomers-only] [--condensed]
//	preponder outlook CASE [--entry k] [--runs 0-199] [--partial]
//	preponder gather PART...
//	preponder sample
//
// CASE is a casebook file, a code, or - for standard input. Answers are JSON on standard output, CSV with --vary; errors go to standard
// error, with exit code 1 for bad input and 2 for misuse.
package main

import (
	"bytes"
	"encoding/json"
	"errors"
	"flag"
	"fmt"
	"io"
	"os"
	"strconv"
	"strings"

	"preponder/sim/evidence"
	"preponder/sim/service"
	"preponder/sim/wire"
)

// errUsage marks misuse of the command.
var errUsage = errors.New("usage")

func main() {
	err := run(os.Args[1:], os.Stdin, os.Stdout)
	switch {
	case errors.Is(err, errUsage):
		fmt.Fprintln(os.Stderr, "preponder:", strings.TrimPrefix(err.Error(), "usage: "))
		fmt.Fprintln(os.Stderr, "use: preponder solve|grow|outlook CASE, read LOG.csv, gather PART..., sample")
		os.Exit(2)
	case err != nil:
		fmt.Fprintln(os.Stderr, "preponder:", err)
		os.Exit(1)
	}
}

// A call is one invocation with its flags.
type call struct {
	engine  service.Engine
	in      io.Reader
	out     io.Writer
	entry   int
	curves  bool
	partial bool
	keep    bool
	log     string
	graph   string
	degrees string
	runs    string
	mapping string
	vary    string

	treatment evidence.Treatment
	args      []string
}

func run(args []string, in io.Reader, out io.Writer) error {
	if len(args) == 0 {
		return fmt.Errorf("%w: say what to do", errUsage)
	}
	c := &call{in: in, out: out}
	verb := map[string]func() error{"solve": c.solve, "grow": c.grow, "read": c.read, "outlook": c.outlook, "gather": c.gather, "sample": c.sample}[args[0]]
	if verb == nil {
		return fmt.Errorf("%w: there is no request %q", errUsage, args[0])
	}
	flags := flag.NewFlagSet(args[0], flag.ContinueOnError)
	flags.SetOutput(io.Discard)
	flags.IntVar(&c.entry, "entry", 1, "")
	flags.BoolVar(&c.curves, "curves", false, "")
	flags.BoolVar(&c.partial, "partial", false, "")
	flags.BoolVar(&c.keep, "condensed", false, "")
	flags.StringVar(&c.log, "log", "", "")
	flags.StringVar(&c.graph, "graphml", "", "")
	flags.StringVar(&c.degrees, "degrees", "", "")
	flags.StringVar(&c.runs, "runs", "", "")
	flags.StringVar(&c.vary, "vary", "", "")
	flags.StringVar(&c.mapping, "map", "", "")
	flags.BoolVar(&c.treatment.LeaveReplies, "leave-replies", false, "")
	flags.BoolVar(&c.treatment.NewcomersOnly, "newcomers-only", false, "")
	// Flags may stand before and after files.
	rest := args[1:]
	for len(rest) > 0 {
		if err := flags.Parse(rest); err != nil {
			return fmt.Errorf("%w: %v", errUsage, err)
		}
		if rest = flags.Args(); len(rest) > 0 {
			c.args, rest = append(c.args, rest[0]), rest[1:]
		}
	}
	return verb()
}

// ask sends one request and returns the reply, or its sentence as an error.
func (c *call) ask(kind string, body any, columns ...wire.Column) (wire.Packet, error) {
	b, err := json.Marshal(body)
	if err != nil {
		return wire.Packet{}, err
	}
	p := c.engine.Handle(wire.Packet{ID: 1, Kind: kind, Body: b, Columns: columns}, func(float64, string) error { return nil })
	if p.Kind == "failed" {
		var f service.Failure
		if err := json.Unmarshal(p.Body, &f); err != nil {
			return p, err
		}
		return p, errors.New(f.Sentence)
	}
	return p, nil
}

func (c *call) print(body json.RawMessage) error {
	var b bytes.Buffer
	if err := json.Indent(&b, body, "", " "); err != nil {
		return err
	}
	b.WriteByte('\n')
	_, err := c.out.Write(b.Bytes())
	return err
}

// file reads the only argument.
func (c *call) file() ([]byte, error) {
	if len(c.args) != 1 {
		return nil, fmt.Errorf("%w: name one file, or - for standard input", errUsage)
	}
	if c.args[0] == "-" {
		return io.ReadAll(c.in)
	}
	return os.ReadFile(c.args[0])
}

// casebook reads the only argument as a casebook or a code.
func (c *call) casebook() (json.RawMessage, error) {
	data, err := c.file()
	if err != nil {
		return nil, err
	}
	if text := strings.TrimSpace(string(data)); text != "" && text[0] != '{' {
		p, err := c.ask("decode", map[string]string{"code": text})
		if err != nil {
			return nil, err
		}
		var d struct{ Casebook json.RawMessage }
		err = json.Unmarshal(p.Body, &d)
		return d.Casebook, err
	}
	if _, err := c.ask("open", nil, wire.Column{Name: "file", Bytes: data}); err != nil {
		return nil, err
	}
	return data, nil
}

// about asks a question about one entry.
func (c *call) about(kind string, more map[string]any) (wire.Packet, error) {
	book, err := c.casebook()
	if err != nil {
		return wire.Packet{}, err
	}
	more["casebook"], more["entry"] = book, c.entry-1
	return c.ask(kind, more)
}

func (c *call) solve() error {
	if c.vary != "" {
		return c.varying()
	}
	p, err := c.about("solve", map[string]any{"curves": c.curves, "reach": true})
	if err != nil {
		return err
	}
	return c.print(p.Body)
}

func (c *call) grow() error {
	p, err := c.about("grow", map[string]any{"digest": true})
	if err != nil {
		return err
	}
	for _, x := range []struct{ what, file string }{{"log", c.log}, {"graphml", c.graph}, {"degrees", c.degrees}} {
		if x.file == "" {
			continue
		}
		if err := c.export(x.what, x.file); err != nil {
			return err
		}
	}
	return c.print(p.Body)
}

// export writes the network grown last to a file, part by part.
func (c *call) export(what, name string) error {
	f, err := os.Create(name)
	if err != nil {
		return err
	}
	defer f.Close()
	for part, parts := 0, 1; part < parts; part++ {
		p, err := c.ask("export", map[string]any{"what": what, "part": part})
		if err != nil {
			return err
		}
		var d struct{ Parts int }
		if err := json.Unmarshal(p.Body, &d); err != nil {
			return err
		}
		parts = d.Parts
		if _, err := f.Write(p.Column("file").Bytes); err != nil {
			return err
		}
	}
	return f.Close()
}

func (c *call) sample() error {
	p, err := c.ask("sample", nil)
	if err != nil {
		return err
	}
	_, err = c.out.Write(p.Column("file").Bytes)
	return err
}

func (c *call) outlook() error {
	from, to := 0, 0
	if c.runs != "" {
		a, b, found := strings.Cut(c.runs, "-")
		var err1, err2 error
		from, err1 = strconv.Atoi(a)
		to, err2 = strconv.Atoi(b)
		if !found || err1 != nil || err2 != nil {
			return fmt.Errorf("%w: --runs takes a first and a last run, like 0-199", errUsage)
		}
		to++
	}
	book, err := c.casebook()
	if err != nil {
		return err
	}
	if to == 0 {
		if to, err = c.defaultRuns(book); err != nil {
			return err
		}
	}
	p, err := c.ask("outlook", map[string]any{"casebook": book, "entry": c.entry - 1, "from": from, "to": to})
	if err != nil || c.partial {
		if err != nil {
			return err
		}
		return c.print(p.Body)
	}
	return c.merge([]json.RawMessage{p.Body})
}

// defaultRuns is the number of runs the entry asks for.
func (c *call) defaultRuns(book json.RawMessage) (int, error) {
	p, err := c.ask("open", nil, wire.Column{Name: "file", Bytes: book})
	if err != nil {
		return 0, err
	}
	var d struct {
		Casebook struct {
			Entries []struct{ Outlook struct{ Runs int } }
		}
	}
	if err := json.Unmarshal(p.Body, &d); err != nil {
		return 0, err
	}
	if c.entry < 1 || c.entry > len(d.Casebook.Entries) {
		return 0, fmt.Errorf("there is no entry %d; the casebook has %d", c.entry, len(d.Casebook.Entries))
	}
	return d.Casebook.Entries[c.entry-1].Outlook.Runs, nil
}

func (c *call) gather() error {
	if len(c.args) == 0 {
		return fmt.Errorf("%w: name the parts to gather", errUsage)
	}
	var parts []json.RawMessage
	for _, name := range c.args {
		b, err := os.ReadFile(name)
		if err != nil {
			return err
		}
		if !json.Valid(b) {
			return fmt.Errorf("%s is not a part: it is no JSON", name)
		}
		parts = append(parts, b)
	}
	return c.merge(parts)
}

func (c *call) merge(parts []json.RawMessage) error {
	p, err := c.ask("gather", map[string]any{"parts": parts})
	if err != nil {
		return err
	}
	return c.print(p.Body)
}
