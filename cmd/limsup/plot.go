package main

import (
	"errors"
	"fmt"
	"io"
	"path/filepath"
	"slices"
	"strings"

	"github.com/urfave/cli/v2"

	"limsup/cmd/limsup/internal/atomicfile"
	"limsup/data/quantity"
	"limsup/validate/plot"
	"limsup/validate/plot/draw"
)

func plotCommand() *cli.Command {
	return &cli.Command{
		Name:  "plot",
		Usage: "one figure as SVG, PNG or PDF",
		Description: "The kinds: " + strings.Join(plot.Kinds(), ", ") + ". The ending of --out chooses the format.\n\n" +
			"map, flux, isotherm, potential and embryo show one fluid (--fluid; with --data the one with most rows), at --temperature and --pressure or at its limit at the most common pressure. residuals and prediction need --data; profile needs --data and tunes the model of the flags; correlation needs --model or --data.\n\n" +
			"Examples: limsup plot map --data drops.csv --model lab.json --fluid n-pentane --out map.pdf\n" +
			"          limsup plot isotherm --fluid n-pentane --temperature \"147 degC\" --out isotherm.svg",
		ArgsUsage: "KIND",
		Flags:     flags([]cli.Flag{dataFlag()}, stateFlags(), tuneFlags(), modelFlags(), []cli.Flag{seedFlag(), outFlag("the figure")}),
		Action: func(c *cli.Context) error {
			kind, err := kindOf(c)
			if err != nil {
				return err
			}
			name := c.String("out")
			if name == "" {
				return &usageError{"limsup plot needs --out FILE, ending in ." + strings.Join(draw.Formats(), ", .")}
			}
			format := strings.ToLower(strings.TrimPrefix(filepath.Ext(name), "."))
			if !slices.Contains(draw.Formats(), format) {
				return &usageError{fmt.Sprintf("--out %q: want a file that ends in .%s", name, strings.Join(draw.Formats(), ", ."))}
			}
			f, err := figureOf(c, kind)
			var empty *plot.EmptyError
			if errors.As(err, &empty) && empty.Err == nil {
				return &usageError{"limsup plot: " + err.Error()}
			}
			if err != nil {
				return err
			}
			if err := atomicfile.Write(name, func(w io.Writer) error { return draw.Write(w, f, format) }); err != nil {
				return err
			}
			for _, n := range f.Notes {
				if _, err := fmt.Fprintln(c.App.ErrWriter, n); err != nil {
					return err
				}
			}
			return nil
		},
	}
}

// kindOf reads the only argument.
func kindOf(c *cli.Context) (string, error) {
	if c.Args().Len() != 1 {
		return "", &usageError{fmt.Sprintf("limsup plot takes one argument, the kind of figure: %s", strings.Join(plot.Kinds(), ", "))}
	}
	kind := c.Args().First()
	if !slices.Contains(plot.Kinds(), kind) {
		return "", &usageError{fmt.Sprintf("no figure %q%s; the kinds are %s", kind, suggest("", quantity.Near(kind, plot.Kinds())), strings.Join(plot.Kinds(), ", "))}
	}
	return kind, nil
}

// figureOf builds the figure that is asked for.
func figureOf(c *cli.Context, kind string) (*plot.Figure, error) {
	var v *validation
	var err error
	if len(c.StringSlice("data")) > 0 {
		bar := startProgress(c, "calibrating for the figure")
		v, err = newValidation(c, bar.Set)
		bar.Stop()
		if err != nil {
			return nil, err
		}
	}
	switch kind {
	case "residuals", "prediction", "profile":
		if v == nil {
			return nil, &usageError{"limsup plot " + kind + " needs --data FILE"}
		}
		switch {
		case kind == "residuals":
			return plot.Residuals(v.Assessment), nil
		case kind == "prediction":
			return plot.Prediction(v.Assessment), nil
		case v.calibration == nil:
			return nil, &usageError{"limsup plot profile tunes the model of the flags; --model and --tune none leave nothing to profile"}
		}
		bar := startProgress(c, "tuning along the profiles")
		defer bar.Stop()
		return plot.Profiles(v.calibration, bar.Set)
	case "correlation":
		if v != nil {
			return plot.Correlation(v.Model)
		}
		s, err := sourceFromFlags(c)
		if err != nil {
			return nil, err
		}
		return plot.Correlation(s.model)
	}
	in, state, err := fluidInput(c, v)
	if err != nil {
		return nil, err
	}
	switch kind {
	case "map":
		return plot.LimitMap(in)
	case "flux":
		return plot.Flux(in, state)
	case "isotherm":
		return plot.Isotherm(in, state)
	case "potential":
		return plot.Potential(in, state)
	}
	return plot.Embryo(in, state)
}

// fluidInput is the fluid, the model and the state of a figure of one fluid.
func fluidInput(c *cli.Context, v *validation) (*plot.Input, plot.State, error) {
	var state plot.State
	for _, x := range []struct {
		flag string
		d    quantity.Dimension
		to   *float64
	}{{"temperature", quantity.Temperature, &state.T}, {"pressure", quantity.Pressure, &state.P}} {
		if c.IsSet(x.flag) {
			var err error
			if *x.to, err = one(c, x.flag, x.d); err != nil {
				return nil, state, err
			}
			if *x.to == 0 {
				return nil, state, &usageError{fmt.Sprintf("--%s 0: want another value", x.flag)}
			}
		}
	}
	if v == nil {
		s, err := sourceFromFlags(c)
		if err != nil {
			return nil, state, err
		}
		r, err := s.oneFluid(c)
		return &plot.Input{Model: s.model, Record: r}, state, err
	}
	in := &plot.Input{Model: v.Model, Assessment: v.Assessment}
	names := c.StringSlice("fluid")
	if len(names) > 1 {
		return nil, state, &usageError{"limsup plot takes one --fluid"}
	}
	records := plot.ByRows(v.Data.Observations)
	if len(records) == 0 {
		return nil, state, &usageError{"limsup plot: no usable row in the data"}
	}
	if len(names) == 0 {
		in.Record = records[0]
		return in, state, nil
	}
	lib, err := library(c)
	if err != nil {
		return nil, state, err
	}
	r, err := lib.Find(names[0])
	if err == nil {
		in.Record = r
	}
	for _, x := range records { // those of the data may come from the model file
		if x.Key == names[0] || err == nil && x.Key == r.Key {
			in.Record, err = x, nil
			break
		}
	}
	return in, state, err
}
