package nucleation

import (
	"errors"
	"fmt"
	"math"
	"testing"

	"limsup/eos"

	"gonum.org/v1/gonum/integrate/quad"
	"pgregory.net/rapid"
)

// TestTargets compares the targets with the formulas by hand.
func TestTargets(t *testing.T) {
	const V, β, time = 5e-10, 2.0, 10.0
	for _, c := range []struct {
		name      string
		got       Target
		J         float64 // m⁻³s⁻¹, or K·m⁻³s⁻¹ per kelvin
		perKelvin bool
	}{
		{"threshold", Threshold(12), 1e12, false},
		{"stated", Stated(3e7), 3e7, false},
		{"held", Held(V, time), 0.69314718055994531 / (5e-10 * 10), false}, // ln2/(Vt)
		{"lived", Lived(V, time), 1 / (5e-10 * 10), false},                 // 1/(Vt)
		{"heated", Heated(V, β), 0.69314718055994531 * 2 / 5e-10, true},    // ln2·β/V
	} {
		if deviation(math.Exp(c.got.LnJ), c.J) > 1e-13 || c.got.PerKelvin != c.perKelvin {
			t.Errorf("%s: J = %g, per kelvin %t; want %g, %t", c.name, math.Exp(c.got.LnJ), c.got.PerKelvin, c.J, c.perKelvin)
		}
	}
	// At the limit of a heated sample J is ln2·β·(dlnJ/dT)/V.
	f := untuned(t, "soave", named(t, "n-pentane"), Config{})
	l, err := f.KineticLimit(atmosphere, Heated(V, β), 0)
	if err != nil {
		t.Fatal(err)
	}
	within(t, "ln J of a heated sample", l.LnJ, math.Log(math.Ln2*β*l.DT/V), 1e-12*l.T*l.DT)
}

// TestHeatedMedian: the limit of a heated sample is the median of its survival
// S(T) = exp(−(V/β)∫J dT), here by quadrature of the flux from where J is
// e⁻⁶⁰ of its value. The closed form takes ln J as a straight line; its curvature costs
// 2.7 mK at worst (measured), the median being the higher.
func TestHeatedMedian(t *testing.T) {
	var worst float64
	for _, fluid := range []string{"n-pentane", "n-octane", "nitrogen", "water"} {
		r := named(t, fluid)
		f := untuned(t, "soave", r, Config{})
		for _, c := range []struct{ V, β, P float64 }{{5e-10, 1, atmosphere}, {1e-6, 0.01, atmosphere}, {1e-13, 1e5, 0.4 * r.CriticalP}} {
			l, err := f.KineticLimit(c.P, Heated(c.V, c.β), 0)
			if err != nil {
				t.Fatal(err)
			}
			survived := func(T float64) float64 { // −ln S
				return c.V / c.β * quad.Fixed(func(T float64) float64 {
					x, err := f.Flux(T, c.P)
					if err != nil {
						t.Fatal(err)
					}
					return math.Exp(x.LnJ)
				}, T-60/l.DT, T, 60, quad.Legendre{}, 0)
			}
			lo, hi := l.T-1, l.T+math.Min(1, 0.5*(r.CriticalT-l.T))
			for range 40 {
				if mid := 0.5 * (lo + hi); survived(mid) < math.Ln2 {
					lo = mid
				} else {
					hi = mid
				}
			}
			d := l.T - lo
			t.Logf("%s, %g m³, %g K/s, %.3g Pa: limit %.4f K, median %+.2g K from it", fluid, c.V, c.β, c.P, l.T, -d)
			worst = math.Max(worst, math.Abs(d))
			if !(math.Abs(d) < 0.01) {
				t.Errorf("%s: limit %g K, median %g K", fluid, l.T, lo)
			}
		}
	}
	t.Logf("largest difference %.2g K", worst)
}

// drawn is a random fluid with a random tuning under a random variant; the ranges
// are those in which a calibration moves, where a model can be made of them.
func drawn(t *rapid.T, all []record) (f *Fluid, r record) {
	r = rapid.SampledFrom(all).Draw(t, "fluid")
	e := rapid.SampledFrom(eos.Equations()).Draw(t, "equation")
	v := rapid.SampledFrom(variants).Draw(t, "variant")
	u := e.Untuned()
	u.Attraction = rapid.Float64Range(0.85, 1.15).Draw(t, "attraction")
	u.Covolume = rapid.Float64Range(0.85, 1.15).Draw(t, "covolume")
	u.Slope += rapid.Float64Range(-0.3, 0.5).Draw(t, "slope change")
	m, err := eos.NewModel(e, r.Substance, u)
	if err != nil {
		t.Fatal(err)
	}
	c := Config{
		Model: m, MolarMass: r.MolarMass, Tension: r.tension,
		TensionFactor: rapid.Float64Range(0.7, 1.3).Draw(t, "tension factor"),
		TolmanLength:  rapid.Float64Range(-0.2e-9, 0.2e-9).Draw(t, "tolman"),
		Prefactor:     rapid.Float64Range(-5, 5).Draw(t, "prefactor"),
	}
	v.set(t, r, &c)
	if f, err = New(c); err != nil {
		t.Fatal(err)
	}
	return f, r
}

// typed tells whether an error is one of those that KineticLimit and
// KineticPressure promise.
func typed(err error) bool {
	var no *NoLimitError
	var domain *eos.DomainError
	return errors.As(err, &no) || errors.As(err, &domain)
}

// TestLimitProperties draws fluids, tunings, variants and pressures and checks what
// every limit must obey.
func TestLimitProperties(t *testing.T) {
	all, _ := records(t)
	found, none, steps := 0, 0, 0
	rapid.Check(t, func(t *rapid.T) {
		f, r := drawn(t, all)
		P := r.CriticalP * rapid.Float64Range(-0.5, 0.9).Draw(t, "P/Pc")
		target := Threshold(rapid.Float64Range(0, 25).Draw(t, "threshold"))
		if rapid.Bool().Draw(t, "per kelvin") {
			target.PerKelvin = true
		}
		l, err := f.KineticLimit(P, target, 0)
		if err != nil {
			none++
			if !typed(err) {
				t.Fatalf("%v", err)
			}
			var no *NoLimitError
			if errors.As(err, &no) {
				checkNoLimit(t, f, P, target, no)
			}
			return
		}
		found++
		steps = max(steps, l.Evaluations)
		if name := unusable(l); name != "" {
			t.Fatal(name)
		}
		lo, hi := f.Range()
		if !(l.T > lo && l.T < hi) || l.P != P {
			t.Fatalf("limit %g K at %g Pa outside %g to %g K", l.T, l.P, lo, hi)
		}
		m := f.Config().Model
		if s, err := m.LiquidSpinodalTemperature(P); err == nil && f.Config().Correlations == nil && !(l.T < s.T) {
			t.Fatalf("limit %g K at or above the spinodal %g K", l.T, s.T)
		}
		// the target is met
		want := target.LnJ
		if target.PerKelvin {
			want += math.Log(l.DT)
		}
		// to 1e-11 of T; close to the spinodal a per-kelvin target changes much faster than J
		if math.Abs(l.LnJ-want) > 2e-11*l.T*math.Max(l.DT, math.Ln10/l.DThreshold) {
			t.Fatalf("ln J = %.12g at the limit, want %.12g", l.LnJ, want)
		}
		// Signs: hotter, less pressure, less tension or more prefactor make more flux, but for
		// a hair below the spinodal, where the falling density of the liquid wins.
		s, err := m.LiquidSpinodalTemperature(P)
		close := err == nil && f.Config().Correlations == nil && s.T-l.T < 1e-6*l.T
		if !close && !(l.DT > 0 && l.DP < 0 && l.DThreshold > 0 && l.DGiven > 0 && l.Barrier > 0) {
			t.Fatalf("signs: %+v", l)
		}
		if !close && !(l.Gradient[SurfaceTension] > 0 && l.Gradient[TolmanLength] < 0 && l.Gradient[Prefactor] < 0) {
			t.Fatalf("signs of the gradient: %v", l.Gradient)
		}
		// J rises with T on both sides of the limit
		x, err := f.Flux(l.T, P)
		if err != nil {
			t.Fatal(err)
		}
		below, err := f.Flux(l.T*(1-1e-3), P)
		if err == nil && !(below.LnJ < x.LnJ) {
			t.Fatalf("ln J %g at the limit, %g below it", x.LnJ, below.LnJ)
		}
		if name := unusable(x); name != "" {
			t.Fatal(name)
		}
		// the limit rises with the threshold
		higher := target
		higher.LnJ += 1
		if up, err := f.KineticLimit(P, higher, 0); err == nil {
			if !(up.T > l.T) {
				t.Fatalf("limit %g K, %g K with more threshold", l.T, up.T)
			}
		} else if !typed(err) {
			t.Fatal(err)
		}
		// the way back
		back, err := f.KineticPressure(l.T, target, 0)
		if err != nil {
			t.Fatal(err)
		}
		// 1e-11 of T along the line of limits and of ΔP, the tolerances of the two searches
		e, err := f.Embryo(l.T, P)
		if err != nil {
			t.Fatal(err)
		}
		ΔP := e.Pressure - P
		// A warm start gives the same temperature to 1e-9 K, or to rounding of P_v, 64ε, as it
		// is magnified in W = 16πσ³/(3kTΔP²): by 2W·P_v/ΔP in ln J.
		guess := l.T * rapid.Float64Range(0.5, 1.2).Draw(t, "guess")
		warm, err := f.KineticLimit(P, target, guess)
		tol := math.Max(1e-9, 64*0x1p-52*2*l.Barrier*e.Pressure/ΔP/l.DT)
		if err != nil || !(math.Abs(warm.T-l.T) <= tol) {
			t.Fatalf("%.15g K from %g K, %.15g K cold (tolerance %.2g): %v", warm.T, guess, l.T, tol, err)
		}
		if tol = 1e-11 * (l.T/l.DGiven + math.Abs(P) + ΔP); !(math.Abs(back.P-P) <= tol) {
			t.Fatalf("limit %.15g K at %.15g Pa, back at %.15g Pa (tolerance %.2g)", l.T, P, back.P, tol)
		}
		if name := unusable(back); name != "" {
			t.Fatal(name)
		}
		// what is left at the limit obeys Young–Laplace
		if e.Kind != Bubble || deviation(2*e.Tension/e.Radius, ΔP) > 1e-13 || unusable(e) != "" {
			t.Fatalf("embryo %+v: %s", e, unusable(e))
		}
		// the mechanical picture ends at a tension of 1.7 P_v
		if held := P < -1.7*e.Pressure && f.Config().Kinetics != Chemical; held != l.Held {
			t.Fatalf("held %t at P_l/P_v = %g", l.Held, P/e.Pressure)
		}
	})
	t.Logf("%d limits, %d without; at most %d evaluations", found, none, steps)
	if found < 5 { // of 100 draws, or of 20 with -short
		t.Errorf("only %d limits found: the property has hardly been tried", found)
	}
}

// checkNoLimit asserts that the flux stays below the target everywhere that a
// coarse scan reaches.
func checkNoLimit(t tb, f *Fluid, P float64, target Target, no *NoLimitError) {
	t.Helper()
	if no.Fluid != f.Name() || no.Given != P || no.AtT {
		t.Fatalf("%+v names another case", no)
	}
	if no.Known && !(no.Reached < no.Threshold) {
		t.Fatalf("%v: reached", no)
	}
	lo, _ := f.Range()
	for i := 3; i < 60; i++ { // from 1e-3 of the range below its end
		T := no.End - (no.End-lo)*math.Pow(float64(i)/60, 2)*0.5
		x, err := f.Flux(T, P)
		if err != nil {
			continue
		}
		want := target.LnJ
		if target.PerKelvin && x.DT > 0 {
			want += math.Log(x.DT)
		}
		if x.LnJ >= want+1e-6 {
			t.Fatalf("%v; but ln J = %g ≥ %g at %g K", no, x.LnJ, want, T)
		}
	}
}

// TestFluxProperty: wherever there is a flux it is a number, and rises with T.
func TestFluxProperty(t *testing.T) {
	all, _ := records(t)
	rapid.Check(t, func(t *rapid.T) {
		f, r := drawn(t, all)
		lo, hi := f.Range()
		T := lo + (hi-lo)*rapid.Float64Range(0, 1).Draw(t, "T")
		P := r.CriticalP * rapid.Float64Range(-3, 1.1).Draw(t, "P/Pc")
		x, err := f.Flux(T, P)
		if err != nil {
			if err.Error() == "" {
				t.Fatal("an error without text")
			}
			return
		}
		if name := unusable(x); name != "" {
			t.Fatal(name)
		}
		// Where the barrier is spent, what is left is √σ and N, which fall with T; and
		// so does N a hair below the spinodal.
		m := f.Config().Model
		s, err := m.LiquidSpinodalTemperature(P)
		close := err == nil && f.Config().Correlations == nil && s.T-T < 1e-6*T
		if !(x.Barrier > 0) || x.Barrier > 10 && !close && !(x.DT > 0 && x.DP < 0) {
			t.Fatalf("%+v: J does not rise with T and fall with P", x)
		}
		e, err := f.Embryo(T, P)
		if err != nil {
			// a bubble of 1e308 molecules and more, in a liquid next to saturation near 0 K
			var state *StateError
			if !errors.As(err, &state) || x.Barrier < 1e100 {
				t.Fatal(err)
			}
			return
		}
		if name := unusable(e); name != "" {
			t.Fatal(name)
		}
		if e.LnJ != x.LnJ {
			t.Fatalf("ln J %g, in the embryo %g", x.LnJ, e.LnJ)
		}
	})
}

// TestNearCritical: limits close up to the spinodal and the critical point; each is
// found, or its absence explained.
func TestNearCritical(t *testing.T) {
	for _, fluid := range []string{"n-pentane", "water", "nitrogen", "hydrogen", "neon"} {
		r := named(t, fluid)
		for _, equation := range eos.EquationNames() {
			for _, v := range variants {
				f := variantOf(t, equation, r, v)
				m := f.Config().Model
				last := 0.0
				for _, pr := range []float64{0.5, 0.9, 0.99, 0.999, 0.9999} {
					at := fmt.Sprintf("%s %s %s at %g Pc", fluid, equation, v.name, pr)
					l, err := f.KineticLimit(pr*m.Pc, Threshold(12), 0)
					if err != nil {
						if !typed(err) {
							t.Errorf("%s: %v", at, err)
						}
						continue
					}
					if name := unusable(l); name != "" {
						t.Errorf("%s: %s", at, name)
					}
					if !(l.T > last) {
						t.Errorf("%s: limit %g K, %g K at less pressure", at, l.T, last)
					}
					last = l.T
				}
				if last == 0 && v.name == "exact" && equation == "soave" {
					t.Errorf("%s: no limit at any pressure", fluid)
				}
			}
		}
	}
}

// TestQuantum: hydrogen and neon, far from the acentric factors and temperatures that the
// first guess was made for, at ordinary pressures and under tension.
func TestQuantum(t *testing.T) {
	for _, fluid := range []string{"hydrogen", "neon"} {
		r := named(t, fluid)
		for _, equation := range eos.EquationNames() {
			f := untuned(t, equation, r, Config{})
			found := 0
			for _, pr := range []float64{-0.5, -0.1, 0, 0.05, 0.2, 0.5, 0.8} {
				for _, decades := range []float64{6, 12, 20} {
					l, err := f.KineticLimit(pr*r.CriticalP, Threshold(decades), 0)
					if err != nil {
						if !typed(err) {
							t.Errorf("%s %s: %v", fluid, equation, err)
						}
						continue
					}
					found++
					if !(l.T > 0.6*r.CriticalT && l.T < r.CriticalT) {
						t.Errorf("%s %s: limit %g K at %g Pc", fluid, equation, l.T, pr)
					}
				}
			}
			t.Logf("%s %s: %d of 21 limits", fluid, equation, found)
		}
	}
}

// TestDeepTension: a liquid under tension far beyond P_v is marked, and still has its limit.
func TestDeepTension(t *testing.T) {
	f := untuned(t, "soave", named(t, "n-pentane"), Config{})
	for _, c := range []struct {
		P    float64
		held bool
	}{{-1e5, false}, {-1e6, false}, {-5e6, true}, {-2e7, true}} {
		l, err := f.KineticLimit(c.P, Threshold(12), 0)
		if err != nil {
			t.Fatal(err)
		}
		e, err := f.Embryo(l.T, c.P)
		if err != nil {
			t.Fatal(err)
		}
		if l.Held != c.held || e.Held != c.held || (c.P/e.Pressure < -1.7) != c.held {
			t.Errorf("%g Pa: held %t, %t in the embryo, P_l/P_v = %g", c.P, l.Held, e.Held, c.P/e.Pressure)
		}
	}
}
