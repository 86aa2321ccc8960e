package main

import (
	"encoding/json"
	"math"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"testing"
)

// TestIntervals: profile and bootstrap intervals hold the estimate, agree roughly with
// the covariance, and a bootstrap prints the same bytes whatever the number of
// processors.
func TestIntervals(t *testing.T) {
	args := []string{"calibrate", "--data", demo, "--tune", "prefactor", "--tune", "offset/method", "--folds", "none", "--format", "json",
		"--profile", "all", "--bootstrap", "25", "--resample", "batch", "--level", "90%", "--seed", "4"}
	once := func(processors int) string {
		defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(processors))
		out, message, code := invoke(t, args...)
		if code != statusDone {
			t.Fatalf("status %d: %s", code, message)
		}
		return out
	}
	out := once(1)
	if again := once(4); again != out {
		t.Error("output depends on the number of processors: " + firstDifference(again, out))
	}
	var j struct {
		Parameters []struct {
			Value float64
			U     float64 `json:"standard_uncertainty"`
		}
		Profiles []struct {
			Parameter       string
			Level, Estimate float64
			Lower, Upper    float64
			LowerEnd        string `json:"lower_end"`
		} `json:"profile_intervals"`
		Bootstrap struct {
			Resample           string
			Replicates, Failed int
			Parameters, Limits []struct {
				Label      string
				Estimate   float64
				Percentile [2]float64
			}
		}
	}
	// limits_K is the name in the file
	if err := json.Unmarshal([]byte(strings.Replace(out, `"limits_K"`, `"limits"`, 1)), &j); err != nil {
		t.Fatal(err)
	}
	if len(j.Profiles) != 3 || len(j.Bootstrap.Parameters) != 3 || len(j.Bootstrap.Limits) != 4 {
		t.Fatalf("%d profiles, %d and %d bootstrap intervals", len(j.Profiles), len(j.Bootstrap.Parameters), len(j.Bootstrap.Limits))
	}
	for i, p := range j.Profiles {
		e := j.Parameters[i]
		if p.Level != 0.9 || p.Estimate != e.Value || p.LowerEnd != "crossed" || math.Abs(p.Upper-p.Lower-3.3*e.U) > e.U {
			t.Errorf("%s: %+v, estimate %+v", p.Parameter, p, e)
		}
	}
	if b := j.Bootstrap; b.Resample != "batch" || b.Replicates != 25 || b.Failed != 0 {
		t.Errorf("bootstrap: %+v", b)
	}
	table, _, _ := invoke(t, append(args[:len(args):len(args)], "--format", "table")...)
	if table != "" && !strings.Contains(table, "Bootstrap (batch), 90 %, 25 replicates, 0 failed") {
		t.Errorf("no bootstrap table in %s", table)
	}
}

// TestPlanFile: a plan file says the same as flags, and flags go before it.
func TestPlanFile(t *testing.T) {
	file := filepath.Join(t.TempDir(), "plan.toml")
	if err := os.WriteFile(file, []byte(`
[model]
equation = "peng-robinson"
[[parameter]]
name = "prefactor"
prior = {mean = -2, sd = 2}
[[parameter]]
name = "surface-tension"
value = 1.03
`), 0o644); err != nil {
		t.Fatal(err)
	}
	run := func(args ...string) string {
		out, message, code := invoke(t, append([]string{"calibrate", "--data", demo, "--folds", "none", "--format", "csv"}, args...)...)
		if code != statusDone {
			t.Fatalf("status %d: %s", code, message)
		}
		return out
	}
	if got, want := run("--plan", file), run("--equation", "peng-robinson", "--tune", "prefactor", "--prior", "prefactor=-2+-2", "--fix", "surface-tension=1.03"); got != want {
		t.Errorf("plan file:\n%s\nflags:\n%s", got, want)
	}
	if got, want := run("--plan", file, "--equation", "soave", "--fix", "surface-tension=1", "--prior", "prefactor=-3+-1"), run("--tune", "prefactor", "--prior", "prefactor=-3+-1"); got != want {
		t.Errorf("flags over a plan file:\n%s\nflags:\n%s", got, want)
	}
	if got := run("--plan", file, "--tune", "surface-tension"); !strings.Contains(got, "surface-tension,") {
		t.Errorf("tuned over a plan file:\n%s", got)
	}
}

// TestIntervalUsage: what the flags refuse, with status 2.
func TestIntervalUsage(t *testing.T) {
	bad := filepath.Join(t.TempDir(), "bad.toml")
	if err := os.WriteFile(bad, []byte("[search]\nrestart = 1\n"), 0o644); err != nil {
		t.Fatal(err)
	}
	for _, tt := range []struct {
		args []string
		want string
	}{
		{[]string{"--resample", "rows"}, "--resample needs --bootstrap"},
		{[]string{"--level", "90%"}, "--level needs --bootstrap or --profile"},
		{[]string{"--profile", "all", "--level", "95"}, "want a share between 0 and 1"},
		{[]string{"--profile", "slope"}, `profile "slope": want one of prefactor, spread`},
		{[]string{"--bootstrap", "0"}, "1 to 1000000"},
		{[]string{"--bootstrap", "5", "--resample", "droplets"}, `resample "droplets": want one of rows, fluid, method, batch, parametric`},
		{[]string{"--plan", bad}, "bad.toml:2: unknown key search.restart"},
		{[]string{"--plan", bad + ".none"}, "no such file"},
		{[]string{"--noise", "gaussian=estimate"}, "student=estimate"},
	} {
		_, message, code := invoke(t, append([]string{"calibrate", "--data", demo, "--folds", "none"}, tt.args...)...)
		if code != statusInput || !strings.Contains(message, tt.want) {
			t.Errorf("%v: status %d, %q; want %q", tt.args, code, message, tt.want)
		}
	}
}
