package campaign

import (
	"math"
	"slices"
	"strings"

	"limsup/eos"
	"limsup/fit"
)

// Ambient is the pressure in Pa to which a bursting sample expands: one standard
// atmosphere, exact (10th CGPM, 1954).
const Ambient = 101325

// Stored is what a superheated sample holds.
type Stored struct {
	Fluid            string
	Temperature      float64 // K, expected at the limit
	Pressure         float64 // Pa
	Volume           float64 // m³; 0: not stated
	Mass             float64 // kg; 0 without a volume
	SpecificEnergy   float64 // J/kg, an upper bound, see Energy
	Energy           float64 // J, of the sample; 0 without a volume
	SaturationP      float64 // Pa: what a closed vessel must hold while it is at this temperature
	Expansion        float64 // volume of the vapour at ambient pressure by that of the liquid
	Hazard           string  // of the fluid's record
	Flammable, Toxic bool
	Asphyxiant       bool
}

// Store estimates the stored energy of a reading from the equation of state.
//
// The bound is the loss of availability when the liquid at (T, P) becomes vapour at
// (T, 101 325 Pa) in surroundings at that pressure,
//
//	w = RT·ln(f_l/f_v) − (P − P₀)·v_l,
//
// the largest work that any process can do that ends at ambient pressure and
// takes heat, if any, at T. An adiabatic burst ends colder and wetter and does
// less, often by a factor of several; but the number needs nothing beyond the
// equation of state, which knows no heat capacity, and errs on the safe side.
// Burning, decomposition and the energy of a hot bath or a pressurised host liquid
// are not in it. (Derivation: W ≤ Φ₁ − Φ₂ with Φ = U − TS + P₀V, which is least at
// (T, P₀) for the stable phase there.)
//
// Errors: *eos.DomainError, *eos.PhaseError and the other errors of the state.
func (p *Plan) Store(reading int) (Stored, error) {
	if reading < 0 || reading >= len(p.Readings) {
		return Stored{}, &InputError{"stored energy", "one of the readings"}
	}
	return Store(p.Model, &p.Readings[reading])
}

// Store estimates the stored energy of a reading under a model; see Plan.Store.
func Store(m *fit.Model, r *Reading) (Stored, error) {
	q := r.Query()
	ph, err := fit.NewEquationPhysics(m.Variant, r.Record, m.Values(&q))
	if err != nil {
		return Stored{}, err
	}
	h := strings.ToLower(r.Record.Hazard)
	s := Stored{Fluid: r.Record.Key, Temperature: r.Expected, Pressure: r.Pressure, Volume: r.Volume, Hazard: r.Record.Hazard,
		Flammable: strings.Contains(h, "flammable") || strings.Contains(h, "peroxide") || strings.Contains(h, "oxidiser"),
		Toxic: strings.Contains(h, "toxic") || strings.Contains(h, "cancer") || strings.Contains(h, "narcotic") || strings.Contains(h, "harmful") ||
			strings.Contains(h, "damages") || strings.Contains(h, "cyanide"),
		Asphyxiant: strings.Contains(h, "asphyxiant") || strings.Contains(h, "suffocating")}
	T := r.Expected
	sat, err := ph.Model.Saturation(T)
	if err != nil {
		return s, err
	}
	s.SaturationP = sat.P
	v, err := ph.Model.Liquid(T, r.Pressure)
	if err != nil {
		return s, err
	}
	M := r.Record.MolarMass.Value
	if r.Volume > 0 {
		s.Mass = r.Volume / v * M
	}
	if sat.P <= Ambient {
		return s, nil // it does not boil at ambient pressure: nothing is released by expansion
	}
	vv, err := ph.Model.Vapour(T, Ambient)
	if err != nil {
		return s, err
	}
	fl, err := ph.Model.LnFugacity(T, v)
	if err != nil {
		return s, err
	}
	fv, err := ph.Model.LnFugacity(T, vv)
	if err != nil {
		return s, err
	}
	w := eos.GasConstant*T*(fl-fv) - (r.Pressure-Ambient)*v
	s.SpecificEnergy = math.Max(0, w) / M
	s.Energy, s.Expansion = s.SpecificEnergy*s.Mass, vv/v
	return s, nil
}

// Precautions are the cautions of a campaign, in the order in which they are
// shown. They depend on the fluids in it.
func Precautions(stored []Stored) []string {
	out := []string{
		"A droplet at its limit boils as an explosion. Wear hearing and eye protection, keep people and glass out of the line of the sample, and count on the fragments of its vessel.",
		"Put the sample, its bath and its vessel in a second containment that holds the whole bath and vents the vapour.",
		"A larger sample stores proportionally more and reaches the same temperature less surely: start with the smallest that answers the question.",
	}
	var flammable, toxic, asphyxiant []string
	for _, s := range stored {
		for _, k := range [...]struct {
			is   bool
			list *[]string
		}{{s.Flammable, &flammable}, {s.Toxic, &toxic}, {s.Asphyxiant, &asphyxiant}} {
			if k.is && !slices.Contains(*k.list, s.Fluid) {
				*k.list = append(*k.list, s.Fluid)
			}
		}
	}
	if len(flammable) > 0 {
		out = append(out, "Burns or feeds fire: "+strings.Join(flammable, ", ")+". Keep ignition sources and hot wires away from the vapour; burning releases far more than the energies shown.")
	}
	if len(toxic) > 0 {
		out = append(out, "Harmful or toxic: "+strings.Join(toxic, ", ")+". Work under extraction and read the safety data sheet first.")
	}
	if len(asphyxiant) > 0 {
		out = append(out, "Displaces air: "+strings.Join(asphyxiant, ", ")+". Ventilate and monitor oxygen.")
	}
	return append(out, "These are estimates for a first look. The safety rules of the laboratory, local codes and licensed practice decide.")
}
