package quantity

import (
	"fmt"
	"strings"

	"limsup/data/problem"
)

// Kind says what is wrong with a text that should have been a number, a unit or a quantity.
type Kind int

// The kinds of Error.
const (
	NotANumber        Kind = iota // no decimal number where one belongs
	DecimalComma                  // a comma inside the number
	NotFinite                     // NaN or an infinity
	OutOfRange                    // too large or too small for a 64-bit floating-point number
	NoUnit                        // a number alone
	Syntax                        // not a UCUM term
	UnknownUnit                   // a symbol that is not in the table
	GaugePressure                 // a symbol for pressure above the atmosphere
	OffsetInProduct               // Cel or [degF] in a product that is a temperature again
	WrongDimension                // a unit of another dimension
	BelowAbsoluteZero             // a temperature of 0 K or less
)

// Error reports a text that is not the number, unit or quantity it should be.
type Error struct {
	Kind     Kind
	Found    string   // the text as given
	Symbol   string   // the part of Found at fault, if it is not the whole
	Expected string   // what belongs there; empty if Kind says it all
	Near     []string // units or words that resemble Symbol or Found, best first; may be empty
}

// Error returns one line: what failed, why, what was expected, what is near.
func (e *Error) Error() string {
	var b strings.Builder
	switch e.Kind {
	case NotANumber, DecimalComma, NotFinite, OutOfRange:
		fmt.Fprintf(&b, "number %s: ", problem.Quoted(e.Found))
	case NoUnit, BelowAbsoluteZero:
		fmt.Fprintf(&b, "quantity %s: ", problem.Quoted(e.Found))
	default:
		fmt.Fprintf(&b, "unit %s: ", problem.Quoted(e.Found))
	}
	b.WriteString(e.reason())
	if e.Expected != "" {
		b.WriteString("; expected " + e.Expected)
	}
	if len(e.Near) > 0 {
		b.WriteString("; did you mean " + strings.Join(e.Near, " or ") + "?")
	}
	return b.String()
}

func (e *Error) reason() string {
	switch e.Kind {
	case DecimalComma:
		return "has a comma; write the decimal mark as a point and leave out thousands separators"
	case NotFinite:
		return "is not finite"
	case OutOfRange:
		return "is out of range"
	case NoUnit:
		return "has no unit"
	case Syntax:
		if e.Symbol != "" {
			return "cannot be read at " + problem.Quoted(e.Symbol)
		}
		return "cannot be read"
	case UnknownUnit:
		if e.Symbol != "" && e.Symbol != e.Found {
			return "unknown symbol " + problem.Quoted(e.Symbol)
		}
		return "unknown"
	case GaugePressure:
		return "is a gauge pressure; add the pressure of the atmosphere and give the absolute pressure"
	case OffsetInProduct:
		return "a degree with a shifted zero must stand alone"
	case WrongDimension:
		return "wrong kind of quantity (" + e.Symbol + ")"
	case BelowAbsoluteZero:
		return "is not above absolute zero"
	}
	return "not a decimal number"
}
