package main

import (
	"context"
	"fmt"
	"io"
	"strings"
	"time"

	"github.com/urfave/cli/v2"

	"limsup/data/quantity"
)

// run is the program: it parses args (the program's name first), computes, and
// writes the product to stdout and messages to stderr.
func run(ctx context.Context, stdout, stderr io.Writer, args []string) error {
	app := newApp(stdout, stderr)
	if len(args) == 0 {
		args = []string{"limsup"}
	}
	line, err := parse(app, args[1:])
	switch {
	case line.version:
		_, err = fmt.Fprintf(stdout, "%s %s\n", app.Name, app.Version)
		return err
	case line.help, line.command == "help", len(args) == 1:
		return showHelp(app, line)
	case err != nil:
		return err
	case line.command == "":
		return &usageError{"no command (limsup help lists them)"}
	}
	if err := once(app, line); err != nil {
		return err
	}
	return app.RunContext(ctx, append([]string{args[0]}, line.ordered()...))
}

func newApp(stdout, stderr io.Writer) *cli.App {
	app := &cli.App{
		Name:                      "limsup",
		Usage:                     "tune superheat models to measured superheat limits, and predict with them",
		UsageText:                 "limsup COMMAND [--flag value ...]",
		Description:               about(),
		Version:                   version(),
		Writer:                    stdout,
		ErrWriter:                 stderr,
		HideVersion:               true, // run answers --version and --help
		HideHelp:                  true,
		DisableSliceFlagSeparator: true,
		HideHelpCommand:           true,
		ExitErrHandler:            func(*cli.Context, error) {}, // main sets the status
		OnUsageError:              onUsageError,
		Action:                    noCommand,
		CommandNotFound:           nil,
		Commands: []*cli.Command{
			checkCommand(), calibrateCommand(), validateCommand(), compareCommand(), predictCommand(), exportCommand(), designCommand(),
			fluidsCommand(), isothermCommand(), embryoCommand(), fluxCommand(), shareCommand(), gatherCommand(), plotCommand(), reportCommand(),
			helpCommand(), manCommand(), completionCommand(),
		},
	}
	for _, c := range app.Commands {
		c.OnUsageError = onUsageError
		c.HideHelp, c.HideHelpCommand = true, true
		c.Flags = withGeneral(c.Flags)
		c.Before, c.After = prepare, finish(time.Now())
	}
	return app
}

// onUsageError turns the parser's errors into usage errors, with a suggestion.
func onUsageError(c *cli.Context, err error, _ bool) error {
	text := err.Error()
	if name, ok := strings.CutPrefix(text, "flag provided but not defined: -"); ok {
		name = strings.TrimLeft(name, "-")
		var names []string
		if c.Command != nil {
			for _, f := range c.Command.Flags {
				names = append(names, f.Names()...)
			}
		}
		if hint := ofDivided(c, name); hint != "" {
			return &usageError{hint}
		}
		return &usageError{fmt.Sprintf("%s has no flag --%s%s", commandName(c), shown(name), suggest("--", quantity.Near(name, names)))}
	}
	return &usageError{commandName(c) + ": " + text}
}

func commandName(c *cli.Context) string {
	if c.Command == nil || c.Command.Name == "" || c.Command.Name == "limsup" {
		return "limsup"
	}
	return "limsup " + c.Command.Name
}

func suggest(prefix string, near []string) string {
	if len(near) == 0 {
		return ""
	}
	quoted := make([]string, len(near))
	for i, n := range near {
		quoted[i] = prefix + n
	}
	return "; did you mean " + strings.Join(quoted, " or ") + "?"
}

// noCommand answers a call with an unknown command.
func noCommand(c *cli.Context) error { return unknownCommand(c.App, c.Args().First()) }

func unknownCommand(app *cli.App, name string) error {
	return &usageError{fmt.Sprintf("no command %q%s (limsup help lists them)", name, suggest("", quantity.Near(name, commandNames(app))))}
}

func commandNames(app *cli.App) []string {
	var names []string
	for _, k := range app.Commands {
		names = append(names, k.Name)
	}
	return names
}

// noArguments refuses anything that is not a flag.
func noArguments(c *cli.Context) error {
	if c.Args().Present() {
		text := fmt.Sprintf("%s takes flags only; %q is left over", commandName(c), c.Args().First())
		if c.Args().First() == "help" {
			text += " (limsup help " + c.Command.Name + " shows its page)"
		}
		return &usageError{text}
	}
	return nil
}
