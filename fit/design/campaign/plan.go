package campaign

import (
	"fmt"
	"math"
	"slices"

	"limsup/fit"
	"limsup/fit/design"
)

// Input is what a plan is made from.
type Input struct {
	Model       *fit.Model
	Calibration *fit.Calibration // nil where the model comes from a file
	Data        *fit.Data        // measured before; nil: not known, or the data of the calibration
	Candidates  []Candidate
	Target      Target
	N           int     // measurements of the batch
	Fresh       bool    // plan as if nothing had been measured
	Stop        float64 // share of gain below which a repeat is not worth it; 0 means 0.01
	MostRepeats int     // the most that are looked at; 0 means 100
	Seed        uint64  // of the chances that are found by drawing
}

// Reading is a candidate with what the model expects of it.
type Reading struct {
	Candidate
	Expected float64 // reading in K
	U        float64 // standard deviation of one reading about the limit, K
	Log10J   float64 // log₁₀ of the flux at the limit; with HasFlux
	HasFlux  bool
	// Difference is the limit of the rival less that of the model in K, with a rival.
	Difference float64
	Warnings   []string

	sensitivity fit.Sensitivity
	variance    float64 // K²
}

// Unusable is a candidate that cannot be planned with, and why.
type Unusable struct {
	Candidate
	Reason string
}

// Single is a candidate as the only next measurement.
type Single struct {
	Reading int     // index into Plan.Readings
	After   float64 // mean standard uncertainty after it
	Gain    float64 // share by which it lowers it
	Repeats int     // after which one more gains less than Input.Stop
	Bounded bool    // Repeats is only the most that was looked at
	AtStop  float64 // mean standard uncertainty after that many
	Why     string
}

// Step is one measurement of the batch, in the order in which to make them.
type Step struct {
	Reading int
	After   float64 // mean standard uncertainty after it
}

// Group is all that a batch measures at one reading.
type Group struct {
	Reading int
	Count   int
	Why     string
}

// Plan is a ranking of single measurements and a batch.
type Plan struct {
	Input
	Readings   []Reading
	Unusable   []Unusable
	Quantities []Quantity
	Parameters []Parameter
	Singles    []Single // the best first
	Steps      []Step
	Groups     []Group // the readings of the batch, in the order of their first step
	Count      []int   // per reading
	// Before, After and Spaced are the mean standard uncertainty that the criterion
	// makes small: now, after the batch, and after as many measurements spread
	// evenly over the candidates. With several quantities it is their geometric mean
	// (D) or root mean square (I).
	Before, After, Spaced float64
	SpacedCount           []int
	// Slack is the share of After that a better batch of as many could save at most.
	Slack     float64
	Exchanges int
	Verdict   Verdict
	Tell      *Tell // with a rival
	Notes     []string

	space *space
}

// Make ranks the candidates and chooses a batch.
//
// Errors: *InputError for what cannot be planned, or a model without free
// parameters; *design.SingularError; those of predicting the limits of a target.
func Make(in Input) (*Plan, error) {
	if in.Stop == 0 {
		in.Stop = 0.01
	}
	if in.MostRepeats == 0 {
		in.MostRepeats = 100
	}
	if in.Data == nil && in.Calibration != nil {
		in.Data = in.Calibration.Data
	}
	if !in.Model.Calibrated || len(in.Model.Parameters) == 0 {
		return nil, &InputError{"model", "a calibrated model with free parameters"}
	}
	p := &Plan{Input: in}
	if err := p.readings(); err != nil {
		return nil, err
	}
	s := newSpace(in.Model, in.Calibration, in.Fresh)
	p.space = s
	for i := range in.Target.Limits {
		if x, err := in.Model.Sensitivity(in.Target.Limits[i].query()); err == nil { // else quantities reports it
			s.reach(&x, true)
		}
	}
	for i := range p.Readings {
		s.reach(&p.Readings[i].sensitivity, false)
	}
	quantities, criterion, err := in.Target.quantities(s)
	if err != nil {
		return nil, err
	}
	p.Quantities = quantities
	own, batch := p.problem(criterion, boundsCount), p.problem(criterion, boundsSupport)
	single, chosen := own, batch
	if in.Target.Rival != nil {
		if single, err = p.tellProblem(boundsCount); err == nil {
			chosen, err = p.tellProblem(boundsSupport)
		}
		if err != nil {
			return nil, err
		}
	}
	if err = p.rank(single); err == nil {
		if err = p.choose(chosen); err == nil {
			err = p.uncertainties(own, batch)
		}
	}
	if err != nil {
		return nil, err
	}
	if in.Target.Rival != nil {
		p.tell()
	}
	if err := p.explain(own, batch); err != nil {
		return nil, err
	}
	p.Parameters, p.Notes = s.params, append(p.Notes, s.notes...)
	for i := range p.Parameters {
		if x := &p.Parameters[i]; x.Assumed && !x.Spread && x.diffuse == 0 && x.After > leaning*x.Before {
			p.Notes = append(p.Notes, fmt.Sprintf("%s: the batch leaves an uncertainty of the order of its bounds, where limits are no longer straight lines of it and promises are rough; measure more, or set a prior", x.Label))
		}
	}
	return p, p.verdict(own)
}

// leaning is the share of the uncertainty by the bounds above which a parameter
// reaches them within two standard uncertainties of its middle.
const leaning = 0.43

// readings predicts every candidate; those that the model cannot predict are listed.
func (p *Plan) readings() error {
	var bare []string // methods without a stated uncertainty
	for _, c := range p.Candidates {
		x, err := p.Model.Sensitivity(c.Query())
		if err != nil {
			p.Unusable = append(p.Unusable, Unusable{c, err.Error()})
			continue
		}
		if x.Temperature >= c.Record.CriticalTemperature.Value {
			p.Unusable = append(p.Unusable, Unusable{c, "the expected reading is above the critical temperature"})
			continue
		}
		uP := c.UPressure * x.Slope
		v := float64(c.UTemperature*c.UTemperature) + float64(uP*uP) + float64(x.Spread*x.Spread)
		if !(v > 0) {
			p.Unusable = append(p.Unusable, Unusable{c, "a reading without uncertainty: none is stated and the model has no spread"})
			continue
		}
		r := Reading{Candidate: c, Expected: x.Temperature, U: math.Sqrt(v), Log10J: x.Log10Flux, HasFlux: x.HasFlux, Warnings: x.Warnings, sensitivity: x, variance: v}
		switch n := p.Model.Noise; {
		case n.Kind == fit.Student && n.Degrees > 2:
			r.U *= math.Sqrt(n.Degrees / (n.Degrees - 2))
		case boilsAtRandom(n, &x):
			r.U = math.Hypot(r.U, math.Pi/math.Sqrt(6)/x.Steepness) // standard deviation of an extreme-value law of scale 1/κ
		}
		if rival := p.Target.Rival; rival != nil {
			y, err := rival.Model.Sensitivity(c.Query())
			if err != nil {
				p.Unusable = append(p.Unusable, Unusable{c, "not predictable with " + rival.Name + ": " + err.Error()})
				continue
			}
			r.Difference = y.Temperature - x.Temperature
		}
		if c.UTemperature == 0 && !slices.Contains(bare, c.Method) {
			bare = append(bare, c.Method)
			p.Notes = append(p.Notes, fmt.Sprintf("no uncertainty is stated for readings by %s, which are taken to scatter by the spread of the model alone", orUnnamed(c.Method)))
		}
		p.Readings = append(p.Readings, r)
	}
	if len(p.Readings) == 0 {
		reason := ""
		if len(p.Unusable) > 0 {
			reason = " (the first: " + p.Unusable[0].Reason + ")"
		}
		return &InputError{"candidates", "at least one that the model can predict" + reason}
	}
	return nil
}

func orUnnamed(method string) string {
	if method == "" {
		return "the method without a name"
	}
	return method
}

// problem is the choice in the space of the model, with bounds counted to a share.
func (p *Plan) problem(c design.Criterion, share float64) *design.Problem {
	q := &design.Problem{Prior: p.space.information(0, share), Criterion: c}
	for i := range p.Readings {
		r := &p.Readings[i]
		q.Candidates = append(q.Candidates, design.Candidate{Rows: p.space.factors(&r.sensitivity, r.variance), Most: r.Most})
	}
	return q
}

// rank judges the candidates one by one.
func (p *Plan) rank(q *design.Problem) error {
	now, err := q.Evaluate(nil)
	if err != nil {
		return err
	}
	p.Before = now.Mean()
	ranked, err := q.Rank()
	if err != nil {
		return err
	}
	for _, s := range ranked {
		p.Singles = append(p.Singles, Single{Reading: s.Candidate, After: math.Exp(s.Value), Gain: s.Gain})
	}
	for i := range p.Singles[:min(len(p.Singles), singlesFollowed)] {
		s := &p.Singles[i]
		r, err := q.Repeat(s.Reading, p.Stop, p.MostRepeats)
		if err != nil {
			return err
		}
		s.Repeats, s.Bounded, s.AtStop = r.Enough, r.Bounded, r.Mean[len(r.Mean)-1]
	}
	return nil
}

// choose finds the batch. Where it leaves more uncertainty than the bounds allow, the
// bounds hold.
func (p *Plan) choose(q *design.Problem) error {
	b, err := q.Choose(p.N)
	if err != nil {
		return err
	}
	p.Count, p.After, p.Slack, p.Exchanges = b.Count, math.Min(b.Mean(), p.Before), b.Slack(), b.Exchanges
	seen := map[int]bool{}
	for _, s := range b.Steps {
		p.Steps = append(p.Steps, Step{Reading: s.Candidate, After: math.Min(math.Exp(s.Value), p.Before)})
		if !seen[s.Candidate] {
			seen[s.Candidate] = true
			p.Groups = append(p.Groups, Group{Reading: s.Candidate, Count: p.Count[s.Candidate]})
		}
	}
	if p.SpacedCount, err = q.Spaced(p.N); err != nil {
		return err
	}
	e, err := q.Evaluate(p.SpacedCount)
	if err != nil {
		return err
	}
	p.Spaced = math.Min(e.Mean(), p.Before)
	return nil
}

// singlesFollowed is the number of single measurements, from the best, whose
// repeats are followed and which are explained.
const singlesFollowed = 20

// uncertainties fills those of parameters and quantities.
func (p *Plan) uncertainties(own, batch *design.Problem) error {
	var of [3]*design.Evaluation
	for i, count := range [][]int{nil, p.Count, p.SpacedCount} {
		q := batch
		if i == 0 {
			q = own
		}
		e, err := q.Evaluate(count)
		if err != nil {
			return err
		}
		of[i] = e
	}
	for i := range p.space.params {
		x := &p.space.params[i]
		x.Before, x.After = math.Sqrt(of[0].Covariance.At(i, i)), math.Sqrt(of[1].Covariance.At(i, i))
		if x.diffuse > 0 {
			x.Before = math.Min(x.Before, x.diffuse)
		}
		x.After = math.Min(x.After, x.Before)
	}
	for i := range p.Quantities {
		x := &p.Quantities[i]
		x.Before = of[0].Uncertainty(x.direction)
		x.After, x.Spaced = math.Min(of[1].Uncertainty(x.direction), x.Before), math.Min(of[2].Uncertainty(x.direction), x.Before)
	}
	return nil
}

// Worth is how many times as much information about a single quantity, or the mean
// one, the batch brings as the evenly spaced measurements do: about so many times
// more of these would be needed. ok is false where they bring none.
func (p *Plan) Worth() (times float64, ok bool) {
	gain := func(u float64) float64 { return 1/(u*u) - 1/(p.Before*p.Before) }
	a, b := gain(p.After), gain(p.Spaced)
	if !(b > 1e-6*a) {
		return 0, false
	}
	return a / b, true
}

// Factor is how many times larger the mean standard uncertainty is after as many
// evenly spaced measurements.
func (p *Plan) Factor() float64 { return p.Spaced / p.After }
