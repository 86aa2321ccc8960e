package fit_test

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"limsup/data/measure"
	"limsup/fit"
)

// droplets are rows of n-pentane and n-hexane, n droplets at each of the heating
// rates: slow ones of 1e-10 m³ at 0.1 K/s read to 0.1 K, fast layers of 1e-15 m³ at
// 1e5 K/s read to 0.5 K. Temperatures are drawn from the model: ln H of a unit
// exponential variable over the steepness, and the errors of the readings.
func droplets(t testing.TB, truth *fit.Model, rng *rand.Rand, n int, rates ...float64) *measure.Set {
	t.Helper()
	lib := library(t)
	set := &measure.Set{}
	for _, key := range []string{"n-pentane", "n-hexane"} {
		for _, β := range rates {
			for range n {
				r := measure.Row{File: "droplets", Line: len(set.Rows) + 1, Fluid: key, Key: key, Pressure: 101325, Temperature: 1,
					Volume: 1e-10, HeatingRate: β, UTemperature: 0.1, HasUTemperature: true}
				if β > 1e3 {
					r.Volume, r.UTemperature = 1e-15, 0.5
				}
				set.Rows = append(set.Rows, r)
			}
		}
	}
	i := 0
	if err := fillStudy(lib, truth, set, func(_ fit.Prediction, s fit.Sensitivity) float64 {
		u := set.Rows[i].UTemperature
		i++
		return math.Log(rng.ExpFloat64()/math.Ln2)/s.Steepness + u*rng.NormFloat64()
	}); err != nil {
		t.Fatal(err)
	}
	return set
}

// TestTwoHeatingRates: at two heating rates a survival calibration finds prefactor and
// surface tension together; at one it says that it cannot.
func TestTwoHeatingRates(t *testing.T) {
	lib := library(t)
	truth := untuned(fit.Setting{Name: fit.Prefactor, Value: -1.5}, fit.Setting{Name: fit.SurfaceTension, Value: 1.02})
	p := fit.Plan{Terms: terms(t, "prefactor", "surface-tension"), Noise: fit.Noise{Kind: fit.Survival}, Fixed: []fit.Setting{{Name: fit.Spread, Value: 0}}}
	two := calibrate(t, droplets(t, truth, rand.New(rand.NewPCG(3, 1)), 60, 0.1, 1e5), lib, p, fit.Options{})
	for label, want := range map[string]float64{"prefactor": -1.5, "surface-tension": 1.02} {
		e := estimate(t, two, label)
		if !e.HasU || math.Abs(e.Value-want) > 3*e.U {
			t.Errorf("%s = %g ± %g (%s), truth %g", label, e.Value, e.U, e.Reason, want)
		}
		if label == "prefactor" && e.U > 1 {
			t.Errorf("prefactor is known to %g decades only", e.U)
		}
	}
	one := calibrate(t, droplets(t, truth, rand.New(rand.NewPCG(3, 2)), 120, 0.1), lib, p, fit.Options{})
	text := strings.Join(one.Warnings, "\n")
	if !strings.Contains(text, "do not tell apart prefactor and surface-tension") || !strings.Contains(text, "nother flux") {
		t.Errorf("at one heating rate: %q", text)
	}
	a, b := estimate(t, one, "prefactor"), estimate(t, two, "prefactor")
	if a.HasU && a.U < 3*b.U {
		t.Errorf("one heating rate: u %g, two: u %g", a.U, b.U)
	}
	t.Logf("two rates: inflation %.1f, u(prefactor) %.2f; one: %.1f, %.2f", two.Identity.Inflation, b.U, one.Identity.Inflation, a.U)
}

// TestHazardIsLogLinear measures what survival.go neglects: the hazard of n-pentane
// heated at 0.1 K/s up to the limit, by adding up J, against J/κ there. The relative
// difference is dlnκ/dT/κ: 1.4 % of H, which moves the limit by 2 mK.
func TestHazardIsLogLinear(t *testing.T) {
	lib := library(t)
	r, err := lib.Find("n-pentane")
	if err != nil {
		t.Fatal(err)
	}
	q := fit.Query{Record: r, Pressure: 101325}
	m := untuned()
	ph, err := m.Physics(&q)
	if err != nil {
		t.Fatal(err)
	}
	l, err := ph.Limit(q.Pressure)
	if err != nil {
		t.Fatal(err)
	}
	const h = 0.002 // K; the trapezoidal sum of an exponential of 3.5 per kelvin·ln10 errs by (κh)²/12 = 2e-5
	sum := 0.5
	for k := 1; k <= 3000; k++ {
		f, err := ph.Fluid.Flux(l.T-h*float64(k), q.Pressure)
		if err != nil {
			t.Fatal(err)
		}
		sum += math.Exp(f.LnJ - l.LnJ)
	}
	ratio := sum * h * l.DT
	t.Logf("κ = %.2f/K, hazard/(J/κ) = %.5f", l.DT, ratio)
	if math.Abs(ratio-1) > 0.02 {
		t.Errorf("hazard is %.5f of J/κ, want 1 within 2 %%", ratio)
	}
}

// TestLifetimes: rows held at one state are exponential waiting times. With readings
// free of error the likelihood depends on them through their mean alone: the flux of
// the calibrated model is n/ΣVt, as in the classical estimate of a rate, also with rows
// that did not boil (here 9 events in 359 weeks of E. J. Freireich et al., Blood 21
// (1963) 699, from memory: rate 9/359 and standard error a third of it).
func TestLifetimes(t *testing.T) {
	lib := library(t)
	times := []float64{6, 6, 6, -6, 7, -9, 10, -10, -11, 13, 16, -17, -19, -20, 22, 23, -25, -32, -32, -34, -35}
	set := &measure.Set{}
	const V, T = 1e-12, 421.0
	for i, x := range times {
		r := measure.Row{File: "times", Line: i + 1, Fluid: "n-pentane", Key: "n-pentane", Pressure: 101325, Temperature: T,
			Volume: V, Lifetime: math.Abs(x), UTemperature: 1e-5, HasUTemperature: true}
		if x < 0 {
			r.Outcome = measure.Intact
		}
		set.Rows = append(set.Rows, r)
	}
	// Around one state: a wide spread of times is a narrow one of temperatures.
	for k, lifetime := range []bool{true, false} {
		if !lifetime {
			for i := range set.Rows {
				set.Rows[i].HoldingTime, set.Rows[i].Lifetime = set.Rows[i].Lifetime, 0
			}
		}
		c := calibrate(t, set, lib, fit.Plan{Terms: terms(t, "prefactor"), Noise: fit.Noise{Kind: fit.Survival}, Fixed: []fit.Setting{{Name: fit.Spread, Value: 0}}}, fit.Options{})
		q := fit.Query{Record: c.Data.Observations[0].Record, Pressure: 101325}
		m := c.Model()
		ph, err := m.Physics(&q)
		if err != nil {
			t.Fatal(err)
		}
		f, err := ph.Fluid.Flux(T, q.Pressure)
		if err != nil {
			t.Fatal(err)
		}
		// ln J is a straight line within the 0.2 K that ln t spans to some 1e-2 of it.
		if got := math.Exp(f.LnJ) * V * 359 / 9; math.Abs(got-1) > 0.02 {
			t.Errorf("%d: rate is %.4f of 9/359", k, got)
		}
		e := estimate(t, c, "prefactor")
		if want := 1.0 / 3 / math.Ln10; math.Abs(e.U/want-1) > 0.03 {
			t.Errorf("%d: u(prefactor) = %.4f decades, want %.4f", k, e.U, want)
		}
	}
}
