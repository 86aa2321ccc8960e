package main

import (
	"context"
	"encoding/json"
	"fmt"

	"github.com/urfave/cli/v2"

	"limsup/fit"
	"limsup/validate/share"
)

// bootstrapWork is a bootstrap to be done in shares of its replicates.
type bootstrapWork struct {
	cal *fit.Calibration
	o   fit.BootstrapOptions // of all replicates
}

func (w bootstrapWork) Len() int { return w.o.Count }

// batch is the number of replicates between two looks at the context.
const batch = 64

func (w bootstrapWork) Run(ctx context.Context, first, last int) ([]json.RawMessage, error) {
	var all []fit.Replicate
	for at := first; at < last; at += batch {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		o := w.o
		o.First, o.Count = at, min(batch, last-at)
		if w.o.Progress != nil {
			o.Progress = func(done, _ int) { w.o.Progress(at-first+done, last-first) }
		}
		replicates, err := w.cal.Resample(o)
		if err != nil {
			return nil, err
		}
		all = append(all, replicates...)
	}
	return encodeAll(all)
}

// writeBootstrapPart draws a share of the replicates and writes its part. What else
// the command computes is quick, and left to gather.
func writeBootstrapPart(c *cli.Context, s share.Share, t *task) error {
	r, err := intervalOptions(c)
	if err != nil {
		return err
	}
	if !c.IsSet("bootstrap") {
		return &usageError{"--share needs --bootstrap: only its replicates are divided"}
	}
	cal, err := t.tune()
	if err != nil {
		return err
	}
	bar := startProgress(c, "resampling")
	defer bar.Stop()
	o := r.bootstrap(c, cal)
	o.Progress = bar.Set
	// The options must be right even where the share holds no replicate.
	if o.Count < 1 || o.Count > 1_000_000 {
		_, err := cal.Resample(o)
		return err
	}
	return writePart(c, share.Bootstrap, s, bootstrapWork{cal, o})
}

// bootstrap are the options of all replicates.
func (r *intervals) bootstrap(c *cli.Context, cal *fit.Calibration) fit.BootstrapOptions {
	return fit.BootstrapOptions{Resample: r.resample, Count: c.Int("bootstrap"), Seed: c.Uint64("seed"), Queries: cal.Queries()}
}

// resampleOrGather draws replicates, or takes them from gathered parts.
func resampleOrGather(c *cli.Context, cal *fit.Calibration, o fit.BootstrapOptions) ([]fit.Replicate, error) {
	w := gathered(c)
	if w == nil {
		return cal.Resample(o)
	}
	replicates, err := resultsOf[fit.Replicate](w)
	if err != nil {
		return nil, err
	}
	if len(replicates) != o.Count {
		return nil, &share.FormatError{File: "gathered parts", Why: fmt.Sprintf("%d replicates of %d", len(replicates), o.Count)}
	}
	for i := range replicates {
		r := &replicates[i]
		parameters, limits := len(cal.Parameters), len(o.Queries)
		if r.Index != i || len(r.Values) != parameters || len(r.HasValue) != parameters || len(r.Limits) != limits || len(r.HasLimit) != limits {
			return nil, &share.FormatError{File: "gathered parts", Why: fmt.Sprintf("replicate %d does not have %d parameters and %d limits under its number", i, parameters, limits)}
		}
	}
	return replicates, nil
}
