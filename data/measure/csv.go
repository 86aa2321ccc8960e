package measure

import (
	"crypto/sha256"
	"encoding/csv"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"strings"
)

// Options lets the caller bring what it knows of fluids. The zero value checks no names.
type Options struct {
	// KnownFluid returns the key of the fluid called name, which may be an alias. The text of its error
	// is reported at the place of the name. It is called once per name. Default: every name is its own key.
	KnownFluid func(name string) (key string, err error)

	// LiquidRange returns the temperatures in kelvin between which the fluid can be liquid (triple point
	// and critical point); ok is false if they are not known. A row outside gets a Warning. Default: only
	// temperatures below 150 K in a column in K get one.
	LiquidRange func(key string) (low, high float64, ok bool)

	// Sheet is the name of the sheet of a workbook, in upper or lower case. Default: the only one with a
	// header of measurements. Text files have no sheets.
	Sheet string
}

// ReadFile reads the file at path by its extension: .xlsx and .xlsm are workbooks, anything else but workbooks
// of other formats is read as CSV.
//
// Errors: those of ReadCSV and ReadXLSX, those of os.Open, *Problem for a workbook of another format.
func ReadFile(path string, o Options) (*Set, error) {
	switch ext := strings.ToLower(filepath.Ext(path)); ext {
	case ".xlsb", ".xls", ".ods":
		return nil, &Problem{File: path, Found: "a workbook of another format (" + ext + ")", Expected: "XLSX, or CSV (save the sheet as \"CSV UTF-8\")"}
	}
	f, err := os.Open(path)
	if err != nil {
		return nil, fmt.Errorf("measurements: %w", err)
	}
	defer f.Close()
	if !IsWorkbook(path) {
		return ReadCSV(f, path, o)
	}
	info, err := f.Stat()
	if err != nil {
		return nil, fmt.Errorf("measurements: %w", err)
	}
	return ReadXLSX(f, info.Size(), path, o)
}

// IsWorkbook says whether ReadFile takes the file at path for a workbook, by its extension.
func IsWorkbook(path string) bool {
	ext := strings.ToLower(filepath.Ext(path))
	return ext == ".xlsx" || ext == ".xlsm"
}

// ReadCSV reads measurements from r; name stands for the file in every place that is reported. The
// text is read as a stream, so that memory is needed for the rows only.
//
// Errors: Problems with all that is wrong; an error of r, wrapped.
func ReadCSV(r io.Reader, name string, o Options) (*Set, error) {
	return readCSV(r, name, o, defaultLimits())
}

func readCSV(r io.Reader, name string, o Options, l limits) (*Set, error) {
	text := &textReader{source: r, sum: sha256.New()}
	records := csv.NewReader(text)
	records.Comment = '#'
	records.FieldsPerRecord = -1 // counted by the assembler, which goes on after a wrong count
	records.ReuseRecord = true
	records.TrimLeadingSpace = true
	text.longest = l.record
	at := func(i int) position {
		line, column := records.FieldPos(i)
		return position{line: line, column: column}
	}
	a := newAssembler(name, o, l)
	if size := sizeOf(r); size > 0 {
		a.share = func() float64 { return float64(records.InputOffset()) / float64(size) }
	}
	for headed := false; ; {
		text.record = records.InputOffset()
		fields, err := records.Read()
		var wrong *csv.ParseError
		switch {
		case err == nil && headed:
			if !a.record(fields, at) {
				return a.close("")
			}
		case err == nil:
			if found, expected := foreign(fields); found != "" {
				a.fail(at(0), "", found, expected, nil)
				return a.close("")
			}
			a.header(fields, at)
			headed = true
		case text.err != nil && text.err != io.EOF:
			var stop *textError
			if !errors.As(text.err, &stop) {
				return nil, fmt.Errorf("%s: reading: %w", name, text.err)
			}
			a.fail(position{line: stop.line, column: stop.column}, "", stop.found, stop.expected, stop.cause)
			return a.close("")
		case err == io.EOF && !headed:
			a.fail(position{line: 1, column: 1}, "", "no header in the file", "a header such as fluid,temperature/K,pressure/kPa", nil)
			return a.close("")
		case err == io.EOF:
			return a.close(hex.EncodeToString(text.sum.Sum(nil)))
		case errors.As(err, &wrong):
			a.quotes(wrong)
			if !headed {
				return a.close("")
			}
		default:
			return nil, fmt.Errorf("%s: reading: %w", name, err)
		}
	}
}

// sizeOf returns the bytes that r has to give, or 0 if it cannot tell.
func sizeOf(r io.Reader) int64 {
	switch r := r.(type) {
	case interface{ Len() int }:
		return int64(r.Len())
	case interface{ Stat() (fs.FileInfo, error) }:
		if info, err := r.Stat(); err == nil && info.Mode().IsRegular() {
			return info.Size()
		}
	}
	return 0
}

// quotes reports misplaced quotation marks.
func (a *assembler) quotes(e *csv.ParseError) {
	at := position{line: e.Line, column: e.Column}
	switch {
	case errors.Is(e.Err, csv.ErrBareQuote):
		a.fail(at, "", `quotation mark inside a field without quotes`, `the whole field in quotes, marks inside doubled`, e)
	case e.StartLine != e.Line:
		a.fail(position{line: e.StartLine}, "", fmt.Sprintf("quoted field still open at line %d", e.Line), "a closing quotation mark before the comma or the end of the line", e)
	default:
		a.fail(at, "", `quoted field without a proper end`, `a comma or the end of the line after the mark, marks inside doubled`, e)
	}
}

// foreign recognises headers of other kinds of text file.
func foreign(header []string) (found, expected string) {
	all := strings.Join(header, ",")
	switch {
	case strings.ContainsRune(all, '\r'):
		return "lines end with CR alone", "lines that end with LF or CRLF"
	case len(header) == 1 && strings.Contains(all, ";"):
		return "fields are separated by semicolons", "commas between fields and points as decimal marks"
	case len(header) == 1 && strings.Contains(all, "\t"):
		return "fields are separated by tabs", "commas between fields"
	}
	return "", ""
}
