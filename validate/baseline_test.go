package validate

import (
	"context"
	"errors"
	"math"
	"testing"

	"limsup/data/measure"
	"limsup/fit"
)

// Each rule for n-pentane (Tc = 469.7 K) at 1 atm, where it boils at
// 309.21 K (CRC Handbook, from memory; 0.1 K of it moves the rule by 0.001 K):
// 0.905 + 0.095·(309.21/469.7)⁸ = 0.90835; 0.89 + 0.11 P/Pc; and the
// spinodals at zero pressure, 27/32 and √(27/32) in closed form, 0.895 for Redlich-Kwong
// (common practice, three digits).
func TestBaselines(t *testing.T) {
	lib := library(t)
	rec, err := lib.Find("n-pentane")
	if err != nil {
		t.Fatal(err)
	}
	o := &fit.Observation{Row: measure.Row{Pressure: 101325}, Record: rec}
	want := map[string][2]float64{ // T/Tc, tolerance
		"corresponding-states rule":               {0.905 + 0.095*math.Pow(309.21/469.7, 8), 1e-5},
		"linear rule":                             {0.89 + 0.11*101325/rec.CriticalPressure.Value, 1e-14},
		"van-der-waals spinodal at zero pressure": {27.0 / 32, 1e-12},
		"berthelot spinodal at zero pressure":     {math.Sqrt(27.0 / 32), 1e-12},
		"redlich-kwong spinodal at zero pressure": {0.895, 5e-4},
	}
	for _, b := range baselines() {
		T, err := b.predict(o)
		w := want[b.name]
		if err != nil || !(math.Abs(T/rec.CriticalTemperature.Value-w[0]) < w[1]) {
			t.Errorf("%s: T/Tc = %.8f, %v; want %.8f", b.name, T/rec.CriticalTemperature.Value, err, w[0])
		}
	}
	if len(baselines()) != len(want) {
		t.Errorf("%d rules", len(baselines()))
	}
	// A liquid under tension has no saturation temperature: no statement, not a wrong one.
	o.Pressure = -1e6
	var silent *BaselineError
	if _, err := baselines()[0].predict(o); !errors.As(err, &silent) {
		t.Errorf("under tension: %v", err)
	}
}

// A rule that is silent on a row is set aside, and shrinks nothing.
func TestSilentBaselineIsSetAside(t *testing.T) {
	lib := library(t)
	set := simulate(t, lib, sample{threshold: 12, fluids: alkanes[:4], pressures: []float64{-2e6, 101325}, noise: 1, stated: 1, seed: 1})
	c, err := Compare(context.Background(), set, lib, CompareOptions{Candidates: parsed(t, "soave"), Keep: DefaultKeep, Seed: 1})
	if err != nil {
		t.Fatal(err)
	}
	if len(c.Aside) != 1 || c.Aside[0].Name != "corresponding-states rule" || len(c.Observations) != 8 || len(c.Entries) != 6 {
		t.Errorf("aside %+v, %d rows, %d entries", c.Aside, len(c.Observations), len(c.Entries))
	}
}

// Intact rows are predicted, but count in no error.
func TestCompareWithIntactRows(t *testing.T) {
	lib := library(t)
	set := simulate(t, lib, sample{threshold: 11, fluids: alkanes[:4], pressures: []float64{101325, 5e5}, noise: 1, stated: 0.5, seed: 1})
	set.Rows[3].Outcome = measure.Intact
	set.Rows[3].Temperature -= 40
	c, err := Compare(context.Background(), set, lib, CompareOptions{Candidates: parsed(t, "soave"), Keep: DefaultKeep, Seed: 1, Nested: true})
	if err != nil {
		t.Fatal(err)
	}
	for i := range c.Entries {
		if e := &c.Entries[i]; len(e.left.e) != 7 || e.CVRMSE > 35 {
			t.Errorf("%s: %d rows, %g K", e.Name, len(e.left.e), e.CVRMSE)
		}
	}
	if c.Nested.RMSE > 35 {
		t.Errorf("nested %g K", c.Nested.RMSE)
	}
}
