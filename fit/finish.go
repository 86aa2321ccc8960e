package fit

import (
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/gonum/mat"
)

// This file turns converged parameters into the report of a calibration.

// finish computes uncertainties and, with rows, residuals and summaries at the estimates.
func (c *Calibration) finish(lik *likelihood, covPsi *mat.SymDense, rows bool) error {
	if err := lik.evaluate(c.theta); err != nil {
		return err
	}
	lik.hold()
	lay := lik.lay
	variance := lik.variances(c.psi, nil)
	p, k := len(c.theta), len(c.psi)
	c.Degrees = max(1, len(lik.obs)-p)

	if noise := lik.law(c.psi); noise.student {
		lik.misfit = lik.misfitOf(&noise, variance, p)
	}
	curv := mat.NewSymDense(max(p, 1), nil)
	value, err := lik.terms(c.theta, c.psi, variance, make([]float64, p), curv, expected)
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
	c.satterthwaite(lik, active, covPsi)
	if rows {
		c.rows(lik, variance, len(active))
	}
	c.Warnings = append(c.Warnings, c.Identity.Warnings...)
	c.warnNoise(lik)
	c.warnInfluence()
	c.warnEdge(lik)
	c.warnKink(lik)
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
func (c *Calibration) rows(lik *likelihood, variance []float64, active int) {
	noise := lik.law(c.psi)
	p := len(c.theta)
	gradients := make([]float64, p*len(lik.obs)) // one block for all rows
	c.Rows = make([]RowResult, len(lik.obs))
	var ss, sum, sd2 float64
	n := 0
	for i := range lik.obs {
		l := &lik.limit[i]
		r := lik.residual(i)
		d := lik.density(&noise, i, r, variance[i])
		row := RowResult{Index: i, Predicted: lik.obs[i].Temperature - r, Residual: r, Variance: variance[i],
			Standardised: r / math.Sqrt(variance[i]), Log10Flux: l.lnJ / math.Ln10}
		row.Gradient, gradients = gradients[:p:p], gradients[p:]
		for a, at := range lik.lay.index[i] {
			if at >= 0 {
				row.Gradient[at] += derivative(&l.d, a)
			}
		}
		row.Leverage, row.Influence = c.influence(lik, i, active, d)
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

// satterthwaite fills the degrees of freedom of the variances: ν = 2V²/Var V, with
// Var V from the covariance of the spreads and the change of V with each of them.
func (c *Calibration) satterthwaite(lik *likelihood, active []int, covPsi *mat.SymDense) {
	p, k := len(c.theta), len(c.psi)
	for i := range k {
		if e := &c.Parameters[p+i]; e.HasU && e.U > 0 {
			e.Degrees = math.Min(math.Max(1, e.Value*e.Value/(2*e.U*e.U)), manyDegrees)
		}
	}
	if _, ok := c.Identity.covariance(); !ok {
		return
	}
	slopes := make([][]float64, k) // ∂C_ii/∂ψ_j, by j
	for j := range k {
		if covPsi == nil || !c.Parameters[p+j].HasU {
			continue
		}
		h := 1e-3 * c.psi[j]
		var diag [2][]float64
		for side, s := range [2]float64{h, -h} {
			psi := append([]float64(nil), c.psi...)
			psi[j] += s
			curv := mat.NewSymDense(max(p, 1), nil)
			if _, err := lik.terms(c.theta, psi, lik.variances(psi, nil), make([]float64, p), curv, expected); err != nil {
				return // cannot be: θ was evaluated
			}
			diag[side] = inverseDiagonal(curv, active)
		}
		if diag[0] == nil || diag[1] == nil {
			continue
		}
		slopes[j] = make([]float64, len(active))
		for a := range active {
			slopes[j][a] = (diag[0][a] - diag[1][a]) / (2 * h)
		}
	}
	for a, i := range active {
		v := 0.0
		for x := range k {
			for y := range k {
				if slopes[x] != nil && slopes[y] != nil {
					v += slopes[x][a] * slopes[y][a] * covPsi.At(x, y)
				}
			}
		}
		e := &c.Parameters[i]
		e.Degrees = manyDegrees
		if v > 0 {
			e.Degrees = math.Min(math.Max(1, 2*math.Pow(e.U, 4)/v), manyDegrees)
		}
	}
}

// inverseDiagonal is the diagonal of the inverse of the active block, nil where there
// is none.
func inverseDiagonal(h *mat.SymDense, active []int) []float64 {
	k := len(active)
	s, scale := mat.NewSymDense(max(k, 1), nil), make([]float64, k)
	for a, i := range active {
		scale[a] = math.Sqrt(h.At(i, i))
	}
	for a, i := range active {
		for b := a; b < k; b++ {
			s.SetSym(a, b, h.At(i, active[b])/(scale[a]*scale[b]))
		}
	}
	var c mat.Cholesky
	if k == 0 || !c.Factorize(s) {
		return nil
	}
	inv := mat.NewSymDense(k, nil)
	if err := c.InverseTo(inv); err != nil && !isCondition(err) {
		return nil
	}
	out := make([]float64, k)
	for a := range out {
		out[a] = inv.At(a, a) / (scale[a] * scale[a])
	}
	return out
}

// noise is that of the plan with estimated degrees of freedom.
func (c *Calibration) noise() Noise {
	n := c.Plan.Noise
	for i := range c.Parameters {
		if e := &c.Parameters[i]; e.Name == DegreesOfNoise {
			n.Degrees = e.Value
		}
	}
	return n
}

// warnNoise counts the rows of survival noise that have no law of boiling.
func (c *Calibration) warnNoise(lik *likelihood) {
	if c.Plan.Noise.Kind != Survival {
		return
	}
	without := 0
	for _, κ := range lik.steepness {
		if κ == 0 {
			without++
		}
	}
	if without > 0 {
		c.warn(fmt.Sprintf("%d of %d rows have no survival probability of their own (no volume with a heating rate, holding time or lifetime, or the spinodal in place of a limit) and count as gaussian", without, len(lik.steepness)))
	}
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

// kink is the distance from the spinodal in K within which a kinetic limit is about to
// cease. Measured on the demonstration data: searches that stopped for it had one at
// 0.0005 K to 0.003 K.
const kink = 0.01

// warnKink explains a search that no step led on. Where the flux of a row reaches its target
// only just before the spinodal, the limit turns within thousandths of a kelvin from that of
// the flux to the spinodal, and the likelihood has a kink, on which its largest value may lie.
func (c *Calibration) warnKink(lik *likelihood) {
	if c.Converged || c.Plan.Variant.Limit != Kinetic {
		return
	}
	m := c.Model()
	var names []string
	n := 0
	for i := range lik.obs {
		o := &lik.obs[i]
		if lik.limit[i].atSpinodal {
			continue
		}
		q := o.Query()
		ph, err := NewEquationPhysics(m.Variant, o.Record, m.Values(&q))
		if err != nil {
			continue
		}
		if s, err := ph.spinodal(o.Pressure); err != nil || s.T-lik.limit[i].T > kink {
			continue
		}
		n++
		if !slices.Contains(names, o.Record.Key) {
			names = append(names, o.Record.Key)
		}
	}
	if n > 0 {
		c.warn(fmt.Sprintf("the search ended on a kink: the limits of %d of %d rows (%s) lie within %g K of the spinodal, where the flux only just reaches its target. The data ask for hotter limits than these parameters allow, and uncertainties are not to be trusted there; an offset by method, or another parameter, may take up the difference", n, len(lik.obs), join(names), kink))
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
