package main

import (
	"encoding/json"
	"fmt"
	"io"
	"slices"
	"strings"

	"github.com/urfave/cli/v2"

	"limsup/cmd/limsup/internal/atomicfile"
	"limsup/cmd/limsup/internal/table"
	"limsup/data/caution"
	"limsup/data/quantity"
)

// product is what a command shows: blocks of text and tables for the screen and
// for Markdown, one table for CSV, one value for JSON.
type product struct {
	json   func() any   // made when it is asked for: it may be large
	csv    *table.Table // the main table
	blocks []block      // screen and Markdown, in order
}

// block is a piece of screen output: one of its fields is set.
type block struct {
	heading string
	text    string
	facts   table.Facts
	table   *table.Table
}

// checkFormat refuses an unknown --format before any work.
func checkFormat(c *cli.Context) error {
	f := c.String("format")
	if !slices.Contains(table.Formats(), f) {
		return &usageError{fmt.Sprintf("--format %q%s; the formats are %s", f, suggest("", quantity.Near(f, table.Formats())), strings.Join(table.Formats(), ", "))}
	}
	return nil
}

// show writes a product to --out, where the command has that flag for it, or to
// standard output.
func show(c *cli.Context, p *product) error {
	if name := c.String("out"); name != "" {
		return atomicfile.Write(name, func(w io.Writer) error { return p.write(w, c.String("format"), table.Options{Width: 100}) })
	}
	return print(c, p)
}

// writeText writes text to --out, or to standard output.
func writeText(c *cli.Context, text string) error {
	fill := func(w io.Writer) error { _, err := io.WriteString(w, text); return err }
	if name := c.String("out"); name != "" {
		return atomicfile.Write(name, fill)
	}
	return fill(c.App.Writer)
}

// print writes a product to standard output.
func print(c *cli.Context, p *product) error {
	w := c.App.Writer
	return p.write(w, c.String("format"), table.Options{Width: table.Width(w), Colour: table.ColourAllowed(w)})
}

func (p *product) write(w io.Writer, format string, o table.Options) error {
	switch format {
	case table.JSON:
		e := json.NewEncoder(w)
		e.SetEscapeHTML(false)
		e.SetIndent("", "  ")
		return e.Encode(p.json())
	case table.CSV:
		return p.csv.Render(w, format, o)
	}
	for i, b := range p.blocks {
		if i > 0 {
			if _, err := fmt.Fprintln(w); err != nil {
				return err
			}
		}
		if err := b.write(w, format, o); err != nil {
			return err
		}
	}
	return nil
}

func (b *block) write(w io.Writer, format string, o table.Options) error {
	markdown := format == table.Markdown
	if b.heading != "" {
		h := b.heading
		if markdown {
			h = "## " + h + "\n"
		}
		if _, err := fmt.Fprintln(w, h); err != nil {
			return err
		}
	}
	switch {
	case b.table != nil:
		return b.table.Render(w, format, o)
	case b.facts != nil && markdown:
		for _, f := range b.facts {
			if _, err := fmt.Fprintf(w, "- %s: %s\n", f.Label, strings.TrimSpace(f.Value+" "+f.Unit)); err != nil {
				return err
			}
		}
		return nil
	case b.facts != nil:
		return b.facts.Render(w, o.Width)
	case b.text != "" && markdown:
		_, err := fmt.Fprintln(w, b.text)
		return err
	case b.text != "":
		return table.Paragraph(w, b.text, o.Width)
	}
	return nil
}

// cautionBlock ends every screen that shows a predicted limit.
func cautionBlock() block { return block{text: caution.Short()} }

// optional is a JSON number that may be absent.
func optional(v float64, ok bool) *float64 {
	if !ok {
		return nil
	}
	return &v
}
