package main

import (
	"errors"
	"fmt"

	"github.com/urfave/cli/v2"

	"limsup/cmd/limsup/internal/table"
	"limsup/data/measure"
	"limsup/fit"
	"limsup/validate"
)

func validateCommand() *cli.Command {
	return &cli.Command{
		Name:  "validate",
		Usage: "residuals, cross-validation, coverage and tests of a model on measurements",
		Description: "With --model the calibrated model predicts the rows as it is; --tune none does the same with an untuned model. Otherwise the model of the flags is tuned to the rows first, and each row is predicted once more by a model tuned without its fold.\n\n" +
			"Rows with outcome intact are listed, but enter no error, coverage or test.\n\n" +
			"Examples: limsup validate --data more.csv --model lab.json\n" +
			"          limsup validate --data drops.csv --tune threshold --tune slope --folds fluid",
		Flags: flags([]cli.Flag{dataFlag()}, tuneFlags(), []cli.Flag{foldsFlag()}, modelFlags(), []cli.Flag{formatFlag(), seedFlag(), outFlag("the tables")}),
		Action: func(c *cli.Context) error {
			if err := begin(c); err != nil {
				return err
			}
			bar := startProgress(c, "validating")
			v, err := newValidation(c, bar.Set)
			bar.Stop()
			if err != nil {
				return err
			}
			if err := show(c, v.product()); err != nil {
				return err
			}
			if v.calibration != nil && !v.calibration.Converged {
				return &noAnswerError{"not converged: " + v.calibration.Reason}
			}
			return nil
		},
	}
}

// noFolds is the word of --folds for no cross-validation.
const noFolds = "none"

func foldsFlag() cli.Flag {
	return &cli.StringFlag{Name: "folds", Usage: "what cross-validation leaves out at a time: `KIND` rows, fluid, method, batch, pressure, a number of parts, or none (default: fluid, or rows with one fluid)"}
}

// validation is all that the command shows.
type validation struct {
	*validate.Assessment
	calibration *fit.Calibration // nil for a model that was not refitted
	noCV        string           // why there is no cross-validation
	seen        []string         // files that the model was calibrated on
}

// newValidation refits, or predicts with a given model.
func newValidation(c *cli.Context, progress func(done, total int)) (*validation, error) {
	terms := c.StringSlice("tune")
	none := len(terms) == 1 && terms[0] == "none"
	if name := c.String("model"); name != "" || none {
		for _, f := range []string{"tune", "fix", "start", "bounds", "prior", "anchor", "noise", "restarts", "folds"} {
			if c.IsSet(f) && !(none && f == "tune") {
				return nil, &usageError{fmt.Sprintf("%s and --%s exclude each other: the model is taken as it is, nothing is tuned or left out", map[bool]string{true: "--tune none", false: "--model"}[none], f)}
			}
		}
		return predictAll(c, name)
	}
	t, err := taskFromFlags(c)
	if err != nil {
		return nil, err
	}
	cal, err := t.tune()
	if err != nil {
		return nil, err
	}
	cv, noCV, err := crossValidation(cal.Data, t.plan, c.String("folds"), cal, progress)
	if err != nil {
		return nil, err
	}
	return &validation{Assessment: validate.Assess(cal, cv), calibration: cal, noCV: noCV}, nil
}

// crossValidation uses the folds asked for, or the usual ones as far as the data allow:
// without folds given, data that cannot be divided are no error: a fold that leaves too
// little behind is no fault of the calibration, and reason says so.
func crossValidation(d *fit.Data, plan fit.Plan, folds string, c *fit.Calibration, progress func(done, total int)) (cv *validate.CrossValidation, reason string, err error) {
	explicit := folds != ""
	if !explicit {
		folds = validate.DefaultFolds(d.Observations)
	}
	if folds == noFolds {
		return nil, "no cross-validation: it was not asked for", nil
	}
	f, err := validate.NewFolds(folds, d.Observations, plan.Seed)
	if err == nil {
		cv, err = validate.CrossValidateTelling(d, plan, f, c, progress)
	}
	var few *fit.TooFewError
	var option *fit.OptionError
	if err != nil && !explicit && (errors.As(err, &few) || errors.As(err, &option)) {
		return nil, "no cross-validation: " + err.Error(), nil
	}
	return cv, "", err
}

// predictAll judges a model as it is.
func predictAll(c *cli.Context, name string) (*validation, error) {
	s, err := sourceFromFlags(c)
	if err != nil {
		return nil, err
	}
	set, err := readData(c, s.library)
	if err != nil {
		return nil, err
	}
	d, err := fit.Prepare(set, s.library, validate.PlanOf(s.model))
	if err != nil {
		return nil, err
	}
	if len(d.Observations) == 0 {
		return nil, withExclusions(&fit.TooFewError{Reason: "the model predicts none of the rows"}, d)
	}
	a, err := validate.AssessModel(d, s.model)
	if err != nil {
		return nil, err
	}
	v := &validation{Assessment: a, noCV: "the model was taken as it is: nothing was tuned"}
	if name != "" {
		if v.seen, err = calibratedOn(name, set.Files); err != nil {
			return nil, err
		}
	}
	return v, nil
}

// calibratedOn names the files of measurements that a model was calibrated on.
func calibratedOn(model string, files []measure.FileInfo) ([]string, error) {
	f, err := decodeModel(model)
	if err != nil {
		return nil, err
	}
	var out []string
	for _, x := range files {
		for _, in := range f.Inputs {
			if in.SHA256 == x.SHA256 {
				out = append(out, x.Name)
			}
		}
	}
	return out, nil
}

// warnings are those of the data, the model and the predictions, each once.
func (v *validation) warnings() []string {
	var out []string
	seen := map[string]int{}
	add := func(s string) {
		if seen[s]++; seen[s] == 1 {
			out = append(out, s)
		}
	}
	for _, name := range v.seen {
		add(name + " is a file that the model was calibrated on: its residuals are no test of the model")
	}
	if v.calibration != nil {
		for _, w := range v.calibration.Warnings {
			add(w)
		}
	}
	for i := range v.Rows {
		for _, w := range v.Rows[i].Warnings {
			add(w)
		}
	}
	for i, w := range out {
		if n := seen[w]; n > 1 {
			out[i] += fmt.Sprintf(" (%d rows)", n)
		}
	}
	for _, w := range v.Data.Warnings {
		out = append(out, w.String())
	}
	return out
}

// product renders the validation.
func (v *validation) product() *product {
	p := &product{json: func() any { return v.json() }, csv: v.rowTable()}
	add := func(b ...block) { p.blocks = append(p.blocks, b...) }
	facts := table.Facts{{Label: "model", Value: v.modelName()}}
	facts = append(facts,
		table.Fact{Label: "rows", Value: fmt.Sprintf("%d used (%d boiled, %d intact), %d excluded", len(v.Rows), v.Boiled, v.Intact, len(v.Data.Excluded))},
		table.Fact{Label: "residuals", Value: fmt.Sprintf("root mean square %s K, bias %s K, mean absolute %s K", number(v.RMSE, 3), number(v.Bias, 2), number(v.MeanAbsErr, 3))})
	if cv := v.CrossValidation; cv != nil {
		facts = append(facts, table.Fact{Label: "left out", Value: fmt.Sprintf("root mean square %s K; untuned %s K", number(cv.RMSE, 3), number(cv.UntunedRMSE, 3))})
	}
	add(block{facts: facts})
	if cv := v.CrossValidation; cv != nil {
		add(block{heading: "Verdict", text: (&calibration{cv: cv}).verdictText()})
	}
	for _, w := range v.warnings() {
		add(block{text: "Warning: " + w})
	}
	add(block{table: v.rowTable()}, block{table: v.groupTable()})
	if cv := v.CrossValidation; cv != nil {
		add(block{table: (&calibration{cv: cv}).cvTable()})
	} else {
		add(block{text: "No cross-validation: " + trimReason(v.noCV) + "."})
	}
	if len(v.Coverage) > 0 {
		add(block{table: v.coverageTable()})
	} else {
		add(block{text: "No interval coverage: " + v.CoverageReason + "."})
	}
	add(block{table: v.testTable()}, block{heading: "Farthest rows"})
	for _, f := range v.Worst {
		add(block{text: f.Text})
	}
	if x := excludedTable(v.Data.Excluded); x != nil {
		add(block{table: x})
	}
	add(cautionBlock())
	return p
}

func (v *validation) modelName() string {
	s := v.Model.Variant.Name()
	switch {
	case v.Refitted:
		return s + ", tuned to these rows"
	case v.Model.Calibrated:
		return s + ", calibrated before"
	}
	return s + ", untuned"
}
