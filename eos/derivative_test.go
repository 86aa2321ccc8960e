package eos

import (
	"fmt"
	"math"
	"testing"
)

// Analytic derivatives against differences of fourth order (see fivePoint) at
// ordinary and awkward states. The step is 1e-3 of the distance over which the
// function changes; the truncation error is then of the order 1e-12/30 times the
// ratio of its fifth to its first derivative (6!/30 = 24 for p = 1/x², 7!/30 = 168 for
// its slope), and rounding 1.5ε/1e-3 = 3e-13, each relative to the terms that make up
// the function, not to a sum that may cancel.

func TestFormDerivatives(t *testing.T) {
	forms := map[string][2]float64{
		"van der Waals": {0, 0}, "Redlich–Kwong": {1, 0}, "Peng–Robinson": {1 + math.Sqrt2, 1 - math.Sqrt2}, "user": {-0.4, 2.5},
	}
	for name, d := range forms {
		f, err := NewForm(d[0], d[1])
		if err != nil {
			t.Fatal(err)
		}
		for _, ratio := range []float64{0.7, 1.0002, 1.2, 3, 12} { // supercritical to Tr ≈ 0.2
			tau := ratio * f.TauC
			xs := []float64{1.02, 1.3, 2, f.XC, 1.01 * f.XC, 8, 1e3, 1e9}
			if ratio > 1 {
				xs = append(xs, f.SpinodalLiquid(tau), f.SpinodalVapour(tau), 0.999*f.SpinodalLiquid(tau), 1.001*f.SpinodalVapour(tau))
			}
			for _, x := range xs {
				at := fmt.Sprintf("%s τ/τc=%g x=%.6g: ", name, ratio, x)
				y := x - 1
				h := 1e-3 * math.Min(y, math.Min(x+d[0], x+d[1]))
				// sizes of the two terms of p, p′·y and p″·y² to rounding
				size := 1/y + tau/f.q(x)
				p := func(x float64) float64 { return f.Pressure(x, tau) }
				within(t, at+"∂p/∂x·y", y*f.PressureSlope(x, tau), y*slope(p, x, h), 3e-11*size)
				p1 := func(x float64) float64 { return f.PressureSlope(x, tau) }
				within(t, at+"∂²p/∂x²·y²", y*y*f.PressureCurvature(x, tau), y*y*slope(p1, x, h), 2e-10*size)
				lnf := func(x float64) float64 { return f.LnFugacity(x, tau) }
				v, dv := f.fugacityAndSlope(x, tau)
				sizeF := 1/y + math.Abs(math.Log(y)) + tau*(x/f.q(x)+f.AttractionIntegral(x))
				within(t, at+"F", v, lnf(x), 4*eps*sizeF)
				within(t, at+"∂F/∂x·y", y*dv, y*slope(lnf, x, h), 1e-11*sizeF+3e-11*size)
				within(t, at+"x∂p/∂x·y", y*dv, y*x*f.PressureSlope(x, tau), 8*eps*x*size)
				within(t, at+"q·∂I/∂x", f.q(x)*slope(f.AttractionIntegral, x, h), -1, 1e-10)
				pr, dp := f.pressureOfDensity(1/x, tau)
				within(t, at+"p(1/x)", pr, p(x), 8*eps*size*(1+x/y))
				within(t, at+"∂p/∂(1/x)", dp, -x*x*f.PressureSlope(x, tau), 16*eps*x*x*size/y*(1+x/y))
				// along the spinodal τ(x); scale: the terms of dlnτ/dx
				lnTau := func(x float64) float64 { return math.Log(f.spinodalTau(x)) }
				within(t, at+"dlnτ/dlnx", y*f.spinodalTauSlope(x), y*slope(lnTau, x, h), 1e-10*(4+math.Abs(lnTau(x))))
			}
		}
		// κ = d²lnτ/dx² at x_c
		within(t, name+" κ", f.kappa, slope(f.spinodalTauSlope, f.XC, 1e-3*(f.XC-1)), 1e-9*f.kappa)
	}
}

func TestCoexistenceDerivatives(t *testing.T) {
	for _, m := range tunedModels(t) {
		for _, tr := range []float64{0.25, 0.4, 0.6, 0.8, 0.9, 0.97, 0.999, 0.9999} {
			T := tr * m.Tc
			at := fmt.Sprintf("%s Tr=%g: ", m.Equation, tr)
			tau, _ := m.Tau(T)
			c, ok := m.Saturate(tau)
			if !ok {
				t.Errorf("%sno coexistence", at)
				continue
			}
			// The line ends at τ_c, where volumes go as √(τ−τ_c): the step is 1/50 of
			// the distance there (truncation 1e-6/30·|f⁽⁵⁾|/|f′|, up to 105/16 for a
			// square root: 1e-6), and 1/1000 of τ in the cold.
			e := tau/m.TauC - 1
			h := tau * math.Min(1e-3, 0.02*e)
			get := func(pick func(Coexistence) float64) func(float64) float64 {
				return func(tau float64) float64 {
					c, ok := m.Saturate(tau)
					if !ok {
						t.Errorf("%sno coexistence at τ = %g", at, tau)
					}
					return pick(c)
				}
			}
			// Rounding: ln p is known to noise = 4ε·|terms of F|/(Z_v−Z_l), the volumes to
			// that over their compressibility; the difference divides it by h.
			terms := 2 + math.Abs(m.Form.LnFugacity(c.Xl, tau)) + tau
			noise := 4 * eps * terms / (c.P * (c.Xv - c.Xl)) * tau / h
			lnp := slope(get(func(c Coexistence) float64 { return math.Log(c.P) }), tau, h)
			// In the cold ln p ~ −τ: its fifth derivative is small, but not that of ln x_v.
			within(t, at+"dlnp/dlnτ", tau*c.DP/c.P, tau*lnp, 2e-6*math.Abs(tau*lnp)*math.Min(1, 1e-3+e/(e+1)*1e-3)+noise)
			for _, ph := range []struct {
				name  string
				x, dx float64
				pick  func(Coexistence) float64
			}{
				{"x_l", c.Xl, c.DXl, func(c Coexistence) float64 { return c.Xl }},
				{"ln x_v", c.Xv, c.DXv / c.Xv, func(c Coexistence) float64 { return math.Log(c.Xv) }},
			} {
				d := slope(get(ph.pick), tau, h)
				stiff := c.P / math.Abs((ph.x-1)*m.PressureSlope(ph.x, tau)) // compressibility
				within(t, at+"d"+ph.name+"/dlnτ", tau*ph.dx, tau*d, 2e-6*math.Abs(tau*d)+noise*(1+stiff)*ph.x)
			}
			s, err := m.Saturation(T)
			if err != nil {
				t.Fatal(err)
			}
			// dP/dT by differences and by Clapeyron: Δs = −(∂µ/∂T)_v differences aside,
			// Δs = ∫(∂P/∂T)_v dv = R ln[(v_v−b)/(v_l−b)] + (a′)·ΔI, a′ from a difference.
			dT := T * math.Min(1e-3, 0.02*(1-tr))
			lnP := func(T float64) float64 {
				s, err := m.Saturation(T)
				if err != nil {
					t.Errorf("%s%v", at, err)
				}
				return math.Log(s.P)
			}
			dlnP := slope(lnP, T, dT)
			within(t, at+"dlnP/dlnT", T*s.DPDT/s.P, T*dlnP, 1e-8*T*dlnP+noise)
			aSlope := slope(m.Attraction, T, 1e-3*T)
			xl, xv := s.Vl/m.B, s.Vv/m.B
			ds := GasConstant*math.Log((xv-1)/(xl-1)) - aSlope/m.B*(m.AttractionIntegral(xl)-m.AttractionIntegral(xv))
			// Δs loses digits with Δv → 0: 4ε of its terms over Δs
			tol := 1e-9 + 8*eps*(1+noise*h/tau/eps)*5*GasConstant/ds
			within(t, at+"Clapeyron", s.DPDT*(s.Vv-s.Vl), ds, tol*ds)

			ln, dln, err := m.DensityDifference(T)
			if err != nil {
				t.Fatal(err)
			}
			within(t, at+"ln(1/x_l−1/x_v)", ln, math.Log(1/xl-1/xv), 4*eps*xv*xl/(xv-xl))
			density := slope(func(tau float64) float64 {
				c, _ := m.Saturate(tau)
				return math.Log(1/c.Xl - 1/c.Xv)
			}, tau, h)
			within(t, at+"dln(Δρ)/dlnτ", dln, tau*density, 2e-6*math.Abs(tau*density)+1e3*noise)
		}
	}
}

func TestModelDerivatives(t *testing.T) {
	for _, m := range tunedModels(t) {
		for _, tr := range []float64{0.25, 0.6, 0.9, 0.9999, 1.3} {
			T := tr * m.Tc
			at := fmt.Sprintf("%s Tr=%g: ", m.Equation, tr)
			tau, dlntau := m.Tau(T)
			within(t, at+"Tau·T", dlntau*T, T*slope(func(T float64) float64 { tau, _ := m.Tau(T); return math.Log(tau) }, T, 1e-3*T), 1e-10)
			within(t, at+"temperature", m.temperature(tau), T, 8*eps*T)
			within(t, at+"a/(bRT)", m.Attraction(T)/(m.B*GasConstant*T), tau, 4*eps*tau)
			for _, v := range []float64{1.1 * m.B, 1.5 * m.B, m.XC * m.B, 40 * m.B, 1e5 * m.B} {
				p := func(v float64) float64 { p, _ := m.Pressure(T, v); return p }
				dv, dvdv, dT, err := m.PressureDerivatives(T, v)
				if err != nil {
					t.Fatal(err)
				}
				h := 1e-3 * (v - m.B)
				size := GasConstant*T/(v-m.B) + m.Attraction(T)/(m.B*m.B*m.q(v/m.B))
				within(t, at+"∂P/∂v", (v-m.B)*dv, (v-m.B)*slope(p, v, h), 3e-11*size)
				p1 := func(v float64) float64 { dv, _, _, _ := m.PressureDerivatives(T, v); return dv }
				within(t, at+"∂²P/∂v²", (v-m.B)*(v-m.B)*dvdv, (v-m.B)*(v-m.B)*slope(p1, v, h), 2e-10*size)
				pT := func(T float64) float64 { p, _ := m.Pressure(T, v); return p }
				within(t, at+"∂P/∂T", T*dT, T*slope(pT, T, 1e-3*T), 1e-10*size)
			}
		}
	}
}

// nudged is the model with one factor of its tuning changed.
func nudged(t *testing.T, e Equation, u Tuning, which int, by float64) Model {
	t.Helper()
	*[]*float64{&u.Attraction, &u.Covolume, &u.Slope}[which] += by
	m, err := NewModel(e, pentane, u)
	if err != nil {
		t.Fatal(err)
	}
	return m
}

func TestTuningDerivatives(t *testing.T) {
	for _, e := range Equations() {
		u := Tuning{Attraction: 0.95, Covolume: 1.07, Slope: 0.9}
		m, err := NewModel(e, pentane, u)
		if err != nil {
			t.Fatal(err)
		}
		if m.Tuning() != u {
			t.Errorf("Tuning() = %v, want %v", m.Tuning(), u)
		}
		for _, tr := range []float64{0.3, 0.7, 0.95, 0.9999} {
			T := tr * m.Tc
			a, c, s := m.TauGradient(T)
			for i, got := range []float64{a, c, s} {
				d := slope(func(by float64) float64 { n := nudged(t, e, u, i, by); tau, _ := n.Tau(T); return math.Log(tau) }, 0, 1e-3)
				within(t, fmt.Sprintf("%s Tr=%g ∂lnτ/∂θ%d", e.Name, tr, i), got, d, 1e-9)
			}
		}
		for _, share := range []float64{-2, -0.3, 0, 0.4, 0.9, 0.999} {
			P := share * m.Pc
			st, err := m.LiquidSpinodalTemperature(P)
			if err != nil {
				t.Fatal(err)
			}
			branches := map[string]SpinodalState{"liquid": st}
			if share > 0.1 {
				if branches["vapour"], err = m.VapourSpinodalTemperature(P); err != nil {
					t.Fatal(err)
				}
			}
			for name, st := range branches {
				search := func(n *Model, P float64) float64 {
					f := n.LiquidSpinodalTemperature
					if name == "vapour" {
						f = n.VapourSpinodalTemperature
					}
					s, err := f(P)
					if err != nil {
						t.Errorf("%s %s: %v", e.Name, name, err)
					}
					return s.T
				}
				// T(P) ends at Pc as Tc − c₁(Pc−P) − c₂(Pc−P)^(3/2): the step is a hundredth
				// of that distance, or of that to P = 0 where the vapour's line ends; truncation
				// is 1e-8/30·f⁽⁵⁾/f′ (1e-8 measured), rounding 1.5ε·100·T/(T′ΔP) = 3e-11.
				h := 0.01 * (m.Pc - P)
				if name == "vapour" {
					h = math.Min(h, 0.01*P)
				}
				dP, dθ := m.SpinodalGradient(st)
				at := fmt.Sprintf("%s %s P/Pc=%g: ", e.Name, name, share)
				d := slope(func(P float64) float64 { return search(&m, P) }, P, h)
				within(t, at+"dT/dP", dP, d, 2e-8*d)
				for i, got := range dθ {
					// Pc moves with the tuning: keep it at a distance.
					d := slope(func(by float64) float64 { n := nudged(t, e, u, i, by); return search(&n, P) }, 0, 1e-2*(1-math.Max(0, share)))
					within(t, at+fmt.Sprintf("∂T/∂θ%d", i), got, d, 1e-6*st.T)
				}
			}
		}
	}
}
