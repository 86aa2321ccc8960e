package fit

import (
	"fmt"
	"testing"

	"gonum.org/v1/gonum/mat"

	"limsup/data/fluid"
	"limsup/data/measure"
)

// BenchmarkGradient evaluates −ln L with its gradient and curvature at ever new
// parameters: prefactor, surface tension and one slope per fluid, 112 rows.
func BenchmarkGradient(b *testing.B) {
	lib, err := fluid.Builtin()
	if err != nil {
		b.Fatal(err)
	}
	set, err := measure.ReadFile("../data/demo/droplets.csv", measure.Options{KnownFluid: func(name string) (string, error) {
		r, err := lib.Find(name)
		if err != nil {
			return "", err
		}
		return r.Key, nil
	}})
	if err != nil {
		b.Fatal(err)
	}
	for _, kind := range []NoiseKind{Gaussian, Student, Survival} {
		p := Plan{Noise: Noise{Kind: kind}, Terms: []Term{{Name: Prefactor}, {Name: SurfaceTension}, {Name: Slope, By: ByFluid}}}
		d, err := Prepare(set, lib, p)
		if err != nil {
			b.Fatal(err)
		}
		lik := likelihoodOf(b, p, d)
		theta, psi := starts(lik.lay.theta), starts(lik.lay.psi)
		theta[0] = -5
		if err := lik.evaluate(theta); err != nil {
			b.Fatal(err)
		}
		lik.hold()
		variance := lik.variances(psi, nil)
		grad, curv := make([]float64, len(theta)), mat.NewSymDense(len(theta), nil)
		b.Run(fmt.Sprintf("%s/%d rows", kind, len(d.Observations)), func(b *testing.B) {
			b.ReportAllocs()
			i := 0
			for b.Loop() {
				theta[0] = -5 + 1e-3*float64(i%10)
				i++
				if _, err := lik.terms(theta, psi, variance, grad, curv, observed); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
