package main

import (
	"bytes"
	"context"
	"io"
	"os"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"testing"
	"unicode/utf8"

	"github.com/urfave/cli/v2"
	"pgregory.net/rapid"

	"limsup/cmd/limsup/internal/manual"
	"limsup/eos"
)

func handbookOf(t *testing.T) *manual.Program {
	t.Helper()
	return handbook(newApp(io.Discard, io.Discard), nil)
}

// Every command has a page that fits its terminal, the same by help and --help, with at least one example of its
// own. The pages at 80 columns are under testdata/help.
func TestHelpPages(t *testing.T) {
	for _, columns := range []string{"80", "60", "200"} {
		t.Setenv("COLUMNS", columns)
		limit := map[string]int{"80": 80, "60": 80, "200": 100}[columns]
		pages := map[string][]string{"limsup": {"help"}}
		for _, c := range handbookOf(t).Commands {
			pages[c.Name] = []string{"help", c.Name}
			if len(c.Examples) == 0 || len(c.About) == 0 && c.Name != "fluids" {
				t.Errorf("%s has %d examples and %d paragraphs", c.Name, len(c.Examples), len(c.About))
			}
			other, _, _ := invoke(t, "--fluid", "x", c.Name, "--help")
			short, _, _ := invoke(t, "-h", c.Name)
			if page, message, code := invoke(t, "help", c.Name); page != other || page != short || code != 0 || message != "" {
				t.Errorf("help %s, %s --help and -h %s differ (status %d, %q)", c.Name, c.Name, c.Name, code, message)
			}
		}
		for name, args := range pages {
			page, message, code := invoke(t, args...)
			if code != 0 || message != "" {
				t.Errorf("%s: status %d, %s", name, code, message)
			}
			for _, line := range strings.Split(page, "\n") {
				if utf8.RuneCountInString(line) > limit || strings.HasSuffix(line, " ") || strings.ContainsAny(line, "`\t") {
					t.Errorf("%s at %s columns: %q", name, columns, line)
				}
			}
			if columns == "80" {
				golden(t, "help/"+name+".txt", page)
			}
		}
	}
}

// TestNoCommand: what to do is shown, and is no error.
func TestNoCommand(t *testing.T) {
	page, message, code := invoke(t)
	if want, _, _ := invoke(t, "--help"); page != want || code != 0 || message != "" || !strings.Contains(page, "calibrate") {
		t.Errorf("status %d, %q", code, message)
	}
	var out bytes.Buffer
	if err := run(context.Background(), &out, io.Discard, nil); err != nil || out.Len() == 0 {
		t.Errorf("not even a name: %v", err)
	}
}

func TestHelpCalls(t *testing.T) {
	for _, tt := range []struct {
		code int
		says string
		args []string
	}{
		{0, "limsup predict: ", []string{"predict", "--help", "--bogus", "--fluid"}},
		{0, "limsup help: ", []string{"help", "--help"}},
		{0, "limsup help: ", []string{"help", "help"}},
		{0, "limsup (", []string{"--version"}},
		{0, "limsup (", []string{"predict", "--version"}},
		{2, `no command "predikt"; did you mean predict?`, []string{"help", "predikt"}},
		{2, `no command "predikt"; did you mean predict?`, []string{"predikt", "--help"}},
		{2, `limsup help takes one command; "flux" is left over`, []string{"help", "predict", "flux"}},
		{2, `limsup help takes the name of a command, not "--fluid"`, []string{"help", "--fluid", "water"}},
		{2, `"help" is left over (limsup help predict shows its page)`, []string{"predict", "help"}},
		{2, `no command (limsup help lists them)`, []string{"--fluid", "water"}},
		{2, `no command "completoin"; did you mean completion?`, []string{"completoin"}},
		{2, `no completion for the shell "zssh"; did you mean zsh?`, []string{"completion", "zssh"}},
		{2, `limsup completion takes one argument, the shell: bash, zsh, fish`, []string{"completion"}},
		{2, `limsup completion takes one argument, the shell: bash, zsh, fish`, []string{"completion", "bash", "zsh"}},
		{2, `limsup man takes flags only; "predict" is left over`, []string{"man", "predict"}},
		{2, `--quiet and --verbose exclude each other`, []string{"fluids", "--quiet", "--verbose"}},
	} {
		out, message, code := invoke(t, tt.args...)
		// Without build information the version is "(devel)"; a build from a checkout has its revision.
		says := strings.Replace(tt.says, "limsup (", "limsup "+version(), 1)
		if code != tt.code || !strings.Contains(out+message, says) || code != 0 && out != "" {
			t.Errorf("limsup %q\n  status %d, %q\n  want %d, …%s…", tt.args, code, out+message, tt.code, says)
		}
	}
}

// examples puts the files that the examples of the help pages read into a folder: three series of two fluids of the
// demonstration data, which keeps the slow commands short. With own, each row has its own flux; without, none has.
func examples(t *testing.T, own bool) (folder string) {
	t.Helper()
	text, err := os.ReadFile(demo)
	if err != nil {
		t.Fatal(err)
	}
	var few []string
	for _, line := range strings.Split(string(text), "\n") {
		f := strings.Split(line, ",")
		if len(f) < 12 || f[0] != "fluid" && (f[0] != "n-pentane" && f[0] != "n-hexane" || f[2] > "series 3") {
			continue
		}
		if !own {
			f = slices.Delete(f, 7, 10) // size and heating rate
		}
		few = append(few, strings.Join(f, ","))
	}
	folder = t.TempDir()
	drops := filepath.Join(folder, "drops.csv")
	for name, text := range map[string]string{
		drops:                                strings.Join(few, "\n"),
		filepath.Join(folder, "more.csv"):    strings.Join(few[:20], "\n"),
		filepath.Join(folder, "can-do.toml"): "fluid = [\"n-pentane\"]\npressure = [\"0.5 MPa\"]\n\n[[setup]]\nmethod = \"droplet\"\ndiameter = [\"0.8 mm\"]\nheating_rate = [\"2 K/s\"]\nu_temperature = \"0.3 K\"\n",
	} {
		if err := os.WriteFile(name, []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	if _, message, code := invoke(t, "calibrate", "--data", drops, "--out", filepath.Join(folder, "lab.json")); code != 0 {
		t.Fatal(message)
	}
	return folder
}

// TestHelpExamples runs every example of every help page, in the order of the pages. Those that tune the prefactor
// are about rows with their own flux.
func TestHelpExamples(t *testing.T) {
	folders := map[bool]string{true: examples(t, true), false: examples(t, false)}
	for _, c := range handbookOf(t).Commands {
		for _, e := range c.Examples {
			args := words(t, e)
			if args[0] != "limsup" {
				t.Errorf("%s: %q is no command of limsup", c.Name, e)
				continue
			}
			t.Chdir(folders[strings.Contains(e, "prefactor")])
			if out, message, code := invoke(t, args[1:]...); code != 0 || out == "" && !slices.Contains(args, "--out") {
				t.Errorf("%s\n  status %d, %s", e, code, message)
			}
		}
	}
}

// A flag that took a value in one command and none in another would make the order of arguments matter.
func TestSwitchesAreSwitchesEverywhere(t *testing.T) {
	app := newApp(io.Discard, io.Discard)
	switches := switchNames(app)
	for _, c := range app.Commands {
		seen := map[string]bool{}
		for _, f := range c.Flags {
			for _, n := range f.Names() {
				if _, is := f.(*cli.BoolFlag); is != switches[n] {
					t.Errorf("--%s of %s takes a value, and is a switch elsewhere", n, c.Name)
				}
				if seen[n] {
					t.Errorf("--%s of %s is defined twice", n, c.Name)
				}
				seen[n] = true
			}
		}
	}
}

// TestOrderOfArguments: any order of the same flags, the command anywhere among them, written either way, gives
// the same result.
func TestOrderOfArguments(t *testing.T) {
	want, _, code := invoke(t, "predict", "--fluid", "n-pentane", "--pressure", "-1 MPa", "--pressure", "2 bar", "--set", "threshold=10", "--format", "json", "--quiet")
	if code != 0 {
		t.Fatal(code)
	}
	rapid.Check(t, func(rt *rapid.T) {
		pieces := rapid.Permutation([][]string{{"predict"}, {"--fluid", "n-pentane"}, {"--set", "threshold=10"}, {"--format", "json"}, {"--quiet"}, {"--pressure", "-1 MPa"}, {"--pressure", "2 bar"}}).Draw(rt, "order")
		var args []string
		pressures := []string{"-1 MPa", "2 bar"} // a repeated flag keeps its own order: it is the order of the answer
		for _, p := range pieces {
			if p[0] == "--pressure" {
				p, pressures = []string{"--pressure", pressures[0]}, pressures[1:]
			}
			if len(p) == 2 && rapid.Bool().Draw(rt, "joined") {
				p = []string{p[0] + "=" + p[1]}
			}
			if rapid.Bool().Draw(rt, "one hyphen") {
				p = append([]string{strings.Replace(p[0], "--", "-", 1)}, p[1:]...)
			}
			args = append(args, p...)
		}
		if got, message, code := invoke(t, args...); got != want || code != 0 {
			rt.Errorf("%q: status %d, %s", args, code, message)
		}
	})
}

// TestValuesAreNeverDropped: every flag of every command that takes a value is refused without one.
func TestValuesAreNeverDropped(t *testing.T) {
	for _, c := range handbookOf(t).Commands {
		for _, g := range c.Groups {
			for _, f := range g.Flags {
				if f.Value == "" {
					continue
				}
				for _, args := range [][]string{{c.Name, "--" + f.Name}, {"--" + f.Name, "--quiet", c.Name}} {
					if _, message, code := invoke(t, args...); c.Name != "help" && (code != 2 || message != "flag --"+f.Name+" needs a value") {
						t.Errorf("limsup %q: status %d, %s", args, code, message)
					}
				}
			}
		}
	}
}

// TestNothingRawReachesTheTerminal gives control characters in every place where the user writes text.
func TestNothingRawReachesTheTerminal(t *testing.T) {
	const evil = "a\x1b[2Jb\x07\u009b31m\u202ec"
	dir := t.TempDir()
	file := filepath.Join(dir, "bad.csv")
	if err := os.WriteFile(file, []byte("fluid,temperature/K,pressure/kPa,"+evil+"\n\"n-pentane\",420,101,\n"+evil+",430,100,\n"), 0o644); err != nil {
		t.Fatal(err)
	}
	calls := [][]string{{evil}, {"help", evil}, {"predict", evil}, {"predict", "--" + evil}, {"predict", "--" + evil + "=1"}, {"completion", evil}, {"plot", evil, "--out", "x.svg"}, {"check", "--data", file}, {"--" + evil, "predict", "--quiet"}}
	for _, c := range handbookOf(t).Commands {
		for _, g := range c.Groups {
			for _, f := range g.Flags {
				if f.Value == "" || f.Name == "out" || c.Name == "help" {
					continue
				}
				args := []string{c.Name, "--" + f.Name, evil}
				if f.Name != "data" && c.Name != "fluids" {
					args = append(args, "--data", demo)
				}
				if c.Name == "plot" {
					args = append(args, "map", "--out", filepath.Join(dir, "x.svg"))
				}
				if f.Name != "fluid" && slices.Contains([]string{"predict", "isotherm", "embryo", "flux"}, c.Name) {
					args = append(slices.DeleteFunc(args, func(s string) bool { return s == "--data" || s == demo }), "--fluid", "n-pentane")
				}
				calls = append(calls, args)
			}
		}
	}
	control := regexp.MustCompile(`[\x00-\x09\x0b-\x1f\x7f\x{80}-\x{9f}\x{202a}-\x{202e}]`)
	for _, args := range calls {
		out, message, _ := invoke(t, args...)
		if m := control.FindString(out + message); m != "" {
			t.Errorf("limsup %q writes %q raw: %q", args, m, message)
		}
	}
}

// TestQuiet: only what was asked for is written, and errors.
func TestQuiet(t *testing.T) {
	loud, _, _ := invoke(t, "fluids", "--search", "butane")
	out, message, code := invoke(t, "fluids", "--search", "butane", "--quiet")
	if out != loud || message != "" || code != 0 {
		t.Errorf("status %d, %q", code, message)
	}
	if _, message, code := invoke(t, "fluids", "--search", "nothing of the kind", "--quiet"); code != 2 || message == "" {
		t.Errorf("an error with --quiet: status %d, %q", code, message)
	}
}

// TestVerbose: the product is the same with it, and something is told beside it.
func TestVerbose(t *testing.T) {
	args := []string{"calibrate", "--data", demo, "--folds", "none", "--format", "csv"}
	product, _, _ := invoke(t, args...)
	out, notes, code := invoke(t, append(args, "--verbose")...)
	if out != product || code != 0 || !regexp.MustCompile(`(?m)^search: \d+ .*evaluations`).MatchString(notes) || !regexp.MustCompile(`(?m)^time: [0-9.]+ s$`).MatchString(notes) {
		t.Errorf("status %d, told %q; same product: %v", code, notes, out == product)
	}
}

// The lists of words come out of the usage texts; here is what they have to be.
func TestOptionWords(t *testing.T) {
	want := map[string][]string{"equation": eos.EquationNames(), "limit": {"kinetic", "spinodal"}, "format": {"table", "csv", "json", "markdown"},
		"surface-tension": {"correlation", "corresponding-states", "parachor"}, "properties": {"equation", "correlation"}, "embryo-pressure": {"exact", "poynting"},
		"kinetics": {"mechanical", "chemical", "stepwise"}, "pressure": nil, "set": nil, "search": nil}
	for _, c := range handbookOf(t).Commands {
		for _, g := range c.Groups {
			for _, f := range g.Flags {
				if w, ok := want[f.Name]; ok && f.Name != "set" && !slices.Equal(f.Words, w) {
					t.Errorf("%s --%s: words %q, want %q", c.Name, f.Name, f.Words, w)
				}
				if (f.Value == "FILE") != f.File || f.Name == "data" && !f.File {
					t.Errorf("%s --%s: file %v", c.Name, f.Name, f.File)
				}
			}
		}
	}
}
