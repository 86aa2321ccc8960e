// Package problem joins all that is wrong with a file into one error.
//
// A reader of a file gathers every problem before it gives up, in a list type of its
// own; this package writes such a list and opens it for errors.As. It does not sort,
// merge or drop problems, and gives them no place: each tells its own.
package problem

import (
	"fmt"
	"strings"
)

// Most is the number of problems that Text spells out.
const Most = 20

// Text is one line per problem, at most Most, then how many more there are.
func Text[E error](list []E) string {
	var lines []string
	for i, e := range list {
		if i == Most {
			lines = append(lines, fmt.Sprintf("and %d more", len(list)-Most))
			break
		}
		lines = append(lines, e.Error())
	}
	return strings.Join(lines, "\n")
}

// Errors are the problems one by one, as errors.As asks for them.
func Errors[E error](list []E) []error {
	out := make([]error, len(list))
	for i, e := range list {
		out[i] = e
	}
	return out
}

// Quoted quotes what stands in a file, cut to 40 characters so that a whole file pasted by
// mistake stays readable.
func Quoted(s string) string {
	if r := []rune(s); len(r) > 40 {
		return fmt.Sprintf("%q...", string(r[:40]))
	}
	return fmt.Sprintf("%q", s)
}
