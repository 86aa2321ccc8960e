package main

import (
	"context"
	"encoding/json"

	"github.com/urfave/cli/v2"

	"limsup/data/fluid"
	"limsup/data/measure"
	"limsup/validate"
	"limsup/validate/share"
)

// comparisonWork is a comparison to be done in shares.
type comparisonWork struct{ *validate.Jobs }

func (w comparisonWork) Run(ctx context.Context, first, last int) ([]json.RawMessage, error) {
	results, err := w.Jobs.Run(ctx, first, last)
	if err != nil {
		return nil, err
	}
	return encodeAll(results)
}

// writeComparisonPart computes a share and writes its part.
func writeComparisonPart(c *cli.Context, s share.Share, set *measure.Set, lib *fluid.Library, o validate.CompareOptions) error {
	jobs, err := validate.NewJobs(set, lib, o)
	if err != nil {
		return err
	}
	return writePart(c, share.Compare, s, comparisonWork{jobs})
}

// compareOrGather computes a comparison, or puts it together from gathered parts.
func compareOrGather(c *cli.Context, set *measure.Set, lib *fluid.Library, o validate.CompareOptions) (*validate.Comparison, error) {
	w := gathered(c)
	if w == nil {
		return validate.Compare(c.Context, set, lib, o)
	}
	jobs, err := validate.NewJobs(set, lib, o)
	if err != nil {
		return nil, err
	}
	results, err := resultsOf[validate.JobResult](w)
	if err != nil {
		return nil, err
	}
	return jobs.Finish(results)
}
