package fit

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"

	"limsup/fit/leastsq"
)

// Range is a profile-likelihood interval of one parameter; it need not lie
// symmetrically about the estimate.
type Range struct {
	Label, Unit  string
	Level        float64
	Estimate     float64
	Lower, Upper float64 // where an end is Unbounded, the infinite value stands
	// LowerEnd and UpperEnd say how the ends came about: crossed, at the bound of the
	// parameter, unbounded, or not evaluable beyond.
	LowerEnd, UpperEnd leastsq.End
	Warnings           []string
}

// String is the interval in words.
func (r *Range) String() string {
	end := func(v float64, e leastsq.End, side string) string {
		switch e {
		case leastsq.AtLimit:
			return fmt.Sprintf("its %s bound %.6g (the data set no limit before it)", side, v)
		case leastsq.Unbounded:
			return "no " + side + " limit"
		case leastsq.Unevaluated:
			return fmt.Sprintf("%.6g (the model has no prediction beyond)", v)
		}
		return fmt.Sprintf("%.6g", v)
	}
	return end(r.Lower, r.LowerEnd, "lower") + " to " + end(r.Upper, r.UpperEnd, "upper")
}

// mostT caps Student's quantile of a profile: a rise of −ln L by ½·8² is beyond any
// level that can be told from certainty.
const mostT = 8

// Profile returns the interval of a parameter by its label, as Estimate.Label gives it.
//
// For a location, −ln L minimised over the other locations, with the spreads at their
// estimates, may rise by ½t², with t the quantile of Student's t with the degrees of
// freedom of the parameter: for normal noise of one spread this is the profile t of
// D. M. Bates and D. G. Watts, Nonlinear Regression Analysis, Wiley 1988 (from memory).
// For a spread, the restricted likelihood A (see spreads.go), minimised over the
// other spreads, may rise by half a quantile of χ² with one degree of freedom.
//
// Where a row that has a kinetic limit at the estimates would lose it, the interval of a
// location ends as not evaluable beyond: the model predicts nothing there.
//
// Errors: *OptionError for an unknown label or level, *leastsq.LowerMinimumError when
// the estimates are not the optimum, those of Calibrate.
func (c *Calibration) Profile(label string, level float64) (Range, error) {
	if !(level > 0 && level < 1) {
		return Range{}, &OptionError{"level", fmt.Sprintf("%.10g", level), "a number between 0 and 1"}
	}
	lik, at, err := c.profiled(label)
	if err != nil {
		return Range{}, err
	}
	e := &c.Parameters[at]
	r := Range{Label: label, Unit: e.Unit, Level: level, Estimate: e.Value}
	var iv leastsq.Interval
	if at < c.Locations {
		ν := e.Degrees
		if ν == 0 {
			ν = float64(c.Degrees)
		}
		t := student(0.5+level/2, ν)
		if t > mostT {
			r.Warnings = append(r.Warnings, fmt.Sprintf("%.3g degrees of freedom are too few for a level of %g; the ends are those of t = %g", ν, level, float64(mostT)))
			t = mostT
		}
		iv, err = leastsq.Profile(c.inside(lik, c.objective(lik, lik.variances(c.psi, nil))), c.point(), at, distuv.ChiSquared{K: 1}.CDF(t*t), profileSettings())
		r.Lower, r.Upper, r.LowerEnd, r.UpperEnd = iv.Lower, iv.Upper, iv.LowerEnd, iv.UpperEnd
	} else {
		var z *linearised
		if z, err = newLinearised(lik, c.theta, c.active(lik.lay)); err != nil {
			return Range{}, err
		}
		k := at - c.Locations
		o := z.outer(c.psi, lik.lay.psi)
		point := &leastsq.Result{X: make([]float64, len(c.psi))}
		for i, p := range o.Params {
			point.X[i] = p.Start
		}
		iv, err = leastsq.Profile(o, point, k, level, leastsq.Settings{})
		one := lik.lay.psi[k : k+1]
		a, b := unfold([]float64{iv.Lower}, one)[0], unfold([]float64{iv.Upper}, one)[0]
		r.Lower, r.Upper, r.LowerEnd, r.UpperEnd = a, b, iv.LowerEnd, iv.UpperEnd
		if a > b {
			r.Lower, r.Upper, r.LowerEnd, r.UpperEnd = b, a, iv.UpperEnd, iv.LowerEnd
		}
	}
	r.Warnings = append(r.Warnings, iv.Warnings...)
	return r, err
}

// ProfileCurve returns by how much −ln L, minimised over the other locations with the
// spreads at their estimates as in Profile, exceeds its minimum with a location held at
// each of values, which lead away from its estimate to one side. Where it cannot be
// followed further the list is shorter than values, and the error says why. told, if not
// nil, hears how many values are done.
//
// Errors: those of Profile; *OptionError for a label of a spread.
func (c *Calibration) ProfileCurve(label string, values []float64, told func(done int)) ([]float64, error) {
	lik, at, err := c.profiled(label)
	if err != nil {
		return nil, err
	}
	if at >= c.Locations {
		return nil, &OptionError{"profile curve", label, "a location, not a spread"}
	}
	rises, err := leastsq.Trace(c.inside(lik, c.objective(lik, lik.variances(c.psi, nil))), c.point(), at, values, profileSettings(), told)
	if errors.Is(err, errSpinodal) {
		err = errSpinodal
	}
	return rises, err
}

// profiled finds the parameter of a label, and the likelihood at the estimates.
func (c *Calibration) profiled(label string) (lik *likelihood, at int, err error) {
	at = -1
	var labels []string
	for i := range c.Parameters {
		l := c.Parameters[i].Label()
		labels = append(labels, l)
		if l == label {
			at = i
		}
	}
	if at < 0 {
		return nil, 0, &OptionError{"profile", label, "one of " + strings.Join(labels, ", ")}
	}
	lay, err := newLayout(&c.Plan, c.Data.Observations)
	if err != nil {
		return nil, 0, err
	}
	if lik, err = newLikelihood(&c.Plan, c.Data.Observations, lay, 0); err != nil {
		return nil, 0, err
	}
	if err := lik.evaluate(c.theta); err != nil {
		return nil, 0, err
	}
	lik.hold()
	return lik, at, nil
}

// point is the minimum from which profiles start.
func (c *Calibration) point() *leastsq.Result {
	r := &leastsq.Result{X: c.theta, StdErr: make([]float64, len(c.theta))}
	for i := range c.theta {
		r.StdErr[i] = c.Parameters[i].U
	}
	return r
}

// profileSettings are those of the searches behind a profile. They begin close to their
// ends; one that takes longer creeps along the edge of the spinodal.
func profileSettings() leastsq.Settings {
	return leastsq.Settings{MaxIterations: 30, Tolerance: tolerance}
}

// errSpinodal ends a profile.
var errSpinodal = errors.New("the flux of a row does not reach its target before the spinodal")

// inside is an objective that has no value where the spinodal stands in for a kinetic
// limit, unless it does so at the estimates already. There a row no longer depends on its
// flux, and −ln L may fall again towards parameters with which the model predicts nothing.
func (c *Calibration) inside(lik *likelihood, o leastsq.Objective) leastsq.Objective {
	beyond := func() bool {
		return slices.ContainsFunc(lik.limit, func(l limitValue) bool { return l.atSpinodal })
	}
	if beyond() {
		return o
	}
	eval := o.Eval
	o.Eval = func(theta, grad []float64, curv *mat.SymDense) (float64, error) {
		v, err := eval(theta, grad, curv)
		if err == nil && beyond() {
			return 0, errSpinodal
		}
		return v, err
	}
	return o
}

// outer is A as a function of w, see estimate.
func (z *linearised) outer(psi []float64, free []Free) leastsq.Objective {
	params, floor := z.variables(psi, free)
	return leastsq.Objective{Params: params, Size: len(z.l.obs), Eval: func(w, grad []float64, curv *mat.SymDense) (float64, error) {
		v, ok := z.adjusted(unfold(w, free))
		if !ok || math.IsNaN(v) {
			return 0, errSingular
		}
		if grad == nil && curv == nil {
			return v, nil
		}
		if grad == nil {
			grad = make([]float64, len(w))
		}
		return v, z.differences(w, v, floor, free, grad, curv)
	}}
}
