//go:build unix

package fit_test

import (
	"fmt"
	"math/rand/v2"
	"syscall"
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
				cpu := processorTime(b)
				for range b.N {
					if _, err := fit.Calibrate(d, p, fit.Options{}); err != nil {
						b.Fatal(err)
					}
				}
				b.ReportMetric((processorTime(b)-cpu)/float64(b.N)*1e3, "cpu-ms/op")
			})
		}
	}
}

// BenchmarkSideBySide is the calibration that the design compares with a script of
// general-purpose tools: threshold and surface tension with a prior of 0.05, no
// spread, on the published limits of organic liquids.
func BenchmarkSideBySide(b *testing.B) {
	lib := library(b)
	set := read(b, lib, "../data/published/limits.csv")
	p := fit.Plan{Fixed: []fit.Setting{{Name: fit.Spread, Value: 0}}, Priors: []fit.Prior{{Name: fit.SurfaceTension, Mean: 1, Spread: 0.05}},
		Terms: []fit.Term{{Name: fit.Threshold}, {Name: fit.SurfaceTension}}}
	d, err := fit.Prepare(set, lib, p)
	if err != nil {
		b.Fatal(err)
	}
	d = d.Subset(func(i int) bool { return d.Observations[i].Record.Key != "water" })
	cpu := processorTime(b)
	for range b.N {
		if _, err := fit.Calibrate(d, p, fit.Options{}); err != nil {
			b.Fatal(err)
		}
	}
	b.ReportMetric((processorTime(b)-cpu)/float64(b.N)*1e3, "cpu-ms/op")
}

// processorTime is the time in s that the process has had on all processors, which
// a busy machine changes less than it changes the time on the wall.
func processorTime(b *testing.B) float64 {
	b.Helper()
	var u syscall.Rusage
	if err := syscall.Getrusage(syscall.RUSAGE_SELF, &u); err != nil {
		b.Fatal(err)
	}
	return float64(u.Utime.Sec+u.Stime.Sec) + 1e-6*float64(u.Utime.Usec+u.Stime.Usec)
}
