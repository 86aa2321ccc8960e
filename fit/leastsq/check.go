package leastsq

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
)

// Discrepancy is the worst disagreement between derivatives given and differences.
type Discrepancy struct {
	Row              int // residual, 0 for a gradient
	Parameter        int
	Name             string
	Given, Numerical float64
	// Relative is |Given − Numerical| over the largest of |Given|, |Numerical| and
	// the root mean square of the column: differences cannot resolve an entry that
	// is far smaller than its column. Correct derivatives of a smooth function
	// evaluated to full precision stay below about 1e-8.
	Relative float64
}

// Differences with the relative steps firstCheckStep/4^k are extrapolated in
// pairs, E_k = (16 D_{k+1} − D_k)/15; of each entry the E_k that differs least from
// E_{k−1} counts (after C. J. F. Ridders, Advances in Engineering Software 4 (1982)
// 75; from memory): large steps are spoilt by curvature, small ones by rounding.
const (
	firstCheckStep = 1e-2
	checkSteps     = 8
)

// CheckDerivatives compares p.Jacobian with extrapolated differences of
// p.Residuals at theta. Errors: *InputError, or what the functions returned.
func CheckDerivatives(p Problem, theta []float64) (Discrepancy, error) {
	if p.Residuals == nil || p.Jacobian == nil {
		return Discrepancy{}, &InputError{"problem", "Residuals or Jacobian is missing"}
	}
	n := len(p.Params)
	if p.Size < 1 {
		return Discrepancy{}, &InputError{"problem", fmt.Sprintf("the number of residuals, %d, is below 1", p.Size)}
	}
	b, err := checkPoint(p.Params, theta)
	if err != nil {
		return Discrepancy{}, err
	}
	given := mat.NewDense(p.Size, n, nil)
	d := newDifferences(p, b)
	if err := d.jacobian(given, theta); err != nil {
		return Discrepancy{}, err
	}
	numerical, err := d.extrapolated(theta)
	if err != nil {
		return Discrepancy{}, err
	}
	worst := Discrepancy{Relative: -1}
	for j := range n {
		if b.lower[j] == b.upper[j] {
			continue
		}
		rms := 0.0
		for i := range p.Size {
			rms = math.Hypot(rms, given.At(i, j)/math.Sqrt(float64(p.Size)))
		}
		for i := range p.Size {
			g, v := given.At(i, j), numerical.At(i, j)
			rel := 0.0
			if top := math.Max(rms, math.Max(math.Abs(g), math.Abs(v))); top > 0 {
				rel = math.Abs(g-v) / top
			}
			if rel > worst.Relative {
				worst = Discrepancy{i, j, b.names[j], g, v, rel}
			}
		}
	}
	worst.Relative = math.Max(0, worst.Relative)
	return worst, nil
}

func (d *differences) extrapolated(theta []float64) (*mat.Dense, error) {
	n := len(theta)
	best, change := mat.NewDense(d.p.Size, n, nil), mat.NewDense(d.p.Size, n, nil)
	coarse, fine, last := mat.NewDense(d.p.Size, n, nil), mat.NewDense(d.p.Size, n, nil), mat.NewDense(d.p.Size, n, nil)
	step := firstCheckStep
	for k := range checkSteps {
		coarse, fine = fine, coarse
		if err := d.numerical(fine, theta, step); err != nil {
			return nil, err
		}
		step /= 4
		if k == 0 {
			continue
		}
		for i := range d.p.Size {
			for j := range n {
				e := (16*fine.At(i, j) - coarse.At(i, j)) / 15
				c := math.Abs(e - last.At(i, j))
				if k == 1 {
					c = math.MaxFloat64
				}
				if k == 1 || c < change.At(i, j) {
					best.Set(i, j, e)
					change.Set(i, j, c)
				}
				last.Set(i, j, e)
			}
		}
	}
	return best, nil
}

// CheckGradient does the same for the gradient of an objective. The curvature is
// not compared: the expected information is not a derivative of the value.
func CheckGradient(o Objective, theta []float64) (Discrepancy, error) {
	if o.Eval == nil {
		return Discrepancy{}, &InputError{"problem", "Eval is missing"}
	}
	grad := make([]float64, len(o.Params))
	return CheckDerivatives(Problem{Params: o.Params, Size: 1,
		Residuals: func(dst, theta []float64) (err error) {
			dst[0], err = o.Eval(theta, nil, nil)
			return err
		},
		Jacobian: func(dst *mat.Dense, theta []float64) error {
			clear(grad)
			_, err := o.Eval(theta, grad, nil)
			dst.SetRow(0, grad)
			return err
		}}, theta)
}

func checkPoint(params []Param, theta []float64) (*box, error) {
	b, err := newBox(params)
	if err != nil {
		return nil, err
	}
	if len(theta) != len(params) {
		return nil, &InputError{"point", fmt.Sprintf("%d values for %d parameters", len(theta), len(params))}
	}
	for i, x := range theta {
		if !(x >= b.lower[i] && x <= b.upper[i]) || !finite(x) {
			return nil, &InputError{b.names[i], fmt.Sprintf("%g is not between the bounds %g and %g", x, b.lower[i], b.upper[i])}
		}
	}
	return b, nil
}
