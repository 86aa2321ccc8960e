package main

import (
	"fmt"
	"slices"

	"github.com/urfave/cli/v2"

	"limsup/data/caution"
	"limsup/data/fluid"
	"limsup/data/quantity"
	"limsup/fit"
	"limsup/fit/modelfile"
)

// source is what a command evaluates: a model and the fluids it knows.
type source struct {
	model   *fit.Model
	library *fluid.Library
}

// sourceFromFlags reads --model, or builds the untuned model of the model flags.
func sourceFromFlags(c *cli.Context) (*source, error) {
	lib, err := library(c)
	if err != nil {
		return nil, err
	}
	if name := c.String("model"); name != "" {
		for _, f := range []string{"equation", "limit", "surface-tension", "properties", "embryo-pressure", "kinetics", "set"} {
			if c.IsSet(f) {
				return nil, &usageError{fmt.Sprintf("--model and --%s exclude each other: the model file holds its own", f)}
			}
		}
		m, records, err := readModel(c, name)
		if err != nil {
			return nil, err
		}
		// The records of the model file come first, those of --fluids may replace them.
		return &source{m, lib.With(unlessGiven(records, c, lib)...)}, nil
	}
	v, err := variantFromFlags(c)
	if err != nil {
		return nil, err
	}
	set, err := settings(c, "set")
	if err != nil {
		return nil, err
	}
	m, err := fit.Untuned(v, set...)
	if err != nil {
		return nil, err
	}
	return &source{m, lib}, nil
}

// unlessGiven leaves out records that the user gives anew.
func unlessGiven(records []*fluid.Record, c *cli.Context, lib *fluid.Library) []*fluid.Record {
	if len(c.StringSlice("fluids")) == 0 {
		return records
	}
	given := map[string]bool{}
	for _, name := range c.StringSlice("fluids") {
		if rs, err := readFluids(name); err == nil { // it was read without error before
			for _, r := range rs {
				given[r.Key] = true
			}
		}
	}
	var out []*fluid.Record
	for _, r := range records {
		if !given[r.Key] {
			out = append(out, r)
		}
	}
	return out
}

// readModel reads a model file, and says on standard error what is particular to it.
func readModel(c *cli.Context, name string) (*fit.Model, []*fluid.Record, error) {
	file, err := decodeModel(name)
	if err != nil {
		return nil, nil, err
	}
	for _, s := range particular(file) {
		fmt.Fprintln(c.App.ErrWriter, "limsup: warning: "+visible(name+": "+s))
	}
	return file.Model()
}

// particular are the cautions of a model file that not every one has.
func particular(file *modelfile.File) []string {
	usual := caution.Sentences()
	return slices.DeleteFunc(slices.Clone(file.Cautions), func(s string) bool { return slices.Contains(usual, s) })
}

// fluidsOf resolves --fluid.
func (s *source) fluidsOf(c *cli.Context) ([]*fluid.Record, error) {
	names := c.StringSlice("fluid")
	if len(names) == 0 {
		return nil, &usageError{commandName(c) + " needs --fluid; limsup fluids lists them"}
	}
	var out []*fluid.Record
	for _, n := range names {
		r, err := s.library.Find(n)
		if err != nil {
			return nil, err
		}
		out = append(out, r)
	}
	return out, nil
}

// one returns the only value of a repeated flag.
func one(c *cli.Context, flag string, d quantity.Dimension) (float64, error) {
	v, err := quantities(c, flag, d)
	switch {
	case err != nil:
		return 0, err
	case len(v) == 0:
		return 0, &usageError{fmt.Sprintf("%s needs --%s", commandName(c), flag)}
	case len(v) > 1:
		return 0, &usageError{fmt.Sprintf("%s takes one --%s", commandName(c), flag)}
	}
	return v[0], nil
}

// oneFluid returns the only fluid of a command that shows one.
func (s *source) oneFluid(c *cli.Context) (*fluid.Record, error) {
	r, err := s.fluidsOf(c)
	if err != nil {
		return nil, err
	}
	if len(r) > 1 {
		return nil, &usageError{commandName(c) + " takes one --fluid"}
	}
	return r[0], nil
}

// physics builds a fluid under the model, without flux where the surface tension
// of the variant is not known and need is false.
func (s *source) physics(r *fluid.Record, need bool) (*fit.Physics, error) {
	q := fit.Query{Record: r}
	if need {
		v := s.model.Variant
		v.Limit = fit.Kinetic // a flux is asked for, whatever limit the model predicts
		return fit.NewPhysics(v, r, s.model.Values(&q))
	}
	return fit.NewEquationPhysics(s.model.Variant, r, s.model.Values(&q))
}
