package validate

import (
	"fmt"
	"math"
	"runtime"
	"sync"

	"gonum.org/v1/gonum/stat/distuv"

	"limsup/fit"
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
	Index    int // of the observation
	Fold     int
	Tuned    float64 // residual of the tuned model, K
	Untuned  float64 // residual of the untuned model, K
	U        float64 // standard uncertainty of the tuned prediction, spread included, K
	HasU     bool
	Boiled   bool // intact rows are predicted but do not enter the errors
	Degrees  int
	Variance float64 // stated variance of the reading, K²
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

// CrossValidate tunes the plan anew without each fold and predicts the fold. warm,
// if not nil, is the calibration on all rows, used as a start only.
//
// Errors: *FoldError for the first fold that could not be tuned or predicted.
func CrossValidate(d *fit.Data, p fit.Plan, f *Folds, warm *fit.Calibration) (*CrossValidation, error) {
	untuned, err := fit.Untuned(p.Variant, p.Fixed...)
	if err != nil {
		return nil, err
	}
	cv := &CrossValidation{Folds: f, Rows: make([]LeftOut, len(d.Observations))}
	errs := make([]error, len(f.Names))
	parallel(len(f.Names), func(k int) {
		if err := cv.leaveOut(d, p, k, untuned, warm); err != nil {
			errs[k] = &FoldError{f.Names[k], err}
		}
	})
	for _, err := range errs {
		if err != nil {
			return nil, err
		}
	}
	cv.judge()
	return cv, nil
}

// parallel runs n independent jobs on the processors there are.
func parallel(n int, job func(k int)) {
	var wg sync.WaitGroup
	next := make(chan int)
	for range min(n, runtime.GOMAXPROCS(0)) {
		wg.Add(1)
		go func() {
			defer wg.Done()
			for k := range next {
				job(k)
			}
		}()
	}
	for k := range n {
		next <- k
	}
	close(next)
	wg.Wait()
}

// leaveOut fills the rows of fold k.
func (cv *CrossValidation) leaveOut(d *fit.Data, p fit.Plan, k int, untuned *fit.Model, warm *fit.Calibration) error {
	train := d.Subset(func(i int) bool { return cv.Folds.Of[i] != k })
	c, err := fit.Calibrate(train, p, fit.Options{Workers: 1, Warm: warm})
	if err != nil {
		return err
	}
	m := c.Model()
	for i := range d.Observations {
		if cv.Folds.Of[i] != k {
			continue
		}
		o := &d.Observations[i]
		q := o.Query()
		tuned, err := m.Predict(q)
		if err != nil {
			return fmt.Errorf("%s: %w", o.At(), err)
		}
		before, err := untuned.Predict(q)
		if err != nil {
			return fmt.Errorf("%s: %w", o.At(), err)
		}
		cv.Rows[i] = LeftOut{Index: i, Fold: k, Tuned: o.Temperature - tuned.Temperature, Untuned: o.Temperature - before.Temperature,
			U: tuned.U, HasU: tuned.HasU, Boiled: o.Outcome == 0, Degrees: m.Degrees, Variance: o.UTemperature * o.UTemperature}
	}
	return nil
}

// verdictLevel is the two-sided level of the test behind a verdict.
const verdictLevel = 0.95

// judge sums the errors and passes the verdict: the difference of the two
// root-mean-square errors against its standard error, by Student's t on the folds.
//
// With M the mean square of n errors e, RMSE changes by (e² − M)/(2n·RMSE) for one
// more row, so the difference is a mean of paired contributions; those of one fold
// stay together, since its rows share a model.
func (cv *CrossValidation) judge() {
	var n, tuned, untuned float64
	for _, r := range cv.Rows {
		if r.Boiled {
			n++
			tuned += r.Tuned * r.Tuned
			untuned += r.Untuned * r.Untuned
		}
	}
	if n == 0 {
		cv.Verdict, cv.Reason = NoGain, "no row that boiled was left out"
		return
	}
	cv.RMSE, cv.UntunedRMSE = math.Sqrt(tuned/n), math.Sqrt(untuned/n)
	cv.Difference = cv.RMSE - cv.UntunedRMSE
	sum := make([]float64, len(cv.Folds.Names))
	for _, r := range cv.Rows {
		if r.Boiled {
			sum[r.Fold] += influence(r.Tuned, tuned/n, cv.RMSE) - influence(r.Untuned, untuned/n, cv.UntunedRMSE)
		}
	}
	folds, ss := 0.0, 0.0
	present := make([]bool, len(sum))
	for _, r := range cv.Rows {
		present[r.Fold] = present[r.Fold] || r.Boiled
	}
	for k, s := range sum {
		if present[k] {
			folds++
			ss += s * s
		}
	}
	if folds < 2 {
		cv.Verdict, cv.Reason = NoGain, "fewer than two folds hold a row that boiled"
		return
	}
	cv.DifferenceSE = math.Sqrt(ss*folds/(folds-1)) / n
	t := distuv.StudentsT{Mu: 0, Sigma: 1, Nu: folds - 1}.Quantile(0.5 + verdictLevel/2)
	cv.Verdict = NoGain
	switch {
	case cv.Difference < -t*cv.DifferenceSE:
		cv.Verdict = Better
	case cv.Difference > t*cv.DifferenceSE:
		cv.Verdict = Worse
	}
	cv.Reason = fmt.Sprintf("on left-out rows the tuned model errs by %.3g K and the untuned one by %.3g K; the difference %.3g K has a standard error of %.2g K, and |difference| > %.2f standard errors decides at 95 %% with %d folds",
		cv.RMSE, cv.UntunedRMSE, cv.Difference, cv.DifferenceSE, t, int(folds))
}

// influence is the contribution of an error e to a root mean square, about zero.
func influence(e, mean, rms float64) float64 {
	if rms == 0 {
		return 0
	}
	return (e*e - mean) / (2 * rms)
}
