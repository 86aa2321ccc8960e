package export

import (
	"math"
	"testing"

	"limsup/eos"
	"limsup/eos/nucleation"
	"limsup/fit"
	"limsup/fit/export/internal/kernel"
)

// The kernel and the model solve the same equations by different searches, each to
// rounding times the condition of the root. Measured over the states below: 1e-11 K and 1e-14
// of an uncertainty. The promise of exported code is 1e-6 K.
const (
	kernelKelvin   = 1e-9
	kernelRelative = 1e-10
)

func TestKernelAgreesWithPredict(t *testing.T) {
	worst, worstU, states, none := 0.0, 0.0, 0, 0
	check := func(t *testing.T, s *subject, c []float64, k int, P float64) {
		t.Helper()
		want := s.at(s.o.Records[k], P)
		if P < s.low || P > s.high {
			want = expected{P: P, Status: kernel.OutOfRange}
		}
		T, u, status := kernel.LimitTemperature(c, P)
		states++
		if status != want.Status {
			t.Errorf("%s %s at %g Pa: status %d, want %d", s.model.Variant.Name(), s.o.Records[k].Key, P, status, want.Status)
			return
		}
		if status != kernel.Fine {
			none++
			if !math.IsNaN(T) || !math.IsNaN(u) {
				t.Errorf("%g ± %g beside status %d", T, u, status)
			}
			return
		}
		worst = math.Max(worst, math.Abs(T-want.T))
		if d := math.Abs(T - want.T); !(d <= kernelKelvin) {
			t.Errorf("%s %s at %g Pa: %.12g K, want %.12g K", s.model.Variant.Name(), s.o.Records[k].Key, P, T, want.T)
		}
		if want.HasU {
			worstU = math.Max(worstU, math.Abs(u/want.U-1))
			if !(math.Abs(u-want.U) <= kernelRelative*want.U) {
				t.Errorf("%s %s at %g Pa: u %.12g K, want %.12g K", s.model.Variant.Name(), s.o.Records[k].Key, P, u, want.U)
			}
		} else if !math.IsNaN(u) {
			t.Errorf("an uncertainty of %g K where the model has none", u)
		}
		checkLines(t, c, &want)
	}
	for _, mc := range allVariants(t) {
		s, d := source(t, &mc)
		for k, f := range d.Fluids {
			for _, P := range mc.pressures() {
				check(t, s, f.Row, k, P)
			}
		}
	}
	t.Logf("%d states, %d of them without a limit; largest deviation %.2g K, of the uncertainty %.2g of its value", states, none, worst, worstU)
	if !testing.Short() && (none < 100 || states-none < 1000) {
		t.Errorf("%d states, %d without a limit: too few of one kind", states, none)
	}
}

// checkLines compares spinodal and saturation.
func checkLines(t *testing.T, c []float64, want *expected) {
	t.Helper()
	T, status := kernel.SpinodalTemperature(c, want.P)
	if (status == kernel.Fine) != want.HasSpinodal || want.HasSpinodal && !(math.Abs(T-want.Spinodal) <= kernelKelvin) {
		t.Errorf("spinodal at %g Pa: %.12g K, status %d; want %.12g K, %v", want.P, T, status, want.Spinodal, want.HasSpinodal)
	}
	T, status = kernel.SaturationTemperature(c, want.P)
	if (status == kernel.Fine) != want.HasSat || want.HasSat && !(math.Abs(T-want.Saturation) <= kernelKelvin) {
		t.Errorf("saturation at %g Pa: %.12g K, status %d; want %.12g K, %v", want.P, T, status, want.Saturation, want.HasSat)
	}
}

// source prepares a case as Write does.
func source(t testing.TB, c *modelCase) (*subject, *sourceData) {
	t.Helper()
	s, err := newSubject(c.model, c.options(t))
	if err != nil {
		t.Fatal(err)
	}
	d, err := s.sourceData()
	if err != nil {
		t.Fatal(err)
	}
	return s, d
}

// allVariants are the cases of the compilers and every combination of options.
func allVariants(t testing.TB) []modelCase {
	out := modelCases(t)
	if testing.Short() {
		return out
	}
	for _, e := range eos.EquationNames() {
		for _, ten := range []fit.Tension{fit.TensionCorrelation, fit.CorrespondingStates, fit.TensionFromParachor} {
			for _, emb := range []nucleation.EmbryoPressure{nucleation.Exact, nucleation.Poynting} {
				for _, kin := range []nucleation.Kinetics{nucleation.Mechanical, nucleation.Chemical, nucleation.Stepwise} {
					m, err := fit.Untuned(fit.Variant{Equation: e, Tension: ten, EmbryoPressure: emb, Kinetics: kin})
					if err != nil {
						t.Fatal(err)
					}
					out = append(out, modelCase{prefix: "x_", model: m, fluids: []string{"n-pentane", "water"}, from: -3e6, to: 4e6})
				}
			}
		}
	}
	return out
}

// The other functions of exported code against the packages that they repeat.
func TestKernelStates(t *testing.T) {
	for _, mc := range modelCases(t) {
		s, d := source(t, &mc)
		for k, f := range d.Fluids {
			q := s.query(s.o.Records[k], 0)
			ph, err := s.model.Physics(&q)
			if err != nil {
				t.Fatal(err)
			}
			T := 0.85 * ph.Model.Tc
			// relative: rounding, times the slope dlnP/dlnT ~ 10 of a vapour pressure
			near := func(what string, got float64, status int, want float64, err error) {
				if (status == kernel.Fine) != (err == nil) || err == nil && !(math.Abs(got-want) <= 1e-10*math.Abs(want)) {
					t.Errorf("%s %s: %s %.14g, status %d; want %.14g, %v", mc.prefix, f.Key, what, got, status, want, err)
				}
			}
			v := 1.3 * ph.Model.B
			P, err := ph.Model.Pressure(T, v)
			got, status := kernel.PressureAt(f.Row, T, v)
			near("pressure", got, status, P, err)
			if ph.Fluid == nil {
				continue
			}
			x, err := ph.Fluid.Flux(T, 2e5)
			got, status = kernel.Log10Flux(f.Row, T, 2e5)
			near("log10 of the flux", got, status, x.LnJ/math.Ln10, err)
			σ, _, err := ph.Fluid.Config().Tension.Sigma(T)
			got, status = kernel.SurfaceTension(f.Row, T)
			near("surface tension", got, status, σ*ph.Fluid.Config().TensionFactor, err)
			got, status = kernel.SaturationPressure(f.Row, T)
			if ph.Variant.Properties == nucleation.FromCorrelation {
				P, _, err = ph.Record.VapourPressure.At(T)
				near("vapour pressure", got, status, P, err)
				continue
			}
			sat, err := ph.Model.Saturation(T)
			near("vapour pressure", got, status, sat.P, err)
		}
	}
}
