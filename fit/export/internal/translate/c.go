package translate

import (
	"fmt"
	"strings"
)

// cDialect is C99. Arrays are results by pointer; scalars too, by way of a local variable
// that is copied at the end.
type cDialect struct{ prefix string }

func (cDialect) real(v float64) string { return Decimal(v) }
func (cDialect) boolean(v bool) string {
	if v {
		return "true"
	}
	return "false"
}
func (cDialect) local(n string) string         { return Snake(n) }
func (d cDialect) function(n string) string    { return d.prefix + "i_" + Snake(n) }
func (cDialect) at(array, index string) string { return array + "[" + index + "]" }
func (cDialect) operator(op string) string     { return op }
func (cDialect) truncate(x string) string      { return "(int)" + x }
func (cDialect) power(x, y string) string      { return "pow(" + bare(x) + ", " + bare(y) + ")" }
func (cDialect) comment(s string) string       { return strings.TrimRight("// "+s, " ") }
func (cDialect) base() int                     { return 0 }

// bare takes off parentheses around all of x.
func bare(x string) string {
	if !strings.HasPrefix(x, "(") || !strings.HasSuffix(x, ")") {
		return x
	}
	depth := 0
	for i, r := range x {
		switch r {
		case '(':
			depth++
		case ')':
			if depth--; depth == 0 && i < len(x)-1 {
				return x
			}
		}
	}
	return x[1 : len(x)-1]
}

func (cDialect) builtin(fn string, args []string) string {
	if fn == "NaN" {
		return "NAN"
	}
	n := map[string]string{"Abs": "fabs", "Exp": "exp", "Log": "log", "Max": "fmax", "Min": "fmin", "Sqrt": "sqrt"}[fn]
	return n + "(" + strings.Join(args, ", ") + ")"
}

func (d cDialect) declare(v variable) string {
	switch v.kind {
	case intKind:
		return "int " + Snake(v.name)
	case boolKind:
		return "bool " + Snake(v.name)
	case arrayKind:
		return fmt.Sprintf("double %s[%d]", Snake(v.name), v.size)
	case rowKind:
		return "const double *" + Snake(v.name)
	}
	return "double " + Snake(v.name)
}

func (d cDialect) begin(p *printer, f *function) {
	p.text(f.doc)
	var params []string
	for _, v := range f.params {
		params = append(params, d.declare(v))
	}
	result := "void"
	if f.procedure {
		for _, v := range f.results {
			if v.kind == arrayKind {
				params = append(params, d.declare(v))
			} else {
				v.name = "*" + v.name + "_out"
				params = append(params, d.declare(v))
			}
		}
	} else {
		result = strings.TrimSpace(d.declare(f.results[0]))
	}
	if len(params) == 0 {
		params = []string{"void"}
	}
	p.line("static %s %s(%s)", result, d.function(f.name), strings.Join(params, ", "))
	p.line("{")
	p.depth++
	if f.procedure {
		for _, v := range f.results {
			if v.kind == arrayKind {
				d.zero(p, Snake(v.name), v.size)
			} else {
				p.line("%s = %s;", d.declare(v), map[kind]string{realKind: "0.0", intKind: "0", boolKind: "false"}[v.kind])
			}
		}
	}
	p.declarations(f.declared(), func(v variable) (string, string) {
		t, n, _ := strings.Cut(d.declare(v), " ")
		return t, n
	}, " ", ";")
	loops := map[string]bool{}
	loopIndices(f.body, loops)
	for _, v := range append(f.params[:len(f.params):len(f.params)], f.declared()...) {
		if uses(f.body, v.name) == 0 && !loops[v.name] && !strings.HasPrefix(v.name, "spare") {
			p.line("(void)%s;", Snake(v.name))
		}
	}
}

func (cDialect) end(p *printer, f *function) {
	p.depth--
	p.line("}")
}

func (cDialect) assign(p *printer, to, value string) { p.line("%s = %s;", to, value) }
func (cDialect) zero(p *printer, array string, size int) {
	p.line("for (int fill = 0; fill < %d; fill++) %s[fill] = 0.0;", size, array)
}

func (d cDialect) call(p *printer, f *function, s *call, to []string, args []string) {
	for i, t := range to {
		array := s.kind[i].kind == arrayKind
		if t == "" {
			t = Snake(spare(s, i).name)
		}
		if !array {
			t = "&" + t
		}
		args = append(args, t)
	}
	p.line("%s(%s);", d.function(s.fn), strings.Join(args, ", "))
}

func (cDialect) branch(p *printer, word, condition string) {
	switch word {
	case "if":
		p.line("if (%s) {", condition)
	case "elseif":
		p.line("} else if (%s) {", condition)
	case "else":
		p.line("} else {")
	default:
		p.line("}")
	}
}

func (cDialect) loop(p *printer, index, from, past string) {
	p.line("for (%s = %s; %s < %s; %s++) {", index, from, index, past, index)
}
func (cDialect) endLoop(p *printer) { p.line("}") }
func (cDialect) leave(p *printer)   { p.line("break;") }

func (cDialect) finish(p *printer, f *function, value string) {
	if !f.procedure {
		p.line("return %s;", value)
		return
	}
	for _, v := range f.results {
		if v.kind != arrayKind {
			p.line("*%s_out = %s;", Snake(v.name), Snake(v.name))
		}
	}
	p.line("return;")
}
