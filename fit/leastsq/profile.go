package leastsq

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"
)

// End says how one end of a profile interval came about.
type End int

// The kinds of end.
const (
	Crossed     End = iota // the likelihood falls to its limit there
	AtLimit                // the bound of the parameter comes first
	Unbounded              // it never falls that far: the end is infinite
	Unevaluated            // beyond this value the objective cannot be evaluated
)

func (e End) String() string {
	return [...]string{"crossed", "at the bound", "unbounded", "not evaluable beyond"}[e]
}

// Interval is a profile-likelihood interval of one parameter.
type Interval struct {
	Name               string
	Level              float64
	Estimate           float64
	Lower, Upper       float64 // −Inf, +Inf where Unbounded
	LowerEnd, UpperEnd End
	Evaluations        int
	Warnings           []string
}

// LowerMinimumError says that a profile came upon a lower value than the minimum
// that it started from.
type LowerMinimumError struct {
	Name         string    // parameter of the profile
	Value, Start float64   // value found and value of the minimum given
	X            []float64 // where it was found: a start for Minimize
}

func (e *LowerMinimumError) Error() string {
	return fmt.Sprintf("profile of %s: value %.10g is below the minimum given, %.10g", e.Name, e.Value, e.Start)
}

// Profile returns the interval of parameter index within which twice the rise of
// the objective, minimised over all other parameters, stays below the level
// quantile of χ² with one degree of freedom (Wilks). at is the minimum of o found
// before. The two ends need not lie symmetrically about the estimate.
//
// Errors: *InputError, *EvaluationError, *LowerMinimumError.
func Profile(o Objective, at *Result, index int, level float64, s Settings) (Interval, error) {
	if !(level > 0 && level < 1) {
		return Interval{}, &InputError{"profile", fmt.Sprintf("level %g is not in (0, 1)", level)}
	}
	p, err := newProfile(o, at, index, s)
	if err != nil {
		return Interval{}, err
	}
	p.iv.Level, p.root = level, math.Sqrt(distuv.ChiSquared{K: 1}.Quantile(level))
	p.step = p.root * p.b.size(index, at.X[index]) / 10
	if len(at.StdErr) == len(at.X) && at.StdErr[index] > 0 {
		p.step = p.root * at.StdErr[index]
	}
	if p.iv.Lower, p.iv.LowerEnd, err = p.end(-1, at.X); err != nil {
		return Interval{}, err
	}
	if p.iv.Upper, p.iv.UpperEnd, err = p.end(1, at.X); err != nil {
		return Interval{}, err
	}
	return p.iv, nil
}

// Trace returns by how much the objective, minimised over all other parameters, exceeds
// its minimum at with parameter index held at each of values, which lead away from there
// to one side. The list ends before a value for which there is an error. told, if not nil,
// hears how many values are done.
//
// Errors: those of Profile, beside what was found before.
func Trace(o Objective, at *Result, index int, values []float64, s Settings, told func(done int)) ([]float64, error) {
	p, err := newProfile(o, at, index, s)
	if err != nil {
		return nil, err
	}
	warm := append([]float64(nil), at.X...)
	var rises []float64
	for k, v := range values {
		if told != nil {
			told(k)
		}
		f, err := p.minimum(v, warm)
		if err != nil {
			return rises, err
		}
		rises = append(rises, math.Max(0, f-p.min))
	}
	return rises, nil
}

// newProfile checks what all profiles begin with and evaluates the minimum.
func newProfile(o Objective, at *Result, index int, s Settings) (*profile, error) {
	if o.Eval == nil || at == nil {
		return nil, &InputError{"profile", "the objective or its minimum is missing"}
	}
	b, err := checkPoint(o.Params, at.X)
	switch {
	case err != nil:
		return nil, err
	case index < 0 || index >= len(o.Params):
		return nil, &InputError{"profile", fmt.Sprintf("parameter index %d is not in 0 to %d", index, len(o.Params)-1)}
	}
	if err := s.check(); err != nil {
		return nil, err
	}
	s.Local, s.Starts = true, 1
	p := &profile{o: o, b: b, index: index, s: s, iv: Interval{Name: b.names[index], Estimate: at.X[index]}, theta: make([]float64, len(at.X))}
	p.iv.Evaluations++
	if p.min, err = o.Eval(at.X, nil, nil); err != nil || !finite(p.min) {
		return nil, &EvaluationError{Starts: 1, Theta: at.X, Err: err}
	}
	return p, nil
}

type profile struct {
	o         Objective
	b         *box
	index     int
	s         Settings
	iv        Interval
	root      float64 // √χ² at the level
	min       float64
	step      float64
	theta     []float64 // work
	unsettled bool      // an inner minimum has not converged
}

const (
	// widenings of the first step, each by two: 2⁶⁰ standard errors are no limit.
	widenings = 60
	// rootTolerance of √(2 rise): the end is then known to 1e-7 standard errors.
	rootTolerance = 1e-7
	bisections    = 60
)

// end searches outwards from x in direction sign.
func (p *profile) end(sign float64, x []float64) (float64, End, error) {
	bound := p.b.upper[p.index]
	if sign < 0 {
		bound = p.b.lower[p.index]
	}
	in, fin := x[p.index], -p.root // innermost end of the bracket: rise zero
	warm := append([]float64(nil), x...)
	step := p.step
	for range widenings {
		if in == bound {
			return bound, AtLimit, nil
		}
		out := in + sign*step
		if !finite(out) {
			break
		}
		if (out-bound)*sign > 0 {
			out = bound
		}
		f, err := p.rise(out, warm)
		if _, failed := err.(*EvaluationError); failed {
			return p.edge(in, fin, out, warm)
		}
		if err != nil {
			return 0, 0, err
		}
		if f > 0 {
			return p.cross(in, fin, out, f, warm)
		}
		in, fin = out, f
		step *= 2
	}
	return sign * math.Inf(1), Unbounded, nil
}

// edge closes in on a crossing between in and out, where out has no value.
func (p *profile) edge(in, fin, out float64, warm []float64) (float64, End, error) {
	for range bisections {
		mid := in + (out-in)/2
		if mid == in || mid == out {
			break
		}
		f, err := p.rise(mid, warm)
		if _, failed := err.(*EvaluationError); failed {
			out = mid
			continue
		}
		if err != nil {
			return 0, 0, err
		}
		if f > 0 {
			return p.cross(in, fin, mid, f, warm)
		}
		in, fin = mid, f
	}
	return in, Unevaluated, nil
}

// cross finds the zero of rise in a bracket by false position, halving the value
// of an end that stays (the Illinois rule); rise is nearly linear.
func (p *profile) cross(a, fa, b, fb float64, warm []float64) (float64, End, error) {
	kept := 0
	for range bisections {
		v := b - fb*(b-a)/(fb-fa)
		if !((v-a)*(v-b) < 0) {
			v = a + (b-a)/2
		}
		if v == a || v == b {
			break
		}
		f, err := p.rise(v, warm)
		if _, failed := err.(*EvaluationError); failed {
			return p.edge(a, fa, v, warm)
		}
		if err != nil {
			return 0, 0, err
		}
		switch {
		case math.Abs(f) <= rootTolerance:
			return v, Crossed, nil
		case f > 0:
			b, fb = v, f
			if kept == 1 {
				fa /= 2
			}
			kept = 1
		default:
			a, fa = v, f
			if kept == -1 {
				fb /= 2
			}
			kept = -1
		}
	}
	return b, Crossed, nil
}

// rise is √(2(minimum over the others − min)) − √χ² with the parameter at v.
// warm is the point to start from and becomes the minimum found.
func (p *profile) rise(v float64, warm []float64) (float64, error) {
	f, err := p.minimum(v, warm)
	if err != nil {
		return 0, err
	}
	return math.Sqrt(2*math.Max(0, f-p.min)) - p.root, nil
}

// minimum is that over the others, which must not be below min.
func (p *profile) minimum(v float64, warm []float64) (float64, error) {
	f, err := p.inner(v, warm)
	if err != nil {
		return 0, err
	}
	if slack := 1e-6 + 1e-9*math.Abs(p.min); f < p.min-slack {
		return 0, &LowerMinimumError{p.iv.Name, f, p.min, append([]float64(nil), warm...)}
	}
	return f, nil
}

// inner minimises over the other parameters.
func (p *profile) inner(v float64, warm []float64) (float64, error) {
	n := len(p.theta)
	k := p.index
	if n == 1 {
		p.iv.Evaluations++
		p.theta[0] = v
		f, err := p.o.Eval(p.theta, nil, nil)
		if err != nil || !finite(f) {
			return 0, &EvaluationError{1, []float64{v}, err}
		}
		warm[0] = v
		return f, nil
	}
	var params []Param
	others := make([]int, 0, n-1)
	for i := range n {
		if i != k {
			others = append(others, i)
			params = append(params, Param{p.b.names[i], warm[i], p.b.lower[i], p.b.upper[i], p.b.scale[i]})
		}
	}
	g, h := make([]float64, n), mat.NewSymDense(n, nil)
	p.follow(v, warm, others, params, g, h)
	r, err := Minimize(Objective{Params: params, Size: p.o.Size, Rounding: p.o.Rounding, Eval: func(x, grad []float64, curv *mat.SymDense) (float64, error) {
		p.theta[k] = v
		for a, i := range others {
			p.theta[i] = x[a]
		}
		if grad == nil && curv == nil {
			return p.o.Eval(p.theta, nil, nil)
		}
		clear(g)
		h.Zero()
		f, err := p.o.Eval(p.theta, g, h)
		for a, i := range others {
			if grad != nil {
				grad[a] = g[i]
			}
			for c := a; curv != nil && c < len(others); c++ {
				curv.SetSym(a, c, h.At(i, others[c]))
			}
		}
		return f, err
	}}, p.s)
	if err != nil {
		return 0, err
	}
	p.iv.Evaluations += r.Evaluations
	if !r.Converged && !p.unsettled {
		p.unsettled = true
		p.iv.Warnings = append(p.iv.Warnings, fmt.Sprintf("with %s at %.6g the other parameters did not converge: %s", p.iv.Name, v, r.Reason))
	}
	warm[k] = v
	for a, i := range others {
		warm[i] = r.X[a]
	}
	return r.Value, nil
}

// follow moves the starts of the other parameters with the parameter along the valley of
// the objective, −H_oo⁻¹H_ok(v − v_warm), if there is a value where that leads.
func (p *profile) follow(v float64, warm []float64, others []int, params []Param, g []float64, h *mat.SymDense) {
	k := p.index
	p.iv.Evaluations++
	if _, err := p.o.Eval(warm, g, h); err != nil {
		return
	}
	m := len(others)
	oo, ok := mat.NewSymDense(m, nil), mat.NewVecDense(m, nil)
	for a, i := range others {
		ok.SetVec(a, h.At(i, k))
		for c := a; c < m; c++ {
			oo.SetSym(a, c, h.At(i, others[c]))
		}
	}
	var chol mat.Cholesky
	var slope mat.VecDense
	if !chol.Factorize(oo) || chol.SolveVecTo(&slope, ok) != nil {
		return
	}
	copy(p.theta, warm)
	p.theta[k] = v
	for a, i := range others {
		p.theta[i] = math.Min(math.Max(warm[i]-slope.AtVec(a)*(v-warm[k]), p.b.lower[i]), p.b.upper[i])
	}
	p.iv.Evaluations++
	if f, err := p.o.Eval(p.theta, nil, nil); err != nil || !finite(f) {
		return
	}
	for a, i := range others {
		params[a].Start = p.theta[i]
	}
}
