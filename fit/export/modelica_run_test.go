package export

import (
	"fmt"
	"math"
	"strings"
	"testing"
)

// This file computes with a parsed Modelica package: strictly typed, each variable set
// before it is read.

type moRun struct {
	root      *moPackage
	constants map[*moVariable]any
}

type moFrame struct {
	f    *moFunction
	vars map[string]any
}

func moFail(format string, a ...any) { panic(moError{fmt.Sprintf(format, a...)}) }

// resolve finds what a dotted name means, from a package outwards.
func (r *moRun) resolve(home *moPackage, name string) (*moVariable, *moFunction) {
	parts := strings.Split(name, ".")
	for p := home; p != nil; p = p.parent {
		in := p
		for _, part := range parts[:len(parts)-1] {
			if in = in.packages[part]; in == nil {
				break
			}
		}
		if in == nil {
			continue
		}
		last := parts[len(parts)-1]
		if v := in.constants[last]; v != nil {
			return v, nil
		}
		if f := in.functions[last]; f != nil {
			return nil, f
		}
	}
	moFail("no name %s", name)
	return nil, nil
}

// call runs a function of the root package by its dotted name.
func (r *moRun) call(name string, args ...any) (out []any, err error) {
	defer func() {
		if e := recover(); e != nil {
			m, ok := e.(moError)
			if !ok {
				panic(e)
			}
			err = fmt.Errorf("modelica: %s", m.text)
		}
	}()
	_, f := r.resolve(r.root, name)
	return r.apply(f, args), nil
}

func (r *moRun) apply(f *moFunction, args []any) []any {
	fr := &moFrame{f, map[string]any{}}
	if len(args) != len(f.inputs) {
		moFail("%s takes %d arguments, not %d", f.name, len(f.inputs), len(args))
	}
	for i, v := range f.inputs {
		fr.vars[v.name] = r.fit(v, args[i])
	}
	for _, v := range f.locals {
		if v.prefix == "constant" {
			fr.vars[v.name] = r.eval(fr, v.value)
		}
	}
	r.run(fr, f.body)
	var out []any
	for _, v := range f.outputs {
		x, ok := fr.vars[v.name]
		if !ok {
			moFail("%s does not set %s", f.name, v.name)
		}
		out = append(out, x)
	}
	return out
}

// fit checks a value against the type of a variable.
func (r *moRun) fit(v *moVariable, x any) any {
	switch y := x.(type) {
	case int:
		if v.kind == "Real" && v.dims == nil {
			return float64(y)
		}
		if v.kind == "Integer" && v.dims == nil {
			return y
		}
	case float64:
		if v.kind == "Real" && v.dims == nil {
			return y
		}
	case bool:
		if v.kind == "Boolean" {
			return y
		}
	case []any:
		if len(v.dims) > 0 {
			if d := v.dims[0]; d.op == "number" && d.number.(int) != len(y) {
				moFail("%s has %d elements, not %d", v.name, len(y), d.number)
			}
			return y
		}
	}
	moFail("%T in %s %s", x, v.kind, v.name)
	return nil
}

// run returns "return" or "break" where the statements ended early.
func (r *moRun) run(fr *moFrame, list []moStatement) string {
	for i := range list {
		s := &list[i]
		switch s.kind {
		case "return", "break":
			return s.kind
		case "assert":
			if !r.eval(fr, s.value.args[0]).(bool) {
				moFail("assert: %v", r.eval(fr, s.value.args[1]))
			}
		case "assign":
			r.set(fr, s.to[0], r.eval(fr, s.value))
		case "call":
			_, f := r.resolve(fr.f.home, s.value.text)
			values := r.apply(f, r.args(fr, s.value))
			if len(s.to) > len(values) {
				moFail("line %d: %s has %d results", s.line, f.name, len(values))
			}
			for k, to := range s.to {
				if to != nil {
					r.set(fr, to, values[k])
				}
			}
		case "if":
			for _, b := range s.list {
				if b.condition == nil || r.eval(fr, b.condition).(bool) {
					if end := r.run(fr, b.body); end != "" {
						return end
					}
					break
				}
			}
		case "for":
			from, past := r.eval(fr, s.to[0]).(int), r.eval(fr, s.value).(int)
			for k := from; k <= past; k++ {
				fr.vars[s.name] = k
				end := r.run(fr, s.list[0].body)
				if end == "return" {
					return end
				}
				if end == "break" {
					break
				}
			}
			delete(fr.vars, s.name)
		}
	}
	return ""
}

func (r *moRun) set(fr *moFrame, to moExpr, x any) {
	v := fr.f.locals[to.text]
	if v == nil || v.prefix == "input" || v.prefix == "constant" {
		moFail("%s cannot be set in %s", to.text, fr.f.name)
	}
	if to.op == "name" {
		fr.vars[v.name] = r.fit(v, x)
		return
	}
	a, ok := fr.vars[v.name].([]any)
	k := r.eval(fr, to.args[0]).(int)
	if !ok || k < 1 || k > len(a) {
		moFail("%s[%d] in %s", to.text, k, fr.f.name)
	}
	a[k-1] = moReal(x)
}

func moReal(x any) float64 {
	switch x := x.(type) {
	case int:
		return float64(x)
	case float64:
		return x
	}
	moFail("%T where a number is wanted", x)
	return 0
}

func (r *moRun) args(fr *moFrame, x moExpr) []any {
	var out []any
	for _, a := range x.args {
		out = append(out, r.eval(fr, a))
	}
	return out
}

func (r *moRun) variable(fr *moFrame, name string) any {
	if x, ok := fr.vars[name]; ok {
		return x
	}
	if fr.f.locals[name] != nil {
		moFail("%s is read in %s before it is set", name, fr.f.name)
	}
	v, _ := r.resolve(fr.f.home, name)
	if v == nil {
		moFail("%s is a function", name)
	}
	if x, ok := r.constants[v]; ok {
		return x
	}
	x := r.eval(fr, v.value)
	r.constants[v] = x
	return x
}

func (r *moRun) eval(fr *moFrame, x moExpr) any {
	switch x.op {
	case "number":
		return x.number
	case "name":
		return r.variable(fr, x.text)
	case "array":
		return append([]any{}, r.args(fr, x)...)
	case "index":
		at := r.variable(fr, x.text)
		for i, s := range x.args {
			if s.op == "colon" {
				if i != len(x.args)-1 {
					moFail("a colon before another subscript")
				}
				return at
			}
			a, ok := at.([]any)
			k, whole := r.eval(fr, s).(int)
			if !ok || !whole || k < 1 || k > len(a) {
				moFail("subscript %v of %s with %d elements", s, x.text, len(a))
			}
			at = a[k-1]
		}
		return at
	case "call":
		return r.function(fr, x)
	case "not":
		return !r.eval(fr, x.args[0]).(bool)
	case "and", "or": // both sides are evaluated, as a tool may
		a, b := r.eval(fr, x.args[0]).(bool), r.eval(fr, x.args[1]).(bool)
		return x.op == "and" && a && b || x.op == "or" && (a || b)
	case "neg":
		if n, ok := r.eval(fr, x.args[0]).(int); ok {
			return -n
		}
		return -moReal(r.eval(fr, x.args[0]))
	}
	p, q := r.eval(fr, x.args[0]), r.eval(fr, x.args[1])
	if i, ok := p.(int); ok {
		if j, ok := q.(int); ok {
			switch x.op {
			case "+":
				return i + j
			case "-":
				return i - j
			case "*":
				return i * j
			}
		}
	}
	a, b := moReal(p), moReal(q)
	switch x.op {
	case "+":
		return a + b
	case "-":
		return a - b
	case "*":
		return a * b
	case "/":
		if b == 0 {
			moFail("division by zero in %s", fr.f.name)
		}
		return a / b
	case "^":
		return math.Pow(a, b)
	case "<":
		return a < b
	case ">":
		return a > b
	case "<=":
		return a <= b
	case ">=":
		return a >= b
	case "==":
		return a == b
	case "<>":
		return a != b
	}
	moFail("operator %s", x.op)
	return nil
}

func (r *moRun) function(fr *moFrame, x moExpr) any {
	args := r.args(fr, x)
	one := map[string]func(float64) float64{"abs": math.Abs, "exp": math.Exp, "log": math.Log, "sqrt": math.Sqrt}
	if f := one[x.text]; f != nil && len(args) == 1 {
		v := f(moReal(args[0]))
		if math.IsNaN(v) || math.IsInf(v, 0) {
			moFail("%s(%v) in %s", x.text, args[0], fr.f.name)
		}
		return v
	}
	switch {
	case x.text == "max" && len(args) == 2:
		return math.Max(moReal(args[0]), moReal(args[1]))
	case x.text == "min" && len(args) == 2:
		return math.Min(moReal(args[0]), moReal(args[1]))
	case x.text == "integer" && len(args) == 1:
		return int(math.Floor(moReal(args[0])))
	case x.text == "zeros" && len(args) == 1:
		out := make([]any, args[0].(int))
		for i := range out {
			out[i] = 0.0
		}
		return out
	case x.text == "size" && len(args) == 2 && args[1] == 1:
		return len(args[0].([]any))
	}
	_, f := r.resolve(fr.f.home, x.text)
	if f == nil {
		moFail("%s is not a function", x.text)
	}
	return r.apply(f, args)[0]
}

// The Modelica export is parsed and run by the small interpreter above: its syntax, its
// types, and every number.
func TestModelica(t *testing.T) {
	cases := modelCases(t)
	if testing.Short() {
		cases = cases[3:4]
	}
	for i := range cases[min(5, len(cases)):] {
		cases[5+i].fluids = cases[5+i].fluids[1:2]
	}
	var out strings.Builder
	for i := range cases {
		c := &cases[i]
		p, err := parseModelica(c.write(t, Modelica))
		if err != nil {
			t.Fatalf("%s: %v", c.prefix, err)
		}
		r := &moRun{p, map[*moVariable]any{}}
		failures, err := r.call("selfTest")
		if err != nil {
			t.Fatalf("%s: %v", c.prefix, err)
		}
		fmt.Fprintf(&out, "self %s %v\n", c.prefix, failures[0])
		for k, key := range c.fluids {
			for _, P := range c.pressures() {
				row := r.eval(&moFrame{&moFunction{home: p}, nil}, &moNode{op: "index", text: "Internal.rows", args: []moExpr{{op: "number", number: k + 1}, {op: "colon"}}})
				limit, err := r.call("Internal.limitTemperature", row, P)
				if err != nil {
					t.Fatalf("%s %s %g Pa: %v", c.prefix, key, P, err)
				}
				values := append([]any{}, limit[2], limit[0], limit[1])
				for _, f := range []string{"spinodalTemperature", "saturationTemperature"} {
					v, err := r.call("Internal."+f, row, P)
					if err != nil {
						t.Fatalf("%s %s %g Pa: %v", c.prefix, key, P, err)
					}
					values = append(values, v[0])
				}
				fmt.Fprintf(&out, "%s %s %.17g", c.prefix, key, P)
				for _, v := range values {
					fmt.Fprintf(&out, " %v", v)
				}
				fmt.Fprintln(&out)
				// the function for users stops with the reason
				checked, err := r.call("limitTemperature", k+1, P)
				if status := limit[2].(int); (err == nil) != (status == 0) || err == nil && checked[0] != limit[0] || err != nil && !strings.Contains(err.Error(), statuses()[status]) {
					t.Errorf("%s %s %g Pa: %v, %v beside status %d", c.prefix, key, P, checked, err, status)
				}
			}
		}
	}
	compareAnswers(t, cases, out.String())
}

func TestModelicaParserRefuses(t *testing.T) {
	c := modelCases(t)[3]
	good := c.write(t, Modelica)
	for _, tt := range [][2]string{
		{"end Internal;", "end Inner;"}, {":= ", "= "}, {" then\n", "\n"}, {"algorithm\n", "equation\n"}, {"* (", "* -("},
		{"end if;", "end;"}, {"input Real c[:];", "input double c[:];"}, {" loop\n", " do\n"}, {"not (", "!("}, {"return;", "return 1;"},
	} {
		bad := strings.Replace(good, tt[0], tt[1], 1)
		if bad == good {
			t.Errorf("%q does not occur", tt[0])
		}
		if _, err := parseModelica(bad); err == nil {
			t.Errorf("%q in place of %q is parsed", tt[1], tt[0])
		}
	}
}
