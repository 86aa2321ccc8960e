package main

import (
	"strings"

	"github.com/urfave/cli/v2"
)

// once refuses a flag that is given twice but takes one value: the parser would keep
// the last and say nothing of the others.
//
// Errors: *usageError.
func once(app *cli.App, line *commandLine) error {
	single := map[string]string{} // any name of a flag, and the first
	for _, c := range app.Commands {
		if c.Name != line.command {
			continue
		}
		for _, f := range c.Flags {
			switch f.(type) {
			case *cli.StringFlag, *cli.IntFlag, *cli.Uint64Flag, *cli.Float64Flag, *cli.DurationFlag:
				for _, name := range f.Names() {
					single[name] = f.Names()[0]
				}
			}
		}
	}
	seen := map[string]bool{}
	for i := 0; i < len(line.flags); i++ {
		if !strings.HasPrefix(line.flags[i], "-") {
			continue // the value of a list flag, as in --tune surface-tension
		}
		name, _, valued := strings.Cut(strings.TrimLeft(line.flags[i], "-"), "=")
		first, ok := single[name]
		if !ok {
			continue
		}
		if !valued {
			i++ // its value, which may look like a flag
		}
		if seen[first] {
			return &usageError{"limsup " + line.command + ": flag --" + first + " is given twice and takes one value"}
		}
		seen[first] = true
	}
	return nil
}
