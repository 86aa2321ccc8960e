package nucleation

import (
	"math"

	"limsup/eos"
)

// This file finds the kinetic limit of superheat, J(T, P_l) = J*. The search is
// for the zero of
//
//	ψ = ΔP/ΔP* − 1,   ΔP* = √(16πσ³/(3kT(lnA − lnJ*))),   lnA = lnJ + W,
//
// the pressure excess of the embryo over the one that gives the threshold. Unlike
// lnJ, which falls to −∞ towards saturation, ψ is nearly a straight line of T (and
// of P_l), is −1 at saturation, and stays meaningful below it, so Newton's method
// needs few steps from almost anywhere. A bracket is kept: states without a liquid
// are too hot, states too dense for any vapour too cold.

// Target is the flux at which the limit is sought.
type Target struct {
	// LnJ is ln(J*/(m⁻³s⁻¹)) or, with PerKelvin, ln(J*/(dlnJ/dT)) in
	// ln(K·m⁻³s⁻¹).
	LnJ float64
	// PerKelvin is for a sample of volume V heated at a constant rate β, which
	// boils with a median at J = ln2·(β/V)·dlnJ/dT.
	PerKelvin bool
}

// Threshold is the target J* given as log₁₀(J*/(m⁻³s⁻¹)).
func Threshold(log10J float64) Target { return Target{LnJ: log10J * math.Ln10} }

// Stated is the target J in m⁻³s⁻¹.
func Stated(J float64) Target { return Target{LnJ: math.Log(J)} }

// Heated is the target of a sample of volume V in m³ heated at β in K/s: half of
// such samples have boiled where J = ln2·β·(dlnJ/dT)/V.
func Heated(V, β float64) Target {
	return Target{LnJ: math.Log(math.Ln2 * β / V), PerKelvin: true}
}

// Held is the target of a sample of volume V in m³ that is held at T and P_l for
// t in s: half of such samples have boiled where J = ln2/(Vt).
func Held(V, t float64) Target { return Target{LnJ: math.Log(math.Ln2 / (V * t))} }

// Lived is the target of a sample of volume V in m³ with a mean lifetime t in s at
// T and P_l: J = 1/(Vt).
func Lived(V, t float64) Target { return Target{LnJ: -math.Log(V * t)} }

// Limit is a kinetic limit.
type Limit struct {
	T, P float64 // K, Pa
	LnJ  float64 // ln(J/(m⁻³s⁻¹)) there
	// DT and DP are ∂lnJ/∂T in 1/K and ∂lnJ/∂P_l in 1/Pa at the limit.
	DT, DP float64
	// Gradient is the change of the limit with the parameters by the implicit
	// function theorem: K (or Pa for a limit pressure) per unit of each.
	Gradient Gradient
	// DThreshold is its change with log₁₀J* (or with log₁₀ of the per-kelvin target).
	DThreshold float64
	// DGiven is dT/dP_l along the line of limits in K/Pa (for a limit pressure, dP_l/dT).
	DGiven      float64
	Barrier     float64 // W at the limit
	Evaluations int     // of the flux
	Held        bool    // see Flux
}

// maxSteps bounds the search. Newton steps alone end it in 4 to 8; a bracket of
// bisections down to 1e-12 would take 40 more.
const maxSteps = 120

// limitTolerance is the relative step at which a limit is taken; the error left
// is of the order of its square times the curvature of ψ, T/(Tc−T): below 1e-12,
// which nearTolerance ensures close to Tc. A per-kelvin target drifts with the state, by
// one part in a hundred of lnJ, which the slope of ψ does not know: a step that was taken
// before the drift is known leaves that part of itself, and must be smaller.
const (
	limitTolerance   = 1e-8
	nearTolerance    = 3e-7
	driftlessPortion = 1e-2
	proof            = 1e-12 // what the state found may still be off, relative
)

// drift follows the threshold of a per-kelvin target from state to state.
type drift struct {
	x, wanted float64
	set       bool
}

// slope is that of ψ along a search, with ∂ψ/∂lnJ* = −½(ψ+1)/(lnA − lnJ*), given the slope
// at a constant threshold; and the relative step to be asked for with it.
func (d *drift) slope(t *Target, x, ψ, lnA, wanted, given float64) (slope, tolerance float64) {
	if !t.PerKelvin || math.IsNaN(given) {
		return given, limitTolerance
	}
	last := *d
	*d = drift{x, wanted, true}
	if last.set && x != last.x {
		k := given - 0.5*(ψ+1)/(lnA-wanted)*(wanted-last.wanted)/(x-last.x)
		if r := k / given; r > 0.5 && r < 2 {
			return k, limitTolerance
		}
	}
	return given, driftlessPortion * limitTolerance
}

// KineticLimit returns the temperature at which the flux of the liquid at P
// reaches the target, starting from a guess in K (0 for none).
//
// Errors: *NoLimitError when J stays below J* up to the spinodal;
// *eos.DomainError for P at or above the critical pressure, or a target that is not
// a number; *StateError when J exceeds J*, or no liquid is left, at the cold end of the properties;
// *ConvergenceError.
func (f *Fluid) KineticLimit(P float64, t Target, guess float64) (Limit, error) {
	l, err := f.LimitIfAny(P, t, guess)
	if e, ok := err.(*NoLimitError); ok && e.Known && e.inside < e.End {
		// of a target as large as J itself, ψ is largest where J is
		top, _ := f.peak(e.inside, e.End, P, Target{LnJ: e.Reached * math.Ln10}, false, true)
		err = f.noLimit(P, t, e.inside, e.End, top, e.Spinodal)
	}
	return l, err
}

// LimitIfAny is KineticLimit for those who do not ask how far from its target the flux
// stays: Reached of its *NoLimitError is that of some state before the end and not the
// largest, which takes three times as long to find.
func (f *Fluid) LimitIfAny(P float64, t Target, guess float64) (Limit, error) {
	if err := f.checkTarget(t); err != nil {
		return Limit{}, err
	}
	if !(math.Abs(P) <= maxPressure) || (!f.corr && P >= f.c.Model.Pc) {
		return Limit{}, &eos.DomainError{Fluid: f.name, Equation: f.source(), Quantity: "kinetic limit", Argument: "pressure", Value: P, Lo: math.Inf(-1), Hi: f.c.Model.Pc, Unit: "Pa"}
	}
	lo, hi := f.tlo, f.thi
	T := guess
	if !(T > lo && T < hi) {
		T = f.firstGuess(P)
	}
	var p point
	var threshold drift
	spinodal := false // hi is the spinodal, or a temperature proven above the limit
	var residual float64
	for i := 1; i <= maxSteps; i++ {
		c := f.evaluate(T, P, &p)
		var next float64
		switch c {
		case fine:
			ψ, slope := f.psi(&p, t, false)
			wanted := f.wanted(&p, t)
			residual = p.lnJ() - wanted
			falling := slope < 0 && p.excess > 0 // between the peak of J and the spinodal
			switch {
			case ψ >= 0:
				hi, spinodal = T, true
			case falling:
				hi = T
			default:
				lo = T
			}
			if falling {
				next = math.NaN()
				break
			}
			slope, tolerance := threshold.slope(&t, T, ψ, p.lnA, wanted, slope)
			next = T - ψ/slope
			if math.Abs(next-T) <= math.Min(tolerance*T, nearTolerance*math.Sqrt(T*(f.thi-T))) && next > 0 {
				// one last evaluation brings everything to the limit itself, and proves it
				if f.evaluate(next, P, &p) == fine && p.excess > 0 {
					if ψ, _ := f.psi(&p, t, false); math.Min(math.Abs(ψ/slope), math.Abs(next-T)) <= proof*next {
						return f.limitAt(&p, t, i+1, false)
					}
				}
			}
		case noVapour:
			lo, next = T, math.NaN()
		case noLiquid, noTension:
			hi, next = T, math.NaN()
			p.xl = 0
		case tolmanTooLarge:
			// δΔP ≥ σ∞: as hot as a vanishing barrier
			hi, spinodal, next = T, true, math.NaN()
		default:
			if T >= hi || T <= lo { // rounding at the ends of the range
				return Limit{}, f.noLimit(P, t, T, T, T, false)
			}
			return Limit{}, f.explain(c, T, P)
		}
		if !(next > lo && next < hi) {
			if !spinodal {
				// The end of the bracket has not been proven to lie beyond the limit.
				end, isSpinodal := f.hottest(P)
				switch f.evaluate(end, P, &p) {
				case fine:
					if ψ, _ := f.psi(&p, t, false); ψ < 0 {
						if f.hopeless(&p, t, ψ) {
							return Limit{}, f.noLimit(P, t, lo, end, end, isSpinodal)
						}
						// J peaks a little before the spinodal; the limit may lie before the peak.
						top, ψ := f.peak(lo, end, P, t, false, false)
						if ψ < 0 {
							return Limit{}, f.noLimit(P, t, lo, end, top, isSpinodal)
						}
						end = top
					}
					hi = math.Min(hi, end)
				case noVapour: // not even superheated there
					return Limit{}, f.noLimit(P, t, end, end, end, isSpinodal)
				}
				spinodal = true
			}
			next = lo + 0.5*(hi-lo)
			if hi-next > 0.1*hi {
				next = hi - 0.1*hi // limits lie near the hot end
			}
		}
		if hi-lo <= 4e-15*hi {
			if lo == f.tlo {
				return Limit{}, &StateError{f.name, f.tlo, P, "the target is exceeded, or there is no liquid, at the coldest temperature for which properties are known already"}
			}
			if f.met(lo, P, t, &p) {
				return f.limitAt(&p, t, i+1, false)
			}
			return Limit{}, &ConvergenceError{Fluid: f.name, Equation: f.source(), Given: P, Lo: lo, Hi: hi, Residual: residual, Iterations: i}
		}
		T = next
	}
	return Limit{}, &ConvergenceError{Fluid: f.name, Equation: f.source(), Given: P, Lo: lo, Hi: hi, Residual: residual, Iterations: maxSteps}
}

// checkTarget refuses a target that no flux can meet: of a volume, time or rate that
// is not positive and finite.
func (f *Fluid) checkTarget(t Target) error {
	if math.Abs(t.LnJ) <= math.MaxFloat64 {
		return nil
	}
	return &eos.DomainError{Fluid: f.name, Equation: f.source(), Quantity: "kinetic limit", Argument: "ln of the target flux", Value: t.LnJ, Lo: math.Inf(-1), Hi: math.Inf(1), Unit: "(of m-3.s-1)"}
}

// firstGuess is a temperature near which organic liquids reach a threshold of
// some 10¹² m⁻³s⁻¹: a fixed fraction below the spinodal, closing towards the
// critical point.
func (f *Fluid) firstGuess(P float64) float64 {
	if f.corr {
		return math.Min(0.9*f.thi, f.tlo+0.9*(f.thi-f.tlo))
	}
	m := &f.c.Model
	t0 := m.ZeroPressureSpinodalTemperature()
	r := math.Max(P/m.Pc, -1)
	T := t0 + (m.Tc-t0)*r - 0.02*m.Tc*(1-r)
	return math.Min(math.Max(T, f.tlo+0.01*(f.thi-f.tlo)), f.tlo+0.999*(f.thi-f.tlo))
}

// hottest is the last temperature before the spinodal at P, or before the end of
// the properties if that comes first.
func (f *Fluid) hottest(P float64) (T float64, spinodal bool) {
	T = f.thi
	if !f.corr {
		if s, err := f.c.Model.LiquidSpinodalTemperature(P); err == nil && s.T < T {
			T, spinodal = s.T, true
		}
	}
	return T * (1 - 1e-11), spinodal
}

// noLimit is the error of a flux that does not reach the target from inside up to end; top
// is where it comes closest.
func (f *Fluid) noLimit(P float64, t Target, inside, end, top float64, spinodal bool) error {
	e := &NoLimitError{Fluid: f.name, Given: P, Threshold: t.LnJ / math.Ln10, End: end, Spinodal: spinodal, inside: inside}
	var p point
	if f.evaluate(top, P, &p) == fine && p.excess > 0 {
		e.Reached, e.Known, e.Threshold = p.lnJ()/math.Ln10, true, f.wanted(&p, t)/math.Ln10
	}
	return e
}

// wanted is the threshold lnJ* at the state p: for a per-kelvin target it moves
// slowly with T through dlnJ/dT.
func (f *Fluid) wanted(p *point, t Target) float64 {
	if !t.PerKelvin {
		return t.LnJ
	}
	// A hair below the spinodal the density of the liquid, and with it J, falls as the root of
	// the distance; a target that follows would be met by a slope going to zero.
	s := math.Max(p.lnJSlope(), -0.5*p.total(&p.dbarrier))
	if !(s > 1e-3) || !(p.excess > 0) {
		s = 1e-3 // not yet near a limit; any positive slope will do to get there
	}
	return t.LnJ + math.Log(s)
}

// psi is ψ and its derivative with respect to T or, at given T, to P_l. The slow
// drift of a per-kelvin threshold is left out of the slope.
// A threshold above lnA, which no barrier can meet, gives ψ = −1 and no slope.
func (f *Fluid) psi(p *point, t Target, atT bool) (ψ, slope float64) {
	L := p.lnA - f.wanted(p, t)
	if !(L > 0) {
		return -1, math.NaN()
	}
	required := math.Sqrt(16 * math.Pi * p.sigma * p.sigma * p.sigma / (3 * eos.Boltzmann * p.T * L))
	var d partials
	h := p.excess / required
	for k := range d {
		dlnrequired := 1.5*p.dsigma[k]/p.sigma - 0.5*p.dlnA[k]/L
		d[k] = p.dpv[k]/required - h*dlnrequired
	}
	d[inP] -= 1 / required
	d[inT] += 0.5 * h / p.T
	if atT {
		return h - 1, d[inP]
	}
	return h - 1, p.total(&d)
}

// limitAt assembles the result at a converged state.
func (f *Fluid) limitAt(p *point, t Target, evaluations int, atT bool) (Limit, error) {
	x, err := f.fluxAt(p)
	if err != nil {
		return Limit{}, err
	}
	l := Limit{T: x.T, P: x.P, LnJ: x.LnJ, DT: x.DT, DP: x.DP, Barrier: x.Barrier, Held: x.Held, Evaluations: evaluations}
	// dR = (∂lnJ − ∂ln s) of the condition lnJ − [ln s] = const.
	dT, dP, g := x.DT, x.DP, x.Gradient
	if t.PerKelvin {
		sT, sP, sg, err := f.slopeGradient(p)
		if err != nil {
			return Limit{}, err
		}
		dT -= sT
		dP -= sP
		for k := range g {
			g[k] -= sg[k]
		}
	}
	along, given := dT, dP
	if atT {
		along, given = dP, dT
	}
	for k := range g {
		l.Gradient[k] = -g[k] / along
	}
	l.DThreshold = math.Ln10 / along
	l.DGiven = -given / along
	return l, nil
}

// slopeGradient returns the derivatives of ln(∂lnJ/∂T) with respect to T, P and
// the parameters, by central differences in T of the analytic first derivatives.
// A step of 1e-5·T leaves a relative error of (1e-5·T·d/dT)² ~ 1e-7 at worst. Where
// the spinodal is closer than that the liquid changes as the root of the distance to
// it, and the step is made small against the distance.
func (f *Fluid) slopeGradient(p *point) (dT, dP float64, g Gradient, err error) {
	var up, down point
	up.xl, up.xv, down.xl, down.xv = p.xl, p.xv, p.xl, p.xv
	h := 1e-5 * p.T
	beyond := false
	for f.evaluate(p.T+h, p.P, &up) != fine && h > 1e-12*p.T {
		h, beyond = h/16, true
	}
	if beyond {
		h /= 16
	}
	hi, lo := p.T+h, p.T-h
	if f.evaluate(hi, p.P, &up) != fine {
		up, hi = *p, p.T // one-sided against the spinodal
	}
	if c := f.evaluate(lo, p.P, &down); c != fine {
		return 0, 0, g, f.explain(c, lo, p.P)
	}
	gu, err := f.gradient(&up)
	if err != nil {
		return 0, 0, g, err
	}
	gd, err := f.gradient(&down)
	if err != nil {
		return 0, 0, g, err
	}
	scale := 1 / ((hi - lo) * p.lnJSlope())
	dT = (up.lnJSlope() - down.lnJSlope()) * scale
	dP = (up.dlnJ(inP) - down.dlnJ(inP)) * scale
	for k := range g {
		g[k] = (gu[k] - gd[k]) * scale
	}
	return dT, dP, g, nil
}
