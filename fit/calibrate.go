package fit

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"

	"gonum.org/v1/gonum/mat"

	"limsup/data/measure"
	"limsup/fit/leastsq"
)

// Options are settings of a calibration that do not change its estimates.
type Options struct {
	Workers int // goroutines over rows; 0: as many as processors
	// Warm starts the search from an earlier calibration of the same plan.
	Warm *Calibration
	// WithoutRows leaves out Rows and their summaries RMSE, Bias and Spread, for a
	// calibration that only serves to predict.
	WithoutRows bool

	quick bool // values only: no uncertainties, rows or warnings
	// redraw, if not nil, adds errors to anchors: about the equation of Warm if
	// parametric, else about the correlations.
	redraw     *rand.Rand
	parametric bool
}

// Estimate is one estimated parameter.
type Estimate struct {
	Name  string
	By    By
	Group string
	Role  Role
	Unit  string
	Value float64
	// U is the standard uncertainty; HasU is false where there is none, for the
	// reason that Reason gives.
	U       float64
	HasU    bool
	Reason  string
	AtBound string // "lower", "upper", or ""
	// Degrees of freedom of U², by Satterthwaite's formula; 0 where it is not known.
	Degrees float64

	Start, Lower, Upper float64
}

// Label names the estimate: "slope[n-pentane]".
func (e *Estimate) Label() string {
	f := Free{Name: e.Name, Group: e.Group, Role: e.Role}
	return f.Label()
}

// RowResult is one observation beside its prediction.
type RowResult struct {
	Index        int       // into Calibration.Data.Observations
	Predicted    float64   // limit in K, offset included
	Residual     float64   // measured − predicted, K
	Variance     float64   // of the residual: stated uncertainties and spread, K²
	Standardised float64   // residual/√variance
	Leverage     float64   // share of its own reading in its prediction, 0 to 1
	Log10Flux    float64   // log₁₀J at the predicted limit; 0 for a spinodal
	Gradient     []float64 // ∂Predicted/∂θ for the locations
	Influence    Influence
}

// Calibration is the result of tuning a variant to measurements.
type Calibration struct {
	Plan Plan
	Data *Data

	// Locations come first, then the spreads, as in Covariance.
	Parameters []Estimate
	// Covariance of the locations and the spreads; rows and columns without an
	// uncertainty are zero.
	Covariance *mat.SymDense
	Locations  int // number of locations
	// Information is the curvature of −ln L with respect to the locations at the
	// estimates, also where it is singular and there is no covariance.
	Information *mat.SymDense

	Rows []RowResult

	RMSE, Bias float64 // of the residuals of boiled rows, K
	Spread     float64 // root mean square of the spreads of the rows, K
	LogLik     float64 // ln of the likelihood at the estimates
	Degrees    int     // rows less locations

	References map[string]string // of offsets: "method" → the reference method
	Identity   Identity          // what can and what cannot be told apart

	Converged, Usable bool
	Reason            string
	Warnings          []string
	Evaluations       int // of all rows

	theta, psi []float64
}

// Calibrate tunes the plan's variant to data made by Prepare with the same plan.
//
// Errors: *OptionError for a plan that the data cannot serve, *TooFewError,
// *ConvergenceError when no usable parameters were found, *RowError.
func Calibrate(d *Data, p Plan, o Options) (*Calibration, error) {
	p, err := p.Complete()
	if err != nil {
		return nil, err
	}
	if p.DefaultTerms && len(d.Observations) > 0 && d.OwnFlux() == len(d.Observations) {
		at := slices.IndexFunc(p.Terms, func(t Term) bool { return t.Name == Threshold })
		switch {
		case at < 0: // the plan of an earlier calibration
		case p.fixed(Prefactor): // which leaves the spread alone
			p.Terms = slices.Delete(p.Terms, at, at+1)
		default:
			p.Terms[at].Name = Prefactor
		}
	}
	if len(d.Observations) == 0 {
		return nil, &TooFewError{0, len(p.Terms), "no usable row" + firstReason(d.Excluded)}
	}
	lay, err := newLayout(&p, d.Observations)
	if err != nil {
		return nil, err
	}
	if err := enough(lay, d, &p); err != nil {
		return nil, err
	}
	lik, err := newLikelihood(&p, d.Observations, lay, o.Workers)
	if err != nil {
		return nil, err
	}
	if o.redraw != nil {
		if err := lik.redrawAnchors(o.redraw, o.Warm, o.parametric); err != nil {
			return nil, err
		}
	}
	c := &Calibration{Plan: p, Data: d, Locations: len(lay.theta), References: lay.references}
	first := leastsq.Settings{Starts: p.Restarts + 1, Seed: p.Seed, Local: true, MaxIterations: mostSteps, Tolerance: tolerance}
	settings := first
	c.theta, c.psi = starts(lay.theta), starts(lay.psi)
	if o.Warm != nil {
		// Near an earlier answer a local search is enough.
		o.Warm.seed(lay.theta, c.theta)
		o.Warm.seed(lay.psi, c.psi)
		settings = leastsq.Settings{Local: true, MaxIterations: mostSteps, Tolerance: tolerance}
	}
	covPsi, err := c.alternate(lik, settings, o.Warm == nil)
	for _, s := range []leastsq.Settings{first, {Starts: p.Restarts + 1, Seed: p.Seed, Tolerance: tolerance}} {
		if err == nil {
			break
		}
		// From the start values; at last with the engine's own second attempts.
		c.theta, c.psi, c.Warnings = starts(lay.theta), starts(lay.psi), nil
		copy(lik.guess, startGuesses(d.Observations))
		covPsi, err = c.alternate(lik, s, true)
	}
	if err != nil {
		return nil, err
	}
	if o.quick {
		for i := range lay.theta {
			c.Parameters = append(c.Parameters, c.estimate(&lay.theta[i], c.theta[i]))
		}
		for i := range lay.psi {
			c.Parameters = append(c.Parameters, c.estimate(&lay.psi[i], c.psi[i]))
		}
		return c, nil
	}
	if err := c.finish(lik, covPsi, !o.WithoutRows); err != nil {
		return nil, err
	}
	return c, nil
}

// seed copies the estimates of c into x for the parameters that both have.
func (c *Calibration) seed(free []Free, x []float64) {
	at := make(map[string]float64, len(c.Parameters))
	for i := range c.Parameters {
		at[c.Parameters[i].Label()] = c.Parameters[i].Value
	}
	for i := range free {
		if v, ok := at[free[i].Label()]; ok {
			x[i] = clamp(v, free[i].Lower, free[i].Upper)
		}
	}
}

// firstReason quotes an exclusion where it explains why nothing is left.
func firstReason(e []measure.Exclusion) string {
	if len(e) == 0 {
		return ""
	}
	return fmt.Sprintf(" (%d excluded; the first: %s)", len(e), e[0].String())
}

// enough refuses data that cannot determine the parameters by their number alone.
func enough(l *layout, d *Data, p *Plan) error {
	n, k := len(d.Observations), len(l.theta)+len(l.psi)
	pooled, informed := 0, len(l.priors)+anchorPoints*len(p.Anchors)
	for _, pl := range l.pools {
		pooled += len(pl.values)
	}
	if n+pooled+informed < k {
		return &TooFewError{n, k, "measure more, or free fewer parameters"}
	}
	if n == len(l.theta)+len(l.psi)-1 && len(l.psi) > 0 && len(l.priors) == 0 && len(p.Anchors) == 0 && pooled == 0 || n == 1 && len(l.psi) > 0 {
		return &TooFewError{n, k, "the spread cannot be told from residuals that are all zero; fix it (--fix spread=VALUE) or measure more"}
	}
	touched := l.touched(d.Observations)
	for i, ok := range touched {
		if !ok {
			f := l.theta[i]
			why := "it acts on no row"
			if f.Name == Threshold {
				why = "every row carries its own flux, which the threshold does not move; tune prefactor instead"
			}
			return &OptionError{"tune", f.Label(), why}
		}
	}
	sd := 0.0
	for o := range l.sd {
		sd = math.Max(sd, l.sd[o])
	}
	for o := range d.Observations {
		r := &d.Observations[o]
		if l.spread[o] < 0 && l.sd[o] == 0 && !(r.UTemperature > 0) {
			return &OptionError{"fix", "spread=0", fmt.Sprintf("a stated uncertainty in every row; %s has none", r.At())}
		}
	}
	return nil
}

func (c *Calibration) warn(s string) {
	for _, w := range c.Warnings {
		if w == s {
			return
		}
	}
	c.Warnings = append(c.Warnings, s)
}
