package eos

import "math"

// This file holds the reduced equation p(x, τ) and its integrals. Each function
// is written so that it keeps its relative accuracy both for a dense liquid
// (x → 1) and for a thin vapour (x → ∞).

// Form is a cubic equation of state in reduced variables: δ₁, δ₂ and the
// critical constants that follow from them.
type Form struct {
	D1, D2 float64 // δ₁, δ₂

	XC   float64 // critical reduced volume v_c/b
	TauC float64 // critical reduced attraction a/(bRT), Ω_a/Ω_b
	PC   float64 // critical reduced pressure Pb/(RT), Ω_b

	s, t  float64 // δ₁+δ₂, δ₁δ₂
	x0    float64 // reduced volume of the liquid spinodal at zero pressure
	tau0  float64 // reduced attraction there
	lnSc  float64 // ln S(x_c), see spinodal
	kappa float64 // −d²lnS/dx² at x_c
}

// NewForm returns the form with the given δ₁ and δ₂, both > −1 so that the
// attraction has no pole for v > b.
//
// The critical point is where ∂p/∂x = ∂²p/∂x² = 0. Eliminating τ leaves, with
// y = x − 1 and D = (1+δ₁)(1+δ₂), the cubic y³ − 3Dy − (2+δ₁+δ₂)D = 0, whose
// real root is
//
//	x_c = 1 + ∛((1+δ₁)²(1+δ₂)) + ∛((1+δ₁)(1+δ₂)²).
//
// Then τ_c = q²/((2x+s)(x−1)²) and Ω_b = p_c, Ω_a = τ_c·p_c.
func NewForm(d1, d2 float64) (Form, error) {
	for _, d := range [...]struct {
		name  string
		value float64
	}{{"delta1", d1}, {"delta2", d2}} {
		if !(d.value > -1 && d.value < 1e3) {
			return Form{}, &ParameterError{"equation", "user-defined", d.name, d.value, "between -1 and 1000"}
		}
	}
	f := Form{D1: d1, D2: d2, s: d1 + d2, t: d1 * d2}
	f.XC = 1 + math.Cbrt((1+d1)*(1+d1)*(1+d2)) + math.Cbrt((1+d1)*(1+d2)*(1+d2))
	f.TauC = f.spinodalTau(f.XC)
	f.PC = f.Pressure(f.XC, f.TauC)
	f.x0 = 1 + math.Sqrt(1+f.s+f.t) // p = ∂p/∂x = 0
	f.tau0 = f.q(f.x0) / (f.x0 - 1)
	f.lnSc = -math.Log(f.TauC)
	q, m := f.q(f.XC), 2*f.XC+f.s
	f.kappa = 4/(m*m) + 2/((f.XC-1)*(f.XC-1)) + (4*q-2*m*m)/(q*q)
	return f, nil
}

// OmegaA and OmegaB are the constants of a_c = Ω_a(RTc)²/Pc and b = Ω_b·RTc/Pc.
func (f *Form) OmegaA() float64 { return f.TauC * f.PC }

// OmegaB is described at OmegaA.
func (f *Form) OmegaB() float64 { return f.PC }

// q is (x+δ₁)(x+δ₂).
func (f *Form) q(x float64) float64 { return (x + f.D1) * (x + f.D2) }

// Pressure is p = 1/(x−1) − τ/q.
func (f *Form) Pressure(x, tau float64) float64 {
	return 1/(x-1) - tau/f.q(x)
}

// PressureSlope is ∂p/∂x at constant τ; a phase is stable against small
// fluctuations of density where it is negative.
func (f *Form) PressureSlope(x, tau float64) float64 {
	q := f.q(x)
	return tau/q*((2*x+f.s)/q) - 1/((x-1)*(x-1)) // quotients first: see PressureCurvature
}

// PressureCurvature is ∂²p/∂x² at constant τ.
func (f *Form) PressureCurvature(x, tau float64) float64 {
	m, y := 2*x+f.s, x-1
	u, w := x+f.D1, x+f.D2 // quotients first: q³ overflows for a very thin vapour
	return 2/(y*y*y) + tau*(2-2*(m/u)*(m/w))/(u*w)/(u*w)
}

// AttractionIntegral is I(x) = ∫dx/q from x to ∞, that is
// ln[(x+δ₁)/(x+δ₂)]/(δ₁−δ₂), with the limit 1/(x+δ₁) for δ₁ = δ₂.
func (f *Form) AttractionIntegral(x float64) float64 {
	if f.D1 == f.D2 {
		return 1 / (x + f.D1)
	}
	d := f.D1 - f.D2
	return math.Log1p(d/(x+f.D2)) / d
}

// LnFugacity is F = ln(f·b/(RT)) = −ln(x−1) + Z − 1 − τ·I(x), where
// Z − 1 = 1/(x−1) − τx/q is written without the cancellation of px − 1.
func (f *Form) LnFugacity(x, tau float64) float64 {
	return 1/(x-1) - math.Log(x-1) - tau*(x/f.q(x)+f.AttractionIntegral(x))
}

// fugacityAndSlope is F together with x·∂p/∂x = ∂F/∂x.
func (f *Form) fugacityAndSlope(x, tau float64) (lnf, slope float64) {
	y := 1 / (x - 1)
	iq := 1 / f.q(x)
	lnf = y - math.Log(x-1) - tau*(x*iq+f.AttractionIntegral(x))
	slope = x * (tau*iq*((2*x+f.s)*iq) - y*y)
	return lnf, slope
}

// The reduced pressures and the smallest lnf at which a root is sought. Within
// x − 1 ≈ 1/p the liquid keeps half the digits of p at maxP; the vapour x ≈ 1/p
// stays a finite number. The cold liquid x − 1 ≈ q/τ sets maxTau likewise.
const (
	minP   = 1e-300
	maxP   = 1e8
	minLn  = -690
	maxTau = 1e8
)

// rootTolerance is the relative size of the last Newton step at which a root is
// taken: the error left is of the order of its square, below rounding.
const rootTolerance = 1e-9

// cubicTolerance is the same for Halley's steps, whose errors are of the order of
// the cube.
const cubicTolerance = 2e-6

// Liquid returns the liquid root of p(x, τ) = p, 1 < x < spinodal, starting from
// a guess (0 for none). ok is false when there is none: τ ≤ τ_c, or p at or
// below the liquid spinodal; and for p or τ ≥ 1e8, where rounding
// leaves less than half the digits of x − 1.
//
// The root is that of h(x) = 1 − (x−1)(p + τ/q), which has no pole at x = 1.
func (f *Form) Liquid(p, tau, guess float64) (x float64, ok bool) {
	if !(tau > f.TauC && tau < maxTau && p < maxP) {
		return 0, false
	}
	x = guess
	if !(x > 1 && x < f.XC) {
		x = f.liquidStart(tau)
	}
	for i := 0; i < 12; i++ {
		q := f.q(x)
		h := 1 - (x-1)*(p+tau/q)
		d := (x-1)*tau*(2*x+f.s)/(q*q) - (p + tau/q)
		step := h / d
		next := x - step
		if !(next > 1 && next < f.XC) {
			break
		}
		x = next
		if math.Abs(step) <= rootTolerance*(x-1) {
			if f.PressureSlope(x, tau) < 0 && x < f.XC {
				return x, true
			}
			break
		}
	}
	return f.liquidBracketed(p, tau)
}

// liquidStart is the liquid volume at zero pressure, or near the critical point,
// where the liquid cannot be held at zero pressure, a point short of the spinodal.
func (f *Form) liquidStart(tau float64) float64 {
	if tau > f.tau0*1.01 {
		// (x+δ₁)(x+δ₂) = τ(x−1): the smaller root, by the form without cancellation
		b, c := tau-f.s, f.t+tau
		return 2 * c / (b + math.Sqrt(b*b-4*c))
	}
	return f.XC - 1.4*math.Sqrt(2*math.Log(tau/f.TauC)/f.kappa)
}

// liquidBracketed is the slow, sure search behind Liquid.
func (f *Form) liquidBracketed(p, tau float64) (float64, bool) {
	xs := f.SpinodalLiquid(tau)
	if !(p > f.Pressure(xs, tau)) {
		return 0, false
	}
	o := bracketNewton(func(x float64) (float64, float64) {
		q := f.q(x)
		return 1 - (x-1)*(p+tau/q), (x-1)*tau*(2*x+f.s)/(q*q) - (p + tau/q)
	}, 1, xs, 0.5*(1+xs), false)
	// Against the spinodal end the two roots have merged to within rounding.
	return o.X, o.Converged || o.AtEnd
}

// Vapour returns the vapour root of p(x, τ) = p, spinodal < x < ∞, starting
// from a guess (0 for none). For τ ≤ τ_c it is the only root. ok is false
// when p is not positive or when it is at or above the vapour spinodal; and
// outside 1e-300 < p < 1e8, 0 ≤ τ < 1e8.
//
// The search is in the reduced density y = 1/x, where p(y) rises from the ideal
// gas line, concave up to the spinodal, so that Newton steps from p approach
// from one side.
func (f *Form) Vapour(p, tau, guess float64) (x float64, ok bool) {
	if !(p > minP && p < maxP && tau >= 0 && tau < maxTau) {
		return 0, false
	}
	y := p
	if guess > 1 {
		y = 1 / guess
	}
	ymax := 1.0
	if tau > f.TauC {
		ymax = 1 / f.XC
	}
	if y >= ymax {
		y = 0.5 * ymax
	}
	for i := 0; i < 12; i++ {
		v, d := f.pressureOfDensity(y, tau)
		step := (v - p) / d
		next := y - step
		if !(next > 0 && next < ymax && d > 0) {
			break
		}
		y = next
		if math.Abs(step) <= rootTolerance*y {
			if f.PressureSlope(1/y, tau) < 0 {
				return 1 / y, true
			}
			break
		}
	}
	return f.vapourBracketed(p, tau)
}

// pressureOfDensity is p and ∂p/∂y at the reduced density y = 1/x.
func (f *Form) pressureOfDensity(y, tau float64) (p, slope float64) {
	g := (1 + f.D1*y) * (1 + f.D2*y)
	p = y/(1-y) - tau*y*y/g
	slope = 1/((1-y)*(1-y)) - tau*y*(2+f.s*y)/(g*g)
	return p, slope
}

// vapourBracketed is the slow, sure search behind Vapour.
func (f *Form) vapourBracketed(p, tau float64) (float64, bool) {
	ymax := 1.0
	if tau > f.TauC {
		xs := f.SpinodalVapour(tau)
		if !(p < f.Pressure(xs, tau)) {
			return 0, false
		}
		ymax = 1 / xs
	}
	o := bracketNewton(func(y float64) (float64, float64) {
		v, d := f.pressureOfDensity(y, tau)
		return v - p, d
	}, 0, ymax, math.Min(p, 0.5*ymax), true)
	return 1 / o.X, o.Converged || o.AtEnd
}

// VapourOfFugacity returns the vapour root of F(x, τ) = lnf, that is the vapour
// in chemical equilibrium with a phase of that fugacity, starting from a guess
// (0 for none). ok is false when lnf is at or above its value at the vapour
// spinodal: no vapour, not even a metastable one, is in equilibrium with it;
// and outside ±690, where x or 1/(x−1) leaves the range of numbers.
//
// In u = ln x, F falls with a slope between −1 (thin vapour) and 0 (spinodal),
// so that Newton steps from the thin side approach from one side.
func (f *Form) VapourOfFugacity(lnf, tau, guess float64) (x float64, ok bool) {
	if !(lnf > minLn && lnf < -minLn && tau >= 0 && tau < maxTau) {
		return 0, false
	}
	x = guess
	if !(x > f.XC) {
		y := math.Exp(lnf) // ideal vapour; then one step of its second virial coefficient 1−τ
		x = math.Exp(-math.Min(lnf-2*math.Max(1-tau, -0.15/y)*y, 0))
		if x < f.XC {
			x = 1.5 * f.XC
		}
	}
	for i := 0; i < 24; i++ {
		v, d := f.fugacityAndSlope(x, tau)
		d *= x
		if !(d < 0) {
			break
		}
		// Halley's step: with d²F/du² = 2x²∂p/∂x + x³∂²p/∂x², which costs no logarithm.
		step := (v - lnf) / d
		y, iq, m := 1/(x-1), 1/f.q(x), 2*x+f.s
		d2 := 2*d + x*x*x*2*(y*y*y+tau*iq*iq*(1-m*m*iq))
		if h := 1 - 0.5*step*d2/d; h > 0.5 && h < 2 {
			step /= h
		}
		if step > 1 || step < -4 { // outside the range in which one step is trustworthy
			step = math.Max(-4, math.Min(1, step))
		}
		next := x * math.Exp(-step)
		if !(next > f.XC) {
			break
		}
		x = next
		if math.Abs(step) <= cubicTolerance {
			return x, true
		}
	}
	return f.vapourOfFugacityBracketed(lnf, tau)
}

// vapourOfFugacityBracketed is the slow, sure search behind VapourOfFugacity.
func (f *Form) vapourOfFugacityBracketed(lnf, tau float64) (float64, bool) {
	lo := 0.0
	if tau > f.TauC {
		xs := f.SpinodalVapour(tau)
		if !(lnf < f.LnFugacity(xs, tau)) {
			return 0, false
		}
		lo = math.Log(xs)
	}
	o := bracketNewton(func(u float64) (float64, float64) {
		x := math.Exp(u)
		v, d := f.fugacityAndSlope(x, tau)
		return v - lnf, d * x
	}, lo, math.Max(lo, -lnf)+10, math.Max(lo+1, -lnf), false)
	return math.Exp(o.X), o.Converged || o.AtEnd
}

// LiquidOfFugacity returns the liquid root of F(x, τ) = lnf: the liquid in
// chemical equilibrium with a phase of that fugacity. ok is false when lnf is
// at or below its value at the liquid spinodal, or not below 1e8 (see Liquid).
//
// The search is in w = ln(x−1), in which a compressed liquid (x → 1) is smooth.
func (f *Form) LiquidOfFugacity(lnf, tau float64) (x float64, ok bool) {
	if !(tau > f.TauC && tau < maxTau && lnf < maxP) {
		return 0, false
	}
	xs := f.SpinodalLiquid(tau)
	if !(lnf > f.LnFugacity(xs, tau)) {
		return 0, false
	}
	hi := math.Log(xs - 1)
	o := bracketNewton(func(w float64) (float64, float64) {
		y := math.Exp(w)
		v, d := f.fugacityAndSlope(1+y, tau)
		return v - lnf, d * y
	}, hi-30, hi, hi-0.5, false)
	return 1 + math.Exp(o.X), o.Converged || o.AtEnd
}
