package kernel

import "math"

// flatTension is the surface tension in N/m of a flat surface at t in K and its
// derivative in N/(m.K), before the factor of the model. ok tells whether it is known.
func flatTension(c []float64, t float64) (sigma, slope float64, ok bool) {
	if !(t > c[KTensionLow] && t < c[KTensionHigh]) {
		return
	}
	at := int(c[KTensionAt])
	if int(c[KTension]) == PowerSum {
		// sum of s (1 - t/Tc)^n
		lntheta := math.Log((c[KTensionTc] - t) / c[KTensionTc])
		for i := 0; i < int(c[KTensionCount]); i++ {
			s := c[at+2*i] * math.Exp(c[at+2*i+1]*lntheta)
			sigma = sigma + s
			slope = slope - s*c[at+2*i+1]
		}
		slope = slope / (c[KTensionTc] - t)
	} else if int(c[KTension]) == DIPPR106 {
		// A (1 - r)^(B + C r + D r^2 + E r^3), r = t/Tc
		r := t / c[KTensionTc]
		theta := (c[KTensionTc] - t) / c[KTensionTc]
		n := c[at+1] + r*(c[at+2]+r*(c[at+3]+r*c[at+4]))
		dn := c[at+2] + r*(2*c[at+3]+3*r*c[at+4])
		sigma = c[at] * math.Exp(n*math.Log(theta))
		slope = sigma * (dn*math.Log(theta) - n/theta) / c[KTensionTc]
	} else {
		// fourth power of the difference of the saturated densities
		tau, dlntau := reducedAttraction(c, t)
		lnd, d, found := densityDifference(c, tau)
		if !found {
			return
		}
		r := math.Exp(lnd - c[at+2])
		sigma = c[at+1] * r * r * r * r
		slope = 4 * sigma * d * dlntau
	}
	ok = sigma > 0
	return
}

// densityDifference is ln(1/xl - 1/xv) of the saturated phases at tau and its derivative
// with respect to ln(tau).
func densityDifference(c []float64, tau float64) (lnd, slope float64, ok bool) {
	_, xl, xv, found := coexistence(c, tau)
	ok = found
	if found {
		_, dxl, dxv := coexistenceSlopes(c, tau, xl, xv)
		d := (xv - xl) / (xl * xv)
		lnd = math.Log(d)
		slope = tau * (dxv/xv/xv - dxl/(xl*xl)) / d
	}
	return
}

// surfaceTension is the surface tension in N/m of a flat surface at t in K, with the
// factor of the model.
func surfaceTension(c []float64, t float64) (sigma float64, status int) {
	status = NoState
	flat, _, ok := flatTension(c, t)
	sigma = noAnswer()
	if ok {
		sigma = flat * c[KSigma]
		status = Fine
	}
	return
}

// hermite is the piecewise cubic with n abscissas from column at on, then n ordinates
// and n slopes, at x, and its derivative.
func hermite(c []float64, at, n int, x float64) (y, slope float64) {
	lower := 0
	for i := 1; i < n-1; i++ {
		if c[at+i] <= x {
			lower = i
		}
	}
	h := c[at+lower+1] - c[at+lower]
	s := (x - c[at+lower]) / h
	y0 := c[at+n+lower]
	rise := c[at+n+lower+1] - y0
	m0 := h * c[at+2*n+lower]
	m1 := h * c[at+2*n+lower+1]
	a2 := 3*rise - 2*m0 - m1
	a3 := m0 + m1 - 2*rise
	y = y0 + s*(m0+s*(a2+s*a3))
	slope = (m0 + s*(2*a2+3*s*a3)) / h
	return
}

// vapourPressure is the correlated vapour pressure in Pa at t in K and d ln(p)/dt in 1/K.
func vapourPressure(c []float64, t float64) (p, dlnp float64) {
	at := int(c[KVapourAt])
	if int(c[KVapour]) == Table {
		// ln p against -1/t
		y, slope := hermite(c, at, int(c[KVapourCount]), -1/t)
		p = math.Exp(y)
		dlnp = slope / (t * t)
	} else {
		// ln(p/pc) = (Tc/t) (sum of a (1 - t/Tc)^n)
		tc := c[at]
		theta := (tc - t) / tc
		f := 0.0
		df := 0.0
		for i := 0; i < int(c[KVapourCount]); i++ {
			q := c[at+2+2*i] * math.Pow(theta, c[at+3+2*i]-1)
			f = f + q*theta
			df = df + q*c[at+3+2*i]
		}
		f = f * tc / t
		p = c[at+1] * math.Exp(f)
		dlnp = -(f + df) / t
	}
	return
}

// liquidDensity is the correlated density of the saturated liquid in kg/m3 at t in K and
// d ln(rho)/dt in 1/K.
func liquidDensity(c []float64, t float64) (rho, dlnrho float64) {
	at := int(c[KDensityAt])
	if int(c[KDensity]) == Table {
		// rho against -(1 - t/Tc)^(1/3)
		r := cubeRoot((c[KDensityTc] - t) / c[KDensityTc])
		y, slope := hermite(c, at, int(c[KDensityCount]), -r)
		rho = y
		dlnrho = slope * r / (3 * (c[KDensityTc] - t)) / y
	} else {
		// A/B^(1 + (1 - t/C)^D) by A, ln B, C, D
		k := math.Pow((c[at+2]-t)/c[at+2], c[at+3])
		rho = c[at] * math.Exp(-c[at+1]*(1+k))
		dlnrho = c[at+1] * c[at+3] * k / (c[at+2] - t)
	}
	return
}
