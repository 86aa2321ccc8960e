package modelfile

import (
	"bytes"
	"encoding/json"
	"maps"
	"math"
	"reflect"
	"slices"

	"gonum.org/v1/gonum/mat"

	"limsup/data/fluid"
	"limsup/eos/nucleation"
	"limsup/eos/tension"
	"limsup/fit"
)

// syntheticRecord is a fluid that does not exist: round numbers of the size that
// organic liquids have.
func syntheticRecord(key string, tc float64) *fluid.Record {
	value := func(si, given float64, unit string) fluid.Value {
		return fluid.Value{Value: si, Given: given, Unit: unit, Source: "synthetic"}
	}
	boiling := value(0.66*tc, 0.66*tc, "K")
	return &fluid.Record{
		BoilingTemperature: &boiling,
		Key:                key, Name: "Synthetic " + key,
		MolarMass:           value(0.08, 0.08, "kg/mol"),
		CriticalTemperature: value(tc, tc, "K"),
		CriticalPressure:    value(3.5e6, 3.5e6, "Pa"),
		AcentricFactor:      value(0.25, 0.25, "1"),
		SurfaceTension: &fluid.Tension{Form: "power-sum", CriticalTemperature: tc, Terms: []tension.Term{{Coefficient: 0.05, Exponent: 1.25}},
			Unit: "N/m", Lo: 0.4 * tc, Hi: tc, Source: "synthetic"},
	}
}

// syntheticModel is a calibration that never took place, with every kind of
// parameter: its numbers are made up.
func syntheticModel() (*fit.Model, []*fluid.Record, Meta) {
	v := fit.DefaultVariant()
	v.EmbryoPressure = nucleation.Poynting
	estimate := func(name string, by fit.By, group string, role fit.Role, unit string, value, u, lo, hi, start float64) fit.Estimate {
		return fit.Estimate{Name: name, By: by, Group: group, Role: role, Unit: unit, Value: value, U: u, HasU: true, Lower: lo, Upper: hi, Start: start}
	}
	m := &fit.Model{
		Variant:  v,
		Settings: []fit.Setting{{Name: fit.Tolman, Value: 0.1}, {Name: fit.Prefactor, Value: -0.5}},
		Parameters: []fit.Estimate{
			estimate(fit.Threshold, fit.Shared, "", fit.RoleValue, "1", 11.5, 0.5, 0, 35, 12),
			estimate(fit.Slope, fit.ByFluid, "fluid-a", fit.RoleValue, "1", 1.02, 0.01, -1, 3, 1),
			estimate(fit.Slope, fit.ByFluid, "fluid-b", fit.RoleValue, "1", 0.97, 0.02, -1, 3, 1),
			estimate(fit.Slope, fit.ByFluid, "", fit.RolePoolMean, "1", 0.995, 0.025, -1, 3, 1),
			{Name: fit.SurfaceTension, Role: fit.RoleValue, Unit: "1", Value: 1.5, Reason: "at its upper bound", AtBound: "upper", Lower: 0.5, Upper: 1.5, Start: 1},
			estimate(fit.Offset, fit.ByMethod, "pulse", fit.RoleValue, "K", 1.25, 0.75, -30, 30, 0),
			estimate(fit.Slope, fit.ByFluid, "", fit.RolePoolSpread, "1", 0.04, 0.02, 4e-6, 4, 0.2),
			estimate(fit.Spread, fit.Shared, "", fit.RoleValue, "K", 0.8, 0.2, 0, 50, 1),
		},
		Degrees:    21,
		Noise:      fit.Noise{Kind: fit.Student, Degrees: 4},
		References: map[string]string{"method": "bulb"},
		Validity: fit.Validity{Fluids: []string{"fluid-a", "fluid-b"}, Methods: []string{"bulb", "pulse"},
			PressureLow: 101325, PressureHigh: 1.5e6, TemperatureLow: 410.25, TemperatureHigh: 487.125},
		Calibrated: true,
	}
	n := len(m.Parameters)
	m.Covariance = mat.NewSymDense(n, nil)
	for i := range n {
		m.Covariance.SetSym(i, i, m.Parameters[i].U*m.Parameters[i].U)
	}
	m.Covariance.SetSym(0, 1, 0.5*0.01*0.75)
	m.Covariance.SetSym(0, 2, 0.5*0.02*0.5)
	m.Covariance.SetSym(6, 7, 0.02*0.2*-0.25)
	if err := m.Prepare(); err != nil {
		panic(err)
	}
	meta := Meta{Version: "0.0.0-synthetic", Seed: 1, Verdict: "no measurable gain",
		Inputs: []Input{{File: "folder/synthetic.csv", SHA256: "0123456789abcdef0123456789abcdef0123456789abcdef0123456789abcdef"}},
		Statistics: Statistics{RowsUsed: 26, RowsExcluded: 2, RMSE: 0.9, Bias: -0.05, Spread: 0.8, LogLikelihood: -31.5,
			CrossValidation: &CrossValidation{Folds: "fluid", RMSE: 1.5, UntunedRMSE: 1.75, Difference: -0.25, DifferenceSE: 0.5}},
		Identifiability: Identifiability{Condition: 12.5, Warnings: []string{"a made-up warning"}}}
	return m, []*fluid.Record{syntheticRecord("fluid-b", 540), syntheticRecord("fluid-a", 470)}, meta
}

func encode(t interface {
	Helper()
	Fatal(...any)
}, f *File) []byte {
	t.Helper()
	var b bytes.Buffer
	if err := f.Encode(&b); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

// equalFiles compares files; records hold prepared functions, so their text is
// compared.
func equalFiles(a, b *File) bool {
	x, y := *a, *b
	r, errR := json.Marshal(x.Fluids)
	s, errS := json.Marshal(y.Fluids)
	x.Fluids, y.Fluids = nil, nil
	return errR == nil && errS == nil && bytes.Equal(r, s) && reflect.DeepEqual(x, y)
}

// equalModels compares what models keep in their exported fields; gaussian noise may
// go without saying.
func equalModels(a, b *fit.Model) bool {
	kind := func(n fit.Noise) fit.Noise {
		if n.Kind == "" {
			n.Kind = fit.Gaussian
		}
		return n
	}
	same := reflect.DeepEqual(a.Variant, b.Variant) && slices.Equal(a.Parameters, b.Parameters) && slices.Equal(a.Settings, b.Settings) &&
		kind(a.Noise) == kind(b.Noise) && a.Calibrated == b.Calibrated && a.Degrees == b.Degrees && reflect.DeepEqual(a.Validity, b.Validity)
	same = same && maps.Equal(a.References, b.References) && (a.Covariance == nil) == (b.Covariance == nil)
	return same && (a.Covariance == nil || mat.Equal(a.Covariance, b.Covariance))
}

// predictions are limits at several states, written without loss.
func predictions(m *fit.Model, records []*fluid.Record) []string {
	var out []string
	for _, r := range records {
		for _, q := range []fit.Query{
			{Record: r, Pressure: 101325},
			{Record: r, Pressure: 1.2e6, Method: "pulse"},
			{Record: r, Pressure: 5e5, Method: "other", Batch: "b1"},
			{Record: r, Pressure: 2e5, OwnFlux: true, Target: nucleation.Stated(1e8)},
			{Record: r, Temperature: 0.88 * r.CriticalTemperature.Value, AtTemperature: true},
		} {
			p, err := m.Predict(q)
			if err != nil {
				out = append(out, err.Error())
				continue
			}
			for _, x := range []float64{p.Temperature, p.Pressure, p.U, p.UPressure, p.Low, p.High, p.Log10Flux, p.SpinodalT, p.SaturationT} {
				out = append(out, number(x), number(float64(math.Float64bits(x)>>32)), number(float64(math.Float64bits(x)&0xffffffff)))
			}
			out = append(out, p.Warnings...)
		}
	}
	return out
}
