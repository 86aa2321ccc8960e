package leastsq

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
)

// Param is one parameter θ_i of a problem, in the caller's unit.
type Param struct {
	Name  string
	Start float64
	// Lower and Upper bound θ_i and may be ∓Inf; when both are zero there is no
	// bound. Lower = Upper ≠ 0 holds the parameter there. Start must lie between.
	Lower, Upper float64
	// Scale is the typical size of θ_i, used for difference steps, for the
	// smallest step worth taking and to spread further starts. 0 means |Start|,
	// or a tenth of the width between the bounds, or 1.
	Scale float64
}

// Problem is a nonlinear least-squares problem: minimise ½ Σ r_i(θ)², i = 1…m.
type Problem struct {
	Params []Param
	// Size is the number m of residuals.
	Size int
	// Residuals fills dst (length m) with r(θ). It must not keep or change theta.
	// An error, a NaN or an infinity means that θ has no residuals.
	Residuals func(dst, theta []float64) error
	// Jacobian fills dst (m×n, zeroed) with ∂r_i/∂θ_j. Nil means differences.
	Jacobian func(dst *mat.Dense, theta []float64) error
}

// Objective is a smooth function to minimise, usually −ln L of a likelihood L.
type Objective struct {
	Params []Param
	// Size is the number of observations, for the report only.
	Size int
	// Eval returns the value at theta and, where they are not nil, fills grad with
	// its gradient and curv (n×n, zeroed) with the observed or expected information;
	// where that is not positive definite, damping makes up for it. It must not keep or
	// change theta.
	Eval func(theta, grad []float64, curv *mat.SymDense) (value float64, err error)
	// Rounding is the absolute error of differences between values, as of a quadrature,
	// where it exceeds that of arithmetic. Steps that promise less follow the gradient.
	Rounding float64
}

// Objective is the likelihood of p for independent normal residuals of known
// standard deviation sigma > 0: value RSS/(2σ²), gradient Jᵀr/σ², curvature
// JᵀJ/σ². It suits Profile; Solve keeps more digits than Minimize on it.
func (p Problem) Objective(sigma float64) Objective {
	r := make([]float64, p.Size)
	var dr *differences
	jac := mat.NewDense(max(p.Size, 1), max(len(p.Params), 1), nil)
	w := 1 / (sigma * sigma)
	return Objective{Params: p.Params, Size: p.Size, Eval: func(theta, grad []float64, curv *mat.SymDense) (float64, error) {
		if err := p.Residuals(r, theta); err != nil {
			return 0, err
		}
		f := 0.5 * w * sumSquares(r)
		if grad == nil && curv == nil {
			return f, nil
		}
		if dr == nil {
			b, err := newBox(p.Params)
			if err != nil {
				return 0, err
			}
			dr = newDifferences(p, b)
		}
		if err := dr.jacobian(jac, theta); err != nil {
			return 0, err
		}
		for j := range theta {
			if grad != nil {
				grad[j] = w * columnDot(jac, j, r)
			}
			for k := j; curv != nil && k < len(theta); k++ {
				s := 0.0
				for i := range r {
					s += jac.At(i, j) * jac.At(i, k)
				}
				curv.SetSym(j, k, w*s)
			}
		}
		return f, nil
	}}
}

// Settings of a run. The zero value works.
type Settings struct {
	// MaxIterations of one local search; default 2000.
	MaxIterations int
	// Tolerance is the distance to the optimum, in standard errors of the
	// estimates, at which a search has converged; default 1e-9.
	Tolerance float64
	// Starts is the number of starting points: the given one and Starts−1 points
	// of a scrambled Halton sequence between the bounds, or around the given start
	// over two decades each way where a bound is infinite; default 1.
	Starts int
	// Seed of the Halton scrambling and of the evolution strategy.
	Seed uint64
	// Local switches the second attempts off: by default a search that ends
	// without convergence is followed by BFGS (Minimize only), Nelder–Mead and
	// CMA-ES from the best point, and one that still has not converged, or has
	// strayed to where a parameter has lost its effect, by ten further starts.
	Local bool
}

func (s Settings) withDefaults() Settings {
	if s.MaxIterations == 0 {
		s.MaxIterations = 2000
	}
	if s.Tolerance == 0 {
		s.Tolerance = 1e-9
	}
	if s.Starts == 0 {
		s.Starts = 1
	}
	return s
}

func (s Settings) check() error {
	switch {
	case s.MaxIterations < 0:
		return &InputError{"setting MaxIterations", fmt.Sprintf("%d is below 0", s.MaxIterations)}
	case s.Starts < 0:
		return &InputError{"setting Starts", fmt.Sprintf("%d is below 0", s.Starts)}
	case !(s.Tolerance >= 0 && s.Tolerance < 1):
		return &InputError{"setting Tolerance", fmt.Sprintf("%g is not in [0, 1)", s.Tolerance)}
	}
	return nil
}

// box is the checked form of the parameters: bounds and scales by index.
type box struct {
	names               []string
	start, lower, upper []float64
	scale               []float64
}

// mostParameters is the dimension to which the Halton sequence of gonum reaches.
const mostParameters = 1000

func newBox(params []Param) (*box, error) {
	if len(params) == 0 {
		return nil, &InputError{"problem", "there are no parameters"}
	}
	if len(params) > mostParameters {
		return nil, &InputError{"problem", fmt.Sprintf("%d parameters are more than %d", len(params), mostParameters)}
	}
	b := &box{}
	for i, p := range params {
		name := p.Name
		if name == "" {
			name = fmt.Sprintf("parameter %d", i+1)
		}
		lo, hi := p.Lower, p.Upper
		if lo == 0 && hi == 0 {
			lo, hi = math.Inf(-1), math.Inf(1)
		}
		switch {
		case math.IsNaN(p.Start) || math.IsInf(p.Start, 0):
			return nil, &InputError{name, fmt.Sprintf("start %g is not finite", p.Start)}
		case math.IsNaN(lo) || math.IsNaN(hi) || lo > hi || math.IsInf(lo, 1) || math.IsInf(hi, -1):
			return nil, &InputError{name, fmt.Sprintf("bounds %g and %g are not in order", lo, hi)}
		case p.Start < lo || p.Start > hi:
			return nil, &InputError{name, fmt.Sprintf("start %g is outside the bounds %g and %g", p.Start, lo, hi)}
		case !(p.Scale >= 0) || math.IsInf(p.Scale, 0):
			return nil, &InputError{name, fmt.Sprintf("scale %g is negative or not finite", p.Scale)}
		}
		scale := p.Scale
		if scale == 0 {
			scale = math.Abs(p.Start)
		}
		if w := hi - lo; scale == 0 && w > 0 && !math.IsInf(w, 0) {
			scale = w / 10
		}
		if scale == 0 {
			scale = 1
		}
		b.names = append(b.names, name)
		b.start = append(b.start, p.Start)
		b.lower = append(b.lower, lo)
		b.upper = append(b.upper, hi)
		b.scale = append(b.scale, scale)
	}
	return b, nil
}

// size is the magnitude against which a change of θ_i at x is small or large.
func (b *box) size(i int, x float64) float64 { return math.Max(math.Abs(x), b.scale[i]) }

// side tells at which bound x stands.
func (b *box) side(i int, x float64) Side {
	switch {
	case b.lower[i] == b.upper[i]:
		return Held
	case x <= b.lower[i]:
		return AtLower
	case x >= b.upper[i]:
		return AtUpper
	}
	return Inside
}

func sumSquares(r []float64) float64 {
	s := 0.0
	for _, v := range r {
		s += v * v
	}
	return s
}

func columnDot(a *mat.Dense, j int, v []float64) float64 {
	s := 0.0
	for i, x := range v {
		s += a.At(i, j) * x
	}
	return s
}

func finite(v float64) bool { return !math.IsNaN(v) && !math.IsInf(v, 0) }

func allFinite(v []float64) bool {
	for _, x := range v {
		if !finite(x) {
			return false
		}
	}
	return true
}
