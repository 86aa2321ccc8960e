package fit_test

import (
	"fmt"
	"math/rand/v2"
	"testing"

	"limsup/data/measure"
	"limsup/fit"
)

// rowsOf repeats the demonstration rows, each with a fresh error, up to n rows.
func rowsOf(b *testing.B, n int) *measure.Set {
	b.Helper()
	lib := library(b)
	demo := read(b, lib, "../data/demo/droplets.csv")
	rng := rand.New(rand.NewPCG(1, uint64(n)))
	set := &measure.Set{}
	for i := range n {
		r := demo.Rows[(i*7)%len(demo.Rows)] // 7 has no factor in common with 112·k of the order of fluids
		r.Temperature += 0.3 * rng.NormFloat64()
		r.Line = i + 1
		set.Rows = append(set.Rows, r)
	}
	return set
}

// BenchmarkCalibrate tunes six parameters (four slopes, prefactor, spread) to n rows.
func BenchmarkCalibrate(b *testing.B) {
	lib := library(b)
	for _, n := range []int{32, 1000, 10000} {
		set := rowsOf(b, n)
		for _, names := range [][]string{{"prefactor"}, {"prefactor", "slope/fluid"}} {
			p := fit.Plan{}
			for _, s := range names {
				t, err := fit.ParseTerm(s)
				if err != nil {
					b.Fatal(err)
				}
				p.Terms = append(p.Terms, t)
			}
			d, err := fit.Prepare(set, lib, p)
			if err != nil {
				b.Fatal(err)
			}
			b.Run(fmt.Sprintf("rows=%d/%s", n, names[len(names)-1]), func(b *testing.B) {
				b.ReportAllocs()
				for range b.N {
					if _, err := fit.Calibrate(d, p, fit.Options{}); err != nil {
						b.Fatal(err)
					}
				}
			})
		}
	}
}
