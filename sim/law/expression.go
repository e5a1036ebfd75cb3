package law

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"preponder/sim/internal/double"
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

// An expression of the energy e. Every step rounds by itself, so the value has the same bits on every machine; closely
// gives 31 digits. Where one of the switches changes sign the value is not smooth.
type expression struct {
	value    func(e float64) float64
	closely  func(e double.Number) double.Number
	switches []func(e double.Number) double.Number
	calls    int // of functions and powers, at least 1: what an evaluation costs
}

// number is what a function takes and gives in 31 digits.
type number = double.Number

// functions that an expression may call, by name.
var functions = map[string]struct {
	arguments int
	of        func(x, y float64) float64
	closely   func(x, y number) number
}{
	"exp":   {1, func(x, _ float64) float64 { return exact.Exp(x) }, func(x, _ number) number { return x.Exp() }},
	"ln":    {1, func(x, _ float64) float64 { return exact.Log(x) }, func(x, _ number) number { return x.Log() }},
	"log":   {1, func(x, _ float64) float64 { return exact.Log(x) }, func(x, _ number) number { return x.Log() }},
	"log10": {1, func(x, _ float64) float64 { return exact.Log(x) / math.Ln10 }, func(x, _ number) number { return x.Log().Over(double.Of(10).Log()) }},
	"sqrt":  {1, func(x, _ float64) float64 { return math.Sqrt(x) }, func(x, _ number) number { return x.Sqrt() }},
	"abs":   {1, func(x, _ float64) float64 { return math.Abs(x) }, func(x, _ number) number { return x.Abs() }},
	"sin":   {1, func(x, _ float64) float64 { return exact.Sin(x) }, func(x, _ number) number { sin, _ := x.SinCos(); return sin }},
	"cos":   {1, func(x, _ float64) float64 { return exact.Cos(x) }, func(x, _ number) number { _, cos := x.SinCos(); return cos }},
	"tan":   {1, func(x, _ float64) float64 { return exact.Sin(x) / exact.Cos(x) }, func(x, _ number) number { sin, cos := x.SinCos(); return sin.Over(cos) }},
	"sinh":  {1, func(x, _ float64) float64 { return (exact.Exp(x) - exact.Exp(-x)) / 2 }, func(x, _ number) number { u := x.Expm1(); return u.Plus(u.Over(u.Plus(double.One))).Scaled(-1) }},
	"cosh":  {1, func(x, _ float64) float64 { return (exact.Exp(x) + exact.Exp(-x)) / 2 }, func(x, _ number) number { return x.Exp().Plus(x.Negated().Exp()).Scaled(-1) }},
	"tanh":  {1, func(x, _ float64) float64 { return 1 - 2/(exact.Exp(2*x)+1) }, func(x, _ number) number { u := x.Scaled(1).Expm1(); return u.Over(u.Plus(double.Of(2))) }},
	"pow":   {2, power, number.Power},
	"min": {2, math.Min, func(x, y number) number {
		if y.Less(x) {
			return y
		}
		return x
	}},
	"max": {2, math.Max, func(x, y number) number {
		if x.Less(y) {
			return y
		}
		return x
	}},
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
		return expression{}, &SyntaxError{MaxExpression + 1, fmt.Sprintf("the formula has %d characters; %d are allowed", n, MaxExpression)}
	}
	p := &parser{text: []rune(text)}
	f, err := p.sum()
	if err != nil {
		return expression{}, err
	}
	if c := p.next(); c != 0 {
		return expression{}, p.fail("%s", p.unexpected(c))
	}
	f.switches, f.calls = p.switches, max(1, p.calls)
	return f, nil
}

type parser struct {
	text     []rune
	at       int
	depth    int
	switches []func(e number) number
	calls    int
}

// join is the expression of a function of two others.
func join(a, b expression, of func(x, y float64) float64, closely func(x, y number) number) expression {
	return expression{
		value:   func(e float64) float64 { return of(a.value(e), b.value(e)) },
		closely: func(e number) number { return closely(a.closely(e), b.closely(e)) },
	}
}

// through is the expression of a function of one other.
func through(a expression, of func(x, _ float64) float64, closely func(x, _ number) number) expression {
	return expression{
		value:   func(e float64) float64 { return of(a.value(e), 0) },
		closely: func(e number) number { return closely(a.closely(e), number{}) },
	}
}

// constant is the expression of a number.
func constant(v number) expression {
	x := v.Float()
	return expression{value: func(float64) float64 { return x }, closely: func(number) number { return v }}
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
		return expression{}, p.fail("brackets are nested too deeply")
	}
	defer func() { p.depth-- }()
	f, err := p.product()
	for err == nil {
		a := f
		var b expression
		switch {
		case p.take('+'):
			if b, err = p.product(); err == nil {
				f = join(a, b, func(x, y float64) float64 { return x + y }, number.Plus)
			}
		case p.take('-') || p.take('−'):
			if b, err = p.product(); err == nil {
				f = join(a, b, func(x, y float64) float64 { return x - y }, number.Minus)
			}
		default:
			return f, nil
		}
	}
	return expression{}, err
}

func (p *parser) product() (expression, error) {
	f, err := p.signed()
	for err == nil {
		a := f
		var b expression
		switch {
		case p.take('*') || p.take('·') || p.take('×'):
			if p.next() == '*' {
				return expression{}, p.fail("powers are written with ^, as in e^2")
			}
			if b, err = p.signed(); err == nil {
				f = join(a, b, func(x, y float64) float64 { return float64(x * y) }, number.Times)
			}
		case p.take('/'):
			if b, err = p.signed(); err == nil {
				f = join(a, b, func(x, y float64) float64 { return x / y }, number.Over)
			}
		default:
			return f, nil
		}
	}
	return expression{}, err
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
			return through(f, func(x, _ float64) float64 { return -x }, func(x, _ number) number { return x.Negated() }), nil
		}
	}
}

func (p *parser) raised() (expression, error) {
	a, err := p.atom()
	if err != nil || !p.take('^') {
		return a, err
	}
	if p.depth++; p.depth > 60 {
		return expression{}, p.fail("powers are nested too deeply")
	}
	defer func() { p.depth-- }()
	b, err := p.signed()
	if err != nil {
		return expression{}, err
	}
	p.calls++
	return join(a, b, power, number.Power), nil
}

func (p *parser) atom() (expression, error) {
	switch c := p.next(); {
	case c == 0:
		if len(strings.TrimSpace(string(p.text))) == 0 {
			return expression{}, p.fail("the formula is empty; write a density in the energy e, as e*(2-e)")
		}
		return expression{}, p.fail("the formula ends too early")
	case c == '(':
		p.at++
		f, err := p.sum()
		if err == nil && !p.take(')') {
			return expression{}, p.fail("a closing bracket is missing")
		}
		return f, err
	case isDigit(c) || c == '.':
		return p.number()
	case isLetter(c):
		return p.name()
	default:
		return expression{}, p.fail("a number, e, a function or a bracket is missing before %q", string(c))
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
		return expression{}, p.fail("this number cannot be read")
	}
	return constant(double.Of(v)), nil
}

func (p *parser) name() (expression, error) {
	from := p.at
	for p.at < len(p.text) && (isLetter(p.text[p.at]) || isDigit(p.text[p.at])) {
		p.at++
	}
	name := string(p.text[from:p.at])
	switch name {
	case "e", "ε", "E":
		return expression{value: func(e float64) float64 { return e }, closely: func(e number) number { return e }}, nil
	case "pi", "π":
		return constant(double.Pi), nil
	}
	f, known := functions[name]
	if !known {
		p.at = from
		return expression{}, p.fail("%q is not known; there are e (the energy), pi, exp, ln, log10, sqrt, abs, sin, cos, tan, sinh, cosh, tanh, pow, min, max", name)
	}
	if !p.take('(') {
		return expression{}, p.fail("%s needs its argument in brackets", name)
	}
	var of []expression
	for {
		x, err := p.sum()
		if err != nil {
			return expression{}, err
		}
		of = append(of, x)
		if !p.take(',') {
			break
		}
	}
	if !p.take(')') {
		return expression{}, p.fail("a closing bracket is missing")
	}
	if len(of) != f.arguments {
		return expression{}, p.fail("%s takes %d argument%s, not %d", name, f.arguments, map[bool]string{true: "s"}[f.arguments > 1], len(of))
	}
	p.calls++
	x := of[0]
	if name == "abs" {
		p.switches = append(p.switches, x.closely)
	}
	if f.arguments == 1 {
		return through(x, f.of, f.closely), nil
	}
	y := of[1]
	if name == "min" || name == "max" {
		p.switches = append(p.switches, join(x, y, nil, number.Minus).closely)
	}
	return join(x, y, f.of, f.closely), nil
}
