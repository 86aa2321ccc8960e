package main

import (
	"fmt"
	"io"
	"os"
	"slices"
	"strings"
	"time"

	"github.com/urfave/cli/v2"

	"limsup/cmd/limsup/internal/manual"
	"limsup/cmd/limsup/internal/table"
	"limsup/data/caution"
	"limsup/data/fluid"
	"limsup/data/quantity"
	"limsup/fit"
	"limsup/validate/plot"
)

// This file holds what is said about the commands: help pages, the page for man
// and the completion of command lines, all from the definitions of the commands.

func helpCommand() *cli.Command {
	return &cli.Command{
		Name: "help", Usage: "what there is, or all about one command", ArgsUsage: "COMMAND",
		Description: "The same page as limsup COMMAND --help. Without a command, the list of commands.\n\nExample: limsup help predict",
	}
}

func manCommand() *cli.Command {
	return &cli.Command{
		Name: "man", Usage: "the whole manual as a page for man",
		Description: "Put it as limsup.1 in a folder where man looks, or read it with man -l.\n\nExample: limsup man --out limsup.1",
		Flags:       []cli.Flag{outFlag("the page")},
		Action: func(c *cli.Context) error {
			if err := noArguments(c); err != nil {
				return err
			}
			return writeText(c, handbook(c.App, nil).Man())
		},
	}
}

func completionCommand() *cli.Command {
	return &cli.Command{
		Name: "completion", Usage: "a script that completes command lines in bash, zsh or fish", ArgsUsage: "SHELL",
		Description: "The script completes commands, flags, file names, the keys of the built-in fluids and the words of options. Let the shell read it at its start:\n\n" +
			"bash, in ~/.bashrc: source <(limsup completion bash)\n\n" +
			"zsh, in ~/.zshrc after compinit: source <(limsup completion zsh)\n\n" +
			"fish, in config.fish: limsup completion fish | source\n\n" +
			"Example: limsup completion bash",
		Flags: []cli.Flag{outFlag("the script")},
		Action: func(c *cli.Context) error {
			if c.Args().Len() != 1 {
				return &usageError{"limsup completion takes one argument, the shell: " + strings.Join(manual.Shells(), ", ")}
			}
			lib, err := fluid.Builtin()
			if err != nil {
				return err
			}
			var keys []string
			for _, r := range lib.All() {
				keys = append(keys, r.Key)
			}
			shell := c.Args().First()
			script, ok := handbook(c.App, keys).Completion(shell)
			if !ok {
				return &usageError{fmt.Sprintf("no completion for the shell %q%s; the shells are %s", shell, suggest("", quantity.Near(shell, manual.Shells())), strings.Join(manual.Shells(), ", "))}
			}
			return writeText(c, script)
		},
	}
}

// general are flags that every command has.
func general() []cli.Flag {
	return []cli.Flag{
		&cli.BoolFlag{Name: "quiet", Usage: "no progress and no notes: results and errors only"},
		&cli.BoolFlag{Name: "verbose", Usage: "tell on standard error how the work went"},
		&cli.BoolFlag{Name: "help", Aliases: []string{"h"}, Usage: "this page"},
	}
}

// withGeneral adds the general flags; they replace flags of the same names. Where
// there are measurements, the sheet can be chosen.
func withGeneral(list []cli.Flag) []cli.Flag {
	if i := slices.IndexFunc(list, func(f cli.Flag) bool { return f.Names()[0] == "data" }); i >= 0 {
		list = slices.Insert(list, i+1, sheetFlag())
	}
	more := general()
	taken := func(f cli.Flag) bool {
		return slices.ContainsFunc(more, func(g cli.Flag) bool { return g.Names()[0] == f.Names()[0] })
	}
	return append(slices.DeleteFunc(list, taken), more...)
}

// prepare obeys the general flags before a command begins.
func prepare(c *cli.Context) error {
	if c.Bool("quiet") && c.Bool("verbose") {
		return &usageError{"--quiet and --verbose exclude each other"}
	}
	if c.Bool("quiet") {
		c.App.ErrWriter = io.Discard // errors are written by main
	}
	return nil
}

// finish says for --verbose how long a command that began at the given time took.
func finish(began time.Time) cli.AfterFunc {
	return func(c *cli.Context) error {
		tell(c, "time: %.2f s", time.Since(began).Seconds())
		return nil
	}
}

// tell writes a note about the work for --verbose.
func tell(c *cli.Context, format string, args ...any) {
	if c.Bool("verbose") {
		fmt.Fprintf(c.App.ErrWriter, format+"\n", args...)
	}
}

// showHelp answers limsup help and --help.
func showHelp(app *cli.App, line *commandLine) error {
	about := line.command
	if about == "help" && !line.help {
		if len(line.flags) > 0 {
			return &usageError{fmt.Sprintf("limsup help takes the name of a command, not %q", line.flags[0])}
		}
		about = ""
		if len(line.rest) > 0 {
			about = line.rest[0]
		}
		if len(line.rest) > 1 {
			return &usageError{fmt.Sprintf("limsup help takes one command; %q is left over", line.rest[1])}
		}
	}
	m := handbook(app, nil)
	width := helpWidth(app.Writer)
	page := m.Page(width)
	if about != "" {
		page = ""
		for _, c := range m.Commands {
			if c.Name == about {
				page = c.Page(width)
			}
		}
		if page == "" {
			return unknownCommand(app, about)
		}
	}
	_, err := io.WriteString(app.Writer, page)
	return err
}

// helpWidth is at most 100 columns, the widest lines that read well, and 80 where
// there is no terminal.
func helpWidth(w io.Writer) int {
	if os.Getenv("COLUMNS") == "" && !table.IsTerminal(w) {
		return 80
	}
	return max(40, min(table.Width(w), 100))
}

// handbook describes the program and all its commands; fluids are the keys to be
// completed.
func handbook(app *cli.App, fluids []string) *manual.Program {
	var parameters []string
	for _, p := range fit.ParameterTable() {
		parameters = append(parameters, p.Name)
	}
	g := manual.Guide{
		Titles: []string{"Flags", "States", "Model", "Tuning", "Output", "General"},
		Group:  group,
		Words: func(flag string) []string {
			switch flag {
			case "fluid":
				return fluids
			case "folds":
				return []string{"rows", "fluid", "method", "batch", "pressure", noFolds}
			case "noise":
				return []string{"gaussian", "student", "survival"}
			case "tune", "fix", "start", "bounds", "prior", "set":
				return parameters
			}
			return nil
		},
		Args: func(command string) []string {
			switch command {
			case "plot":
				return plot.Kinds()
			case "completion":
				return manual.Shells()
			case "help":
				return commandNames(app)
			}
			return nil
		},
	}
	m := &manual.Program{Name: app.Name, Usage: app.Usage, About: strings.Split(app.Description, "\n\n"), Version: app.Version,
		Statuses: []manual.Entry{
			{Name: "0", Text: "done"},
			{Name: "1", Text: "an error inside the program, or interrupted"},
			{Name: "2", Text: "a command line or a file that cannot be used"},
			{Name: "3", Text: "a state without an answer, or a search that did not converge"},
		},
		Environment: []manual.Entry{
			{Name: "COLUMNS", Text: "width of tables and help pages, in columns"},
			{Name: "NO_COLOR", Text: "if set, no colour"},
			{Name: "TERM", Text: "dumb: no colour and no progress"},
		}}
	for _, c := range app.Commands {
		m.Commands = append(m.Commands, manual.NewCommand(app.Name, c, g))
	}
	return m
}

// group is the title under which a help page lists a flag; "" is the first one.
func group(flag string) string {
	for _, g := range []struct {
		title string
		flags []cli.Flag
	}{
		{"General", general()},
		{"States", flags(stateFlags(), sweepFlags(""))},
		{"Model", modelFlags()},
		{"Tuning", tuneFlags()},
		{"Output", []cli.Flag{formatFlag(), seedFlag(), outFlag("")}},
	} {
		for _, f := range g.flags {
			if f.Names()[0] == flag {
				return g.title
			}
		}
	}
	return ""
}

func about() string {
	return "A liquid can be heated far above its boiling point before it boils by itself, at its superheat limit. " +
		"limsup tunes a cubic equation of state and the threshold of nucleation to your measured limits, says how good the result is, and exports the tuned model.\n\n" +
		strings.Join(caution.Sentences(), " ")
}
