package manual

import (
	"fmt"
	"strings"
)

// Man is the page of the program for man, in the language of the man macros. It carries no date: the same program
// writes the same page.
func (p *Program) Man() string {
	var b roff
	b.macro("TH", strings.ToUpper(p.Name), "1", "", p.Name+" "+p.Version, "User Commands")
	b.macro("SH", "NAME")
	b.text(p.Name + " - " + p.Usage)
	b.macro("SH", "SYNOPSIS")
	b.raw(".B " + escaped(p.Name) + "\n")
	b.raw(`\fICOMMAND\fR [\fI\-\-flag value ...\fR]` + "\n")
	b.macro("SH", "DESCRIPTION")
	b.paragraphs(p.About)
	b.macro("SH", "COMMANDS")
	for _, c := range p.Commands {
		b.macro("SS", c.synopsis())
		b.text(sentence(c.Usage))
		for _, t := range c.About {
			b.macro("PP")
			b.text(t)
		}
		for _, g := range c.Groups {
			b.macro("PP")
			b.raw(`\fI` + escaped(g.Title) + `\fR` + "\n")
			for i := range g.Flags {
				f := &g.Flags[i]
				b.entry(f.label(), f.Usage)
			}
		}
		if len(c.Examples) > 0 {
			b.macro("PP")
			b.text("Examples:")
			b.macro("PP")
			b.raw(".nf\n.RS 4\n")
			for _, e := range c.Examples {
				b.text(e)
			}
			b.raw(".RE\n.fi\n")
		}
	}
	b.macro("SH", "EXIT STATUS")
	for _, e := range p.Statuses {
		b.entry(e.Name, e.Text)
	}
	b.macro("SH", "ENVIRONMENT")
	for _, e := range p.Environment {
		b.entry(e.Name, e.Text)
	}
	return b.String()
}

// roff gathers the lines of a page.
type roff struct{ strings.Builder }

func (b *roff) raw(s string) { b.WriteString(s) }

// macro writes a request with quoted arguments.
func (b *roff) macro(name string, args ...string) {
	b.raw("." + name)
	for _, a := range args {
		b.raw(` "` + strings.ReplaceAll(escaped(a), `"`, `\(dq`) + `"`)
	}
	b.raw("\n")
}

// text writes a line of text, which must not begin like a request.
func (b *roff) text(s string) {
	s = escaped(s)
	if strings.HasPrefix(s, ".") {
		s = `\&` + s
	}
	b.raw(s + "\n")
}

func (b *roff) paragraphs(list []string) {
	for i, t := range list {
		if i > 0 {
			b.macro("PP")
		}
		b.text(t)
	}
}

func (b *roff) entry(label, text string) {
	b.macro("TP")
	b.raw(`\fB` + escaped(label) + `\fR` + "\n")
	b.text(text)
}

// escaped writes the characters that mean something to roff, and those beyond ASCII, as escapes.
func escaped(s string) string {
	var b strings.Builder
	for _, r := range s {
		switch {
		case r == '\\':
			b.WriteString(`\(rs`)
		case strings.ContainsRune("-'`^~", r): // which a typesetter would make into dashes, quotes and accents
			b.WriteString(map[rune]string{'-': `\-`, '\'': `\(aq`, '`': `\(ga`, '^': `\(ha`, '~': `\(ti`}[r])
		case r == '\n' || r == '\t':
			b.WriteByte(' ')
		case r < ' ' || r == 0x7f:
			// no control character belongs to a manual
		case r > '~':
			fmt.Fprintf(&b, `\[u%04X]`, r)
		default:
			b.WriteRune(r)
		}
	}
	return b.String()
}
