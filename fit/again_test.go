package fit_test

import (
	"testing"

	"limsup/fit"
)

// TestPlanAgain: the plan that a calibration went by, its default terms filled in,
// serves for another one.
func TestPlanAgain(t *testing.T) {
	lib := library(t)
	set := read(t, lib, "../data/demo/droplets.csv")
	c := calibrate(t, set, lib, fit.Plan{}, fit.Options{})
	again, err := fit.Calibrate(c.Data, c.Plan, fit.Options{})
	if err != nil {
		t.Fatal(err)
	}
	if a, b := c.Parameters[0], again.Parameters[0]; a.Label() != fit.Prefactor || a.Label() != b.Label() || a.Value != b.Value {
		t.Errorf("%s = %v, then %s = %v", a.Label(), a.Value, b.Label(), b.Value)
	}
}
