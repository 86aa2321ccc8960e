package leastsq

import (
	"math"
	"strings"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// A valley with a sharp bottom, 10|y − x²| + |1 − x|: the damped search rests
// far from the minimum (1, 1), where the value is 2.03; the simplex goes on.
func TestFallbackWins(t *testing.T) {
	valley := Objective{Params: []Param{{Name: "x", Start: -1.2}, {Name: "y", Start: 1}},
		Eval: func(θ, grad []float64, curv *mat.SymDense) (float64, error) {
			if grad != nil {
				s := math.Copysign(10, θ[1]-θ[0]*θ[0])
				grad[0], grad[1] = -2*θ[0]*s-math.Copysign(1, 1-θ[0]), s
			}
			if curv != nil {
				curv.SetSym(0, 0, 1)
				curv.SetSym(1, 1, 1)
			}
			return 10*math.Abs(θ[1]-θ[0]*θ[0]) + math.Abs(1-θ[0]), nil
		}}
	alone, err := Minimize(valley, Settings{Local: true})
	if err != nil || alone.Value < 1 || alone.Converged {
		t.Fatalf("%+v, %v: the valley is too easy", alone, err)
	}
	r, err := Minimize(valley, Settings{})
	if err != nil || r.Value > 1e-6 || !strings.HasPrefix(r.Method, "Nelder–Mead") {
		t.Errorf("%+v, %v", r, err)
	}
	if r.Converged { // no gradient vanishes at a kink
		t.Error(r.Reason)
	}
}

// A gradient of the wrong sign lets no step down: the start comes back, unusable.
func TestUnusable(t *testing.T) {
	r, err := Minimize(Objective{Params: []Param{{Name: "x", Start: 3}}, Eval: func(θ, grad []float64, curv *mat.SymDense) (float64, error) {
		if grad != nil {
			grad[0] = -θ[0]
		}
		if curv != nil {
			curv.SetSym(0, 0, 1)
		}
		return θ[0] * θ[0] / 2, nil
	}}, Settings{Local: true})
	if err != nil || r.Usable || r.Converged || r.X[0] != 3 || len(r.Warnings) != 1 || r.Warnings[0] != "x has not moved from its start" {
		t.Errorf("%+v, %v", r, err)
	}
}

// Beside 1e8 the value is rounded to 1e-8, as much as 1e-4 in θ; the gradient
// knows more. Measured: 1e-13 from the minimum of eᶿ − 2θ at ln 2.
func TestGradientBelowRoundingOfValue(t *testing.T) {
	r, err := Minimize(Objective{Params: []Param{{Name: "θ", Start: 3}}, Eval: func(θ, grad []float64, curv *mat.SymDense) (float64, error) {
		if grad != nil {
			grad[0] = math.Exp(θ[0]) - 2
		}
		if curv != nil {
			curv.SetSym(0, 0, math.Exp(θ[0]))
		}
		return 1e8 + math.Exp(θ[0]) - 2*θ[0], nil
	}}, Settings{})
	if err != nil || !r.Converged || math.Abs(r.X[0]-math.Ln2) > 1e-9 {
		t.Errorf("%+v, %v", r, err)
	}
}

func TestFold(t *testing.T) {
	inf := math.Inf(1)
	for _, tt := range []struct{ lower, upper, t, want, sign float64 }{
		{0.5, 2.5, 1, 1, 1},
		{0.5, 2.5, 3, 2, -1},       // off the upper bound
		{0.5, 2.5, 0.25, 0.75, -1}, // off the lower
		{0.5, 2.5, -2, 2, 1},       // off the lower, then the upper
		{0.5, 2.5, 5, 1, 1},        // off the upper, then the lower
		{0.5, inf, 0, 1, -1},
		{-inf, 2.5, 4, 1, -1},
		{-inf, inf, 4, 4, 1},
		{2, 2, 7, 2, 0},
	} {
		b, err := newBox([]Param{{Start: math.Max(math.Min(2, tt.upper), tt.lower), Lower: tt.lower, Upper: tt.upper}})
		if err != nil {
			t.Fatal(err)
		}
		if v, sign := b.fold(0, tt.t); v != tt.want || sign != tt.sign {
			t.Errorf("fold of %g into %g and %g: %g, %g; want %g, %g", tt.t, tt.lower, tt.upper, v, sign, tt.want, tt.sign)
		}
	}
}

// Starts stay between the bounds, differ, and fill what they are to fill: of 64
// points each half of the range (of the decades, where it is infinite) gets 32 ± 4.
func TestSpread(t *testing.T) {
	inf := math.Inf(1)
	params := []Param{
		{Start: 1, Lower: 0, Upper: 4}, {Start: 3, Lower: 1, Upper: inf},
		{Start: -3, Lower: -inf, Upper: -1}, {Start: -5}, {Start: 0}, {Start: 1, Lower: 1, Upper: inf}, {Start: 7, Lower: 7, Upper: 7},
	}
	middle := []float64{2, 3, -3, -5, 0, 2, 7} // 1 + scale for the start at its bound
	b, err := newBox(params)
	if err != nil {
		t.Fatal(err)
	}
	below := make([]int, len(params))
	for _, x := range b.spread(64, 1) {
		for i, v := range x {
			if v < b.lower[i] || v > b.upper[i] {
				t.Errorf("start %g outside %g and %g", v, b.lower[i], b.upper[i])
			}
			if v < middle[i] {
				below[i]++
			}
		}
	}
	for i, n := range below[:6] {
		if n < 28 || n > 36 {
			t.Errorf("parameter %d: %d of 64 below the middle", i, n)
		}
	}
	if below[6] != 0 || len(b.spread(0, 1)) != 0 {
		t.Error(below)
	}
}
