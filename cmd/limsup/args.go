package main

import (
	"slices"
	"strings"

	"github.com/urfave/cli/v2"
)

// This file puts a command line into the order that the parser expects: command,
// flags, other arguments. The parser itself stops at the first argument that is
// not a flag and would pass over, in silence, every flag after it.

// arrange reorders args (without the program's name). It needs to know which
// flags take no value.
//
// Errors: *usageError for a flag whose value is missing.
func arrange(app *cli.App, args []string) ([]string, error) {
	switches := map[string]bool{"help": true, "h": true, "version": true, "v": true}
	collect := func(flags []cli.Flag) {
		for _, f := range flags {
			if _, ok := f.(*cli.BoolFlag); ok {
				for _, name := range f.Names() {
					switches[name] = true
				}
			}
		}
	}
	collect(app.Flags)
	for _, c := range app.Commands {
		collect(c.Flags)
	}
	var flags, others []string
	for i := 0; i < len(args); i++ {
		a := args[i]
		switch {
		case a == "--":
			others = append(others, args[i+1:]...)
			i = len(args)
		case len(a) > 1 && a[0] == '-':
			flags = append(flags, a)
			name, _, valued := strings.Cut(strings.TrimLeft(a, "-"), "=")
			if valued || switches[name] {
				continue
			}
			if i+1 == len(args) || isFlag(args[i+1]) {
				if known(app, name) {
					return nil, &usageError{"flag --" + name + " needs a value"}
				}
				continue
			}
			i++
			flags = append(flags, args[i])
		default:
			others = append(others, a)
		}
	}
	var out []string
	if len(others) > 0 {
		out, others = append(out, others[0]), others[1:]
	}
	out = append(out, flags...)
	if len(others) > 0 {
		out = append(append(out, "--"), others...)
	}
	return out, nil
}

// isFlag tells a flag from a value such as -3 MPa.
func isFlag(a string) bool {
	return len(a) > 1 && a[0] == '-' && !(a[1] >= '0' && a[1] <= '9' || a[1] == '.')
}

// known tells whether any command has the flag.
func known(app *cli.App, name string) bool {
	has := func(flags []cli.Flag) bool {
		for _, f := range flags {
			if slices.Contains(f.Names(), name) {
				return true
			}
		}
		return false
	}
	return has(app.Flags) || slices.ContainsFunc(app.Commands, func(c *cli.Command) bool { return has(c.Flags) })
}
