package report

import (
	"fmt"
	"math"
	"path/filepath"
	"sort"
	"strings"

	"limsup/fit"
	"limsup/validate/plot"
)

// keyFacts are the numbers beside the verdict.
func (r *Report) keyFacts() []fact {
	a := r.Assessment
	var out []fact
	if cv := a.CrossValidation; cv != nil {
		out = append(out,
			fact{"tuned, on left-out rows", decimal(cv.RMSE, 2) + " K"},
			fact{"untuned, on the same rows", decimal(cv.UntunedRMSE, 2) + " K"},
			fact{"difference", shown(cv.Difference, 2) + " ± " + shown(cv.DifferenceSE, 2) + " K"})
	}
	out = append(out, fact{"residuals, root mean square", decimal(a.RMSE, 2) + " K"}, fact{"bias", shown(a.Bias, 2) + " K"})
	if r.Calibration != nil {
		out = append(out, fact{"spread beyond the stated uncertainties", decimal(r.Calibration.Spread, 2) + " K"})
	}
	return out
}

// jobFacts say what was done with which data.
func (r *Report) jobFacts() []fact {
	a := r.Assessment
	v := a.Model.Variant
	state := "untuned"
	switch {
	case a.Refitted:
		state = "tuned to these rows"
	case a.Model.Calibrated:
		state = "calibrated before"
	}
	out := []fact{{"model", v.Name() + ", " + state}, {"equation of state", v.Equation}, {"limit", string(v.Limit)}}
	if v.Limit == fit.Kinetic {
		out = append(out, fact{"surface tension", string(v.Tension)}, fact{"properties", string(v.Properties)},
			fact{"pressure in the embryo", string(v.EmbryoPressure)}, fact{"kinetic factor", string(v.Kinetics)})
	}
	if c := r.Calibration; c != nil {
		var terms []string
		for _, t := range c.Plan.Terms {
			terms = append(terms, t.String())
		}
		out = append(out, fact{"tuned", strings.Join(terms, ", ")}, fact{"noise", string(c.Plan.Noise.Kind)}, fact{"search", sentence(c.Reason)})
		scopes := make([]string, 0, len(c.References))
		for by := range c.References {
			scopes = append(scopes, by)
		}
		sort.Strings(scopes)
		for _, by := range scopes {
			out = append(out, fact{"reference " + by, plot.Visible(c.References[by]) + " (offset 0 by definition)"})
		}
	}
	out = append(out, fact{"rows", fmt.Sprintf("%d used: %d boiled, %d intact; %d with their own flux; %d excluded", len(a.Rows), a.Boiled, a.Intact, a.Data.OwnFlux(), len(a.Data.Excluded))})
	obs := a.Data.Observations
	if len(obs) > 0 {
		loT, hiT, loP, hiP := math.Inf(1), math.Inf(-1), math.Inf(1), math.Inf(-1)
		for i := range obs {
			loT, hiT = math.Min(loT, obs[i].Temperature), math.Max(hiT, obs[i].Temperature)
			loP, hiP = math.Min(loP, obs[i].Pressure), math.Max(hiP, obs[i].Pressure)
		}
		var fluids []string
		for _, f := range plot.ByRows(obs) {
			fluids = append(fluids, plot.Visible(f.Key))
		}
		out = append(out, fact{"fluids", strings.Join(fluids, ", ")},
			fact{"temperatures", decimal(loT, 2) + " K to " + decimal(hiT, 2) + " K"},
			fact{"pressures", digits(loP/1e3, 6) + " kPa to " + digits(hiP/1e3, 6) + " kPa"})
	}
	for _, f := range a.Data.Files {
		out = append(out, fact{"file", fmt.Sprintf("%s, %d rows, SHA-256 %s", plot.Visible(filepath.Base(f.Name)), f.Rows, f.SHA256)})
	}
	return append(out, fact{"seed", fmt.Sprint(r.Seed)})
}

func (r *Report) parameters() *table {
	m := r.Assessment.Model
	if len(m.Parameters) == 0 {
		return nil
	}
	t := &table{ID: "parameter-table", Caption: "Parameters with standard uncertainties", Head: heads("parameter", "group", "#value", "#u", "unit", "#start", "#lower bound", "#upper bound", "remark")}
	for i := range m.Parameters {
		e := &m.Parameters[i]
		group := e.Group
		if e.Role != fit.RoleValue {
			group = "(" + string(e.Role) + ")"
		}
		u, remark := missing(), ""
		switch {
		case e.HasU:
			u = value(digits(e.U, 2))
		case e.AtBound == "":
			remark = e.Reason
		}
		if e.AtBound != "" {
			remark = "at its " + e.AtBound + " bound"
		}
		places := 4
		if e.HasU && e.U > 0 {
			places = max(0, min(10, 1-int(math.Floor(math.Log10(e.U)))))
		}
		unit := e.Unit
		if unit == "1" {
			unit = ""
		}
		t.Rows = append(t.Rows, []cell{named(e.Name), text(group), value(decimal(e.Value, places)), u, text(unit), value(digits(e.Start, 6)), value(digits(e.Lower, 6)), value(digits(e.Upper, 6)), text(remark)})
	}
	return t.compact()
}

func (r *Report) effects() (*table, string) {
	changed := false
	for _, e := range r.Effects {
		changed = changed || e.Before != e.After
	}
	if !changed {
		if r.Calibration == nil {
			return nil, ""
		}
		return nil, "None: tuning left the equation of state as published."
	}
	t := &table{ID: "effect-table", Caption: "Side effects on the equation of state", Head: heads("fluid", "state", "#Tc/K", "#Pc/kPa", "#Psat mean/%", "#Psat largest/%", "#ρ mean/%", "#ρ largest/%"),
		Notes: []string{"Deviations of saturation pressure and saturated liquid density from the fluid's own correlations, 0.6 to 0.95 Tc: mean of absolute values, and the largest."}}
	for _, e := range r.Effects {
		for i, s := range []fit.Saturated{e.Before, e.After} {
			ok := e.Points > 0
			t.Rows = append(t.Rows, []cell{named(e.Fluid), text([]string{"untuned", "tuned"}[i]), value(decimal(s.CriticalTemperature, 2)), value(decimal(s.CriticalPressure/1e3, 1)),
				optional(100*s.VapourPressureMean, ok, 2), optional(100*s.VapourPressureMax, ok, 2), optional(100*s.LiquidDensityMean, ok, 2), optional(100*s.LiquidDensityMax, ok, 2)})
		}
	}
	return t, ""
}

func (r *Report) groups() *table {
	t := &table{ID: "group-table", Caption: "Residuals by group", Head: heads("by", "group", "#n", "#intact", "#bias/K", "#RMSE/K", "#mean absolute/K", "#worst/K", "#left-out RMSE/K"),
		Notes: []string{"Residual: measured less predicted. n counts rows that boiled."}}
	for _, g := range r.Assessment.Groups {
		ok := g.N > 0
		t.Rows = append(t.Rows, []cell{text(g.By), named(g.Name), count(g.N), count(g.Intact), optional(g.Bias, ok, 2), optional(g.RMSE, ok, 2),
			optional(g.MeanAbsErr, ok, 2), optional(g.Worst, ok, 2), optional(g.LeftOutRMSE, ok && g.HasLeftOut, 2)})
	}
	return t.compact()
}

func (r *Report) coverage() (*table, string) {
	a := r.Assessment
	if len(a.Coverage) == 0 {
		return nil, sentence(a.CoverageReason)
	}
	t := &table{ID: "coverage-table", Caption: "Coverage of prediction intervals", Head: heads("#nominal/%", "#observed/%", "#from/%", "#to/%", "#inside", "#rows"),
		Notes: []string{"Share of rows inside the interval, " + a.CoverageReason + "; from and to: 95 % interval of the true share (Wilson), which takes rows as independent."}}
	for _, c := range a.Coverage {
		row := []cell{value(decimal(100*c.Nominal, 0)), value(decimal(100*c.Observed, 1)), value(decimal(100*c.Low, 1)), value(decimal(100*c.High, 1)), count(c.Inside), count(c.Rows)}
		row[0].Header = true
		t.Rows = append(t.Rows, row)
	}
	return t, ""
}

func (r *Report) tests() *table {
	t := &table{ID: "test-table", Caption: "Tests of the residuals", Head: heads("question", "test", "#n", "#statistic", "#p", "remark"),
		Notes: []string{"Of standardised residuals, left-out ones where there are any. p takes rows as independent, and rows of one fluid often share an error."}}
	row := func(question, test string, n int, statistic, p float64, ok bool, reason string) {
		t.Rows = append(t.Rows, []cell{named(question), text(test), count(n), optional(statistic, ok, 3), probability(p, ok), text(reason)})
	}
	for _, x := range r.Assessment.Trends {
		row("trend with "+x.Against, x.Test, x.N, x.Rho, x.P, x.Tested, x.Reason)
	}
	n := r.Assessment.Normality
	row("normal distribution", n.Test, n.N, n.W, n.P, n.Tested, n.Reason)
	return t.compact()
}

func probability(p float64, ok bool) cell {
	if ok && p < 0.001 {
		return value("< 0.001")
	}
	return optional(p, ok, 3)
}

// everyRow tells what lists the rows that a page leaves out.
const everyRow = "All rows: limsup validate --format csv, with the same data and model."

func (r *Report) rows() *table {
	a := r.Assessment
	t := &table{ID: "row-table", Fold: true, Caption: fmt.Sprintf("Residuals of all %d rows", len(a.Rows)),
		Head: heads("row", "fluid", "method", "batch", "#P/kPa", "#measured/K", "#predicted/K", "#residual/K", "#standardised", "#leverage", "#left out/K", "outcome")}
	var shown []int
	if len(a.Rows) > plot.Many {
		shown = a.Farthest(plot.Listed, func(int) bool { return true })
		t.Caption = fmt.Sprintf("Residuals of %d of all %d rows: those with the largest standardised residuals", len(shown), len(a.Rows))
		t.Notes = []string{fmt.Sprintf("The other %d rows are not in this table. %s", len(a.Rows)-len(shown), everyRow)}
	} else {
		for i := range a.Rows {
			shown = append(shown, i)
		}
	}
	for _, i := range shown {
		x, o := &a.Rows[i], &a.Data.Observations[i]
		z, ok := x.Standardised()
		t.Rows = append(t.Rows, []cell{{Text: plot.Place(o), Header: true}, text(o.Record.Key), text(o.Method), text(o.Batch), value(digits(o.Pressure/1e3, 7)), value(decimal(o.Temperature, 2)),
			value(decimal(x.Predicted, 2)), value(decimal(x.Residual, 2)), optional(z, ok, 2), optional(x.Leverage, x.HasLeverage, 3), optional(x.LeftOut, x.HasLeftOut, 2), text(o.Outcome.String())})
	}
	return t.compact()
}

func (r *Report) excluded() *table {
	list := r.Assessment.Data.Excluded
	if len(list) == 0 {
		return nil
	}
	t := &table{ID: "excluded-table", Caption: "Rows that were not used", Head: heads("row", "fluid", "reason"), Fold: len(list) > 20}
	if all := len(list); all > plot.Many {
		list = list[:plot.Listed]
		t.Caption = fmt.Sprintf("The first %d of %d rows that were not used", len(list), all)
		t.Notes = []string{fmt.Sprintf("The other %d are not in this table. All of them: limsup validate --format json, with the same data and model.", all-len(list))}
	}
	for _, e := range list {
		o := fit.Observation{}
		o.File, o.Line, o.Where = e.File, e.Line, e.Where
		t.Rows = append(t.Rows, []cell{{Text: plot.Place(&o), Header: true}, text(e.Fluid), text(e.Reason)})
	}
	return t
}

// folds is the table of the cross-validation.
func (r *Report) folds() (*table, string) {
	cv := r.Assessment.CrossValidation
	if cv == nil {
		return nil, sentence(r.NoCV)
	}
	t := &table{ID: "fold-table", Caption: "Cross-validation, leaving out by " + cv.Folds.Kind, Head: heads("left out", "#rows", "#tuned RMSE/K", "#untuned RMSE/K", "#tuned bias/K"),
		Notes: []string{fmt.Sprintf("Difference %s K, standard error %s K. Each part was predicted by a model tuned without it.", decimal(cv.Difference, 3), digits(cv.DifferenceSE, 2))}}
	type sum struct{ n, tuned, untuned, bias float64 }
	sums := make([]sum, len(cv.Folds.Names))
	for _, x := range cv.Rows {
		if x.Boiled {
			s := &sums[x.Fold]
			s.n++
			s.tuned += x.Tuned * x.Tuned
			s.untuned += x.Untuned * x.Untuned
			s.bias += x.Tuned
		}
	}
	all := 0
	for k, s := range sums {
		if s.n > 0 {
			all += int(s.n)
			t.Rows = append(t.Rows, []cell{named(cv.Folds.Names[k]), count(int(s.n)), value(decimal(math.Sqrt(s.tuned/s.n), 2)), value(decimal(math.Sqrt(s.untuned/s.n), 2)), value(decimal(s.bias/s.n, 2))})
		}
	}
	t.Fold = len(t.Rows) > 40
	t.Rows = append(t.Rows, []cell{named("all"), count(all), value(decimal(cv.RMSE, 2)), value(decimal(cv.UntunedRMSE, 2)), missing()})
	return t, ""
}
