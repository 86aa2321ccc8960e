package bracket

import (
	"math"
	"testing"

	"pgregory.net/rapid"
)

// Each row says which branch of the search it reaches.
func TestNewtonRoots(t *testing.T) {
	tests := []struct {
		name   string
		f      func(x float64) (float64, float64)
		lo, hi float64
		start  float64
		rising bool
		want   float64
		// rel is the error allowed: rounding of f at the root over its slope.
		rel float64
	}{
		{"square root", func(x float64) (float64, float64) { return x*x - 2, 2 * x }, 0, 2, 1, true, math.Sqrt2, 4e-16},
		{"falling", func(x float64) (float64, float64) { return 2 - x*x, -2 * x }, 0, 2, 1, false, math.Sqrt2, 4e-16},
		{"start outside", func(x float64) (float64, float64) { return x*x - 2, 2 * x }, 0, 2, 77, true, math.Sqrt2, 4e-16},
		{"start NaN", func(x float64) (float64, float64) { return x*x - 2, 2 * x }, 0, 2, math.NaN(), true, math.Sqrt2, 4e-16},
		// Newton's method alone runs away from |start| > 1.39.
		{"arctangent", func(x float64) (float64, float64) { return math.Atan(x - 0.5), 1 / (1 + (x-0.5)*(x-0.5)) }, -1e6, 1e6, 1e5, true, 0.5, 4e-16},
		// Newton's steps overshoot by a factor −2 for ever: x → −2x. The root is not
		// simple, so that the error is of the order of the last step, 1e-9.
		{"cube root", func(x float64) (float64, float64) {
			return math.Cbrt(x - 0.25), 1 / (3 * math.Pow(math.Abs(x-0.25), 2./3))
		}, -1, 1, 0.9, true, 0.25, 1e-9},
		// The slope is of no use: zero, wrong in sign, infinite, NaN. Bisection alone,
		// to 4e-16 of the larger end.
		{"slope 0", func(x float64) (float64, float64) { return x - 1./3, 0 }, 0, 1, 0.9, true, 1. / 3, 1e-15},
		{"slope of wrong sign", func(x float64) (float64, float64) { return x - 1./3, -1 }, 0, 1, 0.9, true, 1. / 3, 1e-15},
		{"slope NaN", func(x float64) (float64, float64) { return x - 1./3, math.NaN() }, 0, 1, 0.9, true, 1. / 3, 1e-15},
		{"step function", func(x float64) (float64, float64) {
			if x < 0.7 {
				return -1, 0
			}
			return 1, 0
		}, 0, 1, 0.5, true, 0.7, 1e-15},
		// A triple root: steps shrink by 2/3 only, and 1e-9 of the step leaves 2e-9 of
		// the distance; f itself is below 1e-27 there.
		{"triple root", func(x float64) (float64, float64) { y := x - 0.3; return y * y * y, 3 * y * y }, 0, 1, 0.9, true, 0.3, 1e-8},
		// A root 1e-12 from a pole at the lower end keeps its relative distance.
		{"next to a pole", func(x float64) (float64, float64) { return 1e12 - 1/x, 1 / (x * x) }, 0, 1, 0.5, true, 1e-12, 4e-16},
		// Newton's steps shrink by 12/13 only; bisections in between bring it home. The
		// last step of 1e-9 of the distance is 1/13 of what is left.
		{"root of order 13", func(x float64) (float64, float64) {
			y := x - 0.3
			return math.Copysign(math.Pow(math.Abs(y), 13), y), 13 * math.Pow(math.Abs(y), 12)
		}, 0, 1, 0.9, true, 0.3, 5e-8},
		{"poles at both ends", func(x float64) (float64, float64) {
			return 1/(1-x) - 1/x, 1/((1-x)*(1-x)) + 1/(x*x)
		}, 0, 1, 1e-9, true, 0.5, 4e-16},
		{"many decades", func(x float64) (float64, float64) { return math.Log(x / 1e-50), 1 / x }, 0, 1, 0.5, true, 1e-50, 1e-13},
	}
	for _, tt := range tests {
		t.Run(tt.name, func(t *testing.T) {
			calls := 0
			o := Newton(func(x float64) (float64, float64) {
				calls++
				if !(x > tt.lo && x < tt.hi) {
					t.Fatalf("f called at %g, outside (%g, %g)", x, tt.lo, tt.hi)
				}
				return tt.f(x)
			}, tt.lo, tt.hi, tt.start, tt.rising, 1e-9)
			if !o.Converged || o.AtEnd || math.Abs(o.X-tt.want) > tt.rel*math.Abs(tt.want) {
				t.Errorf("%+v, want converged at %.17g within %g relative", o, tt.want, tt.rel)
			}
			if v, _ := tt.f(o.X); v != o.F {
				t.Errorf("F = %g, but f(X) = %g", o.F, v)
			}
			if !(o.Lo <= o.X && o.X <= o.Hi) && o.Lo != o.Hi {
				t.Errorf("X = %g outside the interval left, %g to %g", o.X, o.Lo, o.Hi)
			}
			if calls > maxIterations+1 || o.Iterations > maxIterations {
				t.Errorf("%d calls in %d steps", calls, o.Iterations)
			}
		})
	}
}

// Near a pole at 1 the scale is the distance to it, not x: else some of these
// searches would stop up to 1e-9 of x short of the root.
func TestNewtonScale(t *testing.T) {
	for d := 1e-2; d > 1e-9; d /= 1.3 {
		o := Newton(func(x float64) (float64, float64) { return 1/d - 1/(x-1), 1 / ((x - 1) * (x - 1)) }, 1, 2, 1.5, true, 1e-9)
		// rounding of x, and that of f over its slope: 2ε·(1/d)·d²
		if !o.Converged || math.Abs(o.X-(1+d)) > 4.5e-16+1e-15*d {
			t.Errorf("root 1 + %g: %+v, off by %g", d, o, o.X-(1+d))
		}
	}
}

// A double root has no sign change: the function is ≥ 0 everywhere. For the two
// directions the search may end at the root (where f vanishes) or at the end that
// the signs point to, never elsewhere.
func TestNewtonDoubleRoot(t *testing.T) {
	f := func(x float64) (float64, float64) { y := x - 0.3; return y * y, 2 * y }
	for _, rising := range []bool{true, false} {
		o := Newton(f, 0.1, 1, 0.9, rising, 1e-9)
		atRoot := o.Converged && math.Abs(o.X-0.3) < 1e-8
		end := map[bool]float64{true: 0.1, false: 1}[rising]
		atEnd := o.AtEnd && !o.Converged && math.Abs(o.X-end) < 1e-15
		if atRoot == atEnd {
			t.Errorf("rising %v: %+v, want the root 0.3 or the end %g", rising, o, end)
		}
	}
}

// Where there is no sign change inside, the end is reported as an end.
func TestNewtonEnd(t *testing.T) {
	tests := []struct {
		name   string
		f      func(x float64) (float64, float64)
		rising bool
		end    float64
	}{
		{"positive, rising", func(x float64) (float64, float64) { return x + 1, 1 }, true, 1},
		{"negative, rising", func(x float64) (float64, float64) { return x - 3, 1 }, true, 2},
		{"positive, falling", func(x float64) (float64, float64) { return 3 - x, -1 }, false, 2},
		{"negative, falling", func(x float64) (float64, float64) { return -1 - x, -1 }, false, 1},
		{"root at upper end", func(x float64) (float64, float64) { return math.Sqrt(2-x) * -1, 0.5 / math.Sqrt(2-x) }, true, 2},
	}
	for _, tt := range tests {
		o := Newton(tt.f, 1, 2, 1.5, tt.rising, 1e-9)
		if !o.AtEnd || o.Converged || math.Abs(o.X-tt.end) > 1e-15 {
			t.Errorf("%s: %+v, want the end %g, not converged", tt.name, o, tt.end)
		}
	}
}

// An end at zero is approached for ever; the search gives up without an answer.
func TestNewtonEndAtZero(t *testing.T) {
	o := Newton(func(x float64) (float64, float64) { return x + 1, 1 }, 0, 2, 1, true, 1e-9)
	if o.Converged || o.AtEnd || o.Iterations != maxIterations {
		t.Errorf("%+v, want no answer after %d steps", o, maxIterations)
	}
}

func TestNewtonExactRoot(t *testing.T) {
	o := Newton(func(x float64) (float64, float64) { return x - 0.5, 1 }, 0, 1, 0.5, true, 1e-9)
	if !o.Converged || o.X != 0.5 || o.F != 0 || o.Lo != 0.5 || o.Hi != 0.5 || o.Iterations != 1 {
		t.Errorf("%+v", o)
	}
}

func TestNewtonRefusesBracket(t *testing.T) {
	inf, nan := math.Inf(1), math.NaN()
	for _, b := range [][2]float64{{1, 1}, {2, 1}, {0, inf}, {-inf, 0}, {-inf, inf}, {nan, 1}, {0, nan}, {-math.MaxFloat64, math.MaxFloat64}} {
		o := Newton(func(x float64) (float64, float64) {
			t.Fatalf("f called for the interval %v", b)
			return 0, 0
		}, b[0], b[1], 0.5, true, 1e-9)
		if o.Converged || o.AtEnd || o.Iterations != 0 {
			t.Errorf("%v: %+v, want a refusal", b, o)
		}
	}
}

// A function that is NaN everywhere, in a part, or only at the last point never
// passes for a root.
func TestNewtonNaN(t *testing.T) {
	nan := math.NaN()
	calls := 0
	tests := []struct {
		name string
		f    func(x float64) (float64, float64)
	}{
		{"everywhere", func(x float64) (float64, float64) { return nan, nan }},
		{"value only", func(x float64) (float64, float64) { return nan, 1 }},
		{"below 0.4", func(x float64) (float64, float64) {
			if x < 0.4 {
				return nan, nan
			}
			return x, 1
		}},
		{"at the last call", func(x float64) (float64, float64) {
			if calls++; calls > 1 {
				return nan, nan
			}
			return 1e-12, 1
		}},
	}
	for _, tt := range tests {
		for _, rising := range []bool{true, false} {
			calls = 0
			o := Newton(tt.f, 0, 1, 0.5, rising, 1e-9)
			if (o.Converged || o.AtEnd) && (math.IsNaN(o.F) || math.IsNaN(o.X)) {
				t.Errorf("%s, rising %v: %+v passes for an answer", tt.name, rising, o)
			}
			if math.IsNaN(o.X) {
				t.Errorf("%s, rising %v: X is NaN", tt.name, rising)
			}
		}
	}
}

// A root of any monotonic power function is found, whatever the start.
func TestNewtonProperty(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		root := rapid.Float64Range(0.001, 0.999).Draw(t, "root")
		power := rapid.SampledFrom([]float64{1, 3, 5, 1. / 3}).Draw(t, "power")
		start := rapid.Float64Range(-1, 2).Draw(t, "start")
		sign := rapid.SampledFrom([]float64{1, -1}).Draw(t, "sign")
		o := Newton(func(x float64) (float64, float64) {
			y := x - root
			return sign * math.Copysign(math.Pow(math.Abs(y), power), y), sign * power * math.Pow(math.Abs(y), power-1)
		}, 0, 1, start, sign > 0, 1e-9)
		// An n-fold root stops at a step of 1e-9 of the distance to the nearer end,
		// (n−1) steps short of the root: 4e-9 for n = 5.
		if !o.Converged || math.Abs(o.X-root) > 4.1e-9 {
			t.Fatalf("%+v, want %g", o, root)
		}
	})
}
