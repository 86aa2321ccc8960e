package translate

import (
	"fmt"
	"strings"
)

// modelicaDialect is Modelica 3: functions of a package without imports. Modelica has no
// number that is none; -1 stands for it, which no temperature in kelvin is.
type modelicaDialect struct{}

func (modelicaDialect) real(v float64) string         { return Decimal(v) }
func (modelicaDialect) boolean(v bool) string         { return fmt.Sprint(v) }
func (modelicaDialect) local(n string) string         { return n }
func (modelicaDialect) function(n string) string      { return n }
func (modelicaDialect) at(array, index string) string { return array + "[" + index + "]" }
func (modelicaDialect) operator(op string) string {
	switch op {
	case "&&":
		return "and"
	case "||":
		return "or"
	case "!":
		return "not "
	case "!=":
		return "<>"
	}
	return op
}
func (modelicaDialect) truncate(x string) string { return "integer(" + x + ")" }
func (modelicaDialect) power(x, y string) string { return x + " ^ " + y }
func (modelicaDialect) comment(s string) string  { return strings.TrimRight("// "+s, " ") }
func (modelicaDialect) base() int                { return 1 }

func (modelicaDialect) builtin(fn string, args []string) string {
	if fn == "NaN" {
		return "-1.0"
	}
	return strings.ToLower(fn) + "(" + strings.Join(args, ", ") + ")"
}

func (modelicaDialect) declare(v variable) string {
	switch v.kind {
	case intKind:
		return "Integer " + v.name
	case boolKind:
		return "Boolean " + v.name
	case arrayKind:
		return fmt.Sprintf("Real %s[%d]", v.name, v.size)
	case rowKind:
		return "Real " + v.name + "[:]"
	}
	return "Real " + v.name
}

func (d modelicaDialect) begin(p *printer, f *function) {
	p.line("function %s", f.name)
	p.depth++
	p.line("%q", strings.Join(strings.Fields(f.doc), " "))
	for _, v := range f.params {
		p.line("input %s;", d.declare(v))
	}
	if !f.procedure {
		v := f.results[0]
		v.name = "answer"
		p.line("output %s;", d.declare(v))
	} else {
		for _, v := range f.results {
			p.line("output %s;", d.declare(v))
		}
	}
	loops := map[string]bool{}
	loopIndices(f.body, loops)
	var locals []variable
	for _, v := range f.declared() {
		if !loops[v.name] && !strings.HasPrefix(v.name, "spare") { // an unwanted result has no variable
			locals = append(locals, v)
		}
	}
	if len(locals) > 0 {
		p.depth--
		p.line("protected")
		p.depth++
		p.declarations(locals, func(v variable) (string, string) {
			t, n, _ := strings.Cut(d.declare(v), " ")
			return t, n
		}, " ", ";")
	}
	p.depth--
	p.line("algorithm")
	p.depth++
	if f.procedure {
		for _, v := range f.results {
			if v.kind == arrayKind {
				d.zero(p, v.name, v.size)
			} else {
				p.line("%s := %s;", v.name, map[kind]string{realKind: "0.0", intKind: "0", boolKind: "false"}[v.kind])
			}
		}
	}
}

func (modelicaDialect) end(p *printer, f *function) {
	p.depth--
	p.line("end %s;", f.name)
}

func (modelicaDialect) assign(p *printer, to, value string) { p.line("%s := %s;", to, value) }
func (modelicaDialect) zero(p *printer, array string, size int) {
	p.line("%s := zeros(%d);", array, size)
}

func (d modelicaDialect) call(p *printer, f *function, s *call, to []string, args []string) {
	value := s.fn + "(" + strings.Join(args, ", ") + ")"
	for len(to) > 1 && to[len(to)-1] == "" {
		to = to[:len(to)-1]
	}
	if len(to) == 1 {
		p.line("%s := %s;", to[0], value)
		return
	}
	p.line("(%s) := %s;", strings.Join(to, ", "), value)
}

func (modelicaDialect) branch(p *printer, word, condition string) {
	switch word {
	case "if":
		p.line("if %s then", condition)
	case "elseif":
		p.line("elseif %s then", condition)
	case "else":
		p.line("else")
	default:
		p.line("end if;")
	}
}

func (modelicaDialect) loop(p *printer, index, from, past string) {
	p.line("for %s in %s:(%s - 1) loop", index, from, past)
}
func (modelicaDialect) endLoop(p *printer) { p.line("end for;") }
func (modelicaDialect) leave(p *printer)   { p.line("break;") }

func (modelicaDialect) finish(p *printer, f *function, value string) {
	if !f.procedure {
		p.line("answer := %s;", value)
	}
	p.line("return;")
}
