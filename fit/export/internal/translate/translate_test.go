package translate

import (
	"errors"
	"strings"
	"testing"
	"testing/fstest"
)

func load(body string, known map[int]float64) (*Program, error) {
	fs := fstest.MapFS{"a.go": {Data: []byte("package a\n\nimport \"math\"\n\n" + body)}}
	return Load(fs, known, []string{"root"})
}

const small = `// root is the larger half.
func root(c []float64, x float64) (y float64, ok bool) {
	if int(c[0]) == 1 {
		y = math.Max(x/2, -x)
	} else {
		y = other(x)
	}
	ok = y > 0
	return
}

// other is not always needed.
func other(x float64) float64 { return math.Pow(x, 2) }
`

func TestKnownColumnsDecideBranches(t *testing.T) {
	for _, tt := range []struct {
		known     map[int]float64
		functions int
		has, not  string
	}{
		{nil, 2, "if ((int)c[0] == 1) {", "other pow"},
		{map[int]float64{0: 1}, 1, "y = fmax(x / 2.0, -x);", "p_i_other"},
		{map[int]float64{0: 2}, 2, "y = p_i_other(x);", "fmax"},
	} {
		p, err := load(small, tt.known)
		if err != nil {
			t.Fatal(err)
		}
		text, err := p.Functions(C, "p_")
		if err != nil || len(p.functions) != tt.functions || !strings.Contains(text, tt.has) || strings.Contains(text, tt.not) {
			t.Errorf("known %v: %d functions, %v\n%s", tt.known, len(p.functions), err, text)
		}
	}
}

func TestEveryLanguage(t *testing.T) {
	p, err := load(small, map[int]float64{0: 2})
	if err != nil {
		t.Fatal(err)
	}
	for l, want := range map[Language]string{
		C:        "static double p_i_other(double x)\n{\n    return pow(x, 2.0);\n}",
		Fortran:  "answer = x**(2.0_real64)",
		Python:   "def _p_other(x):\n    \"\"\"_p_other is not always needed.\"\"\"\n    return x ** (2.0)",
		Octave:   "function [y, ok] = p_i_root(c, x)",
		Modelica: "output Boolean ok;",
	} {
		if l == Python { // one word in lower case is not taken for a function
			want = strings.Replace(want, "_p_other is", "other is", 1)
		}
		text, err := p.Functions(l, "p_")
		if err != nil || !strings.Contains(text, want) {
			t.Errorf("%s: %v, want %q in\n%s", l, err, want, text)
		}
	}
	if _, err := p.Functions("cobol", "p_"); err == nil {
		t.Error("cobol is printed")
	}
}

func TestOutsideTheSubset(t *testing.T) {
	for _, tt := range []struct{ body, want string }{
		{"func root(x float64) float64 { y := x; if x > 0 { y := x + 1; return y }; return y }", "hides"},
		{"func root(x float64) float64 { for x > 0 { return x }; return x }", "for other than"},
		{"func root(x float64) (y float64) { y, y = x, x; return }", "assignment"},
		{"func root(x float64) float64 { switch { default: return x } }", "statement"},
		{"func root(x float64) (y float64) { y += x; return }", "assignment with"},
		{"func root(x float64) float64 { f := func() float64 { return x }; return f() }", "type func"},
		{"func root(x float64) (y float64) { y = two(x) + 1; return }\nfunc two(x float64) (z float64) { z = x; return }", "inside an expression"},
		{"func root(x float64) (y float64) { y = two(y); return }\nfunc two(x float64) (z float64) { z = x; return }", "both argument and result"},
		{"func root(Root float64) float64 { return Root }", "is taken"},
		{"func root(lambda float64) float64 { return lambda }", "is taken"},
		{"func root(x float64) float64 { return math.Abs(x", "missing"},
		{"func root(x float64) float64 { return math.Gamma(x) }", "undefined"},
		{"func other(x float64) float64 { return x }", "no function root"},
	} {
		_, err := load(tt.body+"\n\nvar _ = math.Abs", nil)
		var e *SubsetError
		if err == nil || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("%s\n%v (a *SubsetError: %v), want …%s…", tt.body, err, errors.As(err, &e), tt.want)
		}
	}
}

func TestDecimal(t *testing.T) {
	for v, want := range map[float64]string{1: "1.0", 0.1: "0.1", 1e300: "1.0e+300", -2.5e-7: "-2.5e-07", 1e21: "1.0e+21", 123456789: "1.23456789e+08"} {
		if got := Decimal(v); got != want {
			t.Errorf("%g: %s, want %s", v, got, want)
		}
	}
}
