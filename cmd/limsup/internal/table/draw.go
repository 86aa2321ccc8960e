package table

import (
	"bytes"
	"fmt"
	"strings"

	"github.com/clipperhouse/uax29/v2/graphemes"
	"github.com/olekukonko/tablewriter"
	"github.com/olekukonko/tablewriter/pkg/twwidth"
	"github.com/olekukonko/tablewriter/renderer"
	"github.com/olekukonko/tablewriter/tw"
)

const (
	bold  = "\x1b[1m"
	plain = "\x1b[0m"
)

// draw lets tablewriter set the prepared cells: a header, a thin rule, rows; no borders, two blanks between columns.
func (l *layout) draw(out *bytes.Buffer, columns []Column, colour bool) error {
	aligns := make([]tw.Align, len(l.columns))
	padding := make([]tw.Padding, len(l.columns))
	for k, j := range l.columns {
		aligns[k] = tw.AlignLeft
		if columns[j].right() {
			aligns[k] = tw.AlignRight
		}
		padding[k] = tw.Padding{Right: strings.Repeat(" ", gap), Overwrite: true}
	}
	padding[len(padding)-1] = tw.PaddingNone
	section := tw.CellConfig{
		Formatting: tw.CellFormatting{AutoWrap: tw.WrapNone, AutoFormat: tw.Off},
		Alignment:  tw.CellAlignment{PerColumn: aligns},
		Padding:    tw.CellPadding{Global: tw.PaddingNone, PerColumn: padding},
	}
	var drawn bytes.Buffer
	var stand standIns
	look := tw.Rendition{
		Borders: tw.BorderNone,
		Symbols: tw.NewSymbolCustom("rule").WithRow("─").WithColumn("").WithCenter("─"),
		Settings: tw.Settings{
			Separators: tw.SeparatorsNone,
			Lines:      tw.Lines{ShowTop: tw.Off, ShowBottom: tw.Off, ShowHeaderLine: tw.On, ShowFooterLine: tw.Off},
		},
	}
	grid := tablewriter.NewTable(&drawn,
		tablewriter.WithEastAsian(tw.Off),
		tablewriter.WithRenderer(renderer.NewBlueprint(look)),
		tablewriter.WithHeaderConfig(section),
		tablewriter.WithRowConfig(section),
		tablewriter.WithHeaderAutoFormat(tw.Off),
		tablewriter.WithHeaderAutoWrap(tw.WrapNone),
		tablewriter.WithRowAutoWrap(tw.WrapNone),
		tablewriter.WithTrimSpace(tw.Off),
		tablewriter.WithTrimTab(tw.Off),
		tablewriter.WithTrimLine(tw.Off),
	)
	headerLines := 0
	for _, lines := range l.header {
		headerLines = max(headerLines, len(lines))
	}
	grid.Header(stand.row(l.header))
	for _, row := range l.rows {
		if err := grid.Append(stand.row(row)); err != nil {
			return fmt.Errorf("table drawing: %w", err)
		}
	}
	if len(l.rows) == 0 { // tablewriter draws no rule without a row: give it a blank one, removed below
		if err := grid.Append(make([]string, len(l.header))); err != nil {
			return fmt.Errorf("table drawing: %w", err)
		}
	}
	if err := grid.Render(); err != nil {
		return fmt.Errorf("table drawing: %w", err)
	}
	for n, line := range strings.Split(strings.TrimSuffix(stand.out(drawn.String()), "\n"), "\n") {
		line = strings.TrimRight(line, " ")
		if n < headerLines && colour {
			line = bold + line + plain
		}
		if len(l.rows) > 0 || n <= headerLines {
			out.WriteString(line + "\n")
		}
	}
	return nil
}

// standIns lends single private-use runes to the grapheme clusters whose width tablewriter, which adds up runes, would
// count differently (a family emoji is one cluster of width 2, but three wide runes). Cell text itself contains no
// private-use runes: visible has escaped them.
type standIns struct {
	runes    map[string]rune
	replacer []string
}

const (
	firstStandIn = 0xF0000 // plane 15: private use, each of width 1 here
	lastStandIn  = 0xFFFFD
	filler       = '\U00100000' // plane 16: widens a stand-in
)

// row prepares the cells of one row, each given as lines.
func (s *standIns) row(cells [][]string) []string {
	out := make([]string, len(cells))
	for k, lines := range cells {
		set := make([]string, len(lines))
		for n, line := range lines {
			set[n] = s.in(line)
		}
		out[k] = strings.Join(set, "\n")
	}
	return out
}

// in replaces the clusters in question.
func (s *standIns) in(text string) string {
	if isASCII(text) {
		return text
	}
	var b strings.Builder
	for g := graphemes.FromString(text); g.Next(); {
		cluster := g.Value()
		width := displayWidth(cluster)
		if width == twwidth.Width(cluster) || width == 0 {
			b.WriteString(cluster)
			continue
		}
		r, ok := s.runes[cluster]
		if !ok {
			if s.runes == nil {
				s.runes = map[string]rune{}
			}
			if r = rune(firstStandIn + len(s.runes)); r > lastStandIn {
				b.WriteString(cluster) // more than 65534 odd clusters in one table: alignment gives way, text does not
				continue
			}
			s.runes[cluster] = r
			s.replacer = append(s.replacer, s.standIn(r, width), cluster)
		}
		b.WriteString(s.standIn(r, width))
	}
	return b.String()
}

func (s *standIns) standIn(r rune, width int) string {
	return string(r) + strings.Repeat(string(filler), width-1)
}

// out puts the clusters back.
func (s *standIns) out(text string) string { return strings.NewReplacer(s.replacer...).Replace(text) }
