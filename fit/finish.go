package fit

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/mat"
)

// This file turns converged parameters into the report of a calibration.

// finish computes uncertainties, residuals and summaries at the estimates.
func (c *Calibration) finish(lik *likelihood, covPsi *mat.SymDense) error {
	if err := lik.evaluate(c.theta); err != nil {
		return err
	}
	lik.hold()
	lay := lik.lay
	variance := lik.variances(c.psi, nil)
	p, k := len(c.theta), len(c.psi)
	c.Degrees = max(1, len(lik.obs)-p)

	curv := mat.NewSymDense(max(p, 1), nil)
	value, err := lik.terms(c.theta, c.psi, variance, make([]float64, p), curv)
	if err != nil {
		return err
	}
	c.LogLik, c.Information = -value, curv
	active := c.active(lay)
	c.Identity = identify(curv, active, lay, lik)

	for i := range lay.theta {
		c.Parameters = append(c.Parameters, c.estimate(&lay.theta[i], c.theta[i]))
	}
	for i := range lay.psi {
		c.Parameters = append(c.Parameters, c.estimate(&lay.psi[i], c.psi[i]))
	}
	c.Covariance = mat.NewSymDense(max(p+k, 1), nil)
	if cov, ok := c.Identity.covariance(); ok {
		for a, i := range active {
			for b := a; b < len(active); b++ {
				c.Covariance.SetSym(i, active[b], cov.At(a, b))
			}
			c.Parameters[i].U, c.Parameters[i].HasU = math.Sqrt(cov.At(a, a)), true
		}
	} else if len(active) > 0 {
		for _, i := range active {
			c.Parameters[i].Reason = c.Identity.Reason
		}
	}
	for i := range k {
		e := &c.Parameters[p+i]
		switch {
		case e.AtBound != "":
			e.Reason = "at its " + e.AtBound + " bound"
		case covPsi == nil:
			e.Reason = "the likelihood is not curved about it"
		default:
			e.U, e.HasU = math.Sqrt(covPsi.At(i, i)), true
			for j := i; j < k; j++ {
				if c.Parameters[p+j].AtBound == "" {
					c.Covariance.SetSym(p+i, p+j, covPsi.At(i, j))
				}
			}
		}
	}
	c.rows(lik, variance)
	c.Warnings = append(c.Warnings, c.Identity.Warnings...)
	c.warnEdge(lik)
	c.warnTension(lik)
	return nil
}

func (c *Calibration) estimate(f *Free, x float64) Estimate {
	e := Estimate{Name: f.Name, By: f.By, Group: f.Group, Role: f.Role, Unit: f.Unit, Value: x,
		Start: f.Start, Lower: f.Lower, Upper: f.Upper, AtBound: atBound(x, f)}
	if e.AtBound != "" {
		e.Reason = "at its " + e.AtBound + " bound"
	}
	return e
}

// rows fills residuals, leverages and their summaries.
func (c *Calibration) rows(lik *likelihood, variance []float64) {
	p := len(c.theta)
	noise := lik.law(c.psi)
	c.Rows = make([]RowResult, len(lik.obs))
	var ss, sum, sd2 float64
	n := 0
	for i := range lik.obs {
		l := &lik.limit[i]
		r := lik.residual(i)
		g := make([]float64, p)
		for a, at := range lik.lay.index[i] {
			if at >= 0 {
				g[at] += derivative(&l.d, a)
			}
		}
		d := lik.density(&noise, i, r, variance[i])
		row := RowResult{Index: i, Predicted: lik.obs[i].Temperature - r, Residual: r, Variance: variance[i],
			Standardised: r / math.Sqrt(variance[i]), Gradient: g, Log10Flux: l.lnJ / math.Ln10}
		row.Leverage = math.Min(1, d.irr*quadratic(c.Covariance, g))
		c.Rows[i] = row
		s := lik.lay.sdOf(i, c.psi)
		sd2 += s * s
		if lik.obs[i].Outcome == 0 {
			ss += r * r
			sum += r
			n++
		}
	}
	if n > 0 {
		c.RMSE, c.Bias = math.Sqrt(ss/float64(n)), sum/float64(n)
	}
	c.Spread = math.Sqrt(sd2 / float64(len(lik.obs)))
}

// quadratic is gᵀCg over the leading block of C that g covers.
func quadratic(c mat.Symmetric, g []float64) float64 {
	q := 0.0
	for i, a := range g {
		if a == 0 {
			continue
		}
		for j, b := range g {
			q += a * b * c.At(i, j)
		}
	}
	return math.Max(0, q)
}

// warnEdge names the fluids whose flux does not reach its target at the estimates,
// so that the spinodal stands in for their kinetic limit.
func (c *Calibration) warnEdge(lik *likelihood) {
	var names []string
	for i := range lik.obs {
		if lik.limit[i].atSpinodal && !slices.Contains(names, lik.obs[i].Record.Key) {
			names = append(names, lik.obs[i].Record.Key)
		}
	}
	if len(names) > 0 {
		c.warn("with these parameters the flux of " + join(names) + " does not reach its target before the spinodal, which stands in for the kinetic limit there; predict reports no kinetic limit for such states")
	}
}

// warnTension names the fluids whose surface tension fit is used beyond the range
// that its source states.
func (c *Calibration) warnTension(lik *likelihood) {
	if c.Plan.Variant.Limit != Kinetic || c.Plan.Variant.Tension != TensionCorrelation {
		return
	}
	var names []string
	for i := range lik.obs {
		r := lik.obs[i].Record
		if _, hi, ok := r.TensionRange(); ok && lik.limit[i].T > hi && !slices.Contains(names, r.Key) {
			names = append(names, r.Key)
		}
	}
	if len(names) > 0 {
		c.warn("the surface tension fit is used above the range that its source states for " + join(names))
	}
}
