// Package manual turns the definitions of commands into help pages for the screen, a page for man, and scripts
// that complete command lines in bash, zsh and fish. There is one source, so that the four cannot disagree.
//
// A command is described by its cli.Command. Its Description ends with its examples, one a line:
//
//	"What it does. ...\n\nExamples: limsup check --data drops.csv\n   limsup check --data more.csv"
//
// The package writes no files and knows no command by name.
package manual

import (
	"fmt"
	"regexp"
	"strings"

	"github.com/urfave/cli/v2"
)

// Program is the whole manual.
type Program struct {
	Name, Usage string
	About       []string // paragraphs
	Version     string
	Statuses    []Entry // exit statuses
	Environment []Entry // environment variables
	Commands    []*Command
}

// Entry is a word and what it means.
type Entry struct{ Name, Text string }

// Command is one command.
type Command struct {
	Program, Name, Usage string
	Arguments            string   // as in "KIND"; empty if it takes flags only
	Words                []string // the arguments to choose from
	About                []string // paragraphs
	Examples             []string // whole command lines
	Groups               []Group
}

// Group is a headed list of flags.
type Group struct {
	Title string
	Flags []Flag
}

// Flag is one flag.
type Flag struct {
	Name, Short string   // without dashes; Short may be empty
	Value       string   // placeholder of the value; empty for a switch
	Usage       string   // with the default value
	Words       []string // values to choose from; nil if there is no list
	File        bool     // the value is a file name
}

// Guide tells what the definitions of commands do not.
type Guide struct {
	Titles []string                   // groups of flags in their order; the first is for flags without a group
	Group  func(flag string) string   // title of the group of a flag; "" for the first
	Words  func(flag string) []string // values of a flag whose usage does not list them
	Args   func(command string) []string
}

// NewCommand describes a command of program.
func NewCommand(program string, c *cli.Command, g Guide) *Command {
	out := &Command{Program: program, Name: c.Name, Usage: c.Usage, Words: g.Args(c.Name)}
	out.About, out.Examples = split(c.Description)
	arguments, note, noted := strings.Cut(c.ArgsUsage, " (")
	out.Arguments = arguments
	if noted {
		out.About = append([]string{"Arguments: " + strings.TrimSuffix(note, ")") + "."}, out.About...)
	}
	groups := map[string]*Group{}
	for _, t := range g.Titles {
		groups[t] = &Group{Title: t}
	}
	for _, f := range c.VisibleFlags() {
		d, ok := f.(cli.DocGenerationFlag)
		if !ok || len(f.Names()) == 0 {
			continue
		}
		title := g.Group(f.Names()[0])
		if groups[title] == nil {
			title = g.Titles[0]
		}
		groups[title].Flags = append(groups[title].Flags, newFlag(d, f.Names(), g))
	}
	for _, t := range g.Titles {
		if len(groups[t].Flags) > 0 {
			out.Groups = append(out.Groups, *groups[t])
		}
	}
	return out
}

var placeholder = regexp.MustCompile("`([^`]+)`")

// listed finds the values that a usage lists, as in "output FORMAT: table, csv, json (default: table)".
var listed = regexp.MustCompile(`^[^:(]*: ([a-z0-9-]+(?:, [a-z0-9-]+)+)(?: or ([a-z0-9-]+))?(?: \(|;|$)`)

// newFlag reads the placeholder of the value out of the usage, where it stands in backquotes, and the values to
// choose from. A value called FILE is the name of one.
func newFlag(d cli.DocGenerationFlag, names []string, g Guide) Flag {
	f := Flag{Name: names[0], Usage: d.GetUsage(), Words: g.Words(names[0])}
	for _, n := range names[1:] {
		if len(n) == 1 {
			f.Short = n
		}
	}
	if d.TakesValue() {
		f.Value = "VALUE"
		if m := placeholder.FindStringSubmatch(f.Usage); m != nil {
			f.Value = m[1]
		}
		// A zero is the absence of a default, not one.
		if v := strings.Trim(d.GetValue(), `"`); v != "" && v != "0" && v != "[]" && !strings.Contains(f.Usage, "default:") {
			f.Usage += " (default: " + v + ")"
		}
	}
	f.Usage = strings.ReplaceAll(f.Usage, "`", "")
	f.File = f.Value == "FILE"
	if m := listed.FindStringSubmatch(f.Usage); m != nil && f.Words == nil && f.Value != "" {
		f.Words = strings.Split(m[1], ", ")
		if m[2] != "" {
			f.Words = append(f.Words, m[2])
		}
	}
	return f
}

// split parts a description into paragraphs and examples.
func split(description string) (about, examples []string) {
	for _, p := range strings.Split(description, "\n\n") {
		rest, ok := strings.CutPrefix(p, "Examples:")
		if !ok {
			rest, ok = strings.CutPrefix(p, "Example:")
		}
		if !ok {
			if p = strings.TrimSpace(p); p != "" {
				about = append(about, p)
			}
			continue
		}
		for _, line := range strings.Split(rest, "\n") {
			if line = strings.TrimSpace(line); line != "" {
				examples = append(examples, line)
			}
		}
	}
	return about, examples
}

// synopsis is the shortest form of the command line.
func (c *Command) synopsis() string {
	const flags = " [--flag value ...]"
	s, arguments := c.Program+" "+c.Name, ""
	if c.Arguments != "" {
		arguments = " " + c.Arguments
	}
	if strings.HasPrefix(c.Arguments, "--") {
		return s + flags + arguments // after two hyphens there are no more flags
	}
	return s + arguments + flags
}

// label is a flag as it is typed.
func (f *Flag) label() string {
	s := "--" + f.Name
	if f.Short != "" {
		s = "-" + f.Short + ", " + s
	}
	if f.Value != "" {
		s += " " + f.Value
	}
	return s
}

// names are the names of the commands.
func (p *Program) names() []string {
	var out []string
	for _, c := range p.Commands {
		out = append(out, c.Name)
	}
	return out
}

// flags are all flags of a command.
func (c *Command) flags() []Flag {
	var out []Flag
	for _, g := range c.Groups {
		out = append(out, g.Flags...)
	}
	return out
}

// sentence ends a usage like a sentence.
func sentence(s string) string {
	if s == "" || strings.HasSuffix(s, ".") {
		return s
	}
	return fmt.Sprintf("%s%s.", strings.ToUpper(s[:1]), s[1:])
}
