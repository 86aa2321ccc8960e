package main

import (
	"fmt"
	"path/filepath"
	"strings"

	"limsup/cmd/limsup/internal/table"
	"limsup/data/caution"
	"limsup/fit"
	"limsup/validate"
)

type validationJSON struct {
	Model        string            `json:"model"`
	Refitted     bool              `json:"refitted"`
	RowsUsed     int               `json:"rows_used"`
	RowsExcluded []excludedJSON    `json:"rows_excluded"`
	RMSE         float64           `json:"rmse_K"`
	Bias         float64           `json:"bias_K"`
	MeanAbs      float64           `json:"mean_absolute_K"`
	Residuals    []residualJSON    `json:"residuals"`
	Groups       []groupJSON       `json:"groups"`
	CV           *cvJSON           `json:"cross_validation"`
	NoCV         string            `json:"no_cross_validation,omitempty"`
	Verdict      *validate.Verdict `json:"verdict"`
	VerdictText  string            `json:"verdict_reason,omitempty"`
	Coverage     []coverageJSON    `json:"coverage"`
	CoverageText string            `json:"coverage_reason"`
	Trends       []trendJSON       `json:"trends"`
	Normality    normalityJSON     `json:"normality"`
	Worst        []worstJSON       `json:"worst"`
	Warnings     []string          `json:"warnings"`
	Cautions     []string          `json:"cautions"`
}

type residualJSON struct {
	File  string `json:"file"`
	Line  int    `json:"line"`
	Where string `json:"where,omitempty"`
	observedJSON
	U            *float64 `json:"standard_uncertainty_K"`
	Standardised *float64 `json:"standardised"`
	Leverage     *float64 `json:"leverage"`
	LeftOut      *float64 `json:"left_out_K"`
	LeftOutU     *float64 `json:"left_out_standard_uncertainty_K"`
	Log10Flux    *float64 `json:"log10_flux"`
	Outcome      string   `json:"outcome"`
	Warnings     []string `json:"warnings,omitempty"`
}

// observedJSON is an observation and what the model has for it.
type observedJSON struct {
	Fluid     string  `json:"fluid"`
	Method    string  `json:"method"`
	Batch     string  `json:"batch,omitempty"`
	Pressure  float64 `json:"pressure_Pa"`
	Measured  float64 `json:"measured_K"`
	Predicted float64 `json:"predicted_K"`
	Residual  float64 `json:"residual_K"`
}

func observedToJSON(o *fit.Observation, predicted, residual float64) observedJSON {
	return observedJSON{o.Record.Key, o.Method, o.Batch, o.Pressure, o.Temperature, predicted, residual}
}

type groupJSON struct {
	By      string   `json:"by"`
	Group   string   `json:"group"`
	N       int      `json:"n"`
	Intact  int      `json:"intact"`
	Bias    float64  `json:"bias_K"`
	RMSE    float64  `json:"rmse_K"`
	MeanAbs float64  `json:"mean_absolute_K"`
	Worst   float64  `json:"worst_K"`
	LeftOut *float64 `json:"left_out_rmse_K"`
}

type coverageJSON struct {
	Nominal  float64    `json:"nominal"`
	Observed float64    `json:"observed"`
	Inside   int        `json:"inside"`
	Rows     int        `json:"rows"`
	Interval [2]float64 `json:"interval_95"`
}

type trendJSON struct {
	Against string   `json:"against"`
	Test    string   `json:"test,omitempty"`
	N       int      `json:"n"`
	Rho     *float64 `json:"rho"`
	P       *float64 `json:"p_value"`
	Reason  string   `json:"reason,omitempty"`
}

type normalityJSON struct {
	Test   string   `json:"test,omitempty"`
	N      int      `json:"n"`
	W      *float64 `json:"w"`
	P      *float64 `json:"p_value"`
	Reason string   `json:"reason,omitempty"`
}

type worstJSON struct {
	File string `json:"file"`
	Line int    `json:"line"`
	Text string `json:"text"`
}

func (v *validation) json() *validationJSON {
	j := &validationJSON{Model: v.modelName(), Refitted: v.Refitted, RowsUsed: len(v.Rows), RowsExcluded: excludedList(v.Data.Excluded),
		RMSE: v.RMSE, Bias: v.Bias, MeanAbs: v.MeanAbsErr, Residuals: []residualJSON{}, Groups: []groupJSON{}, NoCV: trimReason(v.noCV),
		Coverage: coverageList(v.Coverage), CoverageText: v.CoverageReason, Trends: []trendJSON{}, Worst: []worstJSON{},
		Warnings: append([]string{}, v.warnings()...), Cautions: caution.Sentences()}
	for i := range v.Rows {
		r := &v.Rows[i]
		o := &v.Data.Observations[i]
		z, hasZ := r.Standardised()
		j.Residuals = append(j.Residuals, residualJSON{File: o.File, Line: o.Line, Where: o.Where,
			observedJSON: observedToJSON(o, r.Predicted, r.Residual), U: optional(r.U, r.HasU),
			Standardised: optional(z, hasZ), Leverage: optional(r.Leverage, r.HasLeverage), LeftOut: optional(r.LeftOut, r.HasLeftOut),
			LeftOutU: optional(r.LeftOutU, r.LeftOutU > 0), Log10Flux: optional(r.Log10Flux, r.HasFlux), Outcome: o.Outcome.String(), Warnings: r.Warnings})
	}
	for _, g := range v.Groups {
		j.Groups = append(j.Groups, groupJSON{g.By, g.Name, g.N, g.Intact, g.Bias, g.RMSE, g.MeanAbsErr, g.Worst, optional(g.LeftOutRMSE, g.HasLeftOut)})
	}
	if cv := v.CrossValidation; cv != nil {
		j.CV = cvToJSON(cv)
		j.Verdict, j.VerdictText = &cv.Verdict, cv.Reason
	}
	for _, t := range v.Trends {
		j.Trends = append(j.Trends, trendJSON{t.Against, t.Test, t.N, optional(t.Rho, t.Tested), optional(t.P, t.Tested), t.Reason})
	}
	n := v.Normality
	j.Normality = normalityJSON{n.Test, n.N, optional(n.W, n.Tested), optional(n.P, n.Tested), n.Reason}
	for _, f := range v.Worst {
		o := &v.Data.Observations[f.Index]
		j.Worst = append(j.Worst, worstJSON{o.File, o.Line, f.Text})
	}
	return j
}

func coverageList(list []validate.Coverage) []coverageJSON {
	out := []coverageJSON{}
	for _, c := range list {
		out = append(out, coverageJSON{c.Nominal, c.Observed, c.Inside, c.Rows, [2]float64{c.Low, c.High}})
	}
	return out
}

// trimReason drops the words that the caller says itself.
func trimReason(s string) string { return strings.TrimPrefix(s, "no cross-validation: ") }

func (v *validation) rowTable() *table.Table {
	t := &table.Table{Title: "Residuals", Columns: []table.Column{
		{Name: "row", Title: "row"}, {Name: "fluid", Title: "fluid"},
		{Name: "method", Title: "method", Priority: 4}, {Name: "batch", Title: "batch", Priority: 6},
		{Name: "pressure", Title: "P", Unit: "kPa", Kind: table.KindNumber, Digits: 5, Priority: 3},
		{Name: "measured", Title: "measured", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true},
		{Name: "predicted", Title: "predicted", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true, Priority: 2},
		{Name: "residual", Title: "residual", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true},
		{Name: "standardised", Title: "standardised", Kind: table.KindNumber, Digits: 2, Fixed: true, Priority: 1},
	}}
	batches := false
	for i := range v.Data.Observations {
		batches = batches || v.Data.Observations[i].Batch != ""
	}
	refit := v.Refitted
	if refit {
		t.Columns = append(t.Columns, table.Column{Name: "leverage", Title: "leverage", Kind: table.KindNumber, Digits: 3, Fixed: true, Priority: 5},
			table.Column{Name: "left_out", Title: "left out", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true})
	}
	for i := range v.Rows {
		r := &v.Rows[i]
		o := &v.Data.Observations[i]
		row := table.Text(rowName(o))
		if r.Intact {
			row = row.Note("intact: the limit lies above the reading; not in any sum")
		}
		for _, w := range r.Warnings {
			row = row.Note(w)
		}
		z := table.Missing("")
		if s, ok := r.Standardised(); ok {
			z = table.Num(s)
		}
		cells := []table.Cell{row, table.Text(o.Record.Key), table.Text(o.Method), table.Text(o.Batch), table.Num(o.Pressure / 1e3),
			table.Num(o.Temperature), table.Num(r.Predicted), table.Num(r.Residual), z}
		if refit {
			left := table.Missing("")
			if r.HasLeftOut {
				left = table.Num(r.LeftOut)
			}
			cells = append(cells, table.Num(r.Leverage), left)
		}
		t.Rows = append(t.Rows, cells)
	}
	if !batches {
		t = without(t, 3)
	}
	return t
}

// without drops a column that would be empty.
func without(t *table.Table, column int) *table.Table {
	t.Columns = append(t.Columns[:column:column], t.Columns[column+1:]...)
	for i, r := range t.Rows {
		t.Rows[i] = append(r[:column:column], r[column+1:]...)
	}
	return t
}

// rowName is the short place of a row: "drops.csv:12".
func rowName(o *fit.Observation) string { return shortPlace(o.File, o.Line, o.Where) }

// shortPlace is a place without the folders of its file; where, if not empty, is that in
// a workbook.
func shortPlace(file string, line int, where string) string {
	if where != "" {
		return filepath.Base(file) + ":" + where
	}
	return fmt.Sprintf("%s:%d", filepath.Base(file), line)
}

func (v *validation) groupTable() *table.Table {
	t := &table.Table{Title: "Residuals by group", Columns: []table.Column{
		{Name: "by", Title: "by"}, {Name: "group", Title: "group"},
		{Name: "n", Title: "n", Kind: table.KindInteger}, {Name: "intact", Title: "intact", Kind: table.KindInteger, Priority: 3},
		{Name: "bias", Title: "bias", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true},
		{Name: "rmse", Title: "RMSE", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true},
		{Name: "mean_absolute", Title: "mean absolute", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true, Priority: 2},
		{Name: "worst", Title: "worst", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true, Priority: 1},
		{Name: "left_out_rmse", Title: "left out RMSE", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true},
	}, Notes: []string{"Residual: measured less predicted. n counts rows that boiled."}}
	for _, g := range v.Groups {
		left := table.Missing("")
		if g.HasLeftOut {
			left = table.Num(g.LeftOutRMSE)
		}
		cells := []table.Cell{table.Text(g.By), table.Text(g.Name), table.Int(g.N), table.Int(g.Intact)}
		if g.N == 0 {
			cells = append(cells, table.Missing(""), table.Missing(""), table.Missing(""), table.Missing(""), table.Missing(""))
		} else {
			cells = append(cells, table.Num(g.Bias), table.Num(g.RMSE), table.Num(g.MeanAbsErr), table.Num(g.Worst), left)
		}
		t.Rows = append(t.Rows, cells)
	}
	if v.CrossValidation == nil {
		t = without(t, len(t.Columns)-1)
	}
	return t
}

func (v *validation) coverageTable() *table.Table {
	t := &table.Table{Title: "Coverage of prediction intervals", Columns: []table.Column{
		{Name: "nominal", Title: "nominal", Unit: "%", Kind: table.KindNumber, Digits: 0, Fixed: true},
		{Name: "observed", Title: "observed", Unit: "%", Kind: table.KindNumber, Digits: 1, Fixed: true},
		{Name: "low", Title: "from", Unit: "%", Kind: table.KindNumber, Digits: 1, Fixed: true},
		{Name: "high", Title: "to", Unit: "%", Kind: table.KindNumber, Digits: 1, Fixed: true},
		{Name: "inside", Title: "inside", Kind: table.KindInteger}, {Name: "rows", Title: "rows", Kind: table.KindInteger},
		{Name: "agrees", Title: "agrees", Kind: table.KindBool},
	}, Notes: []string{"Share of rows inside the interval, " + v.CoverageReason + "; from and to: 95 % Wilson interval of the true share, which takes rows as independent."}}
	for _, c := range v.Coverage {
		t.Rows = append(t.Rows, []table.Cell{table.Num(100 * c.Nominal), table.Num(100 * c.Observed), table.Num(100 * c.Low), table.Num(100 * c.High),
			table.Int(c.Inside), table.Int(c.Rows), table.Bool(c.Low <= c.Nominal && c.Nominal <= c.High)})
	}
	return t
}

// testLevel is the p-value below which the table speaks of a finding.
const testLevel = 0.05

func (v *validation) testTable() *table.Table {
	t := &table.Table{Title: "Tests of the residuals", Columns: []table.Column{
		{Name: "question", Title: "question"}, {Name: "test", Title: "test", Wrap: 16}, {Name: "n", Title: "n", Kind: table.KindInteger, Priority: 1},
		{Name: "statistic", Title: "statistic", Kind: table.KindNumber, Digits: 3, Fixed: true},
		{Name: "p_value", Title: "p"}, {Name: "answer", Title: "answer", Wrap: 16},
	}, Notes: []string{fmt.Sprintf("Of standardised residuals, left-out ones where there are any. p below %g counts as an answer; p takes rows as independent, and rows of one fluid often share an error.", testLevel)}}
	row := func(question, test string, n int, statistic, p float64, ok bool, reason, yes, no string) {
		cells := []table.Cell{table.Text(question), table.Text(test), table.Int(n), table.Num(statistic), table.Text(pValue(p)), table.Text(no)}
		switch {
		case !ok:
			cells[1], cells[3], cells[4], cells[5] = table.Text("none"), table.Missing(""), table.Missing(""), table.Text(reason)
		case p < testLevel:
			cells[5] = table.Text(yes)
		}
		t.Rows = append(t.Rows, cells)
	}
	for _, x := range v.Trends {
		way := "rising"
		if x.Rho < 0 {
			way = "falling"
		}
		row("trend with "+x.Against, x.Test, x.N, x.Rho, x.P, x.Tested, x.Reason, way, "no trend found")
	}
	n := v.Normality
	row("normal distribution", n.Test, n.N, n.W, n.P, n.Tested, n.Reason, "not normal", "no departure found")
	return t
}

// pValue prints a p-value to three decimals, and a smaller one as a bound.
func pValue(p float64) string {
	if p < 0.001 {
		return "< 0.001"
	}
	return fmt.Sprintf("%.3f", p)
}
