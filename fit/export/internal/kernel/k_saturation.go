package kernel

import "math"

// noAnswer stands for a number that does not exist.
func noAnswer() float64 { return math.NaN() }

// coexistence finds the saturated state at tau: reduced pressure, volumes of liquid and
// vapour. It is the fixed point of the pressure of the vapour in equilibrium with the
// liquid at p, bracketed by the spinodals.
func coexistence(c []float64, tau float64) (p, xl, xv float64, ok bool) {
	if !(tau > c[KTauc]) {
		return
	}
	lo := math.Max(0, reducedPressure(c, spinodalVolume(c, tau, -1), tau))
	hi := reducedPressure(c, spinodalVolume(c, tau, 1), tau)
	p = 0.5 * (lo + hi)
	for i := 0; i < 200; i++ {
		liquid := false
		vapour := false
		xl, liquid = liquidVolume(c, p, tau)
		if !liquid {
			break
		}
		xv, vapour = vapourVolume(c, lnFugacity(c, xl, tau), tau)
		next := 0.5 * (lo + p)
		if vapour {
			pv := reducedPressure(c, xv, tau)
			step := (pv - p) / (1 - xl/xv)
			next = p + step
			if pv > p {
				lo = p
			} else {
				hi = p
			}
			if !(next >= lo && next <= hi) {
				next = 0.5 * (lo + hi)
			}
			if math.Abs(step) <= 1e-8*p*(1-xl/xv) {
				p = next
				xl, liquid = liquidVolume(c, p, tau)
				xv, vapour = vapourVolume(c, lnFugacity(c, xl, tau), tau)
				ok = liquid && vapour
				break
			}
		} else {
			hi = p // too dense for any vapour
		}
		p = next
	}
	return
}

// coexistenceSlopes are the derivatives with respect to tau of the reduced pressure and
// of the volumes along the line of saturation.
func coexistenceSlopes(c []float64, tau, xl, xv float64) (dp, dxl, dxv float64) {
	dp = (attractionIntegral(c, xv) - attractionIntegral(c, xl)) / (xv - xl)
	dxl = (dp + 1/((xl+c[KDelta1])*(xl+c[KDelta2]))) / reducedSlope(c, xl, tau)
	dxv = (dp + 1/((xv+c[KDelta1])*(xv+c[KDelta2]))) / reducedSlope(c, xv, tau)
	return
}

// saturationPressure is the vapour pressure in Pa at t in K, by the equation of state or
// by the correlation of the fluid, as the model has it.
func saturationPressure(c []float64, t float64) (p float64, status int) {
	p = noAnswer()
	status = NoState
	if int(c[KProperties]) == ByCorrelation {
		if t >= c[KVapourLow] && t <= c[KVapourHigh] {
			p, _ = vapourPressure(c, t)
			status = Fine
		}
		return
	}
	if t >= c[KMinT] && t < c[KTc] {
		tau, _ := reducedAttraction(c, t)
		reduced, _, _, ok := coexistence(c, tau)
		status = NotConverged
		if ok {
			p = reduced * gasConstant * t / c[KB]
			status = Fine
		}
	}
	return
}

// saturationTemperature is the boiling temperature in K at the pressure p in Pa.
func saturationTemperature(c []float64, p float64) (t float64, status int) {
	t = noAnswer()
	status = NoState
	if !(p > 0) {
		return
	}
	if int(c[KProperties]) == ByCorrelation {
		cold := c[KVapourLow]
		hot := c[KVapourHigh]
		p1, _ := vapourPressure(c, cold)
		p2, _ := vapourPressure(c, hot)
		if p > p1 && p < p2 {
			for i := 0; i < 60; i++ {
				t = 0.5 * (cold + hot)
				p1, _ = vapourPressure(c, t)
				if p1 < p {
					cold = t
				} else {
					hot = t
				}
			}
			t = 0.5 * (cold + hot)
			status = Fine
		}
		return
	}
	lowest, code := saturationPressure(c, c[KMinT])
	if code != Fine || !(p > lowest && p < c[KPc]) {
		return
	}
	// ln p against 1/t is nearly a straight line
	lo := 1 / c[KTc]
	hi := 1 / c[KMinT]
	steepness := math.Log(c[KPc]/lowest) / (hi - lo)
	w := lo + math.Log(c[KPc]/p)/steepness
	status = NotConverged
	for i := 0; i < 200; i++ {
		if !(w > lo && w < hi) {
			w = lo + 0.5*(hi-lo)
		}
		t = 1 / w
		tau, dlntau := reducedAttraction(c, t)
		reduced, xl, xv, ok := coexistence(c, tau)
		if ok {
			dp, _, _ := coexistenceSlopes(c, tau, xl, xv)
			v := math.Log(reduced * gasConstant * t / c[KB] / p)
			if v > 0 {
				lo = w
			} else {
				hi = w
			}
			move := v / (-(1/t + dp/reduced*tau*dlntau) * t * t)
			w = w - move
			if math.Abs(move) <= 1e-9*w {
				status = Fine
			}
		} else {
			lo = w // within rounding of the critical point
		}
		if status == Fine || hi-lo <= 4e-16*hi {
			t = 1 / math.Max(lo, math.Min(hi, w))
			status = Fine
			break
		}
	}
	if status != Fine {
		t = noAnswer()
	}
	return
}

// spinodalTemperature is the highest temperature in K at which the liquid can exist at
// the pressure p in Pa, the thermodynamic limit of superheat.
func spinodalTemperature(c []float64, p float64) (t float64, status int) {
	t = noAnswer()
	status = NoState
	volume, code := spinodalState(c, p)
	status = code
	if code == Fine {
		t = temperatureAt(c, spinodalTau(c, volume))
	}
	return
}

// spinodalState is the volume x of the liquid spinodal at the pressure p in Pa. To each
// volume belongs one temperature in closed form, so the search is in x.
func spinodalState(c []float64, p float64) (x float64, status int) {
	x = c[KXc]
	status = NoState
	tau, _ := reducedAttraction(c, c[KMinT])
	lo := spinodalVolume(c, tau, -1)
	hi := c[KXc]
	first := lo
	lowest := reducedPressure(c, lo, tau) * gasConstant * c[KMinT] / c[KB]
	if !(p > lowest && p < c[KPc]) {
		return
	}
	x = hi - (hi-c[KX0])*math.Sqrt(1-p/c[KPc])
	status = NotConverged
	for i := 0; i < 200; i++ {
		if !(x > lo && x < hi) {
			x = lo + 0.5*(hi-lo)
		}
		tau = spinodalTau(c, x)
		t := temperatureAt(c, tau)
		_, dlntau := reducedAttraction(c, t)
		k := gasConstant * t / c[KB]
		reduced := reducedPressure(c, x, tau)
		v := reduced*k - p
		d := k * (reduced/t - tau*dlntau/((x+c[KDelta1])*(x+c[KDelta2]))) * spinodalTauSlope(c, x) / dlntau
		if v > 0 {
			hi = x
		} else {
			lo = x
		}
		move := hi - lo
		if d > 0 {
			move = v / d
		}
		x = x - move
		if math.Abs(move) <= 1e-9*math.Min(x-first, c[KXc]-x) || hi-lo <= 4e-16*hi {
			x = math.Max(lo, math.Min(hi, x))
			status = Fine
			break
		}
	}
	return
}
