package leastsq

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// TestTiedParameters: two parameters tied to each other within 1e-6, whose common value is
// known to 0.005, are found although the objective is rounded to 1e-8, which hides all steps
// that damping leaves of the start at a hundredth of a standard error.
func TestTiedParameters(t *testing.T) {
	const tie, u, grain = 1e-6, 0.005, 1e-8
	o := Objective{Params: []Param{{Name: "x", Start: 1 + 0.01*u, Lower: 0.5, Upper: 1.5}, {Name: "y", Start: 1 + 0.01*u, Lower: 0.5, Upper: 1.5}}, Size: 9,
		Eval: func(θ, grad []float64, curv *mat.SymDense) (float64, error) {
			d, e := (θ[0]-θ[1])/tie, (θ[0]-1)/u
			if grad != nil {
				grad[0], grad[1] = d/tie+e/u, -d/tie
			}
			if curv != nil {
				curv.SetSym(0, 0, 1/(tie*tie)+1/(u*u))
				curv.SetSym(0, 1, -1/(tie*tie))
				curv.SetSym(1, 1, 1/(tie*tie))
			}
			return math.Ceil((100+0.5*d*d+0.5*e*e)/grain) * grain, nil
		}}
	r, err := Minimize(o, Settings{Local: true, Tolerance: 1e-6})
	if err != nil {
		t.Fatal(err)
	}
	if !r.Converged || math.Abs(r.X[0]-1) > 1e-3*u {
		t.Errorf("%.9g, want 1 within %g: %s", r.X[0], 1e-3*u, r.Reason)
	}
}
