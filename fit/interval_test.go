package fit_test

import (
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/stat/distuv"

	"limsup/fit"
)

// TestLevel: a reading at an end of the interval of Predict has a level of 95 %, whatever
// the noise, and the readings that a known truth draws have levels that are evenly spread
// between 0 and 1.
func TestLevel(t *testing.T) {
	lib := library(t)
	const many = 2000
	for _, tt := range []struct {
		noise fit.Noise
		// a drawn error in units of the uncertainty stated, 0.1 K, beside the law of boiling
		draw func(rng *rand.Rand) float64
	}{
		{fit.Noise{Kind: fit.Gaussian}, func(rng *rand.Rand) float64 { return rng.NormFloat64() }},
		{fit.Noise{Kind: fit.Student, Degrees: 3}, func(rng *rand.Rand) float64 { return distuv.StudentsT{Sigma: 1, Nu: 3, Src: rng}.Rand() }},
		{fit.Noise{Kind: fit.Survival}, func(rng *rand.Rand) float64 { return rng.NormFloat64() }},
	} {
		rng := rand.New(rand.NewPCG(9, 4))
		set := droplets(t, untuned(), rng, many/4, 0.1, 10)
		if err := fillStudy(lib, untuned(), set, func(_ fit.Prediction, s fit.Sensitivity) float64 {
			r := 0.1 * tt.draw(rng)
			if tt.noise.Kind == fit.Survival {
				r += math.Log(rng.ExpFloat64()/math.Ln2) / s.Steepness
			}
			return r
		}); err != nil {
			t.Fatal(err)
		}
		p := plan(t, "prefactor")
		p.Noise = tt.noise
		p.Fixed = []fit.Setting{{Name: fit.Spread, Value: 0}}
		c := calibrate(t, set, lib, p, fit.Options{})
		m := c.Model()
		o := &c.Data.Observations[0]
		q := o.Query()
		at, err := m.Predict(q)
		if err != nil {
			t.Fatal(err)
		}
		// The ends of a survival interval are bisected to 2⁻⁶⁰ of some 20/κ.
		for _, end := range []float64{at.Low, at.High} {
			if l := m.Level(&q, &at, end-at.Temperature, 0); math.Abs(l-0.95) > 1e-9 {
				t.Errorf("%s: level %.12g at %g K, an end of the interval", tt.noise.Kind, l, end-at.Temperature)
			}
		}
		// Shares of even levels scatter by √(p(1−p)/n), 1.1 % at a half; four times that.
		for _, nominal := range []float64{0.5, 0.8, 0.95} {
			inside := 0
			for i := range c.Data.Observations {
				o := &c.Data.Observations[i]
				q := o.Query()
				q.LimitOnly = true
				at, err := m.Predict(q)
				if err != nil {
					t.Fatal(err)
				}
				if m.Level(&q, &at, o.Temperature-at.Temperature, 0.01) <= nominal {
					inside++
				}
			}
			share := float64(inside) / many
			if math.Abs(share-nominal) > 4*math.Sqrt(nominal*(1-nominal)/many) {
				t.Errorf("%s: %.3f of the readings inside intervals of %.2f", tt.noise.Kind, share, nominal)
			}
		}
	}
}
