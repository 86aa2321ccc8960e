package fit

import (
	"math"
	"strings"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// fine is blurred by brute force: a trapezoidal sum with steps of 1/64 of the
// narrower of the two laws over all that matters. ln g, and its derivatives by
// the moments of the residual (x−u)/ρ² instead of those of e^u.
func fine(x, ρ float64, intact bool) (ln, first, second float64) {
	a := 1.0
	if intact {
		a = 0
	}
	f := func(u float64) float64 { z := (x - u) / ρ; return a*u - math.Exp(u) - 0.5*z*z }
	// the mode by golden section
	lo, hi := x-12*ρ-40, math.Min(math.Max(x+12*ρ+ρ*ρ, 8), 600)
	for range 300 {
		l, r := lo+0.382*(hi-lo), lo+0.618*(hi-lo)
		if f(l) > f(r) {
			hi = r
		} else {
			lo = l
		}
	}
	u0 := 0.5 * (lo + hi)
	top := f(u0)
	h := math.Min(1/math.Sqrt(math.Exp(u0)+1/(ρ*ρ)), 1) / 20
	var s0, s1, s2 float64
	for _, sign := range []float64{1, -1} {
		for k := 0.0; ; k++ {
			if k == 0 && sign < 0 {
				continue
			}
			u := u0 + sign*k*h
			l := f(u) - top
			if l < -45 {
				break
			}
			w, y := math.Exp(l), (u-x)/ρ
			s0 += w
			s1 += w * y
			s2 += w * y * y
		}
	}
	m := s1 / s0
	return top + math.Log(s0*h/(ρ*math.Sqrt(2*math.Pi))), m / ρ, (s2/s0 - m*m - 1) / (ρ * ρ)
}

// TestBlurredAccuracy measures the quadrature against one with far finer steps.
func TestBlurredAccuracy(t *testing.T) {
	var worst, worst1, worst2 float64
	for _, ρ := range []float64{1e-3, 0.03, 0.3, 1, 2, 3.9, 4.1, 8, 30, 300} {
		for _, z := range []float64{-8, -4, -2, -1, -0.3, 0, 0.4, 1, 2, 3, 4, 6} {
			x := z * math.Hypot(1, ρ)
			for _, intact := range []bool{false, true} {
				ln, a, b := blurred(x, ρ, intact)
				l0, a0, b0 := fine(x, ρ, intact)
				e := math.Abs(ln - l0)
				// Derivatives of the comparison lose digits as 1/ρ and 1/ρ².
				e1 := math.Abs(a-a0) / (1 + math.Abs(a0))
				e2 := math.Abs(b-b0) / (1 + math.Abs(b0))
				worst, worst1 = math.Max(worst, e), math.Max(worst1, e1)
				worst2 = math.Max(worst2, e2)
				if e > 1e-8 || e1 > 1e-7 || e2 > 1e-6 {
					t.Errorf("x %g ρ %g intact %v: %.12g %.9g %.9g, want %.12g %.9g %.9g", x, ρ, intact, ln, a, b, l0, a0, b0)
				}
			}
		}
	}
	t.Logf("largest errors: ln g %.1e, first derivative %.1e, second %.1e", worst, worst1, worst2)
}

func BenchmarkBlurred(b *testing.B) {
	for i := 0; i < b.N; i++ {
		blurred(-1.5, 4, false)
	}
}

// TestWithoutEffect: a location that moves no reading is named, and only then. No
// data set that passes the checks before has been found to give such a one.
func TestWithoutEffect(t *testing.T) {
	l := &layout{theta: []Free{{Name: Threshold, Role: RoleValue, Upper: 35}, {Name: Slope, Role: RoleValue, Upper: 3}}}
	lik := &likelihood{system: &system{obs: []Observation{}}}
	h := mat.NewSymDense(2, []float64{4, 0, 0, 0})
	if d := identify(h, []int{0, 1}, l, lik); len(d.Warnings) != 1 || d.Warnings[0] != "slope has no effect on any reading" || d.cov != nil {
		t.Errorf("said: %q", d.Warnings)
	}
	h.SetSym(1, 1, 9)
	if d := identify(h, []int{0, 1}, l, lik); strings.Contains(strings.Join(d.Warnings, ""), "no effect") || d.cov == nil || d.Condition != 1 {
		t.Errorf("said without cause: %q, condition %g", d.Warnings, d.Condition)
	}
}
