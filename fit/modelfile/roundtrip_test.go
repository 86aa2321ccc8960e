package modelfile

import (
	"bytes"
	"fmt"
	"math"
	"reflect"
	"testing"

	"gonum.org/v1/gonum/mat"
	"pgregory.net/rapid"

	"limsup/data/fluid"
	"limsup/eos"
	"limsup/eos/nucleation"
	"limsup/fit"
)

// drawVariant draws words that go together, and sometimes an equation of its own.
func drawVariant(t *rapid.T) fit.Variant {
	v := fit.Variant{
		Equation:       rapid.SampledFrom(eos.EquationNames()).Draw(t, "equation"),
		Limit:          rapid.SampledFrom([]fit.Limit{fit.Kinetic, fit.Kinetic, fit.Spinodal}).Draw(t, "limit"),
		Tension:        rapid.SampledFrom([]fit.Tension{fit.TensionCorrelation, fit.CorrespondingStates, fit.TensionFromParachor}).Draw(t, "tension"),
		EmbryoPressure: rapid.SampledFrom([]nucleation.EmbryoPressure{nucleation.Exact, nucleation.Poynting}).Draw(t, "embryo pressure"),
		Kinetics:       rapid.SampledFrom([]nucleation.Kinetics{nucleation.Mechanical, nucleation.Chemical}).Draw(t, "kinetics"),
	}
	if rapid.Bool().Draw(t, "own") {
		e := eos.Equation{Name: "own", D1: rapid.Float64Range(0, 3).Draw(t, "D1"), D2: rapid.Float64Range(-0.5, 1).Draw(t, "D2")}
		if rapid.Bool().Draw(t, "soave") {
			e.Alpha, e.Slope = eos.AlphaSoave, [3]float64{rapid.Float64Range(0.3, 0.6).Draw(t, "m0"), 1.5, -0.2}
		} else {
			e.Alpha, e.Exponent = eos.AlphaPower, rapid.Float64Range(0.1, 1).Draw(t, "n")
		}
		v.Equation, v.Custom = "own", &e
	}
	return v
}

// drawModel draws a model as a calibration might have left it.
func drawModel(t *rapid.T) (*fit.Model, []*fluid.Record) {
	m := &fit.Model{Variant: drawVariant(t)}
	var records []*fluid.Record
	for i := range rapid.IntRange(1, 3).Draw(t, "fluids") {
		r := syntheticRecord(fmt.Sprintf("fluid %d é<&>", i), rapid.Float64Range(300, 700).Draw(t, "Tc"))
		records = append(records, r)
		m.Validity.Fluids = append(m.Validity.Fluids, r.Key)
	}
	m.Calibrated = rapid.Bool().Draw(t, "calibrated")
	if !m.Calibrated {
		m.Validity = fit.Validity{}
		m.Settings = []fit.Setting{{Name: fit.Covolume, Value: rapid.Float64Range(0.9, 1.1).Draw(t, "covolume")}}
		return m, records
	}
	m.Validity.Methods = []string{"(none)", "bulb\n", "pulse"}
	p := rapid.Float64Range(-1e6, 1e6)
	m.Validity.PressureLow = p.Draw(t, "P")
	m.Validity.PressureHigh = m.Validity.PressureLow + rapid.Float64Range(0, 1e6).Draw(t, "dP")
	m.Validity.TemperatureLow, m.Validity.TemperatureHigh = 300, rapid.Float64Range(300, 600).Draw(t, "T")
	m.References = map[string]string{}
	m.Degrees = rapid.IntRange(1, 1000).Draw(t, "degrees")
	m.Noise = rapid.SampledFrom([]fit.Noise{{Kind: fit.Gaussian}, {Kind: fit.Student, Degrees: 5.5}, {Kind: fit.Survival}}).Draw(t, "noise")
	names := []string{fit.Attraction, fit.Slope, fit.Offset, fit.Spread}
	if m.Variant.Limit != fit.Spinodal {
		names = append(names, fit.Threshold, fit.SurfaceTension, fit.Tolman)
	}
	for _, name := range names {
		if rapid.Bool().Draw(t, name) {
			drawParameter(t, m, name)
		} else if name != fit.Slope && name != fit.Offset { // 1 is out of place for the exponent of van der Waals
			m.Settings = append(m.Settings, fit.Setting{Name: name, Value: start(name)})
		}
	}
	drawCovariance(t, m)
	return m, records
}

func start(name string) float64 {
	for _, p := range fit.ParameterTable() {
		if p.Name == name {
			return p.Start
		}
	}
	return math.NaN()
}

func drawParameter(t *rapid.T, m *fit.Model, name string) {
	var table fit.Parameter
	for _, p := range fit.ParameterTable() {
		if p.Name == name {
			table = p
		}
	}
	add := func(by fit.By, group string, role fit.Role) {
		value := table.Start + rapid.Float64Range(-0.05, 0.05).Draw(t, "value")
		if role == fit.RolePoolSpread {
			value = math.Abs(value)
		}
		m.Parameters = append(m.Parameters, fit.Estimate{Name: name, By: by, Group: group, Role: role, Unit: table.Unit,
			Value: value, Lower: table.Lower, Upper: table.Upper, Start: table.Start})
	}
	by := rapid.SampledFrom([]fit.By{fit.Shared, fit.ByFluid, fit.ByMethod, fit.ByBatch}).Draw(t, "by")
	groups := map[fit.By][]string{fit.Shared: {""}, fit.ByFluid: m.Validity.Fluids, fit.ByMethod: m.Validity.Methods, fit.ByBatch: {"b1", "b2"}}[by]
	if name == fit.Offset && len(groups) < 2 { // an offset by group needs two
		by, groups = fit.Shared, []string{""}
	}
	if name == fit.Offset && by != fit.Shared {
		m.References[string(by)] = groups[0]
		groups = groups[1:]
	}
	for _, g := range groups {
		add(by, g, fit.RoleValue)
	}
	if by != fit.Shared && name != fit.Spread && rapid.Bool().Draw(t, "pooled") {
		add(by, "", fit.RolePoolMean)
		add(by, "", fit.RolePoolSpread)
	}
}

// drawCovariance gives some parameters an uncertainty, with the covariance AAᵀ.
func drawCovariance(t *rapid.T, m *fit.Model) {
	n := len(m.Parameters)
	m.Covariance = mat.NewSymDense(max(n, 1), nil)
	var with []int
	for i := range m.Parameters {
		if e := &m.Parameters[i]; rapid.IntRange(0, 3).Draw(t, "has") > 0 {
			with = append(with, i)
		} else {
			e.Reason = "the draw gave it none"
		}
	}
	rank := rapid.IntRange(1, 4).Draw(t, "rank") // often less than the number of parameters: semidefinite only
	a := mat.NewDense(max(n, 1), rank, nil)
	for _, i := range with {
		for k := range rank {
			// whole steps: subnormal products would have lost the digits of a correlation
			a.Set(i, k, 1e-3*float64(rapid.IntRange(-2000, 2000).Draw(t, "a")))
		}
	}
	for x, i := range with {
		for _, j := range with[x:] {
			c := 0.0
			for k := range rank {
				c += a.At(i, k) * a.At(j, k)
			}
			m.Covariance.SetSym(i, j, c)
		}
		m.Parameters[i].U, m.Parameters[i].HasU = math.Sqrt(m.Covariance.At(i, i)), true
	}
}

func TestRoundTrip(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		m, records := drawModel(t)
		if err := m.Prepare(); err != nil {
			t.Fatal(err)
		}
		meta := Meta{Version: rapid.String().Draw(t, "version"), Seed: rapid.Uint64().Draw(t, "seed"), Verdict: "worse",
			Statistics:      Statistics{RowsUsed: 3, RMSE: rapid.Float64Range(0, 1e9).Draw(t, "rmse"), LogLikelihood: rapid.Float64().Draw(t, "lnL")},
			Identifiability: Identifiability{Condition: rapid.Float64Range(1, 1e12).Draw(t, "condition")}}
		f, err := New(m, records, meta)
		if err != nil {
			t.Fatal(err)
		}
		b := encode(t, f)
		g, err := Decode(bytes.NewReader(b), "x")
		if err != nil {
			t.Fatal(err)
		}
		if !equalFiles(f, g) {
			t.Fatalf("read %+v\nwrote %+v", g, f)
		}
		if again := encode(t, g); !bytes.Equal(b, again) {
			t.Fatalf("bytes differ:\n%s\n%s", b, again)
		}
		read, back, err := g.Model()
		if err != nil {
			t.Fatal(err)
		}
		if !equalModels(m, read) {
			t.Fatalf("read %+v\nwrote %+v", read, m)
		}
		if want, got := predictions(m, records), predictions(read, back); !reflect.DeepEqual(got, want) {
			t.Fatalf("predicted %q\nbefore %q", got, want)
		}
	})
}
