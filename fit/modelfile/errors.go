package modelfile

import (
	"fmt"

	"limsup/data/problem"
)

// InvalidError reports one place of a model file that cannot be used.
type InvalidError struct {
	File    string
	Pointer string // JSON pointer (RFC 6901); "" is the file as a whole
	Message string // "found ..., expected ..."
	Err     error  // the cause, such as *fit.OptionError; may be nil
}

// Error returns "file: pointer: message".
func (e *InvalidError) Error() string {
	if e.Pointer == "" {
		return e.File + ": " + e.Message
	}
	return e.File + ": " + printable(e.Pointer) + ": " + e.Message
}

// Unwrap returns the cause.
func (e *InvalidError) Unwrap() error { return e.Err }

// Problems are all the problems of a model file.
type Problems []*InvalidError

// Error returns one line per problem, at most problem.Most, then how many more there are.
func (ps Problems) Error() string { return problem.Text(ps) }

// Unwrap returns the problems one by one, for errors.As.
func (ps Problems) Unwrap() []error { return problem.Errors(ps) }

// err is nil where there are no problems.
func (ps Problems) err() error {
	if len(ps) == 0 {
		return nil
	}
	return ps
}

// SyntaxError reports a file that is not JSON.
type SyntaxError struct {
	File         string
	Line, Column int // 1-based; the column in bytes from the start of the line
	Message      string
}

// Error returns "file:line:column: message".
func (e *SyntaxError) Error() string {
	return fmt.Sprintf("%s:%d:%d: %s", e.File, e.Line, e.Column, e.Message)
}

// printable quotes a pointer whose keys could upset a terminal or a line.
func printable(s string) string {
	if q := fmt.Sprintf("%q", s); q != `"`+s+`"` {
		return q
	}
	return s
}
