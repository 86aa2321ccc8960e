package main

import (
	"errors"
	"fmt"

	"limsup/data/caution"
	"limsup/data/fluid"
	"limsup/fit"
	"limsup/fit/modelfile"
	"limsup/validate"
)

// calibrate does the main job: tune, cross-validate, side effects.
func (t *task) calibrate(folds string, progress func(done, total int)) (*calibration, error) {
	c, err := t.tune()
	if err != nil {
		return nil, err
	}
	r := &calibration{Calibration: c}
	if r.effects, err = c.Model().SideEffects(c.Queries()); err != nil {
		return nil, err
	}
	if r.cv, r.noCV, err = crossValidation(c.Data, t.plan, folds, c, progress); err != nil {
		return nil, err
	}
	return r, nil
}

// withExclusions adds the excluded rows to an error about too few rows, since they
// are what a user must look at first.
func withExclusions(err error, d *fit.Data) error {
	var few *fit.TooFewError
	if !errors.As(err, &few) || len(d.Excluded) == 0 {
		return err
	}
	const most = 20
	text := ""
	for i, e := range d.Excluded {
		if i == most {
			text += fmt.Sprintf("\n  and %d more", len(d.Excluded)-most)
			break
		}
		text += "\n  " + e.String()
	}
	return fmt.Errorf("%w\nexcluded rows:%s", err, text)
}

// records are the fluids of the calibration.
func (r *calibration) records() []*fluid.Record {
	var out []*fluid.Record
	for _, q := range r.Queries() {
		out = append(out, q.Record)
	}
	return out
}

func (r *calibration) json() *calibrationJSON {
	j := &calibrationJSON{
		Variant: r.Plan.Variant.Name(), RowsUsed: len(r.Rows), RowsExcluded: excludedList(r.Data.Excluded),
		RMSE: r.RMSE, Bias: r.Bias, Spread: r.Spread, LogLik: r.LogLik, Degrees: r.Degrees, NoCV: r.noCV,
		Verdict: validate.NoGain, VerdictText: r.noCV, References: r.References,
		Converged: r.Converged, Usable: r.Usable, Reason: r.Reason, Warnings: append([]string{}, r.Warnings...),
		Identity: identityJSON{Condition: r.Identity.Condition, Inflation: r.Identity.Inflation, SingularValues: append([]float64{}, r.Identity.SingularValues...),
			Correlations: []correlationJSON{}, Warnings: append([]string{}, r.Identity.Warnings...)},
		Profiles: r.intervals.profileJSON(), Bootstrap: r.intervals.bootstrapJSON(),
		SideEffects: []sideEffectJSON{}, Residuals: []calibratedRowJSON{}, Cautions: caution.Sentences(),
	}
	for _, x := range r.Identity.Correlated {
		j.Identity.Correlations = append(j.Identity.Correlations, correlationJSON{x.A, x.B, x.Value})
	}
	for _, w := range r.Data.Warnings {
		j.Warnings = append(j.Warnings, w.String())
	}
	for i := range r.Parameters {
		e := &r.Parameters[i]
		lo, hi, ok := e.Interval(0.95)
		j.Parameters = append(j.Parameters, parameterJSON{estimateJSON: estimateToJSON(e),
			Low: optional(lo, ok), High: optional(hi, ok), Degrees: e.Degrees,
			Reason: e.Reason, Unit: e.Unit, AtBound: e.AtBound != "", Start: e.Start, Lower: e.Lower, Upper: e.Upper})
	}
	if r.cv != nil {
		j.CV = cvToJSON(r.cv)
		j.Verdict, j.VerdictText = r.cv.Verdict, r.cv.Reason
	}
	for _, e := range r.effects {
		side := func(s fit.Saturated) saturatedSide {
			ok := e.Points > 0
			return saturatedSide{s.CriticalTemperature, s.CriticalPressure, optional(s.VapourPressureMean, ok), optional(s.VapourPressureMax, ok),
				optional(s.LiquidDensityMean, ok), optional(s.LiquidDensityMax, ok)}
		}
		j.SideEffects = append(j.SideEffects, sideEffectJSON{e.Fluid, side(e.Before), side(e.After), e.Points, e.Low, e.High})
	}
	for _, x := range r.Rows {
		o := &r.Data.Observations[x.Index]
		shiftOf := ""
		if k := x.Influence.Of; k >= 0 {
			shiftOf = r.Parameters[k].Label()
		}
		j.Residuals = append(j.Residuals, calibratedRowJSON{o.File, o.Line, observedToJSON(o, x.Predicted, x.Residual), x.Standardised, x.Leverage,
			x.Influence.Cook, x.Influence.Dffits, x.Influence.Shift, shiftOf, x.Log10Flux, o.Outcome != 0})
	}
	return j
}

// meta is what the model file tells about the calibration.
func (r *calibration) meta(seed uint64) modelfile.Meta {
	m := modelfile.Meta{Version: version(), Seed: seed,
		Statistics:      modelfile.Statistics{RowsUsed: len(r.Rows), RowsExcluded: len(r.Data.Excluded), RMSE: r.RMSE, Bias: r.Bias, Spread: r.Spread, LogLikelihood: r.LogLik},
		Identifiability: modelfile.Identifiability{Condition: r.Identity.Condition, Warnings: r.Warnings}}
	for _, f := range r.Data.Files {
		m.Inputs = append(m.Inputs, modelfile.Input{File: f.Name, SHA256: f.SHA256})
	}
	if !r.Converged {
		m.Cautions = []string{"The calibration behind these parameters did not converge (" + r.Reason + ")."}
	}
	if cv := r.cv; cv != nil {
		m.Verdict = string(cv.Verdict)
		m.Statistics.CrossValidation = &modelfile.CrossValidation{Folds: cv.Folds.Kind, RMSE: cv.RMSE, UntunedRMSE: cv.UntunedRMSE, Difference: cv.Difference, DifferenceSE: cv.DifferenceSE}
	}
	return m
}
