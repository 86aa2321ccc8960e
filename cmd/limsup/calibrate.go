package main

import (
	"cmp"
	"fmt"
	"io"
	"math"
	"path/filepath"
	"slices"

	"github.com/urfave/cli/v2"

	"limsup/cmd/limsup/internal/atomicfile"
	"limsup/cmd/limsup/internal/table"
	"limsup/fit"
	"limsup/fit/modelfile"
	"limsup/validate"
)

func calibrateCommand() *cli.Command {
	return &cli.Command{
		Name:  "calibrate",
		Usage: "tune a model to measured superheat limits and say how good it is",
		Description: "Prints the parameters with their uncertainties, the residuals, a cross-validation against the untuned model on the same folds with a verdict, and what tuning did to the rest of the equation. --out writes the calibrated model, which every command reads with --model. On several machines, --share divides a --bootstrap (see limsup gather and limsup share).\n\n" +
			"Examples: limsup calibrate --data drops.csv --out lab.json\n" +
			"          limsup calibrate --data drops.csv --tune threshold --tune slope/fluid --anchor vapour-pressure=1%",
		Flags: flags([]cli.Flag{dataFlag()}, tuneFlags(), intervalFlags(), []cli.Flag{foldsFlag(),
			&cli.BoolFlag{Name: "rows", Usage: "print the residual of every row"},
		}, variantFlags(), []cli.Flag{formatFlag(), seedFlag(), shareFlag(), outFlag("the model, or the part of a share,")}),
		Action: func(c *cli.Context) error {
			if err := begin(c); err != nil {
				return err
			}
			part, divided, err := sharing(c)
			if err != nil {
				return err
			}
			t, err := taskFromFlags(c)
			if err != nil {
				return err
			}
			if divided {
				return writeBootstrapPart(c, part, t)
			}
			bar := startProgress(c, "calibrating")
			r, err := t.calibrate(c.String("folds"), bar.Set)
			bar.Stop()
			if err != nil {
				return err
			}
			tell(c, "search: %d evaluations of all rows; %s", r.Evaluations, r.Reason)
			if r.intervals, err = intervalsFromFlags(c, r.Calibration); err != nil {
				return err
			}
			if name := c.String("out"); name != "" {
				if err := r.writeModel(name, c.Uint64("seed")); err != nil {
					return err
				}
			}
			if err := print(c, r.product(c.String("out"), c.Bool("rows"))); err != nil {
				return err
			}
			if !r.Converged {
				return &noAnswerError{"not converged: " + r.Reason}
			}
			return nil
		},
	}
}

// calibration is all that the command shows.
type calibration struct {
	*fit.Calibration
	cv      *validate.CrossValidation
	noCV    string // why there is no cross-validation
	effects []fit.SideEffect

	intervals *intervals // nil unless asked for
}

// writeModel writes the model file.
func (r *calibration) writeModel(name string, seed uint64) error {
	f, err := modelfile.New(r.Model(), r.records(), r.meta(seed))
	if err != nil {
		return err
	}
	return atomicfile.Write(name, func(w io.Writer) error { return f.Encode(w) })
}

// estimateJSON begins what is told of an estimated parameter.
type estimateJSON struct {
	Name  string   `json:"name"`
	By    fit.By   `json:"by"`
	Group string   `json:"group"`
	Role  fit.Role `json:"role"`
	Value float64  `json:"value"`
	U     *float64 `json:"standard_uncertainty"`
}

func estimateToJSON(e *fit.Estimate) estimateJSON {
	return estimateJSON{e.Name, e.By, e.Group, e.Role, e.Value, optional(e.U, e.HasU)}
}

type parameterJSON struct {
	estimateJSON
	Low     *float64 `json:"interval_95_low"`
	High    *float64 `json:"interval_95_high"`
	Degrees float64  `json:"degrees_of_freedom,omitempty"`
	Reason  string   `json:"reason,omitempty"`
	Unit    string   `json:"unit"`
	AtBound bool     `json:"at_bound"`
	Start   float64  `json:"start"`
	Lower   float64  `json:"lower"`
	Upper   float64  `json:"upper"`
}

type cvJSON struct {
	Folds        string  `json:"folds"`
	RMSE         float64 `json:"rmse_K"`
	UntunedRMSE  float64 `json:"untuned_rmse_K"`
	Difference   float64 `json:"difference_K"`
	DifferenceSE float64 `json:"difference_se_K"`
}

func cvToJSON(cv *validate.CrossValidation) *cvJSON {
	return &cvJSON{cv.Folds.Kind, cv.RMSE, cv.UntunedRMSE, cv.Difference, cv.DifferenceSE}
}

type identityJSON struct {
	Condition      float64           `json:"condition"`
	Inflation      float64           `json:"uncertainty_inflation"`
	SingularValues []float64         `json:"singular_values"`
	Correlations   []correlationJSON `json:"correlations"`
	Warnings       []string          `json:"warnings"`
}

type correlationJSON struct {
	A     string  `json:"a"`
	B     string  `json:"b"`
	Value float64 `json:"value"`
}

type sideEffectJSON struct {
	Fluid  string        `json:"fluid"`
	Before saturatedSide `json:"before"`
	After  saturatedSide `json:"after"`
	Points int           `json:"points"`
	Low    float64       `json:"temperature_low_K"`
	High   float64       `json:"temperature_high_K"`
}

type saturatedSide struct {
	Tc      float64  `json:"critical_temperature_K"`
	Pc      float64  `json:"critical_pressure_Pa"`
	PMean   *float64 `json:"vapour_pressure_mean_deviation"`
	PMax    *float64 `json:"vapour_pressure_largest_deviation"`
	RhoMean *float64 `json:"liquid_density_mean_deviation"`
	RhoMax  *float64 `json:"liquid_density_largest_deviation"`
}

type calibrationJSON struct {
	Variant      string              `json:"variant"`
	Parameters   []parameterJSON     `json:"parameters"`
	RowsUsed     int                 `json:"rows_used"`
	RowsExcluded []excludedJSON      `json:"rows_excluded"`
	RMSE         float64             `json:"rmse_K"`
	Bias         float64             `json:"bias_K"`
	Spread       float64             `json:"spread_K"`
	LogLik       float64             `json:"log_likelihood"`
	Degrees      int                 `json:"degrees_of_freedom"`
	CV           *cvJSON             `json:"cross_validation"`
	NoCV         string              `json:"no_cross_validation,omitempty"`
	Verdict      validate.Verdict    `json:"verdict"`
	VerdictText  string              `json:"verdict_reason"`
	Identity     identityJSON        `json:"identifiability"`
	Profiles     []rangeJSON         `json:"profile_intervals,omitempty"`
	Bootstrap    *bootstrapJSON      `json:"bootstrap,omitempty"`
	SideEffects  []sideEffectJSON    `json:"side_effects"`
	References   map[string]string   `json:"reference_groups,omitempty"`
	Converged    bool                `json:"converged"`
	Usable       bool                `json:"usable"`
	Reason       string              `json:"reason"`
	Warnings     []string            `json:"warnings"`
	Residuals    []calibratedRowJSON `json:"residuals"`
	Cautions     []string            `json:"cautions"`
}

type calibratedRowJSON struct {
	File string `json:"file"`
	Line int    `json:"line"`
	observedJSON
	Standardised float64 `json:"standardised"`
	Leverage     float64 `json:"leverage"`
	Cook         float64 `json:"cook_distance"`
	Dffits       float64 `json:"dffits"`
	Shift        float64 `json:"largest_shift"` // of an estimate without the row, in its standard uncertainties
	ShiftOf      string  `json:"largest_shift_of,omitempty"`
	Log10Flux    float64 `json:"log10_flux"`
	Intact       bool    `json:"intact,omitempty"`
}

// product renders the calibration.
func (r *calibration) product(out string, rows bool) *product {
	p := &product{json: func() any { return r.json() }, csv: r.parameterTable()}
	summary := table.Facts{
		{Label: "model", Value: r.Plan.Variant.Name()},
		{Label: "rows", Value: fmt.Sprintf("%d used, %d excluded; %d with their own flux", len(r.Rows), len(r.Data.Excluded), r.Data.OwnFlux())},
		{Label: "residuals", Value: fmt.Sprintf("root mean square %s K, bias %s K, spread beyond the stated uncertainties %s K", number(r.RMSE, 3), number(r.Bias, 2), number(r.Spread, 3))},
		{Label: "search", Value: r.Reason},
	}
	for _, by := range []string{"method", "batch"} {
		if g, ok := r.References[by]; ok {
			summary = append(summary, table.Fact{Label: "reference " + by, Value: g + " (offset 0 by definition)"})
		}
	}
	p.blocks = append(p.blocks, block{heading: "Verdict", text: r.verdictText()}, block{facts: summary}, block{table: r.parameterTable()})
	for _, w := range r.Warnings {
		p.blocks = append(p.blocks, block{text: "Warning: " + w})
	}
	p.blocks = append(p.blocks, r.intervals.blocks()...)
	if r.cv != nil {
		p.blocks = append(p.blocks, block{table: r.cvTable()})
	}
	p.blocks = append(p.blocks, r.effectsBlock())
	if rows {
		p.blocks = append(p.blocks, block{table: r.rowTable()})
	}
	if x := excludedTable(r.Data.Excluded); x != nil {
		p.blocks = append(p.blocks, block{table: x})
	}
	for _, w := range r.Data.Warnings {
		p.blocks = append(p.blocks, block{text: "Warning: " + w.String()})
	}
	if out != "" {
		p.blocks = append(p.blocks, block{text: "Model written to " + out + "."})
	}
	p.blocks = append(p.blocks, cautionBlock())
	return p
}

func (r *calibration) verdictText() string {
	if r.cv == nil {
		return "None: " + r.noCV + "."
	}
	return "Tuning " + map[validate.Verdict]string{
		validate.Better: "is better than the untuned model",
		validate.NoGain: "brings no measurable gain over the untuned model",
		validate.Worse:  "is worse than the untuned model",
	}[r.cv.Verdict] + ": " + r.cv.Reason + "."
}

func (r *calibration) parameterTable() *table.Table {
	t := &table.Table{Title: "Parameters", Columns: []table.Column{
		{Name: "parameter", Title: "parameter"}, {Name: "group", Title: "group"},
		{Name: "value", Title: "value"}, {Name: "standard_uncertainty", Title: "u"},
		{Name: "unit", Title: "unit"}, {Name: "start", Title: "start", Kind: table.KindNumber, Digits: 4, Priority: 2},
		{Name: "lower", Title: "lower bound", Kind: table.KindNumber, Digits: 4, Priority: 3},
		{Name: "upper", Title: "upper bound", Kind: table.KindNumber, Digits: 4, Priority: 3},
	}}
	t.Columns[2].Kind, t.Columns[3].Kind = table.KindNumber, table.KindNumber
	t.Columns[2].Digits, t.Columns[3].Digits = 4, 4
	t.Columns[2].Fixed, t.Columns[3].Fixed = true, true
	for i := range r.Parameters {
		e := &r.Parameters[i]
		name := table.Text(e.Name)
		group := e.Group
		if e.Role != fit.RoleValue {
			group = "(" + string(e.Role) + ")"
		}
		if e.AtBound != "" {
			name = name.Note("at its " + e.AtBound + " bound")
		}
		u := table.Missing(e.Reason)
		if e.HasU {
			u = table.Num(e.U)
		} else if e.AtBound == "" && e.Reason != "" {
			name = name.Note("no uncertainty: " + e.Reason)
		}
		unit := e.Unit
		if unit == "1" {
			unit = ""
		}
		t.Rows = append(t.Rows, []table.Cell{name, table.Text(group), table.Num(e.Value), u, table.Text(unit), table.Num(e.Start), table.Num(e.Lower), table.Num(e.Upper)})
	}
	return t
}

func (r *calibration) cvTable() *table.Table {
	t := &table.Table{Title: "Cross-validation, leaving out " + foldWord(r.cv.Folds), Columns: []table.Column{
		{Name: "fold", Title: "left out"}, {Name: "rows", Title: "rows", Kind: table.KindInteger},
		{Name: "rmse", Title: "tuned RMSE", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true},
		{Name: "untuned_rmse", Title: "untuned RMSE", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true},
		{Name: "bias", Title: "tuned bias", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true, Priority: 1},
	}}
	const most = 40
	for k, name := range r.cv.Folds.Names {
		var n, tuned, untuned, bias float64
		for _, x := range r.cv.Rows {
			if x.Fold == k && x.Boiled {
				n++
				tuned += x.Tuned * x.Tuned
				untuned += x.Untuned * x.Untuned
				bias += x.Tuned
			}
		}
		if n == 0 {
			continue
		}
		if len(t.Rows) == most && len(r.cv.Folds.Names) > most+1 {
			t.Notes = append(t.Notes, fmt.Sprintf("%d further folds are not shown; --format json has every row.", len(r.cv.Folds.Names)-most))
			break
		}
		t.Rows = append(t.Rows, []table.Cell{table.Text(name), table.Int(int(n)), table.Num(math.Sqrt(tuned / n)), table.Num(math.Sqrt(untuned / n)), table.Num(bias / n)})
	}
	t.Rows = append(t.Rows, []table.Cell{table.Text("all"), table.Int(boiled(r.cv)), table.Num(r.cv.RMSE), table.Num(r.cv.UntunedRMSE), table.Missing("")})
	t.Notes = append(t.Notes, fmt.Sprintf("Difference %s K, standard error %s K.", number(r.cv.Difference, 3), number(r.cv.DifferenceSE, 2)))
	return t
}

func boiled(cv *validate.CrossValidation) int {
	n := 0
	for _, x := range cv.Rows {
		if x.Boiled {
			n++
		}
	}
	return n
}

func foldWord(f *validate.Folds) string {
	switch f.Kind {
	case "rows":
		return "one row at a time"
	case "fluid", "method", "batch", "pressure":
		return "one " + f.Kind + " at a time"
	}
	return "one of " + f.Kind + " parts at a time"
}

// effectsShown is the number of fluids in the table of side effects on the screen.
const effectsShown = 6

// effectsBlock says what tuning did to the equation of state.
func (r *calibration) effectsBlock() block {
	changed := false
	for _, e := range r.effects {
		changed = changed || e.Before != e.After
	}
	if !changed {
		return block{text: "Side effects: none; tuning left the equation of state as published."}
	}
	t := &table.Table{Title: "Side effects of tuning on the equation of state", Columns: []table.Column{
		{Name: "fluid", Title: "fluid"}, {Name: "state", Title: "state"},
		{Name: "critical_temperature", Title: "Tc", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true},
		{Name: "critical_pressure", Title: "Pc", Unit: "kPa", Kind: table.KindNumber, Digits: 1, Fixed: true},
		{Name: "vapour_pressure_mean", Title: "Psat mean", Unit: "%", Kind: table.KindNumber, Digits: 2, Fixed: true, Priority: 1},
		{Name: "vapour_pressure_largest", Title: "Psat largest", Unit: "%", Kind: table.KindNumber, Digits: 2, Fixed: true},
		{Name: "liquid_density_mean", Title: "ρ mean", Unit: "%", Kind: table.KindNumber, Digits: 2, Fixed: true, Priority: 1},
		{Name: "liquid_density_largest", Title: "ρ largest", Unit: "%", Kind: table.KindNumber, Digits: 2, Fixed: true},
	}, Notes: []string{"Deviations of saturation pressure and saturated liquid density from the fluid's own correlations, 0.6 to 0.95 Tc: mean of absolute values, and the largest."}}
	shown := slices.Clone(r.effects)
	if len(shown) > effectsShown+1 {
		slices.SortStableFunc(shown, func(a, b fit.SideEffect) int {
			return cmp.Compare(math.Abs(b.After.VapourPressureMax), math.Abs(a.After.VapourPressureMax))
		})
		shown = shown[:effectsShown]
		t.Notes = append(t.Notes, fmt.Sprintf("The %d fluids with the largest deviation after tuning; --format json has all %d.", effectsShown, len(r.effects)))
	}
	for _, e := range shown {
		for i, s := range []fit.Saturated{e.Before, e.After} {
			cell := func(v float64) table.Cell {
				if e.Points == 0 {
					return table.Missing("no correlation")
				}
				return table.Num(100 * v)
			}
			t.Rows = append(t.Rows, []table.Cell{table.Text(e.Fluid), table.Text([]string{"untuned", "tuned"}[i]), table.Num(s.CriticalTemperature), table.Num(s.CriticalPressure / 1e3),
				cell(s.VapourPressureMean), cell(s.VapourPressureMax), cell(s.LiquidDensityMean), cell(s.LiquidDensityMax)})
		}
	}
	return block{table: t}
}

func (r *calibration) rowTable() *table.Table {
	t := &table.Table{Title: "Residuals", Columns: []table.Column{
		{Name: "row", Title: "row"}, {Name: "fluid", Title: "fluid"}, {Name: "method", Title: "method", Priority: 3},
		{Name: "pressure", Title: "P", Unit: "kPa", Kind: table.KindNumber, Digits: 5},
		{Name: "measured", Title: "measured", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true},
		{Name: "predicted", Title: "predicted", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true, Priority: 2},
		{Name: "residual", Title: "residual", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true},
		{Name: "standardised", Title: "standardised", Kind: table.KindNumber, Digits: 2, Fixed: true},
		{Name: "leverage", Title: "leverage", Kind: table.KindNumber, Digits: 3, Fixed: true, Priority: 1},
	}}
	for _, x := range r.Rows {
		o := &r.Data.Observations[x.Index]
		row := table.Text(fmt.Sprintf("%s:%d", filepath.Base(o.File), o.Line))
		if o.Outcome != 0 {
			row = row.Note("intact: the limit lies above the reading")
		}
		t.Rows = append(t.Rows, []table.Cell{row, table.Text(o.Record.Key), table.Text(o.Method), table.Num(o.Pressure / 1e3),
			table.Num(o.Temperature), table.Num(x.Predicted), table.Num(x.Residual), table.Num(x.Standardised), table.Num(x.Leverage)})
	}
	return t
}
