package eos

import "math"

// This file holds the two lines of a pure fluid below its critical point in SI
// units: coexistence (saturation) and the spinodal.

// Saturation is a state of vapour–liquid coexistence.
type Saturation struct {
	T, P       float64 // K, Pa
	Vl, Vv     float64 // molar volumes of liquid and vapour in m³/mol, Vl < Vv
	LnFugacity float64 // ln(f/Pa), common to both phases
	Gap        float64 // ln f_l − ln f_v left, dimensionless
	DPDT       float64 // dP/dT along the line in Pa/K
	Iterations int
}

// Saturation returns the coexistence state at T, MinT ≤ T < Tc: the pressure
// of equal fugacity. Since (F_l − F_v) changes by (x_l − x_v)dp, an error left in
// F costs 1/(Z_v − Z_l) as much in ln P, so that accuracy falls off towards the
// critical point as it does in nature.
//
// Errors: *DomainError, *ConvergenceError.
func (m *Model) Saturation(T float64) (Saturation, error) {
	if err := m.checkSubcritical("saturation pressure", T); err != nil {
		return Saturation{}, err
	}
	tau, dlntau := m.Tau(T)
	c, ok := m.Saturate(tau)
	if !ok {
		return Saturation{}, &ConvergenceError{m.Fluid, m.Equation, "saturation pressure", T, "K", 0, c.P, c.Gap, c.Iterations}
	}
	k := GasConstant * T / m.B
	return Saturation{
		T: T, P: c.P * k, Vl: c.Xl * m.B, Vv: c.Xv * m.B,
		LnFugacity: m.Form.LnFugacity(c.Xv, tau) + math.Log(k),
		Gap:        c.Gap,
		DPDT:       k * (c.P/T + c.DP*tau*dlntau),
		Iterations: c.Iterations,
	}, nil
}

// SaturationTemperature returns the coexistence state at pressure P, by Newton
// steps of ln P against 1/T (nearly a straight line) inside [MinT, Tc].
//
// Errors: *DomainError for P outside the saturation line, *ConvergenceError.
func (m *Model) SaturationTemperature(P float64) (Saturation, error) {
	lowest, err := m.Saturation(m.MinT)
	if err != nil {
		return Saturation{}, err
	}
	if !(P > lowest.P && P < m.Pc) {
		return Saturation{}, &DomainError{m.Fluid, m.Equation, "saturation temperature", "pressure", P, lowest.P, m.Pc, "Pa"}
	}
	// lg(P/Pc) ≈ (7/3)(1+ω)(1−Tc/T); the factor is estimated from the lowest state.
	slope := math.Log(m.Pc/lowest.P) / (m.Tc/m.MinT - 1)
	start := (1 + math.Log(m.Pc/P)/slope) / m.Tc
	var s Saturation
	o := bracketNewton(func(inverse float64) (float64, float64) {
		T := math.Min(1/inverse, m.Tc*(1-1e-15))
		s, err = m.Saturation(T)
		if err != nil { // only within rounding of the critical point
			return math.Log(m.Pc / P), -slope * m.Tc
		}
		return math.Log(s.P / P), -s.DPDT / s.P * T * T
	}, 1/m.Tc, 1/m.MinT, start, false)
	if err != nil || !(o.Converged || o.AtEnd) {
		return Saturation{}, &ConvergenceError{m.Fluid, m.Equation, "saturation temperature", P, "Pa", 1 / o.Hi, 1 / o.Lo, o.F, o.Iterations}
	}
	return s, nil
}

// SpinodalState is a point at which a phase loses stability, ∂P/∂v = 0.
type SpinodalState struct {
	T, P float64 // K, Pa; P of the liquid branch is negative for T below about 0.9 Tc
	V    float64 // m³/mol
}

func (m *Model) spinodal(T, tau, x float64) SpinodalState {
	return SpinodalState{T: T, P: m.Form.Pressure(x, tau) * GasConstant * T / m.B, V: x * m.B}
}

// Spinodal returns both branches at T, MinT ≤ T < Tc: the limit of the
// superheated (or stretched) liquid and that of the supersaturated vapour.
//
// Errors: *DomainError.
func (m *Model) Spinodal(T float64) (liquid, vapour SpinodalState, err error) {
	if err := m.checkSubcritical("spinodal", T); err != nil {
		return SpinodalState{}, SpinodalState{}, err
	}
	tau, _ := m.Tau(T)
	return m.spinodal(T, tau, m.SpinodalLiquid(tau)), m.spinodal(T, tau, m.SpinodalVapour(tau)), nil
}

// LiquidSpinodalTemperature returns the highest temperature at which the liquid
// can exist at P, the thermodynamic limit of superheat. P may be negative.
//
// To every volume on the branch belongs one T in closed form, so the search is
// in x for P(x) = P, with dP/dx = (∂P/∂T)_v·dT/dx.
//
// Errors: *DomainError for P at or above Pc or below the tension that the liquid
// holds at MinT; *ConvergenceError.
func (m *Model) LiquidSpinodalTemperature(P float64) (SpinodalState, error) {
	tauMax, _ := m.Tau(m.MinT)
	xmin := m.SpinodalLiquid(tauMax)
	pmin := m.spinodal(m.MinT, tauMax, xmin).P
	if !(P > pmin && P < m.Pc) {
		return SpinodalState{}, &DomainError{m.Fluid, m.Equation, "liquid spinodal temperature", "pressure", P, pmin, m.Pc, "Pa"}
	}
	start := m.XC - (m.XC-m.x0)*math.Sqrt(1-P/m.Pc)
	o := bracketNewton(m.spinodalPressure(P), xmin, m.XC, start, true)
	return m.spinodalAt(o.X, o.Converged || o.AtEnd, P, "liquid spinodal temperature")
}

// VapourSpinodalTemperature returns the lowest temperature at which the vapour
// can exist at P, 0 < P < Pc.
//
// Errors: as LiquidSpinodalTemperature.
func (m *Model) VapourSpinodalTemperature(P float64) (SpinodalState, error) {
	tauMax, _ := m.Tau(m.MinT)
	xmax := m.SpinodalVapour(tauMax)
	pmin := m.spinodal(m.MinT, tauMax, xmax).P
	if !(P > pmin && P < m.Pc) {
		return SpinodalState{}, &DomainError{m.Fluid, m.Equation, "vapour spinodal temperature", "pressure", P, pmin, m.Pc, "Pa"}
	}
	start := m.XC / (1 - 0.9*math.Sqrt(1-P/m.Pc))
	o := bracketNewton(m.spinodalPressure(P), m.XC, xmax, start, false)
	return m.spinodalAt(o.X, o.Converged || o.AtEnd, P, "vapour spinodal temperature")
}

// spinodalPressure is P(x) − P along the spinodal and its slope, divided by Pc.
func (m *Model) spinodalPressure(P float64) func(x float64) (float64, float64) {
	return func(x float64) (float64, float64) {
		tau := m.spinodalTau(x)
		T := m.temperature(tau)
		_, dlntau := m.Tau(T)
		k := GasConstant * T / m.B
		p := m.Form.Pressure(x, tau)
		dTdx := m.spinodalTauSlope(x) / dlntau
		dPdT := k * (p/T - tau*dlntau/m.q(x))
		return (p*k - P) / m.Pc, dPdT * dTdx / m.Pc
	}
}

func (m *Model) spinodalAt(x float64, ok bool, P float64, quantity string) (SpinodalState, error) {
	T := m.temperature(m.spinodalTau(x))
	if !ok || math.IsNaN(T) {
		return SpinodalState{}, &ConvergenceError{m.Fluid, m.Equation, quantity, P, "Pa", 1, m.XC, math.Inf(1), 0}
	}
	return SpinodalState{T: T, P: P, V: x * m.B}, nil
}

// SpinodalGradient returns, at a state of either spinodal branch, the change of
// its temperature with pressure in K/Pa and, at constant pressure, with the
// tuning (attraction, covolume, slope) in K. Because ∂P/∂v = 0 on the spinodal
// the volume does not enter: with k = RT/b and P = k·p(x, τ),
//
//	dP = (∂P/∂T)_v dT − kτ/q·dlnτ − P·dlnb.
func (m *Model) SpinodalGradient(s SpinodalState) (pressure float64, tuning [3]float64) {
	tau, dlntau := m.Tau(s.T)
	k, x := GasConstant*s.T/m.B, s.V/m.B
	h := k * tau / m.q(x)
	dPdT := s.P/s.T - h*dlntau
	a, c, sl := m.TauGradient(s.T)
	return 1 / dPdT, [3]float64{h * a / dPdT, (h*c + s.P/m.tuning.Covolume) / dPdT, h * sl / dPdT}
}

// ZeroPressureSpinodalTemperature is the highest temperature in K at which the
// liquid can exist at zero pressure, in closed form: the liquid spinodal has
// p = 0 at x = 1 + √((1+δ₁)(1+δ₂)).
func (m *Model) ZeroPressureSpinodalTemperature() float64 { return m.temperature(m.tau0) }

// DensityDifference returns ln(1/x_l − 1/x_v), the logarithm of the difference of
// the saturated densities times b, at T, and its derivative with respect to lnτ.
//
// Errors: those of Saturation.
func (m *Model) DensityDifference(T float64) (ln, dlntau float64, err error) {
	if err := m.checkSubcritical("saturated densities", T); err != nil {
		return 0, 0, err
	}
	tau, _ := m.Tau(T)
	c, ok := m.Saturate(tau)
	if !ok {
		return 0, 0, &ConvergenceError{m.Fluid, m.Equation, "saturated densities", T, "K", 0, c.P, c.Gap, c.Iterations}
	}
	d := (c.Xv - c.Xl) / (c.Xl * c.Xv)
	return math.Log(d), tau * (c.DXv/(c.Xv*c.Xv) - c.DXl/(c.Xl*c.Xl)) / d, nil
}
