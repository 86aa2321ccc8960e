package measure

import (
	"archive/zip"
	"bytes"
	"encoding/csv"
	"errors"
	"fmt"
	"maps"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
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
			rows(t, f, "Sheet1", []any{"# merged comments may stay"}, headRow, goodRow, []any{"n-pentane", 421, 101})
			check(t, f.MergeCell("Sheet1", "A1", "C1"))
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

// sheetXML is a worksheet with the given rows.
func sheetXML(rows string) string {
	return `<?xml version="1.0" encoding="UTF-8" standalone="yes"?><worksheet xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main"><sheetData>` + rows + `</sheetData></worksheet>`
}

const headXML = `<row r="1"><c r="A1" t="inlineStr"><is><t>fluid</t></is></c><c r="B1" t="inlineStr"><is><t>temperature/K</t></is></c><c r="C1" t="inlineStr"><is><t>pressure/kPa</t></is></c></row>`
const goodXML = `<row r="2"><c r="A2" t="inlineStr"><is><t>n-pentane</t></is></c><c r="B2"><v>420.9</v></c><c r="C2"><v>101.325</v></c></row>`

// pack makes a package of one sheet out of its least parts and the given ones; an empty text leaves a part out.
func pack(t testing.TB, parts map[string]string) []byte {
	t.Helper()
	const office = `http://schemas.openxmlformats.org/officeDocument/2006/relationships`
	all := map[string]string{
		"[Content_Types].xml":        `<Types xmlns="http://schemas.openxmlformats.org/package/2006/content-types"/>`,
		"_rels/.rels":                `<Relationships><Relationship Id="r1" Type="` + office + `/officeDocument" Target="xl/workbook.xml"/></Relationships>`,
		"xl/workbook.xml":            `<workbook xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main" xmlns:r="` + office + `"><sheets><sheet name="Sheet1" sheetId="1" r:id="r1"/></sheets></workbook>`,
		"xl/_rels/workbook.xml.rels": `<Relationships><Relationship Id="r1" Type="` + office + `/worksheet" Target="worksheets/sheet1.xml"/><Relationship Id="r2" Type="` + office + `/sharedStrings" Target="/xl/sharedStrings.xml"/></Relationships>`,
		"xl/sharedStrings.xml":       `<sst/>`,
		"xl/worksheets/sheet1.xml":   sheetXML(headXML + goodXML),
	}
	for name, text := range parts {
		all[name] = text
	}
	var b bytes.Buffer
	w := zip.NewWriter(&b)
	for _, name := range slices.Sorted(maps.Keys(all)) {
		if all[name] == "" {
			continue
		}
		f, err := w.Create(name)
		check(t, err)
		_, err = f.Write([]byte(all[name]))
		check(t, err)
	}
	check(t, w.Close())
	return b.Bytes()
}

// Whole error texts of packages that are damaged, hostile, or something else.
func TestBadPackages(t *testing.T) {
	sheet := func(rows string) []byte { return pack(t, map[string]string{"xl/worksheets/sheet1.xml": rows}) }
	whole := pack(t, nil)
	if _, err := readBook(whole, Options{}); err != nil {
		t.Fatalf("the package that the others are made from: %v", err)
	}
	broken := bytes.Clone(whole)
	for i := bytes.Index(broken, []byte("xl/workbook.xml")) + 20; i < bytes.Index(broken, []byte("xl/workbook.xml"))+40; i++ {
		broken[i] ^= 0xff
	}
	for _, tt := range []struct {
		name string
		file []byte
		want string
	}{
		{"empty", nil, `d.xlsx: the file is no ZIP archive (zip: not a valid zip file); expected an XLSX workbook`},
		{"text", []byte(head + good), `d.xlsx: the file is no ZIP archive (zip: not a valid zip file); expected an XLSX workbook`},
		{"cut off", whole[:len(whole)/2], `d.xlsx: the file is no ZIP archive (zip: not a valid zip file); expected an XLSX workbook`},
		{"encrypted", []byte("\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1 and so on"), `d.xlsx: the file is encrypted or in the old .xls format; expected an XLSX workbook without password (or CSV)`},
		{"another kind of archive", pack(t, map[string]string{"_rels/.rels": ""}), `d.xlsx: the archive has no part "_rels/.rels"; expected an XLSX workbook`},
		{"a text document", pack(t, map[string]string{"_rels/.rels": "<Relationships/>"}), `d.xlsx: the archive names no workbook; expected an XLSX workbook`},
		{"no workbook", pack(t, map[string]string{"xl/workbook.xml": ""}), `d.xlsx: the archive has no part "xl/workbook.xml"; expected an XLSX workbook`},
		{"relations that are no XML", pack(t, map[string]string{"xl/_rels/workbook.xml.rels": "<a"}), `d.xlsx: part "xl/_rels/workbook.xml.rels" cannot be read: XML syntax error on line 1: unexpected EOF; expected an XLSX workbook`},
		{"workbook without sheets", pack(t, map[string]string{"xl/workbook.xml": `<workbook xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main"/>`}), `d.xlsx: the workbook has no sheets; expected an XLSX workbook`},
		{"no sheet", pack(t, map[string]string{"xl/worksheets/sheet1.xml": ""}), `d.xlsx: the archive has no part "xl/worksheets/sheet1.xml"; expected an XLSX workbook`},
		{"outside the archive", pack(t, map[string]string{"_rels/.rels": `<Relationships><Relationship Type="x/officeDocument" Target="../../../etc/passwd"/></Relationships>`}), `d.xlsx: the archive has no part "etc/_rels/passwd.rels"; expected an XLSX workbook`},
		{"sheet cut off", sheet(`<worksheet><sheetData>` + headXML + goodXML), `d.xlsx: part "xl/worksheets/sheet1.xml" cannot be read: XML syntax error on line 1: unexpected EOF; expected an XLSX workbook`},
		{"tags crossed", sheet(`<worksheet><sheetData>` + headXML + `<row><c></row></c></sheetData></worksheet>`), `d.xlsx: part "xl/worksheets/sheet1.xml" cannot be read: XML syntax error on line 1: element <c> closed by </row>; expected an XLSX workbook`},
		{"entities", sheet(`<!DOCTYPE x [<!ENTITY a "b">]><worksheet><sheetData>` + headXML + `<row><c t="str"><v>&a;</v></c></row></sheetData></worksheet>`), `d.xlsx: part "xl/worksheets/sheet1.xml" cannot be read: XML syntax error on line 1: invalid character entity &a;; expected an XLSX workbook`},
		{"another encoding", sheet(`<?xml version="1.0" encoding="UTF-16"?><worksheet/>`), `d.xlsx: part "xl/worksheets/sheet1.xml" cannot be read: xml: encoding "UTF-16" declared but Decoder.CharsetReader is nil; expected an XLSX workbook`},
		{"rows out of order", sheet(sheetXML(headXML + goodXML + goodXML)), `d.xlsx: row numbered "2" after row 2; expected rows in ascending order, at most 1048576`},
		{"row too high", sheet(sheetXML(headXML + `<row r="1048577"/>`)), `d.xlsx: row numbered "1048577" after row 1; expected rows in ascending order, at most 1048576`},
		{"cells out of order", sheet(sheetXML(`<row r="1"><c r="B1"/><c r="A1"/></row>`)), `d.xlsx: cell named "A1" in row 1; expected cells in their row, in ascending order`},
		{"cell of another row", sheet(sheetXML(`<row r="1"><c r="B2"/></row>`)), `d.xlsx: cell named "B2" in row 1; expected cells in their row, in ascending order`},
		{"cell without sense", sheet(sheetXML(`<row r="1"><c r="1B"/></row>`)), `d.xlsx: cell named "1B" in row 1; expected cells in their row, in ascending order`},
		{"cell far to the right", sheet(sheetXML(`<row r="1"><c r="XFD1"><v>1</v></c></row>`)), `d.xlsx: more than 1000 columns; expected at most that (is the file damaged?)`},
		{"values without sense", sheet(sheetXML(headXML + `<row r="3"><c r="A3" t="s"><v>7</v></c><c r="B3"><v>4x</v></c><c r="C3"><v>NaN</v></c></row><row><c t="q"/><c t="e"><f>1/0</f><v>#DIV/0!</v></c><c><v>1e999</v></c></row>`)), `d.xlsx:Sheet1!A3: fluid: text number "7" does not exist; expected text
d.xlsx:Sheet1!B3: temperature/K: number cell holds "4x"; expected a number
d.xlsx:Sheet1!C3: pressure/kPa: number cell holds "NaN"; expected a number
d.xlsx:Sheet1!A4: fluid: cell of unknown type "q"; expected text
d.xlsx:Sheet1!B4: temperature/K: error value #DIV/0!; expected a number
d.xlsx:Sheet1!C4: pressure/kPa: number cell holds "1e999"; expected a number`},
		{"merged range without sense", sheet(`<worksheet><sheetData>` + headXML + goodXML + `</sheetData><mergeCells><mergeCell ref="A1"/></mergeCells></worksheet>`), `d.xlsx:Sheet1!A1: merged range that cannot be read; expected a range such as A1:B2`},
		{"terminal control", pack(t, map[string]string{"xl/worksheets/sheet1.xml": sheetXML(headXML + `<row><c t="str"><v>a_x001B_[2J</v></c><c t="e"><v>_x&#x9b;</v></c><c><v>1</v></c></row>`), "xl/workbook.xml": `<workbook xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main" xmlns:r="http://schemas.openxmlformats.org/officeDocument/2006/relationships"><sheets><sheet name="a&#x9b;b" sheetId="1" r:id="r1"/></sheets></workbook>`}),
			"d.xlsx:'\"a\\u009bb\"'!A2: fluid: fluid \"a\\x1b[2J\" is not known; near: n-pentane\nd.xlsx:'\"a\\u009bb\"'!B2: temperature/K: error value \"_x\\u009b\"; expected a number"},
	} {
		t.Run(tt.name, func(t *testing.T) {
			s, err := readBook(tt.file, Options{KnownFluid: knownFluid})
			if s != nil || err == nil {
				t.Fatalf("read %+v, %v", s, err)
			}
			var ps Problems
			if !errors.As(err, &ps) {
				t.Fatalf("%v (%T) is no Problems", err, err)
			}
			if got := err.Error(); got != tt.want {
				t.Errorf("\n got %s\nwant %s", got, tt.want)
			}
		})
	}
	if _, err := readBook(broken, Options{}); err == nil {
		t.Error("damaged bytes were read")
	}
}

// Each limit is the cause of a Problem, and is met before much memory is taken.
func TestLimits(t *testing.T) {
	many := func(n int, format string) string {
		var b strings.Builder
		for i := range n {
			if strings.Contains(format, "%") {
				fmt.Fprintf(&b, format, i)
			} else {
				b.WriteString(format)
			}
		}
		return b.String()
	}
	part := func(name, text string) []byte { return pack(t, map[string]string{name: text}) }
	sheet := func(rows string) []byte { return part("xl/worksheets/sheet1.xml", sheetXML(rows)) }
	bomb := strings.Repeat(" ", 8<<20)
	for _, tt := range []struct {
		name string
		file []byte
		set  func(l *limits)
		want LimitError
	}{
		{"small part", part("xl/workbook.xml", "<workbook>"+bomb+"</workbook>"), func(l *limits) { l.part = 1 << 20 }, LimitError{`part "xl/workbook.xml"`, 1 << 20, "bytes"}},
		{"texts", part("xl/sharedStrings.xml", "<sst>"+bomb+"</sst>"), func(l *limits) { l.texts = 1 << 20 }, LimitError{"unpacked texts", 1 << 20, "bytes"}},
		{"sheet", sheet(headXML + bomb), func(l *limits) { l.sheet = 1 << 20 }, LimitError{"unpacked sheet", 1 << 20, "bytes"}},
		{"one text", sheet(headXML + bomb), nil, LimitError{"element", 1 << 20, "bytes"}},
		{"one attribute", sheet(headXML + `<row x="` + bomb + `"/>`), nil, LimitError{"element", 1 << 20, "bytes"}},
		{"nested", sheet(headXML + many(100, "<a>")), nil, LimitError{"elements inside each other", 64, ""}},
		{"nested texts", part("xl/sharedStrings.xml", many(100000, "<a>")), nil, LimitError{"elements inside each other", 64, ""}},
		{"merged", part("xl/worksheets/sheet1.xml", "<worksheet>"+many(11, `<mergeCell ref="A%d:A9"/>`)+"</worksheet>"), func(l *limits) { l.merged = 10 }, LimitError{"merged ranges", 10, ""}},
		{"parts", whole(t, 12), func(l *limits) { l.parts = 10 }, LimitError{"parts in the archive", 10, ""}},
		{"rows", sheet(headXML + many(12, `<row><c t="str"><v>f%d</v></c><c><v>420</v></c><c><v>1</v></c></row>`)), func(l *limits) { l.rows = 10 }, LimitError{"rows", 10, ""}},
	} {
		t.Run(tt.name, func(t *testing.T) {
			l := defaultLimits()
			if tt.set != nil {
				tt.set(&l)
			}
			var err error
			used := allocated(func() { _, err = readXLSX(bytes.NewReader(tt.file), int64(len(tt.file)), "d.xlsx", Options{}, l) })
			var e *LimitError
			if !errors.As(err, &e) || *e != tt.want {
				t.Errorf("%v: %+v, want %+v", err, e, tt.want)
			}
			// A token of 1 MiB is read into a buffer that doubles (4 MiB in all); the library and the inflaters take less than 4 MiB more.
			if used > 8<<20 {
				t.Errorf("%d bytes allocated", used)
			}
		})
	}
}

// whole is a package with n parts that nothing refers to.
func whole(t testing.TB, n int) []byte {
	parts := map[string]string{}
	for i := range n {
		parts[fmt.Sprintf("media/%d", i)] = "x"
	}
	return pack(t, parts)
}

// The same part twice: which one a program reads would be its own choice.
func TestDoubledPart(t *testing.T) {
	var b bytes.Buffer
	w := zip.NewWriter(&b)
	for range 2 {
		_, err := w.Create("xl/workbook.xml")
		check(t, err)
	}
	check(t, w.Close())
	if _, err := readBook(b.Bytes(), Options{}); err == nil || err.Error() != `d.xlsx: the archive holds two parts called "xl/workbook.xml"; expected each part once` {
		t.Error(err)
	}
}

// Limits of text files.
func TestLimitsOfText(t *testing.T) {
	l := defaultLimits()
	l.record, l.rows, l.problems = 1<<20, 10, 10
	var e *LimitError
	_, err := readCSV(strings.NewReader(head+"\""+strings.Repeat("n-pentane,420,1\n", 1<<17)), "d.csv", Options{}, l)
	if !errors.As(err, &e) || *e != (LimitError{"record", 1 << 20, "bytes"}) {
		t.Errorf("open quotation mark: %v", err)
	}
	var b strings.Builder
	for i := range 20 {
		fmt.Fprintf(&b, "f,4%02d,1\n", i)
	}
	_, err = readCSV(strings.NewReader(head+b.String()), "d.csv", Options{}, l)
	if want := "d.csv:12: more than 10 rows; expected at most that (divide the file)"; !errors.As(err, &e) || err.Error() != want {
		t.Errorf("rows: %v, want %s", err, want)
	}
	_, err = readCSV(strings.NewReader(head+strings.Repeat("x,hot,cold\n", 30)), "d.csv", Options{}, l)
	var ps Problems
	if !errors.As(err, &ps) || len(ps) != 11 || ps[10].Error() != "d.csv:7: reading stopped after 10 problems" {
		t.Errorf("problems: %v", err)
	}
}

func FuzzReadXLSX(f *testing.F) {
	for _, seed := range [][]byte{
		pack(f, nil), []byte("PK\x05\x06"), pack(f, map[string]string{"xl/worksheets/sheet1.xml": sheetXML(headXML + `<row><c t="s"><v>0</v></c><c t="e"><v>#N/A</v></c><c t="b"><v>1</v></c></row>`), "xl/sharedStrings.xml": `<sst><si><t>n-pentane</t></si></sst>`}),
	} {
		f.Add(seed, "", "")
		f.Add(seed, "Sheet1", sheetXML(headXML+goodXML))
	}
	f.Add(pack(f, nil), "", sheetXML(headXML+goodXML+`<row hidden="1"><c s="9"><f>A1</f></c><c t="d"><v>2025-01-01</v></c></row>`)+`<mergeCells><mergeCell ref="A1:C9"/></mergeCells>`)
	f.Fuzz(func(t *testing.T, file []byte, name, sheet string) {
		if sheet != "" { // the fuzzer can hardly write archives: it writes what they hold
			file = pack(t, map[string]string{"xl/worksheets/sheet1.xml": sheet})
		}
		s, err := readBook(file, Options{LiquidRange: liquidRange, Sheet: name})
		if err != nil {
			var ps Problems
			if s != nil || !errors.As(err, &ps) || len(ps) == 0 || err.Error() == "" {
				t.Fatalf("set %v with error %v (%T)", s, err, err)
			}
			return
		}
		if len(s.Rows) == 0 {
			t.Fatal("no rows and no error")
		}
		soundRows(t, s.Rows)
	})
}
