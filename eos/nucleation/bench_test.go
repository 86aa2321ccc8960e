package nucleation

import (
	"testing"
	"time"
)

// The benchmarks cycle through ten neighbouring states, so that nothing is
// computed twice in a row.

func benchFluid(b *testing.B, c Config) *Fluid {
	return untuned(b, "soave", named(b, "n-pentane"), c)
}

func BenchmarkFlux(b *testing.B) {
	for _, v := range variants {
		b.Run(v.name, func(b *testing.B) {
			f := variantOf(b, "soave", named(b, "n-pentane"), v)
			b.ReportAllocs()
			i := 0
			for b.Loop() {
				if _, err := f.Flux(418+0.1*float64(i%10), atmosphere); err != nil {
					b.Fatal(err)
				}
				i++
			}
		})
	}
}

// fluxTime is the time of one evaluation in ns, the unit of cost of a limit.
func fluxTime(b *testing.B, f *Fluid) float64 {
	const n = 20000
	start := time.Now()
	for i := range n {
		if _, err := f.Flux(418+0.1*float64(i%10), atmosphere); err != nil {
			b.Fatal(err)
		}
	}
	return float64(time.Since(start).Nanoseconds()) / n
}

func benchLimit(b *testing.B, solve func(f *Fluid, i int) (Limit, error)) {
	f := benchFluid(b, Config{})
	unit := fluxTime(b, f)
	evaluations, i := 0, 0
	b.ReportAllocs()
	for b.Loop() {
		l, err := solve(f, i%10)
		if err != nil {
			b.Fatal(err)
		}
		evaluations += l.Evaluations
		i++
	}
	b.ReportMetric(float64(evaluations)/float64(i), "evaluations/op")
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(i)/unit, "fluxes/op")
}

// BenchmarkKineticLimitCold starts from no guess.
func BenchmarkKineticLimitCold(b *testing.B) {
	benchLimit(b, func(f *Fluid, i int) (Limit, error) {
		return f.KineticLimit(atmosphere+1e4*float64(i), Threshold(12), 0)
	})
}

// BenchmarkKineticLimitWarm starts from the limit of a neighbouring threshold, as a
// calibration does.
func BenchmarkKineticLimitWarm(b *testing.B) {
	benchLimit(b, func(f *Fluid, i int) (Limit, error) {
		return f.KineticLimit(atmosphere, Threshold(12+0.01*float64(i)), 419.87)
	})
}

func BenchmarkKineticLimitHeated(b *testing.B) {
	benchLimit(b, func(f *Fluid, i int) (Limit, error) {
		return f.KineticLimit(atmosphere, Heated(5e-10*(1+float64(i)), 1), 0)
	})
}

func BenchmarkKineticPressure(b *testing.B) {
	benchLimit(b, func(f *Fluid, i int) (Limit, error) {
		return f.KineticPressure(420+float64(i), Threshold(12), 0)
	})
}

// TestAllocations: nothing allocates on the way to a number.
func TestAllocations(t *testing.T) {
	for _, v := range variants {
		f := variantOf(t, "soave", named(t, "n-pentane"), v)
		calls := []struct {
			name string
			call func() error
		}{
			{"Flux", func() error { _, err := f.Flux(415, atmosphere); return err }},
			{"Embryo", func() error { _, err := f.Embryo(415, atmosphere); return err }},
			{"cold KineticLimit", func() error { _, err := f.KineticLimit(atmosphere, Threshold(12), 0); return err }},
			{"warm KineticLimit", func() error { _, err := f.KineticLimit(atmosphere, Threshold(12), 419); return err }},
			{"tension KineticLimit", func() error { _, err := f.KineticLimit(-5e6, Threshold(12), 0); return err }},
			{"heated KineticLimit", func() error { _, err := f.KineticLimit(atmosphere, Heated(5e-10, 1), 0); return err }},
			{"KineticPressure", func() error { _, err := f.KineticPressure(420, Threshold(12), 0); return err }},
			{"heated KineticPressure", func() error { _, err := f.KineticPressure(420, Heated(5e-10, 1), 0); return err }},
		}
		for _, c := range calls {
			if err := c.call(); err != nil {
				t.Errorf("%s, %s: %v", v.name, c.name, err)
				continue
			}
			if n := testing.AllocsPerRun(20, func() { _ = c.call() }); n != 0 {
				t.Errorf("%s, %s: %g allocations, want none", v.name, c.name, n)
			}
		}
	}
}
