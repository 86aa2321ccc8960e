package export

import (
	"bytes"
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"

	"limsup/data/fluid"
	"limsup/eos"
	"limsup/eos/nucleation"
	"limsup/fit"
)

// modelCase is a model that the tests export.
type modelCase struct {
	prefix   string
	model    *fit.Model
	fluids   []string
	from, to float64
	method   string
}

// organic are fluids with both forms of the surface tension correlation (methylcyclopentane
// has DIPPR 106), and water. hard is one that by many equations has no kinetic limit.
var organic = []string{"n-pentane", "propane", "methylcyclopentane", "water"}

const hard = "2-propanol"

// modelCases are the five equations, tuned, and between them every option. The
// calibrations never took place: their numbers are made up.
func modelCases(t testing.TB) []modelCase {
	var out []modelCase
	add := func(prefix string, m *fit.Model, from, to float64, fluids ...string) {
		out = append(out, modelCase{prefix: prefix, model: m, fluids: fluids, from: from, to: to})
	}
	for i, e := range eos.EquationNames() {
		slope := 1.03
		if e == "van-der-waals" {
			slope = 0.6 // with the published exponent 0 hardly any liquid has a kinetic limit
		}
		m := calibrated(t, fit.Variant{Equation: e}, slope)
		add([]string{"vdw_", "bert_", "rk_", "srk_", "pr_"}[i], m, 1e5, 2.6e6, organic...)
	}
	out[3].method = "pulse"
	// offsets scattered about zero: a method that was not measured has their spread
	rk := out[2].model
	for i := range rk.Parameters {
		if e := &rk.Parameters[i]; e.Name == fit.Slope && e.Role == fit.RolePoolMean {
			e.Name, e.By, e.Group, e.Role = fit.Attraction, fit.Shared, "", fit.RoleValue
		} else if e.Name == fit.Slope && e.Role == fit.RolePoolSpread {
			e.Name, e.By, e.Value = fit.Offset, fit.ByMethod, 0.8
		}
	}
	if err := rk.Prepare(); err != nil {
		t.Fatal(err)
	}
	untuned := func(v fit.Variant, set ...fit.Setting) *fit.Model {
		m, err := fit.Untuned(v, set...)
		if err != nil {
			t.Fatal(err)
		}
		return m
	}
	add("vdwuntuned_", untuned(fit.Variant{Equation: "van-der-waals"}), -1e6, 3e6, "n-pentane", hard)
	add("vdwlow_", untuned(fit.Variant{Equation: "van-der-waals", Kinetics: nucleation.Chemical, Tension: fit.TensionFromParachor}, fit.Setting{Name: fit.Threshold, Value: 6}), 0, 3e6, "propane", "n-pentane", hard)
	add("vdwspin_", calibrated(t, fit.Variant{Equation: "van-der-waals", Limit: fit.Spinodal}, 0.2), -2e7, 3e6, organic...)
	add("prspin_", calibrated(t, fit.Variant{Equation: "peng-robinson", Limit: fit.Spinodal}, 0.98), -2e7, 4e6, organic...)
	add("corr_", calibrated(t, fit.Variant{Properties: nucleation.FromCorrelation, Kinetics: nucleation.Stepwise}, 1), -5e5, 2e6, organic...)
	add("para_", calibrated(t, fit.Variant{Equation: "peng-robinson", Tension: fit.TensionFromParachor, EmbryoPressure: nucleation.Poynting, Kinetics: nucleation.Chemical}, 0.99), -1e6, 2e6, organic...)
	add("step_", calibrated(t, fit.Variant{Tension: fit.CorrespondingStates, Kinetics: nucleation.Stepwise}, 1.02), -1e6, 2e6, organic...)
	return out
}

// records finds fluids in the library.
func records(t testing.TB, keys ...string) []*fluid.Record {
	t.Helper()
	lib, err := fluid.Builtin()
	if err != nil {
		t.Fatal(err)
	}
	var out []*fluid.Record
	for _, k := range keys {
		r, err := lib.Find(k)
		if err != nil {
			t.Fatal(err)
		}
		out = append(out, r)
	}
	return out
}

// calibrated is a model as a calibration would leave it, with round made-up numbers:
// pooled slopes that know n-pentane and propane, an offset of one method, a parameter at
// its bound, correlations, Student noise.
func calibrated(t testing.TB, v fit.Variant, slope float64) *fit.Model {
	t.Helper()
	e := func(name string, by fit.By, group string, role fit.Role, unit string, value, u float64) fit.Estimate {
		return fit.Estimate{Name: name, By: by, Group: group, Role: role, Unit: unit, Value: value, U: u, HasU: true, Lower: -30, Upper: 50, Start: 1}
	}
	m := &fit.Model{Variant: v, Calibrated: true, Degrees: 17, Noise: fit.Noise{Kind: fit.Student, Degrees: 5},
		References: map[string]string{"method": "bulb"},
		Validity:   fit.Validity{Fluids: []string{"n-pentane", "propane"}, Methods: []string{"bulb", "pulse"}, PressureLow: 1e5, PressureHigh: 2.6e6, TemperatureLow: 300, TemperatureHigh: 500}}
	if v.Limit != fit.Spinodal {
		m.Settings = append(m.Settings, fit.Setting{Name: fit.Tolman, Value: 0.05}, fit.Setting{Name: fit.Prefactor, Value: -0.5})
		m.Parameters = append(m.Parameters, e(fit.Threshold, fit.Shared, "", fit.RoleValue, "1", 10.5, 0.75),
			fit.Estimate{Name: fit.SurfaceTension, Role: fit.RoleValue, Unit: "1", Value: 0.9, AtBound: "lower", Reason: "at its lower bound", Lower: 0.9, Upper: 1.1, Start: 1})
	}
	m.Parameters = append(m.Parameters,
		e(fit.Slope, fit.ByFluid, "n-pentane", fit.RoleValue, "1", slope, 0.01),
		e(fit.Slope, fit.ByFluid, "propane", fit.RoleValue, "1", slope+0.01, 0.0125),
		e(fit.Slope, fit.ByFluid, "", fit.RolePoolMean, "1", slope-0.01, 0.015),
		e(fit.Covolume, fit.Shared, "", fit.RoleValue, "1", 1.01, 0.005),
		e(fit.Offset, fit.ByMethod, "pulse", fit.RoleValue, "K", 1.25, 0.5),
		e(fit.Slope, fit.ByFluid, "", fit.RolePoolSpread, "1", 0.02, 0.01),
		e(fit.Spread, fit.ByMethod, "bulb", fit.RoleValue, "K", 0.5, 0.125),
		e(fit.Spread, fit.ByMethod, "pulse", fit.RoleValue, "K", 0.75, 0.25))
	n := len(m.Parameters)
	m.Covariance = mat.NewSymDense(n, nil)
	for i := range n {
		for j := range i + 1 {
			r := math.Pow(-0.4, float64(i-j))
			m.Covariance.SetSym(i, j, r*m.Parameters[i].U*m.Parameters[j].U)
		}
	}
	if err := m.Prepare(); err != nil {
		t.Fatal(err)
	}
	return m
}

// options of the export of a case.
func (c *modelCase) options(t testing.TB) Options {
	return Options{Records: records(t, c.fluids...), From: c.from, To: c.to, Method: c.method, Prefix: c.prefix, Version: "0.0.0-test", Verdict: "no measurable gain",
		Inputs:   []Input{{"synthetic.csv", "0123456789abcdef0123456789abcdef0123456789abcdef0123456789abcdef"}},
		Cautions: []string{"Synthetic: made for tests."}}
}

// write exports a case.
func (c *modelCase) write(t testing.TB, form Form) string {
	t.Helper()
	var b bytes.Buffer
	if err := Write(&b, form, c.model, c.options(t)); err != nil {
		t.Fatalf("%s as %s: %v", c.prefix, form, err)
	}
	return b.String()
}

// pressures of a case: six inside its range, one outside on either side.
func (c *modelCase) pressures() []float64 {
	var out []float64
	for k := range 6 {
		out = append(out, c.from+(c.to-c.from)*(float64(k)+0.25)/6)
	}
	return append(out, c.from-1e5, c.to+1e5)
}
