package eos

import "math"

// This file finds vapour–liquid coexistence in reduced variables. For a liquid
// at p_l let p_v(p_l) be the pressure of the vapour of equal fugacity; coexistence
// is the fixed point p_v = p_l. Since dp_v/dp_l = x_l/x_v < 1 (from ∂F/∂p = x),
// the function p_v − p falls steadily and Newton's method needs few steps: far
// below the critical point x_l/x_v is tiny and the vapour over a liquid at zero
// pressure is already the answer.
//
// The solution x_l = x_v of equal fugacity is excluded: each root is sought on
// its own side of the spinodal.

// Coexistence is a saturation state in reduced variables.
type Coexistence struct {
	P, Xl, Xv    float64 // p, x_l, x_v
	DP, DXl, DXv float64 // their derivatives with respect to τ along the line
	Gap          float64 // F_l − F_v left
	Iterations   int
}

// Saturate returns the coexistence at τ; ok is false for τ ≤ τ_c, for a liquid so
// cold that its vapour pressure leaves the range of numbers, or when the search
// does not end.
//
// The slopes follow from equal F and ∂F/∂τ = −I at constant p:
// dp/dτ = (I_v − I_l)/(x_v − x_l).
func (f *Form) Saturate(tau float64) (c Coexistence, ok bool) {
	if !(tau > f.TauC) {
		return c, false
	}
	// The pressure lies between the liquid spinodal (cut at zero) and the vapour
	// spinodal; the ends are found only when a step needs them.
	lo, hi := 0.0, 0.0
	var p float64
	var cold bool
	if tau > 1.02*f.tau0 {
		p, cold = 0, true
	} else {
		xl, xv := f.SpinodalLiquid(tau), f.SpinodalVapour(tau)
		lo, hi = math.Max(0, f.Pressure(xl, tau)), f.Pressure(xv, tau)
		p = 0.5 * (lo + hi)
	}
	var xl, xv float64
	for c.Iterations = 1; c.Iterations <= 60; c.Iterations++ {
		var okl, okv bool
		xl, okl = f.Liquid(p, tau, xl)
		if !okl {
			break
		}
		lnf := f.LnFugacity(xl, tau)
		xv, okv = f.VapourOfFugacity(lnf, tau, xv)
		if !okv {
			if hi == 0 {
				break
			}
			hi = p // the liquid is too dense for any vapour: the pressure is too high
			p, xv = 0.5*(lo+hi), 0
			continue
		}
		pv := f.Pressure(xv, tau)
		if cold && c.Iterations == 1 {
			p = pv
			continue
		}
		step := (pv - p) / (1 - xl/xv)
		next := p + step
		if hi > 0 {
			if pv > p {
				lo = p
			} else {
				hi = p
			}
			if !(next >= lo && next <= hi) { // a step of zero leaves next on the end just set
				next = 0.5 * (lo + hi)
			}
		}
		// An error of ε in p leaves F_l − F_v = (x_v − x_l)ε. The step is below
		// rounding in p when it is of the order 1e-16·p; one of 1e-8·p makes the
		// next one so, and the volumes are then brought to the new pressure.
		if math.Abs(step) <= 1e-8*p*(1-xl/xv) {
			p = next
			xl, okl = f.Liquid(p, tau, xl)
			xv, okv = f.Vapour(p, tau, xv)
			ok = okl && okv && xl < f.XC && xv > f.XC
			break
		}
		p = next
	}
	c.P, c.Xl, c.Xv = p, xl, xv
	if ok {
		c.Gap = f.LnFugacity(xl, tau) - f.LnFugacity(xv, tau)
		c.DP = (f.AttractionIntegral(xv) - f.AttractionIntegral(xl)) / (xv - xl)
		c.DXl = (c.DP + 1/f.q(xl)) / f.PressureSlope(xl, tau)
		// through the density 1/x_v, since x_v² may overflow
		_, dv := f.pressureOfDensity(1/xv, tau)
		c.DXv = -(c.DP*xv + xv/f.q(xv)) / dv * xv
	}
	return c, ok
}
