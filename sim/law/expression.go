package law

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"preponder/sim/internal/exact"
)

// MaxExpression is the longest expression in characters.
const MaxExpression = 200

// A SyntaxError says where an expression stops making sense, in characters from 1, and why.
type SyntaxError struct {
	At     int
	Reason string
}

func (e *SyntaxError) Error() string { return fmt.Sprintf("at character %d: %s", e.At, e.Reason) }

// An expression of the energy e. Every step rounds by itself, so the value has the same bits on every machine.
type expression func(e float64) float64

// functions that an expression may call, by name.
var functions = map[string]struct {
	arguments int
	of        func(x, y float64) float64
}{
	"exp":   {1, func(x, _ float64) float64 { return exact.Exp(x) }},
	"ln":    {1, func(x, _ float64) float64 { return exact.Log(x) }},
	"log":   {1, func(x, _ float64) float64 { return exact.Log(x) }},
	"log10": {1, func(x, _ float64) float64 { return exact.Log(x) / math.Ln10 }},
	"sqrt":  {1, func(x, _ float64) float64 { return math.Sqrt(x) }},
	"abs":   {1, func(x, _ float64) float64 { return math.Abs(x) }},
	"sin":   {1, func(x, _ float64) float64 { return exact.Sin(x) }},
	"cos":   {1, func(x, _ float64) float64 { return exact.Cos(x) }},
	"tan":   {1, func(x, _ float64) float64 { return exact.Sin(x) / exact.Cos(x) }},
	"sinh":  {1, func(x, _ float64) float64 { return (exact.Exp(x) - exact.Exp(-x)) / 2 }},
	"cosh":  {1, func(x, _ float64) float64 { return (exact.Exp(x) + exact.Exp(-x)) / 2 }},
	"tanh":  {1, func(x, _ float64) float64 { return 1 - 2/(exact.Exp(2*x)+1) }},
	"pow":   {2, power},
	"min":   {2, math.Min},
	"max":   {2, math.Max},
}

// power is x^y; small whole powers by multiplication, negative bases with whole powers only.
func power(x, y float64) float64 {
	if y == math.Floor(y) && math.Abs(y) <= 64 {
		p, b := 1.0, x
		for n := int(math.Abs(y)); n > 0; n >>= 1 {
			if n&1 == 1 {
				p = float64(p * b)
			}
			b = float64(b * b)
		}
		if y < 0 {
			return 1 / p
		}
		return p
	}
	if x < 0 {
		if y != math.Floor(y) {
			return math.NaN()
		}
		return math.Copysign(exact.Pow(-x, y), 1-2*math.Mod(math.Abs(y), 2))
	}
	return exact.Pow(x, y)
}

// parse reads an expression in the energy e:
//
//	sum     = product { ("+" | "-") product }
//	product = signed { ("*" | "/") signed }
//	signed  = { "-" | "+" } raised
//	raised  = atom [ "^" signed ]
//	atom    = number | "e" | "pi" | name "(" sum { "," sum } ")" | "(" sum ")"
func parse(text string) (expression, error) {
	if n := len([]rune(text)); n > MaxExpression {
		return nil, &SyntaxError{MaxExpression + 1, fmt.Sprintf("the formula has %d characters; %d are allowed", n, MaxExpression)}
	}
	p := &parser{text: []rune(text)}
	f, err := p.sum()
	if err != nil {
		return nil, err
	}
	if c := p.next(); c != 0 {
		return nil, p.fail("%s", p.unexpected(c))
	}
	return f, nil
}

type parser struct {
	text  []rune
	at    int
	depth int
}

func (p *parser) fail(format string, a ...any) error {
	return &SyntaxError{p.at + 1, fmt.Sprintf(format, a...)}
}

// next skips spaces and returns the character that comes, 0 at the end.
func (p *parser) next() rune {
	for p.at < len(p.text) && (p.text[p.at] == ' ' || p.text[p.at] == '\t' || p.text[p.at] == '\n') {
		p.at++
	}
	if p.at == len(p.text) {
		return 0
	}
	return p.text[p.at]
}

func (p *parser) take(c rune) bool {
	if p.next() == c {
		p.at++
		return true
	}
	return false
}

// unexpected says what is wrong with a character where an operator or the end should be.
func (p *parser) unexpected(c rune) string {
	switch {
	case c == ')':
		return "this bracket closes nothing"
	case c == '(' || isLetter(c) || isDigit(c):
		return "an operator is missing; multiplication is written with *"
	case c == '=':
		return "only the right side of the formula is written, without ="
	}
	return fmt.Sprintf("%q means nothing here", string(c))
}

func (p *parser) sum() (expression, error) {
	if p.depth++; p.depth > 60 {
		return nil, p.fail("brackets are nested too deeply")
	}
	defer func() { p.depth-- }()
	f, err := p.product()
	for err == nil {
		a := f
		var b expression
		switch {
		case p.take('+'):
			if b, err = p.product(); err == nil {
				f = func(e float64) float64 { return a(e) + b(e) }
			}
		case p.take('-') || p.take('−'):
			if b, err = p.product(); err == nil {
				f = func(e float64) float64 { return a(e) - b(e) }
			}
		default:
			return f, nil
		}
	}
	return nil, err
}

func (p *parser) product() (expression, error) {
	f, err := p.signed()
	for err == nil {
		a := f
		var b expression
		switch {
		case p.take('*') || p.take('·') || p.take('×'):
			if p.next() == '*' {
				return nil, p.fail("powers are written with ^, as in e^2")
			}
			if b, err = p.signed(); err == nil {
				f = func(e float64) float64 { return a(e) * b(e) }
			}
		case p.take('/'):
			if b, err = p.signed(); err == nil {
				f = func(e float64) float64 { return a(e) / b(e) }
			}
		default:
			return f, nil
		}
	}
	return nil, err
}

func (p *parser) signed() (expression, error) {
	minus := false
	for {
		switch {
		case p.take('-') || p.take('−'):
			minus = !minus
		case p.take('+'):
		default:
			f, err := p.raised()
			if err != nil || !minus {
				return f, err
			}
			return func(e float64) float64 { return -f(e) }, nil
		}
	}
}

func (p *parser) raised() (expression, error) {
	a, err := p.atom()
	if err != nil || !p.take('^') {
		return a, err
	}
	if p.depth++; p.depth > 60 {
		return nil, p.fail("powers are nested too deeply")
	}
	defer func() { p.depth-- }()
	b, err := p.signed()
	if err != nil {
		return nil, err
	}
	return func(e float64) float64 { return power(a(e), b(e)) }, nil
}

func (p *parser) atom() (expression, error) {
	switch c := p.next(); {
	case c == 0:
		if len(strings.TrimSpace(string(p.text))) == 0 {
			return nil, p.fail("the formula is empty; write a density in the energy e, as e*(2-e)")
		}
		return nil, p.fail("the formula ends too early")
	case c == '(':
		p.at++
		f, err := p.sum()
		if err == nil && !p.take(')') {
			return nil, p.fail("a closing bracket is missing")
		}
		return f, err
	case isDigit(c) || c == '.':
		return p.number()
	case isLetter(c):
		return p.name()
	default:
		return nil, p.fail("a number, e, a function or a bracket is missing before %q", string(c))
	}
}

func isDigit(c rune) bool  { return c >= '0' && c <= '9' }
func isLetter(c rune) bool { return c >= 'a' && c <= 'z' || c >= 'A' && c <= 'Z' || c > 127 }

// number reads digits, a point, and an exponent where digits follow the letter.
func (p *parser) number() (expression, error) {
	from := p.at
	digits := func() {
		for p.at < len(p.text) && isDigit(p.text[p.at]) {
			p.at++
		}
	}
	digits()
	if p.at < len(p.text) && p.text[p.at] == '.' {
		p.at++
		digits()
	}
	if k := p.at; k < len(p.text) && (p.text[k] == 'e' || p.text[k] == 'E') {
		p.at++
		if p.at < len(p.text) && (p.text[p.at] == '-' || p.text[p.at] == '+') {
			p.at++
		}
		if p.at < len(p.text) && isDigit(p.text[p.at]) {
			digits()
		} else {
			p.at = k // not an exponent: the energy stands there
		}
	}
	v, err := strconv.ParseFloat(string(p.text[from:p.at]), 64)
	if err != nil {
		p.at = from
		return nil, p.fail("this number cannot be read")
	}
	return func(float64) float64 { return v }, nil
}

func (p *parser) name() (expression, error) {
	from := p.at
	for p.at < len(p.text) && (isLetter(p.text[p.at]) || isDigit(p.text[p.at])) {
		p.at++
	}
	name := string(p.text[from:p.at])
	switch name {
	case "e", "ε", "E":
		return func(e float64) float64 { return e }, nil
	case "pi", "π":
		return func(float64) float64 { return math.Pi }, nil
	}
	f, known := functions[name]
	if !known {
		p.at = from
		return nil, p.fail("%q is not known; there are e (the energy), pi, exp, ln, log10, sqrt, abs, sin, cos, tan, sinh, cosh, tanh, pow, min, max", name)
	}
	if !p.take('(') {
		return nil, p.fail("%s needs its argument in brackets", name)
	}
	var of []expression
	for {
		x, err := p.sum()
		if err != nil {
			return nil, err
		}
		of = append(of, x)
		if !p.take(',') {
			break
		}
	}
	if !p.take(')') {
		return nil, p.fail("a closing bracket is missing")
	}
	if len(of) != f.arguments {
		return nil, p.fail("%s takes %d argument%s, not %d", name, f.arguments, map[bool]string{true: "s"}[f.arguments > 1], len(of))
	}
	x := of[0]
	if f.arguments == 1 {
		return func(e float64) float64 { return f.of(x(e), 0) }, nil
	}
	y := of[1]
	return func(e float64) float64 { return f.of(x(e), y(e)) }, nil
}
