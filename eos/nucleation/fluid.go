package nucleation

import (
	"fmt"
	"math"

	"limsup/eos"
	"limsup/eos/tension"
)

// Properties tells where saturation pressure and densities come from.
type Properties string

// The sources of properties.
const (
	FromEquation    Properties = "equation"    // the cubic equation of state
	FromCorrelation Properties = "correlation" // the fluid's correlations, with the Poynting factor
)

// EmbryoPressure tells how the vapour pressure in the critical bubble is found.
type EmbryoPressure string

// The forms of the embryo pressure.
const (
	Exact    EmbryoPressure = "exact"    // equal fugacity with the metastable liquid
	Poynting EmbryoPressure = "poynting" // P_sat·exp[v_l(P_l−P_sat)/RT], an ideal vapour over an incompressible liquid
)

// Kinetics names the kinetic factor of the flux.
type Kinetics string

// The kinetics of the flux.
const (
	Mechanical Kinetics = "mechanical" // the growing bubble keeps mechanical equilibrium, B = 1 − (1 − P_l/P_v)/3
	Chemical   Kinetics = "chemical"   // it keeps the vapour pressure of chemical equilibrium, B = 1
	Stepwise   Kinetics = "stepwise"   // sum over embryo sizes, one molecule at a time
)

// Correlations are measured properties of the saturated liquid: values and
// logarithmic temperature derivatives. Outside their range they return an error.
type Correlations interface {
	// VapourPressure is P_sat in Pa and dlnP_sat/dT in 1/K.
	VapourPressure(T float64) (p, slope float64, err error)
	// LiquidVolume is the molar volume of the saturated liquid in m³/mol and dln v/dT in 1/K.
	LiquidVolume(T float64) (v, slope float64, err error)
	// Range is the interval of temperature in K in which both are known.
	Range() (lo, hi float64)
}

// Config describes a fluid under one variant of the theory.
type Config struct {
	Model         eos.Model
	MolarMass     float64      // kg/mol
	Tension       tension.Func // σ∞(T)
	TensionFactor float64      // factor on σ∞; 0 means 1
	TolmanLength  float64      // δ in m, counted positive where it lowers the tension of the embryo
	Prefactor     float64      // decades added to log₁₀J

	EmbryoPressure EmbryoPressure // "" means Exact, or Poynting with correlations
	Kinetics       Kinetics       // "" means Mechanical
	Correlations   Correlations   // nil: properties from the equation
}

// Fluid evaluates embryos, flux and limits of one fluid under one variant.
type Fluid struct {
	c         Config
	name      string
	tuned     tunedTension
	lnMass    float64 // ½ln(2N_A/(πM))
	tlo, thi  float64 // range of temperature in which all properties exist
	poynting  bool
	corr      bool
	prefactor float64 // ln10·decades
}

// tunedTension is a surface tension that depends on the tuning of the equation.
type tunedTension interface {
	// TuningGradient is ∂lnσ∞/∂(attraction, covolume, slope) at T.
	TuningGradient(T float64) ([3]float64, error)
}

// New checks a configuration and prepares its evaluation.
//
// Errors: *eos.ParameterError for a value outside its meaning or an unknown option.
func New(c Config) (*Fluid, error) {
	if c.TensionFactor == 0 {
		c.TensionFactor = 1
	}
	if c.Kinetics == "" {
		c.Kinetics = Mechanical
	}
	f := &Fluid{name: c.Model.Fluid, corr: c.Correlations != nil}
	bad := func(name string, v float64, want string) (*Fluid, error) {
		return nil, &eos.ParameterError{Fluid: f.name, Equation: c.Model.Equation, Name: name, Value: v, Want: want}
	}
	if c.EmbryoPressure == "" {
		c.EmbryoPressure = Exact
		if f.corr {
			c.EmbryoPressure = Poynting
		}
	}
	switch {
	case !(c.MolarMass > 0 && c.MolarMass < 1e3):
		return bad("molar mass in kg/mol", c.MolarMass, "> 0")
	case c.Tension == nil:
		return bad("surface tension", 0, "a correlation")
	case !(c.TensionFactor > 0 && c.TensionFactor < 1e3):
		return bad("surface-tension", c.TensionFactor, "> 0")
	case !(math.Abs(c.TolmanLength) < 1e-6):
		return bad("tolman length in m", c.TolmanLength, "between -1e-6 and 1e-6")
	case !(math.Abs(c.Prefactor) < 1e3):
		return bad("prefactor", c.Prefactor, "between -1000 and 1000 decades")
	case c.EmbryoPressure != Exact && c.EmbryoPressure != Poynting:
		return bad("embryo pressure "+string(c.EmbryoPressure), 0, "exact or poynting")
	case c.Kinetics != Mechanical && c.Kinetics != Chemical && c.Kinetics != Stepwise:
		return bad("kinetics "+string(c.Kinetics), 0, "mechanical, chemical or stepwise")
	case f.corr && c.EmbryoPressure == Exact:
		return bad("embryo pressure exact", 0, "poynting, since correlations know no fugacity of the metastable liquid")
	}
	f.c = c
	f.poynting = c.EmbryoPressure == Poynting
	f.tuned, _ = c.Tension.(tunedTension)
	f.lnMass = 0.5 * math.Log(2*eos.Avogadro/(math.Pi*c.MolarMass))
	f.prefactor = math.Ln10 * c.Prefactor
	f.tlo, f.thi = c.Model.MinT, c.Model.Tc
	if f.corr {
		f.tlo, f.thi = c.Correlations.Range()
	}
	f.thi = math.Min(f.thi, c.Tension.Tc())
	if !(f.tlo < f.thi) {
		return bad("upper end of the surface tension in K", f.thi, fmt.Sprintf("> %.6g K, where the other properties begin", f.tlo))
	}
	return f, nil
}

// Config returns the configuration with its defaults filled in.
func (f *Fluid) Config() Config { return f.c }

// Name is the fluid's name.
func (f *Fluid) Name() string { return f.name }

// Range is the interval of temperature in K in which all properties exist.
func (f *Fluid) Range() (lo, hi float64) { return f.tlo, f.thi }
