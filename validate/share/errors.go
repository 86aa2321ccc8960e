package share

import (
	"fmt"

	"limsup/data/problem"
)

// ShareError reports text that is no share.
type ShareError struct{ Text string }

func (e *ShareError) Error() string {
	return fmt.Sprintf("share %q: want K/N with 1 ≤ K ≤ N ≤ %d, as in 2/8", e.Text, Most)
}

// FormatError reports a file that is not a part, or not a whole one.
type FormatError struct {
	File string
	Why  string
	Err  error // may be nil
}

func (e *FormatError) Error() string {
	s := e.File + ": not a usable part: " + e.Why
	if e.Err != nil {
		s += ": " + e.Err.Error()
	}
	return s
}

// Unwrap returns the cause.
func (e *FormatError) Unwrap() error { return e.Err }

// ForeignError reports a part that belongs to another computation than the others.
type ForeignError struct {
	File  string
	What  string // that differs: "seed"
	Got   string // in this part
	Want  string // elsewhere
	Where string // a part that has Want, or "this program"
}

func (e *ForeignError) Error() string {
	return fmt.Sprintf("%s: foreign part: %s %s, but %s in %s", e.File, e.What, e.Got, e.Want, e.Where)
}

// DoubledError reports two parts of the same share.
type DoubledError struct {
	Share         Share
	First, Second string // files
}

func (e *DoubledError) Error() string {
	return fmt.Sprintf("%s: share %s is already there in %s", e.Second, e.Share, e.First)
}

// MissingError reports a share without a part.
type MissingError struct{ Share Share }

func (e *MissingError) Error() string {
	return fmt.Sprintf("share %s is missing: run the command again with --share %s", e.Share, e.Share)
}

// Problems are all that keeps parts from being joined.
type Problems []error

// Error returns one line per problem, at most problem.Most, then how many more there are.
func (p Problems) Error() string { return problem.Text(p) }

// Unwrap returns the problems.
func (p Problems) Unwrap() []error { return p }
