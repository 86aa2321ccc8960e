package nucleation

import "math"

// This file finds the pressure of a limit at a given temperature, as limit.go does
// the temperature at a given pressure.

// KineticPressure returns the pressure at which the flux of the liquid at T
// reaches the target on decompression; it may be negative. guess is in Pa, 0 for
// none.
//
// Errors: as KineticLimit.
func (f *Fluid) KineticPressure(T float64, t Target, guess float64) (Limit, error) {
	if err := f.checkTarget(t); err != nil {
		return Limit{}, err
	}
	if !(T >= f.tlo && T < f.thi) {
		return Limit{}, f.explain(outsideRange, T, 0)
	}
	ps := f.saturation(T)
	if !(ps > 0) {
		return Limit{}, f.explain(noSaturation, T, 0)
	}
	lo, isSpinodal := math.Inf(-1), false
	if !f.corr {
		liquid, _, err := f.c.Model.Spinodal(T)
		if err != nil {
			return Limit{}, err
		}
		lo, isSpinodal = liquid.P, true
	}
	hi := ps
	var p point
	var threshold drift
	proven := !isSpinodal
	P := guess
	if P == 0 || !(P > lo && P < hi) {
		P = hi - 0.5*math.Min(hi-lo, 2*hi)
	}
	var residual float64
	for i := 1; i <= maxSteps; i++ {
		var next float64
		switch c := f.evaluate(T, P, &p); c {
		case fine:
			ψ, slope := f.psi(&p, t, true)
			wanted := f.wanted(&p, t)
			residual = p.lnJ() - wanted
			falling := slope > 0 && p.excess > 0
			switch {
			case ψ >= 0:
				lo, proven = P, true
			case falling:
				lo = P
			default:
				hi = P
			}
			if falling {
				next = math.NaN()
				break
			}
			slope, tolerance := threshold.slope(&t, P, ψ, p.lnA, wanted, slope)
			next = P - ψ/slope
			if math.Abs(next-P) <= tolerance*(math.Abs(P)+p.excess) {
				if f.evaluate(T, next, &p) == fine && p.excess > 0 {
					if ψ, _ := f.psi(&p, t, true); math.Min(math.Abs(ψ/slope), math.Abs(next-P)) <= proof*(math.Abs(next)+p.excess) {
						return f.limitAt(&p, t, i+1, true)
					}
				}
			}
		case noLiquid, tolmanTooLarge:
			lo, next = P, math.NaN()
			proven = proven || c == tolmanTooLarge
			p.xl = 0
		default:
			return Limit{}, f.explain(c, T, P)
		}
		if !(next > lo && next < hi) {
			if !proven {
				end := lo + 1e-10*math.Abs(hi-lo)
				if f.evaluate(T, end, &p) == fine {
					ψ, _ := f.psi(&p, t, true)
					if ψ < 0 && !f.hopeless(&p, t, ψ) {
						end, ψ = f.peak(hi, end, T, t, true, false)
						if ψ >= 0 {
							lo = end
						}
					}
					if ψ < 0 {
						e := &NoLimitError{Fluid: f.name, Given: T, AtT: true, Threshold: t.LnJ / math.Ln10, End: lo, Spinodal: true}
						if p.excess > 0 {
							e.Reached, e.Known, e.Threshold = p.lnJ()/math.Ln10, true, f.wanted(&p, t)/math.Ln10
						}
						return Limit{}, e
					}
				}
				proven = true
			}
			if math.IsInf(lo, -1) {
				next = P - 2*math.Max(p.excess, ps)
				if next < -1e12 {
					return Limit{}, &NoLimitError{Fluid: f.name, Given: T, AtT: true, Threshold: t.LnJ / math.Ln10, End: next}
				}
			} else {
				next = lo + 0.5*(hi-lo)
			}
		}
		if w := hi - lo; w <= 4e-15*math.Max(math.Abs(lo), math.Abs(hi)) && !math.IsInf(w, 1) {
			if f.met(T, hi, t, &p) {
				return f.limitAt(&p, t, i+1, true)
			}
			return Limit{}, &ConvergenceError{Fluid: f.name, Equation: f.source(), Given: T, AtT: true, Lo: lo, Hi: hi, Residual: residual, Iterations: i}
		}
		P = next
	}
	return Limit{}, &ConvergenceError{Fluid: f.name, Equation: f.source(), Given: T, AtT: true, Lo: lo, Hi: hi, Residual: residual, Iterations: maxSteps}
}
