package quantity

import (
	"math"
	"strconv"
	"strings"
)

// ParseNumber reads a decimal number: an optional sign (also U+2212), digits with an optional point,
// an optional exponent of ten. Space around it is ignored.
//
// Errors: *Error of kind NotANumber, DecimalComma, NotFinite or OutOfRange. Hexadecimal numbers, digit
// separators, NaN and infinities are refused, and so is a number other than 0 that would round to 0.
func ParseNumber(s string) (float64, error) {
	t := strings.TrimSpace(s)
	v, rest, err := leadingNumber(t)
	if err != nil {
		return 0, err
	}
	if rest != "" {
		return 0, &Error{Kind: NotANumber, Found: t, Expected: "digits with a point as decimal mark, as in 420.9 or 1e-3"}
	}
	return v, nil
}

// leadingNumber splits the longest decimal number off the front of s, which has no space around it.
// A rest that shows the number to be of a refused sort is an error, not a unit.
func leadingNumber(s string) (v float64, rest string, err error) {
	t := strings.ReplaceAll(s, "−", "-") // U+2212 minus sign
	n := numberLength(t)
	if n == 0 {
		kind := NotANumber
		word := strings.ToLower(strings.TrimLeft(t, "+-"))
		if w, _, _ := strings.Cut(word, " "); w == "nan" || w == "inf" || w == "infinity" || w == "∞" {
			kind = NotFinite
		}
		if commaFollows(strings.TrimLeft(t, "+-")) {
			kind = DecimalComma
		}
		return 0, "", refused(kind, s)
	}
	rest = t[n:]
	switch {
	case commaFollows(rest):
		return 0, "", refused(DecimalComma, s)
	case strings.HasPrefix(rest, "_"), rest != "" && (rest[0]|0x20 == 'x' || rest[0]|0x20 == 'p') && digit(rest, 1), digit(strings.TrimSpace(rest), 0) && strings.TrimSpace(rest) != "1":
		return 0, "", &Error{Kind: NotANumber, Found: s, Expected: "digits without separators, with a point as decimal mark, as in 1013.25"}
	}
	v, err = strconv.ParseFloat(t[:n], 64)
	mantissa, _, _ := strings.Cut(strings.ToLower(t[:n]), "e")
	if err != nil || math.IsInf(v, 0) || (v == 0 && strings.ContainsAny(mantissa, "123456789")) {
		return 0, "", refused(OutOfRange, s)
	}
	return v, rest, nil
}

func refused(k Kind, found string) *Error {
	e := &Error{Kind: k, Found: found}
	if k == NotANumber {
		e.Expected = "digits with a point as decimal mark, as in 420.9 or 1e-3"
	}
	return e
}

// numberLength returns the length of the decimal number at the front of s, 0 if there is none.
func numberLength(s string) int {
	i := 0
	if i < len(s) && (s[i] == '+' || s[i] == '-') {
		i++
	}
	start := i
	for digit(s, i) {
		i++
	}
	digits := i - start
	if i < len(s) && s[i] == '.' {
		j := i + 1
		for digit(s, j) {
			j++
		}
		if digits += j - i - 1; digits > 0 {
			i = j
		}
	}
	if digits == 0 {
		return 0
	}
	if i < len(s) && s[i]|0x20 == 'e' {
		j := i + 1
		if j < len(s) && (s[j] == '+' || s[j] == '-') {
			j++
		}
		if digit(s, j) {
			for digit(s, j) {
				j++
			}
			i = j
		}
	}
	return i
}

func digit(s string, i int) bool { return i < len(s) && '0' <= s[i] && s[i] <= '9' }

func commaFollows(s string) bool { return strings.HasPrefix(s, ",") && digit(s, 1) }
