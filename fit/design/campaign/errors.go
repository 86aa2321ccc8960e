package campaign

import (
	"fmt"

	"limsup/data/problem"
)

// InputError reports a plan that cannot be made as it was asked for.
type InputError struct {
	What string // "target", "setup 2", "batch"
	Want string
}

func (e *InputError) Error() string { return "plan: " + e.What + ": want " + e.Want }

// FileError reports a place of a file of candidates that cannot be used.
type FileError struct {
	File         string
	Line, Column int // 1-based, the column in bytes; 0: not known
	Message      string
	Err          error
}

func (e *FileError) Error() string {
	if e.Line == 0 {
		return e.File + ": " + e.Message
	}
	return fmt.Sprintf("%s:%d:%d: %s", e.File, e.Line, e.Column, e.Message)
}

// Unwrap returns the cause.
func (e *FileError) Unwrap() error { return e.Err }

// FileErrors are all the problems that were found in one file.
type FileErrors []*FileError

// Error returns one line per problem, at most problem.Most, then how many more there are.
func (es FileErrors) Error() string { return problem.Text(es) }

// Unwrap returns the problems one by one.
func (es FileErrors) Unwrap() []error { return problem.Errors(es) }
