package export

import (
	"bytes"
	"errors"
	"math"
	"os"
	"regexp"
	"strconv"
	"strings"
	"testing"

	"limsup/data/fluid"
	"limsup/eos"
	"limsup/eos/nucleation"
	"limsup/fit"
	"limsup/fit/export/internal/kernel"
)

// The closed forms of vapour pressure and density, which no fluid of the library has,
// and units other than SI. The fluid does not exist; its numbers have the size of those
// of an organic liquid.
func TestClosedFormsOfCorrelations(t *testing.T) {
	const head = `[[fluid]]
key = "synthetic"
molar_mass = {value = 72, unit = "g/mol", source = "synthetic"}
critical_temperature = {value = 470, unit = "K", source = "synthetic"}
critical_pressure = {value = 3.37, unit = "MPa", source = "synthetic"}
acentric_factor = {value = 0.25, unit = "1", source = "synthetic"}
surface_tension = {form = "dippr-106", Tc = 470, coefficients = [52, 1.2, 0.1, -0.1, 0.05], unit = "mN/m", range = [200, 469], source = "synthetic"}
liquid_density = {form = "rackett", coefficients = [0.81, 0.268, 470.0, 0.288], unit = "mol/L", range = [250, 469], source = "synthetic"}
`
	for _, vapour := range []string{
		`vapour_pressure = {form = "wagner-2.5-5", Tc = 470, Pc = 33.7, coefficients = [-7.3, 1.75, -2.3, -3.4], unit = "bar", range = [250, 469], source = "synthetic"}`,
		`vapour_pressure = {form = "wagner-3-6", Tc = 470, Pc = 3370, coefficients = [-7.3, 1.55, -2.5, -3.4], unit = "kPa", range = [250, 469], source = "synthetic"}`,
	} {
		r, err := fluid.Parse(strings.NewReader(head+vapour+"\n"), "synthetic.toml")
		if err != nil {
			t.Fatal(err)
		}
		m, err := fit.Untuned(fit.Variant{Properties: nucleation.FromCorrelation})
		if err != nil {
			t.Fatal(err)
		}
		s, err := newSubject(m, Options{Records: r, From: 1e5, To: 2e6})
		if err != nil {
			t.Fatal(err)
		}
		c, err := s.row(r[0])
		if err != nil {
			t.Fatal(err)
		}
		for _, P := range []float64{1e5, 5e5, 1e6, 2e6} {
			want := s.at(r[0], P)
			T, _, status := kernel.LimitTemperature(c, P)
			if status != want.Status || status != kernel.Fine || !(math.Abs(T-want.T) <= kernelKelvin) {
				t.Errorf("at %g Pa: %.12g K, status %d; want %.12g K, status %d", P, T, status, want.T, want.Status)
			}
			checkLines(t, c, &want)
		}
	}
}

// An equation of the user's own.
func TestCustomEquation(t *testing.T) {
	for _, e := range []eos.Equation{
		{Name: "own-power", D1: 0.5, D2: 0.25, Alpha: eos.AlphaPower, Exponent: 0.7},
		{Name: "own-soave", D1: 2, D2: -0.3, Alpha: eos.AlphaSoave, Slope: [3]float64{0.42, 1.5, -0.2}},
	} {
		m, err := fit.Untuned(fit.Variant{Equation: e.Name, Custom: &e})
		if err != nil {
			t.Fatal(err)
		}
		s, err := newSubject(m, Options{Records: records(t, "propane"), From: 0, To: 2e6})
		if err != nil {
			t.Fatal(err)
		}
		c, err := s.row(s.o.Records[0])
		if err != nil {
			t.Fatal(err)
		}
		for _, P := range []float64{0, 1e6, 2e6} {
			want := s.at(s.o.Records[0], P)
			T, _, status := kernel.LimitTemperature(c, P)
			if status != want.Status || status == kernel.Fine && !(math.Abs(T-want.T) <= kernelKelvin) {
				t.Errorf("%s at %g Pa: %.12g K, status %d; want %.12g K, status %d", e.Name, P, T, status, want.T, want.Status)
			}
			checkLines(t, c, &want)
		}
	}
}

// A writer that fails is reported, whatever the form.
func TestWriteErrors(t *testing.T) {
	c := modelCases(t)[3]
	c.fluids = c.fluids[:1]
	for _, form := range Forms() {
		if err := Write(full{}, form, c.model, c.options(t)); !errors.Is(err, os.ErrClosed) {
			t.Errorf("%s: %v, want the writer's error", form, err)
		}
	}
}

type full struct{}

func (full) Write([]byte) (int, error) { return 0, os.ErrClosed }

// States that the other tests do not reach: strong tension, where the kinetic factor is
// held, and so high a threshold that the sum over sizes begins at one molecule.
func TestExtremes(t *testing.T) {
	for _, tt := range []struct {
		v         fit.Variant
		threshold float64
		pressures []float64
	}{
		{fit.Variant{}, 12, []float64{-3e7, -1e7, -6e6, -4e6}},
		{fit.Variant{Kinetics: nucleation.Stepwise}, 12, []float64{-3e7, -1e7, -6e6, -4e6}},
		{fit.Variant{Kinetics: nucleation.Stepwise}, 30, []float64{-1e7, -2e6, 0, 1e6}},
		{fit.Variant{Kinetics: nucleation.Stepwise}, 35, []float64{-6e7, -3e7, 0}},
	} {
		m := calibrated(t, tt.v, 1)
		m.Parameters[0].Value = tt.threshold
		s, err := newSubject(m, Options{Records: records(t, "n-pentane", "water"), From: -1e8, To: 2e6})
		if err != nil {
			t.Fatal(err)
		}
		for _, r := range s.o.Records {
			c, err := s.row(r)
			if err != nil {
				t.Fatal(err)
			}
			c[kernel.KHasU] = 1
			for _, P := range tt.pressures {
				want := s.at(r, P)
				T, u, status := kernel.LimitTemperature(c, P)
				if status != want.Status || status == kernel.Fine && !(math.Abs(T-want.T) <= kernelKelvin && math.Abs(u-want.U) <= kernelRelative*want.U) {
					t.Errorf("%s, threshold %g, %s at %g Pa: %.12g K ± %.12g K, status %d; want %.12g K ± %.12g K, status %d",
						m.Variant.Name(), tt.threshold, r.Key, P, T, u, status, want.T, want.U, want.Status)
				}
			}
		}
	}
}

// Whatever the tolerance, what is stated is within it.
func TestToleranceIsKept(t *testing.T) {
	c := modelCases(t)[4]
	c.fluids = []string{"n-pentane"}
	o := c.options(t)
	pattern := regexp.MustCompile(`largest deviation from the model (\S+) K`)
	for _, o.Tolerance = range []float64{0.5, 0.1, 0.05, 0.02, 0.005, 0.002, 1e-3, 5e-4, 1e-4} {
		var b bytes.Buffer
		if err := Write(&b, Series, c.model, o); err != nil {
			t.Fatal(err)
		}
		found := pattern.FindAllStringSubmatch(strings.ReplaceAll(b.String(), "\n# ", " "), -1)
		if len(found) != len(seriesColumns) {
			t.Errorf("%d statements", len(found))
		}
		for _, f := range found {
			if v, err := strconv.ParseFloat(f[1], 64); err != nil || v > o.Tolerance {
				t.Errorf("stated %s K, tolerance %g K", f[1], o.Tolerance)
			}
		}
	}
}
