package schema

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"strconv"
	"strings"
	"unicode/utf8"
)

// Limits of a document. A model file of a thousand parameters has half a million
// values and five levels.
const (
	MaxBytes  = 64 << 20 // 64 MiB
	MaxDepth  = 32       // levels of objects and arrays
	MaxValues = 1_000_000
)

// Problem is one place of a document that cannot be used as it stands.
type Problem struct {
	Pointer  string // JSON pointer of the place; "" is the document itself
	Found    string // what stands there
	Expected string // what belongs there; may be empty
}

// Message is "found ..., expected ...".
func (p *Problem) Message() string {
	if p.Expected == "" {
		return "found " + p.Found
	}
	return "found " + p.Found + ", expected " + p.Expected
}

// SyntaxError reports a text that is not JSON.
type SyntaxError struct {
	Line, Column int // 1-based; the column in bytes from the start of the line
	Message      string
}

func (e *SyntaxError) Error() string {
	return fmt.Sprintf("%d:%d: %s", e.Line, e.Column, e.Message)
}

// Parse reads one JSON value. Objects become map[string]any, arrays []any; numbers
// are json.Number where they are written as integers of at most 20 digits, else
// float64; the other values are string, bool and nil.
//
// A document may be JSON and still have problems: an object with a key given twice,
// a number that overflows or vanishes, half of a surrogate pair, nesting beyond
// MaxDepth, more than MaxValues values. They come back together, without document.
//
// Errors: *SyntaxError; *SizeError.
func Parse(text []byte) (document any, problems []Problem, err error) {
	if len(text) > MaxBytes {
		return nil, nil, &SizeError{MaxBytes}
	}
	if err := syntax(text); err != nil {
		return nil, nil, err
	}
	p := parser{text: text, decoder: json.NewDecoder(bytes.NewReader(text))}
	p.decoder.UseNumber()
	document = p.value()
	if len(p.problems) > 0 {
		return nil, p.problems, nil
	}
	return document, nil, nil
}

// SizeError reports a document larger than a limit in bytes.
type SizeError struct{ Limit int }

func (e *SizeError) Error() string {
	return fmt.Sprintf("larger than the limit of %d MiB", e.Limit>>20)
}

// syntax finds the first place at which a text is not UTF-8 or not JSON.
func syntax(text []byte) error {
	for i := 0; i < len(text); {
		r, n := utf8.DecodeRune(text[i:])
		if r == utf8.RuneError && n == 1 {
			return syntaxError(text, i, fmt.Sprintf("byte 0x%02x is not UTF-8", text[i]))
		}
		i += n
	}
	if bytes.HasPrefix(text, []byte("\ufeff")) {
		return syntaxError(text, 0, "the file begins with a byte order mark; JSON has none")
	}
	if len(bytes.TrimSpace(text)) == 0 {
		return syntaxError(text, len(text), "the file is empty")
	}
	var raw json.RawMessage
	err := json.Unmarshal(text, &raw)
	var se *json.SyntaxError
	switch {
	case err == nil:
		return nil
	case errors.As(err, &se):
		at := int(se.Offset) - 1
		if strings.HasPrefix(se.Error(), "unexpected end") {
			at = len(text)
		}
		return syntaxError(text, at, se.Error())
	}
	return syntaxError(text, 0, err.Error())
}

func syntaxError(text []byte, at int, message string) *SyntaxError {
	at = min(max(at, 0), len(text))
	line := 1 + bytes.Count(text[:at], []byte("\n"))
	return &SyntaxError{line, at - bytes.LastIndexByte(text[:at], '\n'), message}
}

// parser turns tokens of a valid text into values.
type parser struct {
	text     []byte
	decoder  *json.Decoder
	path     []string
	values   int
	problems []Problem
	stopped  bool // by a limit: what was read is not used
}

func (p *parser) report(path []string, found, expected string) {
	p.problems = append(p.problems, Problem{Pointer(path...), found, expected})
}

// stop ends the reading at a limit.
func (p *parser) stop(found, expected string) any {
	if !p.stopped {
		p.report(p.path, found, expected)
	}
	p.stopped = true
	return nil
}

// token is the next token; the text was checked, so there is one.
func (p *parser) token() (json.Token, []byte) {
	start := p.decoder.InputOffset()
	t, err := p.decoder.Token()
	if err != nil {
		p.stop("text that cannot be read: "+err.Error(), "")
		return nil, nil
	}
	return t, p.text[start:p.decoder.InputOffset()]
}

func (p *parser) value() any {
	if p.values++; p.values > MaxValues {
		return p.stop(fmt.Sprintf("more than %d values", MaxValues), "a smaller file")
	}
	t, raw := p.token()
	switch t := t.(type) {
	case json.Delim:
		if len(p.path) >= MaxDepth {
			return p.stop(fmt.Sprintf("objects or arrays nested more than %d deep", MaxDepth), "")
		}
		if t == '{' {
			return p.object()
		}
		return p.array()
	case json.Number:
		return p.number(t)
	case string:
		p.whole(t, raw)
		return t
	}
	return t
}

func (p *parser) object() any {
	o := map[string]any{}
	for !p.stopped && p.decoder.More() {
		t, raw := p.token()
		key, _ := t.(string)
		p.path = append(p.path, key)
		p.whole(key, raw)
		_, twice := o[key]
		if twice {
			p.report(p.path, "the key twice in one object", "it once")
		}
		o[key] = p.value()
		p.path = p.path[:len(p.path)-1]
	}
	p.close()
	return o
}

func (p *parser) array() any {
	a := []any{}
	for !p.stopped && p.decoder.More() {
		p.path = append(p.path, strconv.Itoa(len(a)))
		a = append(a, p.value())
		p.path = p.path[:len(p.path)-1]
	}
	p.close()
	return a
}

// close takes the closing delimiter.
func (p *parser) close() {
	if !p.stopped {
		p.token()
	}
}

// number refuses what would become an infinity or lose all its digits.
func (p *parser) number(n json.Number) any {
	s := string(n)
	x, err := strconv.ParseFloat(s, 64)
	switch {
	case err != nil || x == 0 && vanished(s):
		p.report(p.path, "number "+clip(s), "one in the range of 64-bit floating point")
		return 0.0
	case len(s) <= 21 && !strings.ContainsAny(s, ".eE"):
		return n
	}
	return x
}

// vanished tells whether a literal of value zero has another digit than zero.
func vanished(s string) bool {
	if i := strings.IndexAny(s, "eE"); i >= 0 {
		s = s[:i]
	}
	return strings.ContainsAny(s, "123456789")
}

// whole refuses a string in which an escape stands for half a character: the
// decoder has put U+FFFD in its place.
func (p *parser) whole(s string, raw []byte) {
	n := strings.Count(s, "\ufffd")
	if n > 0 && n > bytes.Count(raw, []byte("\ufffd"))+bytes.Count(bytes.ToLower(raw), []byte(`\ufffd`)) {
		p.report(p.path, "half of a surrogate pair in a string", "whole characters")
	}
}

// clip shortens a literal for an error text.
func clip(s string) string {
	if r := []rune(s); len(r) > 40 {
		return string(r[:40]) + "..."
	}
	return s
}
