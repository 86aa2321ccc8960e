package fit

import (
	"math"
	"strings"
	"testing"

	"gonum.org/v1/gonum/diff/fd"
	"gonum.org/v1/gonum/mat"

	"limsup/data/fluid"
	"limsup/data/measure"
)

// TestNoiseSlopes compares the slopes of −ln of every density with central
// differences, at residuals from the middle to the far tails on both sides.
func TestNoiseSlopes(t *testing.T) {
	for _, n := range []Noise{{Kind: Gaussian}, {Kind: Student, Degrees: 1}, {Kind: Student, Degrees: 4}, {Kind: Student, Degrees: 30}} {
		l := n.law()
		for _, intact := range []bool{false, true} {
			for _, v := range []float64{0.04, 1, 9} {
				for _, z := range []float64{-6, -2, -0.3, 0, 0.7, 3, 8} {
					r := z * math.Sqrt(v)
					d := l.of(r, v, intact)
					// Steps of h = 1e-3 standard deviations: smaller ones meet the rounding of
					// Student's distribution function near its middle, ε√ν/h² of the slope. The error is
					// h²/6 of the third derivative, below 1 for these densities.
					const h = 1e-3
					s := math.Sqrt(v)
					dr := fd.Derivative(func(x float64) float64 { return l.of(r+x*s, v, intact).nll }, 0, &fd.Settings{Formula: fd.Central, Step: h}) / s
					dv := fd.Derivative(func(x float64) float64 { return l.of(r, v*math.Exp(x), intact).nll }, 0, &fd.Settings{Formula: fd.Central, Step: h})
					scale := h * h * (1 + z*z)
					if !(math.Abs(d.dr-dr)*s <= scale) {
						t.Errorf("%s %g, intact %v, v = %g, z = %g: slope in r %.9g, differences %.9g", n.Kind, n.Degrees, intact, v, z, d.dr, dr)
					}
					if !(math.Abs(d.dv*v-dv) <= scale) {
						t.Errorf("%s %g, intact %v, v = %g, z = %g: slope in v %.9g, differences %.9g", n.Kind, n.Degrees, intact, v, z, d.dv, dv/v)
					}
					slope := func(x float64) float64 { return l.of(r+x*s, v, intact).dr }
					hrr := fd.Derivative(slope, 0, &fd.Settings{Formula: fd.Central, Step: h}) / s
					if !(math.Abs(d.hrr-hrr)*v <= 4*scale) { // the third derivative of the slope is at most 24
						t.Errorf("%s %g, intact %v, v = %g, z = %g: curvature in r %.9g, differences %.9g", n.Kind, n.Degrees, intact, v, z, d.hrr, hrr)
					}
					if !(d.irr >= 0 && d.ivv >= 0) {
						t.Errorf("%s, intact %v, z = %g: information %g, %g", n.Kind, intact, z, d.irr, d.ivv)
					}
				}
			}
		}
	}
}

// likelihoodOf is the objective of a plan on one processor.
func likelihoodOf(t testing.TB, p Plan, d *Data) *likelihood {
	t.Helper()
	p, err := p.Complete()
	if err != nil {
		t.Fatal(err)
	}
	lay, err := newLayout(&p, d.Observations)
	if err != nil {
		t.Fatal(err)
	}
	lik, err := newLikelihood(&p, d.Observations, lay, 1)
	if err != nil {
		t.Fatal(err)
	}
	return lik
}

// TestNoiseNormalised integrates the densities of rows that boiled, and the information
// that they carry: E[dr²] = irr and E[dv²] = ivv.
func TestNoiseNormalised(t *testing.T) {
	for _, n := range []Noise{{Kind: Gaussian}, {Kind: Student, Degrees: 3}, {Kind: Student, Degrees: 30}} {
		l := n.law()
		const v = 2.0
		var sum, irr, ivv float64
		// r = √v·sinh(u) reaches far into the tails; the trapezoidal rule converges fast
		const h, reach = 0.01, 14
		for u := -reach * 1.0; u <= reach; u += h {
			r := math.Sqrt(v) * math.Sinh(u)
			d := l.of(r, v, false)
			w := math.Exp(-d.nll) * math.Sqrt(v) * math.Cosh(u) * h
			sum += w
			irr += w * d.dr * d.dr
			ivv += w * d.dv * d.dv
		}
		d := l.of(0, v, false)
		// measured: below 1e-10
		for _, c := range []struct {
			what      string
			got, want float64
		}{{"integral", sum, 1}, {"information about the limit", irr, d.irr}, {"information about the variance", ivv, d.ivv}} {
			if !(math.Abs(c.got/c.want-1) <= 1e-8) {
				t.Errorf("%s %g: %s %.12g, want %.12g", n.Kind, n.Degrees, c.what, c.got, c.want)
			}
		}
	}
}

const likelihoodData = `fluid,temperature/K,pressure/kPa,u_temperature/K,u_pressure/kPa,method,diameter/mm,heating_rate/(K/s),outcome
n-pentane,419.6,101.325,0.4,1,droplet,1,2,boiled
n-pentane,421.9,500,0.4,2,droplet,1,2,boiled
n-pentane,422.5,101.325,0.4,,pulse,,,boiled
n-hexane,456.2,101.325,0.5,,droplet,1,2,boiled
n-hexane,453.1,101.325,0.5,,droplet,1,2,intact
n-hexane,459.9,300,0.5,,pulse,,,boiled
n-heptane,486.6,101.325,0.5,,droplet,1,2,boiled
n-heptane,488.6,200,0.5,,pulse,,,boiled
`

// TestLikelihoodGradient compares the gradient of −ln L with differences: offsets,
// pooled groups, priors, anchors, censored rows, all kinds of noise.
func TestLikelihoodGradient(t *testing.T) {
	lib, err := fluid.Builtin()
	if err != nil {
		t.Fatal(err)
	}
	set, err := measure.ReadCSV(strings.NewReader(likelihoodData), "d.csv", measure.Options{})
	if err != nil {
		t.Fatal(err)
	}
	for _, noise := range []Noise{{Kind: Gaussian}, {Kind: Student, Degrees: 4}, {Kind: Survival}} {
		p := Plan{Noise: noise,
			Terms: []Term{{Name: Threshold}, {Name: Prefactor}, {Name: Attraction}, {Name: Slope, By: ByFluid, Pooled: true}, {Name: Covolume},
				{Name: SurfaceTension}, {Name: Tolman}, {Name: Offset, By: ByMethod}},
			Priors:  []Prior{{Name: SurfaceTension, Mean: 1.02, Spread: 0.03}},
			Anchors: []Anchor{{Property: "vapour-pressure", Relative: 0.01}, {Property: "liquid-density", Relative: 0.05}}}
		d, err := Prepare(set, lib, p)
		if err != nil || len(d.Observations) != 8 {
			t.Fatalf("%d observations: %v", len(d.Observations), err)
		}
		lik := likelihoodOf(t, p, d)
		lay := lik.lay
		theta, psi := starts(lay.theta), starts(lay.psi)
		for i := range theta {
			theta[i] += 0.003 * float64(i+1)
		}
		if err := lik.evaluate(theta); err != nil {
			t.Fatal(err)
		}
		lik.hold()
		variance := lik.variances(psi, nil)
		at := func(x []float64) float64 {
			v, err := lik.terms(x, psi, variance, nil, nil, observed)
			if err != nil {
				t.Fatal(err)
			}
			return v
		}
		grad := make([]float64, len(theta))
		curv := mat.NewSymDense(len(theta), nil)
		value, err := lik.terms(theta, psi, variance, grad, curv, expected)
		if err != nil {
			t.Fatal(err)
		}
		want := fd.Gradient(nil, at, theta, &fd.Settings{Formula: fd.Central, Step: 2e-6})
		for i := range grad {
			// The limits are found to 1e-11 of T, 5e-9 K, which residuals of some kelvin over
			// 0.4 K turn into 1e-7 of ln L, over the step; and the curvature times the step.
			tol := 0.05 + 2e-6*(math.Abs(grad[i])+math.Abs(value)) + 1e-9*curv.At(i, i)
			if !(math.Abs(grad[i]-want[i]) <= tol) {
				t.Errorf("%s: ∂/∂%s = %.8g, differences %.8g ± %.2g", noise.Kind, lay.theta[i].Label(), grad[i], want[i], tol)
			}
			if !(curv.At(i, i) > 0) {
				t.Errorf("%s: no information about %s", noise.Kind, lay.theta[i].Label())
			}
		}
	}
}
