package eos

import (
	"errors"
	"fmt"
	"math"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"
)

// Results tested by what they mean.

var meaningTr = []float64{0.25, 0.35, 0.5, 0.7, 0.844, 0.9, 0.95, 0.99, 0.999, 0.9999}

// Both phases have the pressure and the fugacity of the state, and are stable.
// Tolerances: 8ε times the terms of P (or F), which cancel in a liquid.
func TestEqualPressureAndFugacity(t *testing.T) {
	for _, m := range tunedModels(t) {
		for _, tr := range meaningTr {
			T := tr * m.Tc
			at := fmt.Sprintf("%s Tr=%g: ", m.Equation, tr)
			s, err := m.Saturation(T)
			if err != nil {
				t.Fatal(err)
			}
			if s.T != T || !(s.Vl < s.Vv) {
				t.Errorf("%s%+v", at, s)
			}
			for name, v := range map[string]float64{"liquid": s.Vl, "vapour": s.Vv} {
				p, err := m.Pressure(T, v)
				if err != nil {
					t.Fatal(err)
				}
				terms := GasConstant*T/(v-m.B) + m.Attraction(T)/(m.B*m.B*m.q(v/m.B))
				within(t, at+name+" pressure", p, s.P, 8*eps*terms*v/(v-m.B))
				lnf, err := m.LnFugacity(T, v)
				if err != nil {
					t.Fatal(err)
				}
				tau, _ := m.Tau(T)
				within(t, at+name+" fugacity", lnf, s.LnFugacity, 8*eps*(4+tau+math.Abs(lnf))*v/(v-m.B))
				dv, _, _, err := m.PressureDerivatives(T, v)
				if err != nil || !(dv < 0) {
					t.Errorf("%s%s is not stable: ∂P/∂v = %g, %v", at, name, dv, err)
				}
				mu, err := m.ChemicalPotential(T, v)
				if err != nil {
					t.Fatal(err)
				}
				within(t, at+name+" µ/RT", mu/(GasConstant*T), 0, 8*eps*(4+tau+math.Abs(lnf))*v/(v-m.B))
			}
			// The single-phase roots at the saturation pressure are the same states.
			vl, err := m.Liquid(T, s.P)
			if err != nil {
				t.Fatal(err)
			}
			vv, err := m.Vapour(T, s.P)
			if err != nil {
				t.Fatal(err)
			}
			within(t, at+"Vl", vl, s.Vl, 1e-11*s.Vl*math.Max(1e-3, 1e-4/(1-tr)))
			within(t, at+"Vv", vv, s.Vv, 1e-11*s.Vv*math.Max(1e-3, 1e-4/(1-tr)))
		}
	}
}

// The equal-fugacity residual over a fine sweep: a search that stopped a little
// short at one temperature in a thousand would show here. A relative error e of
// the pressure leaves a gap e·(Z_v−Z_l); rounding leaves 8ε of the terms of F, and
// that of x moves F by ε/2·x·∂F/∂x ≈ ε/2·(x/(x−1))² for a cold liquid.
func TestGapOverSweep(t *testing.T) {
	for _, e := range Equations() {
		f, err := NewForm(e.D1, e.D2)
		if err != nil {
			t.Fatal(err)
		}
		n := 0
		for ratio := 1.0001; ratio < 20; ratio *= 1.0005 {
			tau := ratio * f.TauC
			c, ok := f.Saturate(tau)
			if n++; !ok || !(math.Abs(c.Gap) <= eps*(8*(4+2*tau)+math.Pow(c.Xl/(c.Xl-1), 2))) {
				t.Errorf("%s τ/τc=%.6f: gap %g, %v", e.Name, ratio, c.Gap, ok)
			}
		}
		if n < 5000 {
			t.Errorf("%d states", n)
		}
	}
}

// Maxwell's rule: ∫P dv from liquid to vapour is Psat·(Vv−Vl). Gauss–Legendre
// quadrature in ln(v−b), 200 points: its own error is below 1e-12 of the largest
// partial area (measured by halving the points).
func TestEqualAreas(t *testing.T) {
	for _, m := range tunedModels(t) {
		for _, tr := range []float64{0.5, 0.7, 0.9, 0.99} {
			T := tr * m.Tc
			s, err := m.Saturation(T)
			if err != nil {
				t.Fatal(err)
			}
			integrand := func(u float64) float64 {
				w := math.Exp(u)
				p, err := m.Pressure(T, m.B+w)
				if err != nil {
					t.Error(err)
				}
				return (p - s.P) * w
			}
			lo, hi := math.Log(s.Vl-m.B), math.Log(s.Vv-m.B)
			area := quad.Fixed(integrand, lo, hi, 200, quad.Legendre{}, 0)
			abs := quad.Fixed(func(u float64) float64 { return math.Abs(integrand(u)) }, lo, hi, 200, quad.Legendre{}, 0)
			// Rounding of the pressures: ε times the terms of P, integrated.
			terms := GasConstant * T * (hi - lo) * 10
			within(t, fmt.Sprintf("%s Tr=%g area", m.Equation, tr), area, 0, 1e-12*abs+4*eps*terms)
			if !(abs > 100*(1e-12*abs+4*eps*terms)) {
				t.Errorf("%s Tr=%g: the areas themselves are %g, too small for the tolerance", m.Equation, tr, abs)
			}
		}
	}
}

// ∂P/∂v = 0 at the spinodals, of opposite curvature, and each is an extremum:
// the pressure on either side is higher (liquid), lower (vapour).
func TestSpinodalIsExtremum(t *testing.T) {
	for _, m := range tunedModels(t) {
		for _, tr := range meaningTr {
			T := tr * m.Tc
			at := fmt.Sprintf("%s Tr=%g: ", m.Equation, tr)
			l, v, err := m.Spinodal(T)
			if err != nil {
				t.Fatal(err)
			}
			if !(l.V < m.XC*m.B && m.XC*m.B < v.V && l.P < v.P && l.T == T && v.T == T) {
				t.Errorf("%s%+v %+v", at, l, v)
			}
			for sign, s := range map[float64]SpinodalState{1: l, -1: v} {
				dv, dvdv, _, err := m.PressureDerivatives(T, s.V)
				if err != nil {
					t.Fatal(err)
				}
				// The two terms of ∂P/∂v cancel; v is known to 4ε, its effect is ∂²P/∂v²·4εv.
				term := GasConstant * T / ((s.V - m.B) * (s.V - m.B))
				within(t, at+"∂P/∂v", dv, 0, 8*eps*term*s.V/(s.V-m.B)+1e-9*rootTolerance*term)
				if !(sign*dvdv > 0) {
					t.Errorf("%s∂²P/∂v² = %g at branch %g", at, dvdv, sign)
				}
				for _, f := range []float64{0.98, 1.02} {
					beside := m.B + (s.V-m.B)*f
					p, err := m.Pressure(T, beside)
					if err != nil {
						t.Fatal(err)
					}
					if tr < 0.999 && !(sign*(p-s.P) > 0) { // nearer to Tc a step of 2 % passes the other branch
						t.Errorf("%sP(%g v) = %g, spinodal %g", at, f, p, s.P)
					}
				}
				// Just inside the phase exists, just outside it does not.
				phase := m.Liquid
				if sign < 0 {
					phase = m.Vapour
				}
				step := 1e-6 * (v.P - l.P) * sign
				if got, err := phase(T, s.P+step); err != nil || !(sign*(s.V-got) > 0) {
					t.Errorf("%sinside the spinodal: %g, %v", at, got, err)
				}
				if got, err := phase(T, s.P-step); err == nil {
					t.Errorf("%soutside the spinodal: %g", at, got)
				}
			}
		}
	}
}

// Along an isotherm the states come in one order, the metastable ones are flagged
// as such, µ is continuous and dµ = v dP holds from each point to the next.
func TestIsotherm(t *testing.T) {
	order := []State{SubcooledLiquid, SaturatedLiquid, SuperheatedLiquid, Unstable, SupersaturatedVapour, SaturatedVapour, SuperheatedVapour}
	for _, m := range tunedModels(t) {
		for _, tr := range []float64{0.3, 0.6, 0.85, 0.95, 0.999} {
			T := tr * m.Tc
			at := fmt.Sprintf("%s Tr=%g: ", m.Equation, tr)
			iso, err := m.Isotherm(T)
			if err != nil {
				t.Fatal(err)
			}
			s, l, v := iso.Saturation, iso.Liquid, iso.Vapour
			if !iso.Subcritical || iso.T != T || !(s.Vl < l.V && l.V < v.V && v.V < s.Vv) {
				t.Errorf("%s%+v", at, iso)
			}
			volumes := []float64{
				m.B + 0.9*(s.Vl-m.B), s.Vl, (s.Vl + l.V) / 2, (l.V + v.V) / 2, (v.V + s.Vv) / 2, s.Vv, 2 * s.Vv,
			}
			for i, vol := range volumes {
				p, err := iso.At(vol)
				if err != nil {
					t.Fatal(err)
				}
				if p.State != order[i] || p.V != vol {
					t.Errorf("%sv = %g: %+v, want %s", at, vol, p, order[i])
				}
				if want := i == 2 || i == 4; p.State.Metastable() != want {
					t.Errorf("%s%q metastable: %v", at, p.State, !want)
				}
				// µ > 0 for a phase that would rather be the other: metastable liquid lies
				// below the saturation pressure and µ falls with it, so its sign is that of P − Psat.
				if i != 1 && i != 3 && i != 5 && !((p.Mu > 0) == (p.P > s.P)) {
					t.Errorf("%s%q: µ = %g at P − Psat = %g", at, p.State, p.Mu, p.P-s.P)
				}
				h := 1e-3 * (vol - m.B)
				mu := func(v float64) float64 { pt, _ := iso.At(v); return pt.Mu }
				pr := func(v float64) float64 { pt, _ := iso.At(v); return pt.P }
				// dµ/dv = v·dP/dv, both by differences: rounding 1.5ε/1e-3 of the terms of µ, and v
				// times those of P; truncation 3e-11 of them.
				size := GasConstant*T*(vol/(vol-m.B)+10) + m.Attraction(T)/m.B*4
				within(t, at+fmt.Sprintf("%s dµ = v dP", p.State), (vol-m.B)*slope(mu, vol, h), (vol-m.B)*vol*slope(pr, vol, h), 2e-10*size)
			}
			// Both ends of the metastable ranges belong to the unstable one.
			if iso.State(l.V) != Unstable || iso.State(v.V) != Unstable || iso.State(math.Nextafter(l.V, 0)) != SuperheatedLiquid || iso.State(math.Nextafter(v.V, 1e9)) != SupersaturatedVapour {
				t.Errorf("%sstates at the spinodal volumes", at)
			}
			for _, bad := range []float64{m.B, 0, -1, math.NaN()} {
				if st := iso.State(bad); st != "" {
					t.Errorf("%sState(%g) = %q", at, bad, st)
				}
			}
		}
		for _, tr := range []float64{1, 1.0001, 1.4} {
			iso, err := m.Isotherm(tr * m.Tc)
			if err != nil || iso.Subcritical {
				t.Fatalf("%s Tr=%g: %+v, %v", m.Equation, tr, iso, err)
			}
			last := math.Inf(1)
			for _, x := range []float64{1.2, 2, 3, 4, 10, 1000} {
				p, err := iso.At(x * m.B)
				if err != nil || p.State != Supercritical || p.State.Metastable() || p.Mu != 0 || !(p.P < last) {
					t.Errorf("%s Tr=%g: %+v, %v", m.Equation, tr, p, err)
				}
				last = p.P
			}
		}
	}
}

// A vapour or a liquid of given fugacity has that fugacity, from any guess.
func TestPhaseOfFugacity(t *testing.T) {
	for _, m := range tunedModels(t) {
		for _, tr := range []float64{0.25, 0.6, 0.9, 0.99, 1.2} {
			tau, _ := m.Tau(tr * m.Tc)
			xs := []float64{1.05 * m.XC, 2 * m.XC, 30, 1e4, 1e10, 1e100}
			xv := m.SpinodalVapour(tau)
			for _, x := range xs {
				if x < 1.001*xv {
					continue
				}
				lnf := m.Form.LnFugacity(x, tau)
				for _, guess := range []float64{0, x, 1.5 * x, 0.7 * x, 1.01 * xv, math.NaN()} {
					got, ok := m.VapourOfFugacity(lnf, tau, guess)
					// ln x follows from F by the slope x²∂p/∂x
					stiff := -x * x * m.PressureSlope(x, tau)
					if !ok || !(math.Abs(got/x-1) <= 8*eps*(4+tau/x+math.Abs(lnf))/stiff) {
						t.Errorf("%s Tr=%g x=%g guess %g: %.17g, %v", m.Equation, tr, x, guess, got, ok)
					}
				}
			}
			if tr >= 1 {
				if x, ok := m.LiquidOfFugacity(0, tau); ok {
					t.Errorf("%s Tr=%g: liquid at %g", m.Equation, tr, x)
				}
				continue
			}
			xl := m.SpinodalLiquid(tau)
			for _, part := range []float64{1e-5, 0.1, 0.5, 0.9, 0.999} {
				x := 1 + (xl-1)*part
				lnf := m.Form.LnFugacity(x, tau)
				got, ok := m.LiquidOfFugacity(lnf, tau)
				stiff := -(x - 1) * x * m.PressureSlope(x, tau)
				if !ok || !(math.Abs((got-x)/(x-1)) <= 8*eps*(4+2*tau+math.Abs(lnf)+(1+x/(x-1))/(x-1))/stiff) {
					t.Errorf("%s Tr=%g x=%g: liquid %.17g, %v", m.Equation, tr, x, got, ok)
				}
			}
			// Beyond the spinodals there is none.
			if x, ok := m.VapourOfFugacity(m.Form.LnFugacity(xv, tau)+1e-6, tau, 0); ok {
				t.Errorf("%s Tr=%g: vapour %g above its spinodal", m.Equation, tr, x)
			}
			if x, ok := m.LiquidOfFugacity(m.Form.LnFugacity(xl, tau)-1e-6, tau); ok {
				t.Errorf("%s Tr=%g: liquid %g below its spinodal", m.Equation, tr, x)
			}
		}
	}
}

// Within rounding of the critical point there is an answer in order, or an error
// that says so. The volumes differ from v_c by a multiple of √(1−Tr), below 6 for
// these models (2 for van der Waals), and by the cube root of rounding, since P is
// flat to third order. Nearer than 1e-6 to Pc rounding of F decides: T is then
// known to 1e-7 (measured) and no better.
func TestNextToCriticalPoint(t *testing.T) {
	for _, m := range tunedModels(t) {
		answers := 0
		for d := 1e-4; d > 2e-16; d /= 1.7 {
			T := m.Tc * (1 - d)
			var c *ConvergenceError
			s, err := m.Saturation(T)
			switch {
			case errors.As(err, &c):
			case err != nil:
				t.Errorf("%s 1−Tr=%g: %v", m.Equation, d, err)
			case !(s.Vl < m.XC*m.B && m.XC*m.B < s.Vv && s.P < m.Pc*(1+1e-12) && s.Vv < m.XC*m.B*(1+6*math.Sqrt(d)+2e-5)):
				t.Errorf("%s 1−Tr=%g: %+v, vc %g, Pc %g", m.Equation, d, s, m.XC*m.B, m.Pc)
			default:
				answers++
			}
			P, known := m.Pc*(1-d), 1e-11
			if d < 1e-6 {
				known = 1e-7
			}
			s, err = m.SaturationTemperature(P)
			if err != nil && !errors.As(err, &c) || err == nil && !(math.Abs(s.T/m.Tc-1) < d+known && s.T < m.Tc && deviation(s.P, P) < known) {
				t.Errorf("%s 1−Pr=%g: %+v, %v", m.Equation, d, s, err)
			}
			for name, search := range map[string]func(float64) (SpinodalState, error){"liquid": m.LiquidSpinodalTemperature, "vapour": m.VapourSpinodalTemperature} {
				st, err := search(P)
				if err != nil && !errors.As(err, &c) || err == nil && !(math.Abs(st.T/m.Tc-1) < d+4*eps) {
					t.Errorf("%s 1−Pr=%g: %s spinodal %+v, %v", m.Equation, d, name, st, err)
				}
			}
		}
		if answers < 10 { // down to 1−Tr = 1e-6 at least
			t.Errorf("%s: only %d answers", m.Equation, answers)
		}
	}
}
