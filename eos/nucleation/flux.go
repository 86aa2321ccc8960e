package nucleation

import (
	"fmt"
	"math"

	"limsup/eos"
)

// Parameter numbers the quantities that a calibration can free, in the order of
// Gradient.
type Parameter int

// The tunable parameters of a flux.
const (
	Attraction     Parameter = iota // factor on a
	Covolume                        // factor on b
	Slope                           // factor on the slope (or the exponent) of α
	SurfaceTension                  // factor on σ∞
	TolmanLength                    // δ in m
	Prefactor                       // decades added to log₁₀J
	Parameters                      // their number
)

// Gradient holds derivatives with respect to the tunable parameters.
type Gradient [Parameters]float64

// gradient is ∂lnJ/∂parameter at constant T and P_l.
func (f *Fluid) gradient(p *point) (Gradient, error) {
	var g Gradient
	dtau, db, dsig := p.dlnJ(inTau), p.dlnJ(inB), p.dlnJ(inSig)
	if !f.corr {
		a, c, s := f.c.Model.TauGradient(p.T)
		g[Attraction] = dtau * a
		g[Covolume] = dtau*c + db/f.c.Model.Tuning().Covolume
		g[Slope] = dtau * s
	}
	if f.tuned != nil {
		t, err := f.tuned.TuningGradient(p.T)
		if err != nil {
			return g, err
		}
		g[Attraction] += dsig * t[0]
		g[Covolume] += dsig * t[1]
		g[Slope] += dsig * t[2]
	}
	g[SurfaceTension] = dsig / f.c.TensionFactor
	g[TolmanLength] = p.dlnJ(inTol)
	g[Prefactor] = math.Ln10
	return g, nil
}

// Flux is the nucleation flux at one state, with its derivatives.
type Flux struct {
	T, P     float64  // K, Pa
	LnJ      float64  // ln(J/(m⁻³s⁻¹)), prefactor included
	DT, DP   float64  // ∂lnJ/∂T in 1/K, ∂lnJ/∂P_l in 1/Pa
	Gradient Gradient // ∂lnJ/∂parameter
	Barrier  float64  // W = ΔG*/(kT)
	// Held is set when the liquid is under so much tension that the kinetic
	// factor of the mechanical picture would vanish; it is then held at 0.1, and the
	// stepwise factor at its value there.
	Held bool
}

// Log10J is log₁₀(J/(m⁻³s⁻¹)).
func (x *Flux) Log10J() float64 { return x.LnJ / math.Ln10 }

// Flux returns
//
//	J = N·√(2σ/(πmB))·exp(−W),   W = 16πσ³/(3kT(P_v−P_l)²)
//
// for a superheated liquid (M. Blander and J. L. Katz, AIChE J. 21 (1975) 833,
// citation from memory), times the stepwise factor with that kinetics. Far from
// the limit lnJ is a large negative number; it does not underflow.
//
// Errors: *NotMetastableError, *eos.PhaseError, *eos.DomainError, *StateError.
func (f *Fluid) Flux(T, P float64) (Flux, error) {
	var p point
	if c := f.evaluate(T, P, &p); c != fine {
		return Flux{}, f.explain(c, T, P)
	}
	if !(p.excess > 0) {
		return Flux{}, &NotMetastableError{Fluid: f.name, Phase: "liquid", T: T, P: P, Saturation: f.saturation(T)}
	}
	return f.fluxAt(&p)
}

func (f *Fluid) fluxAt(p *point) (Flux, error) {
	g, err := f.gradient(p)
	if err != nil {
		return Flux{}, err
	}
	x := Flux{T: p.T, P: p.P, LnJ: p.lnJ(), DT: p.lnJSlope(), DP: p.dlnJ(inP), Gradient: g, Barrier: p.barrier, Held: p.held}
	if !(math.Abs(x.LnJ) < math.MaxFloat64 && math.Abs(x.DT) < math.MaxFloat64 && math.Abs(x.DP) < math.MaxFloat64) {
		return Flux{}, &StateError{f.name, p.T, p.P, fmt.Sprintf("the barrier, %.3g kT, is not a usable number this close to saturation", p.barrier)}
	}
	return x, nil
}

// saturation is the saturation pressure at T, or 0 where there is none.
func (f *Fluid) saturation(T float64) float64 {
	if f.corr {
		p, _, err := f.c.Correlations.VapourPressure(T)
		if err != nil {
			return 0
		}
		return p
	}
	s, err := f.c.Model.Saturation(T)
	if err != nil {
		return 0
	}
	return s.P
}

// explain turns a cause into an error.
func (f *Fluid) explain(c cause, T, P float64) error {
	switch c {
	case outsideRange:
		return &eos.DomainError{Fluid: f.name, Equation: f.source(), Quantity: "flux", Argument: "temperature", Value: T, Lo: f.tlo, Hi: f.thi, Unit: "K"}
	case badPressure:
		return &eos.DomainError{Fluid: f.name, Equation: f.source(), Quantity: "flux", Argument: "pressure", Value: P, Lo: -maxPressure, Hi: maxPressure, Unit: "Pa"}
	case noLiquid:
		_, err := f.c.Model.Liquid(T, P)
		if err != nil {
			return err
		}
		return &StateError{f.name, T, P, "the state is on the liquid spinodal"}
	case noVapour:
		return &NotMetastableError{Fluid: f.name, Phase: "liquid", T: T, P: P, Saturation: f.saturation(T)}
	case noTension:
		if _, _, err := f.c.Tension.Sigma(T); err != nil {
			return fmt.Errorf("flux of %s: %w", f.name, err)
		}
		return &StateError{f.name, T, P, "the surface tension is not positive"}
	case tolmanTooLarge:
		return &StateError{f.name, T, P, fmt.Sprintf("no embryo of positive radius with a Tolman length of %.6g m", f.c.TolmanLength)}
	default:
		if _, err := f.c.Model.Saturation(T); err != nil {
			return err
		}
		return &StateError{f.name, T, P, "no saturation pressure"}
	}
}

// source names where the properties come from, for errors.
func (f *Fluid) source() string {
	if f.corr {
		return "correlation"
	}
	return f.c.Model.Equation
}
