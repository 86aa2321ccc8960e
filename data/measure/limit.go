package measure

import "fmt"

// LimitError is the cause of a Problem whose file asks for more than the reader grants: such a file is damaged or
// made to exhaust the machine rather than written by an instrument.
type LimitError struct {
	What  string // "unpacked sheet", "columns"
	Limit int64
	Unit  string // "bytes"; empty for a count of What
}

// Error returns "more than 1000 columns", "unpacked sheet of more than 1024 bytes".
func (e *LimitError) Error() string {
	if e.Unit == "" {
		return fmt.Sprintf("more than %d %s", e.Limit, e.What)
	}
	return fmt.Sprintf("%s of more than %d %s", e.What, e.Limit, e.Unit)
}

// limits are what a file may ask for. They are fields, not constants, for the sake of the tests.
type limits struct {
	rows     int   // kept of one file, with those excluded
	problems int   // kept of one file; reading stops there
	record   int64 // bytes of one record of a text file

	part    int64 // bytes of the small parts of a workbook
	texts   int64 // bytes of its shared texts, unpacked
	sheet   int64 // bytes of a sheet, unpacked
	token   int64 // bytes of one element or text of XML
	depth   int   // elements inside each other
	parts   int   // parts of the package
	sheets  int
	columns int
	merged  int // merged ranges
}

func defaultLimits() limits {
	return limits{rows: 1 << 21, problems: 10000, record: 16 << 20,
		part: 16 << 20, texts: 512 << 20, sheet: 1 << 30, token: 1 << 20, depth: 64, parts: 10000, sheets: 255, columns: 1000, merged: 100000}
}
