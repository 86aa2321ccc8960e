package nucleation

import "math"

// This file looks at the flux next to the spinodal, where the search for a limit ends.

// met tells whether J meets the target at a state next to which no other is left. A hair
// below the spinodal a per-kelvin target leaps from one number to the next by more than
// the proof of a step allows.
func (f *Fluid) met(T, P float64, t Target, p *point) bool {
	const decent = 1e-6 // of ln J
	return f.evaluate(T, P, p) == fine && p.excess > 0 && math.Abs(p.lnJ()-f.wanted(p, t)) < decent
}

// hopeless tells from ψ next to the spinodal that J meets its target nowhere before it
// either. Going back from there ΔP falls and σ rises, so that ψ+1 can only grow by the
// root of lnA − lnJ*, and lnA with the logarithms of the density and of B: by less than
// 1.5 (they double at most).
func (f *Fluid) hopeless(p *point, t Target, ψ float64) bool {
	L := p.lnA - f.wanted(p, t)
	return L > 0 && (1+ψ)*math.Sqrt(1+1.5/L) < 0.95
}

// peak looks for ψ ≥ 0 between a state inside and one next to the spinodal, where it is
// below zero; given is P_l or, with atT, T. The density of the liquid, and with it the
// flux, falls with an infinite slope at the spinodal, as the square root of the distance,
// so that ψ has a maximum just before it. The search halves the logarithm of the distance
// on the sign of the slope, and ends where ψ is not below zero, or where the tangent to
// the concave ψ stays below zero up to the closest state with a falling ψ. It returns the
// state with the largest ψ met; to the end, that is where ψ is largest.
func (f *Fluid) peak(inside, spinodal, given float64, t Target, atT, toEnd bool) (x, ψ float64) {
	sign := 1.0
	if spinodal < inside {
		sign = -1
	}
	width := math.Abs(spinodal - inside)
	far, near := math.Log(width), math.Log(width*1e-9)
	falling := 0.0 // distance from the spinodal of the farthest state with a falling ψ
	x, ψ = spinodal, math.Inf(-1)
	var p point
	for range 28 {
		d := 0.5 * (far + near)
		distance := math.Exp(d)
		at := spinodal - sign*distance
		T, P := at, given
		if atT {
			T, P = given, at
		}
		if f.evaluate(T, P, &p) != fine {
			p.xl, p.xv = 0, 0
			near = d
			continue
		}
		v, slope := f.psi(&p, t, atT)
		if v > ψ {
			x, ψ = at, v
		}
		if ψ >= 0 && !toEnd {
			return x, ψ
		}
		if sign*slope > 0 {
			far = d
			if !toEnd && v+sign*slope*(distance-falling) < 0 {
				return x, ψ
			}
		} else {
			near, falling = d, distance
		}
	}
	return x, ψ
}
