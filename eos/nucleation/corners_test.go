package nucleation

import (
	"errors"
	"math"
	"testing"

	"limsup/eos"
	"limsup/eos/tension"
)

// tunedPentane is n-pentane under a tuned equation; each test below is a state that
// once had no answer or a wrong one.
func tunedPentane(t *testing.T, equation string, u eos.Tuning, c Config) *Fluid {
	t.Helper()
	r := named(t, "n-pentane")
	e, err := eos.EquationByName(equation)
	if err != nil {
		t.Fatal(err)
	}
	if c.Model, err = eos.NewModel(e, r.Substance, u); err != nil {
		t.Fatal(err)
	}
	c.MolarMass = r.MolarMass
	if c.Tension == nil {
		c.Tension = r.tension
	}
	f, err := New(c)
	if err != nil {
		t.Fatal(err)
	}
	return f
}

// TestNoVapourAtEnd: an equation whose saturation line reaches the pressure only above the
// critical temperature of the tension has no limit below it.
func TestNoVapourAtEnd(t *testing.T) {
	for _, δ := range []float64{2e-10, -2e-10} {
		for _, b := range []float64{0.85, 1.0654296875} {
			f := tunedPentane(t, "van-der-waals", eos.Tuning{Attraction: 1.15, Covolume: b, Slope: 0.5},
				Config{TensionFactor: 1.3, TolmanLength: δ, Prefactor: 1})
			l, err := f.KineticLimit(0.9*3.367519e6, Threshold(1), 0)
			var no *NoLimitError
			if !errors.As(err, &no) || no.Spinodal {
				t.Errorf("δ %g, b %g: %v, %v; want no limit up to the end of the properties", δ, b, l.T, err)
			}
		}
	}
}

// TestColdStepwise: next to saturation near MinT the barrier is beyond the range of
// numbers; the stepwise factor and the count of molecules have to end all the same.
func TestColdStepwise(t *testing.T) {
	f := tunedPentane(t, "berthelot", eos.Tuning{Attraction: 1.15, Covolume: 1.15, Slope: 1.3125}, Config{Kinetics: Stepwise, TolmanLength: 2e-10})
	lo, hi := f.Range()
	flux, refused := 0, 0
	for i := range 40 {
		T := lo + (hi-lo)*1e-3*float64(i)
		for _, P := range []float64{-1e-190, 0, 1e-150, 6e-96, 1e-60} {
			var state *StateError
			var stable *NotMetastableError
			switch x, err := f.Flux(T, P); {
			case err == nil:
				flux++
				if name := unusable(x); name != "" {
					t.Errorf("%g K, %g Pa: %s", T, P, name)
				}
			case errors.As(err, &state), errors.As(err, &stable):
				refused++
			default:
				t.Errorf("%g K, %g Pa: %v", T, P, err)
			}
			switch e, err := f.Embryo(T, P); {
			case err == nil:
				if name := unusable(e); name != "" {
					t.Errorf("%g K, %g Pa: %s", T, P, name)
				}
			case errors.As(err, &state), errors.As(err, &stable):
				refused++
			default:
				t.Errorf("%g K, %g Pa: %v", T, P, err)
			}
		}
	}
	t.Logf("%d fluxes, %d refused", flux, refused)
	if flux == 0 || refused == 0 {
		t.Errorf("%d fluxes and %d refusals: the states miss the edge", flux, refused)
	}
}

// TestHeatedAtSpinodal: with the Poynting factor a limit can lie a hair below the spinodal, where
// the liquid, and with it dlnJ/dT, changes as the root of the distance. The gradient of a heated
// limit is then that of the root, as limits solved anew show. Tolerance 1e-3: the truncation of
// both differences against that distance (measured: 2.8e-5).
func TestHeatedAtSpinodal(t *testing.T) {
	r := named(t, "ethane")
	e, err := eos.EquationByName("berthelot")
	if err != nil {
		t.Fatal(err)
	}
	m, err := eos.NewModel(e, r.Substance, eos.Tuning{Attraction: 0.875, Covolume: 1.0625, Slope: 1.5})
	if err != nil {
		t.Fatal(err)
	}
	f, err := New(Config{
		Model: m, MolarMass: r.MolarMass, Tension: r.tension, TensionFactor: 1.234375,
		TolmanLength: 6.548361852765083e-11, Prefactor: 1.5, EmbryoPressure: Poynting,
	})
	if err != nil {
		t.Fatal(err)
	}
	P := -0.4375 * r.CriticalP
	s, err := m.LiquidSpinodalTemperature(P)
	if err != nil {
		t.Fatal(err)
	}
	at := func(decades float64) Limit {
		g := Threshold(decades)
		g.PerKelvin = true
		l, err := f.KineticLimit(P, g, 0)
		if err != nil {
			t.Fatal(err)
		}
		return l
	}
	l := at(0.85)
	t.Logf("limit %.3g K below the spinodal, %d evaluations", s.T-l.T, l.Evaluations)
	if !(s.T-l.T < 1e-2) || s.T <= l.T {
		t.Errorf("limit %g K, spinodal %g K: the state misses the edge", l.T, s.T)
	}
	fd := fivePoint(func(d float64) float64 { return at(d).T }, 0.85, 3e-3)
	t.Logf("off by %.2g", deviation(l.DThreshold, fd))
	if deviation(l.DThreshold, fd) > 1e-3 {
		t.Errorf("dT/dlog₁₀J* = %g, differences %g", l.DThreshold, fd)
	}
}

// TestHeatedWithoutLimit: a target per kelvin falls with dlnJ/dT; where J comes to
// nothing at the spinodal that must not pass for a limit.
func TestHeatedWithoutLimit(t *testing.T) {
	f := tunedPentane(t, "van-der-waals", eos.Tuning{Attraction: 1.15, Covolume: 1.15, Slope: 0.25},
		Config{TensionFactor: 0.875, TolmanLength: -5.820766091346741e-11, Prefactor: 1, EmbryoPressure: Poynting})
	g := Threshold(1)
	g.PerKelvin = true
	l, err := f.KineticLimit(-0.5*3.367519e6, g, 0)
	var no *NoLimitError
	if !errors.As(err, &no) {
		t.Fatalf("limit %g K where dlnJ/dT is %g, %v; want none", l.T, l.DT, err)
	}
	if !no.Known || !(no.Reached < no.Threshold) {
		t.Errorf("%v: reaches %g of %g", err, no.Reached, no.Threshold)
	}
}

// TestCorrelationUnderTension: with correlations no spinodal bounds the search for a
// pressure, which crosses zero.
func TestCorrelationUnderTension(t *testing.T) {
	r := named(t, "n-pentane")
	f := untuned(t, "soave", r, Config{Correlations: textbook{r.Substance}})
	for _, T := range []float64{300, 350, 400, 415, 430} {
		l, err := f.KineticPressure(T, Threshold(12), 0)
		if err != nil {
			t.Errorf("%g K: %v", T, err)
			continue
		}
		back, err := f.KineticLimit(l.P, Threshold(12), 0)
		if err != nil {
			t.Errorf("%g K: %v", T, err)
			continue
		}
		within(t, "the way back", back.T, T, 1e-9)
	}
}

// gap is a surface tension without values in an interval.
type gap struct {
	tension.Func
	lo, hi float64
}

func (g gap) Sigma(T float64) (sigma, slope float64, err error) {
	if T > g.lo && T < g.hi {
		return 0, 0, errors.New("no value")
	}
	return g.Func.Sigma(T)
}

// TestTensionGap: a state without tension has an error that names the fluid and the cause.
func TestTensionGap(t *testing.T) {
	r := named(t, "n-pentane")
	f := untuned(t, "soave", r, Config{Tension: gap{r.tension, 410, 425}})
	for _, P := range []float64{atmosphere, 1.9e6} { // a bubble and a droplet
		_, err := f.Embryo(415, P)
		if err == nil || err.Error() != "flux of n-pentane: no value" {
			t.Errorf("%g Pa: %v", P, err)
		}
	}
	if l, err := f.KineticLimit(atmosphere, Threshold(12), 0); err == nil {
		t.Errorf("limit %g K in the gap", l.T)
	}
}

// TestNextToCritical: guesses anywhere lead to the same limit next to the end of the tension.
func TestNextToCritical(t *testing.T) {
	f := untuned(t, "soave", named(t, "n-pentane"), Config{})
	P := 0.999 * 3.367519e6
	l, err := f.KineticLimit(P, Threshold(12), 0)
	if err != nil {
		t.Fatal(err)
	}
	for _, guess := range []float64{80, 200, 400, 469, 469.699999, 469.7, 1e9, -5, math.NaN(), math.Inf(1)} {
		w, err := f.KineticLimit(P, Threshold(12), guess)
		if err != nil || math.Abs(w.T-l.T) > 1e-9 {
			t.Errorf("from %g K: %.15g K, cold %.15g K, %v", guess, w.T, l.T, err)
		}
	}
}

// TestPeak: a hair below the spinodal the density of the liquid falls as the root of the distance
// and takes J down with it. A threshold between the peak and the value at the spinodal is met before the
// peak, on the rising side, at given pressure and at given temperature.
func TestPeak(t *testing.T) {
	f := untuned(t, "soave", named(t, "n-pentane"), Config{EmbryoPressure: Poynting})
	m := f.Config().Model
	s, err := m.LiquidSpinodalTemperature(atmosphere)
	if err != nil {
		t.Fatal(err)
	}
	lnJ := func(T, P float64) float64 {
		x, err := f.Flux(T, P)
		if err != nil {
			t.Fatal(err)
		}
		return x.LnJ
	}
	peak, at := math.Inf(-1), 0.0
	for d := -11.0; d < -1; d += 0.05 {
		if v := lnJ(s.T*(1-math.Pow(10, d)), atmosphere); v > peak {
			peak, at = v, d
		}
	}
	end := lnJ(s.T*(1-1e-11), atmosphere)
	t.Logf("ln J %.6f at the spinodal, %.6f at its peak %.2g·T below", end, peak, math.Pow(10, at))
	if !(peak-end > 1e-4) {
		t.Fatalf("ln J peaks at %g, %g at the spinodal: nothing to tell apart", peak, end)
	}
	for _, part := range []float64{0.05, 0.3, 0.6, 0.9, 0.99} {
		target := Target{LnJ: end + part*(peak-end)}
		for _, guess := range []float64{0, 300, s.T - 0.1, s.T - 1e-3, s.T - 1e-5, s.T - 1e-7, s.T + 1} {
			l, err := f.KineticLimit(atmosphere, target, guess)
			if err != nil || !(l.DT > 0) || math.Abs(l.LnJ-target.LnJ) > 1e-8 {
				t.Fatalf("limit %+v, %v; want ln J = %g on the rising side", l, err, target.LnJ)
			}
			edge, _, err := m.Spinodal(l.T)
			if err != nil {
				t.Fatal(err)
			}
			for _, above := range []float64{0, 1e-6, 1e-3, 0.1, 1, 1e4} { // Pa
				p, err := f.KineticPressure(l.T, target, edge.P+above)
				// a hundredth of the way from the spinodal, for the roots are nearly double
				if err != nil || math.Abs(p.P-atmosphere) > 1e-2*(atmosphere-edge.P) || !(p.DP < 0) {
					t.Fatalf("pressure %+v from %g Pa above the spinodal, %v; want %d Pa", p, above, err, atmosphere)
				}
			}
		}
	}
	over, err := f.KineticLimit(atmosphere, Target{LnJ: peak + 1e-3}, 0)
	var no *NoLimitError
	if !errors.As(err, &no) || math.Abs(no.Reached*math.Ln10-peak) > 1e-3 {
		t.Errorf("above the peak: %g K, %v; want none, with ln J reaching %g", over.T, err, peak)
	}
}

// TestReached: the error of a target that is not met tells the largest flux before the
// spinodal, however far the target and wherever the search began.
func TestReached(t *testing.T) {
	f := untuned(t, "redlich-kwong", named(t, "n-octane"), Config{})
	m := f.Config().Model
	s, err := m.LiquidSpinodalTemperature(atmosphere)
	if err != nil {
		t.Fatal(err)
	}
	peak := math.Inf(-1)
	for d := -11.0; d < -1; d += 0.05 {
		if x, err := f.Flux(s.T*(1-math.Pow(10, d)), atmosphere); err != nil {
			t.Fatal(err)
		} else {
			peak = math.Max(peak, x.LnJ)
		}
	}
	for _, above := range []float64{0.01, 1, 3, 50} { // the last one is hopeless at first sight
		for _, guess := range []float64{0, 300, s.T - 1e-3} {
			_, err := f.KineticLimit(atmosphere, Target{LnJ: peak + above}, guess)
			var no *NoLimitError
			if !errors.As(err, &no) || math.Abs(no.Reached*math.Ln10-peak) > 1e-4 {
				t.Errorf("%g above the peak from %g K: %v; want none, with log10 J reaching %g", above, guess, err, peak/math.Ln10)
			}
		}
	}
}

// TestNextToTensionEnd: where the tension vanishes the slope of ψ changes as fast as the
// distance to its end, here 35 mK, and Newton's last step must be small against that.
func TestNextToTensionEnd(t *testing.T) {
	r := named(t, "n-octane")
	e, err := eos.EquationByName("peng-robinson")
	if err != nil {
		t.Fatal(err)
	}
	m, err := eos.NewModel(e, r.Substance, eos.Tuning{Attraction: 1.082275390625, Covolume: 1.06689453125, Slope: 1.125})
	if err != nil {
		t.Fatal(err)
	}
	f, err := New(Config{Model: m, MolarMass: r.MolarMass, Tension: r.tension, TensionFactor: 1.3, TolmanLength: 2e-10, Prefactor: 1})
	if err != nil {
		t.Fatal(err)
	}
	P := 0.9 * r.CriticalP
	l, err := f.KineticLimit(P, Threshold(1), 0)
	if err != nil {
		t.Fatal(err)
	}
	for _, guess := range []float64{0.5 * l.T, 0.9 * l.T, l.T - 1, l.T - 0.01, l.T + 0.01, l.T + 0.03} {
		w, err := f.KineticLimit(P, Threshold(1), guess)
		if err != nil || math.Abs(w.T-l.T) > 1e-9 {
			t.Errorf("from %g K: %.15g K, cold %.15g K, %v", guess, w.T, l.T, err)
		}
	}
}
