package report

import (
	"fmt"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"

	"limsup/validate/plot"
)

// table is a table of the page. Cells are plain text, so that a table can be copied
// into a spreadsheet.
type table struct {
	ID, Caption string
	Head        []head
	Rows        [][]cell
	Notes       []string
	Fold        bool // shown on demand
}

type head struct {
	Text   string
	Number bool
}

type cell struct {
	Text   string
	Number bool
	Header bool // it names its row
}

func text(s string) cell { return cell{Text: plot.Visible(s)} }

// named is a cell that names its row.
func named(s string) cell { return cell{Text: plot.Visible(s), Header: true} }

func value(s string) cell { return cell{Text: s, Number: true} }

// missing is a cell without a value.
func missing() cell { return cell{Text: "–", Number: true} }

func count(n int) cell { return value(strconv.Itoa(n)) }

// heads are the heads of columns; a leading # marks one of numbers.
func heads(names ...string) []head {
	var out []head
	for _, n := range names {
		s, number := strings.CutPrefix(n, "#")
		out = append(out, head{s, number})
	}
	return out
}

// decimal prints a number with decimals. The minus sign is the ASCII one, which
// spreadsheets read.
func decimal(v float64, decimals int) string {
	s := strconv.FormatFloat(v, 'f', decimals, 64)
	if strings.Trim(s, "-0.") == "" {
		return strings.TrimPrefix(s, "-")
	}
	return s
}

// digits prints a number with significant digits.
func digits(v float64, n int) string {
	return strconv.FormatFloat(v, 'g', n, 64)
}

// full prints a number so that it reads back as the same one.
func full(v float64) string { return strconv.FormatFloat(v, 'g', -1, 64) }

func optional(v float64, ok bool, decimals int) cell {
	if !ok {
		return missing()
	}
	return value(decimal(v, decimals))
}

// sentence starts with a capital and ends with a full stop.
func sentence(s string) string {
	s = strings.TrimSpace(s)
	if s == "" {
		return s
	}
	r, n := utf8.DecodeRuneInString(s)
	s = string(unicode.ToUpper(r)) + s[n:]
	if !strings.HasSuffix(s, ".") {
		s += "."
	}
	return plot.Visible(s)
}

func visibleAll(list []string) []string {
	out := make([]string, len(list))
	for i, s := range list {
		out[i] = sentence(s)
	}
	return out
}

// shown is decimal with a true minus sign, for sentences.
func shown(v float64, decimals int) string {
	return strings.Replace(decimal(v, decimals), "-", "−", 1)
}

// compact drops columns in which no row has anything.
func (t *table) compact() *table {
	keep := make([]bool, len(t.Head))
	for _, r := range t.Rows {
		for i, c := range r {
			keep[i] = keep[i] || c != missing() && c.Text != ""
		}
	}
	at := 0
	for i := range t.Head {
		if keep[i] {
			t.Head[at] = t.Head[i]
			at++
		}
	}
	t.Head = t.Head[:at]
	for n, r := range t.Rows {
		var row []cell
		for i, c := range r {
			if keep[i] {
				row = append(row, c)
			}
		}
		t.Rows[n] = row
	}
	return t
}

// numbers is the table behind a panel of a figure.
func numbers(f *plot.Figure, i int) *table {
	p := &f.Panels[i]
	t := &table{ID: f.ID + "-numbers-" + strconv.Itoa(i+1), Caption: f.Title}
	if p.Title != "" && len(f.Panels) > 1 {
		t.Caption += ", " + p.Title
	}
	if p.Matrix != nil {
		t.Head = heads("parameter")
		for _, c := range p.X.Categories {
			t.Head = append(t.Head, head{c, true})
		}
		for r := len(p.Matrix.Value) - 1; r >= 0; r-- {
			row := []cell{named(p.Y.Categories[r])}
			for c, v := range p.Matrix.Value[r] {
				if p.Matrix.Known[r][c] {
					row = append(row, value(full(v)))
				} else {
					row = append(row, missing())
				}
			}
			t.Rows = append(t.Rows, row)
		}
		return t
	}
	hasText, hasBand := false, false
	for k := range p.Series {
		hasText = hasText || p.Series[k].Text != nil
		hasBand = hasBand || p.Series[k].Shape == plot.Band
	}
	t.Head = heads("series", "#"+p.X.Label, "#"+p.Y.Label)
	if hasBand {
		t.Head = append(t.Head, heads("#other border "+p.X.Label)...)
	}
	if hasText {
		t.Head = append(t.Head, heads("remark")...)
	}
	crowded := 0
	for k := range p.Series {
		s := &p.Series[k]
		if s.Name == "" {
			continue
		}
		if s.Shape == plot.Crowd {
			crowded += len(s.X)
			continue
		}
		for n := range max(len(s.X), len(s.Y)) {
			row := []cell{named(s.Name), coordinate(&p.X, s.X, n), coordinate(&p.Y, s.Y, n)}
			if hasBand {
				if s.Shape == plot.Band {
					row = append(row, value(full(s.X2[n])))
				} else {
					row = append(row, cell{Number: true})
				}
			}
			if hasText {
				if s.Text != nil {
					row = append(row, cell{Text: s.Text[n]})
				} else {
					row = append(row, cell{})
				}
			}
			t.Rows = append(t.Rows, row)
		}
	}
	if crowded > 0 {
		t.Notes = append(t.Notes, fmt.Sprintf("The %d rows that share marks in the figure are not in this table. %s", crowded, everyRow))
	}
	return t
}

func coordinate(a *plot.Axis, v []float64, n int) cell {
	switch {
	case n >= len(v):
		return cell{Text: "all", Number: true}
	case len(a.Categories) > 0:
		return cell{Text: a.Categories[int(v[n])]}
	}
	return value(full(v[n]))
}
