package translate

import (
	"fmt"
	"go/ast"
	"go/parser"
	"go/token"
	"go/types"
	"io/fs"
	"strings"
)

// Program is a parsed kernel, reduced to what its roots reach.
type Program struct {
	functions []*function // callees before callers
	byName    map[string]*function
}

// mathSource declares the functions of package math that the subset has.
const mathSource = `package math
func Abs(x float64) float64
func Exp(x float64) float64
func Log(x float64) float64
func Max(x, y float64) float64
func Min(x, y float64) float64
func NaN() float64
func Pow(x, y float64) float64
func Sqrt(x float64) float64
`

// importer knows package math only.
type importer struct{ math *types.Package }

func (i importer) Import(path string) (*types.Package, error) {
	if path == "math" {
		return i.math, nil
	}
	return nil, fmt.Errorf("import %q: only math is known", path)
}

// Load parses the Go files of a file system. known gives the value of columns of the
// constants that are the same in every row; conditions on them are decided. Only the
// roots and what they call is kept.
//
// Errors: those of the parser and the type checker, *SubsetError.
func Load(fsys fs.FS, known map[int]float64, roots []string) (*Program, error) {
	set := token.NewFileSet()
	names, err := fs.Glob(fsys, "*.go")
	if err != nil {
		return nil, err
	}
	var files []*ast.File
	for _, n := range names {
		src, err := fs.ReadFile(fsys, n)
		if err != nil {
			return nil, err
		}
		f, err := parser.ParseFile(set, n, src, parser.ParseComments|parser.SkipObjectResolution)
		if err != nil {
			return nil, err
		}
		files = append(files, f)
	}
	mf, err := parser.ParseFile(set, "math.go", mathSource, 0)
	if err != nil {
		return nil, err
	}
	math, err := (&types.Config{}).Check("math", set, []*ast.File{mf}, nil)
	if err != nil {
		return nil, err
	}
	info := &types.Info{Types: map[ast.Expr]types.TypeAndValue{}, Defs: map[*ast.Ident]types.Object{}, Uses: map[*ast.Ident]types.Object{}}
	if _, err := (&types.Config{Importer: importer{math}}).Check("kernel", set, files, info); err != nil {
		return nil, err
	}
	p := &Program{byName: map[string]*function{}}
	decls := map[string]*declared{}
	for _, f := range files {
		for _, d := range f.Decls {
			if fn, ok := d.(*ast.FuncDecl); ok {
				decls[fn.Name.Name] = &declared{fn, f}
			}
		}
	}
	var visit func(name string) error
	visit = func(name string) error {
		if _, done := p.byName[name]; done {
			return nil
		}
		d, ok := decls[name]
		if !ok {
			return fmt.Errorf("translate: no function %s", name)
		}
		l := &lowering{set: set, info: info, known: known, decls: decls, comments: d.comments()}
		fn, err := l.function(d.decl)
		if err != nil {
			return err
		}
		p.byName[name] = fn
		for _, callee := range fn.calls {
			if err := visit(callee); err != nil {
				return err
			}
		}
		p.functions = append(p.functions, fn)
		return nil
	}
	for _, r := range roots {
		if err := visit(r); err != nil {
			return nil, err
		}
	}
	return p, p.checkNames(decls)
}

// declared is a function with its file, which holds the comments.
type declared struct {
	decl *ast.FuncDecl
	file *ast.File
}

func (d *declared) comments() []*ast.CommentGroup {
	var out []*ast.CommentGroup
	for _, g := range d.file.Comments {
		if g.Pos() > d.decl.Body.Lbrace && g.End() < d.decl.Body.Rbrace {
			out = append(out, g)
		}
	}
	return out
}

// checkNames refuses a variable that has the name of a function, in any case: not every
// language keeps them apart.
func (p *Program) checkNames(decls map[string]*declared) error {
	functions := map[string]bool{}
	for n := range decls {
		functions[strings.ToLower(n)] = true
	}
	for _, f := range p.functions {
		seen := map[string]string{}
		for _, list := range [][]variable{f.params, f.results, f.locals} {
			for _, v := range list {
				low := strings.ToLower(v.name)
				if functions[low] || seen[low] != "" || reserved[low] {
					return &SubsetError{f.name, "the name " + v.name + " is taken"}
				}
				seen[low] = v.name
			}
		}
	}
	return nil
}

// reserved are words that a variable must not be called, being a keyword or a function in
// one of the languages.
var reserved = map[string]bool{
	"and": true, "as": true, "assert": true, "answer": true, "break": true, "case": true, "class": true, "const": true, "continue": true, "def": true,
	"der": true, "do": true, "double": true, "edge": true, "each": true, "else": true, "end": true, "enum": true, "eps": true, "equation": true, "exp": true,
	"fill": true, "final": true, "flow": true, "for": true, "from": true, "function": true, "if": true, "import": true, "in": true, "initial": true, "inner": true, "input": true,
	"int": true, "is": true, "lambda": true, "log": true, "long": true, "loop": true, "max": true, "min": true, "model": true, "module": true, "nan": true, "not": true,
	"or": true, "outer": true, "output": true, "package": true, "parameter": true, "pass": true, "pi": true, "pre": true, "print": true, "program": true,
	"real": true, "record": true, "result": true, "return": true, "sample": true, "short": true, "size": true, "sqrt": true, "static": true, "stop": true, "subroutine": true, "sum": true,
	"then": true, "time": true, "try": true, "type": true, "use": true, "void": true, "when": true, "while": true, "with": true, "within": true, "yield": true, "zeros": true,
}

// SubsetError reports what the subset does not have.
type SubsetError struct {
	Where, What string
}

func (e *SubsetError) Error() string { return "translate: " + e.Where + ": " + e.What }
