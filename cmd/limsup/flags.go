package main

import (
	"fmt"
	"slices"
	"strings"

	"github.com/urfave/cli/v2"

	"limsup/cmd/limsup/internal/table"
	"limsup/data/fluid"
	"limsup/data/quantity"
	"limsup/eos"
	"limsup/eos/nucleation"
	"limsup/fit"
)

// Flags that several commands share.

func formatFlag() cli.Flag {
	return &cli.StringFlag{Name: "format", Value: table.Screen, Usage: "output `FORMAT`: " + strings.Join(table.Formats(), ", ")}
}

func outFlag(what string) cli.Flag {
	return &cli.StringFlag{Name: "out", Usage: "write " + what + " to `FILE`"}
}

func seedFlag() cli.Flag {
	return &cli.Uint64Flag{Name: "seed", Value: 1, Usage: "seed of random `NUMBER`s"}
}

func dataFlag() cli.Flag {
	return &cli.StringSliceFlag{Name: "data", Usage: "measurements, a CSV or XLSX `FILE` (repeatable)"}
}

func sheetFlag() cli.Flag {
	return &cli.StringFlag{Name: "sheet", Usage: "`NAME` of the sheet in workbooks of --data (default: the only one with a header of measurements)"}
}

func fluidsFileFlag() cli.Flag {
	return &cli.StringSliceFlag{Name: "fluids", Usage: "TOML `FILE` of further fluids, which replace built-in ones of the same key (repeatable)"}
}

// variantFlags choose the theory.
func variantFlags() []cli.Flag {
	d := fit.DefaultVariant()
	return []cli.Flag{
		&cli.StringFlag{Name: "equation", Usage: "equation of state `NAME`: " + strings.Join(eos.EquationNames(), ", ") + " (default: " + d.Equation + ")"},
		&cli.StringFlag{Name: "limit", Usage: "`KIND` of limit: kinetic, spinodal (default: kinetic)"},
		&cli.StringFlag{Name: "surface-tension", Usage: "surface tension `MODEL`: correlation, corresponding-states, parachor (default: correlation)"},
		&cli.StringFlag{Name: "properties", Usage: "`SOURCE` of saturation pressure and densities: equation, correlation (default: equation)"},
		&cli.StringFlag{Name: "embryo-pressure", Usage: "`FORM` of the pressure in the critical bubble: exact, poynting (default: exact; poynting with correlations)"},
		&cli.StringFlag{Name: "kinetics", Usage: "kinetic `FACTOR` of the flux: mechanical, chemical, stepwise (default: mechanical)"},
		&cli.StringSliceFlag{Name: "set", Usage: "set a parameter, `NAME=VALUE` or NAME[GROUP]=VALUE, e.g. threshold=10 (repeatable)"},
		fluidsFileFlag(),
	}
}

// modelFlags choose the theory or a calibrated model.
func modelFlags() []cli.Flag {
	return append([]cli.Flag{&cli.StringFlag{Name: "model", Usage: "calibrated model `FILE`, instead of the model flags"}}, variantFlags()...)
}

// stateFlags choose fluids and states.
func stateFlags() []cli.Flag {
	return []cli.Flag{
		&cli.StringSliceFlag{Name: "fluid", Usage: "`KEY` or name of a fluid (repeatable; limsup fluids lists them)"},
		&cli.StringSliceFlag{Name: "temperature", Usage: "temperature `T` with unit, e.g. \"147 degC\" (repeatable)"},
		&cli.StringSliceFlag{Name: "pressure", Usage: "absolute pressure `P` with unit, e.g. \"0.5 MPa\"; negative for a liquid under tension (repeatable)"},
	}
}

// sweepFlags choose a range.
func sweepFlags(of string) []cli.Flag {
	return []cli.Flag{
		&cli.StringFlag{Name: "from", Usage: "first `" + of + "` of a sweep, with unit"},
		&cli.StringFlag{Name: "to", Usage: "last `" + of + "` of a sweep, with unit"},
		&cli.IntFlag{Name: "count", Usage: "`NUMBER` of points of a sweep"},
	}
}

func flags(groups ...[]cli.Flag) []cli.Flag { return slices.Concat(groups...) }

// variantFromFlags reads the variant.
func variantFromFlags(c *cli.Context) (fit.Variant, error) { return variantOver(c, fit.Variant{}) }

// variantOver is the base, as a plan file gives it, with the flags over it.
func variantOver(c *cli.Context, base fit.Variant) (fit.Variant, error) {
	v := fit.Variant{
		Equation: c.String("equation"), Limit: fit.Limit(c.String("limit")), Tension: fit.Tension(c.String("surface-tension")),
		Properties: nucleation.Properties(c.String("properties")), EmbryoPressure: nucleation.EmbryoPressure(c.String("embryo-pressure")),
		Kinetics: nucleation.Kinetics(c.String("kinetics")),
	}
	over(&v.Equation, base.Equation)
	over(&v.Limit, base.Limit)
	over(&v.Tension, base.Tension)
	over(&v.Properties, base.Properties)
	over(&v.EmbryoPressure, base.EmbryoPressure)
	over(&v.Kinetics, base.Kinetics)
	v, err := v.Complete()
	if e, ok := err.(*eos.UnknownEquationError); ok {
		return v, &usageError{fmt.Sprintf("%s: --equation %q%s; the equations are %s", commandName(c), e.Name, suggest("", quantity.Near(e.Name, e.Known)), strings.Join(e.Known, ", "))}
	}
	return v, err
}

// over fills what no flag gives.
func over[T ~string](flag *T, base T) {
	if *flag == "" {
		*flag = base
	}
}

// parseSetting reads NAME=VALUE or NAME[GROUP]=VALUE.
func parseSetting(flag, s string) (fit.Setting, error) {
	name, value, ok := strings.Cut(s, "=")
	if i := strings.LastIndex(s, "="); ok && strings.Contains(name, "[") {
		name, value = s[:i], s[i+1:]
	}
	bad := func(why string) (fit.Setting, error) {
		return fit.Setting{}, &usageError{fmt.Sprintf("--%s %q: %s", flag, s, why)}
	}
	if !ok {
		return bad("want NAME=VALUE")
	}
	group := ""
	if i := strings.IndexByte(name, '['); i >= 0 {
		if !strings.HasSuffix(name, "]") {
			return bad("want NAME[GROUP]=VALUE")
		}
		name, group = name[:i], name[i+1:len(name)-1]
	}
	v, err := quantity.ParseNumber(strings.TrimSpace(value))
	if err != nil {
		return bad(err.Error())
	}
	return fit.Setting{Name: strings.TrimSpace(name), Group: group, Value: v}, nil
}

func settings(c *cli.Context, flag string) ([]fit.Setting, error) {
	var out []fit.Setting
	for _, s := range c.StringSlice(flag) {
		v, err := parseSetting(flag, s)
		if err != nil {
			return nil, err
		}
		out = append(out, v)
	}
	return out, nil
}

// library is the built-in one with the user's fluids.
func library(c *cli.Context) (*fluid.Library, error) {
	lib, err := fluid.Builtin()
	if err != nil {
		return nil, err
	}
	for _, name := range c.StringSlice("fluids") {
		records, err := readFluidsOf(c, name)
		if err != nil {
			return nil, err
		}
		warnRecords(c, records)
		lib = lib.With(records...)
	}
	return lib, nil
}

// quantities reads a repeated flag with units.
func quantities(c *cli.Context, flag string, d quantity.Dimension) ([]float64, error) {
	var out []float64
	for _, s := range c.StringSlice(flag) {
		v, err := quantity.ParseIn(s, d)
		if err != nil {
			return nil, fmt.Errorf("--%s %q: %w", flag, s, err)
		}
		out = append(out, v)
	}
	return out, nil
}

// points reads --count.
func points(c *cli.Context, fallback int) (int, error) {
	n := fallback
	if c.IsSet("count") {
		n = c.Int("count")
	}
	if n < 2 || n > 1_000_000 {
		return 0, &usageError{fmt.Sprintf("--count %d: want 2 to 1000000", n)}
	}
	return n, nil
}

// sweep reads --from, --to and --count; without --from and --to there is no sweep.
func sweep(c *cli.Context, d quantity.Dimension, defaultCount int) ([]float64, error) {
	from, to := c.String("from"), c.String("to")
	if from == "" && to == "" {
		return nil, nil
	}
	if from == "" || to == "" {
		return nil, &usageError{"a sweep needs both --from and --to"}
	}
	n, err := points(c, defaultCount)
	if err != nil {
		return nil, err
	}
	lo, err := quantity.ParseIn(from, d)
	if err != nil {
		return nil, fmt.Errorf("--from %q: %w", from, err)
	}
	hi, err := quantity.ParseIn(to, d)
	if err != nil {
		return nil, fmt.Errorf("--to %q: %w", to, err)
	}
	out := make([]float64, n)
	for i := range out {
		out[i] = lo + (hi-lo)*float64(i)/float64(n-1)
	}
	return out, nil
}
