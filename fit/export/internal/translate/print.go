package translate

import (
	"fmt"
	"regexp"
	"strconv"
	"strings"
	"unicode"
)

// dialect is what a language does in its own way.
type dialect interface {
	real(v float64) string
	boolean(v bool) string
	local(name string) string    // a variable
	function(name string) string // a function of the program
	at(array, index string) string
	operator(op string) string
	builtin(fn string, args []string) string
	truncate(x string) string
	power(x, y string) string
	comment(text string) string // one line
	base() int                  // of the first element of an array

	begin(p *printer, f *function)
	end(p *printer, f *function)
	assign(p *printer, to, value string)
	zero(p *printer, array string, size int)
	call(p *printer, f *function, s *call, to []string, args []string)
	branch(p *printer, word, condition string) // word: if, elseif, else, end
	loop(p *printer, index, from, past string)
	endLoop(p *printer)
	leave(p *printer)
	finish(p *printer, f *function, value string)
}

// printer collects lines.
type printer struct {
	d       dialect
	program *Program
	b       strings.Builder
	depth   int
	indent  string
	width   int // 0: lines are not broken
	cont    string
}

// Language names a language.
type Language string

// The languages.
const (
	C        Language = "c"
	Fortran  Language = "fortran"
	Python   Language = "python"
	Octave   Language = "octave"
	Modelica Language = "modelica"
)

// Functions prints all functions, callees first, with names that begin with prefix.
func (p *Program) Functions(l Language, prefix string) (string, error) {
	out := &printer{program: p, indent: "    "}
	switch l {
	case C:
		out.d = cDialect{prefix}
	case Fortran:
		out.d = fortranDialect{prefix}
		out.indent, out.width, out.cont = "   ", 100, " &"
		out.depth = 1
	case Python:
		out.d = pythonDialect{prefix}
	case Octave:
		out.d = octaveDialect{prefix}
		out.indent = "  "
	case Modelica:
		out.d = modelicaDialect{}
		out.indent = "  "
		out.depth = 2
	default:
		return "", fmt.Errorf("translate: no language %q", l)
	}
	for i, f := range p.functions {
		if i > 0 {
			out.line("")
		}
		out.d.begin(out, f)
		out.statements(f, f.body)
		out.d.end(out, f)
	}
	return out.b.String(), nil
}

// line writes one line, broken where it is too long for the language.
func (p *printer) line(format string, a ...any) {
	s := format
	if len(a) > 0 {
		s = fmt.Sprintf(format, a...)
	}
	if s == "" {
		p.b.WriteByte('\n')
		return
	}
	lead := strings.Repeat(p.indent, p.depth)
	if p.width > 0 && !strings.HasPrefix(s, p.d.comment("")) {
		for len(lead)+len(s) > p.width {
			at := strings.LastIndexByte(s[:p.width-len(lead)], ' ')
			if at <= 0 {
				break
			}
			p.b.WriteString(lead + s[:at] + p.cont + "\n")
			s = s[at+1:]
			if !strings.HasPrefix(lead, strings.Repeat(p.indent, p.depth+1)) {
				lead += p.indent
			}
		}
	}
	p.b.WriteString(lead + s + "\n")
}

// text writes a comment, wrapped.
func (p *printer) text(s string) {
	for _, l := range Wrap(p.named(s), 88-len(p.indent)*p.depth) {
		p.line("%s", p.d.comment(l))
	}
}

var word = regexp.MustCompile(`[A-Za-z][A-Za-z0-9]*`)

// named replaces the names of functions in a comment by those of the language.
func (p *printer) named(s string) string {
	return word.ReplaceAllStringFunc(s, func(w string) string {
		if _, ok := p.program.byName[w]; ok && strings.ToLower(w) != w {
			return p.d.function(w)
		}
		return w
	})
}

// Wrap breaks text into lines of at most width characters, where it can.
func Wrap(s string, width int) []string {
	var out []string
	line := ""
	for _, w := range strings.Fields(s) {
		if line != "" && len(line)+1+len(w) > width {
			out = append(out, line)
			line = ""
		}
		if line != "" {
			line += " "
		}
		line += w
	}
	if line != "" {
		out = append(out, line)
	}
	return out
}

func (p *printer) statements(f *function, list []statement) {
	for _, s := range list {
		p.statement(f, s)
	}
}

func (p *printer) statement(f *function, s statement) {
	switch s := s.(type) {
	case comment:
		p.text(s.text)
	case assign:
		p.d.assign(p, p.expr(s.to), p.expr(s.value))
	case zero:
		p.d.zero(p, p.d.local(s.v.name), s.v.size)
	case call:
		var to []string
		for _, t := range s.to {
			if t == nil {
				to = append(to, "")
			} else {
				to = append(to, p.expr(t))
			}
		}
		p.d.call(p, f, &s, to, p.list(s.args))
	case branch:
		p.branch(f, &s, "if")
		p.d.branch(p, "end", "")
	case loop:
		p.d.loop(p, p.d.local(s.index), p.expr(s.from), p.expr(s.past))
		p.depth++
		p.statements(f, s.body)
		p.depth--
		p.d.endLoop(p)
	case leave:
		p.d.leave(p)
	case finish:
		value := ""
		if s.value != nil {
			value = p.expr(s.value)
		}
		p.d.finish(p, f, value)
	}
}

func (p *printer) branch(f *function, s *branch, word string) {
	p.d.branch(p, word, p.expr(s.condition))
	p.depth++
	p.statements(f, s.then)
	p.depth--
	if len(s.els) == 0 {
		return
	}
	if len(s.els) == 1 {
		if e, ok := s.els[0].(branch); ok {
			p.branch(f, &e, "elseif")
			return
		}
	}
	p.d.branch(p, "else", "")
	p.depth++
	p.statements(f, s.els)
	p.depth--
}

func (p *printer) list(xs []expression) []string {
	out := make([]string, len(xs))
	for i, x := range xs {
		out[i] = p.expr(x)
	}
	return out
}

func (p *printer) expr(x expression) string {
	switch x := x.(type) {
	case real:
		return p.d.real(x.value)
	case integer:
		return strconv.FormatInt(x.value, 10)
	case boolean:
		return p.d.boolean(x.value)
	case name:
		return p.d.local(x.name)
	case index:
		return p.d.at(p.d.local(x.array.name), p.offset(x.at))
	case binary:
		return p.expr(x.x) + " " + p.d.operator(x.op) + " " + p.right(x.y)
	case negative:
		return "-" + p.right(x.x)
	case not:
		return p.d.operator("!") + p.right(x.x)
	case paren:
		return "(" + p.expr(x.x) + ")"
	case apply:
		return p.d.function(x.fn) + "(" + strings.Join(p.list(x.args), ", ") + ")"
	case builtin:
		if x.fn == "Pow" {
			return p.d.power(p.atom(x.args[0]), p.atom(x.args[1]))
		}
		return p.d.builtin(x.fn, p.list(x.args))
	case truncate:
		return p.d.truncate(p.expr(x.x))
	}
	return fmt.Sprintf("<%T>", x) // lowering makes no other
}

// right prints what stands right of an operator, where a sign needs parentheses.
func (p *printer) right(x expression) string {
	switch y := x.(type) {
	case negative:
		return "(" + p.expr(x) + ")"
	case real:
		if y.value < 0 {
			return "(" + p.expr(x) + ")"
		}
	case integer:
		if y.value < 0 {
			return "(" + p.expr(x) + ")"
		}
	}
	return p.expr(x)
}

// atom prints an operand of a power.
func (p *printer) atom(x expression) string {
	switch x.(type) {
	case name, index, paren, apply:
		return p.expr(x)
	}
	return "(" + p.expr(x) + ")"
}

// offset is an index counted as the language counts.
func (p *printer) offset(x expression) string {
	base := int64(p.d.base())
	if base == 0 {
		return p.expr(x)
	}
	switch y := x.(type) {
	case integer:
		return strconv.FormatInt(y.value+base, 10)
	case binary:
		if i, ok := y.y.(integer); ok && y.op == "+" {
			return p.expr(y.x) + " + " + strconv.FormatInt(i.value+base, 10)
		}
	}
	return p.expr(x) + " + " + strconv.FormatInt(base, 10)
}

// Snake is a name in lower case with underscores.
func Snake(s string) string {
	var b strings.Builder
	for i, r := range s {
		if unicode.IsUpper(r) {
			if i > 0 {
				b.WriteByte('_')
			}
			r = unicode.ToLower(r)
		}
		b.WriteRune(r)
	}
	return b.String()
}

// Decimal is the shortest decimal that reads back the same, always with a point or an
// exponent.
func Decimal(v float64) string {
	s := strconv.FormatFloat(v, 'g', -1, 64)
	if !strings.ContainsAny(s, ".e") {
		return s + ".0"
	}
	if m, e, ok := strings.Cut(s, "e"); ok && !strings.Contains(m, ".") {
		return m + ".0e" + e
	}
	return s
}

// declarations writes variables, those of one type together.
func (p *printer) declarations(vars []variable, form func(v variable) (typ, name string), between, end string) {
	var types []string
	names := map[string][]string{}
	for _, v := range vars {
		t, n := form(v)
		if names[t] == nil {
			types = append(types, t)
		}
		names[t] = append(names[t], n)
	}
	for _, t := range types {
		p.line("%s", t+between+strings.Join(names[t], ", ")+end)
	}
}
