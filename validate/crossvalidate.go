package validate

import (
	"context"
	"fmt"
	"math"
	"runtime"
	"sync"

	"gonum.org/v1/gonum/stat/distuv"

	"limsup/data/measure"
	"limsup/fit"
	"limsup/fit/jobs"
)

// Verdict says whether tuning helps on data that it has not seen.
type Verdict string

// The verdicts.
const (
	Better Verdict = "better"
	NoGain Verdict = "no measurable gain"
	Worse  Verdict = "worse"
)

// LeftOut is one observation predicted by a model that was tuned without its fold.
type LeftOut struct {
	Index   int // of the observation
	Fold    int
	Tuned   float64 // residual of the tuned model, K
	Untuned float64 // residual of the untuned model, K
	// UntunedAtSpinodal is set where the untuned model has no kinetic limit, so that the
	// spinodal stands in for it.
	UntunedAtSpinodal bool
	U                 float64 // standard uncertainty of the tuned prediction, spread included, K
	HasU              bool
	Boiled            bool    // intact rows are predicted but do not enter the errors
	Level             float64 // of the narrowest interval of the prediction that holds the reading
	Variance          float64 // of the reading from its stated uncertainties, K²
}

// Total is the standard uncertainty of the tuned residual in K: of the prediction with
// its spread, and of the reading as stated. ok is false where the model has none.
func (l *LeftOut) Total() (u float64, ok bool) {
	u = math.Sqrt(float64(l.U*l.U) + l.Variance)
	return u, l.HasU && u > 0
}

// CrossValidation compares the tuned model with the untuned one on rows that were
// left out of the tuning.
type CrossValidation struct {
	Folds       *Folds
	Rows        []LeftOut
	RMSE        float64 // of the tuned model on left-out rows, K
	UntunedRMSE float64 // K
	Difference  float64 // RMSE − UntunedRMSE, K: negative is better
	// DifferenceSE is the standard error of the difference, from the scatter of the
	// paired contributions of the folds.
	DifferenceSE float64
	Verdict      Verdict
	// Reason says how the verdict came about.
	Reason string
}

// FoldError reports a fold that could not be computed.
type FoldError struct {
	Fold string
	Err  error
}

func (e *FoldError) Error() string {
	return "cross-validation without " + e.Fold + ": " + e.Err.Error()
}

// Unwrap returns the cause.
func (e *FoldError) Unwrap() error { return e.Err }

// CrossValidate tunes the plan anew without each fold and predicts the fold. warm, if
// not nil, is the calibration on all rows: a start for the search, and
// the reference of offsets.
//
// Errors: *FoldError for the first fold that could not be tuned or predicted.
func CrossValidate(d *fit.Data, p fit.Plan, f *Folds, warm *fit.Calibration) (*CrossValidation, error) {
	return crossValidate(context.Background(), d, p, f, warm, func() {})
}

// CrossValidateTelling is CrossValidate that tells how many folds are done, from one
// goroutine at a time.
func CrossValidateTelling(d *fit.Data, p fit.Plan, f *Folds, warm *fit.Calibration, progress func(done, total int)) (*CrossValidation, error) {
	var mu sync.Mutex
	done := 0
	return crossValidate(context.Background(), d, p, f, warm, func() {
		mu.Lock()
		defer mu.Unlock()
		done++
		progress(done, len(f.Names))
	})
}

// crossValidate is CrossValidate that can be stopped and calls tick after each fold.
func crossValidate(ctx context.Context, d *fit.Data, p fit.Plan, f *Folds, warm *fit.Calibration, tick func()) (*CrossValidation, error) {
	untuned, err := fit.Untuned(p.Variant, p.Fixed...)
	if err != nil {
		return nil, err
	}
	cv := &CrossValidation{Folds: f, Rows: make([]LeftOut, len(d.Observations))}
	if warm != nil { // what an offset is counted from must not change with the rows left out
		p.References = warm.References
	}
	errs := make([]error, len(f.Names))
	// Large folds are taken one at a time, each on all processors, which needs the memory
	// of one.
	at, within := len(f.Names), 1
	if len(d.Observations) >= largeData {
		at, within = 1, 0
	}
	parallel(len(f.Names), at, func(k int) {
		if ctx.Err() == nil {
			if err := cv.leaveOut(d, p, k, untuned, warm, within); err != nil {
				errs[k] = &FoldError{f.Names[k], err}
			}
			tick()
		}
	})
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	for _, err := range errs {
		if err != nil {
			return nil, err
		}
	}
	cv.judge()
	return cv, nil
}

// largeData is the number of rows from which on rows, not folds, are worked on in
// parallel.
const largeData = 20000

// parallel runs n independent jobs, at most so many at a time, on the processors there
// are.
func parallel(n, most int, job func(k int)) {
	_ = jobs.Run(context.Background(), n, min(most, runtime.GOMAXPROCS(0)), job, nil) // nothing ends this context
}

// leaveOut fills the rows of fold k.
func (cv *CrossValidation) leaveOut(d *fit.Data, p fit.Plan, k int, untuned *fit.Model, warm *fit.Calibration, workers int) error {
	train := d.Subset(func(i int) bool { return cv.Folds.Of[i] != k })
	c, err := fit.Calibrate(train, p, fit.Options{Workers: workers, Warm: warm, WithoutRows: true})
	if err != nil {
		return err
	}
	m := c.Model()
	var rows []int
	for i := range d.Observations {
		if cv.Folds.Of[i] == k {
			rows = append(rows, i)
		}
	}
	blocks := 1
	if workers != 1 {
		blocks = runtime.GOMAXPROCS(0)
	}
	errs := make([]error, blocks)
	parallel(blocks, blocks, func(b int) {
		for _, i := range rows[b*len(rows)/blocks : (b+1)*len(rows)/blocks] {
			if cv.Rows[i], errs[b] = leftOut(&d.Observations[i], m, untuned); errs[b] != nil {
				return
			}
			cv.Rows[i].Index, cv.Rows[i].Fold = i, k
		}
	})
	for _, err := range errs {
		if err != nil {
			return err
		}
	}
	return nil
}

// leftOut predicts an observation by the model tuned without it and by the untuned one.
func leftOut(o *fit.Observation, m, untuned *fit.Model) (LeftOut, error) {
	q := o.Query()
	q.LimitOnly = true
	tuned, err := m.Predict(q)
	if err != nil {
		return LeftOut{}, fmt.Errorf("%s: %w", o.At(), err)
	}
	before, err := untuned.Predict(q)
	if err != nil {
		return LeftOut{}, fmt.Errorf("%s: %w", o.At(), err)
	}
	l := LeftOut{Tuned: o.Temperature - tuned.Temperature, Untuned: o.Temperature - before.Temperature,
		UntunedAtSpinodal: before.AtSpinodal, U: tuned.U, HasU: tuned.HasU, Boiled: o.Outcome == measure.Boiled, Variance: statedVariance(o, tuned.Slope)}
	if _, ok := l.Total(); ok {
		l.Level = m.Level(&q, &tuned, l.Tuned, l.Variance)
	}
	return l, nil
}

// statedVariance is that of a residual from the stated uncertainties of its reading,
// in K², with the slope dT/dP of the line of limits.
func statedVariance(o *fit.Observation, slope float64) float64 {
	t, p := o.UTemperature, o.UPressure*slope
	return float64(t*t) + float64(p*p)
}

// scores are the errors of the rows that boiled.
func (cv *CrossValidation) scores() (tuned, untuned scores) {
	for i := range cv.Rows {
		if r := &cv.Rows[i]; r.Boiled {
			tuned.e, untuned.e = append(tuned.e, r.Tuned), append(untuned.e, r.Untuned)
			tuned.fold = append(tuned.fold, r.Fold)
		}
	}
	tuned.folds, untuned.folds, untuned.fold = len(cv.Folds.Names), len(cv.Folds.Names), tuned.fold
	return tuned, untuned
}

// verdictLevel is the two-sided level of the test behind a verdict.
const verdictLevel = 0.95

// judge sums the errors and passes the verdict: the difference of the two
// root-mean-square errors against its standard error, by Student's t on the folds.
func (cv *CrossValidation) judge() {
	tuned, untuned := cv.scores()
	cv.Verdict = NoGain
	if len(tuned.e) == 0 {
		cv.Reason = "no row that boiled was left out"
		return
	}
	cv.RMSE, cv.UntunedRMSE = rmse(tuned.e), rmse(untuned.e)
	cv.Difference = cv.RMSE - cv.UntunedRMSE
	se, folds := tuned.differenceSE(untuned.e)
	if folds < 2 {
		cv.Reason = "fewer than two folds hold a row that boiled"
		return
	}
	cv.DifferenceSE = se
	t := distuv.StudentsT{Mu: 0, Sigma: 1, Nu: float64(folds - 1)}.Quantile(0.5 + verdictLevel/2)
	switch {
	case cv.Difference < -t*cv.DifferenceSE:
		cv.Verdict = Better
	case cv.Difference > t*cv.DifferenceSE:
		cv.Verdict = Worse
	}
	cv.Reason = fmt.Sprintf("on left-out rows the tuned model errs by %.3g K and the untuned one by %.3g K; the difference %.3g K has a standard error of %.2g K, and |difference| > %.2f standard errors decides at 95 %% with %d folds",
		cv.RMSE, cv.UntunedRMSE, cv.Difference, cv.DifferenceSE, t, folds)
}
