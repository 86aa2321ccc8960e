package leastsq

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
)

// Solve minimises ½ Σ r_i(θ)² between the bounds by damped Gauss–Newton steps.
//
// Errors: *InputError for a problem or setting that makes no sense,
// *EvaluationError where no start has residuals and derivatives. Everything
// else is in the Result: look at Usable before using X and at Converged before
// calling it the optimum.
func Solve(p Problem, s Settings) (*Result, error) {
	b, err := newBox(p.Params)
	if err != nil {
		return nil, err
	}
	if err := s.check(); err != nil {
		return nil, err
	}
	if p.Size < 1 {
		return nil, &InputError{"problem", fmt.Sprintf("the number of residuals, %d, is below 1", p.Size)}
	}
	if p.Residuals == nil {
		return nil, &InputError{"problem", "Residuals is missing"}
	}
	g := newGaussNewton(p, b)
	q := &search{b: b, s: s.withDefaults(), m: g, name: "Gauss–Newton"}
	cut := math.Sqrt(g.floor()) * float64(max(p.Size, len(b.start)))
	if p.Jacobian == nil {
		cut = math.Sqrt(g.floor())
	}
	q.run(func(a *attempt) bool {
		if p.Size < len(b.start) || !g.at(a.x) {
			return false
		}
		sp, ok := spectrumOf(g.jac, b.inside(a.x), cut)
		return ok && b.lost(sp, a.x, 2*g.unit(), g.seen)
	})
	r, err := q.result()
	if err != nil {
		return nil, wrap(err, g.err)
	}
	if !g.at(r.X) {
		return nil, wrap(&EvaluationError{Starts: 1, Theta: r.X}, g.err)
	}
	r.Residuals = append([]float64(nil), g.r...)
	r.Jacobian = mat.DenseCopyOf(g.jac)
	r.Gradient = append([]float64(nil), g.grad...)
	r.Evaluations = g.evals + g.diff.evals
	free := b.inside(r.X)
	sp, ok := spectrumOf(g.jac, free, cut)
	if !ok {
		r.missing("the derivatives could not be decomposed")
		return r, nil
	}
	dof := p.Size - len(free)
	factor, noFactor := 0.0, ""
	if dof > 0 {
		factor = g.rss / float64(dof)
	} else {
		noFactor = fmt.Sprintf("the number of residuals, %d, leaves no degree of freedom for their spread beside %s", p.Size, count(len(free), "parameter"))
	}
	r.uncertainties(sp, factor, noFactor)
	if dof < 0 {
		r.missing(fmt.Sprintf("%s cannot determine %d parameters: %s", count(p.Size, "residual"), len(free), r.CovarianceReason))
	}
	r.warn(sp)
	return r, nil
}

// Minimize minimises an objective between the bounds by damped Newton steps (or
// Fisher scoring, whichever curvature Eval gives). Errors and Result as for Solve.
func Minimize(o Objective, s Settings) (*Result, error) {
	b, err := newBox(o.Params)
	if err != nil {
		return nil, err
	}
	if err := s.check(); err != nil {
		return nil, err
	}
	if o.Eval == nil {
		return nil, &InputError{"problem", "Eval is missing"}
	}
	w := newNewton(o)
	q := &search{b: b, s: s.withDefaults(), m: w, smooth: true, name: "Newton"}
	cut := math.Sqrt(w.floor() * float64(len(b.start)))
	q.run(func(a *attempt) bool {
		if !w.at(a.x) {
			return false
		}
		sp, ok := spectrumOfCurvature(w.h, b.inside(a.x), cut)
		return ok && b.lost(sp, a.x, 1, w.seen)
	})
	r, err := q.result()
	if err != nil {
		return nil, wrap(err, w.err)
	}
	if !w.at(r.X) {
		return nil, wrap(&EvaluationError{Starts: 1, Theta: r.X}, w.err)
	}
	r.Curvature = mat.NewSymDense(w.n, nil)
	r.Curvature.CopySym(w.h)
	r.Gradient = append([]float64(nil), w.g...)
	r.Evaluations = w.evals
	sp, ok := spectrumOfCurvature(w.h, b.inside(r.X), cut)
	if !ok {
		r.missing("the derivatives could not be decomposed")
		return r, nil
	}
	r.uncertainties(sp, 1, "")
	r.warn(sp)
	return r, nil
}

// count is a number with its noun.
func count(n int, noun string) string {
	if n == 1 {
		return "1 " + noun
	}
	return fmt.Sprintf("%d %ss", n, noun)
}

// wrap adds what the caller's function said.
func wrap(err, cause error) error {
	if e, ok := err.(*EvaluationError); ok && e.Err == nil {
		e.Err = cause
	}
	return err
}

// result starts the report of the best search.
func (q *search) result() (*Result, error) {
	a := &q.best
	if a.end == unevaluated {
		return nil, &EvaluationError{Starts: q.starts, Theta: q.b.start}
	}
	r := &Result{Names: q.b.names, X: a.x, Value: a.value, Method: a.method, Iterations: q.accepted, Distance: a.distance,
		Converged: a.converged(), Usable: a.converged() || a.iterations > 0, Reason: q.reason()}
	for i, x := range a.x {
		r.AtBound = append(r.AtBound, q.b.side(i, x))
	}
	if q.failures > 0 {
		r.Warnings = append(r.Warnings, fmt.Sprintf("%d of %d starts have no value or derivatives and were passed over", q.failures, q.starts))
	}
	for i, x := range a.x {
		if !r.Converged && x == q.b.start[i] && r.AtBound[i] == Inside {
			r.Warnings = append(r.Warnings, r.Names[i]+" has not moved from its start")
		}
	}
	return r, nil
}

// missing gives the reason why there is no covariance.
func (r *Result) missing(reason string) {
	n := len(r.X)
	r.Covariance, r.CovarianceReason = nil, reason
	r.StdErr, r.NoStdErr = make([]float64, n), make([]string, n)
	for i, side := range r.AtBound {
		r.NoStdErr[i] = reason
		if side != Inside {
			r.NoStdErr[i] = side.String()
		}
	}
}

func (r *Result) warn(s *spectrum) {
	for i, side := range r.AtBound {
		if side == AtLower || side == AtUpper {
			r.Warnings = append(r.Warnings, fmt.Sprintf("%s is %s (%.6g); the others are estimated as if it were known", r.Names[i], side, r.X[i]))
		}
	}
	if !s.full() {
		r.Warnings = append(r.Warnings, r.CovarianceReason)
	}
}

// inside lists the parameters that are not at a bound.
func (b *box) inside(x []float64) []int {
	var free []int
	for i := range x {
		if b.side(i, x[i]) == Inside {
			free = append(free, i)
		}
	}
	return free
}

// lostFactor: a standard error of a hundred times the size of its parameter
// says that the search has strayed to where the parameter no longer acts.
const lostFactor = 100

// lost tells whether a parameter that once acted on the value acts no longer.
func (b *box) lost(s *spectrum, x []float64, variance float64, seen []float64) bool {
	for _, j := range s.dead {
		if seen[j] > 0 {
			return true
		}
	}
	for a, j := range s.live { // lower limit of the standard error: the others known
		if math.Sqrt(variance)/s.scale[a] > lostFactor*b.size(j, x[j]) {
			return true
		}
	}
	return false
}
