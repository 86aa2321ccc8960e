package modelfile

import (
	"bytes"
	"errors"
	"flag"
	"os"
	"reflect"
	"strings"
	"testing"

	"limsup/data/fluid"
	"limsup/eos"
	"limsup/fit"
)

var update = flag.Bool("update", false, "write testdata/synthetic.json anew")

const goldenFile = "testdata/synthetic.json"

// The golden file is what the first version of the format looks like; a change of
// it is a change for everybody who has model files.
func TestGolden(t *testing.T) {
	m, records, meta := syntheticModel()
	f, err := New(m, records, meta)
	if err != nil {
		t.Fatal(err)
	}
	got := encode(t, f)
	if *update {
		if err := os.WriteFile(goldenFile, got, 0o644); err != nil {
			t.Fatal(err)
		}
	}
	want := golden(t)
	if !bytes.Equal(got, want) {
		t.Errorf("the model file is no longer %s:\n%s", goldenFile, got)
	}
	g, err := Decode(bytes.NewReader(want), "synthetic.json")
	if err != nil {
		t.Fatal(err)
	}
	if !equalFiles(f, g) {
		t.Errorf("read %+v\nwrote %+v", g, f)
	}
}

func golden(t testing.TB) []byte {
	t.Helper()
	b, err := os.ReadFile(goldenFile)
	if err != nil {
		t.Fatal(err)
	}
	return b
}

func TestPredictionsAreTheSameToTheBit(t *testing.T) {
	m, records, meta := syntheticModel()
	f, err := New(m, records, meta)
	if err != nil {
		t.Fatal(err)
	}
	g, err := Decode(bytes.NewReader(encode(t, f)), "synthetic.json")
	if err != nil {
		t.Fatal(err)
	}
	read, back, err := g.Model()
	if err != nil {
		t.Fatal(err)
	}
	if !equalModels(m, read) {
		t.Errorf("read %+v\nwrote %+v", read, m)
	}
	want, got := predictions(m, f.Fluids), predictions(read, back)
	if !reflect.DeepEqual(got, want) {
		t.Errorf("predicted %q\nbefore %q", got, want)
	}
	for _, s := range want {
		if strings.Contains(s, "no limit") {
			t.Errorf("a state of the test has no limit: %s", s)
		}
	}
}

// A model without calibration has a file too, and an equation can come from one.
func TestUntuned(t *testing.T) {
	own := &eos.Equation{Name: "mine", D1: 2, D2: 0.1, Alpha: eos.AlphaSoave, Slope: [3]float64{0.4, 1.5, -0.2}}
	power := &eos.Equation{Name: "bare", D1: 0, D2: 0, Alpha: eos.AlphaPower, Exponent: 0.25}
	for _, v := range []fit.Variant{{}, {Equation: "mine", Custom: own}, {Equation: "bare", Custom: power, Limit: fit.Spinodal}} {
		m, err := fit.Untuned(v, fit.Setting{Name: fit.Attraction, Value: 1.01})
		if err != nil {
			t.Fatal(err)
		}
		records := []*fluid.Record{syntheticRecord("fluid-a", 470)}
		f, err := New(m, records, Meta{Version: "0.0.0-synthetic"})
		if err != nil {
			t.Fatal(err)
		}
		g, err := Decode(bytes.NewReader(encode(t, f)), "x.json")
		if err != nil {
			t.Fatal(err)
		}
		if !equalFiles(f, g) {
			t.Errorf("read %+v\nwrote %+v", g, f)
		}
		read, back, err := g.Model()
		if err != nil {
			t.Fatal(err)
		}
		if want, got := predictions(m, records), predictions(read, back); !reflect.DeepEqual(got, want) {
			t.Errorf("predicted %q\nbefore %q", got, want)
		}
	}
}

func TestSmallestFile(t *testing.T) {
	f, err := Decode(strings.NewReader(`{"format": "limsup-model", "version": 1, "equation": {"name": "peng-robinson"}}`), "x.json")
	if err != nil {
		t.Fatal(err)
	}
	m, records, err := f.Model()
	if err != nil || len(records) != 0 || m.Calibrated {
		t.Fatal(m, records, err)
	}
	want := fit.DefaultVariant()
	want.Equation = "peng-robinson"
	if !reflect.DeepEqual(m.Variant, want) {
		t.Errorf("variant %+v, want %+v", m.Variant, want)
	}
	if _, err := m.Predict(fit.Query{Record: syntheticRecord("fluid-a", 470), Pressure: 101325}); err != nil {
		t.Error(err)
	}
}

// A calibration in which nothing was free still is one.
func TestNoParameters(t *testing.T) {
	m, records, meta := syntheticModel()
	m.Parameters, m.References = nil, nil
	m.Covariance = nil
	f, err := New(m, records, meta)
	if err != nil {
		t.Fatal(err)
	}
	g, err := Decode(bytes.NewReader(encode(t, f)), "x.json")
	if err != nil || !equalFiles(f, g) {
		t.Fatalf("read %+v, %v\nwrote %+v", g, err, f)
	}
	read, _, err := g.Model()
	if err != nil || !read.Calibrated {
		t.Fatal(read, err)
	}
	p, err := read.Predict(fit.Query{Record: records[0], Pressure: 101325})
	if err != nil || !p.HasU {
		t.Errorf("%+v, %v", p, err)
	}
}

func TestNewRefuses(t *testing.T) {
	nan := []float64{0}
	nan[0] /= nan[0]
	for _, tt := range []struct {
		name, pointer string
		change        func(m *fit.Model, meta *Meta, records *[]*fluid.Record)
	}{
		{"NaN", "/parameters/1/value", func(m *fit.Model, _ *Meta, _ *[]*fluid.Record) { m.Parameters[1].Value = nan[0] }},
		{"NaN statistics", "", func(_ *fit.Model, meta *Meta, _ *[]*fluid.Record) { meta.Statistics.RMSE = nan[0] }},
		{"record missing", "/validity/fluids/0", func(_ *fit.Model, _ *Meta, r *[]*fluid.Record) { *r = (*r)[:1] }},
		{"record nil", "/fluids/0", func(_ *fit.Model, _ *Meta, r *[]*fluid.Record) { *r = append(*r, nil) }},
		{"no hash", "/inputs/0/sha256", func(_ *fit.Model, meta *Meta, _ *[]*fluid.Record) { meta.Inputs[0].SHA256 = "" }},
		{"not UTF-8", "", func(_ *fit.Model, meta *Meta, _ *[]*fluid.Record) { meta.Version = "\xff" }},
		{"own equation with a known name", "/equation/name", func(m *fit.Model, _ *Meta, _ *[]*fluid.Record) {
			m.Variant.Custom = &eos.Equation{Name: "soave", D1: 1, Alpha: eos.AlphaPower}
		}},
	} {
		t.Run(tt.name, func(t *testing.T) {
			m, records, meta := syntheticModel()
			tt.change(m, &meta, &records)
			_, err := New(m, records, meta)
			var invalid *InvalidError
			if !errors.As(err, &invalid) || invalid.Pointer != tt.pointer {
				t.Errorf("got %v, want an error at %q", err, tt.pointer)
			}
		})
	}
}

func TestEncodeRefusesWhatDecodeWould(t *testing.T) {
	f := &File{Format: Format, Version: Version, Equation: Equation{Name: "nobody"}}
	var b bytes.Buffer
	var invalid *InvalidError
	if err := f.Encode(&b); !errors.As(err, &invalid) || invalid.Pointer != "/equation/name" || b.Len() > 0 {
		t.Errorf("%v, wrote %q", err, b.String())
	}
	if _, _, err := f.Model(); !errors.As(err, &invalid) {
		t.Errorf("a model of it: %v", err)
	}
}

// Files put together in memory, with what the schema would have refused.
func TestModelOfAnyFile(t *testing.T) {
	for _, f := range []*File{
		{},
		{Format: Format, Version: Version, Equation: Equation{Name: "soave"}, Parameters: []Parameter{{}}},
		{Format: Format, Version: Version, Equation: Equation{Name: "soave"}, Parameters: []Parameter{}, Covariance: &Covariance{LowerTriangle: [][]float64{nil}}},
		{Format: Format, Version: Version, Equation: Equation{Name: "mine", Definition: &Definition{}}},
		{Format: Format, Version: Version, Equation: Equation{Name: "soave"}, Fluids: []*fluid.Record{nil}},
		{Format: Format, Version: Version, Equation: Equation{Name: "soave"}, Fluids: []*fluid.Record{{}}},
	} {
		var invalid *InvalidError
		if _, _, err := f.Model(); !errors.As(err, &invalid) {
			t.Errorf("%+v: %v", f, err)
		}
	}
}
