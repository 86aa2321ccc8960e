package nucleation

import (
	"fmt"
	"math"
	"testing"

	"limsup/eos"
)

// away is a tuning away from the published form, with the exponent n of van der
// Waals at 0.3; δ is counted in nm here, so that all steps are alike.
func away(e eos.Equation) Gradient {
	g := Gradient{Attraction: 1.01, Covolume: 0.98, Slope: 1.05, SurfaceTension: 0.97, TolmanLength: 0.05, Prefactor: 0.3}
	if e.Name == "van-der-waals" {
		g[Slope] = 0.3
	}
	return g
}

const nm = 1e-9

// tunedTo is a fluid with the parameters θ (δ in nm) under a variant.
func tunedTo(t tb, e eos.Equation, r record, v variant, θ Gradient) *Fluid {
	t.Helper()
	m, err := eos.NewModel(e, r.Substance, eos.Tuning{Attraction: θ[Attraction], Covolume: θ[Covolume], Slope: θ[Slope]})
	if err != nil {
		t.Fatal(err)
	}
	c := Config{
		Model: m, MolarMass: r.MolarMass, Tension: r.tension,
		TensionFactor: θ[SurfaceTension], TolmanLength: nm * θ[TolmanLength], Prefactor: θ[Prefactor],
	}
	v.set(t, r, &c)
	f, err := New(c)
	if err != nil {
		t.Fatal(err)
	}
	return f
}

// moved is θ with one parameter at x.
func moved(θ Gradient, k Parameter, x float64) Gradient {
	θ[k] = x
	return θ
}

// perNm turns the derivative with respect to δ from 1/m to 1/nm.
func perNm(g Gradient) Gradient {
	g[TolmanLength] *= nm
	return g
}

// eachVariant calls fn for the five equations under each variant.
func eachVariant(t *testing.T, fn func(t *testing.T, build func(θ Gradient) *Fluid, θ Gradient)) {
	pentane := named(t, "n-pentane")
	for _, e := range eos.Equations() {
		for _, v := range variants {
			t.Run(e.Name+" "+v.name, func(t *testing.T) {
				fn(t, func(θ Gradient) *Fluid { return tunedTo(t, e, pentane, v, θ) }, away(e))
			})
		}
	}
}

// checkDerivative compares an analytic derivative with differences f(x+h)…; scale
// is the size of what is differentiated over the unit step, below which a derivative counts as zero.
func checkDerivative(t *testing.T, what string, got float64, f func(float64) float64, x, h, scale, tol float64, worst *float64) {
	t.Helper()
	fd := fivePoint(f, x, h)
	d := math.Abs(got-fd) / (math.Abs(fd) + scale)
	if math.IsNaN(d) {
		d = math.Inf(1)
	}
	*worst = math.Max(*worst, d)
	if d > tol {
		t.Errorf("%s = %.12g, differences %.12g (off by %.2g)", what, got, fd, d)
	}
}

// TestFluxDerivatives compares lnJ's derivatives with respect to T, P_l and the six
// parameters with five-point differences, close to the limit, far below it and
// under tension. With steps of 2e-4 (relative) truncation and rounding (1e-14·W/h) are
// both near 1e-10 (measured: 4.6e-10 at worst).
func TestFluxDerivatives(t *testing.T) {
	var worst float64
	eachVariant(t, func(t *testing.T, build func(Gradient) *Fluid, θ Gradient) {
		f := build(θ)
		limit, err := f.KineticLimit(3e5, Threshold(10), 0)
		if err != nil {
			t.Fatal(err)
		}
		for _, s := range []struct{ T, P float64 }{{limit.T, 3e5}, {limit.T - 25, 2e5}, {limit.T - 25, -1e6}} {
			lnJ := func(f *Fluid, T, P float64) float64 {
				x, err := f.Flux(T, P)
				if err != nil {
					t.Fatal(err)
				}
				return x.LnJ
			}
			x, err := f.Flux(s.T, s.P)
			if err != nil {
				t.Fatal(err)
			}
			at := fmt.Sprintf(" at %.2f K, %g Pa (W %.0f)", s.T, s.P, x.Barrier)
			const tol = 3e-9
			checkDerivative(t, "∂lnJ/∂T"+at, x.DT, func(T float64) float64 { return lnJ(f, T, s.P) }, s.T, 2e-4*s.T, 0, tol, &worst)
			checkDerivative(t, "∂lnJ/∂P"+at, x.DP, func(P float64) float64 { return lnJ(f, s.T, P) }, s.P, 2e-4*3e6, 0, tol, &worst)
			g := perNm(x.Gradient)
			for k := range Parameters {
				checkDerivative(t, fmt.Sprintf("∂lnJ/∂θ%d", k)+at, g[k], func(x float64) float64 {
					return lnJ(build(moved(θ, k, x)), s.T, s.P)
				}, θ[k], 2e-4, 1e-2, tol, &worst)
			}
		}
	})
	t.Logf("largest deviation %.2g", worst)
}

// TestLimitDerivatives compares the implicit-function gradients of limits with
// differences of limits solved anew, for a threshold and for a heated sample, at
// given pressure and at given temperature.
//
// A limit is good to 1e-12 of T, 1e-9 in a difference over 1e-3; truncation is of
// that order. A heated target differentiates dlnJ/dT numerically (see slopeGradient),
// to 1e-7 of a correction that is itself a few per cent (measured: 2.3e-8 at worst).
func TestLimitDerivatives(t *testing.T) {
	const P, h = 3e5, 1e-3
	targets := []struct {
		name string
		at   func(decades float64) Target // decades is log₁₀ of the target less its own
		tol  float64
	}{
		{"threshold", func(d float64) Target { return Threshold(10 + d) }, 1e-7},
		{"heated", func(d float64) Target {
			g := Heated(1e-9, 2)
			g.LnJ += d * math.Ln10
			return g
		}, 1e-7},
	}
	var worst float64
	eachVariant(t, func(t *testing.T, build func(Gradient) *Fluid, θ Gradient) {
		f := build(θ)
		for _, g := range targets {
			T := func(f *Fluid, P, decades float64) float64 {
				l, err := f.KineticLimit(P, g.at(decades), 0)
				if err != nil {
					t.Fatal(err)
				}
				return l.T
			}
			limit, err := f.KineticLimit(P, g.at(0), 0)
			if err != nil {
				t.Fatal(err)
			}
			p := func(f *Fluid, T, decades float64) float64 {
				l, err := f.KineticPressure(T, g.at(decades), 0)
				if err != nil {
					t.Fatal(err)
				}
				return l.P
			}
			pressure, err := f.KineticPressure(limit.T, g.at(0), 0)
			if err != nil {
				t.Fatal(err)
			}
			within(t, g.name+": the pressure at the limit temperature", pressure.P, P, 1e-12*limit.T*limit.DT/math.Abs(limit.DP)+1e-4)
			// A hundredth of a kelvin, or what belongs to it in pressure, per unit counts as zero.
			zeroT, zeroP := 1e-2, 1e-2*math.Abs(limit.DT/limit.DP)

			checkDerivative(t, g.name+": dT/dP", limit.DGiven, func(P float64) float64 { return T(f, P, 0) }, P, 1e4, 0, g.tol, &worst)
			checkDerivative(t, g.name+": dP/dT", pressure.DGiven, func(T float64) float64 { return p(f, T, 0) }, limit.T, 0.3, 0, g.tol, &worst)
			checkDerivative(t, g.name+": dT/dlog₁₀J*", limit.DThreshold, func(d float64) float64 { return T(f, P, d) }, 0, 0.05, 0, g.tol, &worst)
			checkDerivative(t, g.name+": dP/dlog₁₀J*", pressure.DThreshold, func(d float64) float64 { return p(f, limit.T, d) }, 0, 0.05, 0, g.tol, &worst)
			gT, gP := perNm(limit.Gradient), perNm(pressure.Gradient)
			for k := range Parameters {
				checkDerivative(t, fmt.Sprintf("%s: ∂T/∂θ%d", g.name, k), gT[k], func(x float64) float64 {
					return T(build(moved(θ, k, x)), P, 0)
				}, θ[k], h, zeroT, g.tol, &worst)
				checkDerivative(t, fmt.Sprintf("%s: ∂P/∂θ%d", g.name, k), gP[k], func(x float64) float64 {
					return p(build(moved(θ, k, x)), limit.T, 0)
				}, θ[k], h, zeroP, g.tol, &worst)
			}
			if name := unusable(limit); name != "" {
				t.Errorf("%s: %s", g.name, name)
			}
		}
	})
	t.Logf("largest deviation %.2g", worst)
}

// TestThresholdAndPrefactor: a decade of prefactor moves the limit as a decade of threshold
// the other way, exactly so for a plain threshold.
func TestThresholdAndPrefactor(t *testing.T) {
	f := untuned(t, "soave", named(t, "n-pentane"), Config{})
	l, err := f.KineticLimit(atmosphere, Threshold(12), 0)
	if err != nil {
		t.Fatal(err)
	}
	if deviation(l.Gradient[Prefactor], -l.DThreshold) > 1e-14 {
		t.Errorf("∂T/∂prefactor = %g, ∂T/∂threshold = %g", l.Gradient[Prefactor], l.DThreshold)
	}
	if deviation(l.DThreshold*l.DT, math.Ln10) > 1e-14 {
		t.Errorf("a decade of threshold moves the limit by %g K, slope %g per K", l.DThreshold, l.DT)
	}
}
