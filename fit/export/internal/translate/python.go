package translate

import (
	"fmt"
	"strings"
)

// pythonDialect is Python 3 with the module math.
type pythonDialect struct{ prefix string }

func (pythonDialect) real(v float64) string { return Decimal(v) }
func (pythonDialect) boolean(v bool) string {
	if v {
		return "True"
	}
	return "False"
}
func (pythonDialect) local(n string) string         { return Snake(n) }
func (d pythonDialect) function(n string) string    { return "_" + d.prefix + Snake(n) }
func (pythonDialect) at(array, index string) string { return array + "[" + index + "]" }
func (pythonDialect) operator(op string) string {
	switch op {
	case "&&":
		return "and"
	case "||":
		return "or"
	case "!":
		return "not "
	}
	return op
}
func (pythonDialect) truncate(x string) string { return "int(" + x + ")" }
func (pythonDialect) power(x, y string) string { return x + " ** " + y }
func (pythonDialect) comment(s string) string  { return strings.TrimRight("# "+s, " ") }
func (pythonDialect) base() int                { return 0 }

func (pythonDialect) builtin(fn string, args []string) string {
	switch fn {
	case "NaN":
		return "math.nan"
	case "Abs", "Max", "Min":
		return strings.ToLower(fn) + "(" + strings.Join(args, ", ") + ")"
	}
	return "math." + strings.ToLower(fn) + "(" + strings.Join(args, ", ") + ")"
}

func (d pythonDialect) begin(p *printer, f *function) {
	var params []string
	for _, v := range f.params {
		params = append(params, Snake(v.name))
	}
	p.line("")
	p.line("def %s(%s):", d.function(f.name), strings.Join(params, ", "))
	p.depth++
	lines := Wrap(p.named(f.doc), 84)
	for i, l := range lines {
		quote := ""
		if i == 0 {
			quote = `"""`
		}
		end := ""
		if i == len(lines)-1 {
			end = `"""`
		}
		p.line("%s%s%s", quote, l, end)
	}
	if f.procedure {
		for _, v := range f.results {
			if v.kind == arrayKind {
				d.zero(p, Snake(v.name), v.size)
			} else {
				p.line("%s = %s", Snake(v.name), map[kind]string{realKind: "0.0", intKind: "0", boolKind: "False"}[v.kind])
			}
		}
	}
}

func (pythonDialect) end(p *printer, f *function) { p.depth-- }

func (pythonDialect) assign(p *printer, to, value string) { p.line("%s = %s", to, value) }
func (pythonDialect) zero(p *printer, array string, size int) {
	p.line("%s = [0.0] * %d", array, size)
}

func (d pythonDialect) call(p *printer, f *function, s *call, to []string, args []string) {
	for i, t := range to {
		if t == "" {
			to[i] = "_"
		}
	}
	p.line("%s = %s(%s)", strings.Join(to, ", "), d.function(s.fn), strings.Join(args, ", "))
}

func (pythonDialect) branch(p *printer, word, condition string) {
	switch word {
	case "if":
		p.line("if %s:", bare(condition))
	case "elseif":
		p.line("elif %s:", bare(condition))
	case "else":
		p.line("else:")
	}
}

func (pythonDialect) loop(p *printer, index, from, past string) {
	if from == "0" {
		p.line("for %s in range(%s):", index, past)
		return
	}
	p.line("for %s in range(%s, %s):", index, from, past)
}
func (pythonDialect) endLoop(p *printer) {}
func (pythonDialect) leave(p *printer)   { p.line("break") }

func (pythonDialect) finish(p *printer, f *function, value string) {
	if f.procedure {
		var names []string
		for _, v := range f.results {
			names = append(names, Snake(v.name))
		}
		value = strings.Join(names, ", ")
	}
	p.line("%s", fmt.Sprintf("return %s", value))
}
