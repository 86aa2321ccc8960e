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

// screen finds the gentlest layout that fits and draws it. In this order: everything on one line; headers and text
// wrapped; columns left out by Priority; text wrapped more tightly; text shortened. What was left out or shortened is
// said below the table. Numbers are never shortened: if they alone are too wide, the table is, and says so.
func (t *Table) screen(out *bytes.Buffer, opts Options) error {
	shown := make([]int, len(t.Columns))
	for j := range shown {
		shown[j] = j
	}
	var left []string
	l := t.fit(shown, opts.Width, defaultWrap, false)
	for l == nil {
		drop := t.nextToDrop(shown)
		if drop < 0 {
			break
		}
		left = append(left, t.Columns[shown[drop]].label())
		shown = append(shown[:drop:drop], shown[drop+1:]...)
		l = t.fit(shown, opts.Width, defaultWrap, false)
	}
	if l == nil {
		l = t.fit(shown, opts.Width, narrowWrap, false)
	}
	if l == nil {
		l = t.fit(shown, opts.Width, narrowest, true)
	}
	tooWide := 0
	if l == nil {
		l = t.narrow(shown, 0, narrowest, true)
		tooWide = l.width()
	}

	lines := func(text, hang string) error { return paragraph(out, text, hang, opts.Width) }
	for _, text := range []string{t.Title, t.Caption} {
		if text == "" {
			continue
		}
		if err := lines(text, ""); err != nil {
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
	var below [][2]string
	for _, text := range l.marks.texts {
		mark := l.marks.letters[text] + " "
		below = append(below, [2]string{mark + text, strings.Repeat(" ", len(mark))})
	}
	for _, text := range t.Notes {
		below = append(below, [2]string{text, ""})
	}
	if len(left) > 0 {
		below = append(below, [2]string{"columns left out at this width: " + strings.Join(left, ", ") +
			"; use --format csv or a wider terminal", ""})
	}
	if len(l.short) > 0 {
		below = append(below, [2]string{"text shortened at this width in: " + strings.Join(l.short, ", ") +
			"; use --format csv or a wider terminal", ""})
	}
	if tooWide > 0 {
		below = append(below, [2]string{"the table needs a width of " + strconv.Itoa(tooWide) + ", available are " +
			strconv.Itoa(opts.Width) + "; use --format csv or a wider terminal", ""})
	}
	if len(below) > 0 {
		out.WriteString("\n")
	}
	for _, b := range below {
		if err := lines(b[0], b[1]); err != nil {
			return err
		}
	}
	return nil
}

// label names a column in a sentence.
func (c Column) label() string { return visible(c.header(), "") }

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

// fit lays the shown columns out within width, or returns nil. No text column goes below the floor (or its own
// Wrap, while nothing is being squeezed).
func (t *Table) fit(shown []int, width, floor int, shortened bool) *layout {
	if l := t.arrange(shown, nil, false); width <= 0 || l.width() <= width {
		return l
	}
	if l := t.narrow(shown, width, floor, shortened); l.width() <= width {
		return l
	}
	return nil
}

// narrow wraps headers, then takes width from the widest text column, one display column at a time, until the table
// fits or every text column is at its floor.
func (t *Table) narrow(shown []int, width, floor int, shortened bool) *layout {
	limits := make([]int, len(shown))
	l := t.arrange(shown, limits, shortened)
	widths := append([]int(nil), l.widths...)
	total := l.width()
	for total > width {
		widest := -1
		for i, j := range shown {
			least := floor
			if w := t.Columns[j].Wrap; floor == defaultWrap && w > 0 {
				least = w
			}
			if t.Columns[j].Kind == KindText && widths[i] > max(least, l.headerFloor(i, t, shortened)) &&
				(widest < 0 || widths[i] > widths[widest]) {
				widest = i
			}
		}
		if widest < 0 {
			break
		}
		widths[widest]--
		limits[widest] = widths[widest]
		total--
	}
	return t.arrange(shown, limits, shortened)
}

// headerFloor is the width a header needs when wrapped between words; a column being shortened cuts it as well.
func (l *layout) headerFloor(i int, t *Table, shortened bool) int {
	if shortened {
		return narrowest
	}
	return longestWord(t.Columns[l.columns[i]].label())
}

// arrange sets the shown columns. With limits, headers are wrapped to the width of their column and text columns
// with a limit above zero are wrapped (or shortened) to it; without, nothing is wrapped.
func (t *Table) arrange(shown []int, limits []int, shortened bool) *layout {
	l := &layout{columns: shown, widths: make([]int, len(shown)), rows: make([][][]string, len(t.Rows))}
	marked := make([][]string, len(t.Rows))
	for i, row := range t.Rows { // in reading order, so that the letters are
		marked[i] = make([]string, len(shown))
		l.rows[i] = make([][]string, len(shown))
		for k, j := range shown {
			marked[i][k] = l.marks.of(row[j])
		}
	}
	for k, j := range shown {
		col, limit, cut := t.Columns[j], 0, false
		if limits != nil {
			limit = limits[k]
		}
		column := make([]Cell, len(t.Rows))
		tails := make([]string, len(t.Rows))
		for i, row := range t.Rows {
			column[i], tails[i] = row[j], marked[i][k]
		}
		for i, text := range screenCells(col, column, tails) {
			lines := []string{text}
			switch {
			case limit > 0 && shortened && displayWidth(text) > limit:
				body := strings.TrimSuffix(text, tails[i])
				lines[0] = shorten(body, limit-displayWidth(tails[i])) + tails[i]
				cut = true
			case limit > 0:
				lines = wrap(text, limit, true)
			}
			for n, line := range lines {
				l.widths[k] = max(l.widths[k], displayWidth(line))
				lines[n] = isolate(line)
			}
			l.rows[i][k] = lines
		}
		header := []string{col.label()}
		if limits != nil {
			header = wrap(header[0], max(l.widths[k], longestWord(header[0])), false)
			if shortened && limit > 0 {
				for n, line := range header {
					cut = cut || displayWidth(line) > max(limit, l.widths[k])
					header[n] = shorten(line, max(limit, l.widths[k]))
				}
			}
		}
		for n, line := range header {
			l.widths[k] = max(l.widths[k], displayWidth(line))
			header[n] = isolate(line)
		}
		l.header = append(l.header, header)
		if cut {
			l.short = append(l.short, col.label())
		}
	}
	return l
}

// screenCells prints the cells of one column with their marks; numbers are padded so that decimal signs line up.
func screenCells(col Column, column []Cell, tails []string) []string {
	out := make([]string, len(column))
	if !col.right() {
		for i, c := range column {
			switch c.kind {
			case cellText:
				out[i] = isolate(visible(c.text, "")) + tails[i]
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
