package fit_test

import (
	"fmt"
	"math/rand/v2"
	"testing"

	"limsup/data/measure"
	"limsup/fit"
)

// BenchmarkCalibrate tunes six parameters to rows of three fluids at random pressures
// and fluxes, for each noise.
func BenchmarkCalibrate(b *testing.B) {
	lib := library(b)
	for _, n := range []int{32, 1000, 10000} {
		for _, kind := range []fit.NoiseKind{fit.Gaussian, fit.Student, fit.Survival} {
			rng := rand.New(rand.NewPCG(1, 2))
			set := &measure.Set{}
			for i := range n {
				key := []string{"n-pentane", "benzene", "r-134a"}[i%3]
				set.Rows = append(set.Rows, measure.Row{File: "bench", Line: i + 1, Fluid: key, Key: key, Pressure: 1e5 + 9e5*rng.Float64(), Temperature: 1,
					Volume: 1e-10, HeatingRate: []float64{0.1, 1e4}[i/3%2], UTemperature: 0.2, HasUTemperature: true, Method: []string{"a", "b"}[i/6%2]})
			}
			if err := fillStudy(lib, untuned(), set, func(fit.Prediction, fit.Sensitivity) float64 { return 0.4 * rng.NormFloat64() }); err != nil {
				b.Fatal(err)
			}
			p := fit.Plan{Noise: fit.Noise{Kind: kind}}
			for _, name := range []string{"prefactor", "surface-tension", "slope/fluid", "offset/method"} {
				term, err := fit.ParseTerm(name)
				if err != nil {
					b.Fatal(err)
				}
				p.Terms = append(p.Terms, term)
			}
			d, err := fit.Prepare(set, lib, p)
			if err != nil {
				b.Fatal(err)
			}
			b.Run(fmt.Sprintf("%s/%d", kind, n), func(b *testing.B) {
				b.ReportAllocs()
				for b.Loop() {
					if _, err := fit.Calibrate(d, p, fit.Options{}); err != nil {
						b.Fatal(err)
					}
				}
			})
		}
	}
}
