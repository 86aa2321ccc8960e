package table

import (
	"bytes"
	stdjson "encoding/json"
	"fmt"
	"strconv"
	"unicode"
	"unicode/utf16"
)

// JSONRows returns the rows as a JSON array of objects, keys in the order of the columns, for embedding in a larger
// document. Missing values are null; a row whose cells have notes gains "notes", an array of strings.
// Errors: as [Table.Render].
func (t *Table) JSONRows() (stdjson.RawMessage, error) {
	if err := t.check(); err != nil {
		return nil, err
	}
	var out bytes.Buffer
	if err := t.json(&out); err != nil {
		return nil, err
	}
	return bytes.TrimSpace(out.Bytes()), nil
}

// json writes one object per line.
func (t *Table) json(out *bytes.Buffer) error {
	keys := make([]string, len(t.Columns))
	for j, c := range t.Columns {
		key, err := jsonText(c.key())
		if err != nil {
			return err
		}
		keys[j] = key
	}
	out.WriteString("[")
	for i, row := range t.Rows {
		if i > 0 {
			out.WriteString(",")
		}
		out.WriteString("\n  {")
		for j, cell := range row {
			value, err := cell.json()
			if err != nil {
				return err
			}
			if j > 0 {
				out.WriteString(", ")
			}
			out.WriteString(keys[j] + ": " + value)
		}
		for k, note := range t.rowNotes(row) {
			text, err := jsonText(note)
			if err != nil {
				return err
			}
			if k == 0 {
				out.WriteString(`, "` + notesField + `": [`)
			} else {
				out.WriteString(", ")
			}
			out.WriteString(text)
		}
		if len(t.rowNotes(row)) > 0 {
			out.WriteString("]")
		}
		out.WriteString("}")
	}
	if len(t.Rows) > 0 {
		out.WriteString("\n")
	}
	out.WriteString("]\n")
	return nil
}

func (c Cell) json() (string, error) {
	switch c.kind {
	case cellText:
		return jsonText(c.text)
	case cellNumber:
		return exact(c.num), nil
	case cellInteger:
		return strconv.FormatInt(c.int, 10), nil
	case cellBool:
		return strconv.FormatBool(c.yes), nil
	}
	return "null", nil
}

// jsonText returns a JSON string in which every rune that is not printable (joiners apart) stands as a \u escape, so that the text
// survives and a terminal does not act on it. Bytes that are not UTF-8 become a visible `\xff` first.
func jsonText(s string) (string, error) {
	var raw bytes.Buffer
	enc := stdjson.NewEncoder(&raw)
	enc.SetEscapeHTML(false)
	if err := enc.Encode(markBrokenUTF8(s)); err != nil {
		return "", err
	}
	var b bytes.Buffer
	for _, r := range string(bytes.TrimRight(raw.Bytes(), "\n")) {
		switch {
		case unicode.IsPrint(r), unicode.Is(unicode.Zs, r), joiner(r):
			b.WriteRune(r)
		case r > 0xffff:
			hi, lo := utf16.EncodeRune(r)
			fmt.Fprintf(&b, `\u%04x\u%04x`, hi, lo)
		default:
			fmt.Fprintf(&b, `\u%04x`, r)
		}
	}
	return b.String(), nil
}
