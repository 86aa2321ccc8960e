// Package bracket finds the root of a smooth function of one variable by
// Newton's method inside an interval that is known to hold it.
//
// A step that would leave the interval, or that does not shrink as Newton steps
// near a simple root do, is replaced by a bisection, so the search always ends.
package bracket

import "math"

// maxIterations bounds a search: bisection alone halves a double-precision
// interval to adjacent numbers in fewer than 64 + 11 steps when the ends are of
// one magnitude, and Newton steps interleave with it.
const maxIterations = 200

// Outcome tells how a search ended.
type Outcome struct {
	X          float64 // the best point
	F          float64 // the function there
	Lo, Hi     float64 // the interval left
	Iterations int
	Converged  bool // the last Newton step, or the interval, is below the tolerance
	AtEnd      bool // the search was driven against an end of the interval: no sign change inside
}

// Newton looks for the zero of f between lo and hi, both finite, starting at x
// (or at the mean, if x is not between them). f returns the value and the
// derivative. Rising tells the sign change: a rising f is negative left of the
// root. The function is never evaluated at lo or hi themselves, which may be poles.
//
// The search stops when a Newton step is below tol·scale(x), scale being the
// distance to the nearer end or |x|, whichever is smaller: variables that crowd
// against an end keep their relative accuracy. For a simple root the step after
// a Newton step of relative size ε is of size ε², so tol = 1e-9 leaves an error
// of rounding only.
//
// An interval that is empty or not finite is refused before the first step, and
// a value NaN ends the search; neither outcome is Converged or AtEnd. Nor is that
// of a search driven against an end at zero, which no relative width reaches.
func Newton(f func(x float64) (value, slope float64), lo, hi, x float64, rising bool, tol float64) Outcome {
	first, last := lo, hi
	width := hi - lo
	o := Outcome{X: lo, Lo: lo, Hi: hi}
	if !(width > 0 && width <= math.MaxFloat64) {
		return o
	}
	if !(x > lo && x < hi) {
		x = middle(lo, hi)
	}
	for o.Iterations = 1; o.Iterations <= maxIterations; o.Iterations++ {
		v, d := f(x)
		o.X, o.F = x, v
		if math.IsNaN(v) {
			return o
		}
		if v == 0 {
			o.Lo, o.Hi, o.Converged = x, x, true
			return o
		}
		if (v > 0) == rising {
			hi = x
		} else {
			lo = x
		}
		o.Lo, o.Hi = lo, hi
		next := x - v/d
		newton := next > lo && next < hi // false for NaN
		if newton && o.Iterations%8 == 0 && hi-lo > 0.5*width {
			newton = false // eight steps that did not halve the interval
		}
		if o.Iterations%8 == 0 {
			width = hi - lo
		}
		if !newton {
			next = middle(lo, hi)
		}
		step := math.Abs(next - x)
		scale := math.Min(math.Abs(next), math.Min(next-first, last-next))
		if newton && step <= tol*scale {
			v, _ = f(next)
			o.X, o.F, o.Converged = next, v, !math.IsNaN(v)
			return o
		}
		if next == x || hi-lo <= 4e-16*math.Max(math.Abs(lo), math.Abs(hi)) {
			o.AtEnd = lo == first || hi == last
			o.Converged = !o.AtEnd
			return o
		}
		x = next
	}
	o.Iterations = maxIterations
	return o
}

// middle returns the mean of lo and hi.
func middle(lo, hi float64) float64 { return lo + 0.5*(hi-lo) }
