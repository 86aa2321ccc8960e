package nucleation

import (
	"math"

	"limsup/eos"
)

// This file evaluates the flux and all its derivatives at one state. Every
// intermediate quantity carries its partial derivatives with respect to six
// independent inputs; the chain rule is closed at the end. The liquid and the
// vapour of the equation of state are differentiated implicitly, from
// ∂F/∂p = x and ∂F/∂τ = −I at constant p (see package eos):
//
//	dp_v = (x_l·dp_l + (I_v − I_l)·dτ)/x_v          equal fugacity
//	dx_l = (dp_l + dτ/q_l)/(∂p/∂x)_l                 liquid volume
//
// so no state is solved twice.

// Inputs of the flux, in the order of the partial derivatives.
const (
	inT   = iota // T at constant τ and σ∞
	inP          // P_l
	inTau        // lnτ
	inB          // ln b
	inSig        // lnσ∞
	inTol        // δ
	inputs
)

// partials are derivatives with respect to the inputs.
type partials [inputs]float64

// cause tells why a state has no flux. The slow path turns it into an error.
type cause uint8

const (
	fine           cause = iota
	outsideRange         // T outside the range of the properties
	noLiquid             // beyond the liquid spinodal
	noVapour             // no vapour in equilibrium with so dense a liquid
	noTension            // σ∞ not known or not positive
	tolmanTooLarge       // δΔP ≥ σ∞: no embryo of positive tension and radius
	noSaturation
	badPressure // no number, or beyond maxPressure
)

// maxPressure in Pa bounds both signs: far beyond any liquid, and safe to square.
const maxPressure = 1e15

// minimumB is the smallest kinetic factor used. B = (2 + P_l/P_v)/3 falls to zero
// for a liquid under a tension of 2P_v, where a bubble of a given number of
// molecules has no mechanical equilibrium at the critical size and the picture
// behind B ends. At this floor the flux is half a decade above that of B = 1.
const minimumB = 0.1

// HeldNote says what Held means.
const HeldNote = "under this tension the kinetic factor of the flux is held at its floor, where it is worth half a decade"

// point is one evaluated state.
type point struct {
	T, P      float64
	pv        float64  // P_v in Pa
	dpv       partials // its derivatives
	excess    float64  // ΔP = P_v − P_l
	sigma     float64  // σ of the embryo
	dsigma    partials
	sigmaFlat float64
	lnN       float64
	vVapour   float64 // molar volume of the vapour in the embryo
	vLiquid   float64 // molar volume of the liquid around it
	psat      float64 // 0 unless the form of the embryo pressure needed it

	ratio    float64 // P_l/P_v
	b        float64 // kinetic factor B
	held     bool    // B stands at its floor
	barrier  float64 // W, +Inf when not superheated
	dbarrier partials
	lnA      float64 // lnJ + W
	dlnA     partials

	dlntau, dlnsigma float64 // per kelvin
	tau              float64
	xl, xv           float64 // start values for a neighbouring state
}

// lnJ is the natural logarithm of the flux.
func (p *point) lnJ() float64 { return p.lnA - p.barrier }

// dlnJ is ∂lnJ/∂input.
func (p *point) dlnJ(k int) float64 { return p.dlnA[k] - p.dbarrier[k] }

// total closes the chain rule over T for derivatives d.
func (p *point) total(d *partials) float64 {
	return d[inT] + d[inTau]*p.dlntau + d[inSig]*p.dlnsigma
}

// lnJSlope is dlnJ/dT.
func (p *point) lnJSlope() float64 { return p.total(&p.dlnA) - p.total(&p.dbarrier) }

// evaluate fills p with the state (T, P). p.xl and p.xv, if set, are used as
// start values.
func (f *Fluid) evaluate(T, P float64, p *point) cause {
	if !(T >= f.tlo && T < f.thi) {
		return outsideRange
	}
	if !(math.Abs(P) <= maxPressure) {
		return badPressure
	}
	sigma, dsigma, err := f.c.Tension.Sigma(T)
	if err != nil || !(sigma > 0) {
		return noTension
	}
	p.T, p.P = T, P
	p.dlnsigma = dsigma / sigma
	p.sigmaFlat = sigma * f.c.TensionFactor

	var dlnN partials
	var c cause
	if f.corr {
		c = f.byCorrelation(p, &dlnN)
	} else {
		c = f.byEquation(p, &dlnN)
	}
	if c != fine {
		return c
	}

	// Young–Laplace: ΔP = 2σ/r with σ = σ∞/(1 + 2δ/r), hence σ = σ∞ − δΔP.
	p.excess = p.pv - P
	δ := f.c.TolmanLength
	if !(p.excess > 0) {
		δ = 0 // no embryo, no curvature: ψ goes on with σ∞
	}
	p.sigma = p.sigmaFlat - δ*p.excess
	if !(p.sigma > 0) {
		return tolmanTooLarge
	}
	dexcess := p.dpv
	dexcess[inP]--
	for k := range p.dsigma {
		p.dsigma[k] = -δ * dexcess[k]
	}
	p.dsigma[inSig] += p.sigmaFlat
	p.dsigma[inTol] -= p.excess

	// Barrier W = 16πσ³/(3kTΔP²).
	if p.excess > 0 {
		p.barrier = 16 * math.Pi * p.sigma * p.sigma * p.sigma / (3 * eos.Boltzmann * T * p.excess * p.excess)
		for k := range p.dbarrier {
			p.dbarrier[k] = p.barrier * (3*p.dsigma[k]/p.sigma - 2*dexcess[k]/p.excess)
		}
		p.dbarrier[inT] -= p.barrier / T
	} else {
		p.barrier = math.Inf(1)
		p.dbarrier = partials{}
	}

	// Kinetic factor.
	p.ratio = P / p.pv
	p.b, p.held = 1, false
	var dlnB, dratio partials
	for k := range dratio {
		dratio[k] = -p.ratio * p.dpv[k] / p.pv
	}
	dratio[inP] += 1 / p.pv
	if f.c.Kinetics != Chemical {
		p.b = (2 + p.ratio) / 3
		if p.b < minimumB {
			p.b, p.held = minimumB, true
		} else {
			for k := range dlnB {
				dlnB[k] = dratio[k] / (3 * p.b)
			}
		}
	}
	p.lnA = p.lnN + 0.5*math.Log(p.sigma/p.b) + f.lnMass + f.prefactor
	for k := range p.dlnA {
		p.dlnA[k] = dlnN[k] + 0.5*(p.dsigma[k]/p.sigma-dlnB[k])
	}
	if f.c.Kinetics == Stepwise && p.excess > 0 {
		ln, dW, dx := stepwiseFactor(p.barrier, math.Max(p.ratio, 3*minimumB-2))
		if p.held { // with B at its floor the factor stays where it was, so that J has no step
			dx = 0
		}
		p.lnA += ln
		for k := range p.dlnA {
			p.dlnA[k] += dW*p.dbarrier[k] + dx*dratio[k]
		}
	}
	return fine
}

// byEquation finds P_v and N from the equation of state.
func (f *Fluid) byEquation(p *point, dlnN *partials) cause {
	m := &f.c.Model
	tau, dlntau := m.Tau(p.T)
	p.tau, p.dlntau = tau, dlntau
	k := eos.GasConstant * p.T / m.B
	pl := p.P / k
	xl, ok := m.Form.Liquid(pl, tau, p.xl)
	if !ok {
		return noLiquid
	}
	p.xl = xl
	slope := m.PressureSlope(xl, tau)
	var dpl partials
	dpl[inT] = -pl / p.T
	dpl[inP] = 1 / k
	dpl[inB] = pl

	p.vLiquid = xl * m.B
	p.lnN = math.Log(eos.Avogadro / p.vLiquid)
	for i := range dpl {
		dlnN[i] = -dpl[i] / (slope * xl)
	}
	dlnN[inTau] -= tau / ((xl + m.D1) * (xl + m.D2)) / (slope * xl)
	dlnN[inB]--

	var pv float64
	var dpv partials // of the reduced pressure
	if f.poynting {
		c, ok := m.Saturate(tau)
		if !ok {
			return noSaturation
		}
		// ln p_v = ln p_s + x_s(p_l − p_s), x_s the saturated liquid
		pv = c.P * math.Exp(c.Xl*(pl-c.P))
		for i := range dpv {
			dpv[i] = pv * c.Xl * dpl[i]
		}
		dpv[inTau] += pv * tau * (c.DP/c.P + c.DXl*(pl-c.P) - c.Xl*c.DP)
		p.psat = c.P * k
		p.vVapour = eos.GasConstant * p.T / (pv * k)
	} else {
		lnf := m.Form.LnFugacity(xl, tau)
		xv, ok := m.VapourOfFugacity(lnf, tau, p.xv)
		if !ok {
			return noVapour
		}
		p.xv = xv
		pv = m.Form.Pressure(xv, tau)
		for i := range dpv {
			dpv[i] = xl * dpl[i] / xv
		}
		dpv[inTau] += tau * (m.AttractionIntegral(xv) - m.AttractionIntegral(xl)) / xv
		p.vVapour = xv * m.B
	}
	p.pv = pv * k
	for i := range dpv {
		p.dpv[i] = dpv[i] * k
	}
	p.dpv[inT] += p.pv / p.T
	p.dpv[inB] -= p.pv
	return fine
}

// byCorrelation finds P_v and N from correlations: ln P_v = ln P_s + v(P_l − P_s)/RT
// with the volume of the saturated liquid.
func (f *Fluid) byCorrelation(p *point, dlnN *partials) cause {
	ps, dlnps, err := f.c.Correlations.VapourPressure(p.T)
	if err != nil {
		return outsideRange
	}
	v, dlnv, err := f.c.Correlations.LiquidVolume(p.T)
	if err != nil {
		return outsideRange
	}
	rt := eos.GasConstant * p.T
	h := v * (p.P - ps) / rt
	p.tau, p.dlntau = 0, 0
	p.psat, p.vLiquid = ps, v
	p.pv = ps * math.Exp(h)
	p.dpv = partials{}
	p.dpv[inT] = p.pv * (dlnps + h*(dlnv-1/p.T) - v*ps*dlnps/rt)
	p.dpv[inP] = p.pv * v / rt
	p.vVapour = rt / p.pv
	p.lnN = math.Log(eos.Avogadro / v)
	dlnN[inT] = -dlnv
	return fine
}
