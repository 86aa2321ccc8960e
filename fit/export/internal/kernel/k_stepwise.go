package kernel

import "math"

// stepwiseExponent is the free energy of a bubble of radius r (in units of the critical
// one) over the barrier, less 1, and its derivative with respect to x, the pressure of the
// liquid over that of the vapour.
func stepwiseExponent(r, x float64) (h, hx float64) {
	d := r - 1
	lnu := lnOnePlus(-(1 - x) * d / r)
	h = d*(r+1) + 2*r*r*(x*r+1-x)/(1-x)*lnu
	hx = 2*r*r*r/((1-x)*(1-x))*lnu + 2*r*r*(x*r+1-x)/(1-x)*(1-1/r)/(x+(1-x)/r)
	return
}

// stepwiseEnd is where the sum over embryo sizes may end, going from the critical size
// in steps of the given direction.
func stepwiseEnd(w, x, direction, first, last float64) float64 {
	step := direction * math.Min(0.02, 0.5/math.Sqrt(w))
	r := 1.0
	for i := 0; i < 10000; i++ {
		next := r + step
		if next <= first {
			return first
		}
		if next >= last {
			return last
		}
		r = next
		h, _ := stepwiseExponent(r, x)
		if w*h < -45 {
			break
		}
		step = step * 1.1
	}
	return r
}

// stepwiseFactor is ln of the flux by the sum over embryo sizes, one molecule at a time,
// over that of the closed form, and its derivatives with respect to the barrier w in units
// of kT and to x. The sum is an integral by the rule of Gauss and Legendre. Above a
// barrier of 1e6 kT the logarithm falls as 1/w.
func stepwiseFactor(c []float64, w, x float64) (ln, dw, dx float64) {
	wide := math.Min(w, 1e6)
	first := 1 / math.Sqrt(2*wide) // the embryo of one molecule
	for i := 0; i < 20; i++ {
		molecules := 2 * wide / (1 - x) * first * first * (x*first + 1 - x)
		step := (molecules - 1) * first / (2*molecules + 2*wide/(1-x)*x*first*first*first)
		first = first - step
		if math.Abs(step) < 1e-8*first {
			break
		}
	}
	single := first > 0 && first < 0.8
	if !single {
		first = 0.8
	}
	last := 1e30
	if x < 0 {
		last = -2 * (1 - x) / (3 * x)
	}
	lo := stepwiseEnd(wide, x, -1, first, last)
	hi := stepwiseEnd(wide, x, 1, first, last)
	mid := 0.5 * (lo + hi)
	half := 0.5 * (hi - lo)
	at := int(c[KRule])
	n := int(c[KRuleCount])
	k := 0.0
	kw := 0.0
	kx := 0.0
	for i := 0; i < 2*n; i++ {
		j := i
		side := 1.0
		if i >= n {
			j = i - n
			side = -1
		}
		r := mid + half*side*c[at+j]
		h, hx := stepwiseExponent(r, x)
		weight := x + 2*(1-x)/(3*r)
		e := c[at+n+j] * half * math.Exp(wide*h)
		k = k + e*weight
		kw = kw + e*weight*h
		kx = kx + e*(weight*wide*hx+1-2/(3*r))
	}
	if single && !(lo > first) {
		rate := (2 + 2*wide/(1-x)*x*lo*lo*lo) / lo
		h, _ := stepwiseExponent(lo, x)
		e := math.Exp(wide*h) * (x + 2*(1-x)/(3*lo)) / rate
		kw = kw + e/wide
		kx = kx + e*2*wide*lo*lo*lo/((1-x)*(1-x))
	}
	ln = 0.5*math.Log(pi*(2+x)/(9*wide)) - math.Log(k)
	dw = -0.5/wide - kw/k
	dx = 0.5/(2+x) - kx/k
	if w > wide {
		ln = ln * wide / w
		dw = -ln / w
		dx = dx * wide / w
	}
	return
}
