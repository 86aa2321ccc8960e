package kernel

import "math"

// lnOnePlus is ln(1+z) without loss of digits for small z > -1.
func lnOnePlus(z float64) float64 {
	w := 1 + z
	if !(math.Abs(w-1) > 0) {
		return z
	}
	return math.Log(w) * z / (w - 1)
}

// cubeRoot is the cube root of z >= 0.
func cubeRoot(z float64) float64 {
	if !(z > 0) {
		return 0
	}
	r := math.Exp(math.Log(z) / 3)
	return r - (r*r*r-z)/(3*r*r)
}

// reducedPressure is p = 1/(x-1) - tau/((x+delta1)(x+delta2)), the equation of state in
// reduced variables.
func reducedPressure(c []float64, x, tau float64) float64 {
	return 1/(x-1) - tau/((x+c[KDelta1])*(x+c[KDelta2]))
}

// reducedSlope is dp/dx at constant tau; negative for a stable phase.
func reducedSlope(c []float64, x, tau float64) float64 {
	q := (x + c[KDelta1]) * (x + c[KDelta2])
	return tau/q*((2*x+c[KDelta1]+c[KDelta2])/q) - 1/((x-1)*(x-1))
}

// attractionIntegral is the integral of dx/((x+delta1)(x+delta2)) from x to infinity.
func attractionIntegral(c []float64, x float64) float64 {
	d := c[KDelta1] - c[KDelta2]
	if !(math.Abs(d) > 0) {
		return 1 / (x + c[KDelta1])
	}
	return lnOnePlus(d/(x+c[KDelta2])) / d
}

// lnFugacity is ln(f b/(RT)) at the volume x, equal in phases in equilibrium.
func lnFugacity(c []float64, x, tau float64) float64 {
	q := (x + c[KDelta1]) * (x + c[KDelta2])
	return 1/(x-1) - math.Log(x-1) - tau*(x/q+attractionIntegral(c, x))
}

// reducedAttraction gives tau = a/(bRT) at t and d ln(tau)/dt in 1/K.
func reducedAttraction(c []float64, t float64) (tau, dlntau float64) {
	r := t / c[KTref]
	if int(c[KAlpha]) == PowerAlpha {
		tau = c[KTau1] * math.Pow(r, -c[KSlope]-1)
		dlntau = -(c[KSlope] + 1) / t
	} else {
		root := math.Sqrt(r)
		g := 1 + c[KSlope]*(1-root)
		tau = c[KTau1] * g * g / r
		dlntau = -(1 + c[KSlope]*root/g) / t
	}
	return
}

// temperatureAt is the temperature in K at which a/(bRT) is tau.
func temperatureAt(c []float64, tau float64) float64 {
	k := tau / c[KTau1]
	if int(c[KAlpha]) == PowerAlpha {
		return c[KTref] * math.Pow(k, -1/(c[KSlope]+1))
	}
	root := (1 + c[KSlope]) / (c[KSlope] + math.Sqrt(k))
	return c[KTref] * root * root
}

// spinodalTau is the tau for which x is the volume of a spinodal, dp/dx = 0.
func spinodalTau(c []float64, x float64) float64 {
	q := (x + c[KDelta1]) * (x + c[KDelta2])
	return q * q / ((2*x + c[KDelta1] + c[KDelta2]) * (x - 1) * (x - 1))
}

// spinodalTauSlope is d ln(tau)/dx along the spinodal.
func spinodalTauSlope(c []float64, x float64) float64 {
	m := 2*x + c[KDelta1] + c[KDelta2]
	return 2*m/((x+c[KDelta1])*(x+c[KDelta2])) - 2/m - 2/(x-1)
}

// spinodalVolume is x of the spinodal at tau: side -1 that of the liquid, +1 that of the
// vapour. The root is bracketed by the critical volume and the end of its side.
func spinodalVolume(c []float64, tau, side float64) float64 {
	xc := c[KXc]
	if !(tau > c[KTauc]) {
		return xc
	}
	excess := math.Log(tau / c[KTauc])
	lo := 1.0
	hi := xc
	x := xc - math.Sqrt(2*excess/c[KKappa])
	if side > 0 {
		lo = xc
		hi = 4*tau + 2*xc
		x = 2 * tau
		if excess < 0.3 {
			x = xc + math.Sqrt(2*excess/c[KKappa])
		}
	} else {
		q := (1 + c[KDelta1]) * (1 + c[KDelta2])
		x = math.Max(x, 1+q/math.Sqrt((2+c[KDelta1]+c[KDelta2])*tau))
	}
	if !(x > lo && x < hi) {
		x = 0.5 * (lo + hi)
	}
	for i := 0; i < 200; i++ {
		// spinodalTau and spinodalTauSlope
		f := (x + c[KDelta1]) * (x + c[KDelta2])
		m := 2*x + c[KDelta1] + c[KDelta2]
		v := math.Log(f * f / (m * (x - 1) * (x - 1) * tau))
		d := 2*m/f - 2/m - 2/(x-1)
		if v*side > 0 {
			hi = x
		} else {
			lo = x
		}
		move := hi - lo
		if d*side > 0 {
			move = v / d
		}
		if math.Abs(move) <= 1e-9*math.Min(x-1, math.Abs(xc-x)) {
			x = x - move
			break
		}
		x = x - move
		if !(x > lo && x < hi) {
			x = lo + 0.5*(hi-lo)
		}
		if hi-lo <= 4e-16*hi {
			break
		}
	}
	return x
}

// liquidVolume is the volume x of the liquid at the reduced pressure p, between 1 and
// the spinodal.
func liquidVolume(c []float64, p, tau float64) (x float64, ok bool) {
	if !(tau > c[KTauc] && tau < 1e8 && p < 1e8) {
		return
	}
	lo := 1.0
	hi := spinodalVolume(c, tau, -1)
	if !(p > reducedPressure(c, hi, tau)) {
		return
	}
	s := c[KDelta1] + c[KDelta2]
	x = 0.5 * (1 + hi)
	if tau > 1.01*c[KTau0] {
		// the liquid at zero pressure
		f := tau - s
		g := c[KDelta1]*c[KDelta2] + tau
		x = math.Min(2*g/(f+math.Sqrt(f*f-4*g)), x+0.999*(hi-x))
	}
	for i := 0; i < 200; i++ {
		q := (x + c[KDelta1]) * (x + c[KDelta2])
		v := 1 - (x-1)*(p+tau/q)
		d := (x-1)*tau*(2*x+s)/(q*q) - (p + tau/q)
		if v > 0 {
			lo = x
		} else {
			hi = x
		}
		move := hi - lo
		if d < 0 {
			move = v / d
		}
		if math.Abs(move) <= 1e-9*(x-1) {
			x = x - move
			break
		}
		x = x - move
		if !(x > lo && x < hi) {
			x = lo + 0.5*(hi-lo)
		}
		if hi-lo <= 4e-16*hi {
			break
		}
	}
	ok = true
	return
}

// vapourVolume is the volume x of the vapour whose ln(f b/(RT)) is lnf; not ok where no
// vapour is in equilibrium with so dense a liquid.
func vapourVolume(c []float64, lnf, tau float64) (x float64, ok bool) {
	if !(lnf > -690 && lnf < 690) {
		return
	}
	first := spinodalVolume(c, tau, 1)
	if !(lnf < lnFugacity(c, first, tau)) {
		return
	}
	lo := math.Log(first)
	hi := math.Max(lo, -lnf) + 10
	// ideal vapour with its second virial coefficient; the search is in ln x
	w := -(lnf + math.Min(2*(tau-1)*math.Exp(math.Min(lnf, 0)), 0.3))
	if !(w > lo && w < hi) {
		w = lo + 0.3
	}
	for i := 0; i < 200; i++ {
		// lnFugacity and its slope in ln x
		x = math.Exp(w)
		q := (x + c[KDelta1]) * (x + c[KDelta2])
		v := 1/(x-1) - math.Log(x-1) - tau*(x/q+attractionIntegral(c, x)) - lnf
		d := x * x * (tau/q*((2*x+c[KDelta1]+c[KDelta2])/q) - 1/((x-1)*(x-1)))
		if v > 0 {
			lo = w
		} else {
			hi = w
		}
		move := hi - lo
		if d < 0 {
			move = v / d
		}
		if math.Abs(move) <= 1e-9 {
			w = w - move
			break
		}
		w = w - move
		if !(w > lo && w < hi) {
			w = lo + 0.5*(hi-lo)
		}
		if hi-lo <= 4e-16*math.Abs(hi) {
			break
		}
	}
	x = math.Exp(w)
	ok = true
	return
}
