package leastsq

import (
	"errors"
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// For a linear model of known σ the profile is the normal interval: estimate ±
// 1.959963984540054 standard errors at 95 %.
func TestProfileOfLinearModel(t *testing.T) {
	const σ = 0.3
	x := []float64{1, 2, 3, 5, 8}
	p := Problem{Params: []Param{{Name: "a"}, {Name: "b"}}, Size: len(x), Residuals: func(dst, θ []float64) error {
		for i, v := range x {
			dst[i] = θ[0] + θ[1]*v - math.Sqrt(v)
		}
		return nil
	}}
	r, err := Solve(p, Settings{})
	if err != nil || !r.Converged {
		t.Fatal(r, err)
	}
	for i := range r.X {
		iv, err := Profile(p.Objective(σ), r, i, 0.95, Settings{})
		if err != nil || len(iv.Warnings) > 0 {
			t.Fatal(iv, err)
		}
		// Root tolerance 1e-7 standard errors, ten times for the error of the minima.
		u := σ * math.Sqrt(r.UnscaledCovariance().At(i, i))
		if math.Abs(iv.Lower-(r.X[i]-1.959963984540054*u)) > 1e-6*u || math.Abs(iv.Upper-(r.X[i]+1.959963984540054*u)) > 1e-6*u ||
			iv.LowerEnd != Crossed || iv.UpperEnd != Crossed {
			t.Errorf("%+v, want %g ± %g", iv, r.X[i], 1.959963984540054*u)
		}
	}
}

// saturation is 1 − exp(−k x) observed near its plateau: large k cannot be refuted.
func saturation(upper float64) Objective {
	x := []float64{1, 2, 3}
	return Problem{Params: []Param{{Name: "k", Start: 2, Lower: 0.01, Upper: upper}}, Size: 3, Residuals: func(dst, θ []float64) error {
		for i, v := range x {
			dst[i] = 1 - math.Exp(-θ[0]*v) - 0.98
		}
		return nil
	}}.Objective(0.05)
}

func TestProfileEnds(t *testing.T) {
	for _, tt := range []struct {
		upper, end float64
		kind       End
	}{{math.Inf(1), math.Inf(1), Unbounded}, {50, 50, AtLimit}} {
		o := saturation(tt.upper)
		r, err := Minimize(o, Settings{})
		if err != nil || !r.Converged {
			t.Fatal(r, err)
		}
		iv, err := Profile(o, r, 0, 0.95, Settings{})
		if err != nil || iv.Upper != tt.end || iv.UpperEnd != tt.kind || iv.LowerEnd != Crossed {
			t.Errorf("%+v, %v", iv, err)
		}
		// By meaning: at the lower end the value has risen by χ²/2 = 1.9207.
		v, _ := o.Eval([]float64{iv.Lower}, nil, nil)
		if math.Abs(v-r.Value-3.841458820694124/2) > 1e-6 {
			t.Errorf("rise %g at %g", v-r.Value, iv.Lower)
		}
	}
}

// An objective that cannot be evaluated beyond 1.5 before the crossing at 1.96.
func TestProfileAtTheEdge(t *testing.T) {
	o := Objective{Params: []Param{{Name: "x", Start: 0.5}}, Eval: func(θ, grad []float64, curv *mat.SymDense) (float64, error) {
		if θ[0] > 1.5 {
			return 0, errOutside
		}
		if grad != nil {
			grad[0] = θ[0]
		}
		if curv != nil {
			curv.SetSym(0, 0, 1)
		}
		return θ[0] * θ[0] / 2, nil
	}}
	r, err := Minimize(o, Settings{})
	if err != nil || !r.Converged {
		t.Fatal(r, err)
	}
	iv, err := Profile(o, r, 0, 0.95, Settings{})
	if err != nil || iv.UpperEnd != Unevaluated || math.Abs(iv.Upper-1.5) > 1e-9 || math.Abs(iv.Lower+1.959963984540054) > 1e-6 {
		t.Errorf("%+v, %v", iv, err)
	}
}

func TestProfileFindsALowerMinimum(t *testing.T) {
	o := saturation(50)
	_, err := Profile(o, &Result{X: []float64{1}}, 0, 0.95, Settings{})
	var lower *LowerMinimumError
	if !errors.As(err, &lower) || !(lower.Value < lower.Start) {
		t.Errorf("%v", err)
	}
	var in *InputError
	for _, f := range []func() error{
		func() error { _, err := Profile(o, &Result{X: []float64{99}}, 0, 0.95, Settings{}); return err },
		func() error { _, err := Profile(o, &Result{X: []float64{1, 2}}, 0, 0.95, Settings{}); return err },
		func() error { _, err := Profile(o, &Result{X: []float64{1}}, 1, 0.95, Settings{}); return err },
		func() error { _, err := Profile(o, &Result{X: []float64{1}}, 0, 1, Settings{}); return err },
		func() error { _, err := Profile(o, nil, 0, 0.95, Settings{}); return err },
	} {
		if err := f(); !errors.As(err, &in) {
			t.Errorf("%v", err)
		}
	}
}

func TestCheckGradient(t *testing.T) {
	o := saturation(50)
	if d, err := CheckGradient(o, []float64{1.3}); err != nil || d.Relative > 1e-8 {
		t.Errorf("%+v, %v", d, err)
	}
	inner := o.Eval
	o.Eval = func(θ, grad []float64, curv *mat.SymDense) (float64, error) {
		v, err := inner(θ, grad, curv)
		if grad != nil {
			grad[0] *= 1.001
		}
		return v, err
	}
	if d, err := CheckGradient(o, []float64{1.3}); err != nil || math.Abs(d.Relative-1e-3) > 1e-5 || d.Name != "k" {
		t.Errorf("%+v, %v", d, err)
	}
}

// A narrow valley y = −0.99x with nothing but failures beside it is followed to its ends,
// ±1.959963984540054 for a normal law of unit variances; where the valley itself is cut
// off, so is the interval.
func TestProfileFollowsValley(t *testing.T) {
	const ρ = -0.99
	for _, tt := range []struct {
		cut, end float64
		kind     End
	}{{math.Inf(1), 1.959963984540054, Crossed}, {1.2, 1.2, Unevaluated}} {
		o := Objective{Params: []Param{{Name: "x"}, {Name: "y"}}, Eval: func(θ, grad []float64, curv *mat.SymDense) (float64, error) {
			x, y := θ[0], θ[1]
			if math.Abs(x+y) > 0.4 || x > tt.cut {
				return 0, errors.New("no value here")
			}
			w := 1 / (1 - ρ*ρ)
			if grad != nil {
				grad[0], grad[1] = w*(x-ρ*y), w*(y-ρ*x)
			}
			if curv != nil {
				curv.SetSym(0, 0, w)
				curv.SetSym(1, 1, w)
				curv.SetSym(0, 1, -ρ*w)
			}
			return 0.5 * w * (x*x - 2*ρ*x*y + y*y), nil
		}}
		iv, err := Profile(o, &Result{X: []float64{0, 0}, StdErr: []float64{1, 1}}, 0, 0.95, Settings{})
		if err != nil || iv.LowerEnd != Crossed || iv.UpperEnd != tt.kind || math.Abs(iv.Lower+1.959963984540054) > 1e-6 || math.Abs(iv.Upper-tt.end) > 1e-6 {
			t.Errorf("%+v, %v; want −1.95996 to %g", iv, err, tt.end)
		}
	}
}
