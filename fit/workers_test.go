package fit_test

import (
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
