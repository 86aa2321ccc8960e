package table

import (
	"bytes"
	stdcsv "encoding/csv"
	"strconv"
	"strings"
)

// csv writes RFC 4180: CRLF after every record, quotes where needed, no title, caption or table notes.
func (t *Table) csv(out *bytes.Buffer) error {
	w := stdcsv.NewWriter(out)
	w.UseCRLF = true
	noted := t.hasNotes()

	record := make([]string, 0, len(t.Columns)+1)
	for _, c := range t.Columns {
		record = append(record, csvText(c.field()))
	}
	if noted {
		record = append(record, notesField)
	}
	if err := w.Write(record); err != nil {
		return err
	}
	for _, row := range t.Rows {
		record = record[:0]
		for _, cell := range row {
			record = append(record, cell.csv())
		}
		if noted {
			record = append(record, csvText(strings.Join(t.rowNotes(row), "; ")))
		}
		if len(record) == 1 && record[0] == "" {
			// A single empty field must be quoted: readers skip an empty line.
			w.Flush()
			out.WriteString("\"\"\r\n")
			continue
		}
		if err := w.Write(record); err != nil {
			return err
		}
	}
	w.Flush()
	return w.Error()
}

func (c Cell) csv() string {
	switch c.kind {
	case cellText:
		return csvText(c.text)
	case cellNumber:
		return exact(c.num)
	case cellInteger:
		return strconv.FormatInt(c.int, 10)
	case cellBool:
		return strconv.FormatBool(c.yes)
	}
	return ""
}

// csvText guards text against being read as a formula and escapes control characters other than tab and LF.
// CRLF inside a field counts as one line end.
func csvText(s string) string {
	guard := ""
	if s != "" && strings.ContainsRune("=+-@\t\r\n", rune(s[0])) {
		guard = "'"
	}
	return guard + visible(strings.ReplaceAll(s, "\r\n", "\n"), "\t\n")
}
