package measure

import (
	"strings"
	"unicode"

	"limsup/data/problem"
)

// Problem is one place of a file that cannot be used as it stands.
type Problem struct {
	File     string
	Line     int    // 1-based; 0 if the file as a whole is meant
	Column   int    // 1-based, in bytes from the start of the line; 0 if the row as a whole is meant
	Where    string // place in a workbook instead of line and column; empty for text files
	Header   string // the column's header as written; empty if no single column is meant
	Found    string // what stands there
	Expected string // what belongs there; may be empty
	Err      error  // the cause, such as *quantity.Error; may be nil
}

// Error returns "file:line:column: header: found; expected ...".
func (p *Problem) Error() string {
	var b strings.Builder
	b.WriteString(place(p.File, p.Line, p.Column, p.Where) + ": ")
	if p.Header != "" {
		b.WriteString(printable(p.Header) + ": ")
	}
	b.WriteString(p.Found)
	if p.Expected != "" {
		b.WriteString("; expected " + p.Expected)
	}
	return b.String()
}

// Unwrap returns the cause.
func (p *Problem) Unwrap() error { return p.Err }

// Problems are all the problems of one file, in the order of its lines.
type Problems []*Problem

// Error returns one line per problem, at most problem.Most, then how many more there are.
func (ps Problems) Error() string { return problem.Text(ps) }

// Unwrap returns the problems one by one, for errors.As.
func (ps Problems) Unwrap() []error { return problem.Errors(ps) }

// printable returns s, quoted if it holds characters that could upset a terminal or a line.
func printable(s string) string {
	if strings.IndexFunc(s, func(r rune) bool { return !unicode.IsPrint(r) }) >= 0 {
		return problem.Quoted(s)
	}
	return s
}
