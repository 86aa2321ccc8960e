package main

import (
	"context"
	"fmt"
	"io"
	"strings"

	"github.com/urfave/cli/v2"

	"limsup/data/caution"
	"limsup/data/quantity"
)

// run is the program: it parses args (the program's name first), computes, and
// writes the product to stdout and messages to stderr.
func run(ctx context.Context, stdout, stderr io.Writer, args []string) error {
	app := newApp(stdout, stderr)
	if len(args) == 0 {
		args = []string{"limsup"}
	}
	ordered, err := arrange(app, args[1:])
	if err != nil {
		return err
	}
	return app.RunContext(ctx, append([]string{args[0]}, ordered...))
}

func newApp(stdout, stderr io.Writer) *cli.App {
	app := &cli.App{
		Name:      "limsup",
		Usage:     "tune superheat models to measured superheat limits, and predict with them",
		UsageText: "limsup COMMAND [--flag value ...]",
		Description: "A liquid can be heated far above its boiling point before it boils by itself, at its superheat limit. " +
			"limsup tunes a cubic equation of state and the threshold of nucleation to your measured limits, says how good the result is, and exports the tuned model.\n\n" +
			strings.Join(caution.Sentences(), " "),
		Version:                   version(),
		Writer:                    stdout,
		ErrWriter:                 stderr,
		HideVersion:               false,
		DisableSliceFlagSeparator: true,
		HideHelpCommand:           false,
		ExitErrHandler:            func(*cli.Context, error) {}, // main sets the status
		OnUsageError:              onUsageError,
		Action:                    noCommand,
		CommandNotFound:           nil,
		Commands: []*cli.Command{
			checkCommand(), calibrateCommand(), validateCommand(), compareCommand(), predictCommand(),
			fluidsCommand(), isothermCommand(), embryoCommand(), fluxCommand(), plotCommand(), reportCommand(),
		},
	}
	for _, c := range app.Commands {
		c.OnUsageError = onUsageError
		c.CustomHelpTemplate = commandHelp
		c.HideHelpCommand = true
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
		return &usageError{fmt.Sprintf("%s has no flag --%s%s", commandName(c), name, suggest("--", quantity.Near(name, names)))}
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

// noCommand answers a call without a command, or with an unknown one.
func noCommand(c *cli.Context) error {
	if !c.Args().Present() {
		return cli.ShowAppHelp(c)
	}
	var names []string
	for _, k := range c.App.Commands {
		names = append(names, k.Name)
	}
	name := c.Args().First()
	return &usageError{fmt.Sprintf("no command %q%s (limsup help lists the commands)", name, suggest("", quantity.Near(name, names)))}
}

// noArguments refuses anything that is not a flag.
func noArguments(c *cli.Context) error {
	if c.Args().Present() {
		return &usageError{fmt.Sprintf("%s takes flags only; %q is left over", commandName(c), c.Args().First())}
	}
	return nil
}

// commandHelp is the help page of a command.
const commandHelp = `limsup {{.Name}}: {{.Usage}}

{{if .Description}}{{wrap .Description 0}}

{{end}}Flags (before or after anything else; repeat a flag to give several values):
{{range .VisibleFlags}}   {{.}}
{{end}}{{if .ArgsUsage}}
Arguments: {{.ArgsUsage}}
{{end}}`
