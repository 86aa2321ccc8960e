package fit

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"

	"gonum.org/v1/gonum/stat/distuv"

	"limsup/data/measure"
	"limsup/fit/jobs"
)

// Resampling says what a bootstrap draws.
type Resampling string

// The kinds of bootstrap.
const (
	ResampleRows   Resampling = "rows"
	ResampleFluid  Resampling = "fluid"  // whole fluids, with all their rows
	ResampleMethod Resampling = "method" // whole methods
	ResampleBatch  Resampling = "batch"  // whole batches
	// Parametric keeps the states of all rows and draws new readings, and new values of
	// pooled groups, from the calibrated model.
	Parametric Resampling = "parametric"
)

// Resamplings are the words that BootstrapOptions.Resample knows.
func Resamplings() []string {
	return []string{string(ResampleRows), string(ResampleFluid), string(ResampleMethod), string(ResampleBatch), string(Parametric)}
}

// BootstrapOptions are the settings of a bootstrap.
type BootstrapOptions struct {
	Resample Resampling
	// Replicates First to First + Count − 1 are drawn. Each has its own random numbers
	// from Seed and its index, so that parts of a bootstrap can be drawn apart.
	First, Count int
	Seed         uint64
	Queries      []Query // limits to predict with each replicate
	Workers      int     // 0: as many as processors
	// Progress, if not nil, is told of the replicates done, from one goroutine at a time.
	Progress func(done, total int)
}

// Replicate is one calibration on resampled data.
type Replicate struct {
	Index int
	// Values of the parameters of the calibration, in their order, and limits of the
	// queries in K; the flags say which of them this replicate has: a group that was not
	// drawn has no value.
	Values   []float64
	HasValue []bool
	Limits   []float64
	HasLimit []bool
	Failure  string // why the replicate could not be calibrated, or ""
}

// Resample calibrates on resampled data. Same options, same replicates, whatever
// the number of processors.
//
// Errors: *OptionError; a replicate that fails is no error but says so.
func (c *Calibration) Resample(o BootstrapOptions) ([]Replicate, error) {
	if !slices.Contains(Resamplings(), string(o.Resample)) {
		return nil, &OptionError{"resample", string(o.Resample), "one of rows, fluid, method, batch, parametric"}
	}
	if o.Count < 1 || o.Count > 1_000_000 || o.First < 0 {
		return nil, &OptionError{"bootstrap", fmt.Sprint(o.Count), "1 to 1000000 replicates"}
	}
	if by, ok := o.Resample.by(); ok {
		if names, _ := groups(c.Data.Observations, by); len(names) < 2 {
			return nil, &OptionError{"resample", string(o.Resample), fmt.Sprintf("data with two or more of them; here all rows have %s %q", by, names[0])}
		}
	}
	var done func(int)
	if o.Progress != nil {
		done = func(count int) { o.Progress(count, o.Count) }
	}
	out := make([]Replicate, o.Count)
	err := jobs.Run(context.Background(), o.Count, o.Workers, func(k int) { out[k] = c.replicate(&o, o.First+k) }, done)
	return out, err
}

func (r Resampling) by() (By, bool) {
	switch r {
	case ResampleFluid:
		return ByFluid, true
	case ResampleMethod:
		return ByMethod, true
	case ResampleBatch:
		return ByBatch, true
	}
	return Shared, false
}

// replicate draws and calibrates replicate number index.
func (c *Calibration) replicate(o *BootstrapOptions, index int) Replicate {
	n := len(c.Parameters)
	r := Replicate{Index: index, Values: make([]float64, n), HasValue: make([]bool, n), Limits: make([]float64, len(o.Queries)), HasLimit: make([]bool, len(o.Queries))}
	rng := rand.New(rand.NewPCG(o.Seed, uint64(index)))
	data := &Data{}
	truth := c.theta
	var err error
	switch by, grouped := o.Resample.by(); {
	case grouped:
		data.Observations = drawGroups(c.Data.Observations, by, rng)
	case o.Resample == ResampleRows:
		data.Observations = make([]Observation, len(c.Data.Observations))
		for i := range data.Observations {
			data.Observations[i] = c.Data.Observations[rng.IntN(len(c.Data.Observations))]
		}
	default:
		data.Observations, truth, err = c.draw(rng)
	}
	var again *Calibration
	if err == nil {
		again, err = Calibrate(data, c.redrawPriors(o.Resample, data.Observations, rng), Options{Workers: 1, Warm: c, quick: true, redraw: rng, parametric: o.Resample == Parametric})
	}
	if err == nil && !again.Converged {
		err = &ConvergenceError{c.Plan.Variant.Name(), again.Reason, nil}
	}
	if err != nil {
		r.Failure = err.Error()
		return r
	}
	at := make(map[string]float64, n)
	for i := range again.Parameters {
		at[again.Parameters[i].Label()] = again.Parameters[i].Value
	}
	for i := range c.Parameters {
		r.Values[i], r.HasValue[i] = at[c.Parameters[i].Label()]
		if i < len(truth) {
			// A pooled value was drawn anew: its error counts, about the estimate.
			r.Values[i] += c.theta[i] - truth[i]
		}
	}
	m := again.Model()
	for k := range o.Queries {
		q := o.Queries[k]
		q.OrSpinodal = true
		if _, found := m.values(&q); slices.ContainsFunc(found[:], func(l lookup) bool { return l.foreign }) {
			if _, before := c.Model().values(&q); !slices.ContainsFunc(before[:], func(l lookup) bool { return l.foreign }) {
				continue // what the limit depends on was not drawn
			}
		}
		if p, err := m.Predict(q); err == nil {
			r.Limits[k], r.HasLimit[k] = p.Temperature, true
		}
	}
	return r
}

// drawGroups draws whole groups; one that comes up again is a group of its own, so
// that a pooled spread sees as many groups as there were.
func drawGroups(obs []Observation, by By, rng *rand.Rand) []Observation {
	names, _ := groups(obs, by)
	rows := map[string][]int{}
	for i := range obs {
		g := groupOf(by, &obs[i].Row)
		rows[g] = append(rows[g], i)
	}
	var out []Observation
	times := map[string]int{}
	for range names {
		g := names[rng.IntN(len(names))]
		times[g]++
		for _, i := range rows[g] {
			o := obs[i]
			if k := times[g]; k > 1 {
				name := fmt.Sprintf("%s (%d)", g, k)
				switch by {
				case ByFluid:
					o.Key = name
				case ByMethod:
					o.Method = name
				case ByBatch:
					o.Batch = name
				}
			}
			out = append(out, o)
		}
	}
	return out
}

// draw draws new readings from the model, and the values of pooled groups behind
// them. A row that was intact at its temperature boils if the reading drawn lies
// below; a row that boiled keeps no oven limit.
func (c *Calibration) draw(rng *rand.Rand) ([]Observation, []float64, error) {
	lay, err := newLayout(&c.Plan, c.Data.Observations)
	if err != nil {
		return nil, nil, err
	}
	lik, err := newLikelihood(&c.Plan, c.Data.Observations, lay, 1)
	if err != nil {
		return nil, nil, err
	}
	theta := slices.Clone(c.theta)
	for _, p := range lay.pools {
		mean := 0.0
		if p.mean >= 0 {
			mean = theta[p.mean]
		}
		for _, g := range p.values {
			f := &lay.theta[g]
			theta[g] = clamp(mean+c.psi[p.spread]*rng.NormFloat64(), f.Lower, f.Upper)
		}
	}
	for i := range lik.guess {
		lik.guess[i] = c.Rows[i].Predicted
	}
	if err := lik.evaluate(theta); err != nil {
		return nil, nil, err
	}
	lik.hold()
	variance := lik.variances(c.psi, nil)
	ν := 0.0
	if n := c.noise(); n.Kind == Student {
		ν = n.Degrees
	}
	obs := slices.Clone(c.Data.Observations)
	for i := range obs {
		o := &obs[i]
		e := rng.NormFloat64()
		if ν > 0 {
			e /= math.Sqrt(distuv.ChiSquared{K: ν, Src: rng}.Rand() / ν)
		}
		e *= math.Sqrt(variance[i])
		if κ := lik.steepness[i]; κ > 0 {
			e += math.Log(rng.ExpFloat64()/o.Hazard) / κ
		}
		T := o.Temperature - lik.residual(i) + e
		if o.Outcome == measure.Boiled || T < o.Temperature {
			o.Temperature, o.Outcome = T, measure.Boiled
		}
		o.Start = lik.limit[i].T
	}
	return obs, theta, nil
}

// redrawPriors is the plan with new means of its priors, which are measurements like
// any other: about the estimates if parametric, else about the means given.
func (c *Calibration) redrawPriors(kind Resampling, obs []Observation, rng *rand.Rand) Plan {
	p := c.Plan
	if len(p.Priors) == 0 {
		return p
	}
	p.Priors = nil
	for _, r := range c.Plan.Priors {
		for i := range c.Parameters[:c.Locations] {
			e := &c.Parameters[i]
			if e.Name != r.Name || e.Role != RoleValue || r.Group != "" && r.Group != e.Group {
				continue
			}
			if e.Group != "" && !slices.ContainsFunc(obs, func(o Observation) bool { return groupOf(e.By, &o.Row) == e.Group }) {
				continue // not drawn
			}
			one := Prior{Name: r.Name, Group: e.Group, Mean: r.Mean, Spread: r.Spread}
			if kind == Parametric {
				one.Mean = e.Value
			}
			one.Mean += r.Spread * rng.NormFloat64()
			p.Priors = append(p.Priors, one)
		}
	}
	return p
}

// redrawAnchors does the same to anchors.
func (l *likelihood) redrawAnchors(rng *rand.Rand, at *Calibration, parametric bool) error {
	if len(l.anchors) == 0 {
		return nil
	}
	if parametric {
		if err := l.evaluate(at.theta); err != nil {
			return err
		}
	}
	for k := range l.anchors {
		a := &l.anchors[k]
		if parametric {
			r, _, err := a.residual(l.cells)
			if err != nil {
				return err
			}
			a.measured -= r * a.u
		}
		a.measured += a.u * rng.NormFloat64()
	}
	return nil
}
