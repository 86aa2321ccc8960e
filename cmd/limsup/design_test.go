package main

import (
	"encoding/json"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"testing"
)

// TestPlanGolden holds what the command plan prints.
func TestPlanGolden(t *testing.T) {
	tune := []string{"plan", "--data", demo, "--tune", "prefactor", "--tune", "surface-tension", "--tune", "offset/method"}
	with := func(more ...string) []string { return append(append([]string{}, tune...), more...) }
	for _, tt := range []struct {
		name, columns string
		args          []string
	}{
		{"plan-80", "80", with("--narrow", "surface-tension")},
		{"plan-160", "160", with("--batch", "4", "--top", "3")},
		{"plan-limit-100", "100", with("--narrow-limit", "n-pentane@0.5 MPa", "--batch", "4", "--candidates", "testdata/candidates.toml")},
		{"plan-scratch-80", "80", with("--narrow", "prefactor", "--narrow", "surface-tension", "--batch", "6", "--from-scratch", "--check", "20")},
		{"plan-tell-80", "80", with("--tell-apart", "redlich-kwong; tune=prefactor", "--batch", "3", "--fluid", "n-pentane", "--fluid", "n-octane", "--pressure", "1 atm", "--pressure", "20 MPa")},
		{"plan.csv", "80", with("--narrow", "surface-tension", "--format", "csv")},
		{"plan.md", "80", with("--narrow", "surface-tension", "--batch", "3", "--format", "markdown")},
		{"plan.json", "80", with("--narrow", "surface-tension", "--batch", "2", "--fluid", "n-pentane", "--pressure", "1 atm", "--method", "droplet", "--diameter", "1 mm", "--heating-rate", "2 K/s", "--heating-rate", "2000 K/s", "--most", "1", "--format", "json")},
	} {
		t.Run(tt.name, func(t *testing.T) {
			t.Setenv("COLUMNS", tt.columns)
			out, message, code := invoke(t, tt.args...)
			if code != 0 || message != "" {
				t.Errorf("status %d: %s", code, message)
			}
			golden(t, tt.name+".golden", out)
			if strings.HasSuffix(tt.name, ".json") && !json.Valid([]byte(out)) {
				t.Error("not JSON")
			}
		})
	}
}

// The same plan from the data and from a model file calibrated on them; and the same
// bytes on one processor and on several.
func TestPlanOfModelFile(t *testing.T) {
	file := filepath.Join(t.TempDir(), "lab.json")
	tune := []string{"--tune", "prefactor", "--tune", "offset/method"}
	if _, message, code := invoke(t, append([]string{"calibrate", "--data", demo, "--folds", "none", "--out", file}, tune...)...); code != 0 {
		t.Fatal(message)
	}
	args := []string{"plan", "--data", demo, "--narrow", "prefactor", "--batch", "3", "--check", "6", "--fluid", "n-pentane"}
	fromData, message, code := invoke(t, append(append([]string{}, args...), tune...)...)
	if code != 0 {
		t.Fatal(message)
	}
	fromModel, message, code := invoke(t, append(append([]string{}, args...), "--model", file)...)
	if code != 0 {
		t.Fatal(message)
	}
	// The simulated calibrations begin elsewhere and end 1e-9 apart, which three digits do not show.
	if fromData != fromModel {
		t.Errorf("from the data and from the model file: %s", firstDifference(fromModel, fromData))
	}
	before := runtime.GOMAXPROCS(1)
	defer runtime.GOMAXPROCS(before)
	for _, format := range []string{"json", "table"} {
		var first string
		for _, n := range []int{1, 4} {
			runtime.GOMAXPROCS(n)
			out, message, code := invoke(t, append(append([]string{}, args...), "--model", file, "--format", format)...)
			if code != 0 {
				t.Fatal(message)
			}
			if first == "" {
				first = out
			} else if out != first {
				t.Errorf("%s on %d processors: %s", format, n, firstDifference(out, first))
			}
		}
	}
	alone, message, code := invoke(t, "plan", "--model", file, "--fluid", "n-octane", "--pressure", "0.5 MPa", "--u-temperature", "0.3 K", "--batch", "1")
	if code != 0 || !strings.Contains(alone, "n-octane at 500 kPa") {
		t.Errorf("without data: status %d, %s", code, message)
	}
}

func TestBadPlanCalls(t *testing.T) {
	folder := t.TempDir()
	bad := filepath.Join(folder, "bad.toml")
	if err := os.WriteFile(bad, []byte("fluid = [\"n-pentane\"]\npressure = [\"1 atm\"]\n[[setup]]\nmethd = \"droplet\"\n"), 0o644); err != nil {
		t.Fatal(err)
	}
	for _, tt := range []struct {
		want string
		code int
		args []string
	}{
		{"limsup plan needs --data FILE", 2, nil},
		{"--batch 0: want 1 to 1000", 2, []string{"--batch", "0"}},
		{"--check 1: want 2 to 100000", 2, []string{"--data", demo, "--check", "1"}},
		{"--top 0", 2, []string{"--data", demo, "--top", "0"}},
		{"a plan has one target", 2, []string{"--data", demo, "--narrow", "prefactor", "--narrow-limit", "water@1 atm"}},
		{"want FLUID@PRESSURE", 2, []string{"--data", demo, "--narrow-limit", "water"}},
		{"want one of the free parameters prefactor, spread", 2, []string{"--data", demo, "--narrow", "slope"}},
		{"--candidates and --fluid exclude each other", 2, []string{"--data", demo, "--candidates", bad, "--fluid", "water"}},
		{`bad.toml:4:1: unknown key "setup.methd"; did you mean method`, 2, []string{"--data", demo, "--candidates", bad}},
		{"--diameter and --volume exclude each other", 2, []string{"--data", demo, "--diameter", "1 mm", "--volume", "1 uL"}},
		{"two ways to measure", 2, []string{"--data", demo, "--heating-rate", "1 K/s", "--holding-time", "1 s"}},
		{"--u-temperature \"0.3 kPa\"", 2, []string{"--data", demo, "--u-temperature", "0.3 kPa"}},
		{"at least one that the model can predict", 2, []string{"--data", demo, "--pressure", "50 MPa"}},
		{"no-such.toml", 2, []string{"--data", demo, "--candidates", "no-such.toml"}},
	} {
		out, message, code := invoke(t, append([]string{"plan"}, tt.args...)...)
		if code != tt.code || !strings.Contains(message, tt.want) || out != "" {
			t.Errorf("plan %q: status %d, %q; want %d, …%s…", tt.args, code, message, tt.code, tt.want)
		}
	}
}
