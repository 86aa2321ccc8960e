package nucleation

import (
	"math"

	"limsup/eos"
)

// Kind tells what an embryo is made of.
type Kind string

// The kinds of embryo.
const (
	Bubble  Kind = "bubble"  // of vapour in a superheated liquid
	Droplet Kind = "droplet" // of liquid in a supersaturated vapour
)

// Embryo is a critical embryo: in mechanical and chemical equilibrium with the
// metastable phase around it, unstable against growth and collapse.
type Embryo struct {
	Kind       Kind
	T, P       float64 // of the metastable phase: K, Pa
	Saturation float64 // saturation pressure at T, Pa
	// Pressure is the pressure inside in Pa, from equal fugacity (or by the form that
	// the fluid is set to); Approximate is that of the textbook form: Poynting for a
	// bubble, Kelvin for a droplet.
	Pressure, Approximate float64
	TensionFlat           float64 // σ∞ in N/m
	Tension               float64 // σ of the embryo in N/m
	Radius                float64 // r* in m
	Barrier               float64 // ΔG* in J
	BarrierOverKT         float64
	Molecules             float64 // in the embryo
	Excess                float64 // molecules in the embryo beyond those of the parent phase in its place
	LnJ                   float64 // ln of the flux in m⁻³s⁻¹
	Held                  bool    // see Flux
}

// Embryo returns the critical embryo of the state (T, P): a bubble if the liquid
// is superheated there (P below saturation), a droplet if the vapour is
// supersaturated. Droplets need properties from the equation.
//
// Errors: *NotMetastableError on the saturation line and, with correlations,
// above it; *eos.PhaseError beyond a spinodal; *eos.DomainError; *StateError.
func (f *Fluid) Embryo(T, P float64) (Embryo, error) {
	if !(T >= f.tlo && T < f.thi) {
		return Embryo{}, f.explain(outsideRange, T, P)
	}
	ps := f.saturation(T)
	if !(ps > 0) {
		return Embryo{}, f.explain(noSaturation, T, P)
	}
	if P > ps && !f.corr {
		return f.droplet(T, P)
	}
	return f.bubble(T, P, ps)
}

func (f *Fluid) bubble(T, P, ps float64) (Embryo, error) {
	x, err := f.Flux(T, P)
	if err != nil {
		return Embryo{}, err
	}
	var p point
	if c := f.evaluate(T, P, &p); c != fine {
		return Embryo{}, f.explain(c, T, P)
	}
	e := Embryo{
		Kind: Bubble, T: T, P: P, Saturation: ps, Pressure: p.pv,
		TensionFlat: p.sigmaFlat, Tension: p.sigma, Radius: 2 * p.sigma / p.excess,
		BarrierOverKT: p.barrier, Barrier: p.barrier * eos.Boltzmann * T,
		LnJ: x.LnJ, Held: x.Held,
	}
	if !e.count(p.vVapour, p.vLiquid) {
		return Embryo{}, f.tooLarge(T, P)
	}
	v := p.vLiquid
	if !f.corr {
		s, err := f.c.Model.Saturation(T)
		if err != nil {
			return Embryo{}, err
		}
		v = s.Vl
	}
	e.Approximate = ps * math.Exp(v*(P-ps)/(eos.GasConstant*T))
	return e, nil
}

// droplet finds the liquid of equal fugacity inside; its flux is that of
// R. Becker and W. Döring, Ann. Phys. 416 (1935) 719, with the number of molecules
// per volume N_v of the vapour:
//
//	J = N_v·(P/kT)·(v_l/N_A)·√(2σ/(πm))·exp(−W).
//
// Kelvin's approximation is an incompressible liquid under an ideal vapour,
// P_l − P = (RT/v_l)·ln(P/P_sat).
func (f *Fluid) droplet(T, P float64) (Embryo, error) {
	m := &f.c.Model
	vv, err := m.Vapour(T, P)
	if err != nil {
		return Embryo{}, err
	}
	s, err := m.Saturation(T)
	if err != nil {
		return Embryo{}, err
	}
	sigma, _, err := f.c.Tension.Sigma(T)
	if err != nil || !(sigma > 0) {
		return Embryo{}, f.explain(noTension, T, P)
	}
	tau, _ := m.Tau(T)
	k := eos.GasConstant * T / m.B
	xl, ok := m.LiquidOfFugacity(m.Form.LnFugacity(vv/m.B, tau), tau)
	if !ok {
		return Embryo{}, &StateError{f.name, T, P, "no liquid is in equilibrium with the vapour"}
	}
	e := Embryo{Kind: Droplet, T: T, P: P, Saturation: s.P, Pressure: m.Form.Pressure(xl, tau) * k,
		TensionFlat: sigma * f.c.TensionFactor,
		Approximate: P + eos.GasConstant*T/s.Vl*math.Log(P/s.P)}
	excess := e.Pressure - P
	if !(excess > 0) {
		return Embryo{}, &NotMetastableError{Fluid: f.name, Phase: "vapour", T: T, P: P, Saturation: s.P}
	}
	e.Tension = e.TensionFlat - f.c.TolmanLength*excess
	if !(e.Tension > 0) {
		return Embryo{}, f.explain(tolmanTooLarge, T, P)
	}
	e.Radius = 2 * e.Tension / excess
	e.Barrier = 16 * math.Pi * e.Tension * e.Tension * e.Tension / (3 * excess * excess)
	e.BarrierOverKT = e.Barrier / (eos.Boltzmann * T)
	e.LnJ = math.Log(eos.Avogadro/vv*P/(eos.Boltzmann*T)*xl*m.B/eos.Avogadro) + 0.5*math.Log(e.Tension) + f.lnMass + f.prefactor - e.BarrierOverKT
	if !e.count(xl*m.B, vv) || math.IsInf(e.Barrier, 0) {
		return Embryo{}, f.tooLarge(T, P)
	}
	return e, nil
}

func (f *Fluid) tooLarge(T, P float64) error {
	return &StateError{f.name, T, P, "too close to saturation for a critical embryo of finite size"}
}

// count sets the number of molecules from the molar volumes inside and outside;
// false when the embryo is too large for it to be a number.
func (e *Embryo) count(inside, outside float64) bool {
	volume := 4 * math.Pi / 3 * e.Radius * e.Radius * e.Radius
	e.Molecules = volume * eos.Avogadro / inside
	e.Excess = volume * eos.Avogadro * (1/inside - 1/outside)
	return !math.IsInf(e.Molecules, 0) && !math.IsInf(e.Excess, 0)
}

// FreeEnergy is ΔG(r) = 4πr²σ − (4/3)πr³(P_inside − P) in J for an embryo of
// radius r in m with the pressure and the tension of the critical one. It rises
// from zero to its maximum ΔG* at r*, and falls through zero at (3/2)r*.
func (e *Embryo) FreeEnergy(r float64) float64 {
	d := e.Tension - r*(e.Pressure-e.P)/3
	if math.Abs(d) < 8*0x1p-52*e.Tension {
		d = 0 // at 3/2 of the critical radius the terms cancel, and what is left is the rounding of a processor
	}
	return 4 * math.Pi * r * r * d
}

// FreeEnergySlopes are dΔG/dr in N and d²ΔG/dr² in N/m.
func (e *Embryo) FreeEnergySlopes(r float64) (first, second float64) {
	ΔP := e.Pressure - e.P
	return 8*math.Pi*r*e.Tension - 4*math.Pi*r*r*ΔP, 8*math.Pi*e.Tension - 8*math.Pi*r*ΔP
}

// CurvePoint is a point of ΔG(r).
type CurvePoint struct {
	Radius     float64 // m
	FreeEnergy float64 // J
}

// Curve returns n ≥ 2 points of ΔG(r) at equal steps from 0 to 1.6 r*; the one
// nearest to r* is not moved onto it.
func (e *Embryo) Curve(n int) []CurvePoint {
	c := make([]CurvePoint, max(n, 2))
	for i := range c {
		r := 1.6 * e.Radius * float64(i) / float64(len(c)-1)
		c[i] = CurvePoint{r, e.FreeEnergy(r)}
	}
	return c
}
