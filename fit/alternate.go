package fit

import (
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"

	"limsup/fit/leastsq"
)

// This file finds the estimates: locations at given spreads and spreads at given
// locations, in turn, until neither moves.

// maxAlternations bounds the alternation between locations and spreads; each
// round leaves a few per cent of the error of the last.
const maxAlternations = 60

// Parameters and spreads have settled when none moves by more than this part of
// its range in a round. Where the estimate leans on the edge of the region in
// which every row has a limit, rounds end in a small cycle, and less is asked
// after some patience.
const (
	settled       = 1e-9
	patience      = 20
	nearlySettled = 1e-5
)

// tolerance is how close to the optimum the locations are taken, in their standard
// errors. Limits are known to 1e-12 of T, which leaves their sum of squares over
// 10 000 rows rounded by as much as a step of some 1e-7 standard errors changes it.
const tolerance = 1e-6

// alternate finds θ at given ψ and ψ at given θ in turn.
// settings are those of the first search; cold tells that it begins at start values
// and not near an earlier answer.
func (c *Calibration) alternate(lik *likelihood, settings leastsq.Settings, cold bool) (covPsi *mat.SymDense, err error) {
	variance := make([]float64, len(lik.obs))
	c.Converged, c.Usable = true, true
	if err := lik.evaluate(c.theta); err != nil {
		return nil, &ConvergenceError{c.Plan.Variant.Name(), "the start values have no prediction: " + err.Error(), err}
	}
	for round := 0; ; round++ {
		if err := lik.evaluate(c.theta); err != nil {
			return nil, err
		}
		lik.hold()
		lik.variances(c.psi, variance)
		before := append([]float64(nil), c.theta...)
		if len(c.theta) > 0 {
			res, err := leastsq.Minimize(c.objective(lik, variance), settings)
			if err != nil {
				return nil, &ConvergenceError{c.Plan.Variant.Name(), err.Error(), err}
			}
			c.Evaluations += res.Evaluations
			if cold && round == 0 && c.doubtful(lik, res) {
				// A bound, or the spinodal, may have stopped the search on its way to a better
				// place: look again from points spread over the bounds.
				wide := leastsq.Settings{Starts: wideStarts, Seed: c.Plan.Seed, Local: true, MaxIterations: wideSteps}
				if again, err := leastsq.Minimize(c.objective(lik, variance), wide); err == nil {
					c.Evaluations += again.Evaluations
					if again.Usable && again.Value < res.Value-1e-9*math.Abs(res.Value) {
						res = again
					}
				}
			}
			copy(c.theta, res.X)
			c.Converged, c.Usable, c.Reason = res.Converged, res.Usable, res.Reason
			// A search that cannot leave its start is a failure from the start values,
			// but not from where an earlier search ended: that point has a kink.
			c.Usable = c.Usable || round > 0 || !cold
			if !c.Usable {
				return nil, &ConvergenceError{c.Plan.Variant.Name(), res.Reason, nil}
			}
			settings = leastsq.Settings{Local: true, MaxIterations: mostSteps, Tolerance: tolerance}
		} else {
			c.Reason = "no location is free; only the spread was estimated"
		}
		moved := change(before, c.theta, lik.lay.theta)
		if len(c.psi) > 0 {
			if err := lik.evaluate(c.theta); err != nil {
				return nil, err
			}
			lik.hold()
			z, err := newLinearised(lik, c.theta, c.active(lik.lay))
			if err != nil {
				return nil, err
			}
			from := c.psi
			if cold && round == 0 {
				from = z.scatter(c.psi)
			}
			psi, cov, err := z.estimate(from, lik.lay.psi)
			if errors.Is(err, errSingular) {
				// Without determined locations there is no adjustment; the caller's
				// identifiability report says which parameters are to blame.
				c.warn("the spread is taken by maximum likelihood without adjustment for the estimated parameters, which the data do not determine")
				psi, cov, err = c.unadjusted(lik)
			}
			if err != nil {
				return nil, &ConvergenceError{c.Plan.Variant.Name(), "spread: " + err.Error(), err}
			}
			covPsi = cov
			moved = math.Max(moved, change(c.psi, psi, lik.lay.psi))
			copy(c.psi, psi)
		}
		if moved < settled || round >= patience && moved < nearlySettled {
			if c.Converged {
				c.Reason = fmt.Sprintf("converged in %d rounds of parameters and spread", round+1)
			}
			return covPsi, nil
		}
		if round == maxAlternations {
			c.Converged = false
			c.Reason = fmt.Sprintf("parameters and spreads still move by %.1e of their range after %d alternations", moved, round)
			return covPsi, nil
		}
	}
}

// wideStarts is the number of starts of the second look at a doubtful optimum, and
// wideSteps what each of them may take: a search that is on its way to a better place
// needs some twenty steps, one that creeps along the edge of the spinodal takes thousands
// to no end. Later rounds go on from the best of them, with mostSteps each.
const (
	wideStarts = 12
	wideSteps  = 40
	mostSteps  = 200
)

// doubtful tells an optimum at which a parameter stands at a bound or the spinodal
// stands in for a kinetic limit.
func (c *Calibration) doubtful(lik *likelihood, res *leastsq.Result) bool {
	for i := range lik.lay.theta {
		if atBound(res.X[i], &lik.lay.theta[i]) != "" {
			return true
		}
	}
	if lik.evaluate(res.X) != nil {
		return true
	}
	for i := range lik.limit {
		if lik.limit[i].atSpinodal {
			return true
		}
	}
	return false
}

// unadjusted is the estimate of ψ with the locations held.
func (c *Calibration) unadjusted(lik *likelihood) ([]float64, *mat.SymDense, error) {
	z, err := newLinearised(lik, c.theta, nil)
	if err != nil {
		return nil, nil, err
	}
	return z.estimate(c.psi, lik.lay.psi)
}

// change is the largest change of a parameter relative to the width of its bounds.
func change(a, b []float64, f []Free) float64 {
	worst := 0.0
	for i := range a {
		worst = math.Max(worst, math.Abs(a[i]-b[i])/(f[i].Upper-f[i].Lower))
	}
	return worst
}

func (c *Calibration) objective(lik *likelihood, variance []float64) leastsq.Objective {
	params := make([]leastsq.Param, len(c.theta))
	for i, f := range lik.lay.theta {
		params[i] = leastsq.Param{Name: f.Label(), Start: c.theta[i], Lower: f.Lower, Upper: f.Upper}
	}
	return leastsq.Objective{Params: params, Size: len(lik.obs), Rounding: lik.rounding(), Eval: func(theta, grad []float64, curv *mat.SymDense) (float64, error) {
		g := grad
		if g == nil && curv != nil {
			g = make([]float64, len(theta))
		}
		return lik.terms(theta, c.psi, variance, g, curv, observed)
	}}
}

// atBound tells at which bound a parameter stands.
func atBound(x float64, f *Free) string {
	tol := 1e-7 * (f.Upper - f.Lower)
	switch {
	case x <= f.Lower+tol:
		return "lower"
	case x >= f.Upper-tol:
		return "upper"
	}
	return ""
}

// active are the locations that are not at a bound.
func (c *Calibration) active(l *layout) []int {
	var a []int
	for i := range l.theta {
		if atBound(c.theta[i], &l.theta[i]) == "" {
			a = append(a, i)
		}
	}
	return a
}
