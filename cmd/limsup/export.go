package main

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"github.com/urfave/cli/v2"

	"limsup/data/caution"
	"limsup/data/fluid"
	"limsup/data/quantity"
	"limsup/fit/export"
	"limsup/fit/modelfile"
)

func exportCommand() *cli.Command {
	var forms []string
	for _, f := range export.Forms() {
		forms = append(forms, string(f))
	}
	return &cli.Command{
		Name:  "export",
		Usage: "carry a model to another tool: lists of numbers, or source code that computes the same limits",
		Description: "parameters: a CSV file of every parameter with its uncertainty and correlations. table: a CSV file of limits over pressure, dense enough for straight lines. series: a CSV file of Chebyshev coefficients. " +
			"c, fortran, python, octave, modelica: source code with the whole computation, without other packages, which answers with the same limits to 1e-6 K and can test itself.\n\n" +
			"The range of pressure is that of the calibration, or --from to --to; without either it goes from 0.1 MPa to 0.9 of the lowest critical pressure. Outside its range exported code gives no answer. The fluids are those of the model file, or --fluid.\n\n" +
			"Examples: limsup export --model lab.json --as c --out lab.c\n" +
			"          limsup export --fluid n-pentane --equation peng-robinson --as table --from \"0.1 MPa\" --to \"2 MPa\" --tolerance \"0.05 K\"",
		Flags: flags([]cli.Flag{
			&cli.StringFlag{Name: "as", Usage: "`FORM` of the result: " + strings.Join(forms, ", ")},
			&cli.StringSliceFlag{Name: "fluid", Usage: "`KEY` or name of a fluid (repeatable; default: those of the model file)"},
			&cli.StringFlag{Name: "from", Usage: "lowest absolute `PRESSURE`, with unit (default: that of the calibration)"},
			&cli.StringFlag{Name: "to", Usage: "highest absolute `PRESSURE`, with unit (default: that of the calibration)"},
			&cli.StringFlag{Name: "tolerance", Value: "0.01 K", Usage: "largest `DIFFERENCE` in temperature of table and series from the model"},
			&cli.StringFlag{Name: "prefix", Value: "limsup_", Usage: "`BEGINNING` of the names in source code"},
			&cli.StringFlag{Name: "method", Usage: "`METHOD` whose offset and parameters are used (default: the reference method)"},
			&cli.StringFlag{Name: "batch", Usage: "`BATCH` whose parameters are used"},
		}, modelFlags(), []cli.Flag{outFlag("the export")}),
		Action: func(c *cli.Context) error {
			if err := noArguments(c); err != nil {
				return err
			}
			form := c.String("as")
			if !slices.Contains(forms, form) {
				return &usageError{fmt.Sprintf("--as %q%s; the forms are %s", form, suggest("", quantity.Near(form, forms)), strings.Join(forms, ", "))}
			}
			s, err := sourceFromFlags(c)
			if err != nil {
				return err
			}
			o, err := s.exportOptions(c)
			if err != nil {
				return err
			}
			var b bytes.Buffer
			if err := export.Write(&b, export.Form(form), s.model, o); err != nil {
				return err
			}
			return writeText(c, b.String())
		},
	}
}

// exportOptions reads the flags, and the model file once more for where it comes from.
func (s *source) exportOptions(c *cli.Context) (export.Options, error) {
	o := export.Options{Method: c.String("method"), Batch: c.String("batch"), Prefix: c.String("prefix"), Version: version(), Cautions: caution.Sentences()}
	var err error
	if o.From, o.To, err = pressureRange(c); err != nil {
		return o, err
	}
	// A difference in temperature: its unit is the kelvin, which a degree Celsius is too, but not
	// its zero point.
	if o.Tolerance, err = kelvins(c.String("tolerance")); err != nil {
		return o, err
	}
	if !(o.Tolerance > 0) {
		return o, &usageError{fmt.Sprintf("--tolerance %q: want more than 0 K", c.String("tolerance"))}
	}
	if name := c.String("model"); name != "" {
		b, err := os.ReadFile(name)
		if err != nil {
			return o, err
		}
		file, err := modelfile.Decode(bytes.NewReader(b), name)
		if err != nil {
			return o, err
		}
		sum := sha256.Sum256(b)
		o.Inputs = append(o.Inputs, export.Input{File: "the model file " + filepath.Base(name) + afterIf(" of limsup ", file.LimsupVersion), SHA256: hex.EncodeToString(sum[:])})
		for _, in := range file.Inputs {
			o.Inputs = append(o.Inputs, export.Input{File: "the measurements " + in.File, SHA256: in.SHA256})
		}
		o.Verdict = file.Verdict
		for _, text := range file.Cautions {
			if !slices.Contains(o.Cautions, text) {
				o.Cautions = append(o.Cautions, text)
			}
		}
		o.Records = file.Fluids
		if o.Records, err = s.current(o.Records); err != nil {
			return o, err
		}
	}
	if len(c.StringSlice("fluid")) > 0 || len(o.Records) == 0 {
		o.Records, err = s.fluidsOf(c)
	}
	return o, err
}

// current are the records of the same keys that the command works with: --fluids may
// replace those of the model file.
func (s *source) current(records []*fluid.Record) ([]*fluid.Record, error) {
	out := make([]*fluid.Record, len(records))
	for i, r := range records {
		var err error
		if out[i], err = s.library.Find(r.Key); err != nil {
			return nil, err
		}
	}
	return out, nil
}

// pressureRange reads --from and --to; both 0 without them.
func pressureRange(c *cli.Context) (lo, hi float64, err error) {
	if !c.IsSet("from") && !c.IsSet("to") {
		return 0, 0, nil
	}
	if !c.IsSet("from") || !c.IsSet("to") {
		return 0, 0, &usageError{"a range of pressure needs both --from and --to"}
	}
	if lo, err = quantity.ParseIn(c.String("from"), quantity.Pressure); err != nil {
		return 0, 0, fmt.Errorf("--from %q: %w", c.String("from"), err)
	}
	if hi, err = quantity.ParseIn(c.String("to"), quantity.Pressure); err != nil {
		return 0, 0, fmt.Errorf("--to %q: %w", c.String("to"), err)
	}
	if !(lo < hi) {
		return 0, 0, &usageError{fmt.Sprintf("--from %q --to %q: want the lower pressure first", c.String("from"), c.String("to"))}
	}
	return lo, hi, nil
}

// kelvins reads a difference of temperatures.
func kelvins(text string) (float64, error) {
	s := strings.TrimSpace(text)
	number, ok := strings.CutSuffix(s, "mK")
	scale := 1e-3
	if !ok {
		number, ok = strings.CutSuffix(s, "K")
		scale = 1
	}
	if !ok {
		return 0, &usageError{fmt.Sprintf("--tolerance %q: want a number with the unit K or mK", text)}
	}
	v, err := quantity.ParseNumber(strings.TrimSpace(number))
	if err != nil {
		return 0, &usageError{fmt.Sprintf("--tolerance %q: %v", text, err)}
	}
	return v * scale, nil
}

// afterIf is s behind a lead, or nothing.
func afterIf(lead, s string) string {
	if s == "" {
		return ""
	}
	return lead + s
}
