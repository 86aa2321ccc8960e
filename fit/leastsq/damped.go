package leastsq

import (
	"math"

	"gonum.org/v1/gonum/optimize"
)

// This file is the damped search shared by least squares and likelihoods: an
// optimize.Method that takes steps minimising
//
//	m(p) + ½λ‖D p‖²
//
// with m the quadratic model of the objective at θ, D a diagonal that makes the
// step independent of the units of θ, and λ the damping. λ follows the gain
// ratio ρ, the decrease reached over the decrease that m promised (the rule of
// H. B. Nielsen, Damping parameter in Marquardt's method, IMM-REP-1999-05, Technical
// University of Denmark, 1999; from memory). Bounds are held by an active set: a
// parameter at a bound that the gradient presses against it is left out of the
// step, one that the step would carry over its bound is stopped there and the
// step of the others is solved again.

// local is the quadratic model of an objective around its current point.
type local interface {
	// value evaluates a trial point, +Inf where that fails.
	value(theta []float64) float64
	// derive fills g with the gradient at the trial point evaluated last.
	derive(g, theta []float64)
	// adopt makes that trial point the current point; false if its derivatives
	// failed. d is updated to the scale D.
	adopt(d []float64) bool
	// solve fills p[free] with the minimiser of m(p)+½λ‖Dp‖² for the given other
	// entries of p; false where the system cannot be solved.
	solve(p []float64, free []int, λ float64) bool
	// predicted is m(0) − m(p).
	predicted(p []float64) float64
	// decrease is the value at the current less that at the trial point.
	decrease() float64
	// unit is the value that corresponds to ½ a squared standard error.
	unit() float64
	// noise is the rounding of decrease.
	noise() float64
	// floor is the smallest damping worth having: below it rounding of the
	// derivatives exceeds the damping.
	floor() float64
}

// accelerator is a local model that corrects a step for the curvature of the
// path of residuals.
type accelerator interface {
	// bend fills a with the correction to the step p of damping λ from the trial
	// point at θ + h p, evaluated last.
	bend(a, p []float64, free []int, h, λ float64) bool
}

// ending says why a damped search ended.
type ending int

const (
	running     ending = iota
	optimum            // distance below tolerance
	exact              // the value is zero
	rounding           // no smaller value within rounding
	blocked            // no acceptable step, though the model promises one
	unevaluated        // the start has no value or derivative
)

// damped implements optimize.Method and optimize.Statuser.
type damped struct {
	m         local
	b         *box
	tolerance float64

	x, p, d, g []float64
	a          []float64 // correction of p
	free, keep []int
	end        ending
	distance   float64 // standard errors to go at the last point
	relative   float64 // largest undamped step relative to the parameter sizes
	accepted   int
}

var (
	_ optimize.Method   = (*damped)(nil)
	_ optimize.Statuser = (*damped)(nil)
)

func newDamped(m local, b *box, tolerance float64) *damped {
	n := len(b.start)
	return &damped{m: m, b: b, tolerance: tolerance,
		x: make([]float64, n), p: make([]float64, n), d: make([]float64, n), g: make([]float64, n), a: make([]float64, n),
		free: make([]int, 0, n), keep: make([]int, 0, n)}
}

// Uses asks for the gradient; the curvature stays inside the model.
func (d *damped) Uses(has optimize.Available) (optimize.Available, error) {
	if !has.Grad {
		return optimize.Available{}, optimize.ErrMissingGrad
	}
	return optimize.Available{Grad: true}, nil
}

// Init asks for one task: the search is sequential.
func (d *damped) Init(dim, tasks int) int { return 1 }

// Status translates the ending.
func (d *damped) Status() (optimize.Status, error) {
	switch d.end {
	case optimum:
		return optimize.GradientThreshold, nil
	case exact:
		return optimize.FunctionThreshold, nil
	case rounding:
		return optimize.StepConvergence, nil
	case blocked, unevaluated:
		return optimize.Failure, nil
	}
	return optimize.NotTerminated, nil
}

// Run is the search; see optimize.Method for the protocol of the channels.
func (d *damped) Run(operation chan<- optimize.Task, result <-chan optimize.Task, tasks []optimize.Task) {
	task := tasks[0]
	ask := func(op optimize.Operation) bool {
		task.Op = op
		operation <- task
		task = <-result
		return task.Op != optimize.PostIteration
	}
	if d.search(&task, ask) {
		task.Op = optimize.MethodDone
		operation <- task
	}
	for range result {
	}
	close(operation)
}

const (
	firstDamping = 1e-3
	// maxRejections: λ grows by 2^(k(k+1)/2) in k rejections; 30 exceed the range
	// of numbers.
	maxRejections = 30
	// maxPolish steps are taken on trust of the gradient, where the decrease
	// promised is below the rounding of the value.
	maxPolish = 3
)

// relax is the factor on the damping after a step of gain ratio ρ was taken. Where the
// model has told the decrease to 3 %, damping only holds the search back along
// directions that the data tell little about, and is nearly let go of.
func relax(ρ float64) float64 {
	if e := math.Abs(ρ - 1); e < 0.03 {
		return math.Max(1e-4, e*e)
	}
	return math.Max(1.0/3, 1-math.Pow(2*ρ-1, 3))
}

// search returns true when it ended by itself, false when it was told to stop.
func (d *damped) search(task *optimize.Task, ask func(optimize.Operation) bool) bool {
	copy(d.x, task.X)
	if !ask(optimize.FuncEvaluation | optimize.GradEvaluation) {
		return false
	}
	if !finite(task.F) || !d.m.adopt(d.d) {
		d.end = unevaluated
		return true
	}
	copy(d.g, task.Gradient)
	if !ask(optimize.MajorIteration) {
		return false
	}
	λ, ν := firstDamping, 2.0
	polished := 0
	for {
		d.activate()
		if d.converged(task.F) {
			return true
		}
		bold := false
		for rejected := 0; ; rejected++ {
			pred, ok := d.step(λ)
			moved := ok && d.trial(task.X)
			if !moved && ok || rejected == maxRejections {
				if d.stalled(); d.end != blocked || bold {
					return true
				}
				// Where parameters are tied together, damping in proportion to their own
				// curvature leaves steps along their valley too short to be seen.
				bold, d.end = true, running
				λ, ν, rejected = d.m.floor(), 2, 0
				continue
			}
			ρ := math.Inf(-1)
			if ok && pred > 0 {
				if !d.bend(task, ask, λ) || !ask(optimize.FuncEvaluation) {
					return false
				}
				dec := d.m.decrease()
				if finite(task.F) && finite(dec) {
					ρ = dec / pred
					if noise := d.m.noise(); pred <= noise && math.Abs(dec) <= noise && polished < maxPolish {
						polished++
						ρ = 1
					}
				}
			}
			if ρ > 1e-4 && ask(optimize.GradEvaluation) {
				if d.m.adopt(d.d) {
					copy(d.x, task.X)
					copy(d.g, task.Gradient)
					d.accepted++
					λ = math.Max(λ*relax(ρ), d.m.floor())
					ν = 2
					if !ask(optimize.MajorIteration) {
						return false
					}
					break
				}
			} else if ρ > 1e-4 {
				return false
			}
			λ *= ν
			ν *= 2
		}
	}
}

// Acceleration costs one evaluation a step. It starts where an easy problem has
// ended, looks a tenth of the step ahead and is used where the correction is at
// most ¾ of ‖D p‖/2 (the values of M. K. Transtrum and J. P. Sethna,
// Improvements to the Levenberg–Marquardt algorithm for nonlinear least-squares
// minimization, arXiv:1201.5885, 2012; from memory).
const (
	easySteps = 10
	lookAhead = 0.1
	mostBend  = 0.75 / 2
)

// bend adds the second-order correction to task.X where it is small and stays
// between the bounds. It returns false when told to stop.
func (d *damped) bend(task *optimize.Task, ask func(optimize.Operation) bool, λ float64) bool {
	m, ok := d.m.(accelerator)
	if !ok || d.accepted < easySteps || d.relative < 1e-6 {
		return true
	}
	for i := range task.X {
		task.X[i] = math.Min(math.Max(d.x[i]+lookAhead*d.p[i], d.b.lower[i]), d.b.upper[i])
	}
	if !ask(optimize.FuncEvaluation) {
		return false
	}
	free := d.keep[:0]
	for _, i := range d.free {
		if t := d.x[i] + d.p[i]; t > d.b.lower[i] && t < d.b.upper[i] {
			free = append(free, i)
		}
	}
	use := finite(task.F) && len(free) > 0 && m.bend(d.a, d.p, free, lookAhead, λ) && allFinite(d.a)
	if use {
		na, np := 0.0, 0.0
		for i := range d.p {
			na, np = math.Hypot(na, d.d[i]*d.a[i]), math.Hypot(np, d.d[i]*d.p[i])
			if t := d.x[i] + d.p[i] + d.a[i]; d.a[i] != 0 && (t < d.b.lower[i] || t > d.b.upper[i]) {
				use = false
			}
		}
		use = use && na <= mostBend*np
	}
	d.trial(task.X)
	if use {
		for i := range task.X {
			task.X[i] += d.a[i]
		}
	}
	return true
}

// converged measures the distance to the optimum by the step damped only at the
// rounding of the derivatives.
func (d *damped) converged(f float64) bool {
	d.distance, d.relative = 0, 0
	if len(d.free) == 0 {
		d.end = optimum
		return true
	}
	solved := false
	for λ := d.m.floor(); !solved && λ < firstDamping; λ *= 100 {
		clear(d.p)
		solved = d.m.solve(d.p, d.free, λ) && allFinite(d.p)
	}
	if !solved {
		d.distance, d.relative = math.MaxFloat64, math.MaxFloat64
		return false
	}
	if unit := d.m.unit(); unit > 0 {
		d.distance = math.Sqrt(math.Max(0, d.m.predicted(d.p)) / unit)
	} else {
		d.end = exact
		return true
	}
	for _, i := range d.free {
		d.relative = math.Max(d.relative, math.Abs(d.p[i])/d.b.size(i, d.x[i]))
	}
	if d.distance <= d.tolerance {
		d.end = optimum
		return true
	}
	return false
}

// stalled judges a point from which no step lowers the value: an optimum to
// rounding when a thousandth of a standard error or a millionth of the
// parameters' size is all that is left to go.
func (d *damped) stalled() {
	if d.distance <= 1e-3 || d.relative <= 1e-6 {
		d.end = rounding
		return
	}
	d.end = blocked
}
