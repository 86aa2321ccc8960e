package eos

import "math"

// This file holds a second solver that shares no code with the package: the
// textbook formulas in reduced variables, and bisection to the last bit.

type slow struct{ d1, d2, tau float64 }

func (s slow) p(x float64) float64 { return 1/(x-1) - s.tau/((x+s.d1)*(x+s.d2)) }

// lnf is ln f, less ln(RT/b), from ln(1/(x−1)) + Z − 1 − τI.
func (s slow) lnf(x float64) float64 {
	i := 1 / (x + s.d1)
	if s.d1 != s.d2 {
		i = math.Log((x+s.d1)/(x+s.d2)) / (s.d1 - s.d2)
	}
	// Z − 1 = x/(x−1) − τx/q − 1
	return -math.Log(x-1) + 1/(x-1) - s.tau*x/((x+s.d1)*(x+s.d2)) - s.tau*i
}

// bisect returns the point where negative turns from true (at lo) to false (at hi).
// The midpoint is geometric: all variables here are positive.
func bisect(lo, hi float64, negative func(float64) bool) float64 {
	for i := 0; i < 2000; i++ {
		mid := math.Sqrt(lo) * math.Sqrt(hi)
		if hi < 4*lo {
			mid = lo + (hi-lo)/2
		}
		if !(mid > lo && mid < hi) {
			break
		}
		if negative(mid) {
			lo = mid
		} else {
			hi = mid
		}
	}
	return hi
}

// critical is x_c: y = x − 1 is the zero of y³ − 3Dy − (2+δ₁+δ₂)D.
func (s slow) critical() float64 {
	d := (1 + s.d1) * (1 + s.d2)
	return 1 + bisect(1e-9, 1e5, func(y float64) bool { return y*y*y < 3*d*y+(2+s.d1+s.d2)*d })
}

// stable tells whether p falls with x, without the common denominator.
func (s slow) stable(x float64) bool {
	q := (x + s.d1) * (x + s.d2)
	return s.tau*(2*x+s.d1+s.d2)*(x-1)*(x-1) < q*q
}

// spinodal returns the two volumes at which p(x) has its minimum and maximum.
func (s slow) spinodal() (xl, xv float64) {
	xc := s.critical()
	y := bisect(1e-12, xc-1, func(y float64) bool { return s.stable(1 + y) })
	xv = bisect(xc, 1e12, func(x float64) bool { return !s.stable(x) })
	return 1 + y, xv
}

// liquid and vapour are the roots of p(x) = p on the stable sides of the spinodal.
func (s slow) liquid(p, xs float64) float64 {
	return 1 + bisect(1e-12, xs-1, func(y float64) bool { return s.p(1+y) > p })
}

func (s slow) vapour(p, xs float64) float64 {
	return 1 / bisect(1e-305, 1/xs, func(y float64) bool { return s.p(1/y) < p })
}

// vapourOfLnf is the vapour root of ln f.
func (s slow) vapourOfLnf(lnf, xs float64) float64 {
	return 1 / bisect(1e-305, 1/xs, func(y float64) bool { return s.lnf(1/y) < lnf })
}

// saturate bisects for the pressure at which the liquid's fugacity is no longer
// the larger one: at low pressure a liquid evaporates.
func (s slow) saturate() (p, xl, xv float64) {
	sl, sv := s.spinodal()
	p = bisect(math.Max(s.p(sl), 1e-304), s.p(sv), func(p float64) bool {
		return s.lnf(s.liquid(p, sl)) > s.lnf(s.vapour(p, sv))
	})
	return p, s.liquid(p, sl), s.vapour(p, sv)
}
