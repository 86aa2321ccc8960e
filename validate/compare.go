package validate

import (
	"context"
	"fmt"
	"math"
	"sync"

	"limsup/data/fluid"
	"limsup/data/measure"
	"limsup/fit"
)

// CompareOptions are the settings of Compare.
type CompareOptions struct {
	Candidates []Candidate // nil: DefaultCandidates
	Folds      string      // "": DefaultFolds
	Seed       uint64
	// Keep is the share of the rows (of those that any candidate can predict) that a
	// candidate must be able to predict, 0 to 1. One that cannot is set aside with its
	// reason, so that the common rows do not shrink to its range.
	Keep   float64
	Nested bool
	// Progress, if not nil, is told of the work done so far, from one goroutine at a time.
	Progress func(done, total int)
}

// DefaultKeep is the usual share for CompareOptions.Keep.
const DefaultKeep = 0.9

// EntryKind tells what a member of a comparison is.
type EntryKind string

// The kinds of entry.
const (
	KindBaseline EntryKind = "baseline" // a published rule
	KindUntuned  EntryKind = "untuned"
	KindTuned    EntryKind = "tuned"
)

// Entry is one member of a comparison. All are judged on the same rows and folds.
type Entry struct {
	Name string // unique
	Kind EntryKind
	Note string // what a baseline is, or how a search was started

	Plan        fit.Plan         // not of a baseline
	Calibration *fit.Calibration // on all common rows; nil for a baseline
	K           float64          // free parameters, the spread included

	RMSE         float64 // on the rows that it was tuned to, K
	CVRMSE, CVSE float64 // on left-out rows, and standard error, K
	// Difference is CVRMSE less that of the best entry, DifferenceSE the standard error
	// of the paired difference, both in K and 0 for the best.
	Difference, DifferenceSE float64
	// Tied entries are not distinguishable from the best at one standard error.
	Tied bool

	AICc, BIC   float64
	HasCriteria bool

	Coverage    []Coverage // on left-out rows; nil where there is no uncertainty
	WorstFluid  string     // of largest left-out RMSE
	WorstRMSE   float64    // K
	CV          *CrossValidation
	UntunedName string // the entry of a tuned one without its tuning

	left scores
}

// Aside is a candidate or rule that takes no part, and why.
type Aside struct {
	Name   string
	Reason string
}

// Comparison ranks variants on their common rows.
type Comparison struct {
	Entries      []Entry // by rising CVRMSE
	Observations []fit.Observation
	Folds        *Folds
	Excluded     []measure.Exclusion // rows that are not common
	Aside        []Aside             // what could not be judged on the common rows
	Unfinished   []string            // what a cancelled context left undone
	Warnings     []measure.Warning
	Files        []measure.FileInfo
	Nested       *Nested
	NestedReason string // why there is no Nested where it was asked for
	Simplest     int    // index of the tied entry with the fewest parameters
	Verdict      string // a sentence
}

// member is a candidate on its way.
type member struct {
	Candidate
	name    string
	untuned string // name of the untuned form of a tuned one
	note    string
	data    *fit.Data
}

// Compare tunes every candidate to the rows that all of them can predict, predicts each
// fold by models tuned without it, and ranks candidates, their untuned forms and the
// published rules by the error on left-out rows.
//
// Cancelling the context leaves the entries that were finished, ranked, and lists the
// others in Unfinished.
//
// Errors: *fit.OptionError for settings, or data without common rows;
// *fluid.UnknownError.
func Compare(ctx context.Context, set *measure.Set, lib *fluid.Library, o CompareOptions) (*Comparison, error) {
	c, members, err := begin(set, lib, &o)
	if err != nil {
		return nil, err
	}
	c.evaluate(ctx, members, o)
	c.addBaselines()
	if len(c.Entries) == 0 {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
	}
	c.rank()
	return c, nil
}

// begin does all that comes before tuning: it completes the options and finds the
// members, their common rows and the folds.
func begin(set *measure.Set, lib *fluid.Library, o *CompareOptions) (*Comparison, []member, error) {
	if !(o.Keep >= 0 && o.Keep <= 1) {
		return nil, nil, &fit.OptionError{Option: "keep", Value: fmt.Sprintf("%.10g", o.Keep), Want: "a share from 0 to 1"}
	}
	if o.Candidates == nil {
		o.Candidates = DefaultCandidates()
	}
	c := &Comparison{Warnings: set.Warnings, Files: set.Files}
	members, err := c.common(set, lib, *o)
	if err != nil {
		return nil, nil, err
	}
	if o.Folds == "" {
		o.Folds = DefaultFolds(c.Observations)
	}
	if c.Folds, err = NewFolds(o.Folds, c.Observations, o.Seed); err != nil {
		return nil, nil, err
	}
	return c, members, nil
}

// rowPlace identifies a row of the measurements.
type rowPlace struct {
	file, where string
	line        int
}

// common finds the rows that the candidates have in common, and sets aside those that
// would leave too few.
func (c *Comparison) common(set *measure.Set, lib *fluid.Library, o CompareOptions) ([]member, error) {
	members, err := prepare(set, lib, o.Candidates)
	if err != nil {
		return nil, err
	}
	usable := map[rowPlace]int{} // rows that any can predict, with the number of the kept that can
	for _, m := range members {
		for i := range m.data.Observations {
			usable[placeOf(&m.data.Observations[i].Row)] = 0
		}
	}
	kept := members[:0]
	for _, m := range members {
		n := len(m.data.Observations)
		if float64(n) < o.Keep*float64(len(usable)) || n == 0 {
			c.Aside = append(c.Aside, Aside{m.name, fmt.Sprintf("predicts %d of %d rows; %s", n, len(usable), firstLost(m.data, usable))})
			continue
		}
		kept = append(kept, m)
		for i := range m.data.Observations {
			usable[placeOf(&m.data.Observations[i].Row)]++
		}
	}
	if len(kept) == 0 {
		return nil, &fit.OptionError{Option: "variant", Value: fmt.Sprint(len(members)), Want: "one or more that can predict the measurements" + firstAside(c.Aside)}
	}
	shared := func(r *measure.Row) bool { return usable[placeOf(r)] == len(kept) }
	c.exclude(set, kept, shared)
	for i := range kept {
		all := kept[i].data.Observations
		kept[i].data = kept[i].data.Subset(func(j int) bool { return shared(&all[j].Row) })
	}
	if c.Observations = kept[0].data.Observations; len(c.Observations) == 0 {
		return nil, &fit.OptionError{Option: "variant", Value: fmt.Sprint(len(kept)), Want: "variants with rows in common; choose fewer, or raise the share they must predict"}
	}
	return kept, nil
}

func placeOf(r *measure.Row) rowPlace { return rowPlace{r.File, r.Where, r.Line} }

// firstLost quotes the first row that a candidate cannot predict and another can.
func firstLost(d *fit.Data, usable map[rowPlace]int) string {
	for _, x := range d.Excluded {
		if _, ok := usable[rowPlace{x.File, x.Where, x.Line}]; ok {
			return "the first it cannot: " + x.String()
		}
	}
	return "none is usable"
}

func firstAside(a []Aside) string {
	if len(a) == 0 {
		return ""
	}
	return "; " + a[0].Name + ": " + a[0].Reason
}

// exclude lists, in the order of the data, the rows that are not common, with the
// reason that the first candidate without it gives.
func (c *Comparison) exclude(set *measure.Set, kept []member, shared func(*measure.Row) bool) {
	c.Excluded = append(c.Excluded, set.Excluded...)
	reason := map[rowPlace]measure.Exclusion{}
	for _, m := range kept {
		for _, x := range m.data.Excluded {
			at := rowPlace{x.File, x.Where, x.Line}
			if _, ok := reason[at]; !ok {
				reason[at] = x
			}
		}
	}
	for i := range set.Rows {
		if r := &set.Rows[i]; !shared(r) {
			c.Excluded = append(c.Excluded, reason[placeOf(r)])
		}
	}
}

// evaluate tunes and cross-validates the members, in parallel, each into its own element.
func (c *Comparison) evaluate(ctx context.Context, members []member, o CompareOptions) {
	tuned := 0
	for i := range members {
		if !members[i].UntunedOnly {
			tuned++
		}
	}
	folds := len(c.Folds.Names)
	work := progress{report: o.Progress, total: len(members) * (folds + 1)}
	if o.Nested {
		work.total += tuned * folds * (folds - 1) / 2
	}
	entries := make([]*Entry, len(members))
	errs := make([]error, len(members))
	parallel(len(members), len(members), func(i int) {
		if ctx.Err() == nil {
			entries[i], errs[i] = c.entry(ctx, &members[i], work.tick)
		}
	})
	var nested []member
	for i, e := range entries {
		switch {
		case e != nil:
			c.Entries = append(c.Entries, *e)
			nested = append(nested, members[i])
		case ctx.Err() != nil:
			c.Unfinished = append(c.Unfinished, members[i].name)
		default:
			c.Aside = append(c.Aside, Aside{members[i].name, errs[i].Error()})
		}
	}
	if o.Nested {
		c.nested(ctx, nested, func(m, j, k int, inner [][]float64) error {
			defer work.tick()
			return c.leaveTwoOut(&nested[m], c.Entries[m].Calibration, j, k, inner)
		})
	}
}

// progress counts work and reports it from one goroutine at a time.
type progress struct {
	sync.Mutex
	report      func(done, total int)
	done, total int
}

func (p *progress) tick() {
	if p.report == nil {
		return
	}
	p.Lock()
	defer p.Unlock()
	p.done++
	p.report(p.done, p.total)
}

// entry tunes and cross-validates one member.
func (c *Comparison) entry(ctx context.Context, m *member, tick func()) (*Entry, error) {
	cal, err := m.calibrate()
	tick()
	if err != nil {
		return nil, err
	}
	cv, err := crossValidate(ctx, m.data, m.Plan, c.Folds, cal, tick)
	if err != nil {
		return nil, err
	}
	return c.judge(m, cal, cv), nil
}

// calibrate tunes a member to all common rows.
func (m *member) calibrate() (*fit.Calibration, error) {
	return fit.Calibrate(m.data, m.Plan, fit.Options{Workers: 1})
}

// judge makes an entry of a member that was tuned to all rows and without each fold.
func (c *Comparison) judge(m *member, cal *fit.Calibration, cv *CrossValidation) *Entry {
	e := &Entry{Name: m.name, Kind: KindTuned, Note: m.note, UntunedName: m.untuned, Plan: m.Plan, Calibration: cal, RMSE: cal.RMSE, K: parameters(cal) + 1, CV: cv}
	if m.UntunedOnly {
		e.Kind = KindUntuned
	}
	e.left, _ = e.CV.scores()
	var rows []reading
	var unseen []float64
	for i := range cal.Rows {
		x, l := &cal.Rows[i], &e.CV.Rows[i]
		rows = append(rows, reading{x.Residual, l.Variance, !l.Boiled})
		if _, ok := l.Total(); ok && l.Boiled {
			unseen = append(unseen, l.Level)
		}
	}
	e.weigh(rows)
	e.Coverage = coverage(unseen)
	e.findWorst(c.Observations, func(i int) (float64, bool) { return e.CV.Rows[i].Tuned, e.CV.Rows[i].Boiled })
	return e
}

// weigh computes the information criteria.
func (e *Entry) weigh(rows []reading) {
	if lnL, _, ok := maximumLikelihood(rows); ok {
		e.AICc, e.BIC, e.HasCriteria = criteria(lnL, e.K, len(rows))
	}
}

// findWorst finds the fluid of largest left-out error.
func (e *Entry) findWorst(obs []fit.Observation, residual func(i int) (float64, bool)) {
	var names []string
	byFluid := map[string][]float64{}
	for i := range obs {
		if r, ok := residual(i); ok {
			k := obs[i].Record.Key
			if byFluid[k] == nil {
				names = append(names, k)
			}
			byFluid[k] = append(byFluid[k], r)
		}
	}
	for _, k := range names {
		if r := rmse(byFluid[k]); r > e.WorstRMSE || e.WorstFluid == "" {
			e.WorstFluid, e.WorstRMSE = k, r
		}
	}
}

// addBaselines judges the published rules on the common rows.
func (c *Comparison) addBaselines() {
	for _, b := range baselines() {
		e := Entry{Name: b.name, Kind: KindBaseline, Note: b.source, K: 1, left: scores{folds: len(c.Folds.Names)}}
		residual := make([]float64, len(c.Observations))
		var rows []reading
		var err error
		for i := range c.Observations {
			o := &c.Observations[i]
			var T float64
			if T, err = b.predict(o); err != nil {
				break
			}
			residual[i] = o.Temperature - T
			// A rule states no slope; the uncertainty of the set pressure is left out.
			rows = append(rows, reading{residual[i], float64(o.UTemperature * o.UTemperature), o.Outcome != measure.Boiled})
			if o.Outcome == measure.Boiled {
				e.left.e, e.left.fold = append(e.left.e, residual[i]), append(e.left.fold, c.Folds.Of[i])
			}
		}
		if err != nil {
			c.Aside = append(c.Aside, Aside{b.name, err.Error()})
			continue
		}
		e.RMSE = rmse(e.left.e)
		e.weigh(rows)
		e.Coverage = coverage(c.spreadElsewhere(rows))
		e.findWorst(c.Observations, func(i int) (float64, bool) { return residual[i], !rows[i].intact })
		c.Entries = append(c.Entries, e)
	}
}

// spreadElsewhere gives each row of a rule the level that it has under the spread found on
// the other folds.
func (c *Comparison) spreadElsewhere(rows []reading) []float64 {
	var out []float64
	for k := range c.Folds.Names {
		var others []reading
		for i, r := range rows {
			if c.Folds.Of[i] != k {
				others = append(others, r)
			}
		}
		_, s, ok := maximumLikelihood(others)
		if !ok {
			continue
		}
		for i, r := range rows {
			if c.Folds.Of[i] == k && !r.intact {
				out = append(out, level(r.e, math.Sqrt(float64(s*s)+r.v), float64(len(others))))
			}
		}
	}
	return out
}
