package main

import (
	"slices"
	"strconv"
	"strings"
	"unicode"

	"github.com/urfave/cli/v2"
)

// This file puts a command line into the order that the parser expects: command,
// flags, other arguments. The parser itself stops at the first argument that is
// not a flag and would pass over, in silence, every flag after it.

// commandLine is a command line taken apart.
type commandLine struct {
	command       string   // "" without one
	flags         []string // with their values
	rest          []string // other arguments
	help, version bool     // asked for, and not among the flags
}

// parse takes args (without the program's name) apart. It needs to know which
// flags take no value. The result is usable with an error, too: help may have been
// asked for.
//
// Errors: *usageError for a flag whose value is missing.
func parse(app *cli.App, args []string) (*commandLine, error) {
	switches := switchNames(app)
	line := &commandLine{}
	var failed error
	var others []string
	for i := 0; i < len(args); i++ {
		a := args[i]
		switch {
		case a == "--":
			others = append(others, args[i+1:]...)
			i = len(args)
		case a == "--help" || a == "-help" || a == "-h":
			line.help = true
		case a == "--version" || a == "-version":
			line.version = true
		case len(a) > 1 && a[0] == '-':
			line.flags = append(line.flags, a)
			name, _, valued := strings.Cut(strings.TrimLeft(a, "-"), "=")
			if valued || switches[name] {
				continue
			}
			if i+1 == len(args) || isFlag(args[i+1]) {
				if failed == nil && known(app, name) {
					failed = &usageError{"flag --" + name + " needs a value"}
				}
				continue
			}
			i++
			line.flags = append(line.flags, args[i])
		default:
			others = append(others, a)
		}
	}
	if len(others) > 0 {
		line.command, line.rest = others[0], others[1:]
	}
	return line, failed
}

// ordered is the command line as the parser wants it.
func (l *commandLine) ordered() []string {
	out := append([]string{l.command}, l.flags...)
	if len(l.rest) > 0 {
		out = append(append(out, "--"), l.rest...)
	}
	return out
}

// arrange reorders args (without the program's name).
//
// Errors: *usageError for a flag whose value is missing.
func arrange(app *cli.App, args []string) ([]string, error) {
	line, err := parse(app, args)
	if err != nil {
		return nil, err
	}
	return line.ordered(), nil
}

// switchNames are the flags that take no value.
func switchNames(app *cli.App) map[string]bool {
	out := map[string]bool{}
	for _, c := range app.Commands {
		for _, f := range c.Flags {
			if _, ok := f.(*cli.BoolFlag); ok {
				for _, name := range f.Names() {
					out[name] = true
				}
			}
		}
	}
	return out
}

// isFlag tells a flag from a value such as -3 MPa.
func isFlag(a string) bool {
	return len(a) > 1 && a[0] == '-' && !(a[1] >= '0' && a[1] <= '9' || a[1] == '.')
}

// known tells whether any command has the flag.
func known(app *cli.App, name string) bool {
	return slices.ContainsFunc(app.Commands, func(c *cli.Command) bool {
		return slices.ContainsFunc(c.Flags, func(f cli.Flag) bool { return slices.Contains(f.Names(), name) })
	})
}

// shown is text of the user as a message may carry it: quoted if it could upset a
// terminal.
func shown(s string) string {
	if strings.IndexFunc(s, func(r rune) bool { return !unicode.IsPrint(r) }) >= 0 {
		return strconv.Quote(s)
	}
	return s
}

// visible puts an escape such as \x1b in place of every character that is not
// printed but obeyed by a terminal. Line ends stay.
func visible(s string) string {
	var b strings.Builder
	for _, r := range s {
		if r == '\n' || unicode.IsPrint(r) {
			b.WriteRune(r)
			continue
		}
		q := strconv.QuoteRune(r)
		b.WriteString(q[1 : len(q)-1])
	}
	return b.String()
}
