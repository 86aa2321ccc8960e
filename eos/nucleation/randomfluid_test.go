package nucleation

import (
	"errors"
	"math"
	"testing"

	"pgregory.net/rapid"

	"limsup/eos"
	"limsup/eos/tension"
)

// TestRandomFluids asks of fluids that nobody has seen what physics asks of all: drawn
// critical points, acentric factors, masses and surface tensions, at drawn states.
func TestRandomFluids(t *testing.T) {
	limits, pairs := 0, 0
	rapid.Check(t, func(t *rapid.T) {
		s := eos.Substance{Name: "any", CriticalT: rapid.Float64Range(100, 900).Draw(t, "Tc"), CriticalP: rapid.Float64Range(1e6, 12e6).Draw(t, "Pc"),
			Acentric: rapid.Float64Range(-0.05, 0.8).Draw(t, "acentric"), MolarMass: rapid.Float64Range(0.016, 0.4).Draw(t, "M")}
		// σ = 0.1 to 0.3 of Pc^⅔(kTc)^⅓, as of the fluids of the library, with the exponent of real fluids
		scale := math.Cbrt(s.CriticalP * s.CriticalP * eos.Boltzmann * s.CriticalT)
		σ, err := tension.NewPowerSum(s.CriticalT, tension.Term{Coefficient: scale * rapid.Float64Range(3.5, 6).Draw(t, "sigma"), Exponent: rapid.Float64Range(1.15, 1.3).Draw(t, "n")})
		if err != nil {
			t.Fatal(err)
		}
		equation := rapid.SampledFrom(eos.EquationNames()).Draw(t, "equation")
		m, err := eos.Untuned(equation, s)
		if err != nil {
			t.Fatal(err)
		}
		f, err := New(Config{Model: m, MolarMass: s.MolarMass, Tension: σ})
		if err != nil {
			t.Fatal(err)
		}
		g, err := New(Config{Model: m, MolarMass: s.MolarMass, Tension: σ, EmbryoPressure: Poynting})
		if err != nil {
			t.Fatal(err)
		}

		// Psat between the spinodals, rising with T
		T := s.CriticalT * rapid.Float64Range(0.45, 0.98).Draw(t, "Tr")
		cold, err1 := m.Saturation(T)
		warm, err2 := m.Saturation(T * 1.001)
		l, v, err3 := m.Spinodal(T)
		if err := errors.Join(err1, err2, err3); err != nil || !(l.P < cold.P && cold.P < v.P && cold.P < warm.P) {
			t.Fatalf("Psat %g and %g, spinodals %g and %g, %v", cold.P, warm.P, l.P, v.P, err)
		}
		// flux rising with T, from saturation to the spinodal
		P := s.CriticalP * rapid.Float64Range(-0.3, 0.8).Draw(t, "Pr")
		top, err := m.LiquidSpinodalTemperature(P)
		if err != nil {
			t.Fatal(err)
		}
		above, err := m.LiquidSpinodalTemperature(P + 0.01*s.CriticalP)
		if err != nil || !(above.T > top.T) {
			t.Fatalf("spinodal %g K, %g K at more pressure, %v", top.T, above.T, err)
		}
		// what is closest to the spinodal is left out, and barriers of no height: there the
		// falling density of the liquid can win
		hot := top.T * (1 - rapid.Float64Range(0.01, 0.3).Draw(t, "below the spinodal"))
		a, err1 := f.Flux(hot, P)
		b, err2 := f.Flux(hot*1.002, P)
		if err1 == nil && err2 == nil && a.Barrier > 1 {
			pairs++
			if !(b.LnJ > a.LnJ) || unusable(a) != "" || unusable(b) != "" {
				t.Fatalf("ln J %g at %g K, %g warmer", a.LnJ, hot, b.LnJ)
			}
		}
		// limit below the spinodal, rising with threshold and pressure
		decades := rapid.Float64Range(2, 24).Draw(t, "threshold")
		low, err := f.KineticLimit(P, Threshold(decades), 0)
		if err != nil {
			if !typed(err) {
				t.Fatal(err)
			}
			return
		}
		limits++
		if !(low.T < top.T) || unusable(low) != "" {
			t.Fatalf("limit %g K, spinodal %g K", low.T, top.T)
		}
		if high, err := f.KineticLimit(P, Threshold(decades+1), 0); err == nil && !(high.T > low.T) {
			t.Fatalf("limit %g K, with a threshold ten times higher %g K", low.T, high.T)
		}
		if squeezed, err := f.KineticLimit(P+0.01*s.CriticalP, Threshold(decades), 0); err == nil && !(squeezed.T > low.T) {
			t.Fatalf("limit %g K, at more pressure %g K", low.T, squeezed.T)
		}
		// exact and Poynting pressure agree as T falls
		part := rapid.Float64Range(-1, 0.5).Draw(t, "P/Psat")
		last := math.Inf(1)
		for _, tr := range []float64{0.85, 0.7, 0.55, 0.45} {
			ps, err := m.Saturation(tr * s.CriticalT)
			if err != nil {
				t.Fatal(err)
			}
			x, err1 := f.Embryo(ps.T, part*ps.P)
			y, err2 := g.Embryo(ps.T, part*ps.P)
			if err1 != nil || err2 != nil {
				continue
			}
			d := math.Abs(math.Log(y.Pressure / x.Pressure))
			// rounding is all that is left of cold vapours
			if !(d < last || d < 1e-9) {
				t.Fatalf("Tr %g: exact and Poynting pressure differ by %g, by %g when warmer", tr, d, last)
			}
			last = d
		}
	})
	t.Logf("%d limits, %d pairs of fluxes", limits, pairs)
	if limits < 10 || pairs < 10 { // of 100 draws, or of 20 with -short
		t.Errorf("%d limits and %d pairs of fluxes: the properties have hardly been tried", limits, pairs)
	}
}
