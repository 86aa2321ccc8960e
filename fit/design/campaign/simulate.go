package campaign

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"

	"limsup/data/measure"
	"limsup/fit"
	"limsup/fit/jobs"
)

// This file checks a plan by carrying it out: readings are drawn at the planned
// states from the model, together with new readings of the rows at hand, the
// model is calibrated to them, and the scatter of the results is compared with
// what the plan promised.

// Realised is one quantity over the simulated campaigns.
type Realised struct {
	Label, Unit string
	Promised    float64 // standard uncertainty after the batch
	// SD is the standard deviation of the estimates about their mean, SE its own
	// standard error, SD/√(2(n−1)); Bias is their mean less the value drawn from.
	SD, SE, Bias float64
}

// Ratio is what was realised by what was promised.
func (r *Realised) Ratio() float64 { return r.SD / r.Promised }

// Check is the outcome of simulated campaigns.
type Check struct {
	Campaigns  int
	Failed     int    // campaigns that did not calibrate; not counted in the quantities
	FirstError string // of the first of them
	AtBound    int    // campaigns in which a parameter stood at a bound
	Quantities []Realised
	// Spaced are the same quantities with as many evenly spaced measurements.
	Spaced []Realised
	// Right is, with a rival, the share of campaigns in which the model was likelier
	// than the refitted rival; PromisedRight is what the plan says.
	Right, PromisedRight float64
	Notes                []string
}

// CheckOptions are settings of a check.
type CheckOptions struct {
	Campaigns int
	Seed      uint64
	Workers   int // goroutines; 0: as many as processors
	// Spaced also carries out as many evenly spaced measurements.
	Spaced bool
	// Done, if set, is called with the campaigns done and their number, from one
	// goroutine at a time.
	Done func(done, total int)
}

// truth is an observation with the law of its reading.
type truth struct {
	o        fit.Observation
	expected float64 // K
	sd       float64 // K
	intact   bool    // heating stops at the reading of o
	steep    float64 // 1/K, of a sample that boils at random, with survival noise
	hazard   float64 // at the limit
}

// Check carries the plan out Campaigns times. plan is that of the calibration. The
// result depends on the seed, not on the number of workers.
//
// Errors: *InputError for too few campaigns; those of predicting the rows; ctx.Err.
func (p *Plan) Check(ctx context.Context, plan fit.Plan, o CheckOptions) (*Check, error) {
	if o.Campaigns < 2 {
		return nil, &InputError{"check", "two campaigns or more"}
	}
	if p.Target.Rival != nil && p.Target.Rival.Calibration == nil && len(p.Target.Rival.Model.Parameters) > 0 {
		return nil, &InputError{"check", "data to calibrate the rival on"}
	}
	var base []truth
	if p.Data != nil && !p.Fresh {
		for i := range p.Data.Observations {
			t, err := p.truth(p.Data.Observations[i])
			if err != nil {
				return nil, err
			}
			base = append(base, t)
		}
	}
	plan = p.startAtModel(plan)
	c := &Check{Campaigns: o.Campaigns}
	total := o.Campaigns
	if o.Spaced {
		total *= 2
	}
	done := func(n int) {
		if o.Done != nil {
			o.Done(n, total)
		}
	}
	planned, err := p.simulate(ctx, plan, base, p.Count, o, done)
	if err != nil {
		return nil, err
	}
	c.Quantities = p.realised(planned, func(q *Quantity) float64 { return q.After })
	if o.Spaced {
		spaced, err := p.simulate(ctx, plan, base, p.SpacedCount, o, func(n int) { done(o.Campaigns + n) })
		if err != nil {
			return nil, err
		}
		c.Spaced = p.realised(spaced, func(q *Quantity) float64 { return q.Spaced })
	}
	right, judged := 0, 0
	for i := range planned {
		x := &planned[i]
		if x.err != nil {
			c.Failed++
			if c.FirstError == "" {
				c.FirstError = x.err.Error()
			}
			continue
		}
		if x.atBound {
			c.AtBound++
		}
		if x.judged {
			judged++
			if x.right {
				right++
			}
		}
	}
	if judged > 0 {
		c.Right, c.PromisedRight = float64(right)/float64(judged), p.Tell.RightAfter
	}
	for i := range p.Model.Parameters {
		if p.Model.Parameters[i].Role == fit.RolePoolMean {
			c.Notes = append(c.Notes, "the values of pooled groups are held at their estimates in the simulation, so that their realised scatter is smaller than the promised uncertainty, which counts them as drawn anew")
			break
		}
	}
	return c, nil
}

// truth predicts an observation and the scatter of its reading.
func (p *Plan) truth(o fit.Observation) (truth, error) {
	q := o.Query()
	x, err := p.Model.Sensitivity(q)
	if err != nil {
		return truth{}, fmt.Errorf("%s: %w", o.At(), err)
	}
	uP := o.UPressure * x.Slope
	v := float64(o.UTemperature*o.UTemperature) + float64(uP*uP) + float64(x.Spread*x.Spread)
	o.Start = x.Temperature
	t := truth{o: o, expected: x.Temperature, sd: math.Sqrt(v), intact: o.Outcome == measure.Intact}
	if timed := o.Volume > 0 && (o.HeatingRate > 0 || o.HoldingTime > 0 || o.Lifetime > 0); timed && o.Flux == 0 && boilsAtRandom(p.Model.Noise, &x) {
		t.steep, t.hazard = x.Steepness, math.Ln2 // a median
		if o.Lifetime > 0 {
			t.hazard = 1 // a mean waiting time
		}
	}
	return t, nil
}

// startAtModel lets a calibration start from the values of the model and hold the
// same references.
func (p *Plan) startAtModel(plan fit.Plan) fit.Plan {
	if p.Model.References != nil {
		plan.References = p.Model.References
	}
	plan.Restarts = 0
	return plan
}

// withGroups leaves out the offset where all rows are of one group: there is nothing
// to compare it with.
func withGroups(plan fit.Plan, rows []truth) fit.Plan {
	plan.Terms = slices.DeleteFunc(slices.Clone(plan.Terms), func(t fit.Term) bool {
		group := func(r *truth) string {
			return map[fit.By]string{fit.ByFluid: r.o.Record.Key, fit.ByMethod: r.o.Method, fit.ByBatch: r.o.Batch}[t.By]
		}
		return t.Name == fit.Offset && t.By != fit.Shared && !slices.ContainsFunc(rows, func(r truth) bool { return group(&r) != group(&rows[0]) })
	})
	return plan
}

// outcome is one simulated campaign.
type outcome struct {
	values        []float64 // of the quantities
	err           error
	atBound       bool
	right, judged bool
}

// simulate carries out the campaigns of one batch.
func (p *Plan) simulate(ctx context.Context, plan fit.Plan, base []truth, count []int, o CheckOptions, done func(int)) ([]outcome, error) {
	rows := append([]truth(nil), base...)
	for i, n := range count {
		for range n {
			r := &p.Readings[i]
			q := r.Query()
			t, err := p.truth(fit.Observation{Row: r.Row(), Record: r.Record, OwnFlux: q.OwnFlux, Target: q.Target})
			if err != nil {
				return nil, err
			}
			rows = append(rows, t)
		}
	}
	plan = withGroups(plan, rows)
	out := make([]outcome, o.Campaigns)
	err := jobs.Run(ctx, o.Campaigns, o.Workers, func(k int) {
		out[k] = p.campaign(plan, rows, rand.New(rand.NewPCG(o.Seed, uint64(k)+1)))
	}, done)
	return out, err
}

// campaign draws one set of readings and calibrates to it.
func (p *Plan) campaign(plan fit.Plan, rows []truth, rng *rand.Rand) outcome {
	d := &fit.Data{Observations: make([]fit.Observation, len(rows))}
	if p.Data != nil {
		d.Files = p.Data.Files
	}
	noise := drawer{p.Model.Noise, rng}
	for i := range rows {
		t := &rows[i]
		x := t.o
		reading := t.expected + noise.draw(t.sd) + noise.boil(t.steep, t.hazard)
		x.Outcome = measure.Boiled
		if t.intact && reading > t.o.Temperature {
			reading, x.Outcome = t.o.Temperature, measure.Intact // heating stopped there
		}
		x.Temperature = reading
		d.Observations[i] = x
	}
	var warm *fit.Calibration
	if p.Calibration != nil {
		warm = p.Calibration
	}
	c, err := fit.Calibrate(d, plan, fit.Options{Workers: 1, Warm: warm})
	if err != nil {
		return outcome{err: err}
	}
	if !c.Usable {
		return outcome{err: &fit.ConvergenceError{Variant: plan.Variant.Name(), Reason: c.Reason}}
	}
	out := outcome{}
	m := c.Model()
	for i := range c.Parameters {
		if e := &c.Parameters[i]; e.AtBound != "" && e.Name != fit.Spread && e.Name != fit.DegreesOfNoise && e.Role == fit.RoleValue {
			out.atBound = true
		}
	}
	for i := range p.Quantities {
		v, err := p.Quantities[i].in(c, m)
		if err != nil {
			return outcome{err: err}
		}
		out.values = append(out.values, v)
	}
	if r := p.Target.Rival; r != nil {
		out.right, out.err = p.likelier(c, d, r)
		out.judged = out.err == nil
	}
	return out
}

// likelier tells whether the model is likelier than its rival when both are
// calibrated to the same readings.
func (p *Plan) likelier(c *fit.Calibration, d *fit.Data, r *Rival) (bool, error) {
	plan := fit.Plan{Variant: r.Model.Variant, Fixed: r.Model.Settings, Noise: r.Model.Noise}
	var warm *fit.Calibration
	if r.Calibration != nil {
		plan, warm = r.Calibration.Plan, r.Calibration
		plan.References = r.Calibration.References
	} else {
		plan.Terms = []fit.Term{{Name: fit.Spread}}
	}
	other, err := fit.Calibrate(d, plan, fit.Options{Workers: 1, Warm: warm})
	if err != nil {
		return false, err
	}
	return c.LogLik > other.LogLik, nil
}

// in is the value of a quantity in a calibration.
func (q *Quantity) in(c *fit.Calibration, m *fit.Model) (float64, error) {
	if q.state != nil {
		x := q.state.query()
		x.OrSpinodal = true
		t, err := m.Predict(x)
		return t.Temperature, err
	}
	for i := range c.Parameters {
		if c.Parameters[i].Label() == q.Label {
			return c.Parameters[i].Value, nil
		}
	}
	return 0, &InputError{"check", "every planned parameter in the simulated campaigns; " + q.Label + " is on no measured row there"}
}

// realised sums up the campaigns that calibrated, in their order.
func (p *Plan) realised(out []outcome, promised func(*Quantity) float64) []Realised {
	var rs []Realised
	for i := range p.Quantities {
		q := &p.Quantities[i]
		r := Realised{Label: q.Label, Unit: q.Unit, Promised: promised(q)}
		n, sum := 0.0, 0.0
		for k := range out {
			if out[k].err == nil {
				n++
				sum += out[k].values[i]
			}
		}
		if n >= 2 {
			mean, ss := sum/n, 0.0
			for k := range out {
				if out[k].err == nil {
					d := out[k].values[i] - mean
					ss += d * d
				}
			}
			r.SD, r.Bias = math.Sqrt(ss/(n-1)), mean-q.Value
			r.SE = r.SD / math.Sqrt(2*(n-1))
			rs = append(rs, r)
		}
	}
	return rs
}
