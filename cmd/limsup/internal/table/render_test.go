package table

import (
	"bytes"
	"encoding/csv"
	"encoding/json"
	"errors"
	"flag"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
	"unicode"

	"github.com/google/go-cmp/cmp"
)

var update = flag.Bool("update", false, "rewrite the golden files")

// limits is a table with every kind of cell, notes, a missing value and columns of every priority. The numbers are made up.
func limits() *Table {
	return &Table{
		Title:   "Superheat limits",
		Caption: "Predicted by the soave equation, kinetic limit at the tuned threshold; made-up numbers.",
		Columns: []Column{
			{Name: "fluid"},
			{Name: "pressure", Title: "P", Unit: "Pa", Kind: KindNumber, Digits: 4},
			{Name: "temperature", Title: "T", Unit: "K", Kind: KindNumber, Digits: 1, Fixed: true},
			{Name: "standard_uncertainty", Title: "u(T)", Unit: "K", Kind: KindNumber, Digits: 2},
			{Name: "log10_flux", Title: "log10 J", Kind: KindNumber, Digits: 3, Priority: 1},
			{Name: "flux", Title: "J", Unit: "m-3.s-1", Kind: KindNumber, Digits: 3, Priority: 3},
			{Name: "heating_rate", Unit: "K/s", Kind: KindInteger, Priority: 4},
			{Name: "droplets", Title: "n", Kind: KindInteger, Priority: 2},
			{Name: "extrapolated", Kind: KindBool, Priority: 2},
			{Name: "source", Priority: 5},
		},
		Rows: [][]Cell{
			{Text("n-pentane"), Num(101325), Num(419.1499), Num(0.123), Num(12.0412), Num(1.0995e12), Int(5), Int(12), Bool(false), Text("bubble column, first batch")},
			{Text("1,3-butadiene"), Num(-250000), Num(378), Num(1.5).Note("at a bound"), Num(-1.5), Num(0.031623), Int(12000), Int(7), Bool(true).Note("outside the pressures of the data"), Text("=HYPERLINK(\"x\")")},
			{Text("水 (water) 👨‍👩‍👧"), Num(0), Num(551.75).Note("at a bound"), Missing("rank-deficient"), Num(0), Missing("no kinetic limit"), Missing(""), Int(-3), Bool(false), Text("a|b <i>c</i> & d\x1b[2J\ntwo lines")},
			{Text("מים"), Num(99.5), Num(-0.04), Num(12.25), Num(9), Num(1e9), Int(0), Int(100), Bool(false), Text("@cell, a remark that is rather long and has to be wrapped or left out")},
		},
		Notes: []string{"Pressures are absolute; a negative one is tension."},
	}
}

func render(t *testing.T, table *Table, format string, opts Options) string {
	t.Helper()
	var out bytes.Buffer
	if err := table.Render(&out, format, opts); err != nil {
		t.Fatalf("Render(%s): %v", format, err)
	}
	return out.String()
}

func TestGolden(t *testing.T) {
	for _, tt := range []struct {
		file, format string
		opts         Options
	}{
		{"unlimited", Screen, Options{}},
		{"screen160", Screen, Options{Width: 160}},
		{"screen160colour", Screen, Options{Width: 160, Colour: true}},
		{"screen80", Screen, Options{Width: 80}},
		{"screen40", Screen, Options{Width: 40}},
		{"screen33", Screen, Options{Width: 33}},
		{"screen20", Screen, Options{Width: 20}},
		{"csv", CSV, Options{}},
		{"json", JSON, Options{}},
		{"markdown", Markdown, Options{}},
	} {
		t.Run(tt.file, func(t *testing.T) {
			got := render(t, limits(), tt.format, tt.opts)
			path := filepath.Join("testdata", tt.file+".golden")
			if *update {
				if err := os.WriteFile(path, []byte(got), 0o644); err != nil {
					t.Fatal(err)
				}
			}
			want, err := os.ReadFile(path)
			if err != nil {
				t.Fatal(err)
			}
			if diff := cmp.Diff(string(want), got); diff != "" {
				t.Errorf("%s differs (-want +got):\n%s", path, diff)
			}
		})
	}
}

// TestScreenFitsWidth checks that no line is wider than allowed, whatever the width, unless the table says that it is,
// and that every column is either in the header or named as left out.
func TestScreenFitsWidth(t *testing.T) {
	for width := leastWidth; width <= 220; width++ {
		got := render(t, limits(), Screen, Options{Width: width})
		flat := strings.Join(strings.Fields(got), " ")
		if !strings.Contains(flat, "the table needs a width of") {
			for line := range strings.Lines(got) {
				if n := displayWidth(strings.TrimRight(line, "\n")); n > width {
					t.Errorf("width %d: a line takes %d: %q", width, n, line)
				}
			}
		} else if width >= 40 {
			t.Errorf("width %d: the table does not fit, but its four undroppable columns need less", width)
		}
		_, left, _ := strings.Cut(flat, "columns left out at this width: ")
		header, _, _ := strings.Cut(got[strings.Index(got, "\n\n"):], "─")
		for _, c := range limits().Columns[4:] {
			inHeader := true
			for word := range strings.FieldsSeq(c.header()) {
				inHeader = inHeader && strings.Contains(header, word)
			}
			if named := strings.Contains(left, c.header()); inHeader == named && c.Name != "flux" && c.Name != "droplets" {
				t.Errorf("width %d: column %s: in the header %t, named as left out %t", width, c.Name, inHeader, named)
			}
		}
	}
}

func TestDropOrder(t *testing.T) {
	// Wide enough for the four columns without a priority and log10_flux, which has the lowest.
	got := render(t, limits(), Screen, Options{Width: 50})
	want := "columns left out at this width: source, heating rate/(K/s), J/(m⁻³·s⁻¹), extrapolated, n; use"
	if flat := strings.Join(strings.Fields(got), " "); !strings.Contains(flat, want) {
		t.Errorf("not found: %q in\n%s", want, got)
	}
}

func TestSameBytesTwice(t *testing.T) {
	want := render(t, limits(), Screen, Options{Width: 100})
	for range 3 {
		if got := render(t, limits(), Screen, Options{Width: 100}); got != want {
			t.Fatalf("second rendering differs:\n%s", cmp.Diff(want, got))
		}
	}
}

func TestErrors(t *testing.T) {
	one := func(c Column, cells ...Cell) *Table { return &Table{Columns: []Column{c}, Rows: [][]Cell{cells}} }
	number := Column{Name: "x", Kind: KindNumber}
	for _, tt := range []struct {
		name  string
		table *Table
		want  error
		text  string
	}{
		{"NaN", one(number, Num(math.NaN())), &BadCellError{}, `table row 1, column "x": NaN is not a finite number`},
		{"infinity", one(number, Num(math.Inf(-1))), &BadCellError{}, `table row 1, column "x": -Inf is not a finite number`},
		{"kind", one(number, Text("x")), &KindError{}, `table row 1, column "x": text cell in number column`},
		{"number in integers", one(Column{Name: "n", Kind: KindInteger}, Num(1)), &KindError{}, `table row 1, column "n": number cell in integer column`},
		{"too many cells", one(number, Num(1), Num(2)), &ShapeError{}, "table row 1: 2 cells for 1 columns"},
		{"no columns", &Table{}, &ColumnError{}, `table column "": the table has no columns`},
		{"no name", one(Column{}, Text("")), &ColumnError{}, `table column "": no name`},
		{"reserved", one(Column{Name: "notes"}, Text("")), &ColumnError{}, `table column "notes": the name notes is reserved for the notes of cells`},
		{"twice", &Table{Columns: []Column{number, number}}, &ColumnError{}, `table column "x": the header x occurs twice`},
		{"key twice", &Table{Columns: []Column{{Name: "x_K"}, {Name: "x", Unit: "K"}}}, &ColumnError{}, `table column "x": the JSON key x_K occurs twice`},
		{"digits", &Table{Columns: []Column{{Name: "x", Digits: 18}}}, &ColumnError{}, `table column "x": digits must lie in 0 to 17`},
	} {
		for _, format := range Formats() {
			var out bytes.Buffer
			err := tt.table.Render(&out, format, Options{Width: 80})
			if err == nil || err.Error() != tt.text {
				t.Errorf("%s, %s: error %v, want %s", tt.name, format, err, tt.text)
			}
			if out.Len() > 0 {
				t.Errorf("%s, %s: output in spite of the error: %q", tt.name, format, out.String())
			}
		}
		if _, err := tt.table.JSONRows(); err == nil {
			t.Errorf("%s: JSONRows returned no error", tt.name)
		}
	}
	var bad *BadCellError
	table := limits()
	table.Rows[2][1] = Num(math.NaN())
	if err := table.Render(&bytes.Buffer{}, Screen, Options{}); !errors.As(err, &bad) || bad.Row != 2 || bad.Column != "pressure" {
		t.Errorf("error %v, want a *BadCellError for row 2, column pressure", err)
	}
	var format *FormatError
	if err := table.Render(&bytes.Buffer{}, "xml", Options{}); !errors.As(err, &format) || format.Format != "xml" {
		t.Errorf("error %v, want a *FormatError for xml", err)
	}
}

type failing struct{}

func (failing) Write([]byte) (int, error) { return 0, os.ErrClosed }

func TestWriterErrorIsReturned(t *testing.T) {
	for _, format := range Formats() {
		if err := limits().Render(failing{}, format, Options{}); !errors.Is(err, os.ErrClosed) {
			t.Errorf("%s: error %v, want %v", format, err, os.ErrClosed)
		}
	}
	if err := Paragraph(failing{}, "x", 10); !errors.Is(err, os.ErrClosed) {
		t.Errorf("Paragraph: %v", err)
	}
	if err := (Facts{{"a", "b", ""}}).Render(failing{}, 10); !errors.Is(err, os.ErrClosed) {
		t.Errorf("Facts: %v", err)
	}
}

func TestNoRows(t *testing.T) {
	table := &Table{Columns: []Column{{Name: "fluid"}, {Name: "temperature", Unit: "K", Kind: KindNumber}}}
	for format, want := range map[string]string{
		Screen:   "fluid  temperature/K\n────────────────────\n(no rows)\n",
		CSV:      "fluid,temperature/K\r\n",
		JSON:     "[]\n",
		Markdown: "| fluid | temperature/K |\n| :---- | ------------: |\n",
	} {
		if got := render(t, table, format, Options{Width: 80}); got != want {
			t.Errorf("%s:\n%q, want\n%q", format, got, want)
		}
	}
}

// checkNoSteering fails if s contains a rune that could act on a terminal, other than those allowed.
func checkNoSteering(t *testing.T, what, s, allowed string) {
	t.Helper()
	for _, r := range s {
		if !unicode.IsPrint(r) && !unicode.Is(unicode.Zs, r) && !joiner(r) && !strings.ContainsRune(allowed, r) {
			t.Errorf("%s contains %U: %q", what, r, s)
		}
	}
}

// FuzzText sends arbitrary text through every format, alone and between two number columns.
func FuzzText(f *testing.F) {
	for _, s := range []string{
		"", "plain", "=1+1", "\tx", "\r\n", "a\r\nb", "'quoted'", `"`, "a,b", "a|b", "<b>&", "\x1b[31m", "\u202eabc\u2066", "\x9b2J", "\u009b",
		"👨‍👩‍👧 👍🏽 🇫🇷 ❤️", "ｗｉｄｅ 水", "שלום עולם", "e\u0301\u0301", "\u0301", "\xff\xfe", "\U000f0000\U00100000", "\ufeff", "a\u2028b",
		"supercalifragilisticexpialidocious and more words", "\u1100\u1161\u11a8", "\u0e33",
	} {
		f.Add(s, uint8(30))
	}
	f.Fuzz(func(t *testing.T, s string, width uint8) {
		table := &Table{
			Columns: []Column{{Name: "a", Kind: KindNumber}, {Name: "text"}, {Name: "b", Kind: KindNumber}},
			Rows:    [][]Cell{{Num(1.5), Text(s), Num(2.5)}, {Num(10.25), Text("x"), Num(-2.5)}, {Num(0), Text("y").Note(s), Num(7)}},
		}
		// Screen: numbers stay in place. With no width limit each row is one line.
		lines := strings.Split(render(t, table, Screen, Options{}), "\n")
		checkNoSteering(t, "screen", strings.Join(lines, ""), leftToRightMark)
		end := displayWidth(lines[1])
		for _, line := range lines[2:5] {
			if got := displayWidth(line); got != end {
				t.Errorf("row ends at %d, the rule at %d:\n%s", got, end, strings.Join(lines, "\n"))
			}
		}
		narrow := render(t, table, Screen, Options{Width: int(width)})
		checkNoSteering(t, "narrow screen", narrow, leftToRightMark+"\n")
		body, _, _ := strings.Cut(narrow, "\n\n")
		rule := displayWidth(strings.Split(narrow, "\n")[1])
		for line := range strings.Lines(body) {
			if got := displayWidth(strings.TrimRight(line, "\n")); got > rule {
				t.Errorf("width %d: line of %d beyond the rule of %d:\n%s", width, got, rule, narrow)
			}
		}

		// CSV: three fields and notes, text unchanged but for escapes and the guard.
		out := render(t, table, CSV, Options{})
		checkNoSteering(t, "csv", out, "\t\r\n")
		records, err := csv.NewReader(strings.NewReader(out)).ReadAll()
		if err != nil || len(records) != 4 {
			t.Fatalf("csv: %d records, %v: %q", len(records), err, out)
		}
		got := records[1][1]
		if got != "" && strings.ContainsRune("=+-@\t\r\n", rune(got[0])) {
			t.Errorf("csv: unguarded text %q", got)
		}
		if plainText(s) && got != s && got != "'"+s {
			t.Errorf("csv: %q became %q", s, got)
		}

		// JSON: printable or not, valid UTF-8 survives.
		out = render(t, table, JSON, Options{})
		checkNoSteering(t, "json", out, "\n")
		var rows []map[string]any
		if err := json.Unmarshal([]byte(out), &rows); err != nil {
			t.Fatalf("json: %v: %s", err, out)
		}
		if got := rows[0]["text"]; got != markBrokenUTF8(s) {
			t.Errorf("json: %q became %q", s, got)
		}

		// Markdown: three rows of three cells.
		out = render(t, table, Markdown, Options{})
		checkNoSteering(t, "markdown", out, leftToRightMark+"\n")
		for _, line := range strings.Split(out, "\n")[:5] {
			bare := strings.ReplaceAll(strings.ReplaceAll(line, `\\`, ""), `\|`, "")
			if n := strings.Count(bare, "|"); n != 4 || strings.ContainsAny(bare, "<>") {
				t.Errorf("markdown: %d unescaped pipes or HTML in %q", n, line)
			}
		}
	})
}

// plainText says whether s needs no escape.
func plainText(s string) bool { return visible(s, "") == s }

func TestCSVCells(t *testing.T) {
	for _, tt := range []struct{ in, want string }{
		{"n-pentane", "n-pentane"},
		{"=SUM(A1)", "'=SUM(A1)"},
		{"+1", "'+1"},
		{"-1", "'-1"},
		{"@x", "'@x"},
		{"\t=x", "'\t=x"},
		{"\r=x", `'\r=x`},
		{"\n=x", "'\n=x"},
		{"a\r\nb", "a\nb"},
		{"\x1b[2J", `\x1b[2J`},
		{"\u202e", `\u202e`},
		{"\u0085", `\u0085`},
		{"\U000e0041", `\U000e0041`},
		{"\xff", `\xff`},
	} {
		if got := csvText(tt.in); got != tt.want {
			t.Errorf("csvText(%q) = %q, want %q", tt.in, got, tt.want)
		}
	}
	single := &Table{Columns: []Column{{Name: "a"}}, Rows: [][]Cell{{Text("")}, {Text("x")}}}
	records, err := csv.NewReader(strings.NewReader(render(t, single, CSV, Options{}))).ReadAll()
	if err != nil || !cmp.Equal(records, [][]string{{"a"}, {""}, {"x"}}) {
		t.Errorf("an empty single field reads back as %q, %v", records, err)
	}
}

func TestJSONRowsEmbeds(t *testing.T) {
	raw, err := limits().JSONRows()
	if err != nil {
		t.Fatal(err)
	}
	doc, err := json.MarshalIndent(map[string]any{"predictions": raw}, "", " ")
	if err != nil {
		t.Fatal(err)
	}
	var back struct {
		Predictions []struct {
			Fluid       string   `json:"fluid"`
			Pressure    float64  `json:"pressure_Pa"`
			Flux        *float64 `json:"flux_m_3_s_1"`
			Temperature float64  `json:"temperature_K"`
			Notes       []string `json:"notes"`
		} `json:"predictions"`
	}
	if err := json.Unmarshal(doc, &back); err != nil {
		t.Fatal(err)
	}
	if n := len(back.Predictions); n != 4 {
		t.Fatalf("%d predictions, want 4", n)
	}
	p := back.Predictions[2]
	if p.Flux != nil || p.Temperature != 551.75 || p.Fluid != "水 (water) 👨‍👩‍👧" {
		t.Errorf("third prediction %+v", p)
	}
	want := []string{"temperature: at a bound", "standard_uncertainty: rank-deficient", "flux: no kinetic limit"}
	if diff := cmp.Diff(want, p.Notes); diff != "" {
		t.Errorf("notes (-want +got):\n%s", diff)
	}
}

func TestNotesDoNotShareMemory(t *testing.T) {
	base := Num(1).Note("1").Note("2").Note("3") // three notes leave room for a fourth in the slice append grows
	a, b := base.Note("a"), base.Note("b")
	if !cmp.Equal(a.notes, []string{"1", "2", "3", "a"}) || !cmp.Equal(b.notes, []string{"1", "2", "3", "b"}) || len(base.notes) != 3 {
		t.Errorf("notes %q, %q, %q", base.notes, a.notes, b.notes)
	}
	if same := base.Note("2").Note(""); !cmp.Equal(same.notes, base.notes) {
		t.Errorf("a repeated and an empty note changed the notes to %q", same.notes)
	}
}

func TestLetters(t *testing.T) {
	for n, want := range map[int]string{0: "a", 25: "z", 26: "aa", 27: "ab", 51: "az", 52: "ba", 701: "zz", 702: "aaa"} {
		if got := letters(n); got != want {
			t.Errorf("letters(%d) = %s, want %s", n, got, want)
		}
	}
}

func TestReadableUnit(t *testing.T) {
	for code, want := range map[string]string{
		"K": "K", "Cel": "°C", "[degF]": "°F", "m-3.s-1": "m⁻³·s⁻¹", "m3/mol": "m³/mol", "K/s": "K/s", "10*3/uL": "10*3/uL", "kg.m-1.s-2": "kg·m⁻¹·s⁻²", "%": "%",
	} {
		if got := readableUnit(code); got != want {
			t.Errorf("readableUnit(%q) = %q, want %q", code, got, want)
		}
	}
}

func TestColumnKeys(t *testing.T) {
	for _, tt := range []struct {
		column             Column
		field, key, header string
	}{
		{Column{Name: "temperature", Title: "T", Unit: "K"}, "temperature/K", "temperature_K", "T/K"},
		{Column{Name: "heating_rate", Unit: "K/s"}, "heating_rate/(K/s)", "heating_rate_K_s", "heating rate/(K/s)"},
		{Column{Name: "flux", Title: "J", Unit: "m-3.s-1", JSON: "flux_per_m3_s"}, "flux/(m-3.s-1)", "flux_per_m3_s", "J/(m⁻³·s⁻¹)"},
		{Column{Name: "factor", Unit: "1"}, "factor", "factor", "factor"},
	} {
		c := tt.column
		if c.field() != tt.field || c.key() != tt.key || c.header() != tt.header {
			t.Errorf("%+v: field %q, key %q, header %q", c, c.field(), c.key(), c.header())
		}
	}
}

// parse reads a printed number back, without marks and padding.
func parse(t *testing.T, s string) float64 {
	t.Helper()
	s, _, _ = strings.Cut(strings.TrimSpace(s), "[")
	v, err := strconv.ParseFloat(s, 64)
	if err != nil {
		t.Fatal(err)
	}
	return v
}
