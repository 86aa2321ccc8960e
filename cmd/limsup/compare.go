package main

import (
	"fmt"
	"strings"

	"github.com/urfave/cli/v2"

	"limsup/data/quantity"
	"limsup/validate"
)

func compareCommand() *cli.Command {
	return &cli.Command{
		Name:  "compare",
		Usage: "model variants side by side, tuned and untuned, on the same rows",
		Description: "Every variant is tuned to the rows that all of them can predict and judged on rows left out of the tuning; published rules stand beside them. The difference to the best has a standard error from the scatter between folds, and variants within one of it are named as not distinguishable.\n\n" +
			"A variant that predicts less than the share --keep of the rows is set aside with its reason. --nested repeats the choice of the best without each fold, and tells what choosing adds to the error; its time grows with the square of the number of folds (--folds 10 keeps it short).\n\n" +
			"A --variant is written as parts joined by semicolons, KEY=VALUE or the name of an equation; keys: equation, limit, surface-tension, properties, embryo-pressure, kinetics, set (NAME=VALUE), tune (a term of calibrate, repeatable, or none).\n\n" +
			"Interrupting with Ctrl-C prints the variants that are finished. On several machines, --share divides the work (see limsup gather and limsup share).\n\n" +
			"Examples: limsup compare --data drops.csv\n" +
			"          limsup compare --data drops.csv --variant soave --variant \"redlich-kwong; tune=threshold; tune=slope\" --nested",
		Flags: []cli.Flag{dataFlag(),
			&cli.StringSliceFlag{Name: "variant", Usage: "variant to compare, `SPEC` as above (repeatable; default: a grid of equations, surface tensions, properties and limits)"},
			&cli.StringFlag{Name: "folds", Usage: "what is left out at a time: `KIND` rows, fluid, method, batch, pressure, or a number of parts (default: fluid, or rows with one fluid)"},
			&cli.StringFlag{Name: "keep", Value: "90%", Usage: "`SHARE` of the rows that a variant must be able to predict"},
			&cli.BoolFlag{Name: "nested", Usage: "estimate the error of choosing the best and then tuning it"},
			&cli.StringFlag{Name: "noise", Usage: "`DISTRIBUTION` of the residuals: gaussian; student, student=DEGREES or student=estimate; survival (default: gaussian)"},
			fluidsFileFlag(), formatFlag(), seedFlag(), shareFlag(), outFlag("the tables, or the part of a share,")},
		Action: func(c *cli.Context) error {
			if err := begin(c); err != nil {
				return err
			}
			part, divided, err := sharing(c)
			if err != nil {
				return err
			}
			o, err := compareOptions(c)
			if err != nil {
				return err
			}
			lib, set, err := measured(c)
			if err != nil {
				return err
			}
			bar := startProgress(c, "comparing variants")
			o.Progress = bar.Set
			if divided {
				defer bar.Stop()
				return writeComparisonPart(c, part, set, lib, o)
			}
			r, err := compareOrGather(c, set, lib, o)
			bar.Stop()
			if err != nil {
				return err
			}
			if err := show(c, compareProduct(r)); err != nil {
				return err
			}
			if err := c.Context.Err(); err != nil {
				return fmt.Errorf("comparison interrupted: %w", err)
			}
			return nil
		},
	}
}

func compareOptions(c *cli.Context) (validate.CompareOptions, error) {
	o := validate.CompareOptions{Folds: c.String("folds"), Seed: c.Uint64("seed"), Nested: c.Bool("nested")}
	var err error
	if o.Keep, err = parseShare(c.String("keep")); err != nil {
		return o, fmt.Errorf("--keep: %w", err)
	}
	noise, err := parseNoise(c.String("noise"))
	if err != nil {
		return o, err
	}
	o.Candidates = validate.DefaultCandidates()
	if specs := c.StringSlice("variant"); len(specs) > 0 {
		o.Candidates = nil
		for _, s := range specs {
			k, err := validate.ParseCandidate(s)
			if err != nil {
				return o, fmt.Errorf("--variant %q: %w", s, err)
			}
			o.Candidates = append(o.Candidates, k)
		}
	}
	for i := range o.Candidates {
		o.Candidates[i].Plan.Noise, o.Candidates[i].Plan.Seed = noise, o.Seed
	}
	return o, nil
}

// parseShare reads "90%" or "0.9".
func parseShare(s string) (float64, error) {
	number, percent := strings.CutSuffix(strings.TrimSpace(s), "%")
	v, err := quantity.ParseNumber(strings.TrimSpace(number))
	if percent {
		v /= 100
	}
	return v, err
}

type compareJSON struct {
	RowsUsed     int            `json:"rows_used"`
	Folds        string         `json:"folds"`
	FoldCount    int            `json:"fold_count"`
	Variants     []entryJSON    `json:"variants"`
	Excluded     []excludedJSON `json:"excluded"`
	Aside        []asideJSON    `json:"set_aside"`
	Unfinished   []string       `json:"unfinished"`
	Tied         []string       `json:"not_distinguishable"`
	Simplest     string         `json:"simplest_of_these"`
	Verdict      string         `json:"verdict"`
	Nested       *nestedJSON    `json:"nested"`
	NestedReason string         `json:"no_nested,omitempty"`
	Warnings     []string       `json:"warnings"`
}

type entryJSON struct {
	Variant      string             `json:"variant"`
	Kind         validate.EntryKind `json:"kind"`
	Tuned        bool               `json:"tuned"`
	Parameters   []comparedJSON     `json:"parameters"`
	K            float64            `json:"parameter_count"`
	RMSE         float64            `json:"rmse_K"`
	CVRMSE       float64            `json:"cv_rmse_K"`
	CVSE         float64            `json:"cv_se_K"`
	Difference   float64            `json:"difference_to_best_K"`
	DifferenceSE float64            `json:"difference_to_best_se_K"`
	Tied         bool               `json:"not_distinguishable_from_best"`
	AICc         *float64           `json:"aicc"`
	BIC          *float64           `json:"bic"`
	Coverage95   *float64           `json:"coverage_95"`
	Coverage     []coverageJSON     `json:"coverage"`
	WorstFluid   string             `json:"worst_fluid"`
	WorstRMSE    float64            `json:"worst_fluid_rmse_K"`
	Untuned      string             `json:"untuned_variant,omitempty"`
	AgainstItCV  *cvJSON            `json:"against_untuned,omitempty"`
	Verdict      validate.Verdict   `json:"verdict_against_untuned,omitempty"`
	Note         string             `json:"note,omitempty"`
	Warnings     []string           `json:"warnings,omitempty"`
}

type comparedJSON struct {
	estimateJSON
	Unit    string `json:"unit"`
	AtBound bool   `json:"at_bound"`
}

type asideJSON struct {
	Variant string `json:"variant"`
	Reason  string `json:"reason"`
}

type nestedJSON struct {
	RMSE     float64      `json:"rmse_K"`
	SE       float64      `json:"se_K"`
	Optimism float64      `json:"optimism_K"`
	Failed   int          `json:"failed_tunings"`
	Chosen   []choiceJSON `json:"chosen"`
}

type choiceJSON struct {
	Variant string `json:"variant"`
	Folds   int    `json:"folds"`
}

func comparedToJSON(r *validate.Comparison) *compareJSON {
	j := &compareJSON{RowsUsed: len(r.Observations), Folds: r.Folds.Kind, FoldCount: len(r.Folds.Names), Excluded: excludedList(r.Excluded),
		Aside: []asideJSON{}, Unfinished: append([]string{}, r.Unfinished...), Tied: []string{}, Verdict: r.Verdict, NestedReason: r.NestedReason, Warnings: []string{}}
	for i := range r.Entries {
		e := &r.Entries[i]
		x := entryJSON{Variant: e.Name, Kind: e.Kind, Tuned: e.Kind == validate.KindTuned, Parameters: []comparedJSON{}, K: e.K,
			RMSE: e.RMSE, CVRMSE: e.CVRMSE, CVSE: e.CVSE, Difference: e.Difference, DifferenceSE: e.DifferenceSE, Tied: e.Tied,
			AICc: optional(e.AICc, e.HasCriteria), BIC: optional(e.BIC, e.HasCriteria), Coverage: coverageList(e.Coverage),
			WorstFluid: e.WorstFluid, WorstRMSE: e.WorstRMSE, Untuned: e.UntunedName, Note: e.Note}
		if n := len(e.Coverage); n > 0 {
			x.Coverage95 = &e.Coverage[n-1].Observed
		}
		if e.Calibration != nil {
			x.Warnings = e.Calibration.Warnings
			for k := range e.Calibration.Parameters {
				p := &e.Calibration.Parameters[k]
				x.Parameters = append(x.Parameters, comparedJSON{estimateToJSON(p), p.Unit, p.AtBound != ""})
			}
		}
		if cv := e.CV; x.Tuned {
			x.AgainstItCV = cvToJSON(cv)
			x.Verdict = cv.Verdict
		}
		if e.Tied {
			j.Tied = append(j.Tied, e.Name)
		}
		j.Variants = append(j.Variants, x)
	}
	if len(r.Entries) > 0 {
		j.Simplest = r.Entries[r.Simplest].Name
	}
	for _, a := range r.Aside {
		j.Aside = append(j.Aside, asideJSON{a.Name, a.Reason})
	}
	if n := r.Nested; n != nil {
		j.Nested = &nestedJSON{RMSE: n.RMSE, SE: n.SE, Optimism: n.Optimism, Failed: n.Failed}
		for _, x := range n.Chosen {
			j.Nested.Chosen = append(j.Nested.Chosen, choiceJSON{x.Name, x.Folds})
		}
	}
	for _, w := range r.Warnings {
		j.Warnings = append(j.Warnings, w.String())
	}
	return j
}
