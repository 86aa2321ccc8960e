package fit_test

import (
	"errors"
	"math"
	"testing"

	"limsup/fit"
)

// TestAnchors: an anchor holds the equation to the fluid's correlation, the tighter
// the more, and a prior pulls towards its mean; both leave side effects smaller than
// tuning without them.
func TestAnchors(t *testing.T) {
	lib := library(t)
	// Limits of an equation with a wrong slope: tuning wants to spoil vapour pressures.
	set := states(t, untuned(fit.Setting{Name: fit.Slope, Value: 0.85}), []string{"n-pentane", "n-hexane"}, []float64{101325, 9e5}, []float64{0}, 0.2)
	deviation := func(p fit.Plan) (slope, worst float64) {
		c := calibrate(t, set, lib, p, fit.Options{})
		effects, err := c.Model().SideEffects(c.Queries())
		if err != nil {
			t.Fatal(err)
		}
		for _, e := range effects {
			worst = math.Max(worst, math.Abs(e.After.VapourPressureMax))
		}
		return estimate(t, c, "slope").Value, worst
	}
	p := plan(t, "threshold", "slope")
	free, spoilt := deviation(p)
	last := spoilt
	for _, u := range []float64{0.1, 0.01, 0.001} {
		p.Anchors = []fit.Anchor{{Property: "vapour-pressure", Relative: u}}
		_, worst := deviation(p)
		if worst > last*1.001 {
			t.Errorf("anchor of %g: largest deviation %.3g, looser %.3g", u, worst, last)
		}
		last = worst
	}
	if last > 0.25*spoilt {
		t.Errorf("largest deviation of vapour pressure %.3g with the tightest anchor, %.3g without", last, spoilt)
	}
	p.Anchors = nil
	p.Priors = []fit.Prior{{Name: fit.Slope, Mean: 1, Spread: 1e-4}}
	if s, _ := deviation(p); math.Abs(s-1) > 0.01 || math.Abs(free-1) < 0.05 {
		t.Errorf("slope %.4f with a prior at 1, %.4f without", s, free)
	}
	// A prior is a measurement: without any other information its spread comes back.
	p = plan(t, "threshold", "surface-tension", "tolman")
	p.Priors = []fit.Prior{{Name: fit.Tolman, Mean: 0.02, Spread: 0.01}}
	c := calibrate(t, set, lib, p, fit.Options{})
	if e := estimate(t, c, "tolman"); math.Abs(e.U-0.01) > 0.002 || math.Abs(e.Value-0.02) > 0.01 {
		t.Errorf("tolman %g ± %g, prior 0.02 ± 0.01", e.Value, e.U)
	}
	var bad *fit.UnavailableError
	d, err := fit.Prepare(states(t, untuned(), []string{"methanol"}, []float64{101325, 3e5}, []float64{0}, 0.2), lib, plan(t, "threshold"))
	if err != nil {
		t.Fatal(err)
	}
	p = plan(t, "threshold")
	p.Anchors = []fit.Anchor{{Property: "liquid-density", Relative: 0.01}}
	if d.Observations[0].Record.LiquidDensity == nil {
		if _, err := fit.Calibrate(d, p, fit.Options{}); !errors.As(err, &bad) {
			t.Errorf("an anchor without a correlation: %v", err)
		}
	}
}
