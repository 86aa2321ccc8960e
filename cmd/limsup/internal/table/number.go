package table

import (
	"math"
	"strconv"
	"strings"
)

const (
	defaultDigits = 4
	maxDigits     = 17  // enough to tell any two float64 apart
	leastDigits   = 2   // significant digits the smallest value of a column keeps
	plainBelow    = 1e6 // a column with a value this large is set in scientific notation
	plainFrom     = 1e-4
	fixedBelow    = 1e15 // beyond this, decimals of a float64 carry nothing, so even a Fixed column turns scientific
)

// shape is the common form of the numbers of one column.
type shape struct {
	scientific bool
	decimals   int // after the decimal sign, of the number or of its mantissa
}

// shapeOf chooses the form in which all values can stand below each other.
func shapeOf(values []float64, digits int, fixed bool) shape {
	if digits == 0 && !fixed {
		digits = defaultDigits
	}
	largest, smallest := 0.0, math.Inf(1)
	for _, v := range values {
		if a := math.Abs(v); a > 0 {
			largest, smallest = max(largest, a), min(smallest, a)
		}
	}
	switch {
	case largest == 0 && !fixed:
		return shape{}
	case fixed && largest < fixedBelow:
		return shape{decimals: digits}
	case fixed:
		return shape{scientific: true, decimals: defaultDigits - 1}
	case largest >= plainBelow || smallest < plainFrom:
		return shape{scientific: true, decimals: digits - 1}
	}
	decimals := digits - 1 - exponent(largest, digits)
	keep := min(leastDigits, digits)
	return shape{decimals: max(0, decimals, keep-1-exponent(smallest, keep))}
}

// exponent is the decimal exponent of v once rounded to the given number of significant digits.
func exponent(v float64, digits int) int {
	s := strconv.FormatFloat(v, 'e', digits-1, 64)
	n, _ := strconv.Atoi(s[strings.IndexByte(s, 'e')+1:]) // FormatFloat always writes an exponent here
	return n
}

// format prints v. A value that rounds to zero loses its sign.
func (s shape) format(v float64) string {
	verb := byte('f')
	if s.scientific {
		verb = 'e'
	}
	out := strconv.FormatFloat(v, verb, s.decimals, 64)
	if !strings.ContainsAny(strings.SplitN(out, "e", 2)[0], "123456789") {
		out = strings.TrimPrefix(out, "-")
	}
	return out
}

// split cuts a printed number at the place that must line up: before the decimal sign, the exponent or the end.
func split(number string) (left, right string) {
	if i := strings.IndexAny(number, ".e"); i >= 0 {
		return number[:i], number[i:]
	}
	return number, ""
}

// exact prints the shortest decimal that reads back as v.
func exact(v float64) string { return strconv.FormatFloat(v, 'g', -1, 64) }

// Number prints a single value for a sentence or a fact with the given number of significant digits (0: 4), in plain
// notation from 1e-4 to 1e6 and in scientific notation outside. Errors: *[NumberError] if v is not finite.
func Number(v float64, digits int) (string, error) {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return "", &NumberError{Value: v}
	}
	return shapeOf([]float64{v}, min(max(digits, 0), maxDigits), false).format(v), nil
}
