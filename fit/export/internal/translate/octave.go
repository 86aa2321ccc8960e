package translate

import (
	"fmt"
	"strings"
)

// octaveDialect is Octave, also read by programs of the same language.
type octaveDialect struct{ prefix string }

func (octaveDialect) real(v float64) string         { return Decimal(v) }
func (octaveDialect) boolean(v bool) string         { return fmt.Sprint(v) }
func (octaveDialect) local(n string) string         { return Snake(n) }
func (d octaveDialect) function(n string) string    { return d.prefix + "i_" + Snake(n) }
func (octaveDialect) at(array, index string) string { return array + "(" + index + ")" }
func (octaveDialect) operator(op string) string {
	switch op {
	case "!":
		return "~"
	case "!=":
		return "~="
	}
	return op
}
func (octaveDialect) truncate(x string) string { return "fix(" + x + ")" }
func (octaveDialect) power(x, y string) string { return x + " ^ " + y }
func (octaveDialect) comment(s string) string  { return strings.TrimRight("% "+s, " ") }
func (octaveDialect) base() int                { return 1 }

func (octaveDialect) builtin(fn string, args []string) string {
	if fn == "NaN" {
		return "NaN"
	}
	return strings.ToLower(fn) + "(" + strings.Join(args, ", ") + ")"
}

func (d octaveDialect) begin(p *printer, f *function) {
	p.text(f.doc)
	var params []string
	for _, v := range f.params {
		params = append(params, Snake(v.name))
	}
	to := "answer"
	if f.procedure {
		var names []string
		for _, v := range f.results {
			names = append(names, Snake(v.name))
		}
		to = "[" + strings.Join(names, ", ") + "]"
	}
	p.line("function %s = %s(%s)", to, d.function(f.name), strings.Join(params, ", "))
	p.depth++
	if f.procedure {
		for _, v := range f.results {
			if v.kind == arrayKind {
				d.zero(p, Snake(v.name), v.size)
			} else {
				p.line("%s = %s;", Snake(v.name), map[kind]string{realKind: "0", intKind: "0", boolKind: "false"}[v.kind])
			}
		}
	}
}

func (octaveDialect) end(p *printer, f *function) {
	p.depth--
	p.line("end")
}

func (octaveDialect) assign(p *printer, to, value string) { p.line("%s = %s;", to, value) }
func (octaveDialect) zero(p *printer, array string, size int) {
	p.line("%s = zeros(1, %d);", array, size)
}

func (d octaveDialect) call(p *printer, f *function, s *call, to []string, args []string) {
	for i, t := range to {
		if t == "" {
			to[i] = "~"
		}
	}
	for len(to) > 1 && to[len(to)-1] == "~" {
		to = to[:len(to)-1]
	}
	p.line("[%s] = %s(%s);", strings.Join(to, ", "), d.function(s.fn), strings.Join(args, ", "))
}

func (octaveDialect) branch(p *printer, word, condition string) {
	switch word {
	case "if":
		p.line("if %s", condition)
	case "elseif":
		p.line("elseif %s", condition)
	case "else":
		p.line("else")
	default:
		p.line("end")
	}
}

func (octaveDialect) loop(p *printer, index, from, past string) {
	p.line("for %s = %s:(%s - 1)", index, from, past)
}
func (octaveDialect) endLoop(p *printer) { p.line("end") }
func (octaveDialect) leave(p *printer)   { p.line("break;") }

func (octaveDialect) finish(p *printer, f *function, value string) {
	if !f.procedure {
		p.line("answer = %s;", value)
	}
	p.line("return;")
}
