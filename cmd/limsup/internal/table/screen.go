package table

import (
	"bytes"
	"strconv"
	"strings"
)

const (
	gap         = 2  // blank columns between table columns
	defaultWrap = 24 // width to which text wraps before columns are left out
	narrowWrap  = 8  // width to which text wraps once no column is left to drop
	narrowest   = 4  // width to which text is shortened as the last resort
	leastWidth  = 20 // sentences around a table are not wrapped below this
)

// layout is a table prepared for drawing: lines of cells already padded, wrapped and marked.
type layout struct {
	columns []int // indices into Table.Columns
	header  [][]string
	rows    [][][]string // row, column, lines
	widths  []int
	marks   marks
	short   []string // titles of the columns whose text was cut
}

func (l *layout) width() int {
	total := gap * (len(l.widths) - 1)
	for _, w := range l.widths {
		total += w
	}
	return total
}

// squeeze says how far a layout may go to fit.
type squeeze struct {
	text        int  // floor for the width of text columns; 0: each column's own Wrap, or 24
	wrapHeaders bool // set headers on several lines
	shorten     bool // cut text instead of wrapping it
}

// screen finds the gentlest layout that fits and draws it. In this order: everything on one line; text wrapped; headers
// wrapped; columns left out by Priority; text wrapped more tightly; text shortened. What was left out or shortened is
// said below the table. Numbers are never shortened: if they alone are too wide, the table is, and says so.
func (t *Table) screen(out *bytes.Buffer, opts Options) error {
	shown := make([]int, len(t.Columns))
	for j := range shown {
		shown[j] = j
	}
	var left []string
	l := t.fit(shown, opts.Width, squeeze{}, squeeze{wrapHeaders: true})
	for l == nil {
		drop := t.nextToDrop(shown)
		if drop < 0 {
			break
		}
		left = append(left, t.Columns[shown[drop]].label())
		shown = append(shown[:drop:drop], shown[drop+1:]...)
		l = t.fit(shown, opts.Width, squeeze{wrapHeaders: true})
	}
	tight := squeeze{text: narrowWrap, wrapHeaders: true}
	if l == nil {
		l = t.fit(shown, opts.Width, tight, squeeze{text: narrowest, wrapHeaders: true, shorten: true})
	}
	tooWide := 0
	if l == nil {
		l = t.narrow(shown, 0, tight)
		tooWide = l.width()
	}

	for _, text := range []string{t.Title, t.Caption} {
		if text == "" {
			continue
		}
		if err := paragraph(out, "", text, opts.Width); err != nil {
			return err
		}
	}
	if out.Len() > 0 {
		out.WriteString("\n")
	}
	if err := l.draw(out, t.Columns, opts.Colour); err != nil {
		return err
	}
	if len(t.Rows) == 0 {
		out.WriteString("(no rows)\n")
	}
	const remedy = "; use --format csv or a wider terminal"
	var below [][2]string // mark, text
	for _, text := range l.marks.texts {
		below = append(below, [2]string{l.marks.letters[text] + " ", text})
	}
	for _, text := range t.Notes {
		below = append(below, [2]string{"", text})
	}
	if len(left) > 0 {
		below = append(below, [2]string{"", "columns left out at this width: " + strings.Join(left, ", ") + remedy})
	}
	if len(l.short) > 0 {
		below = append(below, [2]string{"", "text shortened at this width in: " + strings.Join(l.short, ", ") + remedy})
	}
	if tooWide > 0 {
		below = append(below, [2]string{"", "the table needs a width of " + strconv.Itoa(tooWide) + ", available are " +
			strconv.Itoa(opts.Width) + remedy})
	}
	if len(below) > 0 {
		out.WriteString("\n")
	}
	for _, b := range below {
		if err := paragraph(out, b[0], b[1], opts.Width); err != nil {
			return err
		}
	}
	return nil
}

// label names a column in a sentence.
func (c Column) label() string { return grounded(visible(c.header(), "")) }

// nextToDrop returns the position in shown of the column to leave out next, or -1.
func (t *Table) nextToDrop(shown []int) int {
	best, at := 0, -1
	for i, j := range shown {
		if p := t.Columns[j].Priority; p > 0 && p >= best {
			best, at = p, i
		}
	}
	if len(shown) < 2 {
		return -1
	}
	return at
}

// fit lays the shown columns out within width: unwrapped if it can, else by the first of the given ways that
// does. It returns nil if none does.
func (t *Table) fit(shown []int, width int, ways ...squeeze) *layout {
	if l := t.arrange(shown, make([]int, len(shown)), squeeze{}); width <= 0 || l.width() <= width {
		return l
	}
	for _, way := range ways {
		if l := t.narrow(shown, width, way); l.width() <= width {
			return l
		}
	}
	return nil
}

// narrow takes width from the widest text column, one display column at a time, until the table fits or every text
// column is at its floor.
func (t *Table) narrow(shown []int, width int, way squeeze) *layout {
	limits := make([]int, len(shown))
	l := t.arrange(shown, limits, way)
	total := l.width()
	floors := make([]int, len(shown))
	for k, j := range shown {
		floors[k] = t.Columns[j].floor(way)
	}
	for total > width {
		widest := -1
		for k, j := range shown {
			if t.Columns[j].Kind == KindText && l.widths[k] > floors[k] && (widest < 0 || l.widths[k] > l.widths[widest]) {
				widest = k
			}
		}
		if widest < 0 {
			break
		}
		l.widths[widest]--
		limits[widest] = l.widths[widest]
		total--
	}
	return t.arrange(shown, limits, way)
}

// floor is the least width of a text column; its header needs some too, unless that may be shortened.
func (c Column) floor(way squeeze) int {
	least := way.text
	if least == 0 {
		least = defaultWrap
		if c.Wrap > 0 {
			least = c.Wrap
		}
	}
	switch {
	case way.shorten:
		return least
	case way.wrapHeaders:
		return max(least, longestWord(c.label()))
	}
	return max(least, displayWidth(c.label()))
}

// arrange sets the shown columns; text in a column with a limit above zero is wrapped or shortened to it.
func (t *Table) arrange(shown, limits []int, way squeeze) *layout {
	l := &layout{columns: shown, widths: make([]int, len(shown)), rows: make([][][]string, len(t.Rows))}
	tails := make([][]string, len(shown)) // the marks of each cell, by column
	for k := range shown {
		tails[k] = make([]string, len(t.Rows))
	}
	for i, row := range t.Rows { // in reading order, so that the letters are
		l.rows[i] = make([][]string, len(shown))
		for k, j := range shown {
			tails[k][i] = l.marks.of(row[j])
		}
	}
	for k, j := range shown {
		col, limit, cut := t.Columns[j], limits[k], false
		column := make([]Cell, len(t.Rows))
		for i, row := range t.Rows {
			column[i] = row[j]
		}
		for i, text := range screenCells(col, column, tails[k]) {
			lines := []string{text}
			switch {
			case limit > 0 && way.shorten && displayWidth(text) > limit:
				tail := tails[k][i]
				lines[0] = shorten(strings.TrimSuffix(text, tail), limit-displayWidth(tail)) + tail
				cut = true
			case limit > 0:
				lines = wrap(text, limit, true)
			}
			l.rows[i][k] = l.set(k, lines)
		}
		header := []string{col.label()}
		if way.wrapHeaders {
			header = wrap(header[0], max(l.widths[k], longestWord(header[0])), false)
		}
		if room := max(limit, l.widths[k]); way.shorten && limit > 0 {
			for n, line := range header {
				cut = cut || displayWidth(line) > room
				header[n] = shorten(line, room)
			}
		}
		l.header = append(l.header, l.set(k, header))
		if cut {
			l.short = append(l.short, col.label())
		}
	}
	return l
}

// set makes room for lines in column k and closes those that run from right to left.
func (l *layout) set(k int, lines []string) []string {
	for n, line := range lines {
		l.widths[k] = max(l.widths[k], displayWidth(line))
		lines[n] = isolate(line)
	}
	return lines
}

// screenCells prints the cells of one column with their marks; numbers are padded so that decimal signs line up.
func screenCells(col Column, column []Cell, tails []string) []string {
	out := make([]string, len(column))
	if !col.right() {
		for i, c := range column {
			switch c.kind {
			case cellText:
				out[i] = isolate(grounded(visible(c.text, ""))) + tails[i]
			case cellBool:
				out[i] = yesNo(c.yes) + tails[i]
			default:
				out[i] = "-" + tails[i]
			}
		}
		return out
	}
	var values []float64
	for _, c := range column {
		if c.kind == cellNumber {
			values = append(values, c.num)
		}
	}
	form := shapeOf(values, col.Digits, col.Fixed)
	lefts, rights := make([]string, len(column)), make([]string, len(column))
	leftMost, rightMost := 0, 0
	for i, c := range column {
		switch c.kind {
		case cellNumber:
			lefts[i], rights[i] = split(form.format(c.num))
		case cellInteger:
			lefts[i] = strconv.FormatInt(c.int, 10)
		default:
			lefts[i] = "-"
		}
		rights[i] += tails[i]
		leftMost, rightMost = max(leftMost, len(lefts[i])), max(rightMost, len(rights[i]))
	}
	for i := range column {
		out[i] = strings.Repeat(" ", leftMost-len(lefts[i])) + lefts[i] +
			rights[i] + strings.Repeat(" ", rightMost-len(rights[i]))
	}
	return out
}
