package quantity

import (
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"
)

// longest is the largest length of a unit in bytes; it bounds the work and the exponents.
const longest = 64

// ParseUnit reads a UCUM term or an accepted spelling (see the package comment). Parentheses around
// the whole, as in a header "heating_rate/(K/s)", are taken off. Space around it is ignored.
//
// Errors: *Error of kind NoUnit, Syntax, UnknownUnit, GaugePressure or OffsetInProduct.
func ParseUnit(s string) (Unit, error) {
	found := strings.TrimSpace(s)
	if found == "" {
		return Unit{}, &Error{Kind: NoUnit, Found: found, Expected: `a UCUM code such as K, kPa or m-3.s-1`}
	}
	if gauge(found) {
		return Unit{}, &Error{Kind: GaugePressure, Found: found}
	}
	p := parser{found: found, rest: plain(found)}
	if len(p.rest) > longest {
		return Unit{}, &Error{Kind: Syntax, Found: found, Expected: "at most " + strconv.Itoa(longest) + " bytes"}
	}
	t, err := p.term()
	if err != nil {
		return Unit{}, err
	}
	if p.rest != "" {
		return Unit{}, p.syntax()
	}
	if t.shifted && t.zero == 0 && t.dim == Temperature {
		return Unit{}, &Error{Kind: OffsetInProduct, Found: found}
	}
	u, ok := t.unit()
	if !ok {
		return Unit{}, &Error{Kind: Syntax, Found: found, Expected: "a unit within 100 powers of ten of the SI unit"}
	}
	return u, nil
}

// plain replaces typographic characters by the UCUM ones.
func plain(s string) string {
	return strings.NewReplacer("µ", "u", "μ", "u", "º", "°", "·", ".", "⋅", ".", "−", "-", "^", "",
		"⁻", "-", "⁰", "0", "¹", "1", "²", "2", "³", "3", "⁴", "4", "⁵", "5", "⁶", "6", "⁷", "7", "⁸", "8", "⁹", "9",
		"10^", "10*").Replace(s)
}

type parser struct{ found, rest string }

func (p *parser) syntax() error {
	return &Error{Kind: Syntax, Found: p.found, Symbol: p.rest, Expected: `a UCUM code such as kPa, K/s or m-3.s-1`}
}

func (p *parser) take(c byte) bool {
	if p.rest != "" && p.rest[0] == c {
		p.rest = p.rest[1:]
		return true
	}
	return false
}

// term reads ["/"] component {("." | "/") component}.
func (p *parser) term() (term, error) {
	out := term{num: 1, den: 1}
	sign := 1
	if p.take('/') {
		sign, out.code = -1, "/"
	}
	for first := true; ; first = false {
		group := strings.HasPrefix(p.rest, "(")
		f, err := p.component()
		if err != nil {
			return term{}, err
		}
		last := p.rest == "" || p.rest[0] == ')'
		if first && sign > 0 && last {
			return f, nil // a single component: keeps its zero, loses its parentheses
		}
		out.multiply(f, sign)
		if group {
			f.code = "(" + f.code + ")"
		}
		out.code += f.code
		switch {
		case last:
			return out, nil
		case p.take('.'):
			sign = 1
			out.code += "."
		case p.take('/'):
			sign = -1
			out.code += "/"
		default:
			return term{}, p.syntax()
		}
	}
}

// component reads "(" term ")" or a symbol with its exponent.
func (p *parser) component() (term, error) {
	if p.take('(') {
		t, err := p.term()
		if err == nil && !p.take(')') {
			err = p.syntax()
		}
		return t, err
	}
	n := symbolLength(p.rest)
	if n == 0 {
		return term{}, p.syntax()
	}
	symbol := p.rest[:n]
	a, err := p.lookup(symbol)
	if err != nil {
		return term{}, err
	}
	p.rest = p.rest[n:]
	t := term{code: a.code, num: a.num, den: a.den, ten: a.ten, zero: a.zero, dim: a.dim, shifted: a.zero != 0}
	digits := exponentLength(p.rest)
	if digits == 0 {
		if a.code == "10*" {
			return term{}, p.syntax()
		}
		return t, nil
	}
	e, err := strconv.Atoi(p.rest[:digits])
	if limit := 9; err != nil || e == 0 || a.code == "1" || a.code != "10*" && (e > limit || e < -limit) {
		return term{}, p.syntax()
	}
	p.rest = p.rest[digits:]
	t = t.power(e)
	t.code += strconv.Itoa(e)
	return t, nil
}

// lookup finds the symbol as a whole, or as prefix and metric symbol.
func (p *parser) lookup(symbol string) (atom, error) {
	code := spelling(symbol)
	table := atoms()
	for _, a := range table {
		if a.code == code {
			return a, nil
		}
	}
	for _, a := range table {
		head, ok := strings.CutSuffix(code, a.code)
		if !ok || !a.metric {
			continue
		}
		if ten, ok := prefix(head); ok {
			a.code = code
			a.ten += ten
			return a, nil
		}
	}
	if gauge(symbol) {
		return atom{}, &Error{Kind: GaugePressure, Found: p.found}
	}
	e := &Error{Kind: UnknownUnit, Found: p.found, Symbol: symbol, Near: nearUnits(symbol)}
	if e.Near == nil {
		e.Expected = "a UCUM code such as K, kPa or m-3.s-1 (case matters)"
	}
	return atom{}, e
}

// symbolLength returns the length of the symbol at the front of s: "1", "10*", or letters, %, °, _
// and bracketed groups.
func symbolLength(s string) int {
	if strings.HasPrefix(s, "10*") {
		return 3
	}
	if strings.HasPrefix(s, "1") && !digit(s, 1) {
		return 1
	}
	n := 0
	for n < len(s) {
		r, size := utf8.DecodeRuneInString(s[n:])
		switch {
		case r == '[':
			end := strings.IndexByte(s[n:], ']')
			if end < 0 {
				return n
			}
			size = end + 1
		case unicode.IsLetter(r), r == '%', r == '°', r == '_', r == '\'', r == '℃', r == '℉':
		default:
			return n
		}
		n += size
	}
	return n
}

// exponentLength returns the length of an optional sign and digits at the front of s.
func exponentLength(s string) int {
	n := 0
	if n < len(s) && (s[n] == '-' || s[n] == '+') {
		n++
	}
	start := n
	for digit(s, n) {
		n++
	}
	if n == start {
		return 0
	}
	return n
}
