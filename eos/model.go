package eos

import "math"

// Model is an equation of state for one fluid, tuned or as published, in SI
// units. The zero value is not usable; make one with NewModel. A Model is a
// small value without pointers; copying it is cheap.
type Model struct {
	Form
	Fluid, Equation string
	// Tc and Pc are the critical point that the model itself implies; they equal
	// the fluid's constants for an untuned equation.
	Tc, Pc float64
	// MinT is the lowest temperature at which two phases are sought: MinTr·Tc, or
	// higher where the saturation pressure would leave the range of numbers.
	MinT float64
	// B is the covolume b in m³/mol.
	B float64

	tuning  Tuning
	inputTc float64 // the fluid's constant, the reference of Tr in α
	tau1    float64 // τ at T = inputTc
	maxT    float64 // above it α is not used
	power   bool    // α = Tr^(−n), else Soave's form
	c       float64 // n or m
	dcds    float64 // ∂c/∂slope
}

// NewModel applies an equation with a tuning to a fluid.
//
// Errors: *ParameterError for constants or factors that leave no vapour–liquid
// critical point: Tc, Pc ≤ 0, factors on a and b outside 0.01 to 100, or an
// attraction a/T that does not fall with temperature.
func NewModel(e Equation, s Substance, t Tuning) (Model, error) {
	form, err := NewForm(e.D1, e.D2)
	if err != nil {
		if p, ok := err.(*ParameterError); ok {
			p.Fluid, p.Equation = s.Name, e.Name
		}
		return Model{}, err
	}
	bad := func(name string, v float64, want string) (Model, error) {
		return Model{}, &ParameterError{s.Name, e.Name, name, v, want}
	}
	for _, p := range [...]struct {
		name          string
		value, lo, hi float64
		want          string
	}{
		{"critical temperature in K", s.CriticalT, 0, math.Inf(1), "> 0 and finite"},
		{"critical pressure in Pa", s.CriticalP, 0, math.Inf(1), "> 0 and finite"},
		{"attraction", t.Attraction, 0.01, 100, "between 0.01 and 100"},
		{"covolume", t.Covolume, 0.01, 100, "between 0.01 and 100"},
	} {
		if !(p.value > p.lo && p.value < p.hi) {
			return bad(p.name, p.value, p.want)
		}
	}
	if !(math.Abs(s.Acentric) < 5) {
		return bad("acentric factor", s.Acentric, "between -5 and 5")
	}
	if !(math.Abs(t.Slope) < 100) {
		return bad("slope", t.Slope, "between -100 and 100")
	}
	m := Model{
		Form: form, Fluid: s.Name, Equation: e.Name,
		B:       t.Covolume * form.OmegaB() * GasConstant * s.CriticalT / s.CriticalP,
		tuning:  t,
		inputTc: s.CriticalT,
		tau1:    form.TauC * t.Attraction / t.Covolume,
	}
	switch {
	case e.slopeIsExponent():
		m.power, m.c, m.dcds = true, t.Slope, 1
	case e.Alpha == AlphaPower:
		m.power, m.c, m.dcds = true, e.Exponent*t.Slope, e.Exponent
	case e.Alpha == AlphaSoave:
		m.dcds = e.Slope[0] + s.Acentric*(e.Slope[1]+s.Acentric*e.Slope[2])
		m.c = m.dcds * t.Slope
	default:
		return Model{}, &ParameterError{s.Name, e.Name, "alpha form " + string(e.Alpha), 0, "power or soave"}
	}
	// a/T must fall with T: n > −1 or 1 + m > 0. For m < 0 it then falls to m²τ₁ only.
	if !(m.c > -1+1e-6) || !(m.power || m.c+math.Sqrt(form.TauC/m.tau1) > 0) {
		return bad("slope", t.Slope, "a temperature dependence with a/T falling through its critical value, exponent or m > -1")
	}
	m.Tc = m.temperature(form.TauC)
	m.Pc = form.PC * GasConstant * m.Tc / m.B
	if !(m.Tc > 0 && m.Tc < 1e6 && m.Pc > 0) {
		return bad("implied critical temperature in K", m.Tc, "> 0 and finite")
	}
	// A liquid at zero pressure has F > −1 − τI(1); see minLn.
	m.MinT = math.Max(MinTr*m.Tc, m.temperature(-(minLn+10)/form.AttractionIntegral(1)))
	m.maxT = maxTr * m.Tc
	if !m.power && m.c > 0 { // zero of 1 + m(1−√Tr), beyond which α would rise again
		r := 1 + 1/m.c
		m.maxT = math.Min(m.maxT, r*r*m.inputTc)
	}
	return m, nil
}

// Untuned is NewModel for the equation as published.
func Untuned(equation string, s Substance) (Model, error) {
	e, err := EquationByName(equation)
	if err != nil {
		return Model{}, err
	}
	return NewModel(e, s, e.Untuned())
}

// Tau returns τ = a/(bRT) and dlnτ/dT in 1/K.
func (m *Model) Tau(T float64) (tau, slope float64) {
	r := T / m.inputTc
	if m.power {
		// the common exponents without math.Pow
		switch m.c {
		case 0:
			tau = m.tau1 / r
		case 0.5:
			tau = m.tau1 / (r * math.Sqrt(r))
		case 1:
			tau = m.tau1 / (r * r)
		default:
			tau = m.tau1 * math.Pow(r, -m.c-1)
		}
		return tau, -(m.c + 1) / T
	}
	sr := math.Sqrt(r)
	g := 1 + m.c*(1-sr)
	return m.tau1 * g * g / r, -(1 + m.c*sr/g) / T
}

// temperature is the inverse of Tau, in closed form.
func (m *Model) temperature(tau float64) float64 {
	k := tau / m.tau1
	if m.power {
		return m.inputTc * math.Pow(k, -1/(m.c+1))
	}
	sr := (1 + m.c) / (m.c + math.Sqrt(k))
	return m.inputTc * sr * sr
}

// TauGradient returns the derivatives of lnτ at constant T with respect to the
// tuning: lnτ = ln attraction − ln covolume + ln α(slope) + const.
func (m *Model) TauGradient(T float64) (attraction, covolume, slope float64) {
	r := T / m.inputTc
	if m.power {
		slope = -m.dcds * math.Log(r)
	} else {
		h := 1 - math.Sqrt(r)
		slope = 2 * m.dcds * h / (1 + m.c*h)
	}
	return 1 / m.tuning.Attraction, -1 / m.tuning.Covolume, slope
}

// Tuning returns the factors that the model was made with.
func (m *Model) Tuning() Tuning { return m.tuning }

// Attraction is a(T) in Pa·m⁶/mol².
func (m *Model) Attraction(T float64) float64 {
	tau, _ := m.Tau(T)
	return tau * m.B * GasConstant * T
}

// Pressure is P(T, v) in Pa; v > b in m³/mol.
func (m *Model) Pressure(T, v float64) (float64, error) {
	if err := m.checkTV("pressure", T, v); err != nil {
		return 0, err
	}
	tau, _ := m.Tau(T)
	return m.Form.Pressure(v/m.B, tau) * GasConstant * T / m.B, nil
}

// PressureDerivatives are ∂P/∂v in Pa·mol/m³, ∂²P/∂v² and ∂P/∂T in Pa/K at (T, v).
func (m *Model) PressureDerivatives(T, v float64) (dv, dvdv, dT float64, err error) {
	if err = m.checkTV("pressure derivatives", T, v); err != nil {
		return 0, 0, 0, err
	}
	tau, dtau := m.Tau(T)
	x, k := v/m.B, GasConstant*T/m.B
	dv = m.PressureSlope(x, tau) * k / m.B
	dvdv = m.PressureCurvature(x, tau) * k / (m.B * m.B)
	// P = (RT/b)(1/(x−1) − τ/q)
	dT = m.Form.Pressure(x, tau)*k/T - tau*dtau/m.q(x)*k
	return dv, dvdv, dT, nil
}

// LnFugacity is ln(f/Pa) at (T, v), also for an unstable volume, where it is the
// analytic continuation along the isotherm.
func (m *Model) LnFugacity(T, v float64) (float64, error) {
	if err := m.checkTV("fugacity", T, v); err != nil {
		return 0, err
	}
	tau, _ := m.Tau(T)
	return m.Form.LnFugacity(v/m.B, tau) + math.Log(GasConstant*T/m.B), nil
}

// ChemicalPotential is μ = RT·ln(f/f°) in J/mol at (T, v) with f° the fugacity of
// saturation at T, so that it is zero on the coexistence line and positive for
// whatever is more prone to leave its phase. T < Tc.
func (m *Model) ChemicalPotential(T, v float64) (float64, error) {
	s, err := m.Saturation(T)
	if err != nil {
		return 0, err
	}
	return m.chemicalPotential(s, v)
}

func (m *Model) chemicalPotential(s Saturation, v float64) (float64, error) {
	lnf, err := m.LnFugacity(s.T, v)
	if err != nil {
		return 0, err
	}
	return GasConstant * s.T * (lnf - s.LnFugacity), nil
}

// Liquid is the molar volume in m³/mol of the liquid at (T, P), stable or
// superheated, also under tension (P < 0).
//
// Errors: *DomainError for T outside [MinT, Tc) or P ≥ 1e8·RT/b; *PhaseError
// beyond the liquid spinodal.
func (m *Model) Liquid(T, P float64) (float64, error) {
	if err := m.checkSubcritical("liquid volume", T); err != nil {
		return 0, err
	}
	k := GasConstant * T / m.B
	if !(P >= -math.MaxFloat64 && P < maxP*k) {
		return 0, &DomainError{m.Fluid, m.Equation, "liquid volume", "pressure", P, math.Inf(-1), maxP * k, "Pa"}
	}
	tau, _ := m.Tau(T)
	x, ok := m.Form.Liquid(P/k, tau, 0)
	if !ok {
		return 0, &PhaseError{m.Fluid, m.Equation, "liquid", T, P, m.spinodal(T, tau, m.SpinodalLiquid(tau)).P}
	}
	return x * m.B, nil
}

// Vapour is the molar volume in m³/mol of the vapour at (T, P), stable or
// supersaturated.
//
// Errors: *DomainError for T outside [MinT, Tc) or P ≤ 1e-300·RT/b; *PhaseError
// beyond the vapour spinodal.
func (m *Model) Vapour(T, P float64) (float64, error) {
	if err := m.checkSubcritical("vapour volume", T); err != nil {
		return 0, err
	}
	k := GasConstant * T / m.B
	if !(P > minP*k && P <= math.MaxFloat64) {
		return 0, &DomainError{m.Fluid, m.Equation, "vapour volume", "pressure", P, minP * k, math.Inf(1), "Pa"}
	}
	tau, _ := m.Tau(T)
	x, ok := m.Form.Vapour(P/k, tau, 0)
	if !ok {
		return 0, &PhaseError{m.Fluid, m.Equation, "vapour", T, P, m.spinodal(T, tau, m.SpinodalVapour(tau)).P}
	}
	return x * m.B, nil
}

// The range of temperature (of the model's own Tc) and of x = v/b in which P and
// its derivatives are finite numbers for every permitted slope.
const (
	coldestTr = 0.01
	maxTr     = 1e4
	maxX      = 1e300
)

func (m *Model) checkTV(quantity string, T, v float64) error {
	if !(T > coldestTr*m.Tc && T < m.maxT) {
		return &DomainError{m.Fluid, m.Equation, quantity, "temperature", T, coldestTr * m.Tc, m.maxT, "K"}
	}
	if !(v > m.B && v < maxX*m.B) {
		return &DomainError{m.Fluid, m.Equation, quantity, "molar volume", v, m.B, maxX * m.B, "m3/mol"}
	}
	return nil
}

// MinTr is the lowest reduced temperature (of the model's own Tc) at which
// saturation is sought; below it vapour pressures have no use here.
const MinTr = 0.15

func (m *Model) checkSubcritical(quantity string, T float64) error {
	if !(T >= m.MinT && T < m.Tc) {
		return &DomainError{m.Fluid, m.Equation, quantity, "temperature", T, m.MinT, m.Tc, "K"}
	}
	return nil
}
