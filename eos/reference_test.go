package eos

import (
	"fmt"
	"math"
	"testing"
)

// The published numbers that the form must reproduce.
func TestCriticalConstants(t *testing.T) {
	tests := []struct {
		equation     string
		omegaA, zc   float64
		omegaB       float64
		tolA, tolB   float64 // half a unit of the last digit given
		exact        bool
		sourceOfThis string
	}{
		{"van-der-waals", 27. / 64, 3. / 8, 1. / 8, 4 * eps, 4 * eps, true, "J. D. van der Waals, thesis, 1873 (algebra)"},
		{"berthelot", 27. / 64, 3. / 8, 1. / 8, 4 * eps, 4 * eps, true, "same volume dependence as van der Waals"},
		// Ω_a = 1/(9(∛2−1)), Ω_b = (∛2−1)/3 (from memory; also the printed decimals).
		{"redlich-kwong", 1 / (9 * (math.Cbrt(2) - 1)), 1. / 3, (math.Cbrt(2) - 1) / 3, 8 * eps, 8 * eps, true, "algebra"},
		{"redlich-kwong", 0.4278, 1. / 3, 0.0867, 5e-4, 1e-4, false, "Redlich and Kwong, Chem. Rev. 44 (1949) 233 (from memory; not the nearest decimals"},
		{"soave", 0.42747, 1. / 3, 0.08664, 2e-5, 1e-6, false, "Soave, Chem. Eng. Sci. 27 (1972) 1197 (from memory)"},
		{"peng-robinson", 0.45724, 0.3074, 0.07780, 1e-5, 5e-6, false, "Peng and Robinson, Ind. Eng. Chem. Fundam. 15 (1976) 59 (from memory)"},
		{"peng-robinson", 0.45723552892, 0.30740130869, 0.077796073904, 5e-12, 5e-13, false, "eleven digits, as later prints give them (from memory)"},
	}
	for _, tt := range tests {
		t.Run(tt.equation, func(t *testing.T) {
			m := untuned(t, tt.equation, pentane)
			within(t, "Ω_a, "+tt.sourceOfThis, m.OmegaA(), tt.omegaA, tt.tolA)
			within(t, "Ω_b, "+tt.sourceOfThis, m.OmegaB(), tt.omegaB, tt.tolB)
			// Z_c = p_c·x_c
			tolZ := 5e-5
			if tt.exact {
				tolZ = 8 * eps
			}
			within(t, "Z_c", m.PC*m.XC, tt.zc, tolZ)
			// An untuned model reproduces the constants of its fluid.
			within(t, "Tc", m.Tc, pentane.CriticalT, 4*eps*pentane.CriticalT)
			within(t, "Pc", m.Pc, pentane.CriticalP, 8*eps*pentane.CriticalP)
		})
	}
}

// At the critical point both derivatives vanish, for any δ₁, δ₂. Tolerance: the
// terms that cancel, with 10ε for their rounding and for that of x_c.
func TestCriticalPoint(t *testing.T) {
	for _, d := range [][2]float64{{0, 0}, {1, 0}, {0, 1}, {1 + math.Sqrt2, 1 - math.Sqrt2}, {-0.9, 0.5}, {3, 2}, {999, -0.5}, {-0.99, -0.99}} {
		f, err := NewForm(d[0], d[1])
		if err != nil {
			t.Fatal(err)
		}
		y := f.XC - 1
		within(t, fmt.Sprintf("%v ∂p/∂x·y²", d), f.PressureSlope(f.XC, f.TauC)*y*y, 0, 20*eps)
		within(t, fmt.Sprintf("%v ∂²p/∂x²·y³", d), f.PressureCurvature(f.XC, f.TauC)*y*y*y, 0, 60*eps)
		s := slow{d1: d[0], d2: d[1]}
		within(t, fmt.Sprintf("%v x_c", d), f.XC, s.critical(), 8*eps*f.XC)
	}
}

// The spinodal of the liquid at zero pressure, as a fraction of Tc. With x₀ = 1 +
// √((1+δ₁)(1+δ₂)) and τ₀ = q(x₀)/(x₀−1):
// van der Waals x₀ = 2, τ₀ = 4, so Tr = τ_c/τ₀ = 27/32; Berthelot (Tr²) √(27/32);
// Redlich–Kwong x₀ = 1+√2, Tr = (τ_c/τ₀)^(2/3) with
// τ₀ = (1+√2)(2+√2)/√2 = 3+2√2.
func TestZeroPressureSpinodal(t *testing.T) {
	tauRK := 1 / (3 * (math.Cbrt(2) - 1) * (math.Cbrt(2) - 1)) // Ω_a/Ω_b
	tests := []struct {
		equation string
		tr, tol  float64
	}{
		{"van-der-waals", 27. / 32, 8 * eps},
		{"berthelot", math.Sqrt(27. / 32), 8 * eps},
		{"redlich-kwong", math.Pow(tauRK/(3+2*math.Sqrt2), 2./3), 8 * eps},
		{"redlich-kwong", 0.895, 5e-4}, // common practice, three digits
	}
	for _, tt := range tests {
		m := untuned(t, tt.equation, pentane)
		within(t, tt.equation+" closed form", m.ZeroPressureSpinodalTemperature()/m.Tc, tt.tr, tt.tol)
		s, err := m.LiquidSpinodalTemperature(0)
		if err != nil {
			t.Fatal(err)
		}
		within(t, tt.equation+" search", s.T/m.Tc, tt.tr, tt.tol)
	}
	for _, m := range tunedModels(t) {
		s, err := m.LiquidSpinodalTemperature(0)
		if err != nil {
			t.Fatal(err)
		}
		within(t, m.Equation, s.T, m.ZeroPressureSpinodalTemperature(), 8*eps*s.T)
		within(t, m.Equation+" x₀", s.V/m.B, 1+math.Sqrt((1+m.D1)*(1+m.D2)), 1e-14)
	}
}

// Exact van der Waals coexistence. Source: parametric closed form, J. Lekner, Am.
// J. Phys. 50 (1982) 161 (citation from memory), evaluated with 60 digits at half
// the entropy of evaporation over R, y = Δs/(2R), and confirmed there by equal
// pressure and equal areas to 1e-58. Reduced by Tc, Pc, Vc.
//
// relP is the tolerance of the pressure, relV that of the volumes and the slope.
// Rounding of T alone moves P by ε·dlnP/dlnT (4 to 16); rounding of the terms of F
// (up to 2.3 near the critical point), twice for each phase, moves ln P by
// 4ε·2.3/(Z_v−Z_l), with Z_v−Z_l = y/2 there, and the volumes by that over
// −v∂lnP/∂v = 3(v−1)²: 1.3e-4 at y = 0.01, 1.2e-3 at 0.03.
var vdwCoexistence = []struct{ y, Tr, Pr, Vlr, Vvr, relP, relV float64 }{
	{0.01, 0.99998888902222073919, 0.99995555668146004816, 0.99337315620114843093, 1.006706845094100839, 4.1e-13, 3.1e-9},
	{0.03, 0.99990001079891895913, 0.9996000911843770998, 0.98035525196747228204, 1.0203648529549601014, 1.4e-13, 1.2e-10},
	{0.5, 0.9730329751714366, 0.8956039209419885, 0.7479349017151386, 1.4603372427162148, 2e-14, 2e-14},
	{1, 0.9008803313869486, 0.6497051294405471, 0.6044767346411698, 2.3368271364518032, 5e-15, 5e-15},
	{2, 0.7022603101113722, 0.2037780413426894, 0.4681172756632277, 7.6922872387195677, 5e-15, 5e-15},
	{3, 0.5298567386954960, 0.0407417476693318, 0.4137885454081948, 32.791282470896815, 5e-15, 5e-15},
	{8, 0.20999934189336854967, 2.6467619101323622456e-6, 0.35714276795682991696, 211573.60082853072459, 1e-14, 1e-14},
}

func TestVanDerWaalsClosedForm(t *testing.T) {
	m := untuned(t, "van-der-waals", Substance{Name: "unit", CriticalT: 1, CriticalP: 1})
	vc := m.XC * m.B
	for _, tt := range vdwCoexistence {
		t.Run(fmt.Sprintf("Tr=%.4f", tt.Tr), func(t *testing.T) {
			got, err := m.Saturation(tt.Tr)
			if err != nil {
				t.Fatal(err)
			}
			t.Logf("P %.1e, Vl %.1e, Vv %.1e", deviation(got.P, tt.Pr), deviation(got.Vl/vc, tt.Vlr), deviation(got.Vv/vc, tt.Vvr))
			within(t, "Pr", got.P, tt.Pr, tt.relP*tt.Pr)
			within(t, "Vl/Vc", got.Vl/vc, tt.Vlr, tt.relV*tt.Vlr)
			within(t, "Vv/Vc", got.Vv/vc, tt.Vvr, tt.relV*tt.Vvr)
			// Clapeyron: dP/dT = Δs/Δv with Δs = 2Ry.
			clapeyron := 2 * GasConstant * tt.y / ((tt.Vvr - tt.Vlr) * vc)
			within(t, "dP/dT", got.DPDT, clapeyron, 2*tt.relV*clapeyron)
		})
	}
}

// 315 states computed by a separate implementation (testdata/README.md).
//
// Tolerances: the file has ten digits (rel. 5e-10), and 1e-8 K for spinodal
// temperatures of 120 K and more (1e-10). Its own solver's error adds to that
// where the state is ill-conditioned: a volume moves by δP/(∂P/∂v).
func TestSeparateImplementation(t *testing.T) {
	subs := substances(t)
	worst := map[string]float64{}
	check := func(r map[string]string, column string, got, rel float64) {
		t.Helper()
		want := number(t, r[column])
		d := deviation(got, want)
		worst[column] = math.Max(worst[column], d)
		if !(d <= rel) {
			t.Errorf("%s %s T=%s P=%s: %s = %.12g, want %.12g (%.1e, allowed %.1e)",
				r["fluid"], r["equation"], r["T_K"], r["P_Pa"], column, got, want, d, rel)
		}
	}
	bubbles := 0
	for _, r := range csvTable(t, "cubic_checks.csv") {
		m := untuned(t, r["equation"], subs[r["fluid"]])
		T, P := number(t, r["T_K"]), number(t, r["P_Pa"])
		s, err := m.Saturation(T)
		if err != nil {
			t.Fatal(err)
		}
		l, v, err := m.Spinodal(T)
		if err != nil {
			t.Fatal(err)
		}
		check(r, "psat_Pa", s.P, 1e-9)
		check(r, "liquid_spinodal_Pa", l.P, 1e-9)
		check(r, "vapour_spinodal_Pa", v.P, 1e-9)
		check(r, "v_liquid_sat_m3_mol", s.Vl, 1e-9)
		check(r, "v_vapour_sat_m3_mol", s.Vv, 1e-9)
		st, err := m.LiquidSpinodalTemperature(P)
		if err != nil {
			t.Fatal(err)
		}
		check(r, "spinodal_T_K", st.T, 1e-10)
		if r["bubble_exact_Pa"] != "" {
			bubbles++
			k := GasConstant * T / m.B
			tau, _ := m.Tau(T)
			xl, ok := m.Form.Liquid(P/k, tau, 0)
			xv, ok2 := m.VapourOfFugacity(m.Form.LnFugacity(xl, tau), tau, 0)
			if !ok || !ok2 {
				t.Errorf("%v: no vapour in equilibrium with the liquid", r)
				continue
			}
			check(r, "bubble_exact_Pa", m.Form.Pressure(xv, tau)*k, 1e-9)
		}
	}
	if bubbles < 100 {
		t.Errorf("only %d states with a bubble pressure", bubbles)
	}
	t.Logf("largest relative deviations: %v", worst)
}

// Published equations against the reference equations of state of three alkanes
// (testdata/README.md), 0.6 to 0.98 Tc. Common practice: the equations with a
// fitted α(Tr, ω) give vapour pressures within a few percent, van der Waals is
// out by a factor at low temperature, Redlich–Kwong in between.
//
// Measured here: soave 1.4, 1.7, 1.9 % at most (propane, n-pentane, n-octane),
// peng-robinson 0.7, 0.7, 1.7 %, redlich-kwong 31, 93, 246 %, van-der-waals by
// factors of 5.5, 8.2 and 14.7. The bounds are those of practice: 3 %, and a factor 3.
func TestVapourPressureOfAlkanes(t *testing.T) {
	subs := substances(t)
	worst := map[string]map[string]float64{}
	n := 0
	for _, r := range csvTable(t, "vapour_pressure.csv") {
		T, P := number(t, r["T_K"]), 1e3*number(t, r["P_kPa"])
		for _, e := range EquationNames() {
			m := untuned(t, e, subs[r["fluid"]])
			s, err := m.Saturation(T)
			if err != nil {
				t.Fatal(err)
			}
			if worst[e] == nil {
				worst[e] = map[string]float64{}
			}
			worst[e][r["fluid"]] = math.Max(worst[e][r["fluid"]], deviation(s.P, P))
			n++
		}
	}
	if n != 180 {
		t.Errorf("%d states compared, want 180", n)
	}
	for _, fluid := range []string{"propane", "n-pentane", "n-octane"} {
		for _, e := range []string{"soave", "peng-robinson"} {
			if !(worst[e][fluid] < 0.03) {
				t.Errorf("%s of %s: vapour pressure off by %.3g, want below 0.03", e, fluid, worst[e][fluid])
			}
		}
		if rk, w := worst["redlich-kwong"][fluid], worst["van-der-waals"][fluid]; !(w > 2 && w > 3*rk && rk > 0.1) { // off by 2 is a factor of 3
			t.Errorf("%s: van der Waals off by %.3g, Redlich–Kwong by %.3g, want above 2 and between", fluid, w, rk)
		}
	}
	for _, e := range EquationNames() {
		t.Logf("%-14s largest deviation of the vapour pressure: %v", e, worst[e])
	}
}
