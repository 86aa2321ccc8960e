package leastsq

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/optimize"
)

// attempt is the outcome of one local search.
type attempt struct {
	x          []float64
	value      float64
	end        ending
	status     optimize.Status
	distance   float64
	iterations int
	method     string
}

func (a *attempt) converged() bool { return a.end == optimum || a.end == exact || a.end == rounding }

// better prefers the lower value and, within rounding of it, convergence.
func (a *attempt) better(b *attempt) bool {
	if b.end == unevaluated || a.end == unevaluated {
		return a.end != unevaluated
	}
	if margin := 1e-9 * math.Max(math.Abs(a.value), math.Abs(b.value)); math.Abs(a.value-b.value) <= margin && a.converged() != b.converged() {
		return a.converged()
	}
	return a.value < b.value
}

// search minimises one problem by local searches from several points.
type search struct {
	b      *box
	s      Settings
	m      local
	smooth bool // BFGS is worth trying
	name   string

	best     attempt
	accepted int
	failures int // starts without a value
	starts   int
}

// Rounding of a sum of squares or of a log-likelihood, relative: a run of
// stallIterations steps that gain less has come to rest.
const (
	valueRounding   = 0x1p-50
	stallIterations = 30
)

// descend runs the damped search from one point.
func (q *search) descend(start []float64, method string) attempt {
	d := newDamped(q.m, q.b, q.s.Tolerance)
	res, err := optimize.Minimize(optimize.Problem{Func: q.m.value, Grad: q.m.derive}, start, &optimize.Settings{
		Converger:       &optimize.FunctionConverge{Relative: valueRounding, Iterations: stallIterations},
		MajorIterations: q.s.MaxIterations,
		Concurrent:      1,
	}, d)
	a := attempt{x: append([]float64(nil), d.x...), value: math.Inf(1), end: d.end, iterations: d.accepted, method: method}
	q.accepted += d.accepted
	if err != nil || d.end == unevaluated {
		a.end = unevaluated
		return a
	}
	a.value, a.status = res.F, res.Status
	if a.status == optimize.FunctionConvergence {
		d.stalled()
		a.end = d.end
	}
	a.distance = d.distance
	return a
}

// from searches from a start and keeps the better result.
func (q *search) from(start []float64, method string) bool {
	q.starts++
	a := q.descend(start, method)
	if a.end == unevaluated {
		q.failures++
	}
	if q.best.x == nil || a.better(&q.best) {
		q.best = a
		return true
	}
	return false
}

// run searches from the starts and, unless s.Local, again where the best result
// is in doubt. doubtful says so.
func (q *search) run(doubtful func(*attempt) bool) {
	q.from(q.b.start, q.name)
	for _, x := range q.b.spread(q.s.Starts-1, q.s.Seed) {
		q.from(x, q.name)
	}
	if q.s.Local || q.best.end == unevaluated && q.s.Starts > 1 {
		return
	}
	for _, f := range q.fallbacks() {
		if q.best.converged() || q.best.end == unevaluated {
			break
		}
		if x, ok := f.run(q.best.x, q.best.value); ok {
			q.from(x, f.name+", then "+q.name)
		}
	}
	if q.best.converged() && !doubtful(&q.best) {
		return
	}
	for _, x := range q.b.spread(furtherStarts, q.s.Seed+1) {
		q.from(x, q.name)
	}
}

// furtherStarts of a search in doubt.
const furtherStarts = 10

// reason is the sentence about how the best search ended.
func (q *search) reason() string {
	a := &q.best
	after := " after " + count(a.iterations, "iteration")
	switch a.end {
	case optimum:
		return fmt.Sprintf("converged%s: at most %.1g standard errors are left to the optimum", after, math.Max(a.distance, q.s.Tolerance))
	case exact:
		return "converged" + after + ": every residual is zero"
	case rounding:
		return "converged" + after + ": no step lowers the value beyond its rounding"
	case blocked:
		return fmt.Sprintf("stopped%s: no step lowers the value, although the derivatives promise one (%.1g standard errors away); they may be wrong or the value not smooth", after, a.distance)
	}
	if a.status == optimize.IterationLimit {
		return "stopped at the limit of " + count(q.s.MaxIterations, "iteration")
	}
	return fmt.Sprintf("stopped%s: %v", after, a.status)
}
