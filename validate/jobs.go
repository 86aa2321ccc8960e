package validate

import (
	"context"
	"errors"
	"fmt"
	"slices"
	"sync"

	"limsup/data/fluid"
	"limsup/data/measure"
	"limsup/fit"
)

// Jobs is a comparison laid out as independent tunings in a fixed order, so that some
// can be done here and others elsewhere. For each member there are: the tuning to all
// rows; the tunings without each fold; where the choice is nested, the tunings without
// each two folds. They are dealt in rounds, one job of each member after the other,
// because one member may take as long as all others together: so any stretch of the
// list holds its share of each. A job needs the tuning of its member to all rows as a
// start, and Run repeats it once for each member that it meets.
type Jobs struct {
	c       *Comparison
	o       CompareOptions
	members []member
	list    []job
}

// job is the tuning of a member without the folds j and k; -1 stands for none.
type job struct{ member, j, k int }

// JobResult is what a job found. Exactly one field is set.
type JobResult struct {
	Error  string       `json:"error,omitempty"` // why it found nothing
	Tuned  *TunedRows   `json:"tuned,omitempty"` // by the tuning to all rows
	Left   *LeftOutRows `json:"left_out,omitempty"`
	Nested []float64    `json:"nested,omitempty"` // residuals of the rows of both folds, in row order, K
}

// TunedRows is a calibration without its data, plan, matrices and identifiability, and
// with two columns of its rows.
type TunedRows struct {
	Calibration *fit.Calibration `json:"calibration"`
	Residual    []float64        `json:"residual_K"`
	Leverage    []float64        `json:"leverage"`
}

// LeftOutRows holds the columns of LeftOut for the rows of one fold, in row order.
type LeftOutRows struct {
	Tuned      []float64 `json:"tuned_K"`
	Untuned    []float64 `json:"untuned_K"`
	AtSpinodal []bool    `json:"untuned_at_spinodal"`
	U          []float64 `json:"standard_uncertainty_K"`
	HasU       []bool    `json:"has_uncertainty"`
	Level      []float64 `json:"level"`
	Variance   []float64 `json:"variance_K2"`
}

// ResultError reports results that do not belong to the jobs.
type ResultError struct {
	Job int // counted from 0; -1: their number
	Why string
}

func (e *ResultError) Error() string {
	if e.Job < 0 {
		return "results of a comparison: " + e.Why
	}
	return fmt.Sprintf("result of job %d: %s", e.Job+1, e.Why)
}

// NewJobs lays out the comparison that Compare makes of the same arguments.
//
// Errors: those of Compare.
func NewJobs(set *measure.Set, lib *fluid.Library, o CompareOptions) (*Jobs, error) {
	c, members, err := begin(set, lib, &o)
	if err != nil {
		return nil, err
	}
	w := &Jobs{c: c, o: o, members: members}
	folds := len(c.Folds.Names)
	round := func(j, k int, takesPart func(m *member) bool) {
		for m := range members {
			if takesPart(&members[m]) {
				w.list = append(w.list, job{m, j, k})
			}
		}
	}
	all := func(*member) bool { return true }
	round(-1, -1, all)
	for k := range folds {
		round(-1, k, all)
	}
	if !o.Nested || folds < 3 {
		return w, nil
	}
	for k := range folds {
		for j := range k {
			round(j, k, func(m *member) bool { return !m.UntunedOnly })
		}
	}
	return w, nil
}

// Len is the number of jobs.
func (w *Jobs) Len() int { return len(w.list) }

// Run does the jobs from first up to but not including last. A job that finds nothing
// has a result that says why.
//
// Errors: that of a cancelled context.
func (w *Jobs) Run(ctx context.Context, first, last int) ([]JobResult, error) {
	warm := make([]func() (*fit.Calibration, error), len(w.members))
	for m := range w.members {
		warm[m] = sync.OnceValues(w.members[m].calibrate)
	}
	work := progress{report: w.o.Progress, total: last - first}
	out := make([]JobResult, last-first)
	parallel(len(out), len(out), func(i int) {
		if ctx.Err() == nil {
			b := w.list[first+i]
			cal, err := warm[b.member]()
			if err == nil {
				out[i], err = w.run(b, cal)
			}
			if err != nil {
				out[i] = JobResult{Error: err.Error()}
			}
			work.tick()
		}
	})
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	return out, nil
}

// run does one job, from the calibration of its member on all rows.
func (w *Jobs) run(b job, cal *fit.Calibration) (JobResult, error) {
	m := &w.members[b.member]
	n := len(w.c.Observations)
	switch {
	case b.k < 0:
		return JobResult{Tuned: tunedRows(cal)}, nil
	case b.j < 0:
		untuned, err := fit.Untuned(m.Plan.Variant, m.Plan.Fixed...)
		if err != nil {
			return JobResult{}, err
		}
		cv := &CrossValidation{Folds: w.c.Folds, Rows: make([]LeftOut, n)}
		p := m.Plan
		p.References = cal.References
		if err := cv.leaveOut(m.data, p, b.k, untuned, cal, 1); err != nil {
			return JobResult{}, &FoldError{w.c.Folds.Names[b.k], err}
		}
		return JobResult{Left: w.leftOutRows(cv, b.k)}, nil
	}
	inner := make([][]float64, len(w.c.Folds.Names))
	inner[b.j], inner[b.k] = make([]float64, n), make([]float64, n)
	if err := w.c.leaveTwoOut(m, cal, b.j, b.k, inner); err != nil {
		return JobResult{}, err
	}
	var r JobResult
	w.eachOfTwo(b, func(i, outer int) { r.Nested = append(r.Nested, inner[outer][i]) })
	return r, nil
}

// eachOfTwo visits the rows of the two folds of a job in row order, with the other
// fold.
func (w *Jobs) eachOfTwo(b job, visit func(row, outer int)) {
	for i, f := range w.c.Folds.Of {
		switch f {
		case b.j:
			visit(i, b.k)
		case b.k:
			visit(i, b.j)
		}
	}
}

func tunedRows(cal *fit.Calibration) *TunedRows {
	c := *cal
	c.Plan, c.Data, c.Covariance, c.Information, c.Rows, c.Identity = fit.Plan{}, nil, nil, nil, nil, fit.Identity{}
	t := &TunedRows{Calibration: &c}
	for i := range cal.Rows {
		t.Residual, t.Leverage = append(t.Residual, cal.Rows[i].Residual), append(t.Leverage, cal.Rows[i].Leverage)
	}
	return t
}

// calibration puts back the data and plan of the member.
func (t *TunedRows) calibration(m *member) (*fit.Calibration, error) {
	n := len(m.data.Observations)
	c := *t.Calibration
	switch {
	case len(t.Residual) != n || len(t.Leverage) != n:
		return nil, fmt.Errorf("%d residuals and %d leverages of %d rows", len(t.Residual), len(t.Leverage), n)
	case c.Locations < 0 || c.Locations > len(c.Parameters):
		return nil, fmt.Errorf("%d locations among %d parameters", c.Locations, len(c.Parameters))
	}
	c.Plan, c.Data, c.Rows = m.Plan, m.data, make([]fit.RowResult, n)
	for i := range c.Rows {
		c.Rows[i] = fit.RowResult{Index: i, Residual: t.Residual[i], Leverage: t.Leverage[i], Predicted: m.data.Observations[i].Temperature - t.Residual[i]}
	}
	return &c, nil
}

func (w *Jobs) leftOutRows(cv *CrossValidation, k int) *LeftOutRows {
	r := &LeftOutRows{}
	for i := range cv.Rows {
		if x := &cv.Rows[i]; w.c.Folds.Of[i] == k {
			r.Tuned, r.Untuned = append(r.Tuned, x.Tuned), append(r.Untuned, x.Untuned)
			r.AtSpinodal = append(r.AtSpinodal, x.UntunedAtSpinodal)
			r.U, r.HasU = append(r.U, x.U), append(r.HasU, x.HasU)
			r.Level, r.Variance = append(r.Level, x.Level), append(r.Variance, x.Variance)
		}
	}
	return r
}

// fill puts the columns back into the rows of fold k.
func (r *LeftOutRows) fill(cv *CrossValidation, k int, obs []fit.Observation) error {
	n := 0
	for _, f := range cv.Folds.Of {
		if f == k {
			n++
		}
	}
	for _, have := range []int{len(r.Tuned), len(r.Untuned), len(r.AtSpinodal), len(r.U), len(r.HasU), len(r.Level), len(r.Variance)} {
		if have != n {
			return fmt.Errorf("a column of %d values for the %d rows of the fold", have, n)
		}
	}
	n = 0
	for i, f := range cv.Folds.Of {
		if f == k {
			cv.Rows[i] = LeftOut{Index: i, Fold: k, Tuned: r.Tuned[n], Untuned: r.Untuned[n], UntunedAtSpinodal: r.AtSpinodal[n],
				U: r.U[n], HasU: r.HasU[n], Boiled: obs[i].Outcome == measure.Boiled, Level: r.Level[n], Variance: r.Variance[n]}
			n++
		}
	}
	return nil
}

// Finish makes the comparison from the results of all jobs, in their order. It is
// the one that Compare returns, but that the calibrations of its entries lack what
// TunedRows lacks.
//
// Errors: *ResultError.
func (w *Jobs) Finish(results []JobResult) (*Comparison, error) {
	if len(results) != len(w.list) {
		return nil, &ResultError{-1, fmt.Sprintf("%d for %d jobs", len(results), len(w.list))}
	}
	at := make(map[job]int, len(w.list))
	for i, b := range w.list {
		at[b] = i
		if !results[i].answers(b) {
			return nil, &ResultError{i, "it is of another kind than the job"}
		}
	}
	c := *w.c
	var kept []member
	var origin []int // of the kept among the members
	for m := range w.members {
		cal, cv, err := w.recall(&c, m, at, results)
		var wrong *ResultError
		switch {
		case errors.As(err, &wrong):
			return nil, wrong
		case err != nil:
			c.Aside = append(slices.Clip(c.Aside), Aside{w.members[m].name, err.Error()})
		default:
			c.Entries = append(c.Entries, *c.judge(&w.members[m], cal, cv))
			kept, origin = append(kept, w.members[m]), append(origin, m)
		}
	}
	if w.o.Nested {
		for i, b := range w.list {
			if b.j < 0 || results[i].Error != "" {
				continue
			}
			n := 0
			w.eachOfTwo(b, func(int, int) { n++ })
			if have := len(results[i].Nested); have != n {
				return nil, &ResultError{i, fmt.Sprintf("%d residuals for the %d rows of two folds", have, n)}
			}
		}
		c.nested(context.Background(), kept, func(m, j, k int, inner [][]float64) error {
			b := job{origin[m], j, k}
			r := &results[at[b]]
			if r.Error != "" {
				return errors.New(r.Error)
			}
			n := 0
			w.eachOfTwo(b, func(i, outer int) {
				inner[outer][i] = r.Nested[n]
				n++
			})
			return nil
		})
	}
	c.addBaselines()
	c.rank()
	return &c, nil
}

// answers tells whether a result is of the kind of the job.
func (r *JobResult) answers(b job) bool {
	switch {
	case r.Error != "":
		return true
	case b.k < 0:
		return r.Tuned != nil && r.Tuned.Calibration != nil
	case b.j < 0:
		return r.Left != nil
	}
	return r.Nested != nil
}

// recall puts the results of a member together, or says why it has none.
func (w *Jobs) recall(c *Comparison, m int, at map[job]int, results []JobResult) (*fit.Calibration, *CrossValidation, error) {
	i := at[job{m, -1, -1}]
	if results[i].Error != "" {
		return nil, nil, errors.New(results[i].Error)
	}
	cal, err := results[i].Tuned.calibration(&w.members[m])
	if err != nil {
		return nil, nil, &ResultError{i, err.Error()}
	}
	cv := &CrossValidation{Folds: c.Folds, Rows: make([]LeftOut, len(c.Observations))}
	for k := range c.Folds.Names {
		i := at[job{m, -1, k}]
		if results[i].Error != "" {
			return nil, nil, errors.New(results[i].Error)
		}
		if err := results[i].Left.fill(cv, k, c.Observations); err != nil {
			return nil, nil, &ResultError{i, err.Error()}
		}
	}
	cv.judge()
	return cal, cv, nil
}
