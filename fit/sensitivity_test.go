package fit_test

import (
	"math"
	"testing"

	"limsup/fit"
)

// The derivatives of a limit agree with central differences of predictions, also for
// a method with an offset; parameters without influence are not listed.
func TestSensitivityAgreesWithDifferences(t *testing.T) {
	lib := library(t)
	set := read(t, lib, "../data/demo/droplets.csv")
	c := calibrate(t, set, lib, fit.Plan{Terms: terms(t, "prefactor", "surface-tension", "slope/fluid", "offset/method")}, fit.Options{})
	m := c.Model()
	for i := range c.Data.Observations {
		if i%7 != 0 {
			continue
		}
		q := c.Data.Observations[i].Query()
		s, err := m.Sensitivity(q)
		if err != nil {
			t.Fatal(err)
		}
		if math.Abs(s.Temperature-c.Rows[i].Predicted) > 1e-9 { // as far as a limit is solved
			t.Errorf("row %d: limit %.15g, the calibration has %.15g", i, s.Temperature, c.Rows[i].Predicted)
		}
		seen := map[int]float64{}
		for _, e := range s.Effects {
			seen[e.At] = e.Derivative
		}
		for k := range m.Parameters {
			if m.Parameters[k].Name == fit.Spread {
				continue
			}
			at := func(step float64) float64 {
				other := *m
				other.Parameters = append([]fit.Estimate(nil), m.Parameters...)
				other.Parameters[k].Value += step
				x, err := other.Predict(q)
				if err != nil {
					t.Fatal(err)
				}
				return x.Temperature
			}
			const h = 1e-4
			d := (at(h) - at(-h)) / (2 * h)
			// Limits are solved to 1e-9 K, so that the difference is good to 1e-5; its third
			// derivative leaves less. Derivatives are of the order of 0.3 to 300.
			if math.Abs(d-seen[k]) > 1e-5+1e-5*math.Abs(d) {
				t.Errorf("row %d, %s: derivative %.8g, by differences %.8g", i, m.Parameters[k].Label(), seen[k], d)
			}
		}
	}
}

// The information of a reading is the variance of the slope of its log-density.
func TestReadingInformation(t *testing.T) {
	survival := fit.Noise{Kind: fit.Survival}
	s := &fit.Sensitivity{Steepness: 2, OwnFlux: true}
	// Without an error of reading the law is that of smallest values with scale 1/κ, whose
	// information about its location is κ² exactly (N. L. Johnson and S. Kotz, Continuous
	// Univariate Distributions, chapter on extreme values; from memory, and E[(1−E)²] = 1
	// for a unit exponential variable E).
	if limit, _ := survival.ReadingInformation(s, 1e-14); math.Abs(limit-4) > 1e-5 {
		t.Errorf("sharp reading: %.8g, want κ² = 4", limit)
	}
	// A blur far wider than the law of boiling leaves 1/(v + π²/6κ²), the information of a
	// normal law, up to terms of the order of its squared skewness, ρ⁻⁶.
	v := 100.0
	limit, variance := survival.ReadingInformation(s, v)
	if want := 1 / (v + math.Pi*math.Pi/6/4); math.Abs(limit/want-1) > 1e-5 {
		t.Errorf("wide blur: %.8g, want %.8g", limit, want)
	}
	if want := 0.5 / (v * v); math.Abs(variance/want-1) > 0.01 {
		t.Errorf("wide blur, variance: %.6g, want about %.6g", variance, want)
	}
	// Other noise, and samples without a time, are not touched.
	if a, b := survival.ReadingInformation(&fit.Sensitivity{Steepness: 2}, 4); a != 0.25 || b != 0.5/16 {
		t.Errorf("without its own flux: %g, %g", a, b)
	}
	if a, _ := (fit.Noise{Kind: fit.Student, Degrees: 4}).ReadingInformation(s, 1); math.Abs(a-5.0/7) > 1e-15 {
		t.Errorf("Student's: %g, want (ν+1)/(ν+3) = 5/7", a)
	}
}
