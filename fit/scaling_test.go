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

// This file measures processor time, which a busy machine changes less than it
// changes the time on the wall.

// clock reports the processor time of each call of do.
func clock(b *testing.B, name string, do func() error) {
	b.Run(name, func(b *testing.B) {
		cpu := processorTime(b)
		for range b.N {
			if err := do(); err != nil {
				b.Fatal(err)
			}
		}
		b.ReportMetric((processorTime(b)-cpu)/float64(b.N)*1e3, "cpu-ms/op")
	})
}

// processorTime is the time in s that the process has had on all processors.
func processorTime(b *testing.B) float64 {
	b.Helper()
	var u syscall.Rusage
	if err := syscall.Getrusage(syscall.RUSAGE_SELF, &u); err != nil {
		b.Fatal(err)
	}
	return float64(u.Utime.Sec+u.Stime.Sec) + 1e-6*float64(u.Utime.Usec+u.Stime.Usec)
}

func prepare(b *testing.B, set *measure.Set, p fit.Plan) *fit.Data {
	b.Helper()
	d, err := fit.Prepare(set, library(b), p)
	if err != nil {
		b.Fatal(err)
	}
	return d
}

// rowsOf repeats the demonstration rows, each with a fresh error, up to n rows.
func rowsOf(b *testing.B, n int) *measure.Set {
	b.Helper()
	demo := read(b, library(b), "../data/demo/droplets.csv")
	rng := rand.New(rand.NewPCG(1, uint64(n)))
	set := &measure.Set{}
	for i := range n {
		r := demo.Rows[(i*9)%len(demo.Rows)] // 9 has no factor in common with 112
		r.Temperature += 0.3 * rng.NormFloat64()
		r.Line = i + 1
		set.Rows = append(set.Rows, r)
	}
	return set
}

// BenchmarkSideBySide is the calibration that is compared with a script of
// general-purpose tools: threshold and surface tension with a prior of 0.05, no
// spread, on the published limits without water; and its parametric bootstrap.
func BenchmarkSideBySide(b *testing.B) {
	p := fit.Plan{Fixed: []fit.Setting{{Name: fit.Spread, Value: 0}}, Priors: []fit.Prior{{Name: fit.SurfaceTension, Mean: 1, Spread: 0.05}},
		Terms: []fit.Term{{Name: fit.Threshold}, {Name: fit.SurfaceTension}}}
	d := prepare(b, read(b, library(b), "../data/published/limits.csv"), p)
	d = d.Subset(func(i int) bool { return d.Observations[i].Record.Key != "water" })
	c, err := fit.Calibrate(d, p, fit.Options{})
	if err != nil {
		b.Fatal(err)
	}
	clock(b, "fit", func() error { _, err := fit.Calibrate(d, p, fit.Options{}); return err })
	clock(b, "bootstrap=200", func() error {
		_, err := c.Resample(fit.BootstrapOptions{Resample: fit.Parametric, Count: 200, Seed: 1})
		return err
	})
}

// BenchmarkScaling follows the processor time over three decades of rows,
// parameters and replicates of a bootstrap.
func BenchmarkScaling(b *testing.B) {
	p := fit.Plan{Terms: []fit.Term{{Name: fit.Prefactor}}}
	for _, n := range []int{30, 300, 3000, 30000} {
		d := prepare(b, rowsOf(b, n), p)
		clock(b, fmt.Sprintf("rows=%d", n), func() error { _, err := fit.Calibrate(d, p, fit.Options{}); return err })
	}
	for _, k := range []int{1, 10, 100, 1000} {
		set := rowsOf(b, 3000)
		for i := range set.Rows {
			set.Rows[i].Batch = fmt.Sprint(i % k)
		}
		p := fit.Plan{Terms: []fit.Term{{Name: fit.SurfaceTension, By: fit.ByBatch}}}
		d := prepare(b, set, p)
		clock(b, fmt.Sprintf("parameters=%d", k), func() error { _, err := fit.Calibrate(d, p, fit.Options{}); return err })
	}
	demo := prepare(b, read(b, library(b), "../data/demo/droplets.csv"), p)
	c, err := fit.Calibrate(demo, p, fit.Options{})
	if err != nil {
		b.Fatal(err)
	}
	for _, n := range []int{1, 10, 100, 1000} {
		clock(b, fmt.Sprintf("replicates=%d", n), func() error {
			_, err := c.Resample(fit.BootstrapOptions{Resample: fit.Parametric, Count: n, Seed: 1})
			return err
		})
	}
}
