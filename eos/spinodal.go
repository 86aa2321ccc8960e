package eos

import (
	"math"

	"limsup/eos/internal/bracket"
)

// This file finds the limits of phase stability, ∂p/∂x = 0. With
//
//	S(x) = (2x+s)(x−1)²/q²
//
// the condition is S(x) = 1/τ. S rises from 0 at x = 1 to 1/τ_c at x_c and falls
// to 0 again, so there is exactly one root on either side of x_c for τ > τ_c, and
// to every x belongs one τ in closed form. Near the critical point the roots
// approach x_c as √(τ−τ_c), which is the accuracy that τ allows them: half the
// digits at τ − τ_c ~ ε.

// bracketNewton is the bracketed search with the tolerance of this package.
func bracketNewton(fn func(float64) (float64, float64), lo, hi, x float64, rising bool) bracket.Outcome {
	return bracket.Newton(fn, lo, hi, x, rising, rootTolerance)
}

// spinodalTau is the τ at which x is a spinodal volume.
func (f *Form) spinodalTau(x float64) float64 {
	q := f.q(x)
	return q * q / ((2*x + f.s) * (x - 1) * (x - 1))
}

// spinodalTauSlope is dlnτ/dx along the spinodal.
func (f *Form) spinodalTauSlope(x float64) float64 {
	m := 2*x + f.s
	return 2*m/f.q(x) - 2/m - 2/(x-1)
}

// SpinodalLiquid is the reduced volume at which the liquid loses stability,
// 1 < x < x_c; for τ ≤ τ_c it returns x_c.
func (f *Form) SpinodalLiquid(tau float64) float64 {
	if !(tau > f.TauC) {
		return f.XC
	}
	e := math.Log(tau / f.TauC)
	start := f.XC - math.Sqrt(2*e/f.kappa)
	if cold := 1 + f.q(1)/math.Sqrt((2+f.s)*tau); !(start > cold) {
		start = cold
	}
	o := bracketNewton(func(x float64) (float64, float64) {
		return math.Log(f.spinodalTau(x) / tau), f.spinodalTauSlope(x)
	}, 1, f.XC, start, false)
	return o.X
}

// SpinodalVapour is the reduced volume at which the vapour loses stability,
// x > x_c; for τ ≤ τ_c it returns x_c.
func (f *Form) SpinodalVapour(tau float64) float64 {
	if !(tau > f.TauC) {
		return f.XC
	}
	e := math.Log(tau / f.TauC)
	start := f.XC + math.Sqrt(2*e/f.kappa)
	if e > 0.3 {
		start = 2 * tau // S → 2/x
	}
	// For x → ∞ τ(x) → x/2 + const., so x < 2τ + x_c(…); 4τ + 2x_c is beyond it.
	o := bracketNewton(func(x float64) (float64, float64) {
		return math.Log(f.spinodalTau(x) / tau), f.spinodalTauSlope(x)
	}, f.XC, 4*tau+2*f.XC, start, true)
	return o.X
}
