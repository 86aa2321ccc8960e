package measure

import (
	"bytes"
	"encoding/csv"
	"os"
	"path/filepath"
	"strconv"
	"testing"
	"time"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"
	"github.com/xuri/excelize/v2"
)

// book returns a workbook made by excelize, an implementation of the format other than the reader under test.
func book(t testing.TB, fill func(f *excelize.File)) []byte {
	t.Helper()
	f := excelize.NewFile()
	defer f.Close()
	fill(f)
	var b bytes.Buffer
	if err := f.Write(&b); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

// rows fills a sheet from cell A1 on.
func rows(t testing.TB, f *excelize.File, sheet string, table ...[]any) {
	t.Helper()
	for i, r := range table {
		if err := f.SetSheetRow(sheet, "A"+strconv.Itoa(i+1), &r); err != nil {
			t.Fatal(err)
		}
	}
}

// check ends the test if a step of making a workbook failed.
func check(t testing.TB, err error) {
	t.Helper()
	if err != nil {
		t.Fatal(err)
	}
}

var headRow = []any{"fluid", "temperature/K", "pressure/kPa"}
var goodRow = []any{"n-pentane", 420.9, 101.325}

func readBook(b []byte, o Options) (*Set, error) {
	return ReadXLSX(bytes.NewReader(b), int64(len(b)), "d.xlsx", o)
}

// The demonstration data say the same in both formats, bit for bit.
func TestWorkbookEqualsText(t *testing.T) {
	path := filepath.Join("..", "demo", "droplets.csv")
	want, err := ReadFile(path, Options{})
	check(t, err)
	text, err := os.Open(path)
	check(t, err)
	defer text.Close()
	r := csv.NewReader(text)
	r.Comment = '#'
	records, err := r.ReadAll()
	check(t, err)
	b := book(t, func(f *excelize.File) {
		rows(t, f, "Sheet1", []any{"# the comment of the file"})
		for i, record := range records {
			for j, field := range record {
				cell := cellName(j+1, i+3) // the header in row 3, as in the text file
				if v, err := strconv.ParseFloat(field, 64); err == nil {
					check(t, f.SetCellFloat("Sheet1", cell, v, -1, 64))
				} else if field != "" {
					check(t, f.SetCellStr("Sheet1", cell, field))
				}
			}
		}
	})
	name := filepath.Join(t.TempDir(), "droplets.xlsx")
	check(t, os.WriteFile(name, b, 0o600))
	got, err := ReadFile(name, Options{})
	check(t, err)
	if at := got.Rows[0].At(); at != name+":Sheet1!A4" || got.Rows[0].Line != want.Rows[0].Line {
		t.Errorf("first row at %s (line %d)", at, got.Rows[0].Line)
	}
	place := []cmp.Option{cmpopts.IgnoreFields(Row{}, "File", "Where"), cmpopts.IgnoreFields(FileInfo{}, "Name", "Sheet", "SHA256"),
		cmpopts.IgnoreFields(Exclusion{}, "File", "Where"), cmpopts.IgnoreFields(Warning{}, "File", "Where")}
	if diff := cmp.Diff(want, got, place...); diff != "" {
		t.Error(diff)
	}
	if len(got.Rows) < 100 || got.Files[0].Sheet != "Sheet1" || len(got.Files[0].SHA256) != 64 || got.Files[0].SHA256 == want.Files[0].SHA256 {
		t.Errorf("%d rows, file %+v", len(got.Rows), got.Files[0])
	}
}

// Cells may hold what the file format allows: numbers whatever their format, texts of three
// kinds, formulas with results, blank rows, comments, gaps.
func TestCells(t *testing.T) {
	b := book(t, func(f *excelize.File) {
		rows(t, f, "Sheet1", []any{}, []any{" # a comment"}, []any{"fluid", "temperature/K", "pressure/kPa", "batch", nil, "day", "note"},
			[]any{"n-pentane", nil, -1e-3, 17, nil, time.Date(2025, 1, 2, 0, 0, 0, 0, time.UTC), "größer"},
			[]any{}, []any{nil, "# in the second column"})
		check(t, f.SetCellRichText("Sheet1", "A7", []excelize.RichTextRun{{Text: "n-"}, {Text: "hexane", Font: &excelize.Font{Bold: true}}}))
		check(t, f.SetCellFloat("Sheet1", "B4", 420.123456789012, -1, 64))
		check(t, f.SetCellStr("Sheet1", "B7", " 450.5 "))
		check(t, f.SetCellFloat("Sheet1", "C7", 0.1+0.2, -1, 64))
		check(t, f.SetCellBool("Sheet1", "F7", true))
		style, err := f.NewStyle(&excelize.Style{NumFmt: 2})
		check(t, err)
		check(t, f.SetCellStyle("Sheet1", "B4", "C7", style))
	})
	s, err := readBook(b, Options{})
	check(t, err)
	want := []Row{
		{File: "d.xlsx", Line: 4, Where: "Sheet1!A4", Fluid: "n-pentane", Key: "n-pentane", Temperature: 420.123456789012, Pressure: -1, Batch: "17", Note: "größer"},
		{File: "d.xlsx", Line: 7, Where: "Sheet1!A7", Fluid: "n-hexane", Key: "n-hexane", Temperature: 450.5, Pressure: (0.1 + 0.2) * 1000},
	}
	if diff := cmp.Diff(want, s.Rows); diff != "" {
		t.Error(diff)
	}
	if diff := cmp.Diff([]string{"column 5", "day"}, s.Files[0].IgnoredColumns); diff != "" {
		t.Error(diff)
	}
}

// XML as programs other than excelize write it: all 17 digits, results of formulas, inline texts, cells without names, phonetic
// texts, escapes, a text table elsewhere.
func TestForeignXML(t *testing.T) {
	b := pack(t, map[string]string{
		"xl/sharedStrings.xml": `<sst xmlns="m"><si><t>fluid</t></si><si><r><t xml:space="preserve">n-</t></r><r><rPr/><t>pentane</t></r><rPh><t>PHON</t></rPh></si><si><t>a_x000A_b</t></si></sst>`,
		"xl/worksheets/sheet1.xml": sheetXML(`<row><c t="s"><v>0</v></c><c t="inlineStr"><is><t>temperature/K</t></is></c><c t="str"><f>"pressure"&amp;"/kPa"</f><v>pressure/kPa</v></c><c t="inlineStr"><is><r><t>no</t></r><r><t>te</t></r></is></c></row>` +
			`<row r="5" spans="1:4"><c r="A5" t="s"><v>1</v></c><c r="B5"><f>1+1</f><v>4.2012345678901232E2</v></c><c r="C5" t="n"><f t="shared" si="0"/><v> 101.325 </v></c><c r="D5" t="s"><v>2</v></c><c r="E5" s="0"/></row>`),
	})
	s, err := readBook(b, Options{})
	check(t, err)
	want := []Row{{File: "d.xlsx", Line: 5, Where: "Sheet1!A5", Fluid: "n-pentane", Key: "n-pentane", Temperature: 420.12345678901232, Pressure: 101325, Note: "a\nb"}}
	if diff := cmp.Diff(want, s.Rows); diff != "" {
		t.Error(diff)
	}
}

func TestSheetChoice(t *testing.T) {
	make := func(names ...string) []byte {
		return book(t, func(f *excelize.File) {
			check(t, f.SetSheetName("Sheet1", names[0]))
			for _, n := range names[1:] {
				_, err := f.NewSheet(n)
				check(t, err)
			}
			for _, n := range names {
				switch n[0] {
				case 'd': // data
					rows(t, f, n, []any{"# " + n}, headRow, goodRow, []any{n, 400, 100})
				case 'h': // hidden data
					rows(t, f, n, headRow, goodRow)
					check(t, f.SetSheetVisible(n, false))
				case 't': // other text
					rows(t, f, n, []any{"Dear reader"}, headRow, goodRow)
				}
			}
		})
	}
	for _, tt := range []struct {
		name   string
		sheets []string
		ask    string
		want   string // sheet read, or error
	}{
		{"the only one", []string{"data"}, "", "data"},
		{"the only one with a header", []string{"text", "empty", "data", "hidden"}, "", "data"},
		{"named", []string{"data 1", "data 2"}, "DATA 2", "data 2"},
		{"named and hidden", []string{"data", "hidden"}, "hidden", "hidden"},
		{"several", []string{"data 1", "text", "data 2", "hidden"}, "", `d.xlsx: 2 sheets have a header of measurements: "data 1", "data 2"; expected the name of the one to read`},
		{"misspelt", []string{"data 1", "text"}, "data1", `d.xlsx: there is no sheet "data1"; near: "data 1"; expected one of the sheets "data 1", "text"`},
		{"none fits", []string{"empty", "text", "text 2"}, "", `d.xlsx:text!A1: column fluid is missing; expected a header such as fluid
d.xlsx:text!A1: column temperature is missing; expected a header such as temperature/K
d.xlsx:text!A1: column pressure is missing; expected a header such as pressure/kPa
d.xlsx:text!A2: row has 3 fields (a comma inside a field needs quotes, a decimal mark is a point); expected 1 as in the header
d.xlsx:text!A3: row has 3 fields (a comma inside a field needs quotes, a decimal mark is a point); expected 1 as in the header`},
		{"all empty", []string{"empty", "empty 2", "hidden"}, "", `d.xlsx: no header in any visible sheet; expected a header such as fluid, temperature/K, pressure/kPa in cells of one row`},
		{"named and empty", []string{"data", "empty"}, "empty", `d.xlsx:empty: no header in the sheet; expected a header such as fluid, temperature/K, pressure/kPa in cells of one row`},
	} {
		t.Run(tt.name, func(t *testing.T) {
			s, err := readBook(make(tt.sheets...), Options{Sheet: tt.ask})
			switch {
			case err != nil && err.Error() != tt.want:
				t.Errorf("\n got %s\nwant %s", err, tt.want)
			case err == nil && s.Files[0].Sheet != tt.want:
				t.Errorf("sheet %q, want %q", s.Files[0].Sheet, tt.want)
			}
		})
	}
}

// Whole error texts of sheets that cannot be used.
func TestBadSheets(t *testing.T) {
	for _, tt := range []struct {
		name string
		fill func(f *excelize.File)
		want string
	}{
		{"values of the wrong kind", func(f *excelize.File) {
			rows(t, f, "Sheet1", append(headRow, "batch"), append(goodRow, true), []any{"n-pentane", true, time.Date(2025, 1, 2, 12, 0, 0, 0, time.UTC), "b"})
			check(t, f.SetCellFormula("Sheet1", "A4", "A2"))
			check(t, f.SetCellFormula("Sheet1", "B4", "B2+1"))
			check(t, f.SetCellInt("Sheet1", "C4", 0))
		}, `d.xlsx:Sheet1!D2: batch: boolean TRUE; expected text
d.xlsx:Sheet1!B3: temperature/K: boolean TRUE; expected a number
d.xlsx:Sheet1!C3: pressure/kPa: a date or time (stored as 45659.5); expected a number
d.xlsx:Sheet1!A4: fluid: formula without a stored result; expected its value (save the file with a spreadsheet program, or put values in place of formulas)
d.xlsx:Sheet1!B4: temperature/K: formula without a stored result; expected its value (save the file with a spreadsheet program, or put values in place of formulas)
d.xlsx:Sheet1!C4: pressure/kPa: a pressure of 0 looks like a gauge reading; expected the absolute pressure (an open vessel has about 101.325 kPa)`},
		{"texts that are no numbers", func(f *excelize.File) {
			rows(t, f, "Sheet1", headRow, []any{"pentan", "420,9", ""}, []any{nil, nil, 100})
		}, `d.xlsx:Sheet1!A2: fluid: fluid "pentan" is not known; near: n-pentane
d.xlsx:Sheet1!B2: temperature/K: number "420,9": has a comma; write the decimal mark as a point and leave out thousands separators
d.xlsx:Sheet1!C2: pressure/kPa: empty; expected a number
d.xlsx:Sheet1!A3: fluid: empty; expected the name of a fluid
d.xlsx:Sheet1!B3: temperature/K: empty; expected a number`},
		{"cells beyond the header", func(f *excelize.File) {
			rows(t, f, "Sheet1", headRow, append(goodRow, nil, "extra"))
		}, `d.xlsx:Sheet1!A2: row has 5 fields (a comma inside a field needs quotes, a decimal mark is a point); expected 3 as in the header`},
		{"merged", func(f *excelize.File) {
			rows(t, f, "Sheet1", []any{"# merged comments may stay"}, headRow, goodRow, []any{"n-pentane", 421, 101}, []any{"# here, too"})
			check(t, f.MergeCell("Sheet1", "A1", "C1"))
			check(t, f.MergeCell("Sheet1", "A5", "C5"))
			check(t, f.MergeCell("Sheet1", "E3", "E4"))
			check(t, f.MergeCell("Sheet1", "C3", "D4"))
		}, `d.xlsx:Sheet1!C3:D4: merged cells; expected one value in each cell (unmerge and fill in)
d.xlsx:Sheet1!C4: pressure/kPa: empty; expected a number`},
		{"a sheet with spaces and quotes", func(f *excelize.File) {
			check(t, f.SetSheetName("Sheet1", "it's \"hot\""))
			rows(t, f, "it's \"hot\"", headRow, []any{"n-pentane", "hot", 101})
		}, `d.xlsx:'it''s "hot"'!B2: temperature/K: number "hot": not a decimal number; expected digits with a point as decimal mark, as in 420.9 or 1e-3`},
		{"header of numbers", func(f *excelize.File) {
			rows(t, f, "Sheet1", []any{"fluid", true, 3})
		}, `d.xlsx:Sheet1!A1: column temperature is missing; expected a header such as temperature/K
d.xlsx:Sheet1!A1: column pressure is missing; expected a header such as pressure/kPa
d.xlsx:Sheet1!B1: boolean TRUE; expected a header as text, such as temperature/K`},
		{"header only", func(f *excelize.File) { rows(t, f, "Sheet1", headRow) }, `d.xlsx: no rows below the header; expected at least one row of measurements`},
	} {
		t.Run(tt.name, func(t *testing.T) {
			s, err := readBook(book(t, tt.fill), Options{KnownFluid: knownFluid})
			if s != nil || err == nil || err.Error() != tt.want {
				t.Errorf("\n got %v\nwant %s", err, tt.want)
			}
		})
	}
}

// What is hidden on the screen is read all the same, and said to be.
func TestHiddenRowsAndColumns(t *testing.T) {
	b := book(t, func(f *excelize.File) {
		rows(t, f, "Sheet1", append(headRow, "operator"), append(goodRow, "a"), []any{"n-pentane", 421, 101, "a"}, []any{"n-pentane", 422, 101, "a"})
		check(t, f.SetRowVisible("Sheet1", 3, false))
		check(t, f.SetRowVisible("Sheet1", 4, false))
		check(t, f.SetColVisible("Sheet1", "C:D", false))
	})
	s, err := readBook(b, Options{})
	check(t, err)
	var got []string
	for _, w := range s.Warnings {
		got = append(got, w.String())
	}
	want := []string{"d.xlsx:Sheet1!A3: hidden row is read like any other (and 1 more row)", "d.xlsx:Sheet1!C1: hidden column pressure/kPa is read like any other"}
	if diff := cmp.Diff(want, got); diff != "" || len(s.Rows) != 3 {
		t.Errorf("%d rows; %s", len(s.Rows), diff)
	}
}

func TestRepeatedRowOfASheet(t *testing.T) {
	s, err := readBook(book(t, func(f *excelize.File) { rows(t, f, "Sheet1", headRow, goodRow, goodRow) }), Options{})
	check(t, err)
	if len(s.Excluded) != 1 || s.Excluded[0].String() != "d.xlsx:Sheet1!A3: n-pentane: same as row 2 in every column; if it is another droplet, add a column that numbers the droplets" {
		t.Errorf("excluded %v", s.Excluded)
	}
}

func TestDateFormat(t *testing.T) {
	for code, want := range map[string]bool{
		"General": false, "0.00": false, "0.00E+00": false, "#,##0.0 \"mm\"": false, "0.0\\ \\d": false, "[Red]0.0;[Blue]-0.0": false, "@": false, "_-* #,##0\\ _d": false, "0.0\"": false, "[": false, "": false, "0\\": false,
		"yyyy-mm-dd": true, "h:mm": true, "[h]:mm": true, "[ss].0": true, "D/M": true, "0.0 s": true, "[$-409]d": true,
	} {
		if got := dateFormat(code); got != want {
			t.Errorf("dateFormat(%q) = %v", code, got)
		}
	}
}
