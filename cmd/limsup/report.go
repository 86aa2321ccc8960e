package main

import (
	"errors"
	"io"
	"math"
	"os"

	"github.com/urfave/cli/v2"

	"limsup/cmd/limsup/internal/atomicfile"
	"limsup/fit"
	"limsup/fit/modelfile"
	"limsup/validate"
	"limsup/validate/plot"
	"limsup/validate/report"
)

func reportCommand() *cli.Command {
	return &cli.Command{
		Name:  "report",
		Usage: "verdict, tables and figures of a calibration as one page of HTML",
		Description: "Writes a page that needs no network and no script, for screen, phone and paper. With --model the calibrated model is judged on the rows; if they are the very rows that it was calibrated on, the tuning is repeated, so that cross-validation and profile likelihoods can be shown. Without --model the model of the flags is tuned to the rows first; --tune none leaves it untuned. Of more than 2000 rows figures and tables name the 200 that are farthest off, and figures draw the others in marks that many share; limsup validate --format csv lists every row.\n\n" +
			"Examples: limsup report --data drops.csv --model lab.json --out report.html\n" +
			"          limsup report --data drops.csv --tune threshold --tune slope/fluid --out report.html",
		Flags: flags([]cli.Flag{dataFlag()}, tuneFlags(), []cli.Flag{foldsFlag()}, modelFlags(), []cli.Flag{seedFlag(), outFlag("the page")}),
		Action: func(c *cli.Context) error {
			if err := noArguments(c); err != nil {
				return err
			}
			bar := startProgress(c, "calibrating for the report")
			v, err := newValidation(c, bar.Set)
			bar.Stop()
			if err != nil {
				return err
			}
			r, err := newReport(c, v)
			if err != nil {
				return err
			}
			if name := c.String("out"); name != "" {
				err = atomicfile.Write(name, func(w io.Writer) error { return report.Write(w, r) })
			} else {
				err = report.Write(c.App.Writer, r)
			}
			if err != nil {
				return err
			}
			if r.Calibration != nil && !r.Calibration.Converged {
				return &noAnswerError{"not converged: " + r.Calibration.Reason}
			}
			return nil
		},
	}
}

// newReport gathers what the page shows.
func newReport(c *cli.Context, v *validation) (*report.Report, error) {
	r := &report.Report{Assessment: v.Assessment, Calibration: v.calibration, NoCV: trimReason(v.noCV), Seed: c.Uint64("seed"), Version: version()}
	noProfile := "the model was taken as it is, so that nothing was tuned whose likelihood could be profiled"
	if name := c.String("model"); name != "" {
		file, err := decodeModel(name)
		if err != nil {
			return nil, err
		}
		r.Stored, r.Seed, r.Warnings = file.Verdict, file.Seed, particular(file)
		if v.allSeen() {
			bar := startProgress(c, "repeating the calibration")
			again, why, err := repeat(c, v, file, bar.Set)
			bar.Stop()
			if err != nil {
				return nil, err
			}
			if why != "" {
				noProfile = why
			} else {
				v = again
				r.Assessment, r.Calibration, r.NoCV = v.Assessment, v.calibration, trimReason(v.noCV)
			}
		}
	}
	r.Warnings = append(r.Warnings, v.warnings()...)
	if r.Calibration != nil {
		var err error
		if r.Effects, err = r.Calibration.Model().SideEffects(r.Calibration.Queries()); err != nil {
			return nil, err
		}
	}
	bar := startProgress(c, "drawing and profiling the likelihood")
	r.Figures, r.Absent = plot.All(v.Assessment, r.Calibration, noProfile, bar.Set)
	bar.Stop()
	return r, nil
}

func decodeModel(name string) (*modelfile.File, error) {
	f, err := os.Open(name)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	return modelfile.Decode(f, name)
}

// allSeen tells whether every file of measurements was one of the calibration.
func (v *validation) allSeen() bool {
	return len(v.seen) > 0 && len(v.seen) == len(v.Data.Files)
}

// repeat tunes again what a model file was tuned to, as far as the file tells: its
// parameters, bounds, settings, noise and references, not priors and anchors. If the
// estimates come out otherwise, why says so.
func repeat(c *cli.Context, v *validation, file *modelfile.File, progress func(done, total int)) (again *validation, why string, err error) {
	if len(file.Inputs) != len(v.Data.Files) {
		return nil, "the model was calibrated on further files, so that its tuning cannot be repeated here", nil
	}
	plan := planOfModel(v.Model, file.Seed)
	cal, err := fit.Calibrate(v.Data, plan, fit.Options{})
	var option *fit.OptionError
	var few *fit.TooFewError
	var stuck *fit.ConvergenceError
	switch {
	case errors.As(err, &option), errors.As(err, &few), errors.As(err, &stuck):
		return nil, "the tuning cannot be repeated from the model file: " + err.Error(), nil
	case err != nil:
		return nil, "", err
	}
	if !sameEstimates(v.Model.Parameters, cal.Parameters) {
		return nil, "the tuning cannot be repeated from the model file alone: with its parameters and bounds, but without priors or anchors, the estimates differ", nil
	}
	cv, noCV, err := crossValidation(v.Data, plan, c.String("folds"), cal, progress)
	if err != nil {
		return nil, "", err
	}
	return &validation{Assessment: validate.Assess(cal, cv), calibration: cal, noCV: noCV}, "", nil
}

// planOfModel is the plan behind the parameters of a calibrated model.
func planOfModel(m *fit.Model, seed uint64) fit.Plan {
	p := validate.PlanOf(m)
	p.Terms, p.Starts, p.Bounds = nil, nil, nil
	p.Fixed, p.Noise, p.Seed, p.References = m.Settings, m.Noise, seed, m.References
	at := map[string]int{}
	for i := range m.Parameters {
		e := &m.Parameters[i]
		k, ok := at[e.Name]
		if !ok {
			k = len(p.Terms)
			at[e.Name] = k
			p.Terms = append(p.Terms, fit.Term{Name: e.Name, By: e.By})
		}
		switch e.Role {
		case fit.RoleValue:
			if !ok {
				p.Bounds = append(p.Bounds, fit.Bound{Name: e.Name, Lower: e.Lower, Upper: e.Upper})
			}
			p.Starts = append(p.Starts, fit.Setting{Name: e.Name, Group: e.Group, Value: e.Start})
		default:
			p.Terms[k].Pooled = true
		}
	}
	return p
}

// sameShare is the part of a standard uncertainty by which repeated estimates may
// differ: the search ends within 1e-9 of a range, so that rounding is far below and
// a prior or an anchor of any weight far above.
const sameShare = 1e-3

func sameEstimates(a, b []fit.Estimate) bool {
	if len(a) != len(b) {
		return false
	}
	for i := range a {
		width := a[i].U
		if !a[i].HasU {
			width = 1e-3 * (a[i].Upper - a[i].Lower)
		}
		if a[i].Label() != b[i].Label() || math.Abs(a[i].Value-b[i].Value) > sameShare*width {
			return false
		}
	}
	return true
}
