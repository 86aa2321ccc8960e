package eos

import (
	"errors"
	"fmt"
	"math"
	"strings"
	"testing"
)

// Whatever is outside a domain gives a typed error that names fluid, equation
// and quantity, and a zero result.
func TestDomainErrors(t *testing.T) {
	m := untuned(t, "soave", pentane)
	nan, inf := math.NaN(), math.Inf(1)
	first := func(v float64, err error) (float64, error) { return v, err }
	of := map[string]func(float64) (float64, error){
		"saturation pressure": func(T float64) (float64, error) { s, err := m.Saturation(T); return first(s.P, err) },
		"spinodal":            func(T float64) (float64, error) { l, v, err := m.Spinodal(T); return l.P + v.P, err },
		"liquid volume":       func(T float64) (float64, error) { return m.Liquid(T, 1e5) },
		"vapour volume":       func(T float64) (float64, error) { return m.Vapour(T, 1e5) },
		"saturated densities": func(T float64) (float64, error) { ln, d, err := m.DensityDifference(T); return ln + d, err },
		"pressure":            func(T float64) (float64, error) { return m.Pressure(T, 1e-3) },
		"pressure derivatives": func(T float64) (float64, error) {
			a, b, c, err := m.PressureDerivatives(T, 1e-3)
			return a + b + c, err
		},
		"fugacity":                    func(T float64) (float64, error) { return m.LnFugacity(T, 1e-3) },
		"isotherm":                    func(T float64) (float64, error) { i, err := m.Isotherm(T); return i.T, err },
		"chemical potential":          func(T float64) (float64, error) { return m.ChemicalPotential(T, 1e-3) },
		"volume: pressure":            func(v float64) (float64, error) { return m.Pressure(300, v) },
		"volume: fugacity":            func(v float64) (float64, error) { return m.LnFugacity(300, v) },
		"volume: chemical potential":  func(v float64) (float64, error) { return m.ChemicalPotential(300, v) },
		"volume: derivatives":         func(v float64) (float64, error) { a, b, c, err := m.PressureDerivatives(300, v); return a + b + c, err },
		"volume: isotherm":            func(v float64) (float64, error) { i, _ := m.Isotherm(300); p, err := i.At(v); return p.P + p.Mu, err },
		"volume: above Tc":            func(v float64) (float64, error) { i, _ := m.Isotherm(600); p, err := i.At(v); return p.P + p.Mu, err },
		"saturation temperature":      func(P float64) (float64, error) { s, err := m.SaturationTemperature(P); return s.T, err },
		"liquid spinodal temperature": func(P float64) (float64, error) { s, err := m.LiquidSpinodalTemperature(P); return s.T, err },
		"vapour spinodal temperature": func(P float64) (float64, error) { s, err := m.VapourSpinodalTemperature(P); return s.T, err },
		"pressure of liquid":          func(P float64) (float64, error) { return m.Liquid(300, P) },
		"pressure of vapour":          func(P float64) (float64, error) { return m.Vapour(300, P) },
	}
	lowest, _, err := m.Spinodal(m.MinT)
	if err != nil {
		t.Fatal(err)
	}
	subcritical := []float64{m.Tc, 1.1 * m.Tc, 0, -1, 0.9999 * m.MinT, nan, inf, -inf, 1e308, 5e-324}
	anyT := []float64{0, -300, nan, inf, -inf, 1e308, 5e-324, 0.001 * m.Tc}
	volume := []float64{m.B, 0.5 * m.B, 0, -1, nan, inf, -inf, math.MaxFloat64}
	tests := map[string][]float64{
		"saturation pressure": subcritical, "spinodal": subcritical, "liquid volume": subcritical, "vapour volume": subcritical,
		"saturated densities": subcritical, "chemical potential": subcritical,
		"pressure": anyT, "pressure derivatives": anyT, "fugacity": anyT, "isotherm": anyT,
		"volume: pressure": volume, "volume: fugacity": volume, "volume: chemical potential": volume, "volume: derivatives": volume,
		"volume: isotherm": volume, "volume: above Tc": volume,
		"saturation temperature":      {m.Pc, 1.01 * m.Pc, 0, -1e5, nan, inf, -inf},
		"liquid spinodal temperature": {m.Pc, 1.01 * m.Pc, 1.0001 * lowest.P, nan, inf, -inf},
		"vapour spinodal temperature": {m.Pc, 1.01 * m.Pc, 0, -1e5, nan, inf, -inf},
		"pressure of liquid":          {nan, inf, -inf, 1e200},
		"pressure of vapour":          {nan, inf, -inf, 0, -1e5, 5e-324},
	}
	for name, args := range tests {
		for _, arg := range args {
			got, err := of[name](arg)
			var domain *DomainError
			if !errors.As(err, &domain) {
				t.Errorf("%s at %g: %g, %v; want a *DomainError", name, arg, got, err)
				continue
			}
			if got != 0 {
				t.Errorf("%s at %g: result %g beside the error", name, arg, got)
			}
			if domain.Value != arg && !(math.IsNaN(arg) && math.IsNaN(domain.Value)) {
				t.Errorf("%s at %g: error about the value %g", name, arg, domain.Value)
			}
			if text := err.Error(); !strings.Contains(text, " of n-pentane (soave): ") || strings.ToLower(text[:1]) != text[:1] {
				t.Errorf("%s at %g: text %q", name, arg, text)
			}
			if domain.Value > domain.Lo && domain.Value < domain.Hi {
				t.Errorf("%s: %g is inside the stated %g to %g", name, arg, domain.Lo, domain.Hi)
			}
		}
	}
	if len(tests) != len(of) {
		t.Errorf("%d of %d quantities tested", len(tests), len(of))
	}
}

// Soave's α falls to zero at √Tr = 1 + 1/m and would rise again beyond; there
// a/T no longer falls, and the model says so instead of going on.
func TestZeroOfAlpha(t *testing.T) {
	e := Equation{Name: "m = 1", D1: 1, Alpha: AlphaSoave, Slope: [3]float64{1, 0, 0}}
	m, err := NewModel(e, pentane, e.Untuned())
	if err != nil {
		t.Fatal(err)
	}
	zero := 4 * pentane.CriticalT
	if p, err := m.Pressure(zero*(1-1e-12), 1e-3); err != nil || !(p > 0) {
		t.Errorf("just below: %g, %v", p, err)
	}
	for _, T := range []float64{zero, 1.5 * zero} {
		var d *DomainError
		if _, _, _, err := m.PressureDerivatives(T, 1e-3); !errors.As(err, &d) || d.Hi != zero {
			t.Errorf("at %g K: %v, want a *DomainError up to %g K", T, err, zero)
		}
	}
}

func TestPhaseErrors(t *testing.T) {
	m := untuned(t, "peng-robinson", pentane)
	l, v, err := m.Spinodal(400)
	if err != nil {
		t.Fatal(err)
	}
	_, errLiquid := m.Liquid(400, l.P-1)
	_, errVapour := m.Vapour(400, v.P+1)
	for _, tt := range []struct {
		err         error
		phase, side string
		spinodal    float64
	}{{errLiquid, "liquid", "below", l.P}, {errVapour, "vapour", "above", v.P}} {
		var phase *PhaseError
		if !errors.As(tt.err, &phase) || phase.Phase != tt.phase || phase.Spinodal != tt.spinodal || phase.T != 400 {
			t.Errorf("%s: %v (%#v)", tt.phase, tt.err, phase)
			continue
		}
		want := fmt.Sprintf("%s of n-pentane (peng-robinson): no %s at 400 K and %.10g Pa: the pressure is %s the %s spinodal, %.10g Pa",
			tt.phase, tt.phase, phase.P, tt.side, tt.phase, tt.spinodal)
		if tt.err.Error() != want {
			t.Errorf("text %q, want %q", tt.err, want)
		}
	}
	if _, err := m.Liquid(400, l.P); err == nil {
		t.Error("a liquid at its spinodal")
	}
}

func TestParameterErrors(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	good := pentane
	with := func(change func(*Substance)) Substance { s := good; change(&s); return s }
	type row struct {
		what string
		e    string
		s    Substance
		u    Tuning
		name string
	}
	var rows []row
	for _, v := range []float64{0, -1, nan, inf, -inf} {
		rows = append(rows,
			row{"Tc", "soave", with(func(s *Substance) { s.CriticalT = v }), Tuning{1, 1, 1}, "critical temperature in K"},
			row{"Pc", "soave", with(func(s *Substance) { s.CriticalP = v }), Tuning{1, 1, 1}, "critical pressure in Pa"},
			row{"attraction", "soave", good, Tuning{v, 1, 1}, "attraction"},
			row{"covolume", "soave", good, Tuning{1, v, 1}, "covolume"},
		)
	}
	for _, v := range []float64{nan, inf, -inf} {
		rows = append(rows,
			row{"ω", "soave", with(func(s *Substance) { s.Acentric = v }), Tuning{1, 1, 1}, "acentric factor"},
			row{"slope", "soave", good, Tuning{1, 1, v}, "slope"},
		)
	}
	// An a/T that rises with T has no critical point.
	rows = append(rows,
		row{"a ∝ T", "van-der-waals", good, Tuning{1, 1, -1}, "slope"},
		row{"a ∝ T²", "berthelot", good, Tuning{1, 1, -2}, "slope"},
		row{"a ∝ T", "redlich-kwong", good, Tuning{1, 1, -2}, "slope"},
		row{"m < −1", "soave", good, Tuning{1, 1, -1.5}, "slope"},
		// n → −1: a/T hardly falls, and its critical value lies at no temperature.
		row{"a ∝ T^0.999", "van-der-waals", good, Tuning{1.3, 0.7, -0.999}, "implied critical temperature in K"},
		// m = −0.94: a/T falls, but only to m² of its value at Tc·attraction/covolume.
		row{"no critical τ", "soave", with(func(s *Substance) { s.Acentric = 0.3 }), Tuning{1.3, 0.7, -1}, "slope"},
	)
	for _, r := range rows {
		e, err := EquationByName(r.e)
		if err != nil {
			t.Fatal(err)
		}
		m, err := NewModel(e, r.s, r.u)
		var p *ParameterError
		if !errors.As(err, &p) || p.Name != r.name || p.Want == "" {
			t.Errorf("%s (%s): %v, want a *ParameterError about %s", r.what, r.e, err, r.name)
			continue
		}
		if text := err.Error(); !strings.HasPrefix(text, "n-pentane ("+r.e+"): "+r.name+" = ") {
			t.Errorf("%s: text %q", r.what, text)
		}
		if m.B != 0 || m.Tc != 0 {
			t.Errorf("%s: a model beside the error: %+v", r.what, m)
		}
	}
	for _, d := range [][2]float64{{-1, 0}, {0, -1}, {nan, 0}, {0, inf}, {2e3, 0}} {
		var p *ParameterError
		_, err := NewForm(d[0], d[1])
		if !errors.As(err, &p) {
			t.Errorf("δ = %v: %v", d, err)
		}
		if _, err = NewModel(Equation{Name: "mine", D1: d[0], D2: d[1], Alpha: AlphaPower}, good, Tuning{1, 1, 0}); !errors.As(err, &p) || p.Fluid != good.Name || p.Equation != "mine" {
			t.Errorf("model with δ = %v: %v", d, err)
		}
	}
	var p *ParameterError
	if _, err := NewModel(Equation{Name: "mine", Alpha: "cubic"}, good, Tuning{1, 1, 1}); !errors.As(err, &p) || !strings.Contains(err.Error(), "cubic") {
		t.Errorf("unknown α: %v", err)
	}
}

func TestUnknownEquation(t *testing.T) {
	_, err := Untuned("ideal-gas", pentane)
	var u *UnknownEquationError
	if !errors.As(err, &u) || u.Name != "ideal-gas" || len(u.Known) != len(Equations()) {
		t.Fatalf("%v", err)
	}
	for _, name := range append(EquationNames(), "ideal-gas") {
		if !strings.Contains(err.Error(), name) {
			t.Errorf("%q does not name %s", err, name)
		}
	}
}

func TestConvergenceErrorText(t *testing.T) {
	err := &ConvergenceError{"n-pentane", "soave", "saturation pressure", 400, "K", 1, 2, 1e-3, 60}
	want := "saturation pressure of n-pentane (soave) at 400 K: not converged after 60 steps, bracket 1 to 2, residual 0.001"
	if err.Error() != want {
		t.Errorf("%q, want %q", err, want)
	}
}

// The reduced functions refuse what leaves the range of numbers; no NaN comes
// back and nothing not finite passes for a root.
func TestFormRefusals(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	values := []float64{nan, inf, -inf, 0, -1, 1e-320, 1e300, -1e300, 0.01, 5}
	for _, e := range Equations() {
		f, err := NewForm(e.D1, e.D2)
		if err != nil {
			t.Fatal(err)
		}
		for _, tau := range append(values, f.TauC, 1.5*f.TauC, 8*f.TauC) {
			for _, p := range values {
				for _, guess := range []float64{0, nan, inf, 1.5, 1e5} {
					roots := map[string]func() (float64, bool){
						"liquid":         func() (float64, bool) { return f.Liquid(p, tau, guess) },
						"vapour":         func() (float64, bool) { return f.Vapour(p, tau, guess) },
						"vapour of ln f": func() (float64, bool) { return f.VapourOfFugacity(p, tau, guess) },
						"liquid of ln f": func() (float64, bool) { return f.LiquidOfFugacity(p, tau) },
					}
					for name, root := range roots {
						x, ok := root()
						if math.IsNaN(x) || ok && !(x > 1 && x <= math.MaxFloat64) || ok && (math.IsNaN(tau) || math.IsNaN(p) || math.IsInf(tau, 0) || math.IsInf(p, 0)) {
							t.Errorf("%s: %s(%g, τ=%g, guess %g) = %g, %v", e.Name, name, p, tau, guess, x, ok)
						}
					}
				}
			}
			if c, ok := f.Saturate(tau); ok && !(tau > f.TauC && c.Xv <= math.MaxFloat64) {
				t.Errorf("%s: coexistence at τ = %g: %+v", e.Name, tau, c)
			}
			if tau <= f.TauC && (f.SpinodalLiquid(tau) != f.XC || f.SpinodalVapour(tau) != f.XC) {
				t.Errorf("%s: spinodal at τ = %g", e.Name, tau)
			}
		}
	}
}
