package main

import (
	"bytes"
	"context"
	"encoding/json"
	"errors"
	"flag"
	"os"
	"path/filepath"
	"regexp"
	"runtime"
	"strconv"
	"strings"
	"testing"

	"gonum.org/v1/gonum/floats/scalar"
)

var update = flag.Bool("update", false, "rewrite the golden files")

// invoke runs the program as a user would, in the folder of this package, and
// returns what it printed and its exit status.
func invoke(t *testing.T, args ...string) (stdout, message string, code int) {
	t.Helper()
	var out, errs bytes.Buffer
	err := run(context.Background(), &out, &errs, append([]string{"limsup"}, args...))
	message = errs.String()
	if err != nil {
		message += describe(err)
	}
	return out.String(), message, status(err)
}

// golden compares text with a file under testdata.
func golden(t *testing.T, name, got string) {
	t.Helper()
	file := filepath.Join("testdata", filepath.FromSlash(name))
	if *update {
		if err := os.MkdirAll(filepath.Dir(file), 0o755); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(file, []byte(got), 0o644); err != nil {
			t.Fatal(err)
		}
		return
	}
	want, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	text := string(want)
	if strings.Contains(name, ".md.") { // the width of a column goes with the number of digits
		got, text = squeeze(got), squeeze(text)
	}
	if got, want := blunt(t, got, text), text; got != want {
		t.Errorf("%s differs from what the program prints; run go test ./cmd/limsup -update and read the difference.\ngot:\n%s", file, firstDifference(got, want))
	}
}

// squeeze makes the padding of Markdown tables one space and one dash wide.
func squeeze(s string) string {
	return regexp.MustCompile(` {2,}`).ReplaceAllString(regexp.MustCompile(`-{3,}`).ReplaceAllString(s, "--"), " ")
}

// longNumber is a number printed in full precision.
var longNumber = regexp.MustCompile(`-?[0-9]+\.[0-9]{7,}(e[+-]?[0-9]+)?|-?[0-9.]+e[+-]?[0-9]+`)

// blunt returns got with those of its full-precision numbers replaced by the ones of
// want that agree with them to 1e-7 relative, or to 1e-9 absolutely. The digits
// beyond depend on the last rounding of each operation, which processors that fuse
// multiplication and addition do differently, and on the tolerance of the search
// (1e-9 standard errors).
func blunt(t *testing.T, got, want string) string {
	t.Helper()
	wanted := longNumber.FindAllString(want, -1)
	if len(longNumber.FindAllString(got, -1)) != len(wanted) {
		return got
	}
	i := 0
	return longNumber.ReplaceAllStringFunc(got, func(s string) string {
		w := wanted[i]
		i++
		a, errA := strconv.ParseFloat(s, 64)
		b, errB := strconv.ParseFloat(w, 64)
		if errA == nil && errB == nil && scalar.EqualWithinAbsOrRel(a, b, 1e-9, 1e-7) {
			return w
		}
		return s
	})
}

// firstDifference quotes the first line in which two texts differ.
func firstDifference(got, want string) string {
	g, w := strings.Split(got, "\n"), strings.Split(want, "\n")
	for i := range g {
		if i >= len(w) || g[i] != w[i] {
			other := "(end)"
			if i < len(w) {
				other = w[i]
			}
			return "line " + itoa(i+1) + "\n  got  " + g[i] + "\n  want " + other
		}
	}
	return "the golden file goes on"
}

func itoa(i int) string { b, _ := json.Marshal(i); return string(b) }

const (
	demo      = "../../data/demo/droplets.csv"
	mistakes  = "../../data/demo/mistakes.csv"
	published = "../../data/published/limits.csv"
)

// TestGolden holds what commands print, on a terminal of 80 and of 160 columns and
// in the other formats.
func TestGolden(t *testing.T) {
	for _, tt := range []struct {
		name    string
		columns string
		code    int
		args    []string
	}{
		{"check-80", "80", 0, []string{"check", "--data", demo}},
		{"check-160", "160", 0, []string{"check", "--data", demo}},
		{"check.json", "80", 0, []string{"check", "--data", published, "--format", "json"}},
		{"check.csv", "80", 0, []string{"check", "--data", published, "--format", "csv"}},
		{"check-mistakes", "80", 2, []string{"check", "--data", mistakes}},
		{"calibrate-80", "80", 0, []string{"calibrate", "--data", demo}},
		{"calibrate-160", "160", 0, []string{"calibrate", "--data", demo, "--tune", "prefactor", "--tune", "offset/method"}},
		{"calibrate-published-80", "80", 0, []string{"calibrate", "--data", published}},
		{"calibrate.json", "80", 0, []string{"calibrate", "--data", demo, "--format", "json"}},
		{"calibrate.csv", "80", 0, []string{"calibrate", "--data", demo, "--format", "csv"}},
		{"calibrate.md", "80", 0, []string{"calibrate", "--data", demo, "--format", "markdown"}},
		{"calibrate-rows-160", "160", 0, []string{"calibrate", "--data", demo, "--rows", "--folds", "none"}},
		{"predict-80", "80", 0, []string{"predict", "--fluid", "n-pentane", "--fluid", "1,3-butadiene", "--pressure", "0.5 MPa", "--pressure", "-3 MPa"}},
		{"predict.json", "80", 3, []string{"predict", "--fluid", "water", "--pressure", "1 atm", "--pressure", "2 MPa", "--equation", "van-der-waals", "--format", "json"}},
		{"predict-pressure-80", "80", 0, []string{"predict", "--fluid", "propane", "--temperature", "50 degC"}},
		{"fluids-80", "80", 0, []string{"fluids"}},
		{"fluids-160", "160", 0, []string{"fluids", "--search", "butane"}},
		{"fluid-80", "80", 0, []string{"fluids", "--fluid", "water"}},
		{"isotherm-80", "80", 0, []string{"isotherm", "--fluid", "n-pentane", "--temperature", "147 degC", "--count", "15"}},
		{"isotherm.json", "80", 0, []string{"isotherm", "--fluid", "n-pentane", "--temperature", "147 degC", "--count", "4", "--format", "json"}},
		{"embryo-80", "80", 0, []string{"embryo", "--fluid", "n-pentane", "--temperature", "145 degC", "--pressure", "1 atm", "--count", "9"}},
		{"embryo.json", "80", 0, []string{"embryo", "--fluid", "water", "--temperature", "20 degC", "--pressure", "10 kPa", "--count", "3", "--format", "json"}},
		{"flux-80", "80", 0, []string{"flux", "--fluid", "n-hexane", "--pressure", "1 atm", "--count", "5"}},
		{"flux-across-80", "80", 3, []string{"flux", "--fluid", "n-hexane", "--pressure", "1 atm", "--from", "330 K", "--to", "480 K", "--count", "4"}},
		{"flux-across.json", "80", 3, []string{"flux", "--fluid", "n-hexane", "--pressure", "1 atm", "--temperature", "470 K", "--format", "json"}},
		{"flux.json", "80", 0, []string{"flux", "--fluid", "n-hexane", "--pressure", "1 atm", "--temperature", "455 K", "--format", "json"}},
	} {
		t.Run(tt.name, func(t *testing.T) {
			t.Setenv("COLUMNS", tt.columns)
			out, message, code := invoke(t, tt.args...)
			if code != tt.code {
				t.Errorf("status %d, want %d: %s", code, tt.code, message)
			}
			if message != "" {
				out += "\n-- messages\n" + message + "\n"
			}
			golden(t, tt.name+".golden", out)
			if strings.HasSuffix(tt.name, ".json") && !json.Valid([]byte(strings.Split(out, "\n-- messages")[0])) {
				t.Error("not JSON")
			}
		})
	}
}

// TestFlagsAnywhere puts the flags before the command, after it, and in other
// orders: the result is the same.
func TestFlagsAnywhere(t *testing.T) {
	want, _, code := invoke(t, "predict", "--fluid", "n-pentane", "--pressure", "-1 MPa", "--format", "json")
	if code != 0 {
		t.Fatal(code)
	}
	for _, args := range [][]string{
		{"--fluid", "n-pentane", "--pressure", "-1 MPa", "--format", "json", "predict"},
		{"--format=json", "predict", "--pressure=-1 MPa", "--fluid", "n-pentane"},
		{"--pressure", "-1 MPa", "predict", "--format", "json", "--fluid", "pentane"},
	} {
		if got, message, code := invoke(t, args...); got != want || code != 0 {
			t.Errorf("%q: status %d, %s, not the same output", args, code, message)
		}
	}
}

// TestBadCalls gives every kind of unusable command line or state.
func TestBadCalls(t *testing.T) {
	for _, tt := range []struct {
		code int
		says string
		args []string
	}{
		{2, "no command \"predikt\"; did you mean predict?", []string{"predikt"}},
		{2, "has no flag --fluidd; did you mean --fluid", []string{"predict", "--fluidd", "water"}},
		{2, "takes flags only; \"water\" is left over", []string{"predict", "water", "--pressure", "1 atm"}},
		{2, "flag --fluid needs a value", []string{"predict", "--fluid"}},
		{2, "did you mean n-pentane?", []string{"predict", "--fluid", "n-pentan", "--pressure", "1 atm"}},
		{2, "--pressure \"1\"", []string{"predict", "--fluid", "water", "--pressure", "1"}},
		{2, "--pressure \"1 furlong\"", []string{"predict", "--fluid", "water", "--pressure", "1 furlong"}},
		{2, "--temperature \"-300 degC\"", []string{"predict", "--fluid", "water", "--temperature", "-300 degC"}},
		{2, "either pressures or temperatures", []string{"predict", "--fluid", "water", "--temperature", "500 K", "--pressure", "1 atm"}},
		{2, "did you mean soave?", []string{"predict", "--fluid", "water", "--pressure", "1 atm", "--equation", "soav"}},
		{2, "properties from correlations", []string{"predict", "--fluid", "water", "--pressure", "1 atm", "--properties", "correlation", "--embryo-pressure", "exact"}},
		{2, "--format \"xml\"", []string{"predict", "--fluid", "water", "--pressure", "1 atm", "--format", "xml"}},
		{2, "want 0 to 35", []string{"predict", "--fluid", "water", "--pressure", "1 atm", "--set", "threshold=99"}},
		{2, "parameter \"treshold\"", []string{"predict", "--fluid", "water", "--pressure", "1 atm", "--set", "treshold=9"}},
		{3, "1 of 1 states have no limit", []string{"predict", "--fluid", "water", "--pressure", "1 atm", "--equation", "van-der-waals"}},
		{3, "1 of 1 states have no limit", []string{"predict", "--fluid", "water", "--pressure", "30 MPa"}},
		{3, "is not superheated", []string{"embryo", "--fluid", "water", "--temperature", "400 K", "--pressure", "1 MPa", "--properties", "correlation"}},
		{2, "outside", []string{"embryo", "--fluid", "water", "--temperature", "700 K", "--pressure", "1 atm"}},
		{3, "no liquid", []string{"embryo", "--fluid", "n-pentane", "--temperature", "440 K", "--pressure", "1 atm"}},
		{2, "needs --data", []string{"calibrate"}},
		{2, "no such file", []string{"calibrate", "--data", "absent.csv"}},
		{2, "want one of threshold", []string{"calibrate", "--data", demo, "--tune", "viscosity"}},
		{2, "every row carries its own flux", []string{"calibrate", "--data", demo, "--tune", "threshold"}},
		{2, "not fixed at the same time", []string{"calibrate", "--data", demo, "--tune", "slope", "--fix", "slope=1"}},
		{2, "the spinodal depends on the equation of state alone", []string{"calibrate", "--data", demo, "--tune", "threshold", "--limit", "spinodal"}},
		{2, "folds \"weekday\"", []string{"calibrate", "--data", demo, "--folds", "weekday"}},
		{2, "--model and --equation exclude each other", []string{"predict", "--fluid", "water", "--pressure", "1 atm", "--model", "m.json", "--equation", "soave"}},
	} {
		_, message, code := invoke(t, tt.args...)
		if code != tt.code || !strings.Contains(message, tt.says) {
			t.Errorf("limsup %q\n  status %d, %q\n  want %d, …%s…", tt.args, code, message, tt.code, tt.says)
		}
	}
}

// TestBadMeasurements feeds files that cannot be calibrated on.
func TestBadMeasurements(t *testing.T) {
	const head = "fluid,temperature/K,pressure/kPa,u_temperature/K\n"
	for _, tt := range []struct {
		name, text string
		code       int
		says       string
	}{
		{"empty", "", 2, "empty"},
		{"header only", head, 2, "no rows"},
		{"missing column", "fluid,temperature/K\nwater,550\n", 2, "pressure"},
		{"unknown unit", "fluid,temperature/furlong,pressure/kPa\nwater,550,101\n", 2, "furlong"},
		{"not UTF-8", head + "n-p\xe9ntane,420,101,1\n", 2, "UTF-8"},
		{"one row", head + "n-pentane,420,101.325,1\n", 2, "1 usable rows for 2 free parameters"},
		{"more parameters than rows", head + "n-pentane,420,101.325,1\nn-hexane,457,101.325,1\n", 2, "2 usable rows for"},
		{"all above Tc", head + "n-pentane,480,101.325,1\nn-pentane,481,101.325,1\n", 2, "not below the critical temperature"},
		{"not superheated", head + "n-pentane,300,101.325,1\nn-pentane,301,101.325,1\n", 2, "not superheated"},
		{"no kinetic limit", head + "water,550,101.325,1\nwater,551,101.325,1\n", 2, "no kinetic limit"},
	} {
		t.Run(tt.name, func(t *testing.T) {
			file := filepath.Join(t.TempDir(), "bad.csv")
			if err := os.WriteFile(file, []byte(tt.text), 0o644); err != nil {
				t.Fatal(err)
			}
			args := []string{"calibrate", "--data", file}
			if tt.name == "more parameters than rows" {
				args = append(args, "--tune", "threshold", "--tune", "slope")
			}
			if tt.name == "no kinetic limit" {
				args = append(args, "--equation", "van-der-waals")
			}
			_, message, code := invoke(t, args...)
			if code != tt.code || !strings.Contains(message, tt.says) {
				t.Errorf("status %d, %q; want %d, …%s…", code, message, tt.code, tt.says)
			}
		})
	}
}

// TestModelFile calibrates, writes the model, and predicts with it: twice the same
// bytes, and the same prediction as from the process that calibrated.
func TestModelFile(t *testing.T) {
	dir := t.TempDir()
	a, b := filepath.Join(dir, "a.json"), filepath.Join(dir, "b.json")
	for _, out := range []string{a, b} {
		if _, message, code := invoke(t, "calibrate", "--data", demo, "--tune", "prefactor", "--tune", "offset/method", "--out", out); code != 0 {
			t.Fatalf("status %d: %s", code, message)
		}
	}
	first, err := os.ReadFile(a)
	if err != nil {
		t.Fatal(err)
	}
	second, err := os.ReadFile(b)
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(first, second) {
		t.Error("the same command wrote two different models")
	}
	out, message, code := invoke(t, "predict", "--model", a, "--fluid", "n-pentane", "--fluid", "propane", "--pressure", "500 kPa", "--format", "json")
	if code != 0 {
		t.Fatalf("status %d: %s", code, message)
	}
	var got struct {
		Predictions []struct {
			Fluid    string    `json:"fluid"`
			T        float64   `json:"temperature_K"`
			U        *float64  `json:"standard_uncertainty_K"`
			Interval []float64 `json:"interval_95_K"`
			Extra    bool      `json:"extrapolated"`
		} `json:"predictions"`
	}
	if err := json.Unmarshal([]byte(out), &got); err != nil {
		t.Fatal(err)
	}
	for i, want := range []bool{false, true} { // propane is not in the demonstration data
		p := got.Predictions[i]
		if p.Extra != want {
			t.Errorf("%s: extrapolated %v, want %v", p.Fluid, p.Extra, want)
		}
		if p.U == nil || len(p.Interval) != 2 || !(p.Interval[0] < p.T && p.T < p.Interval[1]) || !(*p.U > 0) {
			t.Errorf("%s: uncertainty %v, interval %v about %g", p.Fluid, p.U, p.Interval, p.T)
		}
	}
	if err := os.WriteFile(b, append(first[:len(first)/2], '!'), 0o644); err != nil {
		t.Fatal(err)
	}
	if _, message, code := invoke(t, "predict", "--model", b, "--fluid", "propane", "--pressure", "1 atm"); code != 2 || !strings.Contains(message, "b.json:") {
		t.Errorf("a broken model file: status %d, %q", code, message)
	}
}

// TestSameOutput: the same command prints the same bytes whatever the number of
// processors.
func TestSameOutput(t *testing.T) {
	args := []string{"calibrate", "--data", demo, "--tune", "prefactor", "--tune", "surface-tension", "--format", "json"}
	defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(1))
	want, _, _ := invoke(t, args...)
	runtime.GOMAXPROCS(4)
	for range 2 {
		if got, _, _ := invoke(t, args...); got != want {
			t.Error("output differs: " + firstDifference(got, want))
		}
	}
}

// TestStatusOfUnknownErrors: what no kind claims is internal.
func TestStatusOfUnknownErrors(t *testing.T) {
	if got := status(errors.New("surprise")); got != statusInternal {
		t.Errorf("status %d, want %d", got, statusInternal)
	}
}

// TestModelThatDidNotConverge: the model file of a search that stopped says so to whoever
// predicts with it or carries it on.
func TestModelThatDidNotConverge(t *testing.T) {
	file := filepath.Join(t.TempDir(), "kink.json")
	_, message, code := invoke(t, "calibrate", "--data", demo, "--tune", "prefactor", "--tune", "slope", "--folds", "none", "--out", file)
	if code != statusNoAnswer || !strings.Contains(message, "not converged") {
		t.Fatalf("status %d, %q; want a calibration that does not converge", code, message)
	}
	const want = "The calibration behind these parameters did not converge ("
	if _, message, code := invoke(t, "predict", "--model", file, "--fluid", "n-pentane", "--pressure", "5 bar"); code != statusDone || !strings.Contains(message, want) {
		t.Errorf("predict: status %d, %q", code, message)
	}
	if out, _, code := invoke(t, "export", "--model", file, "--as", "c"); code != statusDone || !strings.Contains(out, "// The calibration behind these parameters did not") {
		t.Errorf("export: status %d, and the code does not tell", code)
	}
	if out, _, _ := invoke(t, "report", "--model", file, "--data", demo); !strings.Contains(out, want) {
		t.Error("report: the page does not tell")
	}
	good := filepath.Join(t.TempDir(), "good.json")
	invoke(t, "calibrate", "--data", demo, "--folds", "none", "--out", good)
	if _, message, _ := invoke(t, "predict", "--model", good, "--fluid", "n-pentane", "--pressure", "5 bar"); message != "" {
		t.Errorf("a good model is doubted: %q", message)
	}
}
