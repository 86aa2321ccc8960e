package validate

import (
	"math"
	"runtime"
	"slices"

	"limsup/data/measure"
	"limsup/fit"
)

// Residual is one observation beside its prediction.
type Residual struct {
	Index     int     // into the observations
	Predicted float64 // limit with the offset of the method, K
	Residual  float64 // measured − predicted, K
	U         float64 // standard uncertainty of the residual, K; with HasU
	HasU      bool
	// Leverage is the share of the row's own reading in its prediction; only rows that
	// the model was tuned to have one.
	Leverage    float64
	HasLeverage bool
	// LeftOut is the residual of the model tuned without the row's fold, LeftOutU its
	// standard uncertainty; LeftOutU is 0 where there is none.
	LeftOut, LeftOutU float64 // K
	HasLeftOut        bool
	Log10Flux         float64 // at the predicted limit, with HasFlux
	HasFlux           bool
	Intact            bool
	Warnings          []string // of the prediction: extrapolation
	leftOutLevel      float64
}

// Standardised is Residual/U; ok is false without U.
func (r *Residual) Standardised() (z float64, ok bool) {
	if !r.HasU {
		return 0, false
	}
	return r.Residual / r.U, true
}

// Blind is the standardised residual of a model that had not seen the row, where there
// is one, else the standardised residual.
func (r *Residual) Blind() (z float64, ok bool) {
	if r.HasLeftOut && r.LeftOutU > 0 {
		return r.LeftOut / r.LeftOutU, true
	}
	return r.Standardised()
}

// Assessment is all that is said about a model on a set of measurements.
type Assessment struct {
	Data     *fit.Data
	Model    *fit.Model
	Refitted bool // the model was tuned to these very rows
	Rows     []Residual

	Boiled, Intact         int
	RMSE, Bias, MeanAbsErr float64 // of the rows that boiled, K
	Groups                 []Group

	// CrossValidation is nil unless the model was tuned to these rows.
	CrossValidation *CrossValidation
	Coverage        []Coverage
	CoverageReason  string // why there is none, or what it rests on
	Trends          []Trend
	Normality       Normality
	Worst           []Finding
}

// Assess judges a calibration on its own rows. cv may be nil: then nothing is said of
// rows left out.
func Assess(c *fit.Calibration, cv *CrossValidation) *Assessment {
	a := &Assessment{Data: c.Data, Model: c.Model(), Refitted: true, CrossValidation: cv, Rows: make([]Residual, len(c.Rows))}
	for i := range c.Rows {
		x := &c.Rows[i]
		r := Residual{Index: i, Predicted: x.Predicted, Residual: x.Residual, Leverage: x.Leverage, HasLeverage: true,
			Intact: c.Data.Observations[i].Outcome != measure.Boiled, Log10Flux: x.Log10Flux, HasFlux: x.Log10Flux != 0}
		r.U = math.Sqrt(x.Variance)
		r.HasU = r.U > 0
		if cv != nil {
			l := &cv.Rows[i]
			r.LeftOut, r.HasLeftOut, r.leftOutLevel = l.Tuned, true, l.Level
			if u, ok := l.Total(); ok {
				r.LeftOutU = u
			}
		}
		a.Rows[i] = r
	}
	a.summarise()
	var rows []float64
	for i := range a.Rows {
		if r := &a.Rows[i]; !r.Intact && r.LeftOutU > 0 {
			rows = append(rows, r.leftOutLevel)
		}
	}
	a.Coverage = coverage(rows)
	switch {
	case cv == nil:
		a.CoverageReason = "no rows were left out, and residuals of the tuning itself are no test of its intervals"
	case len(rows) == 0:
		a.CoverageReason = "the predictions of left-out rows have no uncertainty"
	default:
		a.CoverageReason = "of rows left out of the tuning"
	}
	return a
}

// AssessModel judges a model on rows that it was not tuned to, made by Prepare with
// PlanOf(m).
//
// Errors: *fit.RowError for a row that the model cannot predict.
func AssessModel(d *fit.Data, m *fit.Model) (*Assessment, error) {
	a := &Assessment{Data: d, Model: m, Rows: make([]Residual, len(d.Observations))}
	unseen := make([]float64, len(d.Observations)) // below zero: no interval
	blocks := min(runtime.GOMAXPROCS(0), 1+len(d.Observations)/rowsPerBlock)
	errs := make([]error, blocks)
	parallel(blocks, blocks, func(b int) {
		for i := b * len(a.Rows) / blocks; i < (b+1)*len(a.Rows)/blocks; i++ {
			if a.Rows[i], unseen[i], errs[b] = assessRow(&d.Observations[i], m); errs[b] != nil {
				return
			}
			a.Rows[i].Index = i
		}
	})
	for _, err := range errs {
		if err != nil {
			return nil, err
		}
	}
	rows := slices.DeleteFunc(unseen, func(level float64) bool { return level < 0 })
	a.summarise()
	a.Coverage = coverage(rows)
	switch {
	case !m.Calibrated:
		a.CoverageReason = "the model is not calibrated: it has no prediction intervals"
	case len(rows) == 0:
		a.CoverageReason = "the predictions have no uncertainty"
	default:
		a.CoverageReason = "of predictions for these rows"
	}
	return a, nil
}

// rowsPerBlock is the number of rows worth a goroutine.
const rowsPerBlock = 256

// assessRow predicts an observation by a model that has not seen it. level is that of the
// narrowest interval of the prediction that holds the reading, below zero where there is none.
func assessRow(o *fit.Observation, m *fit.Model) (r Residual, level float64, err error) {
	q := o.Query()
	q.LimitOnly = true
	p, err := m.Predict(q)
	if err != nil {
		return Residual{}, -1, &fit.RowError{At: o.At(), Fluid: o.Record.Key, Err: err}
	}
	r = Residual{Predicted: p.Temperature, Residual: o.Temperature - p.Temperature, Intact: o.Outcome != measure.Boiled,
		Log10Flux: p.Log10Flux, HasFlux: p.HasFlux, Warnings: p.Warnings}
	l := LeftOut{Variance: statedVariance(o, p.Slope)}
	if p.HasU {
		l.U, l.HasU = p.U, true
	}
	r.U = math.Sqrt(float64(l.U*l.U) + l.Variance)
	// Without an uncertainty of the prediction, the stated one of the reading is
	// all that is known of an untuned model, but too little for a tuned one.
	r.HasU = r.U > 0 && (p.HasU || !m.Calibrated)
	if r.Intact || !r.HasU || !p.HasU {
		return r, -1, nil
	}
	return r, m.Level(&q, &p, r.Residual, l.Variance), nil
}

// PlanOf is the plan with which Prepare finds the rows that a model can predict: its
// variant, with its parameters as start values.
func PlanOf(m *fit.Model) fit.Plan {
	p := fit.Plan{Variant: m.Variant, Fixed: m.Settings, Noise: m.Noise}
	have := map[string]bool{}
	for i := range m.Parameters {
		e := &m.Parameters[i]
		if e.Role == fit.RolePoolSpread {
			continue
		}
		if !have[e.Name] {
			have[e.Name] = true
			p.Terms = append(p.Terms, fit.Term{Name: e.Name, By: e.By})
			p.Bounds = append(p.Bounds, fit.Bound{Name: e.Name, Lower: e.Lower, Upper: e.Upper})
		}
	}
	// The mean of a pool comes first, so that it holds where no group has its own.
	for _, mean := range []bool{true, false} {
		for i := range m.Parameters {
			e := &m.Parameters[i]
			if (e.Role == fit.RolePoolMean) == mean && e.Role != fit.RolePoolSpread {
				p.Starts = append(p.Starts, fit.Setting{Name: e.Name, Group: e.Group, Value: e.Value})
			}
		}
	}
	return p
}

// summarise fills what follows from the rows.
func (a *Assessment) summarise() {
	every := make([]int, len(a.Rows))
	for i := range every {
		every[i] = i
	}
	all := a.group("all", "", every)
	a.Boiled, a.Intact, a.RMSE, a.Bias, a.MeanAbsErr = all.N, all.Intact, all.RMSE, all.Bias, all.MeanAbsErr
	a.Groups = a.groups()
	a.Trends = a.trends()
	a.Normality = a.normality()
	a.Worst = a.worst()
}
