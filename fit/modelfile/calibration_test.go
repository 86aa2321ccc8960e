package modelfile

import (
	"bytes"
	"fmt"
	"math"
	"reflect"
	"testing"

	"limsup/data/fluid"
	"limsup/data/measure"
	"limsup/fit"
)

// readBack writes a model, reads it, and compares the two and their predictions.
func readBack(t *testing.T, m *fit.Model, records []*fluid.Record, meta Meta) {
	t.Helper()
	f, err := New(m, records, meta)
	if err != nil {
		t.Fatal(err)
	}
	g, err := Decode(bytes.NewReader(encode(t, f)), "x")
	if err != nil {
		t.Fatal(err)
	}
	read, back, err := g.Model()
	if err != nil {
		t.Fatal(err)
	}
	if !equalFiles(f, g) || !equalModels(m, read) {
		t.Errorf("read %+v\nwrote %+v", read, m)
	}
	if want, got := predictions(m, f.Fluids), predictions(read, back); !reflect.DeepEqual(got, want) {
		t.Errorf("predicted %q\nbefore %q", got, want)
	}
}

// Every record of the library goes through a file and predicts the same, also where
// saturation comes from its correlations.
func TestLibraryRecords(t *testing.T) {
	lib, err := fluid.Builtin()
	if err != nil {
		t.Fatal(err)
	}
	for _, v := range []fit.Variant{{Equation: "soave"}, {Properties: "correlation"}, {Tension: fit.CorrespondingStates}} {
		m, err := fit.Untuned(v)
		if err != nil {
			t.Fatal(err)
		}
		readBack(t, m, lib.All(), Meta{})
	}
}

// measured are made-up readings about the limits of the untuned model: off by a
// fixed pattern of about a kelvin, by 2 K more for one of the methods.
func measured(t *testing.T, lib *fluid.Library) *measure.Set {
	t.Helper()
	untuned, err := fit.Untuned(fit.DefaultVariant())
	if err != nil {
		t.Fatal(err)
	}
	set := &measure.Set{}
	for i := range 24 {
		key := []string{"n-pentane", "n-hexane", "n-heptane"}[i%3]
		rec, err := lib.Find(key)
		if err != nil {
			t.Fatal(err)
		}
		row := measure.Row{File: "made-up.csv", Line: i + 2, Fluid: key, Key: key, Pressure: 1e5 * float64(1+i/3), Method: []string{"bulb", "pulse"}[i%2], Batch: fmt.Sprint("b", i%4)}
		p, err := untuned.Predict(fit.Query{Record: rec, Pressure: row.Pressure})
		if err != nil {
			t.Fatal(err)
		}
		row.Temperature = p.Temperature + math.Sin(7*float64(i)) + 2*float64(i%2) - 0.5*float64(i%3)
		set.Rows = append(set.Rows, row)
	}
	return set
}

// What calibrations really leave goes through a file.
func TestCalibrations(t *testing.T) {
	lib, err := fluid.Builtin()
	if err != nil {
		t.Fatal(err)
	}
	set := measured(t, lib)
	for _, p := range []fit.Plan{
		{},
		{Terms: []fit.Term{{Name: fit.Threshold}, {Name: fit.Offset, By: fit.ByMethod}, {Name: fit.Spread, By: fit.ByMethod}}},
		{Terms: []fit.Term{{Name: fit.Slope, By: fit.ByFluid, Pooled: true}}},
		{Terms: []fit.Term{{Name: fit.SurfaceTension, By: fit.ByBatch}}, Noise: fit.Noise{Kind: fit.Student}},
		{Terms: []fit.Term{{Name: fit.Threshold}, {Name: fit.SurfaceTension}}, Fixed: []fit.Setting{{Name: fit.Tolman, Value: 0.05}}},
		{Terms: []fit.Term{{Name: fit.Threshold}}, Bounds: []fit.Bound{{Name: fit.Threshold, Lower: 0, Upper: 5}}, Starts: []fit.Setting{{Name: fit.Threshold, Value: 4}}},
		{Terms: []fit.Term{{Name: fit.Attraction}}, Variant: fit.Variant{Equation: "redlich-kwong", Limit: fit.Spinodal}},
	} {
		t.Run(fmt.Sprint(p.Terms), func(t *testing.T) {
			d, err := fit.Prepare(set, lib, p)
			if err != nil {
				t.Fatal(err)
			}
			c, err := fit.Calibrate(d, p, fit.Options{})
			if err != nil {
				t.Fatal(err)
			}
			var records []*fluid.Record
			for _, q := range c.Queries() {
				records = append(records, q.Record)
			}
			readBack(t, c.Model(), records, Meta{
				Statistics:      Statistics{RowsUsed: len(c.Rows), RowsExcluded: len(d.Excluded), RMSE: c.RMSE, Bias: c.Bias, Spread: c.Spread, LogLikelihood: c.LogLik},
				Identifiability: Identifiability{Condition: c.Identity.Condition, Warnings: c.Warnings},
			})
		})
	}
}
