package measure

import (
	"archive/zip"
	"bytes"
	"encoding/xml"
	"errors"
	"fmt"
	"io"
	"path"
	"strings"

	"github.com/xuri/excelize/v2"

	"limsup/data/problem"
)

// This file opens the package of a workbook: a ZIP archive of XML parts that refer to each other by relations.
// The library excelize reads the parts that describe the workbook (sheets, number formats). It is given only
// these, within limits, since it would unpack everything at once. Cells are read in cells.go, because the
// library's row iterator passes over broken XML, error values and formulas without a result in silence.

// workbook is an opened package.
type workbook struct {
	limits limits
	parts  map[string]*zip.File // by lower-case name
	sheets []sheet
	texts  string       // name of the part of shared texts; "" without
	dates  map[int]bool // whether a cell style shows a date or time
}

// sheet is one worksheet.
type sheet struct {
	name    string
	part    string
	visible bool
}

// packageError says that a file is no workbook that can be read.
type packageError struct {
	found, expected string
	cause           error
}

func (e *packageError) Error() string { return e.found }
func (e *packageError) Unwrap() error { return e.cause }

const aWorkbook = "an XLSX workbook"

// openWorkbook reads the description of the workbook in r.
//
// Errors: *packageError.
func openWorkbook(r io.ReaderAt, size int64, l limits) (*workbook, error) {
	var start [8]byte
	if n, _ := r.ReadAt(start[:], 0); n == len(start) && string(start[:]) == "\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" {
		return nil, &packageError{"the file is encrypted or in the old .xls format", aWorkbook + " without password (or CSV)", nil}
	}
	z, err := zip.NewReader(r, size)
	if err != nil {
		return nil, &packageError{"the file is no ZIP archive (" + err.Error() + ")", aWorkbook, err}
	}
	b := &workbook{limits: l, parts: map[string]*zip.File{}}
	if len(z.File) > l.parts {
		return nil, beyond(&LimitError{What: "parts in the archive", Limit: int64(l.parts)})
	}
	for _, f := range z.File {
		name := strings.ToLower(strings.TrimPrefix(strings.ReplaceAll(f.Name, `\`, "/"), "/"))
		if _, twice := b.parts[name]; twice {
			return nil, &packageError{"the archive holds two parts called " + problem.Quoted(f.Name), "each part once", nil}
		}
		b.parts[name] = f
	}
	return b, b.describe()
}

// beyond makes a limit a packageError.
func beyond(e *LimitError) *packageError {
	return &packageError{e.Error(), "at most that (is the file damaged?)", e}
}

// relation is one reference from a part to another.
type relation struct {
	ID     string `xml:"Id,attr"`
	Type   string `xml:"Type,attr"`
	Target string `xml:"Target,attr"`
	Mode   string `xml:"TargetMode,attr"`
}

func (r *relation) is(kind string) bool {
	return strings.HasSuffix(r.Type, "/"+kind) && !strings.EqualFold(r.Mode, "External")
}

// relations returns the references of a part ("" for those of the package), their targets as names of parts.
func (b *workbook) relations(of string) ([]relation, error) {
	folder, file := path.Split(of)
	name := strings.ToLower(folder + "_rels/" + file + ".rels")
	text, err := b.small(name)
	if err != nil {
		return nil, err
	}
	var all struct {
		List []relation `xml:"Relationship"`
	}
	if err := xml.Unmarshal(text, &all); err != nil {
		return nil, unreadable(name, err)
	}
	for i := range all.List {
		t := strings.ToLower(strings.ReplaceAll(all.List[i].Target, `\`, "/"))
		if !strings.HasPrefix(t, "/") {
			t = folder + t
		}
		all.List[i].Target = strings.TrimPrefix(path.Clean("/"+t), "/")
	}
	return all.List, nil
}

// small reads a part that cannot be large.
func (b *workbook) small(name string) ([]byte, error) {
	f := b.parts[name]
	if f == nil {
		return nil, &packageError{"the archive has no part " + problem.Quoted(name), aWorkbook, nil}
	}
	if f.UncompressedSize64 > uint64(b.limits.part) {
		return nil, beyond(&LimitError{What: "part " + problem.Quoted(name), Limit: b.limits.part, Unit: "bytes"})
	}
	r, err := f.Open()
	if err == nil {
		defer r.Close()
		var text []byte
		if text, err = io.ReadAll(r); err == nil { // the archive reader holds the part to its stated size
			return text, nil
		}
	}
	return nil, &packageError{"part " + problem.Quoted(name) + " cannot be read: " + err.Error(), aWorkbook, err}
}

// describe finds sheets, shared texts and formats.
func (b *workbook) describe() error {
	list, err := b.relations("")
	if err != nil {
		return err
	}
	main, styles := "", ""
	for i := range list {
		if list[i].is("officeDocument") {
			main = list[i].Target
			break
		}
	}
	if main == "" {
		return &packageError{"the archive names no workbook", aWorkbook, nil}
	}
	if list, err = b.relations(main); err != nil {
		return err
	}
	target := map[string]string{}
	for i := range list {
		switch r := &list[i]; {
		case r.is("worksheet"):
			target[r.ID] = r.Target
		case r.is("sharedStrings"):
			b.texts = r.Target
		case r.is("styles"):
			styles = r.Target
		}
	}
	f, err := b.library(main, styles)
	if err != nil {
		return err
	}
	defer f.Close()
	if f.WorkBook == nil || len(f.WorkBook.Sheets.Sheet) == 0 {
		return &packageError{"the workbook has no sheets", aWorkbook, nil}
	}
	for _, s := range f.WorkBook.Sheets.Sheet {
		if part, ok := target[s.ID]; ok { // the others are charts and macros
			b.sheets = append(b.sheets, sheet{s.Name, part, s.State == "" || s.State == "visible"})
		}
	}
	if len(b.sheets) > b.limits.sheets {
		return beyond(&LimitError{What: "sheets", Limit: int64(b.limits.sheets)})
	}
	b.dates = dateStyles(f)
	return nil
}

// library lets excelize read the description of the workbook and the styles, in a package of their own where it
// finds them under the usual names.
func (b *workbook) library(main, styles string) (f *excelize.File, err error) {
	defer func() {
		if r := recover(); r != nil { // the library indexes tables of the file without checking
			f, err = nil, &packageError{fmt.Sprintf("the description of the workbook cannot be read: %v", r), aWorkbook, nil}
		}
	}()
	book, err := b.small(main)
	if err != nil {
		return nil, err
	}
	parts := []struct {
		name string
		text []byte
	}{
		{"_rels/.rels", []byte(`<Relationships xmlns="http://schemas.openxmlformats.org/package/2006/relationships">` +
			`<Relationship Id="r1" Type="` + excelize.SourceRelationshipOfficeDocument + `" Target="xl/workbook.xml"/></Relationships>`)},
		{"xl/workbook.xml", book},
	}
	if styles != "" {
		text, err := b.small(styles)
		if err != nil {
			return nil, err
		}
		parts = append(parts, struct {
			name string
			text []byte
		}{"xl/styles.xml", text})
	}
	var reduced bytes.Buffer
	w := zip.NewWriter(&reduced)
	for _, p := range parts {
		part, err := w.Create(p.name)
		if err == nil {
			_, err = part.Write(p.text)
		}
		if err != nil {
			return nil, err
		}
	}
	if err := w.Close(); err != nil {
		return nil, err
	}
	unpacked := b.limits.part * int64(len(parts))
	f, err = excelize.OpenReader(&reduced, excelize.Options{UnzipSizeLimit: unpacked, UnzipXMLSizeLimit: unpacked})
	if err != nil {
		return nil, &packageError{"the description of the workbook cannot be read: " + err.Error(), aWorkbook, err}
	}
	return f, nil
}

// dateStyles tells which cell styles show dates or times.
func dateStyles(f *excelize.File) map[int]bool {
	out := map[int]bool{}
	if f.Styles == nil || f.Styles.CellXfs == nil {
		return out
	}
	own := map[int]string{}
	if f.Styles.NumFmts != nil {
		for _, n := range f.Styles.NumFmts.NumFmt {
			if n != nil {
				own[n.NumFmtID] = n.FormatCode
			}
		}
	}
	for i, x := range f.Styles.CellXfs.Xf {
		if x.NumFmtID == nil {
			continue
		}
		n := *x.NumFmtID
		code, ok := own[n]
		// Numbers of built-in formats: ECMA-376 part 1, numFmt (from memory); 27 to 36 and 50 to 58 are East Asian dates.
		out[i] = ok && dateFormat(code) || !ok && (n >= 14 && n <= 22 || n >= 27 && n <= 36 || n >= 45 && n <= 47 || n >= 50 && n <= 58)
	}
	return out
}

// dateFormat says whether a number format shows a date or a time: it has one of the letters d, m, y, h, s outside
// quotation marks, escapes and brackets, or an elapsed time such as [h].
func dateFormat(code string) bool {
	runes := []rune(strings.ToLower(code))
	for i := 0; i < len(runes); i++ {
		switch c := runes[i]; c {
		case '\\', '_', '*':
			i++ // the next character stands for itself or its width
		case '"':
			for i++; i < len(runes) && runes[i] != '"'; i++ {
			}
		case '[':
			from := i + 1
			for i++; i < len(runes) && runes[i] != ']'; i++ {
			}
			if inside := strings.Trim(string(runes[from:min(i, len(runes))]), "hms"); inside == "" && i > from {
				return true
			}
		case 'd', 'm', 'y', 'h', 's':
			return true
		}
	}
	return false
}

// open returns the unpacked bytes of a part, at most as many as the limit.
func (b *workbook) open(part, what string, limit int64) (io.ReadCloser, error) {
	f := b.parts[part]
	if f == nil {
		return nil, &packageError{"the archive has no part " + problem.Quoted(part), aWorkbook, nil}
	}
	if f.UncompressedSize64 > uint64(limit) {
		return nil, beyond(&LimitError{What: what, Limit: limit, Unit: "bytes"})
	}
	r, err := f.Open()
	if err != nil {
		return nil, &packageError{"part " + problem.Quoted(part) + " cannot be read: " + err.Error(), aWorkbook, err}
	}
	return r, nil
}

// errStop ends a reading that has found what it wanted.
var errStop = errors.New("stop")
