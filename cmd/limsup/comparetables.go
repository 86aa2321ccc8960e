package main

import (
	"fmt"
	"strings"

	"limsup/cmd/limsup/internal/table"
	"limsup/validate"
)

// compareProduct renders a comparison.
func compareProduct(r *validate.Comparison) *product {
	p := &product{json: func() any { return comparedToJSON(r) }, csv: rankTable(r)}
	add := func(b ...block) { p.blocks = append(p.blocks, b...) }
	add(block{heading: "Verdict", text: r.Verdict})
	switch {
	case r.Nested != nil:
		var chosen []string
		for _, x := range r.Nested.Chosen {
			chosen = append(chosen, fmt.Sprintf("%s (%d)", x.Name, x.Folds))
		}
		add(block{text: r.Nested.Sentence() + " Chosen, with the number of folds: " + strings.Join(chosen, "; ") + "."})
	case r.NestedReason != "":
		add(block{text: "No outer loop: " + r.NestedReason + "."})
	}
	if len(r.Unfinished) > 0 {
		add(block{text: "Interrupted before these were finished: " + strings.Join(r.Unfinished, "; ") + "."})
	}
	add(block{facts: table.Facts{{Label: "rows", Value: fmt.Sprintf("%d in common, %d excluded", len(r.Observations), len(r.Excluded))},
		{Label: "left out", Value: fmt.Sprintf("%s, %d folds", foldWord(r.Folds), len(r.Folds.Names))}}})
	add(block{table: rankTable(r)})
	if t := pairTable(r); len(t.Rows) > 0 {
		add(block{table: t})
	}
	if len(r.Aside) > 0 {
		add(block{table: asideTable(r)})
	}
	if x := excludedTable(r.Excluded); x != nil {
		add(block{table: x})
	}
	for _, w := range r.Warnings {
		add(block{text: "Warning: " + w.String()})
	}
	add(cautionBlock())
	return p
}

func rankTable(r *validate.Comparison) *table.Table {
	t := &table.Table{Title: "Variants by their error on left-out rows", Columns: []table.Column{
		{Name: "variant", Title: "variant", Wrap: 26}, {Name: "kind", Title: "kind", Priority: 4},
		{Name: "parameters", Title: "parameters", Wrap: 14, Priority: 5}, {Name: "parameter_count", Title: "k", Kind: table.KindNumber, Digits: 1, Fixed: true, Priority: 3},
		{Name: "rmse", Title: "RMSE", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true, Priority: 2},
		{Name: "cv_rmse", Title: "CV RMSE", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true},
		{Name: "cv_se", Title: "SE", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true},
		{Name: "difference", Title: "to best", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true},
		{Name: "difference_se", Title: "its SE", JSON: "difference_se_K", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true},
		{Name: "tied", Title: "tied", Kind: table.KindBool},
		{Name: "aicc", Title: "AICc", Kind: table.KindNumber, Digits: 1, Fixed: true, Priority: 1},
		{Name: "bic", Title: "BIC", Kind: table.KindNumber, Digits: 1, Fixed: true, Priority: 6},
		{Name: "coverage_95", Title: "95 % cover", Unit: "%", Kind: table.KindNumber, Digits: 0, Fixed: true, Priority: 7},
		{Name: "worst_fluid", Title: "worst fluid", Priority: 8},
		{Name: "worst_fluid_rmse", Title: "its RMSE", Unit: "K", Kind: table.KindNumber, Digits: 1, Fixed: true, Priority: 9},
	}, Notes: []string{
		"CV RMSE: root mean square on left-out rows, with its standard error. To best: difference to the first line, with the standard error of the paired difference; tied: not distinguishable from the first line at one standard error.",
		"k: free parameters with the spread. AICc and BIC take normal errors with the stated uncertainties and one common spread. Cover: share of left-out rows inside their 95 % interval.",
	}}
	for i := range r.Entries {
		e := &r.Entries[i]
		name := table.Text(e.Name).Note(e.Note)
		if e.Calibration != nil {
			if !e.Calibration.Converged {
				name = name.Note("not converged: " + e.Calibration.Reason)
			}
			for _, w := range e.Calibration.Warnings {
				name = name.Note(w)
			}
		}
		aicc, bic := table.Missing(""), table.Missing("")
		if e.HasCriteria {
			aicc, bic = table.Num(e.AICc), table.Num(e.BIC)
		}
		cover := table.Missing("")
		if n := len(e.Coverage); n > 0 {
			cover = table.Num(100 * e.Coverage[n-1].Observed)
		}
		t.Rows = append(t.Rows, []table.Cell{name, table.Text(string(e.Kind)), parameterCell(e), table.Num(e.K), table.Num(e.RMSE), table.Num(e.CVRMSE), table.Num(e.CVSE),
			table.Num(e.Difference), table.Num(e.DifferenceSE), table.Bool(e.Tied), aicc, bic, cover, table.Text(e.WorstFluid), table.Num(e.WorstRMSE)})
	}
	return t
}

// parametersShown is the number of tuned parameters written out in the table.
const parametersShown = 3

// parameterCell lists the tuned values with their uncertainties.
func parameterCell(e *validate.Entry) table.Cell {
	if e.Calibration == nil || e.Kind != validate.KindTuned {
		return table.Missing("")
	}
	var list []string
	locations := e.Calibration.Parameters[:e.Calibration.Locations]
	bound := ""
	for i := range locations {
		p := &locations[i]
		s := p.Label() + " " + number(p.Value, 4)
		if p.HasU {
			s += " ± " + number(p.U, 2)
		}
		if p.AtBound != "" {
			bound = "a parameter stands at its bound"
		}
		list = append(list, s)
	}
	if len(list) > parametersShown {
		list = append(list[:parametersShown], fmt.Sprintf("and %d more", len(list)-parametersShown))
	}
	return table.Text(strings.Join(list, "; ")).Note(bound)
}

// pairTable sets each tuned variant against its untuned form.
func pairTable(r *validate.Comparison) *table.Table {
	t := &table.Table{Title: "Tuned against untuned", Columns: []table.Column{
		{Name: "variant", Title: "variant", Wrap: 26},
		{Name: "untuned_rmse", Title: "untuned RMSE", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true},
		{Name: "cv_rmse", Title: "tuned CV RMSE", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true},
		{Name: "difference", Title: "difference", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true},
		{Name: "difference_se", Title: "SE", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true},
		{Name: "verdict", Title: "verdict"},
	}}
	for i := range r.Entries {
		e := &r.Entries[i]
		if e.Kind != validate.KindTuned {
			continue
		}
		cv := e.CV
		name := table.Text(e.Name)
		n := 0
		for k := range cv.Rows {
			if cv.Rows[k].UntunedAtSpinodal {
				n++
			}
		}
		if n > 0 {
			name = name.Note(fmt.Sprintf("untuned, the spinodal stands in for the kinetic limit of %d rows, which it does not have", n))
		}
		t.Rows = append(t.Rows, []table.Cell{name, table.Num(cv.UntunedRMSE), table.Num(cv.RMSE), table.Num(cv.Difference), table.Num(cv.DifferenceSE), table.Text(string(cv.Verdict))})
	}
	return t
}

func asideTable(r *validate.Comparison) *table.Table {
	t := &table.Table{Title: fmt.Sprintf("Set aside (%d)", len(r.Aside)), Columns: []table.Column{{Name: "variant", Title: "variant", Wrap: 20}, {Name: "reason", Title: "reason", Wrap: 40}}}
	for _, a := range r.Aside {
		t.Rows = append(t.Rows, []table.Cell{table.Text(a.Name), table.Text(a.Reason)})
	}
	return t
}
