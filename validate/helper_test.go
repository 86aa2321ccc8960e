package validate

import (
	"fmt"
	"math/rand/v2"
	"testing"

	"limsup/data/fluid"
	"limsup/data/measure"
	"limsup/fit"
)

func library(t testing.TB) *fluid.Library {
	t.Helper()
	lib, err := fluid.Builtin()
	if err != nil {
		t.Fatal(err)
	}
	return lib
}

// published reads the published limits that come with the product.
func published(t testing.TB, lib *fluid.Library) *measure.Set {
	t.Helper()
	set, err := measure.ReadFile("../data/published/limits.csv", measure.Options{KnownFluid: func(name string) (string, error) {
		r, err := lib.Find(name)
		if err != nil {
			return "", err
		}
		return r.Key, nil
	}})
	if err != nil {
		t.Fatal(err)
	}
	return set
}

// sample describes simulated measurements.
type sample struct {
	variant   fit.Variant
	threshold float64
	fluids    []string
	pressures []float64 // Pa
	repeats   int       // rows per fluid and pressure
	noise     float64   // K
	stated    float64   // stated standard uncertainty, K; 0: none
	seed      uint64
}

var alkanes = []string{"propane", "n-butane", "n-pentane", "n-hexane", "isobutane", "neopentane"}

// simulate draws measurements about the limits of a model. Methods, batches and
// pressures alternate, so that every kind of fold divides the rows differently.
func simulate(t testing.TB, lib *fluid.Library, s sample) *measure.Set {
	t.Helper()
	m, err := fit.Untuned(s.variant, fit.Setting{Name: fit.Threshold, Value: s.threshold})
	if err != nil {
		t.Fatal(err)
	}
	rng := rand.New(rand.NewPCG(s.seed, 4))
	set := &measure.Set{}
	for _, key := range s.fluids {
		rec, err := lib.Find(key)
		if err != nil {
			t.Fatal(err)
		}
		for _, P := range s.pressures {
			p, err := m.Predict(fit.Query{Record: rec, Pressure: P})
			if err != nil {
				t.Fatal(err)
			}
			for range max(1, s.repeats) {
				n := len(set.Rows)
				set.Rows = append(set.Rows, measure.Row{File: "simulated.csv", Line: n + 2, Fluid: key, Key: key, Pressure: P,
					Temperature: p.Temperature + s.noise*rng.NormFloat64(), UTemperature: s.stated, HasUTemperature: s.stated > 0,
					Method: []string{"droplet", "wire"}[n%2], Batch: fmt.Sprintf("b%d", n/2%3)})
			}
		}
	}
	return set
}

func prepared(t testing.TB, set *measure.Set, lib *fluid.Library, p fit.Plan) *fit.Data {
	t.Helper()
	d, err := fit.Prepare(set, lib, p)
	if err != nil {
		t.Fatal(err)
	}
	return d
}

func calibrated(t testing.TB, d *fit.Data, p fit.Plan) *fit.Calibration {
	t.Helper()
	c, err := fit.Calibrate(d, p, fit.Options{})
	if err != nil {
		t.Fatal(err)
	}
	return c
}

func source(seed uint64) rand.Source { return rand.NewPCG(seed, 5) }
