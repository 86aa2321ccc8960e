package main

import (
	"bytes"
	"context"
	"encoding/json"
	"fmt"
	"io"
	"os"
	"runtime"
	"slices"

	"github.com/urfave/cli/v2"

	"limsup/cmd/limsup/internal/atomicfile"
	"limsup/data/fluid"
	"limsup/data/measure"
	"limsup/validate/share"
)

// This file holds what a command needs to be computed in shares: the flag, the
// writing of a part, and the reading of files from the parts when they are gathered.
// gather runs the command anew with the flags of the plan, with files and results
// from the parts, so that it shows what the single run shows.

func shareFlag() cli.Flag {
	return &cli.StringFlag{Name: "share", Usage: "compute only share `K/N` of the work, 1 ≤ K ≤ N, and write it to --out as a part for limsup gather"}
}

// sharing reads --share; ok tells whether it is there.
func sharing(c *cli.Context) (s share.Share, ok bool, err error) {
	if !c.IsSet("share") {
		return s, false, nil
	}
	if c.IsSet("format") {
		return s, false, &usageError{"--share and --format exclude each other: a part is JSON, and limsup gather has the format"}
	}
	s, err = share.Parse(c.String("share"))
	return s, true, err
}

// divisible is work that is done in independent jobs.
type divisible interface {
	Len() int
	// Run does the jobs from first up to but not including last.
	Run(ctx context.Context, first, last int) ([]json.RawMessage, error)
}

// writePart does the share and writes its part to --out, or to standard output.
func writePart(c *cli.Context, kind string, s share.Share, work divisible) error {
	p := &share.Part{Limsup: version(), Architecture: runtime.GOARCH, Kind: kind, Share: s, Seed: c.Uint64("seed"), Plan: planOf(c), Jobs: work.Len()}
	for _, role := range inputRoles {
		for _, name := range valuesOf(c, role) {
			text, err := os.ReadFile(name)
			if err != nil {
				return err
			}
			p.Inputs = append(p.Inputs, share.NewInput(role, name, text))
		}
	}
	first, last := s.Range(p.Jobs)
	var err error
	if p.Results, err = work.Run(c.Context, first, last); err != nil {
		return fmt.Errorf("share %s: %w", s, err)
	}
	if name := c.String("out"); name != "" {
		return atomicfile.Write(name, p.Encode)
	}
	return p.Encode(c.App.Writer)
}

// valuesOf lists the values of a flag as text; none where it is not set.
func valuesOf(c *cli.Context, name string) []string {
	switch v := c.Value(name).(type) {
	case cli.StringSlice:
		return v.Value()
	case nil:
		return nil
	default:
		if !c.IsSet(name) {
			return nil
		}
		return []string{fmt.Sprint(v)}
	}
}

// inputRoles are the flags that name files to read.
var inputRoles = []string{"data", "fluids", "plan"}

// apart are flags that are no part of the plan; the general ones are not either.
var apart = []string{"share", "format", "out"}

func inPlan(name string) bool {
	return !slices.Contains(apart, name) && !slices.ContainsFunc(general(), func(f cli.Flag) bool { return slices.Contains(f.Names(), name) })
}

// planOf lists the flags of a call that are part of the plan. A flag that is given its
// default counts, too: given, it may overrule a plan file.
func planOf(c *cli.Context) []share.Flag {
	var plan []share.Flag
	for _, f := range c.Command.Flags {
		name := f.Names()[0]
		if !inPlan(name) || !c.IsSet(name) {
			continue
		}
		plan = append(plan, share.Flag{Name: name, Values: valuesOf(c, name)})
	}
	return plan
}

// results of a gathered computation as a type of its own.
func resultsOf[T any](w *share.Whole) ([]T, error) {
	out := make([]T, len(w.Results))
	for i, text := range w.Results {
		d := json.NewDecoder(bytes.NewReader(text))
		d.DisallowUnknownFields()
		if err := d.Decode(&out[i]); err != nil {
			return nil, &share.FormatError{File: "gathered parts", Why: fmt.Sprintf("the result of job %d", i+1), Err: err}
		}
	}
	return out, nil
}

// encodeAll writes each result as JSON.
func encodeAll[T any](results []T) ([]json.RawMessage, error) {
	out := make([]json.RawMessage, len(results))
	for i := range results {
		text, err := json.Marshal(&results[i])
		if err != nil {
			return nil, fmt.Errorf("result of a job: %w", err)
		}
		out[i] = text
	}
	return out, nil
}

type gatheredKey struct{}

// gathered is what gather joined, or nil where the command computes by itself.
func gathered(c *cli.Context) *share.Whole {
	w, _ := c.Context.Value(gatheredKey{}).(*share.Whole)
	return w
}

// openInput opens a file of flag role: on disk, or in the gathered parts.
func openInput(c *cli.Context, role, name string) (io.ReadCloser, error) {
	w := gathered(c)
	if w == nil {
		return os.Open(name)
	}
	for _, in := range w.Inputs {
		if in.Role == role && in.Name == name {
			return io.NopCloser(bytes.NewReader(in.Content)), nil
		}
	}
	return nil, &share.FormatError{File: "gathered parts", Why: fmt.Sprintf("no content of --%s %s", role, name)}
}

// readMeasurements is measure.ReadFile, or reads from the gathered parts.
func readMeasurements(c *cli.Context, name string, o measure.Options) (*measure.Set, error) {
	if gathered(c) == nil {
		return measure.ReadFile(name, o)
	}
	f, err := openInput(c, "data", name)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	if !measure.IsWorkbook(name) {
		return measure.ReadCSV(f, name, o)
	}
	text, err := io.ReadAll(f)
	if err != nil {
		return nil, err
	}
	return measure.ReadXLSX(bytes.NewReader(text), int64(len(text)), name, o)
}

// readFluidsOf is readFluids, or reads from the gathered parts.
func readFluidsOf(c *cli.Context, name string) ([]*fluid.Record, error) {
	f, err := openInput(c, "fluids", name)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	return fluid.Parse(f, name)
}

// argsOf writes a gathered computation as the call that computes it.
//
// Errors: *share.FormatError for a flag that the command does not have, or that is no
// part of a plan.
func argsOf(w *share.Whole, command *cli.Command) ([]string, error) {
	args := []string{"limsup", command.Name}
	for _, f := range w.Plan {
		known := slices.ContainsFunc(command.Flags, func(x cli.Flag) bool { return x.Names()[0] == f.Name })
		if !known || !inPlan(f.Name) {
			return nil, &share.FormatError{File: "gathered parts", Why: fmt.Sprintf("flag --%s in the plan of %s", f.Name, command.Name)}
		}
		for _, v := range f.Values {
			args = append(args, "--"+f.Name+"="+v)
		}
	}
	return args, nil
}
