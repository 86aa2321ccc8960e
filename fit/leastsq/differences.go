package leastsq

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// centralStep is the relative step of central differences: ∛ε balances the
// truncation error h² against the rounding ε/h of the difference quotient.
var centralStep = math.Cbrt(0x1p-52)

// differences fills Jacobians from the caller's function or, where there is
// none, by second-order differences that stay between the bounds.
type differences struct {
	p           Problem
	b           *box
	x           []float64
	lo, hi, mid []float64
	evals       int
}

func newDifferences(p Problem, b *box) *differences {
	return &differences{p: p, b: b, x: make([]float64, len(p.Params)), lo: make([]float64, p.Size), hi: make([]float64, p.Size), mid: make([]float64, p.Size)}
}

func (d *differences) jacobian(dst *mat.Dense, theta []float64) error {
	if d.p.Jacobian != nil {
		dst.Zero()
		d.evals++
		if err := d.p.Jacobian(dst, theta); err != nil {
			return err
		}
		if !allFinite(dst.RawMatrix().Data) {
			return &InputError{"jacobian", "an entry is not finite"}
		}
		return nil
	}
	return d.numerical(dst, theta, centralStep)
}

// numerical fills dst by differences with the given relative step.
func (d *differences) numerical(dst *mat.Dense, theta []float64, step float64) error {
	copy(d.x, theta)
	for j := range theta {
		if d.b.lower[j] == d.b.upper[j] { // held: no neighbour may be evaluated
			for i := range d.p.Size {
				dst.Set(i, j, 0)
			}
			continue
		}
		if err := d.column(dst, j, theta, step); err != nil {
			return err
		}
		d.x[j] = theta[j]
	}
	return nil
}

// column is (r(θ+h)−r(θ−h))/2h or, where a bound or an error is in the way of
// one side, the one-sided formula (−3r(θ)+4r(θ+h)−r(θ+2h))/2h.
func (d *differences) column(dst *mat.Dense, j int, theta []float64, step float64) error {
	b := d.b
	h := step * b.difference(j, theta[j])
	below, above := theta[j]-b.lower[j], b.upper[j]-theta[j]
	if below >= h && above >= h {
		if d.at(d.hi, j, theta[j]+h) == nil && d.at(d.lo, j, theta[j]-h) == nil {
			w := (theta[j] + h) - (theta[j] - h)
			for i := range d.hi {
				dst.Set(i, j, (d.hi[i]-d.lo[i])/w)
			}
			return nil
		}
	}
	signs := [2]float64{1, -1}
	if below > above {
		signs = [2]float64{-1, 1}
	}
	var err error
	for _, s := range signs {
		room := above
		if s < 0 {
			room = below
		}
		k := math.Min(h, room/2) * s
		if k == 0 {
			continue
		}
		if err = d.at(d.mid, j, theta[j]); err != nil {
			return err
		}
		if err = d.at(d.lo, j, theta[j]+k); err != nil {
			continue
		}
		if err = d.at(d.hi, j, theta[j]+2*k); err != nil {
			continue
		}
		k = ((theta[j] + 2*k) - theta[j]) / 2
		for i := range d.hi {
			dst.Set(i, j, (4*d.lo[i]-3*d.mid[i]-d.hi[i])/(2*k))
		}
		return nil
	}
	return err
}

func (d *differences) at(dst []float64, j int, v float64) error {
	d.x[j] = v
	d.evals++
	if err := d.p.Residuals(dst, d.x); err != nil {
		return err
	}
	if !allFinite(dst) {
		return &InputError{"residuals", "an entry is not finite"}
	}
	return nil
}

// difference is the length to which the relative difference step applies: |x|,
// kept off zero by a tenth of the scale, so that a parameter that happens to be
// near zero is not differenced over a rounding error.
func (b *box) difference(i int, x float64) float64 {
	return math.Max(math.Abs(x), 0.1*b.scale[i])
}
