package export

import (
	"bytes"
	"context"
	"fmt"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"limsup/fit/export/internal/kernel"
	"limsup/fit/export/internal/translate"
)

// These tests compile and run exported code. Each driver prints one line per question,
//
//	case fluid pressure status temperature uncertainty spinodal saturation
//
// with 17 digits, and one line "self case n" with the result of each self-test.

// promise is what exported code keeps, in kelvin and of a standard uncertainty. Measured:
// see the log of each test; differences of the mathematics libraries cost below 1e-9 K.
const (
	promiseKelvin   = 1e-6
	promiseRelative = 1e-6
)

// available tells whether a test of a language can run. On the machine that decides
// whether a change lands (CI=true) a missing tool is a failure.
func available(t *testing.T, tools ...string) bool {
	t.Helper()
	if testing.Short() {
		t.Log("not run: short tests leave out compilers and interpreters")
		return false
	}
	for _, tool := range tools {
		if _, err := exec.LookPath(tool); err != nil {
			if os.Getenv("CI") == "true" {
				t.Fatalf("%s is missing", tool)
			}
			t.Logf("not run: %s is not installed", tool)
			return false
		}
	}
	return true
}

// run runs a program in a folder and returns what it prints; anything on standard error
// is a failure too where quiet is asked for.
func run(t *testing.T, folder string, quiet bool, args ...string) string {
	t.Helper()
	c := exec.CommandContext(context.Background(), args[0], args[1:]...)
	c.Dir = folder
	var out, errs bytes.Buffer
	c.Stdout, c.Stderr = &out, &errs
	if err := c.Run(); err != nil {
		t.Fatalf("%s: %v\n%s%s", strings.Join(args, " "), err, out.String(), errs.String())
	}
	if quiet && errs.Len() > 0 {
		t.Errorf("%s complains:\n%s", strings.Join(args, " "), errs.String())
	}
	return out.String()
}

// put writes a file into a folder.
func put(t *testing.T, folder, name, text string) {
	t.Helper()
	if err := os.WriteFile(filepath.Join(folder, name), []byte(text), 0o644); err != nil {
		t.Fatal(err)
	}
}

// compareAnswers checks the lines of a driver against the model.
func compareAnswers(t *testing.T, cases []modelCase, out string) {
	t.Helper()
	lines := map[string][]string{}
	for _, l := range strings.Split(out, "\n") {
		f := strings.Fields(l)
		switch {
		case len(f) == 3 && f[0] == "self":
			lines["self "+f[1]] = f[2:]
		case len(f) == 8:
			P, err := strconv.ParseFloat(f[2], 64)
			if err != nil {
				t.Fatalf("line %q: %v", l, err)
			}
			lines[f[0]+" "+f[1]+" "+number(P)] = f[3:]
		case len(f) > 0:
			t.Fatalf("line %q", l)
		}
	}
	states, none, worst, worstU := 0, 0, 0.0, 0.0
	for i := range cases {
		mc := &cases[i]
		if f := lines["self "+mc.prefix]; len(f) != 1 || f[0] != "0" {
			t.Errorf("%s: the self-test says %v, want 0 differences", mc.prefix, f)
		}
		s, d := source(t, mc)
		for k, fl := range d.Fluids {
			for _, P := range mc.pressures() {
				want := s.at(s.o.Records[k], P)
				line := lines[mc.prefix+" "+fl.Key+" "+number(P)]
				if len(line) != 5 {
					t.Errorf("%s %s %g Pa: no answer", mc.prefix, fl.Key, P)
					continue
				}
				status, _ := strconv.Atoi(line[0])
				var v [4]float64
				for j := range v {
					v[j], _ = strconv.ParseFloat(line[j+1], 64) // NaN and -1 stand for none
				}
				// spinodal and saturation do not know the stated range
				if want.Status == kernel.Fine {
					same(t, mc, fl.Key, P, "spinodal", v[2], want.Spinodal, want.HasSpinodal)
					same(t, mc, fl.Key, P, "saturation", v[3], want.Saturation, want.HasSat)
				}
				if P < s.low || P > s.high {
					want = expected{Status: kernel.OutOfRange}
				}
				states++
				if status != want.Status {
					t.Errorf("%s %s %g Pa: status %d, want %d", mc.prefix, fl.Key, P, status, want.Status)
					continue
				}
				if status != kernel.Fine {
					none++
				} else {
					worst = math.Max(worst, math.Abs(v[0]-want.T))
					if want.HasU {
						worstU = math.Max(worstU, math.Abs(v[1]/want.U-1))
						if !(math.Abs(v[1]-want.U) <= promiseRelative*want.U) {
							t.Errorf("%s %s %g Pa: u %.12g K, want %.12g K", mc.prefix, fl.Key, P, v[1], want.U)
						}
					}
				}
				same(t, mc, fl.Key, P, "limit", v[0], want.T, status == kernel.Fine)
			}
		}
	}
	t.Logf("%d states, %d of them without a limit; largest deviation %.2g K, of the uncertainty %.2g of its value", states, none, worst, worstU)
}

// same compares a temperature that may be none, NaN or in Modelica -1.
func same(t *testing.T, mc *modelCase, fluid string, P float64, what string, got, want float64, has bool) {
	t.Helper()
	if !has {
		if got > 0 {
			t.Errorf("%s %s %g Pa: %s %.12g K where there is none", mc.prefix, fluid, P, what, got)
		}
		return
	}
	if !(math.Abs(got-want) <= promiseKelvin) {
		t.Errorf("%s %s %g Pa: %s %.12g K, want %.12g K", mc.prefix, fluid, P, what, got, want)
	}
}

// each calls f for every fluid and pressure of the cases.
func each(cases []modelCase, f func(c *modelCase, fluid string, k int, P string)) {
	for i := range cases {
		for k, key := range cases[i].fluids {
			for _, P := range cases[i].pressures() {
				f(&cases[i], key, k, translate.Decimal(P))
			}
		}
	}
}

func TestC(t *testing.T) {
	if !available(t, "gcc") {
		return
	}
	cases, dir := modelCases(t), t.TempDir()
	var b strings.Builder
	for i := range cases {
		c := &cases[i]
		put(t, dir, c.prefix+".c", c.write(t, C))
		fmt.Fprintf(&b, "#include \"%s.c\"\n", c.prefix)
	}
	b.WriteString("#include <stdio.h>\n")
	for i := range cases {
		p := cases[i].prefix
		fmt.Fprintf(&b, `static void ask_%[1]s(const char *fluid, double p)
{
    int n = %[1]sfluid(fluid);
    double t, u, s, b;
    int status = %[1]slimit_temperature(n, p, &t, &u);
    %[1]sspinodal_temperature(n, p, &s);
    %[1]ssaturation_temperature(n, p, &b);
    printf("%[1]s %%s %%.17g %%d %%.17g %%.17g %%.17g %%.17g\n", fluid, p, status, t, u, s, b);
}
`, p)
	}
	b.WriteString("int main(void)\n{\n")
	each(cases, func(c *modelCase, fluid string, _ int, P string) {
		fmt.Fprintf(&b, "    ask_%s(%q, %s);\n", c.prefix, fluid, P)
	})
	for i := range cases {
		fmt.Fprintf(&b, "    printf(\"self %[1]s %%d\\n\", %[1]sself_test());\n", cases[i].prefix)
	}
	// an unknown fluid has its own status, and its text
	p := cases[0].prefix
	fmt.Fprintf(&b, "    double t, u;\n    if (%[1]slimit_temperature(%[1]sfluid(\"nothing\"), 1e5, &t, &u) != 5 || !isnan(t) || !isnan(u)) return 1;\n", p)
	fmt.Fprintf(&b, "    if (strcmp(%sstatus_text(5), \"no such fluid\") != 0) return 1;\n    return 0;\n}\n", p)
	put(t, dir, "main.c", b.String())
	run(t, dir, true, "gcc", "-std=c99", "-Wall", "-Wextra", "-pedantic", "-Werror", "-Wconversion", "-Wshadow", "-O1", "main.c", "-o", "ask", "-lm")
	compareAnswers(t, cases, run(t, dir, true, filepath.Join(dir, "ask")))
}

func TestFortran(t *testing.T) {
	if !available(t, "gfortran") {
		return
	}
	cases, dir := modelCases(t), t.TempDir()
	args := []string{"gfortran", "-std=f2008", "-Wall", "-Wextra", "-Werror", "-O0"}
	var b strings.Builder
	b.WriteString("program ask\n   use, intrinsic :: iso_fortran_env, only: real64\n")
	for i := range cases {
		c := &cases[i]
		put(t, dir, c.prefix+".f90", c.write(t, Fortran))
		args = append(args, c.prefix+".f90")
		fmt.Fprintf(&b, "   use %smodel\n", c.prefix)
	}
	b.WriteString("   implicit none\n")
	each(cases, func(c *modelCase, fluid string, _ int, P string) {
		fmt.Fprintf(&b, "   call ask_%s('%s', %s_real64)\n", c.prefix, fluid, P)
	})
	for i := range cases {
		fmt.Fprintf(&b, "   print '(a,1x,a,1x,i0)', 'self', '%[1]s', %[1]sself_test()\n", cases[i].prefix)
	}
	b.WriteString("contains\n")
	for i := range cases {
		fmt.Fprintf(&b, `   subroutine ask_%[1]s(fluid, p)
      character(len=*), intent(in) :: fluid
      real(real64), intent(in) :: p
      real(real64) :: t, u, s, b
      integer :: n, status, other
      n = %[1]sfluid(fluid)
      call %[1]slimit_temperature(n, p, t, u, status)
      call %[1]sspinodal_temperature(n, p, s, other)
      call %[1]ssaturation_temperature(n, p, b, other)
      print '(a,1x,a,1x,es25.17e3,1x,i0,4(1x,es25.17e3))', '%[1]s', fluid, p, status, t, u, s, b
   end subroutine
`, cases[i].prefix)
	}
	b.WriteString("end program\n")
	put(t, dir, "main.f90", b.String())
	run(t, dir, true, append(args, "main.f90", "-o", "ask")...)
	compareAnswers(t, cases, run(t, dir, true, filepath.Join(dir, "ask")))
}

func TestPython(t *testing.T) {
	if !available(t, "python3") {
		return
	}
	cases, dir := modelCases(t), t.TempDir()
	var b strings.Builder
	b.WriteString("import math\n")
	for i := range cases {
		c := &cases[i]
		put(t, dir, c.prefix+".py", c.write(t, Python))
		fmt.Fprintf(&b, `import %[1]s
def ask_%[1]s(fluid, p):
    t = u = s = b = math.nan
    status = 0
    try:
        t, u = %[1]s.%[1]slimit_temperature(fluid, p)
    except %[1]s.%[2]sNoAnswer as e:
        status = e.status
    try:
        s = %[1]s.%[1]sspinodal_temperature(fluid, p)
    except ValueError:
        pass
    try:
        b = %[1]s.%[1]ssaturation_temperature(fluid, p)
    except ValueError:
        pass
    print("%[1]s", fluid, repr(p), status, repr(t), repr(u), repr(s), repr(b))
`, c.prefix, packageName(c.prefix))
	}
	each(cases, func(c *modelCase, fluid string, _ int, P string) {
		fmt.Fprintf(&b, "ask_%s(%q, %s)\n", c.prefix, fluid, P)
	})
	for i := range cases {
		fmt.Fprintf(&b, "print(\"self\", \"%[1]s\", %[1]s.%[1]sself_test())\n", cases[i].prefix)
	}
	put(t, dir, "main.py", b.String())
	compareAnswers(t, cases, run(t, dir, true, "python3", "-W", "error", "main.py"))
	run(t, dir, true, "python3", cases[0].prefix+".py") // the file itself is a program that tests itself
}

func TestOctave(t *testing.T) {
	if !available(t, "octave-cli") {
		return
	}
	cases, dir := modelCases(t), t.TempDir()
	for i := range cases[5:] {
		cases[5+i].fluids = cases[5+i].fluids[1:2] // the interpreter is slow
	}
	var b strings.Builder
	for i := range cases {
		c := &cases[i]
		put(t, dir, c.prefix+".m", c.write(t, Octave))
		fmt.Fprintf(&b, "source('%s.m');\n", c.prefix)
	}
	each(cases, func(c *modelCase, fluid string, _ int, P string) {
		fmt.Fprintf(&b, "[t, u, status] = %[1]slimit_temperature('%[2]s', %[3]s); s = %[1]sspinodal_temperature('%[2]s', %[3]s); b = %[1]ssaturation_temperature('%[2]s', %[3]s);\n", c.prefix, fluid, P)
		fmt.Fprintf(&b, "printf('%s %s %%.17g %%d %%.17g %%.17g %%.17g %%.17g\\n', %s, status, t, u, s, b);\n", c.prefix, fluid, P)
	})
	for i := range cases {
		if i == 1 || i > 4 { // of the tuned equations, which differ by constants only, one
			fmt.Fprintf(&b, "printf('self %[1]s %%d\\n', %[1]sself_test());\n", cases[i].prefix)
		} else {
			fmt.Fprintf(&b, "printf('self %[1]s 0\\n');\n", cases[i].prefix)
		}
	}
	put(t, dir, "main.m", b.String())
	compareAnswers(t, cases, run(t, dir, false, "octave-cli", "--norc", "--quiet", "main.m"))
}
