package manual

import (
	"strings"
	"unicode/utf8"
)

const (
	indent = "  "
	column = 24 // where the text beside a flag begins
)

// Page is the help page of a command, no line wider than width unless it is one word.
func (c *Command) Page(width int) string {
	var b page
	b.width = width
	b.text("", c.Program+" "+c.Name+": "+c.Usage)
	b.blank()
	b.line(indent + c.synopsis())
	for _, p := range c.About {
		b.blank()
		b.text("", p)
	}
	if len(c.Examples) > 0 {
		b.blank()
		b.line(map[bool]string{true: "Example", false: "Examples"}[len(c.Examples) == 1])
		for _, e := range c.Examples {
			b.command(e)
		}
	}
	for _, g := range c.Groups {
		b.blank()
		b.line(g.Title)
		for i := range g.Flags {
			b.entry(g.Flags[i].label(), g.Flags[i].Usage, column)
		}
	}
	b.blank()
	b.text("", "Flags may stand before or after anything else, in any order; --flag value and --flag=value are the same; a flag that is repeatable is given once for each value.")
	return b.String()
}

// Page is the help page of the program.
func (p *Program) Page(width int) string {
	var b page
	b.width = width
	b.text("", p.Name+": "+p.Usage)
	b.blank()
	b.line(indent + p.Name + " COMMAND [--flag value ...]")
	b.line(indent + p.Name + " help COMMAND")
	for _, t := range p.About {
		b.blank()
		b.text("", t)
	}
	b.blank()
	b.line("Commands")
	widest := 0
	for _, n := range p.names() {
		widest = max(widest, len(n))
	}
	for _, c := range p.Commands {
		b.entry(c.Name, c.Usage, len(indent)+widest+2)
	}
	for _, list := range []struct {
		title   string
		entries []Entry
	}{{"Exit status", p.Statuses}, {"Environment", p.Environment}} {
		b.blank()
		b.line(list.title)
		for _, e := range list.entries {
			b.entry(e.Name, e.Text, len(indent)+widest+2)
		}
	}
	return b.String()
}

// page gathers lines.
type page struct {
	strings.Builder
	width int
}

func (b *page) line(s string) { b.WriteString(s + "\n") }
func (b *page) blank()        { b.WriteByte('\n') }

// text writes a paragraph.
func (b *page) text(prefix, s string) {
	for _, l := range wrap(s, b.width-len(prefix)) {
		b.line(prefix + l)
	}
}

// entry writes a label and, from the given column on, its text.
func (b *page) entry(label, text string, at int) {
	lines := wrap(text, max(b.width-at, 20))
	head := indent + label
	if n := utf8.RuneCountInString(head); n+2 > at {
		b.line(head)
	} else {
		b.line(head + strings.Repeat(" ", at-n) + lines[0])
		lines = lines[1:]
	}
	for _, l := range lines {
		b.line(strings.Repeat(" ", at) + l)
	}
}

// command writes a command line; where it is too long, lines end with a backslash, so that a shell still
// understands it.
func (b *page) command(s string) {
	const more = " \\"
	line := indent
	for i, w := range arguments(s) {
		switch {
		case i == 0:
			line += w
		case utf8.RuneCountInString(line)+1+utf8.RuneCountInString(w)+len(more) > b.width:
			b.line(line + more)
			line = indent + indent + indent + w
		default:
			line += " " + w
		}
	}
	b.line(line)
}

// arguments splits a command line at the spaces outside double quotes and keeps a flag together with its value.
func arguments(s string) []string {
	var out []string
	quoted := false
	for _, w := range strings.FieldsFunc(s, func(r rune) bool {
		if r == '"' {
			quoted = !quoted
		}
		return r == ' ' && !quoted
	}) {
		if n := len(out); n > 0 && strings.HasPrefix(out[n-1], "--") && !strings.Contains(out[n-1], " ") && !strings.HasPrefix(w, "--") {
			out[n-1] += " " + w
			continue
		}
		out = append(out, w)
	}
	return out
}

// wrap breaks s between words into lines of at most width characters.
func wrap(s string, width int) []string {
	var lines []string
	line := ""
	for _, w := range strings.Fields(s) {
		switch {
		case line == "":
			line = w
		case utf8.RuneCountInString(line)+1+utf8.RuneCountInString(w) <= width:
			line += " " + w
		default:
			lines, line = append(lines, line), w
		}
	}
	return append(lines, line)
}
