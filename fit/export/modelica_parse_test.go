package export

import (
	"fmt"
	"strconv"
)

// This file parses the part of Modelica that exports use, by the concrete syntax of the
// Modelica Language Specification 3.6, appendix A (citation from memory), and refuses
// everything else. No registry that the tests may use has a Modelica compiler or parser.

type moParser struct {
	tokens []moToken
	at     int
}

// moError is raised by the parser and caught by parseModelica.
type moError struct{ text string }

type (
	moPackage struct {
		name      string
		constants map[string]*moVariable
		functions map[string]*moFunction
		packages  map[string]*moPackage
		parent    *moPackage
	}
	moVariable struct {
		name, kind string // Real, Integer, Boolean, String
		prefix     string // constant, input, output or ""
		dims       []moExpr
		value      moExpr
	}
	moFunction struct {
		name            string
		inputs, outputs []*moVariable
		locals          map[string]*moVariable
		body            []moStatement
		home            *moPackage
	}
	moStatement struct {
		kind  string // assign, call, if, for, return, break, assert
		to    []moExpr
		value moExpr
		list  []moBranch
		name  string
		line  int
	}
	moBranch struct {
		condition moExpr // nil: else
		body      []moStatement
	}
	moExpr = *moNode
	moNode struct {
		op     string // number, string, name, index, call, array, colon, or an operator
		text   string
		number any
		args   []moExpr
	}
)

var moKeywords = map[string]bool{"algorithm": true, "and": true, "break": true, "constant": true, "each": true, "else": true, "elseif": true, "end": true,
	"equation": true, "false": true, "final": true, "flow": true, "for": true, "function": true, "if": true, "in": true, "initial": true, "inner": true, "input": true,
	"loop": true, "model": true, "not": true, "or": true, "outer": true, "output": true, "package": true, "parameter": true, "partial": true, "protected": true,
	"public": true, "record": true, "return": true, "then": true, "true": true, "type": true, "when": true, "while": true, "within": true, "der": true, "connect": true}

// parseModelica parses a file that holds one package.
func parseModelica(src string) (p *moPackage, err error) {
	defer func() {
		if e := recover(); e != nil {
			m, ok := e.(moError)
			if !ok {
				panic(e)
			}
			err = fmt.Errorf("modelica: %s", m.text)
		}
	}()
	q := &moParser{tokens: moTokens(src)}
	p = q.pack(nil)
	q.want(";")
	if q.peek().kind != 0 {
		q.fail("want the end of the file")
	}
	return p, nil
}

func (q *moParser) peek() moToken { return q.tokens[q.at] }
func (q *moParser) next() moToken { q.at++; return q.tokens[q.at-1] }
func (q *moParser) fail(format string, a ...any) {
	t := q.peek()
	panic(moError{fmt.Sprintf("line %d at %q: ", t.line, t.text) + fmt.Sprintf(format, a...)})
}
func (q *moParser) is(text string) bool {
	return q.peek().text == text && q.peek().kind != 's' && q.peek().kind != 0
}
func (q *moParser) accept(text string) bool {
	if q.is(text) {
		q.at++
		return true
	}
	return false
}
func (q *moParser) want(text string) {
	if !q.accept(text) {
		q.fail("want %q", text)
	}
}
func (q *moParser) ident() string {
	t := q.peek()
	if t.kind != 'i' || moKeywords[t.text] {
		q.fail("want a name")
	}
	return q.next().text
}
func (q *moParser) description() {
	if q.peek().kind == 's' {
		q.next()
	}
}

func (q *moParser) pack(parent *moPackage) *moPackage {
	q.want("package")
	p := &moPackage{name: q.ident(), constants: map[string]*moVariable{}, functions: map[string]*moFunction{}, packages: map[string]*moPackage{}, parent: parent}
	q.description()
	for !q.accept("end") {
		switch {
		case q.is("package"):
			c := q.pack(p)
			p.packages[c.name] = c
		case q.is("function"):
			f := q.function(p)
			if p.functions[f.name] != nil {
				q.fail("second function %s", f.name)
			}
			p.functions[f.name] = f
		default:
			v := q.component()
			if v.prefix != "constant" || v.value == nil {
				q.fail("want a constant with a value")
			}
			p.constants[v.name] = v
		}
		q.want(";")
	}
	if q.ident() != p.name {
		q.fail("want the end of package %s", p.name)
	}
	return p
}

func (q *moParser) component() *moVariable {
	v := &moVariable{}
	for _, prefix := range []string{"constant", "input", "output"} {
		if q.accept(prefix) {
			v.prefix = prefix
		}
	}
	switch v.kind = q.ident(); v.kind {
	case "Real", "Integer", "Boolean", "String":
	default:
		q.fail("type %s", v.kind)
	}
	v.name = q.ident()
	if q.accept("[") {
		v.dims = q.subscripts()
	}
	if q.accept("(") { // modification, here of the unit only
		for {
			q.ident()
			q.want("=")
			q.expression()
			if !q.accept(",") {
				break
			}
		}
		q.want(")")
	}
	if q.accept("=") {
		v.value = q.expression()
	}
	q.description()
	return v
}

func (q *moParser) subscripts() []moExpr {
	var out []moExpr
	for {
		if q.accept(":") {
			out = append(out, &moNode{op: "colon"})
		} else {
			out = append(out, q.expression())
		}
		if !q.accept(",") {
			break
		}
	}
	q.want("]")
	return out
}

func (q *moParser) function(home *moPackage) *moFunction {
	q.want("function")
	f := &moFunction{name: q.ident(), locals: map[string]*moVariable{}, home: home}
	q.description()
	protected := false
	for !q.accept("algorithm") {
		if q.accept("protected") {
			protected = true
			continue
		}
		first := q.peek()
		vars := []*moVariable{q.component()}
		for q.accept(",") { // one type, several names
			v := *vars[0]
			v.name, v.dims = q.ident(), nil
			if q.accept("[") {
				v.dims = q.subscripts()
			}
			vars = append(vars, &v)
		}
		for _, v := range vars {
			switch {
			case v.prefix == "input" && !protected:
				f.inputs = append(f.inputs, v)
			case v.prefix == "output" && !protected:
				f.outputs = append(f.outputs, v)
			case protected && (v.prefix == "" || v.prefix == "constant"):
			default:
				q.fail("%s %s here", first.text, v.name)
			}
			if f.locals[v.name] != nil {
				q.fail("second %s", v.name)
			}
			f.locals[v.name] = v
		}
		q.want(";")
	}
	f.body = q.statements()
	q.want("end")
	if q.ident() != f.name {
		q.fail("want the end of function %s", f.name)
	}
	return f
}

func (q *moParser) statements() []moStatement {
	var out []moStatement
	for !q.is("end") && !q.is("else") && !q.is("elseif") {
		out = append(out, q.statement())
		q.want(";")
	}
	return out
}

func (q *moParser) statement() moStatement {
	s := moStatement{line: q.peek().line}
	switch {
	case q.accept("return"):
		s.kind = "return"
	case q.accept("break"):
		s.kind = "break"
	case q.accept("if"):
		s.kind = "if"
		c := q.expression()
		q.want("then")
		s.list = append(s.list, moBranch{c, q.statements()})
		for q.accept("elseif") {
			c := q.expression()
			q.want("then")
			s.list = append(s.list, moBranch{c, q.statements()})
		}
		if q.accept("else") {
			s.list = append(s.list, moBranch{nil, q.statements()})
		}
		q.want("end")
		q.want("if")
	case q.accept("for"):
		s.kind = "for"
		s.name = q.ident()
		q.want("in")
		from := q.simple()
		q.want(":")
		s.to, s.value = []moExpr{from}, q.simple()
		q.want("loop")
		s.list = []moBranch{{nil, q.statements()}}
		q.want("end")
		q.want("for")
	case q.accept("("):
		s.kind = "call"
		for {
			if q.is(",") || q.is(")") {
				s.to = append(s.to, nil)
			} else {
				s.to = append(s.to, q.primary())
			}
			if !q.accept(",") {
				break
			}
		}
		q.want(")")
		q.want(":=")
		if s.value = q.primary(); s.value.op != "call" {
			q.fail("want a call")
		}
	default:
		x := q.primary()
		if x.op == "call" {
			s.kind, s.value = "assert", x
			if x.text != "assert" {
				q.fail("a call without a result")
			}
			return s
		}
		q.want(":=")
		s.kind, s.to, s.value = "assign", []moExpr{x}, q.expression()
	}
	return s
}

// expression is a simple-expression; exports have no if-expressions and no ranges
// outside of loops.
func (q *moParser) expression() moExpr { return q.simple() }

func (q *moParser) simple() moExpr {
	x := q.logicalTerm()
	for q.accept("or") {
		x = &moNode{op: "or", args: []moExpr{x, q.logicalTerm()}}
	}
	return x
}

func (q *moParser) logicalTerm() moExpr {
	x := q.logicalFactor()
	for q.accept("and") {
		x = &moNode{op: "and", args: []moExpr{x, q.logicalFactor()}}
	}
	return x
}

func (q *moParser) logicalFactor() moExpr {
	if q.accept("not") {
		return &moNode{op: "not", args: []moExpr{q.relation()}}
	}
	return q.relation()
}

func (q *moParser) relation() moExpr {
	x := q.arithmetic()
	for _, op := range []string{"<=", ">=", "==", "<>", "<", ">"} {
		if q.accept(op) {
			return &moNode{op: op, args: []moExpr{x, q.arithmetic()}}
		}
	}
	return x
}

// arithmetic may begin with a sign; an operand inside may not.
func (q *moParser) arithmetic() moExpr {
	minus := q.accept("-")
	x := q.term()
	if minus {
		x = &moNode{op: "neg", args: []moExpr{x}}
	}
	for q.is("+") || q.is("-") {
		op := q.next().text
		x = &moNode{op: op, args: []moExpr{x, q.term()}}
	}
	return x
}

func (q *moParser) term() moExpr {
	x := q.factor()
	for q.is("*") || q.is("/") {
		op := q.next().text
		x = &moNode{op: op, args: []moExpr{x, q.factor()}}
	}
	return x
}

func (q *moParser) factor() moExpr {
	x := q.primary()
	if q.accept("^") {
		x = &moNode{op: "^", args: []moExpr{x, q.primary()}}
	}
	return x
}

func (q *moParser) primary() moExpr {
	t := q.peek()
	switch {
	case t.kind == 'n':
		q.next()
		if n, err := strconv.Atoi(t.text); err == nil {
			return &moNode{op: "number", number: n}
		}
		v, err := strconv.ParseFloat(t.text, 64)
		if err != nil {
			q.fail("number %s", t.text)
		}
		return &moNode{op: "number", number: v}
	case t.kind == 's':
		q.next()
		s, err := strconv.Unquote(t.text)
		if err != nil {
			q.fail("string %s", t.text)
		}
		return &moNode{op: "number", number: s}
	case q.accept("true"):
		return &moNode{op: "number", number: true}
	case q.accept("false"):
		return &moNode{op: "number", number: false}
	case q.accept("("):
		x := q.expression()
		q.want(")")
		return x
	case q.accept("{"):
		x := &moNode{op: "array"}
		for {
			x.args = append(x.args, q.expression())
			if !q.accept(",") {
				break
			}
		}
		q.want("}")
		return x
	}
	name := q.ident()
	for q.accept(".") {
		name += "." + q.ident()
	}
	switch {
	case q.accept("("):
		x := &moNode{op: "call", text: name}
		for !q.accept(")") {
			x.args = append(x.args, q.expression())
			if !q.is(")") {
				q.want(",")
			}
		}
		return x
	case q.accept("["):
		return &moNode{op: "index", text: name, args: q.subscripts()}
	}
	return &moNode{op: "name", text: name}
}
