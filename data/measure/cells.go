package measure

import (
	"encoding/xml"
	"fmt"
	"io"
	"regexp"
	"strconv"
	"strings"
	"unicode/utf16"

	"github.com/xuri/excelize/v2"

	"limsup/data/problem"
	"limsup/data/quantity"
)

// This file reads the cells of one sheet, row after row, from its XML. Only what is needed is understood; anything
// that does not fit the format is an error, never passed over.

// cellKind says what a cell holds.
type cellKind int

const (
	textCell    cellKind = iota // text, or nothing
	numberCell                  // a number, as its shortest decimal text
	booleanCell                 // TRUE or FALSE
	dateCell                    // a number shown as a date or time, or a date as text
	errorCell                   // an error value such as #N/A
	formulaCell                 // a formula whose result is not stored
	brokenCell                  // text says what is wrong
)

// cell is one filled cell.
type cell struct {
	column int // 1-based
	kind   cellKind
	text   string
}

// sheetRow is one row; cells in the order of columns.
type sheetRow struct {
	number int
	hidden bool
	cells  []cell
}

// xmlReader reads XML tokens within limits.
type xmlReader struct {
	*xml.Decoder
	source *rationed
	depth  int
	limit  limits
}

// rationed ends reading when one token takes too many bytes.
type rationed struct {
	io.Reader
	left int64
	over bool
	read int64 // bytes in all
}

func (r *rationed) Read(p []byte) (int, error) {
	if r.left <= 0 {
		r.over = true
		return 0, io.ErrUnexpectedEOF
	}
	n, err := r.Reader.Read(p[:min(int64(len(p)), r.left)])
	r.left -= int64(n)
	r.read += int64(n)
	return n, err
}

func newXMLReader(r io.Reader, l limits) *xmlReader {
	source := &rationed{Reader: r}
	return &xmlReader{Decoder: xml.NewDecoder(source), source: source, limit: l}
}

// token returns the next token; its text is valid until the one after. io.EOF ends a well-formed document.
func (x *xmlReader) token() (xml.Token, error) {
	x.source.left = x.limit.token
	t, err := x.Token()
	if x.source.over {
		return nil, beyond(&LimitError{What: "element", Limit: x.limit.token, Unit: "bytes"})
	}
	switch t.(type) {
	case xml.StartElement:
		if x.depth++; x.depth > x.limit.depth {
			return nil, beyond(&LimitError{What: "elements inside each other", Limit: int64(x.limit.depth)})
		}
	case xml.EndElement:
		x.depth--
	}
	return t, err
}

func attribute(e *xml.StartElement, name string) string {
	for i := range e.Attr {
		if e.Attr[i].Name.Local == name && e.Attr[i].Name.Space == "" {
			return e.Attr[i].Value
		}
	}
	return ""
}

func truth(s string) bool { return s == "1" || s == "true" }

// sharedTexts reads the texts that cells refer to by number.
func (b *workbook) sharedTexts() ([]string, error) {
	if b.texts == "" {
		return nil, nil
	}
	r, err := b.open(b.texts, "unpacked texts", b.limits.texts)
	if err != nil {
		return nil, err
	}
	defer r.Close()
	x := newXMLReader(r, b.limits)
	var out []string
	var text richText
	for {
		t, err := x.token()
		if err == io.EOF {
			return out, nil
		}
		if err != nil {
			return nil, unreadable(b.texts, err)
		}
		switch e := t.(type) {
		case xml.StartElement:
			if e.Name.Local == "si" {
				text = richText{}
			}
			text.start(e.Name.Local)
		case xml.EndElement:
			text.end(e.Name.Local)
			if e.Name.Local == "si" {
				out = append(out, text.String())
			}
		case xml.CharData:
			text.add(e)
		}
	}
}

// unreadable reports broken XML; an error that is already described stays.
func unreadable(part string, err error) error {
	if e, ok := err.(*packageError); ok {
		return e
	}
	return &packageError{"part " + problem.Quoted(part) + " cannot be read: " + err.Error(), aWorkbook, err}
}

// richText gathers the text of an si or is element: its t elements, but not the phonetic ones.
type richText struct {
	b        strings.Builder
	inside   bool
	phonetic bool
}

func (r *richText) start(name string) {
	switch name {
	case "t":
		r.inside = !r.phonetic
	case "rPh":
		r.phonetic = true
	}
}

func (r *richText) end(name string) {
	switch name {
	case "t":
		r.inside = false
	case "rPh":
		r.phonetic = false
	}
}

func (r *richText) add(s []byte) {
	if r.inside {
		r.b.Write(s)
	}
}

func (r *richText) String() string { return unescape(r.b.String()) }

var escape = regexp.MustCompile(`_x[0-9A-Fa-f]{4}_`)

// unescape puts characters in place of _xHHHH_, which workbooks write for those that XML cannot hold.
func unescape(s string) string {
	if !strings.Contains(s, "_x") {
		return s
	}
	return escape.ReplaceAllStringFunc(s, func(m string) string {
		v, err := strconv.ParseUint(m[2:6], 16, 16)
		if err != nil || utf16.IsSurrogate(rune(v)) {
			return m
		}
		return string(rune(v))
	})
}

// sheetReader goes through one sheet.
type sheetReader struct {
	xml    *xmlReader
	part   string
	book   *workbook
	texts  []string
	row    sheetRow
	merged []string // ranges such as A1:B2
	hidden [][2]int // first and last hidden columns
	data   bool     // inside sheetData
}

// next reads the next row; io.EOF ends the sheet. The row is valid until the next call.
//
// Errors: *packageError.
func (s *sheetReader) next() (*sheetRow, error) {
	for {
		t, err := s.xml.token()
		switch {
		case err == io.EOF:
			return nil, io.EOF
		case err != nil:
			return nil, unreadable(s.part, err)
		}
		switch e := t.(type) {
		case xml.EndElement:
			if e.Name.Local == "sheetData" {
				s.data = false
			}
		case xml.StartElement:
			switch e.Name.Local {
			case "sheetData":
				s.data = true
			case "col":
				if truth(attribute(&e, "hidden")) && len(s.hidden) < s.book.limits.columns {
					from, err1 := strconv.Atoi(attribute(&e, "min"))
					to, err2 := strconv.Atoi(attribute(&e, "max"))
					if err1 == nil && err2 == nil {
						s.hidden = append(s.hidden, [2]int{from, to})
					}
				}
			case "mergeCell":
				if len(s.merged) == s.book.limits.merged {
					return nil, beyond(&LimitError{What: "merged ranges", Limit: int64(s.book.limits.merged)})
				}
				s.merged = append(s.merged, attribute(&e, "ref"))
			case "row":
				if s.data {
					return &s.row, s.readRow(&e)
				}
			}
		}
	}
}

// readRow reads the cells of a row.
func (s *sheetReader) readRow(e *xml.StartElement) error {
	number := s.row.number + 1
	if r := attribute(e, "r"); r != "" {
		n, err := strconv.Atoi(r)
		if err != nil || n < number || n > excelize.TotalRows {
			return &packageError{fmt.Sprintf("row numbered %s after row %d", problem.Quoted(r), s.row.number), fmt.Sprintf("rows in ascending order, at most %d", excelize.TotalRows), nil}
		}
		number = n
	}
	s.row.number, s.row.hidden, s.row.cells = number, truth(attribute(e, "hidden")), s.row.cells[:0]
	column := 0
	for {
		t, err := s.xml.token()
		if err != nil {
			return unreadable(s.part, err)
		}
		switch e := t.(type) {
		case xml.EndElement:
			if e.Name.Local == "row" {
				return nil
			}
		case xml.StartElement:
			if e.Name.Local != "c" {
				continue
			}
			if column, err = s.place(&e, column); err != nil {
				return err
			}
			c, filled, err := s.readCell(&e)
			if err != nil {
				return unreadable(s.part, err)
			}
			if !filled {
				continue
			}
			if column > s.book.limits.columns {
				return beyond(&LimitError{What: "columns", Limit: int64(s.book.limits.columns)})
			}
			c.column = column
			s.row.cells = append(s.row.cells, c)
		}
	}
}

// place returns the column of a cell that follows the given column.
func (s *sheetReader) place(e *xml.StartElement, column int) (int, error) {
	r := attribute(e, "r")
	if r == "" {
		return column + 1, nil
	}
	c, row, err := excelize.CellNameToCoordinates(r)
	if err != nil || row != s.row.number || c <= column {
		return 0, &packageError{fmt.Sprintf("cell named %s in row %d", problem.Quoted(r), s.row.number), "cells in their row, in ascending order", nil}
	}
	return c, nil
}

// readCell reads the content of a cell; filled is false for one without content.
func (s *sheetReader) readCell(start *xml.StartElement) (c cell, filled bool, err error) {
	kind, style := attribute(start, "t"), attribute(start, "s")
	var value strings.Builder
	var inline richText
	var inValue, hasValue, hasFormula, hasInline bool
	for {
		t, err := s.xml.token()
		if err != nil {
			return c, false, err
		}
		switch e := t.(type) {
		case xml.StartElement:
			switch e.Name.Local {
			case "v":
				inValue, hasValue = true, true
			case "f":
				hasFormula = true
			case "is":
				hasInline = true
			default:
				inline.start(e.Name.Local)
			}
		case xml.CharData:
			if inValue {
				value.Write(e)
			} else if hasInline {
				inline.add(e)
			}
		case xml.EndElement:
			switch e.Name.Local {
			case "v":
				inValue = false
			case "c":
				if kind == "inlineStr" {
					c.text = inline.String()
					return c, c.text != "", nil
				}
				if hasFormula && !hasValue {
					return cell{kind: formulaCell}, true, nil
				}
				c = s.value(kind, style, value.String())
				return c, c.kind != textCell || c.text != "", nil
			default:
				inline.end(e.Name.Local)
			}
		}
	}
}

// value interprets the stored value of a cell of the given type.
func (s *sheetReader) value(kind, style, v string) cell {
	broken := func(format string, args ...any) cell {
		return cell{kind: brokenCell, text: fmt.Sprintf(format, args...)}
	}
	switch kind {
	case "s":
		i, err := strconv.Atoi(strings.TrimSpace(v))
		if err != nil || i < 0 || i >= len(s.texts) {
			return broken("text number %s does not exist", problem.Quoted(v))
		}
		return cell{text: s.texts[i]}
	case "str":
		return cell{text: unescape(v)}
	case "b":
		return cell{kind: booleanCell, text: map[bool]string{true: "TRUE", false: "FALSE"}[truth(strings.TrimSpace(v))]}
	case "e":
		return cell{kind: errorCell, text: v}
	case "d":
		return cell{kind: dateCell, text: v}
	case "", "n":
		v = strings.TrimSpace(v)
		if v == "" {
			return cell{}
		}
		x, err := quantity.ParseNumber(v)
		if err != nil {
			return broken("number cell holds %s", problem.Quoted(v))
		}
		k := numberCell
		if i, err := strconv.Atoi(style); err == nil && s.book.dates[i] {
			k = dateCell
		}
		return cell{kind: k, text: strconv.FormatFloat(x, 'g', -1, 64)}
	}
	return broken("cell of unknown type %s", problem.Quoted(kind))
}
