package translate

import (
	"fmt"
	"strings"
)

// fortranDialect is Fortran 2008, free form, inside a module.
type fortranDialect struct{ prefix string }

func (fortranDialect) real(v float64) string { return Decimal(v) + "_real64" }
func (fortranDialect) boolean(v bool) string {
	if v {
		return ".true."
	}
	return ".false."
}
func (fortranDialect) local(n string) string         { return Snake(n) }
func (d fortranDialect) function(n string) string    { return d.prefix + "i_" + Snake(n) }
func (fortranDialect) at(array, index string) string { return array + "(" + index + ")" }
func (fortranDialect) operator(op string) string {
	switch op {
	case "&&":
		return ".and."
	case "||":
		return ".or."
	case "!":
		return ".not. "
	case "!=":
		return "/="
	}
	return op
}
func (fortranDialect) truncate(x string) string { return "int(" + x + ")" }
func (fortranDialect) power(x, y string) string { return x + "**" + y }
func (fortranDialect) comment(s string) string  { return strings.TrimRight("! "+s, " ") }
func (fortranDialect) base() int                { return 1 }

func (fortranDialect) builtin(fn string, args []string) string {
	if fn == "NaN" {
		return "ieee_value(0.0_real64, ieee_quiet_nan)"
	}
	return strings.ToLower(fn) + "(" + strings.Join(args, ", ") + ")"
}

func (fortranDialect) kind(v variable) (string, string) {
	switch v.kind {
	case intKind:
		return "integer", ""
	case boolKind:
		return "logical", ""
	case arrayKind:
		return "real(real64)", fmt.Sprintf("(%d)", v.size)
	case rowKind:
		return "real(real64)", "(:)"
	}
	return "real(real64)", ""
}

func (d fortranDialect) begin(p *printer, f *function) {
	p.text(f.doc)
	var params []string
	for _, v := range f.params {
		params = append(params, Snake(v.name))
	}
	if f.procedure {
		for _, v := range f.results {
			params = append(params, Snake(v.name))
		}
		p.line("pure subroutine %s(%s)", d.function(f.name), strings.Join(params, ", "))
	} else {
		p.line("pure function %s(%s) result(answer)", d.function(f.name), strings.Join(params, ", "))
	}
	p.depth++
	one := func(attributes string, v variable) {
		k, shape := d.kind(v)
		p.line("%s%s :: %s%s", k, attributes, Snake(v.name), shape)
	}
	for _, v := range f.params {
		one(", intent(in)", v)
	}
	if f.procedure {
		for _, v := range f.results {
			one(", intent(out)", v)
		}
	} else {
		v := f.results[0]
		v.name = "answer"
		one("", v)
	}
	p.declarations(f.declared(), func(v variable) (string, string) {
		k, shape := d.kind(v)
		return k, Snake(v.name) + shape
	}, " :: ", "")
	p.line("")
	if f.procedure {
		for _, v := range f.results {
			p.line("%s = %s", Snake(v.name), map[kind]string{realKind: "0.0_real64", arrayKind: "0.0_real64", intKind: "0", boolKind: ".false."}[v.kind])
		}
	}
}

func (d fortranDialect) end(p *printer, f *function) {
	p.depth--
	if f.procedure {
		p.line("end subroutine %s", d.function(f.name))
	} else {
		p.line("end function %s", d.function(f.name))
	}
}

func (fortranDialect) assign(p *printer, to, value string) { p.line("%s = %s", to, value) }
func (fortranDialect) zero(p *printer, array string, size int) {
	p.line("%s = 0.0_real64", array)
}

func (d fortranDialect) call(p *printer, f *function, s *call, to []string, args []string) {
	for i, t := range to {
		if t == "" {
			t = Snake(spare(s, i).name)
		}
		args = append(args, t)
	}
	p.line("call %s(%s)", d.function(s.fn), strings.Join(args, ", "))
}

func (fortranDialect) branch(p *printer, word, condition string) {
	switch word {
	case "if":
		p.line("if (%s) then", condition)
	case "elseif":
		p.line("else if (%s) then", condition)
	case "else":
		p.line("else")
	default:
		p.line("end if")
	}
}

func (fortranDialect) loop(p *printer, index, from, past string) {
	p.line("do %s = %s, %s - 1", index, from, past)
}
func (fortranDialect) endLoop(p *printer) { p.line("end do") }
func (fortranDialect) leave(p *printer)   { p.line("exit") }

func (fortranDialect) finish(p *printer, f *function, value string) {
	if !f.procedure {
		p.line("answer = %s", value)
	}
	p.line("return")
}
