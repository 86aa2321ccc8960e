package measure

import (
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"strings"

	"github.com/xuri/excelize/v2"

	"limsup/data/problem"
	"limsup/data/quantity"
)

// ReadXLSX reads measurements from one sheet of a workbook of size bytes; name stands for the file in every place
// that is reported, together with sheet and cell, as in "drops.xlsx:Sheet1!B7". The sheet is that of
// Options.Sheet, else the only visible sheet with columns for fluid, temperature and pressure, else, if there is
// none, the first visible one that is not empty. Rows are read as a stream.
//
// Errors: Problems with all that is wrong; an error of r, wrapped.
func ReadXLSX(r io.ReaderAt, size int64, name string, o Options) (*Set, error) {
	return readXLSX(r, size, name, o, defaultLimits())
}

func readXLSX(r io.ReaderAt, size int64, name string, o Options, l limits) (*Set, error) {
	a := newAssembler(name, o, l)
	sum := sha256.New()
	if _, err := io.Copy(sum, io.NewSectionReader(r, 0, size)); err != nil {
		return nil, fmt.Errorf("%s: reading: %w", name, err)
	}
	if err := a.workbook(r, size); err != nil {
		var e *packageError
		if !errors.As(err, &e) {
			return nil, fmt.Errorf("%s: reading: %w", name, err)
		}
		a.fail(position{}, "", e.found, e.expected, e.cause)
	}
	return a.close(hex.EncodeToString(sum.Sum(nil)))
}

// workbook reads the sheet to be read.
func (a *assembler) workbook(r io.ReaderAt, size int64) error {
	b, err := openWorkbook(r, size, a.limits)
	if err != nil {
		return err
	}
	texts, err := b.sharedTexts()
	if err != nil {
		return err
	}
	s, err := b.choose(a.options.Sheet, texts)
	if err != nil {
		return err
	}
	a.info.Sheet = s.name
	return b.scan(s, texts, &tableReader{a: a, sheet: sheetName(s.name)})
}

// choose returns the sheet called name, or the one to be read if name is empty.
func (b *workbook) choose(name string, texts []string) (*sheet, error) {
	var names []string
	var first *sheet
	var fitting []*sheet
	for i := range b.sheets {
		s := &b.sheets[i]
		names = append(names, s.name)
		switch {
		case name != "" && strings.EqualFold(s.name, name):
			return s, nil
		case name != "" || !s.visible:
			continue
		}
		p := &headerProbe{}
		if err := b.scan(s, texts, p); err != nil && len(b.sheets) == 1 {
			return nil, err // with other sheets, the one that is read will tell its own faults
		}
		if first == nil && p.filled {
			first = s
		}
		if p.fits {
			fitting = append(fitting, s)
		}
	}
	switch {
	case name != "":
		found := "there is no sheet " + problem.Quoted(name)
		if near := quantity.Near(name, names); near != nil {
			found += "; near: " + quotedList(near)
		}
		return nil, &packageError{found, "one of the sheets " + quotedList(names), nil}
	case len(fitting) == 1:
		return fitting[0], nil
	case len(fitting) > 1:
		names = nil
		for _, s := range fitting {
			names = append(names, s.name)
		}
		return nil, &packageError{fmt.Sprintf("%d sheets have a header of measurements: %s", len(fitting), quotedList(names)), "the name of the one to read", nil}
	case first != nil:
		return first, nil
	}
	return nil, &packageError{"no header in any visible sheet", "a header such as fluid, temperature/K, pressure/kPa in cells of one row", nil}
}

func quotedList(names []string) string {
	const shown = 10
	var q []string
	for i, n := range names {
		if i == shown {
			q = append(q, fmt.Sprintf("%d more", len(names)-shown))
			break
		}
		q = append(q, problem.Quoted(n))
	}
	return strings.Join(q, ", ")
}

// rowUser is given the rows of a sheet that are neither empty nor comments.
type rowUser interface {
	row(r *sheetRow, s *sheetReader) error // errStop ends the reading
	comment(number int)
	end(s *sheetReader)
}

// scan goes through a sheet.
func (b *workbook) scan(of *sheet, texts []string, u rowUser) error {
	r, err := b.open(of.part, "unpacked sheet", b.limits.sheet)
	if err != nil {
		return err
	}
	defer r.Close()
	s := &sheetReader{xml: newXMLReader(r, b.limits), part: of.part, book: b, texts: texts}
	for {
		row, err := s.next()
		switch {
		case err == io.EOF:
			u.end(s)
			return nil
		case err != nil:
			return err
		case len(row.cells) == 0:
			continue
		}
		if c := &row.cells[0]; c.kind == textCell && strings.HasPrefix(strings.TrimSpace(c.text), "#") {
			u.comment(row.number)
			continue
		}
		if err := u.row(row, s); err == errStop {
			return nil
		} else if err != nil {
			return err
		}
	}
}

// headerProbe looks whether the first row of a sheet has the required columns.
type headerProbe struct{ filled, fits bool }

func (p *headerProbe) row(r *sheetRow, _ *sheetReader) error {
	p.filled = true
	known := columns()
	have := 0
	for c := range required {
		for i := range r.cells {
			name, _, _ := strings.Cut(r.cells[i].text, "/")
			if r.cells[i].kind == textCell && strings.TrimSpace(name) == known[c].name {
				have++
				break
			}
		}
	}
	p.fits = have == required
	return errStop
}

func (p *headerProbe) comment(int)      {}
func (p *headerProbe) end(*sheetReader) {}

// tableReader feeds the rows of a sheet to an assembler.
type tableReader struct {
	a        *assembler
	sheet    string // as in a reference
	header   int    // row of the header; 0 before it
	number   int    // row being read
	fields   []string
	comments map[int]bool
}

// at names the place of a field of the present row.
func (t *tableReader) at(i int) position {
	return position{line: t.number, column: i + 1, where: t.sheet + "!" + cellName(i+1, t.number)}
}

func (t *tableReader) comment(number int) {
	if t.comments == nil {
		t.comments = map[int]bool{}
	}
	t.comments[number] = true
}

func (t *tableReader) row(r *sheetRow, s *sheetReader) error {
	a := t.a
	t.number = r.number
	if a.share == nil {
		size := float64(s.book.parts[s.part].UncompressedSize64)
		a.share = func() float64 { return float64(s.xml.source.read) / size }
	}
	width := max(a.layout.width, r.cells[len(r.cells)-1].column)
	t.fields = append(t.fields[:0], make([]string, width)...)
	a.spoilt = [columnCount]bool{}
	for i := range r.cells {
		c := &r.cells[i]
		t.fields[c.column-1] = t.text(c)
	}
	if r.hidden {
		p := t.at(0)
		a.doubts.add("hidden row", Warning{File: a.info.Name, Line: p.line, Where: p.where, Text: "hidden row is read like any other"})
	}
	if t.header == 0 {
		t.header = r.number
		a.header(t.fields, t.at)
		return nil
	}
	if !a.record(t.fields, t.at) {
		return errStop
	}
	return nil
}

// text returns the field of a cell; a cell that cannot be one is reported, if its column is read at all.
func (t *tableReader) text(c *cell) string {
	if c.kind == textCell || c.kind == numberCell {
		return c.text
	}
	found, expected := "", "a number"
	switch c.kind {
	case booleanCell:
		found = "boolean " + c.text
	case dateCell:
		found = "a date or time (stored as " + c.text + ")"
	case errorCell:
		found = "error value " + printable(c.text)
	case formulaCell:
		found = "formula without a stored result"
	default:
		found = c.text
	}
	a, header := t.a, ""
	if t.header == 0 {
		expected = "a header as text, such as temperature/K"
	} else {
		k := a.columnOf(c.column - 1)
		if k < 0 {
			return c.text // in a column that is ignored anything may stand
		}
		a.spoilt[k] = true
		header = a.layout.header[k]
		if columns()[k].text {
			expected = "text"
		}
	}
	if c.kind == formulaCell {
		expected = "its value (save the file with a spreadsheet program, or put values in place of formulas)"
	}
	a.fail(t.at(c.column-1), header, found, expected, nil)
	return ""
}

// end reports merged cells in the table, and hidden columns that were read.
func (t *tableReader) end(s *sheetReader) {
	a := t.a
	if t.header == 0 {
		a.fail(position{where: t.sheet}, "", "no header in the sheet", "a header such as fluid, temperature/K, pressure/kPa in cells of one row", nil)
		return
	}
	for _, ref := range s.merged {
		t.mergedRange(ref)
	}
	for _, h := range s.hidden {
		for c := h[0]; c <= min(h[1], a.layout.width); c++ {
			if k := a.columnOf(c - 1); k >= 0 {
				t.number = t.header
				a.doubts.add("hidden column", Warning{File: a.info.Name, Line: t.header, Where: t.at(c - 1).where, Text: "hidden column " + a.layout.header[k] + " is read like any other"})
			}
		}
	}
}

func (t *tableReader) mergedRange(ref string) {
	from, to, _ := strings.Cut(ref, ":")
	c1, r1, err1 := excelize.CellNameToCoordinates(from)
	_, r2, err2 := excelize.CellNameToCoordinates(to)
	at := position{where: t.sheet + "!" + printable(ref)}
	if err1 != nil || err2 != nil {
		t.a.fail(at, "", "merged range that cannot be read", "a range such as A1:B2", nil)
		return
	}
	at.line, at.column = r1, c1
	comment := r1 == r2 && t.comments[r1]
	if r2 >= t.header && c1 <= t.a.layout.width && !comment {
		t.a.fail(at, "", "merged cells", "one value in each cell (unmerge and fill in)", nil)
	}
}

// columnOf returns the known column that field i belongs to; -1 if it is ignored.
func (a *assembler) columnOf(i int) int {
	for c, f := range a.layout.field {
		if f == i {
			return c
		}
	}
	return -1
}

// cellName returns A1 for column 1 of row 1.
func cellName(column, row int) string {
	s, err := excelize.CoordinatesToCellName(column, row)
	if err != nil { // beyond the last column of the format
		return fmt.Sprintf("R%dC%d", row, column)
	}
	return s
}

// sheetName returns a name as formulas write it: in apostrophes unless it is a plain word.
func sheetName(name string) string {
	plain := name != ""
	for i, r := range name {
		letter := r == '_' || r >= 'a' && r <= 'z' || r >= 'A' && r <= 'Z'
		plain = plain && (letter || i > 0 && r >= '0' && r <= '9')
	}
	if plain {
		return name
	}
	return "'" + strings.ReplaceAll(printable(name), "'", "''") + "'"
}
