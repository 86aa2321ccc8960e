package fluid

import (
	"fmt"
	"strings"

	"limsup/data/problem"
)

// MissingError reports that a record does not hold a property.
type MissingError struct {
	Fluid, Property string
}

func (e *MissingError) Error() string {
	return fmt.Sprintf("fluid %s: no %s in its record", e.Fluid, e.Property)
}

// RangeError reports a temperature outside the range of a correlation.
type RangeError struct {
	Fluid, Property string
	T, Lo, Hi       float64 // K; Lo <= T <= Hi is allowed
}

func (e *RangeError) Error() string {
	return fmt.Sprintf("%s of %s: temperature %.10g K is outside the range of its correlation, %.10g to %.10g K", e.Property, e.Fluid, e.T, e.Lo, e.Hi)
}

// UnknownError reports a name that is neither key nor alias in a library.
type UnknownError struct {
	Name        string
	Suggestions []string // keys of similar name, best first; may be empty
}

func (e *UnknownError) Error() string {
	if len(e.Suggestions) == 0 {
		return fmt.Sprintf("fluid %s: unknown", problem.Quoted(e.Name))
	}
	return fmt.Sprintf("fluid %s: unknown; did you mean %s?", problem.Quoted(e.Name), strings.Join(e.Suggestions, " or "))
}

// Problem is one place of a file of fluids that cannot be used as it stands.
type Problem struct {
	File   string
	Line   int    // 1-based; 0 if the place is not known (JSON) or the file as a whole is meant
	Column int    // 1-based, in bytes
	Fluid  string // key of the record; empty if it has none
	Field  string // path inside the record, such as "surface_tension.terms[2]"
	Found  string // what is wrong there
	Err    error  // the cause, such as *quantity.Error; may be nil
}

// Error returns "file:line:column: fluid: field: what is wrong".
func (p *Problem) Error() string {
	var parts []string
	place := p.File
	if p.Line > 0 {
		place = fmt.Sprintf("%s:%d:%d", p.File, p.Line, p.Column)
	}
	for _, s := range []string{place, p.Fluid, p.Field, p.Found} {
		if s != "" {
			parts = append(parts, s)
		}
	}
	return strings.Join(parts, ": ")
}

// Unwrap returns the cause.
func (p *Problem) Unwrap() error { return p.Err }

// Problems are all the problems of one file, in the order of its lines.
type Problems []*Problem

// Error returns one line per problem, at most problem.Most, then how many more there are.
func (ps Problems) Error() string { return problem.Text(ps) }

// Unwrap returns the problems one by one, for errors.As.
func (ps Problems) Unwrap() []error { return problem.Errors(ps) }
