package fit_test

import (
	"math"
	"runtime"
	"testing"

	"github.com/google/go-cmp/cmp"

	"limsup/fit"
)

// TestBootstrapDemo: the standard deviations of a parametric bootstrap agree with the
// covariance within what 60 replicates allow (relative error of a standard deviation
// 1/√(2·59) = 9 %; three of them, and the curvature of the problem), replicates do not
// depend on processors, and parts drawn apart are those of the whole.
func TestBootstrapDemo(t *testing.T) {
	lib := library(t)
	set := read(t, lib, "../data/demo/droplets.csv")
	p := fit.Plan{Terms: terms(t, "prefactor", "offset/method")}
	c := calibrate(t, set, lib, p, fit.Options{})
	q := c.Queries()[:1]
	o := fit.BootstrapOptions{Resample: fit.Parametric, Count: 60, Seed: 3, Queries: q}
	draw := func(o fit.BootstrapOptions, processors int) []fit.Replicate {
		defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(processors))
		r, err := c.Resample(o)
		if err != nil {
			t.Fatal(err)
		}
		return r
	}
	all := draw(o, 4)
	late := o
	late.First, late.Count = 50, 10
	for k, r := range draw(late, 1) {
		if !cmp.Equal(r, all[50+k]) {
			t.Errorf("replicate %d differs when drawn apart: %v, %v", 50+k, r, all[50+k])
		}
	}
	b, err := c.Summarise(all, q, 0.95)
	if err != nil {
		t.Fatal(err)
	}
	if b.Failed != 0 {
		t.Errorf("%d failed: %v", b.Failed, b.Failures)
	}
	for i, s := range b.Parameters {
		e := c.Parameters[i]
		if s.N != 60 || math.Abs(s.SD/e.U-1) > 0.3 {
			t.Errorf("%s: sd %g of %d replicates, standard uncertainty %g", s.Label, s.SD, s.N, e.U)
		}
		if !(s.Percentile[0] < e.Value && e.Value < s.Percentile[1] && s.Basic[0] < e.Value && e.Value < s.Basic[1]) {
			t.Errorf("%s: %g outside %v or %v", s.Label, e.Value, s.Percentile, s.Basic)
		}
	}
	x, err := c.Model().Predict(q[0])
	if err != nil {
		t.Fatal(err)
	}
	if l := b.Limits[0]; l.N != 60 || math.Abs(l.SD/x.ULimit-1) > 0.3 || math.Abs(l.Estimate-x.Temperature) > 1e-9 {
		t.Errorf("limit: sd %g of %d, standard uncertainty %g", l.SD, l.N, x.ULimit)
	}
	for _, kind := range []fit.Resampling{fit.ResampleRows, fit.ResampleFluid, fit.ResampleBatch} {
		o := fit.BootstrapOptions{Resample: kind, Count: 12, Seed: 3, Queries: q}
		b, err := c.Summarise(draw(o, 2), q, 0.9)
		if err != nil || b.Failed > 0 || !(b.Parameters[0].SD > 0) {
			t.Errorf("%s: %v %+v", kind, err, b)
		}
	}
}

// TestProfileDemo: for a nearly linear parameter the profile agrees with Student's
// interval; a spread has an interval too; an end that the data do not set says so.
func TestProfileDemo(t *testing.T) {
	lib := library(t)
	set := read(t, lib, "../data/demo/droplets.csv")
	c := calibrate(t, set, lib, fit.Plan{Terms: terms(t, "prefactor", "offset/method")}, fit.Options{})
	for _, label := range []string{"prefactor", "offset[pulse-heated wire]"} {
		r, err := c.Profile(label, 0.95)
		if err != nil {
			t.Fatal(err)
		}
		e := estimate(t, c, label)
		lo, hi, _ := e.Interval(0.95)
		if tol := 0.02 * (hi - lo); math.Abs(r.Lower-lo) > tol || math.Abs(r.Upper-hi) > tol {
			t.Errorf("%s: profile %s, interval %g to %g", label, r.String(), lo, hi)
		}
	}
	r, err := c.Profile("spread", 0.95)
	if err != nil {
		t.Fatal(err)
	}
	e := estimate(t, c, "spread")
	if !(r.Lower < e.Value-e.U && r.Upper > e.Value+e.U && r.Upper-e.Value < 4*e.U) {
		t.Errorf("spread %g ± %g: profile %s", e.Value, e.U, r.String())
	}
	wide := calibrate(t, set, lib, fit.Plan{Terms: terms(t, "prefactor", "surface-tension", "offset/method"),
		Bounds: []fit.Bound{{Name: fit.Prefactor, Lower: -8, Upper: 8}}}, fit.Options{})
	if r, err = wide.Profile("prefactor", 0.95); err != nil {
		t.Fatal(err)
	}
	t.Log(r.String())
}
