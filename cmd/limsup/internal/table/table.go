package table

import (
	"bytes"
	"io"
	"math"
	"slices"
	"strings"
	"unicode"
)

// Kind is the type of the values in a column.
type Kind int

// The kinds of column. A missing cell fits every kind, an integer cell also fits a number column.
const (
	KindText Kind = iota
	KindNumber
	KindInteger
	KindBool
	kindMissing
)

func (k Kind) String() string {
	switch k {
	case KindText:
		return "text"
	case KindNumber:
		return "number"
	case KindInteger:
		return "integer"
	case KindBool:
		return "bool"
	case kindMissing:
		return "missing"
	}
	return "unknown"
}

// Column describes one column. Only Name is required.
type Column struct {
	Name  string // key in CSV: "temperature"; unique together with Unit; "notes" is reserved
	Title string // header for readers: "T"; default: Name with spaces for underscores
	Unit  string // UCUM code: "K", "m3/mol"; "" or "1" for a number without unit
	JSON  string // key in JSON; default: Name, underscore, Unit with every other sign as underscore ("temperature_K")
	Kind  Kind   // default KindText

	// Digits is the number of significant digits of the largest value of a number column on the screen
	// (default 4); the smallest keeps at least two. All values of the column get the same number of decimals, or, when
	// one of them is at least 1e6 or below 1e-4 (zero apart), the same number of mantissa digits.
	// With Fixed, Digits is the number of decimals itself (default 0).
	Digits int
	Fixed  bool

	Priority int // 0: never left out; otherwise the highest goes first on a narrow terminal, the rightmost among equals
	Wrap     int // width below which a text column is not wrapped before columns are left out; default 24
}

// Table is a titled table. Title, Caption and Notes appear on the screen and in Markdown only; notes of cells appear
// everywhere.
type Table struct {
	Title   string
	Caption string // a sentence below the title
	Columns []Column
	Rows    [][]Cell
	Notes   []string // remarks on the table as a whole, printed below the notes of its cells
}

// Cell is one value with its notes. The zero Cell is a missing value without a reason.
type Cell struct {
	kind  cellKind
	text  string
	num   float64
	int   int64
	yes   bool
	notes []string
}

type cellKind int

const (
	cellMissing cellKind = iota
	cellText
	cellNumber
	cellInteger
	cellBool
)

func (k cellKind) kind() Kind {
	return [...]Kind{kindMissing, KindText, KindNumber, KindInteger, KindBool}[k]
}

// Num returns a number cell. A NaN or an infinity makes Render fail with *[BadCellError].
func Num(v float64) Cell { return Cell{kind: cellNumber, num: v} }

// Text returns a text cell.
func Text(s string) Cell { return Cell{kind: cellText, text: s} }

// Int returns an integer cell.
func Int(n int) Cell { return Cell{kind: cellInteger, int: int64(n)} }

// Bool returns a cell shown as yes or no (true or false in CSV and JSON).
func Bool(b bool) Cell { return Cell{kind: cellBool, yes: b} }

// Missing returns a cell without a value: a dash on the screen and in Markdown, an empty field in CSV, null in JSON.
// A reason that is not empty becomes a note.
func Missing(reason string) Cell { return Cell{}.Note(reason) }

// Note returns a copy of the cell with one more note. The screen and Markdown mark the cell [a], [b], … and print the
// text below the table; CSV and JSON gain a field "notes". An empty text adds nothing.
func (c Cell) Note(text string) Cell {
	if text == "" || slices.Contains(c.notes, text) {
		return c
	}
	c.notes = append(slices.Clone(c.notes), text)
	return c
}

// Options says how to render. The zero value sets no width limit and no colour.
type Options struct {
	Width  int  // display columns available on the screen; 0 or less: no limit. See [Width].
	Colour bool // bold header on the screen. See [ColourAllowed].
}

// The formats Render knows.
const (
	Screen   = "table"
	CSV      = "csv"
	JSON     = "json"
	Markdown = "markdown"
)

// Formats returns the names of the formats, the default first.
func Formats() []string { return []string{Screen, CSV, JSON, Markdown} }

// Render writes the table in the given format ("table", "csv", "json" or "markdown"). It writes nothing when it fails
// before the output is complete.
//
// Errors: *[FormatError], *[ColumnError], *[ShapeError], *[KindError], *[BadCellError], or the writer's own.
func (t *Table) Render(w io.Writer, format string, opts Options) error {
	if !slices.Contains(Formats(), format) {
		return &FormatError{Format: format}
	}
	if err := t.check(); err != nil {
		return err
	}
	var out bytes.Buffer
	var err error
	switch format {
	case CSV:
		err = t.csv(&out)
	case JSON:
		err = t.json(&out)
	case Markdown:
		t.markdown(&out)
	default:
		err = t.screen(&out, opts)
	}
	if err != nil {
		return err
	}
	_, err = w.Write(out.Bytes())
	return err
}

// check finds the first reason why the table cannot be rendered.
func (t *Table) check() error {
	if len(t.Columns) == 0 {
		return &ColumnError{Reason: "the table has no columns"}
	}
	fields, keys := map[string]bool{}, map[string]bool{}
	for _, c := range t.Columns {
		reason := ""
		switch field, key := c.field(), c.key(); {
		case c.Name == "":
			reason = "no name"
		case field == notesField || key == notesField:
			reason = "the name notes is reserved for the notes of cells"
		case fields[field]:
			reason = "the header " + field + " occurs twice"
		case keys[key]:
			reason = "the JSON key " + key + " occurs twice"
		case c.Kind < KindText || c.Kind > KindBool:
			reason = "unknown kind"
		case c.Digits < 0 || c.Digits > maxDigits:
			reason = "digits must lie in 0 to 17"
		case c.Wrap < 0 || c.Priority < 0:
			reason = "wrap and priority must not be negative"
		default:
			fields[field], keys[key] = true, true
		}
		if reason != "" {
			return &ColumnError{Column: c.Name, Reason: reason}
		}
	}
	for i, row := range t.Rows {
		if len(row) != len(t.Columns) {
			return &ShapeError{Row: i, Cells: len(row), Columns: len(t.Columns)}
		}
		for j, cell := range row {
			col := t.Columns[j]
			got := cell.kind.kind()
			if got != kindMissing && got != col.Kind && !(got == KindInteger && col.Kind == KindNumber) {
				return &KindError{Row: i, Column: col.Name, Got: got, Want: col.Kind}
			}
			if got == KindNumber && (math.IsNaN(cell.num) || math.IsInf(cell.num, 0)) {
				return &BadCellError{Row: i, Column: col.Name, Value: cell.num}
			}
		}
	}
	return nil
}

// notesField is the CSV header and JSON key of the notes of a row's cells.
const notesField = "notes"

// hasNotes says whether any cell has a note.
func (t *Table) hasNotes() bool {
	for _, row := range t.Rows {
		for _, cell := range row {
			if len(cell.notes) > 0 {
				return true
			}
		}
	}
	return false
}

// rowNotes returns the notes of a row, each after the name of its column.
func (t *Table) rowNotes(row []Cell) []string {
	var notes []string
	for j, cell := range row {
		for _, text := range cell.notes {
			notes = append(notes, t.Columns[j].Name+": "+text)
		}
	}
	return notes
}

// field is the CSV header: name/unit, the unit in parentheses when it is a product or a quotient.
func (c Column) field() string { return withUnit(c.Name, c.Unit) }

// header is the header for readers: title/unit, the unit written with °, · and raised exponents.
func (c Column) header() string {
	title := c.Title
	if title == "" {
		title = strings.ReplaceAll(c.Name, "_", " ")
	}
	return withUnit(title, readableUnit(c.Unit))
}

func withUnit(quantity, unit string) string {
	if unit == "" || unit == "1" {
		return quantity
	}
	if strings.ContainsAny(unit, "/.·") {
		return quantity + "/(" + unit + ")"
	}
	return quantity + "/" + unit
}

// key is the JSON key.
func (c Column) key() string {
	if c.JSON != "" {
		return c.JSON
	}
	if c.Unit == "" || c.Unit == "1" {
		return c.Name
	}
	return c.Name + "_" + strings.Map(func(r rune) rune {
		if unicode.IsLetter(r) || unicode.IsDigit(r) {
			return r
		}
		return '_'
	}, c.Unit)
}

// readableUnits are UCUM codes whose printed symbol differs from the code.
// Source: UCUM, The Unified Code for Units of Measure, tables of units, columns "c/s" and "print" (from memory).
var readableUnits = strings.NewReplacer("[degF]", "°F", "[psi]", "psi", "Cel", "°C", "Ohm", "Ω")

// readableUnit turns a UCUM code into the usual symbol: m-3.s-1 becomes m⁻³·s⁻¹.
func readableUnit(code string) string {
	const raised = "⁰¹²³⁴⁵⁶⁷⁸⁹"
	sup := []rune(raised)
	var b strings.Builder
	afterLetter := false
	in := []rune(readableUnits.Replace(code))
	for i, r := range in {
		digit := r >= '0' && r <= '9'
		switch {
		case digit && afterLetter:
			b.WriteRune(sup[r-'0'])
		case r == '-' && afterLetter && i+1 < len(in) && in[i+1] >= '0' && in[i+1] <= '9':
			b.WriteRune('⁻')
		case r == '.':
			b.WriteRune('·')
			afterLetter = false
		default:
			b.WriteRune(r)
			afterLetter = unicode.IsLetter(r) || r == ']'
		}
	}
	return b.String()
}
