package planfile_test

import (
	"errors"
	"fmt"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"limsup/fit"
	"limsup/fit/planfile"
)

const whole = `# every key
[model]
equation = "peng-robinson"
limit = "kinetic"
surface-tension = "parachor"
properties = "equation"
embryo-pressure = "poynting"
kinetics = "chemical"

[noise]
kind = "student"
degrees = 5
estimate = true

[search]
restarts = 3
seed = 7

[[parameter]]
name = "slope"
by = "fluid"
pooled = true
start = 1.01
lower = 0.8
upper = 1.2
prior = {mean = 1.0, sd = 0.1}
[[parameter.group]]
name = "n-pentane"
start = 0.98
prior = {mean = 0.98, sd = 0.02}

[[parameter]]
name = "prefactor"
value = -1.5

[[parameter]]
name = "threshold"

[[anchor]]
property = "vapour-pressure"
uncertainty = 0.01
`

func TestRead(t *testing.T) {
	got, hasSeed, err := planfile.Read(strings.NewReader(whole), "plan.toml")
	if err != nil {
		t.Fatal(err)
	}
	want := fit.Plan{
		Variant:  fit.Variant{Equation: "peng-robinson", Limit: fit.Kinetic, Tension: fit.TensionFromParachor, Properties: "equation", EmbryoPressure: "poynting", Kinetics: "chemical"},
		Noise:    fit.Noise{Kind: fit.Student, Degrees: 5, Estimate: true},
		Restarts: 3, Seed: 7,
		Terms:   []fit.Term{{Name: "slope", By: fit.ByFluid, Pooled: true}, {Name: "threshold"}},
		Fixed:   []fit.Setting{{Name: "prefactor", Value: -1.5}},
		Bounds:  []fit.Bound{{Name: "slope", Lower: 0.8, Upper: 1.2}},
		Starts:  []fit.Setting{{Name: "slope", Value: 1.01}, {Name: "slope", Group: "n-pentane", Value: 0.98}},
		Priors:  []fit.Prior{{Name: "slope", Mean: 1, Spread: 0.1}, {Name: "slope", Group: "n-pentane", Mean: 0.98, Spread: 0.02}},
		Anchors: []fit.Anchor{{Property: "vapour-pressure", Relative: 0.01}},
	}
	if d := cmp.Diff(want, got); d != "" || !hasSeed {
		t.Errorf("seed %v, difference:\n%s", hasSeed, d)
	}
	if _, hasSeed, err = planfile.Read(strings.NewReader(""), "empty.toml"); err != nil || hasSeed {
		t.Errorf("empty file: seed %v, %v", hasSeed, err)
	}
}

// TestRefuse: one change to the good file, and the message with the line it must give.
func TestRefuse(t *testing.T) {
	for _, tt := range []struct{ name, old, new, want string }{
		{"unknown key", "restarts = 3", "restart = 3", "plan.toml:16: unknown key search.restart"},
		{"unknown table", "[search]", "[serach]", "unknown key serach"},
		{"unknown key of a prior", "sd = 0.1}", "sigma = 0.1}", "plan.toml:26: unknown key parameter.sigma"},
		{"wrong type", "restarts = 3", `restarts = "3"`, "plan.toml:16: "},
		{"bad TOML", "[noise]", "[noise", "plan.toml:10: "},
		{"unknown equation", "peng-robinson", "peng-robin", "plan.toml:2: "},
		{"unknown noise", `kind = "student"`, `kind = "cauchy"`, "cauchy"},
		{"degrees below one", "degrees = 5", "degrees = 0.5", "plan.toml:12: degrees 0.5: want 1 or more"},
		{"restarts", "restarts = 3", "restarts = -1", "plan.toml:16: restarts -1: want 0 to 10000"},
		{"unknown parameter", `name = "threshold"`, `name = "treshold"`, `plan.toml:37: parameter "treshold"`},
		{"parameter with a scope in its name", `name = "threshold"`, `name = "threshold/fluid"`, "plan.toml:37: "},
		{"parameter twice", `name = "threshold"`, `name = "prefactor"`, "plan.toml:37: parameter prefactor a second time"},
		{"unknown scope", `by = "fluid"`, `by = "colour"`, "plan.toml:20: "},
		{"pooled without scope", `by = "fluid"`, "", "plan.toml:22: slope: pooled needs by"},
		{"value and tune", "value = -1.5", "value = -1.5\ntune = true", "plan.toml:34: prefactor: value holds a parameter"},
		{"neither value nor tune", "value = -1.5", "tune = false", "plan.toml:34: prefactor: a parameter that is not tuned needs a value"},
		{"held with a start", "value = -1.5", "value = -1.5\nstart = 0.0", "plan.toml:34: prefactor: a parameter that is held"},
		{"one bound", "upper = 1.2\n", "", "plan.toml:24: slope: want both bounds or none"},
		{"bounds reversed", "lower = 0.8", "lower = 1.8", "plan.toml:24: slope: want lower below upper"},
		{"start out of bounds", "start = 1.01", "start = 1.3", "plan.toml:19: value of slope"},
		{"prior without sd", "{mean = 1.0, sd = 0.1}", "{mean = 1.0}", "plan.toml:26: slope: a prior needs mean and sd"},
		{"prior of width zero", "sd = 0.02}", "sd = 0.0}", "prior of slope"},
		{"group without name", "name = \"n-pentane\"\n", "", "slope: a group needs a name"},
		{"unknown anchor", `"vapour-pressure"`, `"viscosity"`, "plan.toml:39: anchor"},
		{"anchor without uncertainty", "uncertainty = 0.01\n", "", "plan.toml:39: anchor: uncertainty is missing"},
	} {
		t.Run(tt.name, func(t *testing.T) {
			if strings.Count(whole, tt.old) != 1 && tt.name != "one bound" {
				t.Fatalf("%q is %d times in the file", tt.old, strings.Count(whole, tt.old))
			}
			_, _, err := planfile.Read(strings.NewReader(strings.Replace(whole, tt.old, tt.new, 1)), "plan.toml")
			var p planfile.Problems
			if !errors.As(err, &p) || !strings.Contains(err.Error(), tt.want) {
				t.Errorf("got %v, want %s", err, tt.want)
			}
		})
	}
}

func FuzzRead(f *testing.F) {
	f.Add(whole)
	f.Add("[[parameter]]\nname = \"offset\"\nby = \"method\"\npooled = true\n")
	f.Add("[[anchor]]\nproperty = \"liquid-density\"\nuncertainty = nan\n")
	f.Fuzz(func(t *testing.T, s string) {
		p, _, err := planfile.Read(strings.NewReader(s), "plan.toml")
		var bad planfile.Problems
		if err != nil && (!errors.As(err, &bad) || len(bad) == 0 || bad[0].Line < 1) {
			t.Fatalf("error without a place: %v", err)
		}
		if err == nil {
			if _, err := p.Complete(); err != nil {
				t.Fatalf("a plan was read that does not complete: %v", err)
			}
		}
	})
}

func ExampleRead() {
	p, _, err := planfile.Read(strings.NewReader(`
[noise]
kind = "survival"

[[parameter]]
name = "prefactor"
prior = {mean = -2, sd = 1}
`), "plan.toml")
	fmt.Println(p.Noise.Kind, p.Terms, p.Priors, err)
	_, _, err = planfile.Read(strings.NewReader("[search]\nrestart = 3\n"), "plan.toml")
	fmt.Println(err)
	// Output:
	// survival [prefactor] [{prefactor  -2 1}] <nil>
	// plan.toml:2: unknown key search.restart
}
