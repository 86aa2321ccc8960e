package fit_test

import (
	"math"
	"math/rand/v2"
	"testing"

	"limsup/fit"
)

// TestSurvivalSameBytes: the densities of survival rows are computed side by side, and
// the result is the same, bit by bit, for any number of goroutines.
func TestSurvivalSameBytes(t *testing.T) {
	lib := library(t)
	truth := untuned(fit.Setting{Name: fit.Prefactor, Value: -1.5})
	set := droplets(t, truth, rand.New(rand.NewPCG(8, 1)), 100, 0.1, 1e5) // 400 rows: three chunks
	p := plan(t, "prefactor")
	p.Noise.Kind = fit.Survival
	want := calibrate(t, set, lib, p, fit.Options{Workers: 1})
	for _, w := range []int{2, 3} {
		got := calibrate(t, set, lib, p, fit.Options{Workers: w})
		for i := range want.Parameters {
			if got.Parameters[i].Value != want.Parameters[i].Value || got.Parameters[i].U != want.Parameters[i].U {
				t.Errorf("%d workers: %s = %x ± %x, with one %x ± %x", w, want.Parameters[i].Label(), got.Parameters[i].Value, got.Parameters[i].U, want.Parameters[i].Value, want.Parameters[i].U)
			}
		}
	}
}

// TestOnlySpread: with no location free, the spread of the residuals about the untuned
// limit is their root mean square, also where rows are added in blocks.
func TestOnlySpread(t *testing.T) {
	lib := library(t)
	set := droplets(t, untuned(), rand.New(rand.NewPCG(8, 2)), 100, 0.1, 1e5) // 400 rows: three blocks
	for i := range set.Rows {
		set.Rows[i].UTemperature, set.Rows[i].HasUTemperature = 0, false
	}
	p := plan(t)
	p.Fixed = []fit.Setting{{Name: fit.Prefactor, Value: 0}} // every row has its own flux
	c := calibrate(t, set, lib, p, fit.Options{})
	if c.Locations != 0 || len(c.Parameters) != 1 {
		t.Fatalf("%d locations, %d parameters; want the spread alone", c.Locations, len(c.Parameters))
	}
	// At its maximum the likelihood of n normal residuals has s² = Σr²/n and u = s/√(2n);
	// the search ends within 1e-7 u, the curvature is one of differences.
	s, u := c.RMSE, c.RMSE/math.Sqrt(2*float64(len(c.Rows)))
	if e := &c.Parameters[0]; math.Abs(e.Value-s) > 1e-6*u || math.Abs(e.U-u) > 1e-4*u {
		t.Errorf("spread %.10g ± %.6g, want %.10g ± %.6g", e.Value, e.U, s, u)
	}
}
