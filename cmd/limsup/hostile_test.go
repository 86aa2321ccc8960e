package main

import (
	"bytes"
	"context"
	"errors"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// escapes is a text that would clear a screen, rename a window and turn text round.
const escapes = "a\x1b[2J\x1b]0;owned\x07\x9b31m\u202eb\rc"

// clean reports control characters other than line ends.
func clean(t *testing.T, what, text string) {
	t.Helper()
	for i, r := range text {
		if r < ' ' && r != '\n' || r >= 0x7f && r < 0xa0 || r == '\u202e' {
			t.Errorf("%s: %q at byte %d of %q", what, r, i, text[max(0, i-20):min(len(text), i+20)])
			return
		}
	}
}

// TestTerminalIsSafe puts control characters wherever the program repeats what it was
// given: command lines, file names, fluids, methods, notes.
func TestTerminalIsSafe(t *testing.T) {
	home, err := os.Getwd()
	if err != nil {
		t.Fatal(err)
	}
	good, err := os.ReadFile(filepath.Join(home, "../../data/fluid/library/n-pentane.toml"))
	if err != nil {
		t.Fatal(err)
	}
	t.Chdir(t.TempDir())
	name := "f" + escapes
	write := func(name, text string) {
		t.Helper()
		if err := os.WriteFile(name, []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	head := "fluid,temperature/K,pressure/kPa,method,batch,note," + `"x` + escapes + `"` + "\n"
	q := `"` + escapes + `"`
	write(name+".csv", head+"n-pentane,420.9,101.325,"+q+","+q+","+q+","+q+"\nn-pentane,421.9,101.325,other,,,\nn-pentane,300,101.325,"+q+",,,\n")
	write(name+"-bad.csv", head+q+",420.9,101.325,"+q+",,,\n")
	write(name+".json", `{"format": "limsup-model", "version": 1, "equation": {"name": "soave"}, "`+strings.ReplaceAll(strings.ReplaceAll(strings.ToValidUTF8(escapes, "?"), "\x1b", `\u001b`), "\r", `\r`)+`": 1}`)
	write(name+".toml", strings.Replace(string(good), `key = "n-pentane"`, `key = "`+strings.ToValidUTF8(strings.Map(func(r rune) rune {
		if r < ' ' || r == 0x7f {
			return '?'
		}
		return r
	}, escapes), "?")+`"`, 1))
	for _, args := range [][]string{
		{escapes}, {"help", escapes}, {"predict", "--" + escapes}, {"predict", escapes}, {"predict", "--fluid", escapes, "--pressure", "1 atm"},
		{"predict", "--fluid", "water", "--pressure", escapes}, {"predict", "--fluid", "water", "--temperature", "1 " + escapes},
		{"predict", "--fluid", "water", "--pressure", "1 atm", "--equation", escapes}, {"predict", "--fluid", "water", "--pressure", "1 atm", "--kinetics", escapes},
		{"predict", "--fluid", "water", "--pressure", "1 atm", "--format", escapes}, {"predict", "--fluid", "water", "--pressure", "1 atm", "--set", escapes},
		{"predict", "--fluid", "water", "--pressure", "1 atm", "--set", escapes + "=1"}, {"predict", "--fluid", "water", "--pressure", "1 atm", "--count", escapes},
		{"predict", "--fluid", "water", "--pressure", "1 atm", "--model", escapes}, {"predict", "--fluid", "water", "--pressure", "1 atm", "--model", name + ".json"},
		{"predict", "--fluid", "water", "--pressure", "1 atm", "--out", escapes + "/x"}, {"predict", "--fluid", "water", "--pressure", "1 atm", "--method", escapes},
		{"fluids", "--search", escapes}, {"fluids", "--fluids", escapes}, {"fluids", "--fluids", name + ".toml"}, {"fluids", "--fluids", name + ".toml", "--fluid", "pentane"},
		{"check", "--data", escapes}, {"check", "--data", name + ".csv"}, {"check", "--data", name + ".csv", "--format", "markdown"}, {"check", "--data", name + ".csv", "--format", "csv"}, {"check", "--data", name + "-bad.csv"},
		{"calibrate", "--data", name + ".csv", "--tune", escapes}, {"calibrate", "--data", name + ".csv", "--tune", "threshold/method", "--folds", "none"}, {"calibrate", "--data", name + ".csv", "--folds", escapes},
		{"calibrate", "--data", name + ".csv", "--plan", escapes}, {"calibrate", "--data", name + ".csv", "--noise", escapes}, {"calibrate", "--data", name + ".csv", "--anchor", escapes}, {"calibrate", "--data", name + ".csv", "--anchor", escapes + "=1%"},
		{"validate", "--data", name + ".csv", "--tune", "none"}, {"compare", "--data", name + ".csv", "--variant", escapes},
	} {
		var out, messages bytes.Buffer
		if err := run(context.Background(), &out, &messages, append([]string{"limsup"}, args...)); err != nil {
			messages.WriteString(describe(err))
			if status(err) == statusInternal {
				t.Errorf("limsup %q: internal error %v", args, err)
			}
		}
		what := "limsup " + strings.ReplaceAll(strings.Join(args, " "), escapes, "⟨…⟩")
		text := out.String()
		if strings.Contains(what, "--format csv") {
			text = strings.ReplaceAll(text, "\r\n", "\n") // RFC 4180
		}
		clean(t, what, text)
		clean(t, what, messages.String())
		if out.Len()+messages.Len() == 0 {
			t.Errorf("%s: silent", what)
		}
	}
}

// TestFormulasInCSV: no cell of a CSV output starts as a formula of a spreadsheet,
// whatever names the input holds; numbers stay numbers.
func TestFormulasInCSV(t *testing.T) {
	t.Chdir(t.TempDir())
	const text = "fluid,temperature/K,pressure/kPa,method\nn-pentane,420.9,-101.325,=HYPERLINK(1)\nn-pentane,421.9,101.325,+1\nn-pentane,421.5,101.325,@SUM(A1)\nn-pentane,421.2,101.325,-2+3\n"
	if err := os.WriteFile("d.csv", []byte(text), 0o644); err != nil {
		t.Fatal(err)
	}
	out, message, code := invoke(t, "check", "--data", "d.csv", "--format", "csv")
	if code != 0 {
		t.Fatalf("status %d: %s", code, message)
	}
	for _, want := range []string{"'=HYPERLINK(1)", "'+1", "'@SUM(A1)", "'-2+3", ",-101.325"} {
		if !strings.Contains(out, want) {
			t.Errorf("no %s in\n%s", want, out)
		}
	}
}

// TestDeepAndWide: nesting, lengths and numbers beyond all measure end in a message, not
// in exhausted memory or time.
func TestDeepAndWide(t *testing.T) {
	t.Chdir(t.TempDir())
	deep := strings.Repeat("[", 1_000_000) + strings.Repeat("]", 1_000_000)
	columns := "fluid,temperature/K,pressure/kPa" + strings.Repeat(",x", 100_000)
	for _, tt := range []struct {
		file, text string
		args       []string
	}{
		{"m.json", deep, []string{"predict", "--fluid", "water", "--pressure", "1 atm", "--model", "m.json"}},
		{"m.json", `{"a":` + strings.Repeat(`{"a":`, 100_000) + "1" + strings.Repeat("}", 100_001), []string{"predict", "--fluid", "water", "--pressure", "1 atm", "--model", "m.json"}},
		{"f.toml", "a = " + strings.Repeat("[", 100_000), []string{"fluids", "--fluids", "f.toml"}},
		{"f.toml", "a" + strings.Repeat(".a", 100_000) + " = 1", []string{"fluids", "--fluids", "f.toml"}},
		{"p.toml", "a = " + strings.Repeat("{a=", 10_000), []string{"calibrate", "--data", "d.csv", "--plan", "p.toml"}},
		{"d.csv", columns + "\n", []string{"check", "--data", "d.csv"}},
		{"d.csv", "fluid,temperature/K,pressure/kPa\nn-pentane," + strings.Repeat("9", 10_000_000) + ",1\n", []string{"check", "--data", "d.csv"}},
		{"d.csv", "fluid,temperature/" + strings.Repeat("(", 100_000) + "K,pressure/kPa\nn-pentane,420,1\n", []string{"check", "--data", "d.csv"}},
		{"d.csv", `fluid,temperature/K,pressure/kPa` + "\n\"" + strings.Repeat("x\n", 2_000_000), []string{"check", "--data", "d.csv"}},
		{"d.csv", strings.Repeat("# nothing\n", 500_000), []string{"check", "--data", "d.csv"}},
		{"d.csv", "", []string{"predict", "--fluid", strings.Repeat("n", 1_000_000), "--pressure", "1 atm"}},
		{"d.csv", "", []string{"predict", "--fluid", "water", "--pressure", "1 " + strings.Repeat("k", 1_000_000)}},
		{"d.csv", "", []string{"predict", "--fluid", "water", "--pressure", "1 " + strings.Repeat("(", 1_000_000)}},
		{"d.csv", "", []string{strings.Repeat("p", 1_000_000)}},
		{"d.csv", "", []string{"predict", "--" + strings.Repeat("p", 1_000_000)}},
	} {
		if err := os.WriteFile(tt.file, []byte(tt.text), 0o644); err != nil {
			t.Fatal(err)
		}
		_, message, code := invoke(t, tt.args...)
		if what := strings.Join(tt.args, " "); code != statusInput || message == "" || len(message) > 4000 {
			t.Errorf("limsup %.60s, %s %.40q: status %d, message of %d bytes: %.100s", what, tt.file, tt.text, code, len(message), message)
		}
	}
}

// TestOutputNames: --out writes where it says, or says why not; nothing else is
// touched, and no name is a way out of a folder that it does not itself name.
func TestOutputNames(t *testing.T) {
	dir := t.TempDir()
	work := filepath.Join(dir, "work")
	if err := os.Mkdir(work, 0o755); err != nil {
		t.Fatal(err)
	}
	t.Chdir(work)
	predict := func(out string) (string, int) {
		_, message, code := invoke(t, "predict", "--fluid", "n-pentane", "--pressure", "1 atm", "--out", out)
		return message, code
	}
	if message, code := predict("../beside.txt"); code != 0 {
		t.Errorf("a file of the folder above: %d, %s", code, message)
	}
	if b, err := os.ReadFile(filepath.Join(dir, "beside.txt")); err != nil || !strings.Contains(string(b), "n-pentane") {
		t.Errorf("%q, %v", b, err)
	}
	if err := os.Symlink("nowhere/x", "dangling"); err != nil {
		t.Fatal(err)
	}
	if err := os.Symlink("loop", "loop"); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile("file", []byte("old"), 0o644); err != nil {
		t.Fatal(err)
	}
	for _, tt := range []struct{ out, says string }{
		{"", ""}, // standard output
		{".", "folder"}, {"..", "folder"}, {"./", "folder"}, {"absent/x", "no such file"}, {"file/x", "not a directory"},
		{"x\x00y", "invalid"}, {strings.Repeat("x", 300), "name too long"},
		{"/dev/full", "no space left"},
	} {
		message, code := predict(tt.out)
		if tt.says == "" {
			if code != 0 {
				t.Errorf("%q: status %d, %s", tt.out, code, message)
			}
			continue
		}
		if code != statusInput || !strings.Contains(message, tt.says) {
			t.Errorf("%.40q: status %d, %q; want %d, …%s…", tt.out, code, message, statusInput, tt.says)
		}
	}
	if b, err := os.ReadFile("file"); err != nil || string(b) != "old" {
		t.Errorf("a file on the way: %q, %v", b, err)
	}
	for _, link := range []string{"dangling", "loop"} { // a link to nothing is replaced
		if message, code := predict(link); code != 0 {
			t.Errorf("%s: status %d, %s", link, code, message)
		}
		if b, err := os.ReadFile(link); err != nil || !strings.Contains(string(b), "n-pentane") {
			t.Errorf("%s: %q, %v", link, b, err)
		}
	}
	entries, err := os.ReadDir(".")
	if err != nil {
		t.Fatal(err)
	}
	for _, e := range entries {
		if strings.HasSuffix(e.Name(), ".part") {
			t.Errorf("%s is left over", e.Name())
		}
	}
}

// TestBrokenOutput: what cannot be written to standard output is an error.
func TestBrokenOutput(t *testing.T) {
	for _, args := range [][]string{
		{"predict", "--fluid", "n-pentane", "--pressure", "1 atm"}, {"predict", "--fluid", "n-pentane", "--pressure", "1 atm", "--format", "json"},
		{"fluids", "--format", "csv"}, {"check", "--data", demo, "--format", "markdown"}, {"isotherm", "--fluid", "water", "--temperature", "500 K"}, {"help"}, {"--version"}, {"help", "predict"}, {"man"}, {"completion", "bash"},
	} {
		err := run(context.Background(), full{}, &bytes.Buffer{}, append([]string{"limsup"}, args...))
		if !errors.Is(err, errFull) {
			t.Errorf("limsup %q: %v, want the error of the writer", args, err)
		}
	}
}

var errFull = errors.New("no space left")

type full struct{}

func (full) Write([]byte) (int, error) { return 0, errFull }
