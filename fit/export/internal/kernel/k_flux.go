package kernel

import "math"

// Causes why a state has no flux.
const (
	aLiquid     = 0 // it has one
	noLiquid    = 1 // beyond the spinodal
	noVapour    = 2 // too dense for any vapour in equilibrium
	noTension   = 3 // the tension is not known or not positive
	tooCurved   = 4 // the Tolman length leaves no tension
	noStateHere = 5 // outside the properties
)

// Partial derivatives are with respect to t (at constant tau and tension), p, ln tau,
// ln b, ln of the flat tension and the Tolman length, in this order.
const (
	inT       = 0
	inP       = 1
	inTau     = 2
	inB       = 3
	inTension = 4
	inTolman  = 5
)

// phasesByEquation gives the vapour pressure in Pa in the critical bubble in a liquid at t and
// p, ln of the liquid's molecules per m3, and their partial derivatives.
func phasesByEquation(c []float64, t, p float64) (cause int, pv, lnn float64, dpv, dlnn [6]float64) {
	cause = noStateHere
	tau, _ := reducedAttraction(c, t)
	k := gasConstant * t / c[KB]
	pl := p / k
	xl, ok := liquidVolume(c, pl, tau)
	if !ok {
		cause = noLiquid
		return
	}
	slope := reducedSlope(c, xl, tau) * xl
	lnn = math.Log(avogadro / (xl * c[KB]))
	dlnn[inT] = pl / t / slope
	dlnn[inP] = -1 / k / slope
	dlnn[inB] = -pl/slope - 1
	dlnn[inTau] = -tau / ((xl + c[KDelta1]) * (xl + c[KDelta2])) / slope
	if int(c[KEmbryo]) == PoyntingEmbryo {
		// ln pv = ln psat + x(pl - psat)
		ps, xs, xv, found := coexistence(c, tau)
		if !found {
			return
		}
		dps, dxs, _ := coexistenceSlopes(c, tau, xs, xv)
		pv = ps * math.Exp(math.Min(xs*(pl-ps), 600))
		dpv[inT] = -pv * xs * pl / t
		dpv[inP] = pv * xs / k
		dpv[inB] = pv * xs * pl
		dpv[inTau] = pv * tau * (dps/ps + dxs*(pl-ps) - xs*dps)
	} else {
		xe, found := vapourVolume(c, lnFugacity(c, xl, tau), tau)
		if !found {
			cause = noVapour
			return
		}
		pv = reducedPressure(c, xe, tau)
		dpv[inT] = -xl * pl / t / xe
		dpv[inP] = xl / k / xe
		dpv[inB] = xl * pl / xe
		dpv[inTau] = tau * (attractionIntegral(c, xe) - attractionIntegral(c, xl)) / xe
	}
	for i := 0; i < 6; i++ {
		dpv[i] = dpv[i] * k
	}
	pv = pv * k
	dpv[inT] = dpv[inT] + pv/t
	dpv[inB] = dpv[inB] - pv
	cause = aLiquid
	return
}

// phasesByCorrelation is phasesByEquation from the correlations of the fluid, with the
// volume of the saturated liquid.
func phasesByCorrelation(c []float64, t, p float64) (cause int, pv, lnn float64, dpv, dlnn [6]float64) {
	cause = aLiquid
	ps, dlnps := vapourPressure(c, t)
	rho, dlnrho := liquidDensity(c, t)
	v := c[KMass] / rho
	rt := gasConstant * t
	h := v * (p - ps) / rt
	pv = ps * math.Exp(math.Min(h, 600))
	dpv[inT] = pv * (dlnps - h*(dlnrho+1/t) - v*ps*dlnps/rt)
	dpv[inP] = pv * v / rt
	lnn = math.Log(avogadro / v)
	dlnn[inT] = dlnrho
	return
}

// fluxState gives at t and p, each with its partial derivatives: the excess of pressure in the
// critical bubble over the liquid in Pa, the surface tension of the bubble in N/m, and
// lna = ln J + w, where J is the flux in m-3.s-1 and w the barrier in units of kT. w is
// meaningful for a positive excess only. The last two are the derivatives of ln tau and of
// ln of the flat tension with respect to t in 1/K.
func fluxState(c []float64, t, p float64) (cause int, excess, sigma, lna, w float64, dexcess, dsigma, dlna [6]float64, dlntau, dlntension float64) {
	cause = noStateHere
	if !(t >= c[KCold] && t < c[KHot]) {
		return
	}
	flat, dflat, known := flatTension(c, t)
	if !known {
		cause = noTension
		return
	}
	dlntension = dflat / flat
	flat = flat * c[KSigma]
	pv := 0.0
	lnn := 0.0
	if int(c[KProperties]) == ByCorrelation {
		cause, pv, lnn, dexcess, dlna = phasesByCorrelation(c, t, p)
	} else {
		cause, pv, lnn, dexcess, dlna = phasesByEquation(c, t, p)
		_, dlntau = reducedAttraction(c, t)
	}
	if cause != aLiquid {
		return
	}
	// Young and Laplace: excess = 2 sigma/r with sigma = flat/(1 + 2 delta/r)
	ratio := p / pv
	var dratio [6]float64
	for i := 0; i < 6; i++ {
		dratio[i] = -ratio * dexcess[i] / pv
	}
	dratio[inP] = dratio[inP] + 1/pv
	excess = pv - p
	dexcess[inP] = dexcess[inP] - 1
	delta := 0.0
	if excess > 0 {
		delta = c[KTolman]
	}
	sigma = flat - delta*excess
	if !(sigma > 0) {
		cause = tooCurved
		return
	}
	for i := 0; i < 6; i++ {
		dsigma[i] = -delta * dexcess[i]
	}
	dsigma[inTension] = dsigma[inTension] + flat
	dsigma[inTolman] = dsigma[inTolman] - excess
	// barrier
	if excess > 0 {
		w = 16 * pi * sigma * sigma * sigma / (3 * boltzmann * t) / excess / excess
	}
	// kinetic factor, held at 0.1 for a liquid under strong tension
	factor := 1.0
	held := false
	if int(c[KKinetics]) != ChemicalKinetics {
		factor = (2 + ratio) / 3
		if factor < 0.1 {
			factor = 0.1
			held = true
		}
	}
	lna = lnn + 0.5*math.Log(sigma/factor) + 0.5*math.Log(2*avogadro/(pi*c[KMass])) + ln10*c[KPrefactor]
	for i := 0; i < 6; i++ {
		dlna[i] = dlna[i] + 0.5*dsigma[i]/sigma
		if int(c[KKinetics]) != ChemicalKinetics {
			if !held {
				dlna[i] = dlna[i] - dratio[i]/(6*factor)
			}
		}
	}
	if int(c[KKinetics]) == StepKinetics {
		if excess > 0 {
			ln, dw, dx := stepwiseFactor(c, w, math.Max(ratio, -1.7))
			if held {
				dx = 0
			}
			lna = lna + ln
			for i := 0; i < 6; i++ {
				dlna[i] = dlna[i] + dw*w*(3*dsigma[i]/sigma-2*dexcess[i]/excess) + dx*dratio[i]
			}
			dlna[inT] = dlna[inT] - dw*w/t
		}
	}
	return
}

// log10Flux is log10 of the nucleation flux in m-3.s-1 of the liquid at t in K and p in
// Pa; it exists for a superheated liquid only.
func log10Flux(c []float64, t, p float64) (lg float64, status int) {
	lg = noAnswer()
	status = NoState
	cause, excess, _, lna, w, _, _, _, _, _ := fluxState(c, t, p)
	if cause == aLiquid && excess > 0 {
		lg = (lna - w) / ln10
		status = Fine
	}
	return
}
