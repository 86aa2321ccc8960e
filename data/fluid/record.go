package fluid

import (
	"fmt"
	"math"
	"slices"

	"limsup/data/quantity"
	"limsup/eos/tension"
)

// Value is a number with the unit in which it was given and where it comes from.
type Value struct {
	Value  float64 // SI
	Given  float64 // in Unit
	Unit   string  // UCUM code
	Source string
}

// NewValue converts a number given in a unit of dimension d.
//
// Errors: *quantity.Error for an unknown unit, one of another dimension or a number
// that SI cannot hold.
func NewValue(given float64, unit string, d quantity.Dimension, source string) (Value, error) {
	u, err := quantity.ParseUnit(unit)
	if err != nil {
		return Value{}, err
	}
	return valueIn(given, unit, u, d, source)
}

// valueIn is NewValue with the unit already parsed.
func valueIn(given float64, code string, u quantity.Unit, d quantity.Dimension, source string) (Value, error) {
	si, err := quantity.Quantity{Value: given, Unit: u}.In(d)
	if err != nil {
		return Value{}, err
	}
	return Value{Value: si, Given: given, Unit: code, Source: source}, nil
}

// Record is what is known about one fluid. Records from Parse, Builtin or JSON are
// complete and checked; treat them as read-only.
type Record struct {
	Key     string   // name in files and on the command line: "n-pentane"
	Name    string   // for display
	Aliases []string // other names
	CAS     string   // CAS registry number; may be empty
	Formula string   // sum formula, Hill order; may be empty
	Hazard  string   // what to beware of in one phrase; may be empty
	Note    string   // remarks on the values; may be empty

	MolarMass           Value // kg/mol
	CriticalTemperature Value // K
	CriticalPressure    Value // Pa
	AcentricFactor      Value // 1

	CriticalDensity    *Value // kg/m³, also if given per mole
	BoilingTemperature *Value // K, at 101 325 Pa
	TripleTemperature  *Value // K

	SurfaceTension *Tension
	VapourPressure *SaturationPressure // of the liquid
	LiquidDensity  *Density            // saturated
	VapourDensity  *Density            // saturated
}

// Tension is the fluid's surface tension fit.
type Tension struct {
	Form                string         // "power-sum" or "dippr-106"
	CriticalTemperature float64        // Tc of the fit, K; may differ from that of the record
	Terms               []tension.Term // power-sum: coefficients in Unit
	Coefficients        []float64      // dippr-106: A in Unit, B, C, D, E
	Unit                string         // UCUM code
	Lo, Hi              float64        // range of the fit in K; both 0 if not known
	Source, Note        string
	fn                  tension.Func
}

// build checks the constants and makes the function.
func (t *Tension) build() (tension.Func, error) {
	u, err := unitOf(t.Unit, quantity.SurfaceTension)
	if err != nil {
		return nil, err
	}
	if t.Form == "dippr-106" {
		var c [5]float64
		copy(c[:], t.Coefficients)
		f, err := tension.NewDIPPR106(t.CriticalTemperature, u.ToSI(c[0]), c[1], c[2], c[3], c[4])
		if err != nil {
			return nil, err
		}
		return f, nil
	}
	terms := make([]tension.Term, len(t.Terms))
	for i, k := range t.Terms {
		terms[i] = tension.Term{Coefficient: u.ToSI(k.Coefficient), Exponent: k.Exponent}
	}
	f, err := tension.NewPowerSum(t.CriticalTemperature, terms...)
	if err != nil {
		return nil, err
	}
	return f, nil
}

// unitOf parses a unit whose dimension must be one of those allowed.
func unitOf(code string, allowed ...quantity.Dimension) (quantity.Unit, error) {
	u, err := quantity.ParseUnit(code)
	if err != nil || slices.Contains(allowed, u.Dimension()) {
		return u, err
	}
	_, err = quantity.Quantity{Value: 1, Unit: u}.In(allowed[0])
	return u, err
}

// Tension returns the fluid's surface tension.
//
// Errors: *MissingError when the record has none.
func (r *Record) Tension() (tension.Func, error) {
	if r.SurfaceTension == nil {
		return nil, &MissingError{r.Key, "surface tension"}
	}
	if r.SurfaceTension.fn != nil {
		return r.SurfaceTension.fn, nil
	}
	f, err := r.SurfaceTension.build()
	if err != nil {
		return nil, fmt.Errorf("fluid %s: %w", r.Key, err)
	}
	return f, nil
}

// TensionRange is the range of temperature in K for which the source states the
// surface tension fit; ok is false when there is no fit or no stated range. Tension
// works beyond it, up to its own Tc.
func (r *Record) TensionRange() (lo, hi float64, ok bool) {
	if t := r.SurfaceTension; t != nil && t.Hi > 0 {
		return t.Lo, t.Hi, true
	}
	return 0, 0, false
}

// CorrespondingStates returns the estimate of the surface tension from the critical
// point and the boiling temperature.
//
// Errors: *MissingError when the record has no boiling temperature (carbon dioxide
// has none: it sublimes at 101 325 Pa); *tension.ParameterError when the constants do
// not fit together.
func (r *Record) CorrespondingStates() (tension.Func, error) {
	if r.BoilingTemperature == nil {
		return nil, &MissingError{r.Key, "boiling temperature"}
	}
	f, err := tension.NewCorrespondingStates(r.CriticalTemperature.Value, r.CriticalPressure.Value, r.BoilingTemperature.Value)
	if err != nil {
		return nil, fmt.Errorf("fluid %s: %w", r.Key, err)
	}
	return f, nil
}

// Warnings lists what in the record does not fit together but does not make it
// unusable: an acentric factor or boiling temperature far from the record's own
// vapour pressure, a surface tension that vanishes far from the critical point.
func (r *Record) Warnings() []string {
	var out []string
	warn := func(format string, a ...any) { out = append(out, "fluid "+r.Key+": "+fmt.Sprintf(format, a...)) }
	tc, pc := r.CriticalTemperature.Value, r.CriticalPressure.Value
	if v := r.VapourPressure; v != nil {
		if p, _, err := v.At(0.7 * tc); err == nil {
			if ω := -1 - math.Log10(p/pc); math.Abs(ω-r.AcentricFactor.Value) > acentricTolerance {
				warn("acentric factor %.4g, but its vapour pressure at 0.7 Tc gives %.4g", r.AcentricFactor.Value, ω)
			}
		}
		if b := r.BoilingTemperature; b != nil {
			if p, dlnp, err := v.At(b.Value); err == nil {
				if d := math.Log(101325/p) / dlnp; math.Abs(d) > boilingTolerance {
					warn("boiling temperature %.6g K, but its vapour pressure gives %.6g K", b.Value, b.Value+d)
				}
			}
		}
		if _, hi := v.Range(); hi > 0 {
			if p, _, err := v.At(hi); err == nil && hi < tc && p > pc {
				warn("vapour pressure %.6g kPa at %.6g K is above the critical pressure", p/1e3, hi)
			}
		}
	}
	if t := r.SurfaceTension; t != nil && math.Abs(t.CriticalTemperature/tc-1) > tensionTcTolerance {
		warn("surface tension vanishes at %.6g K, the critical temperature is %.6g K", t.CriticalTemperature, tc)
	}
	return out
}

const (
	acentricTolerance  = 0.05 // in lg P; differences between published sources stay below 0.035
	boilingTolerance   = 0.5  // K
	tensionTcTolerance = 0.01 // relative
)
