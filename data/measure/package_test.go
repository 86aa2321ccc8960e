package measure

import (
	"archive/zip"
	"bytes"
	"errors"
	"fmt"
	"maps"
	"slices"
	"strings"
	"testing"
)

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
		// Equal rows pack well; each is excluded with a reason.
		{"equal rows", sheet(headXML + strings.Repeat(`<row><c t="str"><v>f</v></c><c><v>420</v></c><c><v>1</v></c></row>`, 12)), func(l *limits) { l.rows = 10 }, LimitError{"rows", 10, ""}},
		{"blank rows", sheet(headXML + strings.Repeat(`<row><c t="str"><v> </v></c></row>`, 12)), func(l *limits) { l.rows = 10 }, LimitError{"rows", 10, ""}},
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
			if used > 8<<20 && !raceDetector {
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
