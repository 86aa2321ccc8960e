package translate

import (
	"fmt"
	"go/ast"
	"go/constant"
	"go/token"
	"go/types"
	"slices"
	"strings"
)

// lowering turns one function of the syntax tree into the small one.
type lowering struct {
	set      *token.FileSet
	info     *types.Info
	known    map[int]float64
	decls    map[string]*declared
	comments []*ast.CommentGroup
	fn       *function
	err      error
}

// fail remembers the first error.
func (l *lowering) fail(n ast.Node, format string, a ...any) {
	if l.err == nil {
		l.err = &SubsetError{l.set.Position(n.Pos()).String(), fmt.Sprintf(format, a...)}
	}
}

func (l *lowering) function(d *ast.FuncDecl) (*function, error) {
	l.fn = &function{name: d.Name.Name, doc: strings.TrimSpace(d.Doc.Text())}
	l.fn.params = l.fields(d.Type.Params)
	if r := d.Type.Results; r != nil {
		if len(r.List[0].Names) > 0 {
			l.fn.procedure = true
			l.fn.results = l.fields(r)
		} else {
			l.fn.results = []variable{l.variable(d, "", l.info.TypeOf(r.List[0].Type))}
		}
	}
	l.fn.body = l.block(d.Body.List)
	if l.err == nil && l.fn.procedure {
		if n := len(l.fn.body); n > 0 {
			if _, ok := l.fn.body[n-1].(finish); ok {
				return l.fn, nil
			}
		}
		l.fn.body = append(l.fn.body, finish{})
	}
	return l.fn, l.err
}

func (l *lowering) fields(list *ast.FieldList) []variable {
	var out []variable
	for _, f := range list.List {
		for _, n := range f.Names {
			out = append(out, l.variable(n, n.Name, l.info.TypeOf(f.Type)))
		}
	}
	return out
}

// variable gives a Go variable its kind.
func (l *lowering) variable(n ast.Node, name string, t types.Type) variable {
	switch t := t.Underlying().(type) {
	case *types.Basic:
		switch {
		case t.Info()&types.IsFloat != 0:
			return variable{name, realKind, 0}
		case t.Info()&types.IsInteger != 0:
			return variable{name, intKind, 0}
		case t.Info()&types.IsBoolean != 0:
			return variable{name, boolKind, 0}
		}
	case *types.Array:
		return variable{name, arrayKind, int(t.Len())}
	case *types.Slice:
		return variable{name, rowKind, 0}
	}
	l.fail(n, "type %s", t)
	return variable{}
}

// define adds a local variable, once for all blocks that define it; the name must not
// hide another.
func (l *lowering) define(id *ast.Ident) {
	obj := l.info.Defs[id]
	if obj == nil || id.Name == "_" {
		return
	}
	if _, other := obj.Parent().Parent().LookupParent(id.Name, id.Pos()); other != nil {
		if _, ok := other.(*types.Var); ok {
			l.fail(id, "%s hides a variable of the same name", id.Name)
		}
	}
	v := l.variable(id, id.Name, obj.Type())
	for _, w := range l.fn.locals {
		if w.name == v.name {
			if w != v {
				l.fail(id, "%s has two types", id.Name)
			}
			return
		}
	}
	l.fn.locals = append(l.fn.locals, v)
}

// flush returns the comments before a position, or on its line.
func (l *lowering) flush(pos token.Pos) []statement {
	var out []statement
	line := l.set.Position(pos).Line
	for len(l.comments) > 0 && (l.comments[0].Pos() < pos || l.set.Position(l.comments[0].Pos()).Line == line) {
		out = append(out, comment{strings.TrimSpace(l.comments[0].Text())})
		l.comments = l.comments[1:]
	}
	return out
}

// skip drops the comments inside a branch that is left out.
func (l *lowering) skip(n ast.Node) {
	if n == nil {
		return
	}
	l.comments = slices.DeleteFunc(l.comments, func(g *ast.CommentGroup) bool { return g.Pos() > n.Pos() && g.End() < n.End() })
}

func (l *lowering) block(list []ast.Stmt) []statement {
	var out []statement
	for _, s := range list {
		out = append(out, l.flush(s.Pos())...)
		out = append(out, l.statement(s)...)
		if n := len(out); n > 0 && l.ends(out[n-1]) {
			break
		}
	}
	return out
}

// ends tells whether nothing after a statement is reached.
func (l *lowering) ends(s statement) bool {
	switch s.(type) {
	case finish, leave:
		return true
	}
	return false
}

func (l *lowering) statement(s ast.Stmt) []statement {
	switch s := s.(type) {
	case *ast.AssignStmt:
		return l.assignment(s)
	case *ast.DeclStmt:
		spec, ok := s.Decl.(*ast.GenDecl).Specs[0].(*ast.ValueSpec)
		if !ok || len(spec.Names) != 1 || len(spec.Values) > 0 {
			l.fail(s, "declaration other than var x [n]float64")
			return nil
		}
		l.define(spec.Names[0])
		v := l.variable(s, spec.Names[0].Name, l.info.TypeOf(spec.Type))
		if v.kind != arrayKind {
			l.fail(s, "var of a scalar")
		}
		return []statement{zero{v}}
	case *ast.IfStmt:
		return l.branch(s)
	case *ast.ForStmt:
		return l.loop(s)
	case *ast.BranchStmt:
		if s.Tok == token.BREAK && s.Label == nil {
			return []statement{leave{}}
		}
	case *ast.ReturnStmt:
		switch {
		case len(s.Results) == 0 && l.fn.procedure:
			return []statement{finish{}}
		case len(s.Results) == 1 && !l.fn.procedure:
			return []statement{finish{l.expression(s.Results[0])}}
		}
	}
	l.fail(s, "statement %T", s)
	return nil
}

func (l *lowering) branch(s *ast.IfStmt) []statement {
	if s.Init != nil {
		l.fail(s, "if with a statement")
	}
	condition := l.expression(s.Cond)
	if b, ok := condition.(boolean); ok {
		if b.value {
			l.skip(s.Else)
			return l.block(s.Body.List)
		}
		l.skip(s.Body)
		switch e := s.Else.(type) {
		case *ast.BlockStmt:
			return l.block(e.List)
		case *ast.IfStmt:
			return l.branch(e)
		}
		return nil
	}
	out := branch{condition: condition, then: l.block(s.Body.List)}
	switch e := s.Else.(type) {
	case *ast.BlockStmt:
		out.els = l.block(e.List)
	case *ast.IfStmt:
		out.els = l.branch(e)
	}
	return []statement{out}
}

// loop accepts for i := a; i < b; i++.
func (l *lowering) loop(s *ast.ForStmt) []statement {
	init, ok1 := s.Init.(*ast.AssignStmt)
	cond, ok2 := s.Cond.(*ast.BinaryExpr)
	post, ok3 := s.Post.(*ast.IncDecStmt)
	if !ok1 || !ok2 || !ok3 || init.Tok != token.DEFINE || len(init.Lhs) != 1 || cond.Op != token.LSS || post.Tok != token.INC {
		l.fail(s, "for other than i := a; i < b; i++")
		return nil
	}
	id := init.Lhs[0].(*ast.Ident)
	l.define(id)
	return []statement{loop{index: id.Name, from: l.expression(init.Rhs[0]), past: l.expression(cond.Y), body: l.block(s.Body.List)}}
}

func (l *lowering) assignment(s *ast.AssignStmt) []statement {
	if s.Tok != token.ASSIGN && s.Tok != token.DEFINE || len(s.Rhs) != 1 {
		l.fail(s, "assignment with %s", s.Tok)
		return nil
	}
	if s.Tok == token.DEFINE {
		for _, x := range s.Lhs {
			if id, ok := x.(*ast.Ident); ok {
				l.define(id)
			}
		}
	}
	if c, ok := s.Rhs[0].(*ast.CallExpr); ok {
		if d := l.callee(c); d != nil && len(d.decl.Type.Results.List[0].Names) > 0 {
			out := call{fn: d.decl.Name.Name, args: l.arguments(c), kind: l.fields(d.decl.Type.Results)}
			for _, x := range s.Lhs {
				if id, ok := x.(*ast.Ident); ok && id.Name == "_" {
					out.to = append(out.to, nil)
					continue
				}
				id, ok := x.(*ast.Ident)
				if !ok {
					l.fail(x, "result assigned to other than a variable")
					continue
				}
				ast.Inspect(c, func(n ast.Node) bool {
					if a, ok := n.(*ast.Ident); ok && a.Name == id.Name {
						l.fail(a, "%s is both argument and result", a.Name)
					}
					return true
				})
				out.to = append(out.to, l.expression(id))
			}
			l.fn.calls = append(l.fn.calls, out.fn)
			return []statement{out}
		}
	}
	if len(s.Lhs) != 1 {
		l.fail(s, "several assignments at once")
		return nil
	}
	return []statement{assign{to: l.expression(s.Lhs[0]), value: l.expression(s.Rhs[0])}}
}

// callee is the function of the program that is called, nil for others.
func (l *lowering) callee(c *ast.CallExpr) *declared {
	if id, ok := c.Fun.(*ast.Ident); ok {
		return l.decls[id.Name]
	}
	return nil
}

func (l *lowering) arguments(c *ast.CallExpr) []expression {
	var out []expression
	for _, a := range c.Args {
		out = append(out, l.expression(a))
	}
	return out
}

// literal is a constant of the kind that the type checker gave it.
func (l *lowering) literal(n ast.Expr, tv types.TypeAndValue) expression {
	switch tv.Value.Kind() {
	case constant.Bool:
		return boolean{constant.BoolVal(tv.Value)}
	case constant.Int, constant.Float:
		if b, ok := tv.Type.Underlying().(*types.Basic); ok && b.Info()&types.IsInteger != 0 {
			if v, exact := constant.Int64Val(constant.ToInt(tv.Value)); exact {
				return integer{v}
			}
		} else if ok && b.Info()&types.IsFloat != 0 {
			v, _ := constant.Float64Val(tv.Value)
			return real{v}
		}
	}
	l.fail(n, "constant of type %s", tv.Type)
	return nil
}

func (l *lowering) expression(x ast.Expr) expression {
	tv := l.info.Types[x]
	if tv.Value != nil {
		switch x.(type) {
		case *ast.BasicLit, *ast.Ident:
			return l.literal(x, tv)
		}
	}
	switch x := x.(type) {
	case *ast.Ident:
		switch x.Name {
		case "true", "false":
			return boolean{x.Name == "true"}
		}
		return name{l.variable(x, x.Name, l.info.TypeOf(x))}
	case *ast.ParenExpr:
		in := l.expression(x.X)
		switch in.(type) {
		case boolean, not, name, index, real, integer, apply, builtin, paren:
			return in
		}
		return paren{in}
	case *ast.UnaryExpr:
		if _, ok := x.X.(*ast.BasicLit); ok && tv.Value != nil {
			return l.literal(x, tv)
		}
		in := l.expression(x.X)
		switch x.Op {
		case token.SUB:
			if r, ok := in.(real); ok {
				return real{-r.value}
			}
			if i, ok := in.(integer); ok {
				return integer{-i.value}
			}
			return negative{in}
		case token.NOT:
			if b, ok := in.(boolean); ok {
				return boolean{!b.value}
			}
			return not{in}
		}
	case *ast.BinaryExpr:
		return l.binary(x)
	case *ast.IndexExpr:
		id, ok := x.X.(*ast.Ident)
		if !ok {
			l.fail(x, "index of other than a variable")
			return nil
		}
		return index{l.variable(id, id.Name, l.info.TypeOf(id)), l.expression(x.Index)}
	case *ast.CallExpr:
		return l.call(x)
	}
	l.fail(x, "expression %T", x)
	return nil
}

func (l *lowering) call(x *ast.CallExpr) expression {
	if d := l.callee(x); d != nil {
		if len(d.decl.Type.Results.List[0].Names) > 0 {
			l.fail(x, "procedure %s inside an expression", d.decl.Name.Name)
		}
		l.fn.calls = append(l.fn.calls, d.decl.Name.Name)
		return apply{d.decl.Name.Name, l.arguments(x)}
	}
	if id, ok := x.Fun.(*ast.Ident); ok && id.Name == "int" && len(x.Args) == 1 {
		return truncate{l.expression(x.Args[0])}
	}
	if sel, ok := x.Fun.(*ast.SelectorExpr); ok {
		return builtin{sel.Sel.Name, l.arguments(x)}
	}
	l.fail(x, "call")
	return nil
}

// binary lowers an operation, deciding conditions on known columns.
func (l *lowering) binary(x *ast.BinaryExpr) expression {
	a, b := l.expression(x.X), l.expression(x.Y)
	op := x.Op.String()
	p, pok := a.(boolean)
	q, qok := b.(boolean)
	switch {
	case op == "&&" && pok:
		return pick(p.value, b, boolean{false})
	case op == "&&" && qok:
		return pick(q.value, a, boolean{false})
	case op == "||" && pok:
		return pick(p.value, boolean{true}, b)
	case op == "||" && qok:
		return pick(q.value, boolean{true}, a)
	}
	if t, ok := a.(truncate); ok && (op == "==" || op == "!=") {
		if i, ok := t.x.(index); ok && i.array.kind == rowKind {
			at, ok1 := i.at.(integer)
			n, ok2 := b.(integer)
			if v, ok := l.known[int(at.value)]; ok && ok1 && ok2 {
				return boolean{(int64(v) == n.value) == (op == "==")}
			}
		}
	}
	return binary{op, a, b}
}

func pick(c bool, yes, no expression) expression {
	if c {
		return yes
	}
	return no
}
