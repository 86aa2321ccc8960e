package eos

// State tells how stable a point of the P–v plane is.
type State string

// The states of a pure fluid along an isotherm, from small to large volume.
const (
	SubcooledLiquid      State = "subcooled liquid"
	SaturatedLiquid      State = "saturated liquid"
	SuperheatedLiquid    State = "superheated liquid (metastable)"
	Unstable             State = "unstable"
	SupersaturatedVapour State = "supersaturated vapour (metastable)"
	SaturatedVapour      State = "saturated vapour"
	SuperheatedVapour    State = "superheated vapour"
	Supercritical        State = "supercritical fluid"
)

// Metastable tells whether a state is stable against small fluctuations only.
func (s State) Metastable() bool { return s == SuperheatedLiquid || s == SupersaturatedVapour }

// Isotherm classifies the volumes of one temperature.
type Isotherm struct {
	T           float64
	Saturation  Saturation // zero above Tc
	Liquid      SpinodalState
	Vapour      SpinodalState
	Subcritical bool
	m           *Model
}

// Isotherm prepares the classification of states at T. Above Tc every state is
// a supercritical fluid.
//
// Errors: those of Saturation, except that T ≥ Tc is none.
func (m *Model) Isotherm(T float64) (Isotherm, error) {
	iso := Isotherm{T: T, m: m}
	var err error
	if T >= m.Tc {
		if err = m.checkTV("isotherm", T, 2*m.B); err != nil {
			return Isotherm{}, err
		}
		return iso, nil
	}
	if iso.Saturation, err = m.Saturation(T); err != nil {
		return Isotherm{}, err
	}
	if iso.Liquid, iso.Vapour, err = m.Spinodal(T); err != nil {
		return Isotherm{}, err
	}
	iso.Subcritical = true
	return iso, nil
}

// State classifies the molar volume v in m³/mol, v > b; for any other v there is
// no state and the answer is empty.
func (iso *Isotherm) State(v float64) State {
	switch s := &iso.Saturation; {
	case !(v > iso.m.B):
		return ""
	case !iso.Subcritical:
		return Supercritical
	case v < s.Vl:
		return SubcooledLiquid
	case v == s.Vl:
		return SaturatedLiquid
	case v < iso.Liquid.V:
		return SuperheatedLiquid
	case v <= iso.Vapour.V:
		return Unstable
	case v < s.Vv:
		return SupersaturatedVapour
	case v == s.Vv:
		return SaturatedVapour
	default:
		return SuperheatedVapour
	}
}

// Point is one point of an isotherm.
type Point struct {
	V, P  float64 // m³/mol, Pa
	Mu    float64 // chemical potential relative to saturation in J/mol (0 above Tc)
	State State
}

// At returns pressure, chemical potential and state at the molar volume v.
//
// Errors: *DomainError for v ≤ b.
func (iso *Isotherm) At(v float64) (Point, error) {
	p, err := iso.m.Pressure(iso.T, v)
	if err != nil {
		return Point{}, err
	}
	pt := Point{V: v, P: p, State: iso.State(v)}
	if iso.Subcritical {
		if pt.Mu, err = iso.m.chemicalPotential(iso.Saturation, v); err != nil {
			return Point{}, err
		}
	}
	return pt, nil
}
