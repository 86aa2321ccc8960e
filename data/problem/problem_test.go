package problem_test

import (
	"errors"
	"fmt"
	"strings"
	"testing"

	"limsup/data/problem"
)

// lineError is a problem as a reader of a file would have it.
type lineError struct{ line int }

func (e *lineError) Error() string { return fmt.Sprintf("drops.csv:%d: empty", e.line) }

func numbered(n int) []*lineError {
	var list []*lineError
	for i := range n {
		list = append(list, &lineError{i + 1})
	}
	return list
}

func ExampleText() {
	fmt.Println(problem.Text(numbered(2)))
	// Output:
	// drops.csv:1: empty
	// drops.csv:2: empty
}

func TestText(t *testing.T) {
	for _, c := range []struct {
		n, lines int
		last     string
	}{
		{1, 1, "drops.csv:1: empty"},
		{problem.Most, problem.Most, "drops.csv:20: empty"},
		{problem.Most + 1, problem.Most + 1, "and 1 more"},
		{100, problem.Most + 1, "and 80 more"},
	} {
		lines := strings.Split(problem.Text(numbered(c.n)), "\n")
		if len(lines) != c.lines || lines[len(lines)-1] != c.last {
			t.Errorf("%d problems: %d lines, the last %q; want %d and %q", c.n, len(lines), lines[len(lines)-1], c.lines, c.last)
		}
	}
	if s := problem.Text([]error{}); s != "" {
		t.Errorf("no problem: %q, want no text", s)
	}
}

// TestErrors finds the first of a type behind others, in order.
func TestErrors(t *testing.T) {
	list := append([]error{errors.New("unreadable")}, problem.Errors(numbered(3))...)
	var first *lineError
	if !errors.As(errors.Join(list...), &first) || first.line != 1 {
		t.Errorf("found %v, want the problem of line 1", first)
	}
	if len(list) != 4 {
		t.Errorf("%d errors, want 4", len(list))
	}
}

func TestQuoted(t *testing.T) {
	long := strings.Repeat("µ", 40)
	for in, want := range map[string]string{
		"":         `""`,
		"a\tb":     `"a\tb"`,
		long:       `"` + long + `"`,
		long + "x": `"` + long + `"...`,
	} {
		if got := problem.Quoted(in); got != want {
			t.Errorf("Quoted(%q) = %s, want %s", in, got, want)
		}
	}
}
