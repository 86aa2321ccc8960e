package fit

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"limsup/data/fluid"
	"limsup/eos"
	"limsup/eos/nucleation"
	"limsup/eos/tension"
)

// Limit names the kind of superheat limit.
type Limit string

// The kinds of limit.
const (
	Kinetic  Limit = "kinetic"  // the flux reaches the threshold
	Spinodal Limit = "spinodal" // the liquid loses stability
)

// Tension names a model of surface tension.
type Tension string

// The models of surface tension.
const (
	TensionCorrelation  Tension = "correlation"          // the fluid's own fit
	CorrespondingStates Tension = "corresponding-states" // from Tc, Pc and the boiling temperature
	TensionFromParachor Tension = "parachor"             // from the densities of the equation
	parachorReferenceTr         = 0.7
)

// Variant is one way to predict superheat limits.
type Variant struct {
	Equation string
	// Custom is a user-defined equation; its name is Equation.
	Custom         *eos.Equation
	Limit          Limit
	Tension        Tension
	Properties     nucleation.Properties
	EmbryoPressure nucleation.EmbryoPressure
	Kinetics       nucleation.Kinetics
}

// DefaultVariant is the kinetic limit by the Soave equation with exact embryo
// pressure and the fluid's own surface tension.
func DefaultVariant() Variant {
	return Variant{Equation: "soave", Limit: Kinetic, Tension: TensionCorrelation,
		Properties: nucleation.FromEquation, EmbryoPressure: nucleation.Exact, Kinetics: nucleation.Mechanical}
}

// OptionError reports a word that an option does not know, or options that
// exclude each other.
type OptionError struct {
	Option, Value string
	Want          string
}

func (e *OptionError) Error() string {
	return fmt.Sprintf("%s %q: want %s", e.Option, e.Value, e.Want)
}

// Complete fills empty fields with their defaults and checks the words.
//
// Errors: *OptionError, *eos.UnknownEquationError.
func (v Variant) Complete() (Variant, error) {
	d := DefaultVariant()
	fill(&v.Equation, d.Equation)
	fill(&v.Limit, d.Limit)
	fill(&v.Tension, d.Tension)
	fill(&v.Properties, d.Properties)
	fill(&v.Kinetics, d.Kinetics)
	if v.EmbryoPressure == "" {
		v.EmbryoPressure = d.EmbryoPressure
		if v.Properties == nucleation.FromCorrelation {
			v.EmbryoPressure = nucleation.Poynting
		}
	}
	if v.Custom == nil {
		if _, err := eos.EquationByName(v.Equation); err != nil {
			return v, err
		}
	}
	for _, w := range [...]struct {
		option, value string
		want          []string
	}{
		{"limit", string(v.Limit), []string{string(Kinetic), string(Spinodal)}},
		{"surface-tension", string(v.Tension), []string{string(TensionCorrelation), string(CorrespondingStates), string(TensionFromParachor)}},
		{"properties", string(v.Properties), []string{string(nucleation.FromEquation), string(nucleation.FromCorrelation)}},
		{"embryo-pressure", string(v.EmbryoPressure), []string{string(nucleation.Exact), string(nucleation.Poynting)}},
		{"kinetics", string(v.Kinetics), []string{string(nucleation.Mechanical), string(nucleation.Chemical), string(nucleation.Stepwise)}},
	} {
		if !slices.Contains(w.want, w.value) {
			return v, &OptionError{w.option, w.value, "one of " + strings.Join(w.want, ", ")}
		}
	}
	if v.Properties == nucleation.FromCorrelation {
		if v.EmbryoPressure == nucleation.Exact {
			return v, &OptionError{"embryo-pressure", "exact", "poynting with properties from correlations, which know no fugacity of the metastable liquid"}
		}
		if v.Limit == Spinodal {
			return v, &OptionError{"limit", "spinodal", "kinetic with properties from correlations, which know no spinodal"}
		}
	}
	return v, nil
}

func fill[T ~string](field *T, value T) {
	if *field == "" {
		*field = value
	}
}

// Name is a short name of the variant: the equation, then what differs from the
// default.
func (v Variant) Name() string {
	d := DefaultVariant()
	parts := []string{v.Equation}
	if v.Limit == Spinodal {
		return v.Equation + " spinodal"
	}
	if v.Properties != d.Properties {
		parts = []string{"correlation properties"}
	}
	if v.Tension != d.Tension {
		parts = append(parts, string(v.Tension))
	}
	if v.EmbryoPressure != d.EmbryoPressure && v.Properties == d.Properties {
		parts = append(parts, string(v.EmbryoPressure))
	}
	if v.Kinetics != d.Kinetics {
		parts = append(parts, string(v.Kinetics))
	}
	return strings.Join(parts, ", ")
}

// equation is the table entry of the variant.
func (v *Variant) equation() (eos.Equation, error) {
	if v.Custom != nil {
		return *v.Custom, nil
	}
	return eos.EquationByName(v.Equation)
}

// Values are the parameters that a prediction for one fluid needs.
type Values struct {
	Threshold      float64 // log₁₀(J*/(m⁻³s⁻¹))
	Prefactor      float64 // decades
	Attraction     float64
	Covolume       float64
	Slope          float64
	SurfaceTension float64
	Tolman         float64 // nm
}

// Physics is one fluid under a variant with given parameters, ready to evaluate.
type Physics struct {
	Record  *fluid.Record
	Variant Variant
	Model   eos.Model
	// Fluid evaluates flux and embryos; nil with UnavailableError in Err when the
	// surface tension of the variant is not known for the fluid.
	Fluid     *nucleation.Fluid
	Threshold float64
}

// UnavailableError reports that a fluid's record lacks what a variant needs.
type UnavailableError struct {
	Fluid string
	Err   error
}

func (e *UnavailableError) Error() string { return e.Err.Error() }

// Unwrap returns what the record lacks.
func (e *UnavailableError) Unwrap() error { return e.Err }

// Substance returns the constants of a record that an equation needs.
func Substance(r *fluid.Record) eos.Substance {
	return eos.Substance{Name: r.Key, CriticalT: r.CriticalTemperature.Value, CriticalP: r.CriticalPressure.Value,
		Acentric: r.AcentricFactor.Value, MolarMass: r.MolarMass.Value}
}

// NewPhysics builds a fluid under a complete variant.
//
// Errors: *UnavailableError, *eos.ParameterError.
func NewPhysics(v Variant, r *fluid.Record, p Values) (*Physics, error) {
	ph, err := NewEquationPhysics(v, r, p)
	if err != nil || v.Limit == Spinodal {
		return ph, err
	}
	if err := ph.addNucleation(p); err != nil {
		return nil, err
	}
	return ph, nil
}

// NewEquationPhysics is NewPhysics without flux: all that needs the equation of
// state alone.
func NewEquationPhysics(v Variant, r *fluid.Record, p Values) (*Physics, error) {
	e, err := v.equation()
	if err != nil {
		return nil, err
	}
	m, err := eos.NewModel(e, Substance(r), eos.Tuning{Attraction: p.Attraction, Covolume: p.Covolume, Slope: p.Slope})
	if err != nil {
		return nil, err
	}
	return &Physics{Record: r, Variant: v, Model: m, Threshold: p.Threshold}, nil
}

func (ph *Physics) addNucleation(p Values) error {
	v, r := &ph.Variant, ph.Record
	σ, err := ph.tension()
	if err != nil {
		return &UnavailableError{r.Key, err}
	}
	c := nucleation.Config{Model: ph.Model, MolarMass: r.MolarMass.Value, Tension: σ, TensionFactor: p.SurfaceTension,
		TolmanLength: p.Tolman * 1e-9, Prefactor: p.Prefactor, EmbryoPressure: v.EmbryoPressure, Kinetics: v.Kinetics}
	if v.Properties == nucleation.FromCorrelation {
		if c.Correlations, err = newCorrelations(r); err != nil {
			return &UnavailableError{r.Key, err}
		}
	}
	ph.Fluid, err = nucleation.New(c)
	return err
}

// tension is the surface tension of the variant.
func (ph *Physics) tension() (tension.Func, error) {
	switch ph.Variant.Tension {
	case CorrespondingStates:
		return ph.Record.CorrespondingStates()
	case TensionFromParachor:
		flat, err := ph.Record.Tension()
		if err != nil {
			return nil, err
		}
		// The reference state is Tr = 0.7, moved into the range of the measurements.
		T := parachorReferenceTr * ph.Record.CriticalTemperature.Value
		if lo, hi, ok := ph.Record.TensionRange(); ok {
			T = math.Min(math.Max(T, lo), hi)
		}
		σ, _, err := flat.Sigma(T)
		if err != nil {
			return nil, err
		}
		return tension.NewParachor(ph.Model, T, σ)
	default:
		return ph.Record.Tension()
	}
}

// correlations adapts the correlations of a record to nucleation.
type correlations struct {
	r      *fluid.Record
	lo, hi float64
}

func newCorrelations(r *fluid.Record) (*correlations, error) {
	if r.VapourPressure == nil || r.LiquidDensity == nil {
		what := "vapour pressure"
		if r.VapourPressure != nil {
			what = "liquid density"
		}
		return nil, &fluid.MissingError{Fluid: r.Key, Property: what}
	}
	c := &correlations{r: r}
	lo1, hi1 := r.VapourPressure.Range()
	lo2, hi2 := r.LiquidDensity.Range()
	c.lo, c.hi = math.Max(lo1, lo2), math.Min(hi1, hi2)
	if !(c.lo < c.hi) {
		return nil, errors.New("the correlations of vapour pressure and liquid density of " + r.Key + " have no common range")
	}
	return c, nil
}

func (c *correlations) VapourPressure(T float64) (p, slope float64, err error) {
	return c.r.VapourPressure.At(T)
}

func (c *correlations) LiquidVolume(T float64) (v, slope float64, err error) {
	ρ, dlnρ, err := c.r.LiquidDensity.At(T)
	if err != nil {
		return 0, 0, err
	}
	return c.r.MolarMass.Value / ρ, -dlnρ, nil
}

func (c *correlations) Range() (lo, hi float64) { return c.lo, c.hi }
