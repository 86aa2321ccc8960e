package export

import (
	"math"

	"gonum.org/v1/gonum/integrate/quad"

	"limsup/data/fluid"
	"limsup/data/quantity"
	"limsup/eos"
	"limsup/eos/nucleation"
	"limsup/eos/tension"
	"limsup/fit"
	"limsup/fit/export/internal/kernel"
)

// ruleNodes is the number of nodes of the stepwise sum, that of package nucleation.
const ruleNodes = 96

// row makes the constants of one fluid for package kernel.
func (s *subject) row(r *fluid.Record) ([]float64, error) {
	q := s.query(r, 0)
	ph, err := s.model.Physics(&q)
	if err != nil {
		return nil, err
	}
	v := s.model.Values(&q)
	c := make([]float64, kernel.KFixed)
	if err := equationColumns(c, ph, &v); err != nil {
		return nil, err
	}
	c[kernel.KMass] = r.MolarMass.Value
	c[kernel.KSigma], c[kernel.KTolman] = v.SurfaceTension, v.Tolman*1e-9
	c[kernel.KPrefactor], c[kernel.KThreshold] = v.Prefactor, v.Threshold
	c[kernel.KLow], c[kernel.KHigh] = s.low, s.high
	c[kernel.KLimit], c[kernel.KProperties], c[kernel.KEmbryo], c[kernel.KKinetics] = kernel.KineticLimit, kernel.ByEquation, kernel.ExactEmbryo, kernel.MechanicalKinetics
	if ph.Variant.EmbryoPressure == nucleation.Poynting {
		c[kernel.KEmbryo] = kernel.PoyntingEmbryo
	}
	switch ph.Variant.Kinetics {
	case nucleation.Chemical:
		c[kernel.KKinetics] = kernel.ChemicalKinetics
	case nucleation.Stepwise:
		c[kernel.KKinetics] = kernel.StepKinetics
		c = appendRule(c)
	}
	if ph.Variant.Limit == fit.Spinodal {
		c[kernel.KLimit], c[kernel.KCold], c[kernel.KHot] = kernel.SpinodalLimit, ph.Model.MinT, ph.Model.Tc
	} else {
		c[kernel.KCold], c[kernel.KHot] = ph.Fluid.Range()
		if c, err = appendTension(c, ph.Fluid.Config().Tension, ph); err != nil {
			return nil, err
		}
		if ph.Variant.Properties == nucleation.FromCorrelation {
			c[kernel.KProperties] = kernel.ByCorrelation
			if c, err = appendVapourPressure(c, r.VapourPressure); err != nil {
				return nil, err
			}
			if c, err = appendDensity(c, r); err != nil {
				return nil, err
			}
		}
	}
	s.covarianceColumns(c, &q)
	return c, nil
}

// equationColumns are those of the equation of state.
func equationColumns(c []float64, ph *fit.Physics, v *fit.Values) error {
	m := &ph.Model
	e := ph.Variant.Custom
	if e == nil {
		builtin, err := eos.EquationByName(ph.Variant.Equation)
		if err != nil {
			return err
		}
		e = &builtin
	}
	s, t := m.D1+m.D2, m.D1*m.D2
	q := func(x float64) float64 { return (x + m.D1) * (x + m.D2) }
	x0 := 1 + math.Sqrt(1+s+t)
	qc, mc := q(m.XC), 2*m.XC+s
	c[kernel.KDelta1], c[kernel.KDelta2], c[kernel.KXc], c[kernel.KTauc] = m.D1, m.D2, m.XC, m.TauC
	c[kernel.KX0], c[kernel.KTau0] = x0, q(x0)/(x0-1)
	c[kernel.KKappa] = 4/(mc*mc) + 2/((m.XC-1)*(m.XC-1)) + (4*qc-2*mc*mc)/(qc*qc)
	c[kernel.KB], c[kernel.KTref] = m.B, ph.Record.CriticalTemperature.Value
	c[kernel.KTau1] = m.TauC * v.Attraction / v.Covolume
	ω := ph.Record.AcentricFactor.Value
	switch {
	case e.Alpha == eos.AlphaSoave:
		c[kernel.KAlpha], c[kernel.KDSlope] = kernel.SoaveAlpha, e.Slope[0]+ω*(e.Slope[1]+ω*e.Slope[2])
	case e.Exponent == 0: // the parameter is the exponent itself
		c[kernel.KAlpha], c[kernel.KDSlope] = kernel.PowerAlpha, 1
	default:
		c[kernel.KAlpha], c[kernel.KDSlope] = kernel.PowerAlpha, e.Exponent
	}
	c[kernel.KSlope] = c[kernel.KDSlope] * v.Slope
	c[kernel.KTc], c[kernel.KPc], c[kernel.KMinT] = m.Tc, m.Pc, m.MinT
	c[kernel.KAttraction], c[kernel.KCovolume] = v.Attraction, v.Covolume
	return nil
}

// appendRule adds the positive half of the rule of Gauss and Legendre.
func appendRule(c []float64) []float64 {
	x, w := make([]float64, ruleNodes), make([]float64, ruleNodes)
	quad.Legendre{}.FixedLocations(x, w, -1, 1)
	c[kernel.KRule], c[kernel.KRuleCount] = float64(len(c)), ruleNodes/2
	return append(append(c, x[ruleNodes/2:]...), w[ruleNodes/2:]...)
}

// appendTension adds the coefficients of the surface tension in SI units.
func appendTension(c []float64, f tension.Func, ph *fit.Physics) ([]float64, error) {
	c[kernel.KTensionTc], c[kernel.KTensionHigh] = f.Tc(), f.Tc()
	c[kernel.KTensionAt] = float64(len(c))
	switch f := f.(type) {
	case *tension.PowerSum:
		c[kernel.KTension], c[kernel.KTensionTc] = kernel.PowerSum, f.CriticalTemperature
		c[kernel.KTensionLow], c[kernel.KTensionCount] = f.PositiveAbove(), float64(len(f.Terms))
		for _, t := range f.Terms {
			c = append(c, t.Coefficient, t.Exponent)
		}
	case *tension.DIPPR106:
		c[kernel.KTension], c[kernel.KTensionCount] = kernel.DIPPR106, 5
		c = append(c, f.A, f.B, f.C, f.D, f.E)
	case *tension.CorrespondingStates:
		// a sum of one power, whose coefficient is the tension at t = 0
		bar := ph.Record.CriticalPressure.Value / 1e5
		c[kernel.KTension], c[kernel.KTensionCount] = kernel.PowerSum, 1
		c = append(c, 1e-3*f.Q()*math.Cbrt(bar*bar*f.Tc()), 11.0/9)
	case *tension.Parachor:
		T := parachorReference(ph.Record)
		σ, _, err := f.Sigma(T)
		if err != nil {
			return nil, err
		}
		ln, slope, err := ph.Model.DensityDifference(T)
		if err != nil {
			return nil, err
		}
		c[kernel.KTension], c[kernel.KTensionCount] = kernel.Parachor, 4
		c = append(c, T, σ, ln, slope)
	default:
		return nil, &UnsupportedError{ph.Record.Key, "this model of surface tension"}
	}
	return c, nil
}

// parachorReference is the temperature at which package fit fixes a parachor: Tr = 0.7,
// moved into the range of the fit.
func parachorReference(r *fluid.Record) float64 {
	T := 0.7 * r.CriticalTemperature.Value
	if lo, hi, ok := r.TensionRange(); ok {
		T = math.Min(math.Max(T, lo), hi)
	}
	return T
}

// appendVapourPressure adds a correlation of the vapour pressure in SI units. A table
// is its spline as piecewise cubics, exact but for rounding.
func appendVapourPressure(c []float64, s *fluid.SaturationPressure) ([]float64, error) {
	c[kernel.KVapourLow], c[kernel.KVapourHigh] = s.Range()
	c[kernel.KVapourAt] = float64(len(c))
	if s.Form == "table" {
		var x, y, d []float64
		for _, p := range s.Points {
			T := p[0]
			v, dln, err := s.At(T)
			if err != nil {
				return nil, err
			}
			x, y, d = append(x, -1/T), append(y, math.Log(v)), append(d, dln*T*T)
		}
		c[kernel.KVapour], c[kernel.KVapourCount] = kernel.Table, float64(len(x))
		return append(append(append(c, x...), y...), d...), nil
	}
	e := [4]float64{1, 1.5, 2.5, 5}
	if s.Form == "wagner-3-6" {
		e = [4]float64{1, 1.5, 3, 6}
	} else if s.Form != "wagner-2.5-5" {
		return nil, &UnsupportedError{Property: "vapour pressure of form " + s.Form}
	}
	u, err := quantity.ParseUnit(s.Unit)
	if err != nil {
		return nil, err
	}
	c[kernel.KVapour], c[kernel.KVapourCount] = kernel.ClosedForm, 4
	c = append(c, s.Tc, u.ToSI(s.Pc))
	for i, k := range s.Coefficients {
		c = append(c, k, e[i])
	}
	return c, nil
}

// appendDensity adds a correlation of the liquid density in SI units.
func appendDensity(c []float64, r *fluid.Record) ([]float64, error) {
	d := r.LiquidDensity
	c[kernel.KDensityAt] = float64(len(c))
	if d.Form == "table" {
		tc := r.CriticalTemperature.Value
		c[kernel.KDensity], c[kernel.KDensityTc], c[kernel.KDensityCount] = kernel.Table, tc, float64(len(d.Points))
		var x, y, slope []float64
		for _, p := range d.Points {
			T := p[0]
			v, dln, err := d.At(T)
			if err != nil {
				return nil, err
			}
			root := math.Cbrt((tc - T) / tc)
			x, y, slope = append(x, -root), append(y, v), append(slope, v*dln*3*(tc-T)/root)
		}
		return append(append(append(c, x...), y...), slope...), nil
	}
	if d.Form != "rackett" {
		return nil, &UnsupportedError{r.Key, "liquid density of form " + d.Form}
	}
	k := d.Coefficients
	lo, hi := d.Range()
	T := 0.5 * (lo + hi)
	ρ, _, err := d.At(T)
	if err != nil {
		return nil, err
	}
	lnb := math.Log(k[1])
	a := ρ * math.Exp(lnb*(1+math.Pow((k[2]-T)/k[2], k[3]))) // A in kg/m³
	c[kernel.KDensity], c[kernel.KDensityTc], c[kernel.KDensityCount] = kernel.ClosedForm, k[2], 4
	return append(c, a, lnb, k[2], k[3]), nil
}
