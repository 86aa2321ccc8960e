package kernel

import "math"

// approach measures how near the liquid at t and p is to its kinetic limit: psi is its
// excess of pressure over the one at which the flux has the threshold, less 1, with the
// derivative with respect to t. Where the threshold is above any flux, psi is -1 without slope.
func approach(c []float64, t, p float64) (cause int, psi, slope float64) {
	psi = -1
	state, excess, sigma, lna, _, dexcess, dsigma, dlna, dlntau, dlntension := fluxState(c, t, p)
	cause = state
	if cause != aLiquid {
		return
	}
	room := lna - ln10*c[KThreshold]
	if !(room > 0) {
		return
	}
	required := math.Sqrt(16 * pi * sigma * sigma * sigma / (3 * boltzmann * t * room))
	h := excess / required
	slope = (dexcess[inT]+dexcess[inTau]*dlntau+dexcess[inTension]*dlntension)/required + 0.5*h/t
	slope = slope - 1.5*h*(dsigma[inT]+dsigma[inTau]*dlntau+dsigma[inTension]*dlntension)/sigma
	slope = slope + 0.5*h*(dlna[inT]+dlna[inTau]*dlntau+dlna[inTension]*dlntension)/room
	psi = h - 1
	return
}

// peak looks for the temperature of the largest psi below the spinodal, just before which
// the falling density of the liquid lowers the flux; it halves the logarithm of the
// distance on the sign of the slope.
func peak(c []float64, cold, spinodal, p float64) (t, largest float64) {
	far := math.Log(spinodal - cold)
	near := far + math.Log(1e-9)
	t = spinodal
	largest = -2
	for i := 0; i < 50; i++ {
		d := 0.5 * (far + near)
		x := spinodal - math.Exp(d)
		cause, psi, slope := approach(c, x, p)
		if cause == aLiquid && psi > largest {
			t = x
			largest = psi
		}
		if cause == aLiquid && slope > 0 {
			far = d
		} else {
			near = d
		}
	}
	return
}

// kineticLimit is the temperature in K at which the flux of the liquid at p in Pa reaches
// the threshold, by Newton steps inside a bracket whose hot end is the spinodal.
func kineticLimit(c []float64, p float64) (t float64, status int) {
	t = noAnswer()
	status = NoState
	if !(math.Abs(p) <= 1e15) || (int(c[KProperties]) == ByEquation && p >= c[KPc]) {
		return
	}
	lo := c[KCold]
	hi := c[KHot]
	if int(c[KProperties]) == ByEquation {
		spinodal, code := spinodalTemperature(c, p)
		if code == Fine {
			hi = math.Min(hi, spinodal)
		}
	}
	hi = hi * (1 - 1e-11) // the last temperature before the liquid ends
	status = NoLimit
	if !(hi > lo) {
		return
	}
	cause, psi, _ := approach(c, hi, p)
	if cause == noVapour {
		return
	}
	if cause == aLiquid && psi < 0 {
		top, largest := peak(c, lo, hi, p)
		if largest < 0 {
			return
		}
		hi = top
	}
	x := 0.9 * c[KHot]
	if int(c[KProperties]) == ByCorrelation {
		x = math.Min(x, lo+0.9*(c[KHot]-lo))
	} else {
		zero := temperatureAt(c, c[KTau0])
		r := math.Max(p/c[KPc], -1)
		x = zero + (c[KTc]-zero)*r - 0.02*c[KTc]*(1-r)
	}
	if !(x > lo && x < hi) {
		x = lo + 0.9*(hi-lo)
	}
	status = NotConverged
	for i := 0; i < 200; i++ {
		state, near, slope := approach(c, x, p)
		next := lo
		if state == aLiquid {
			if near >= 0 {
				hi = x
			} else {
				lo = x
			}
			if math.Abs(slope) > 0 {
				next = x - near/slope
				if math.Abs(next-x) <= math.Min(1e-8*x, 3e-7*math.Sqrt(x*(c[KHot]-x))) {
					t = next
					status = Fine
					break
				}
			}
		} else if state == noVapour {
			lo = x
		} else if state == noStateHere {
			break
		} else {
			hi = x
		}
		if !(next > lo && next < hi) {
			next = math.Max(lo+0.5*(hi-lo), 0.9*hi)
		}
		if hi-lo <= 4e-15*hi {
			break
		}
		x = next
	}
	return
}

// tauGradient gives the derivatives of ln tau at t with respect to the factors on the
// attraction and the covolume and to the parameter slope.
func tauGradient(c []float64, t float64) (a, b, s float64) {
	r := t / c[KTref]
	a = 1 / c[KAttraction]
	b = -1 / c[KCovolume]
	if int(c[KAlpha]) == PowerAlpha {
		s = -c[KDSlope] * math.Log(r)
	} else {
		h := 1 - math.Sqrt(r)
		s = 2 * c[KDSlope] * h / (1 + c[KSlope]*h)
	}
	return
}

// kineticGradient gives the derivatives of the kinetic limit t at p with respect to log10 of
// the threshold, prefactor, attraction, covolume, slope, surface tension, Tolman length in
// nm and offset, by the implicit function theorem on ln J(t, p) = ln J*.
func kineticGradient(c []float64, t, p float64) (g [8]float64, status int) {
	status = NotConverged
	cause, excess, sigma, _, w, dexcess, dsigma, dlna, dlntau, dlntension := fluxState(c, t, p)
	if cause != aLiquid || !(excess > 0) {
		return
	}
	var d [6]float64
	for i := 0; i < 6; i++ {
		d[i] = dlna[i] - w*(3*dsigma[i]/sigma-2*dexcess[i]/excess)
	}
	d[inT] = d[inT] + w/t
	steepness := d[inT] + d[inTau]*dlntau + d[inTension]*dlntension
	if !(math.Abs(steepness) > 0) {
		return
	}
	if int(c[KProperties]) == ByEquation {
		a, b, s := tauGradient(c, t)
		g[2] = d[inTau] * a
		g[3] = d[inTau]*b + d[inB]/c[KCovolume]
		g[4] = d[inTau] * s
	}
	if int(c[KTension]) == Parachor {
		at := int(c[KTensionAt])
		a1, b1, s1 := tauGradient(c, t)
		a2, b2, s2 := tauGradient(c, c[at])
		tau, _ := reducedAttraction(c, t)
		_, steep, _ := densityDifference(c, tau)
		g[2] = g[2] + 4*d[inTension]*(steep*a1-c[at+3]*a2)
		g[3] = g[3] + 4*d[inTension]*(steep*b1-c[at+3]*b2)
		g[4] = g[4] + 4*d[inTension]*(steep*s1-c[at+3]*s2)
	}
	g[0] = -ln10
	g[1] = ln10
	g[5] = d[inTension] / c[KSigma]
	g[6] = d[inTolman] * 1e-9
	for i := 0; i < 7; i++ {
		g[i] = -g[i] / steepness
	}
	g[7] = 1
	status = Fine
	return
}

// spinodalGradient is kineticGradient for the spinodal at the volume x, temperature t and
// pressure p.
func spinodalGradient(c []float64, x, t, p float64) (g [8]float64) {
	tau, dlntau := reducedAttraction(c, t)
	h := gasConstant * t / c[KB] * tau / ((x + c[KDelta1]) * (x + c[KDelta2]))
	dpdt := p/t - h*dlntau
	a, b, s := tauGradient(c, t)
	g[2] = h * a / dpdt
	g[3] = (h*b + p/c[KCovolume]) / dpdt
	g[4] = h * s / dpdt
	g[7] = 1
	return
}

// limitAnywhere is limitTemperature also outside the stated range of pressure: an
// extrapolation of the calibration there.
func limitAnywhere(c []float64, p float64) (t, u float64, status int) {
	u = noAnswer()
	t = noAnswer()
	status = NoState
	var g [8]float64
	if int(c[KLimit]) == SpinodalLimit {
		x, code := spinodalState(c, p)
		status = code
		if code == Fine {
			t = temperatureAt(c, spinodalTau(c, x))
			g = spinodalGradient(c, x, t, p)
		}
	} else {
		limit, code := kineticLimit(c, p)
		status = code
		if code == Fine {
			t = limit
			g, status = kineticGradient(c, t, p)
		}
	}
	if status != Fine {
		t = noAnswer()
		return
	}
	t = t + c[KOffset]
	if int(c[KHasU]) == 1 {
		variance := c[KSpread]
		at := KCovariance
		for i := 0; i < 8; i++ {
			for j := 0; j < i; j++ {
				variance = variance + 2*g[i]*g[j]*c[at]
				at = at + 1
			}
			variance = variance + g[i]*g[i]*c[at]
			at = at + 1
		}
		u = math.Sqrt(math.Max(variance, 0))
	}
	return
}

// limitTemperature is the limit of superheat in K at the absolute pressure p in Pa, with its
// standard uncertainty u in K: that of a new measurement, from the covariance of the
// parameters and the spread. Outside the stated range of pressure there is none.
func limitTemperature(c []float64, p float64) (t, u float64, status int) {
	t = noAnswer()
	u = noAnswer()
	status = OutOfRange
	if p >= c[KLow]-1e-9*math.Abs(c[KLow]) && p <= c[KHigh]+1e-9*math.Abs(c[KHigh]) {
		t, u, status = limitAnywhere(c, p)
	}
	return
}

// pressureAt is the pressure in Pa by the equation of state at t in K and the molar
// volume v in m3/mol.
func pressureAt(c []float64, t, v float64) (p float64, status int) {
	p = noAnswer()
	status = NoState
	if t > 0.01*c[KTc] && t < c[KTc] && v > c[KB] {
		tau, _ := reducedAttraction(c, t)
		p = reducedPressure(c, v/c[KB], tau) * gasConstant * t / c[KB]
		status = Fine
	}
	return
}
