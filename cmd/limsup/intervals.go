package main

import (
	"fmt"
	"math"

	"github.com/urfave/cli/v2"

	"limsup/cmd/limsup/internal/table"
	"limsup/fit"
	"limsup/fit/leastsq"
)

// Intervals of a calibration by profile likelihood and by bootstrap.

func intervalFlags() []cli.Flag {
	return []cli.Flag{
		&cli.StringSliceFlag{Name: "profile", Usage: "profile-likelihood interval of the parameter `NAME` or NAME[GROUP], or all (repeatable)"},
		&cli.IntFlag{Name: "bootstrap", Usage: "calibrate anew on `NUMBER` resampled data sets, for intervals of the parameters and of the limit of each fluid"},
		&cli.StringFlag{Name: "resample", Usage: "what the bootstrap draws: `KIND` rows, fluid, method, batch, or parametric, new readings from the model (default: rows)"},
		&cli.StringFlag{Name: "level", Usage: "`LEVEL` of these intervals (default: 95%)"},
	}
}

// intervals are what the flags asked for.
type intervals struct {
	level    float64
	profiles []fit.Range
	resample fit.Resampling
	boot     *fit.Bootstrap
}

// intervalOptions reads the flags; nil where no interval was asked for.
func intervalOptions(c *cli.Context) (*intervals, error) {
	if len(c.StringSlice("profile")) == 0 && !c.IsSet("bootstrap") {
		for _, f := range []string{"resample", "level"} {
			if c.IsSet(f) {
				return nil, &usageError{"--" + f + " needs --bootstrap or --profile"}
			}
		}
		return nil, nil
	}
	r := &intervals{level: 0.95, resample: fit.ResampleRows}
	if s := c.String("level"); s != "" {
		v, err := parseShare(s)
		if err != nil || !(v > 0 && v < 1) {
			return nil, &usageError{fmt.Sprintf("--level %q: want a share between 0 and 1, or a percentage, e.g. 90%%", s)}
		}
		r.level = v
	}
	if s := c.String("resample"); s != "" {
		if !c.IsSet("bootstrap") {
			return nil, &usageError{"--resample needs --bootstrap"}
		}
		r.resample = fit.Resampling(s)
	}
	return r, nil
}

// intervalsFromFlags computes them; nil where none was asked for.
func intervalsFromFlags(c *cli.Context, cal *fit.Calibration) (*intervals, error) {
	r, err := intervalOptions(c)
	if r == nil || err != nil {
		return nil, err
	}
	for _, name := range c.StringSlice("profile") {
		labels := []string{name}
		if name == "all" {
			labels = nil
			for i := range cal.Parameters {
				labels = append(labels, cal.Parameters[i].Label())
			}
		}
		for _, l := range labels {
			p, err := cal.Profile(l, r.level)
			if err != nil {
				return nil, err
			}
			r.profiles = append(r.profiles, p)
		}
	}
	if !c.IsSet("bootstrap") {
		return r, nil
	}
	bar := startProgress(c, "resampling")
	defer bar.Stop()
	o := r.bootstrap(c, cal)
	o.Progress = bar.Set
	reps, err := resampleOrGather(c, cal, o)
	if err != nil {
		return nil, err
	}
	r.boot, err = cal.Summarise(reps, o.Queries, r.level)
	return r, err
}

type rangeJSON struct {
	Parameter string   `json:"parameter"`
	Unit      string   `json:"unit"`
	Level     float64  `json:"level"`
	Estimate  float64  `json:"estimate"`
	Lower     *float64 `json:"lower"` // null: unbounded
	Upper     *float64 `json:"upper"`
	LowerEnd  string   `json:"lower_end"`
	UpperEnd  string   `json:"upper_end"`
	Warnings  []string `json:"warnings"`
}

type resampledJSON struct {
	Label      string     `json:"label"`
	Estimate   float64    `json:"estimate"`
	Replicates int        `json:"replicates"`
	SD         float64    `json:"standard_deviation"`
	Bias       float64    `json:"bias"`
	Percentile [2]float64 `json:"percentile"`
	Basic      [2]float64 `json:"basic"`
}

type bootstrapJSON struct {
	Resample   fit.Resampling  `json:"resample"`
	Level      float64         `json:"level"`
	Replicates int             `json:"replicates"`
	Failed     int             `json:"failed"`
	Failures   []string        `json:"failures"`
	Parameters []resampledJSON `json:"parameters"`
	Limits     []resampledJSON `json:"limits_K"`
}

func (r *intervals) profileJSON() []rangeJSON {
	if r == nil {
		return nil
	}
	var out []rangeJSON
	for _, p := range r.profiles {
		out = append(out, rangeJSON{p.Label, p.Unit, p.Level, p.Estimate, optional(p.Lower, !math.IsInf(p.Lower, 0)), optional(p.Upper, !math.IsInf(p.Upper, 0)),
			p.LowerEnd.String(), p.UpperEnd.String(), append([]string{}, p.Warnings...)})
	}
	return out
}

func (r *intervals) bootstrapJSON() *bootstrapJSON {
	if r == nil || r.boot == nil {
		return nil
	}
	list := func(all []fit.Resampled) []resampledJSON {
		out := []resampledJSON{}
		for _, s := range all {
			out = append(out, resampledJSON{s.Label, s.Estimate, s.N, s.SD, s.Bias, s.Percentile, s.Basic})
		}
		return out
	}
	b := r.boot
	return &bootstrapJSON{r.resample, b.Level, b.Replicates, b.Failed, append([]string{}, b.Failures...), list(b.Parameters), list(b.Limits)}
}

// blocks are the tables.
func (r *intervals) blocks() []block {
	if r == nil {
		return nil
	}
	var out []block
	percent := fmt.Sprintf("%.10g %%", 100*r.level)
	num := func(name, title string) table.Column {
		return table.Column{Name: name, Title: title, Kind: table.KindNumber, Digits: 4, Fixed: true}
	}
	if len(r.profiles) > 0 {
		t := &table.Table{Title: "Profile intervals, " + percent, Columns: []table.Column{{Name: "parameter", Title: "parameter"},
			num("estimate", "estimate"), num("lower", "lower"), num("upper", "upper")}}
		for _, p := range r.profiles {
			name := table.Text(p.Label)
			for _, w := range p.Warnings {
				name = name.Note(w)
			}
			t.Rows = append(t.Rows, []table.Cell{name, table.Num(p.Estimate), endCell(p.Lower, p.LowerEnd), endCell(p.Upper, p.UpperEnd)})
		}
		out = append(out, block{table: t})
	}
	if b := r.boot; b != nil {
		t := &table.Table{Title: fmt.Sprintf("Bootstrap (%s), %s, %d replicates, %d failed", r.resample, percent, b.Replicates, b.Failed),
			Columns: []table.Column{{Name: "quantity", Title: "quantity"}, num("estimate", "estimate"), num("sd", "sd"), num("bias", "bias"),
				num("percentile_lower", "percentile from"), num("percentile_upper", "to"), num("basic_lower", "basic from"), num("basic_upper", "to")},
			Notes: []string{"Limits in K, at the pressure given."}}
		for _, s := range append(append([]fit.Resampled{}, b.Parameters...), b.Limits...) {
			name := table.Text(s.Label)
			if s.N < b.Replicates-b.Failed {
				name = name.Note(fmt.Sprintf("in %d replicates only", s.N))
			}
			row := []table.Cell{name, table.Num(s.Estimate)}
			for _, v := range []float64{s.SD, s.Bias, s.Percentile[0], s.Percentile[1], s.Basic[0], s.Basic[1]} {
				if s.N < 2 {
					row = append(row, table.Missing("in too few replicates"))
				} else {
					row = append(row, table.Num(v))
				}
			}
			t.Rows = append(t.Rows, row)
		}
		out = append(out, block{table: t})
		for _, f := range b.Failures {
			out = append(out, block{text: "Failed " + f})
		}
	}
	return out
}

func endCell(v float64, e leastsq.End) table.Cell {
	switch e {
	case leastsq.Unbounded:
		return table.Missing("unbounded: the data set no limit on this side")
	case leastsq.AtLimit:
		return table.Num(v).Note("the bound of the parameter; the data set no limit before it")
	case leastsq.Unevaluated:
		return table.Num(v).Note("the model has no prediction beyond")
	}
	return table.Num(v)
}
