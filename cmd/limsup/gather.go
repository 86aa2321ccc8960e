package main

import (
	"context"
	"fmt"
	"os"

	"github.com/urfave/cli/v2"

	"limsup/validate/share"
)

func gatherCommand() *cli.Command {
	return &cli.Command{
		Name:      "gather",
		Usage:     "join the parts of a computation that was done in shares",
		ArgsUsage: "PART ...",
		Description: "Does what the command does without --share, byte for byte: compare prints its tables, or writes them to --out; calibrate prints its tables, and writes the model to --out. The parts may come in any order and from any folder; the first carries the measurements and fluids, so nothing else is needed.\n\n" +
			"A share that is missing, a part that is given twice, and a part of another computation (other data, plan, seed, number of shares, version of limsup or kind of processor) are named, and nothing is printed.\n\n" +
			"Example: limsup compare --data drops.csv --share 1/2 --out one.json\n" +
			"         limsup compare --data drops.csv --share 2/2 --out two.json\n" +
			"         limsup gather one.json two.json",
		Flags: []cli.Flag{formatFlag(), outFlag("the product of the command")},
		Action: func(c *cli.Context) error {
			if err := checkFormat(c); err != nil {
				return err
			}
			w, err := readParts(c.Args().Slice())
			if err != nil {
				return err
			}
			command := c.App.Command(dividedCommand[w.Kind])
			args, err := argsOf(w, command)
			if err != nil {
				return err
			}
			args = append(args, "--format="+c.String("format"))
			if out := c.String("out"); out != "" {
				args = append(args, "--out="+out)
			}
			return run(context.WithValue(c.Context, gatheredKey{}, w), c.App.Writer, c.App.ErrWriter, args)
		},
	}
}

// dividedCommand is the command of each kind of part.
var dividedCommand = map[string]string{share.Compare: "compare", share.Bootstrap: "calibrate"}

// readParts reads and joins files.
func readParts(names []string) (*share.Whole, error) {
	if len(names) == 0 {
		return nil, &usageError{"limsup gather needs the files of the parts"}
	}
	var parts []*share.Part
	var problems share.Problems
	for _, name := range names {
		p, err := readPart(name)
		if err != nil {
			problems = append(problems, err)
			continue
		}
		parts = append(parts, p)
	}
	if len(problems) > 0 {
		return nil, problems
	}
	return share.Join(parts, version())
}

func readPart(name string) (*share.Part, error) {
	f, err := os.Open(name)
	if err != nil {
		return nil, fmt.Errorf("part: %w", err)
	}
	defer f.Close()
	return share.Decode(f, name)
}
