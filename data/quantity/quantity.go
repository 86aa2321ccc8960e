package quantity

import (
	"math"
	"strconv"
	"strings"
)

// Quantity is a finite number with its unit.
type Quantity struct {
	Value float64 // in Unit
	Unit  Unit
}

// Parse reads a number with a unit, with or without space between: "0.5 MPa", "147degC", "-3 MPa",
// "1e-3 mm". The number is read as by ParseNumber, the unit as by ParseUnit.
//
// Errors: *Error; a bare number is of kind NoUnit.
func Parse(s string) (Quantity, error) {
	found := strings.TrimSpace(s)
	v, rest, err := leadingNumber(found)
	if err != nil {
		return Quantity{}, err
	}
	if strings.TrimSpace(rest) == "" {
		return Quantity{}, &Error{Kind: NoUnit, Found: found, Expected: `a number and a unit, as in "0.5 MPa" or "420 K"`}
	}
	u, err := ParseUnit(rest)
	if err != nil {
		return Quantity{}, err
	}
	return Quantity{Value: v, Unit: u}, nil
}

// ParseIn reads a quantity of dimension d and returns its SI value. If d is Dimensionless the unit may
// be left out.
//
// Errors: those of Parse and In; a bare number names the units that would do.
func ParseIn(s string, d Dimension) (float64, error) {
	q, err := Parse(s)
	if e, ok := err.(*Error); ok && e.Kind == NoUnit {
		if d == Dimensionless {
			return ParseNumber(s)
		}
		e.Expected = d.expected()
	}
	if err != nil {
		return 0, err
	}
	return q.In(d)
}

// In returns the SI value of q if it has dimension d.
//
// Errors: *Error of kind WrongDimension; BelowAbsoluteZero for a temperature not above 0 K;
// OutOfRange if the SI value overflows or a value other than 0 underflows.
func (q Quantity) In(d Dimension) (float64, error) {
	v, err := q.convert(d, q.Unit.ToSI)
	if err == nil && d == Temperature && v <= 0 {
		return 0, &Error{Kind: BelowAbsoluteZero, Found: q.String()}
	}
	return v, err
}

// DifferenceIn is In for a difference: the shifted zeros of Cel and [degF] do not count.
func (q Quantity) DifferenceIn(d Dimension) (float64, error) {
	return q.convert(d, q.Unit.DifferenceToSI)
}

func (q Quantity) convert(d Dimension, to func(float64) float64) (float64, error) {
	if q.Unit.dim != d || q.Unit.den == 0 {
		return 0, &Error{Kind: WrongDimension, Found: q.Unit.code, Symbol: q.Unit.dim.String(), Expected: d.expected()}
	}
	v := to(q.Value)
	if math.IsInf(v, 0) || math.IsNaN(v) || v == 0 && q.Value != 0 && q.Unit.zero == 0 {
		return 0, &Error{Kind: OutOfRange, Found: q.String()}
	}
	return v, nil
}

// String returns the shortest number that reads back as q.Value, a space and the UCUM code.
func (q Quantity) String() string {
	return strconv.FormatFloat(q.Value, 'g', -1, 64) + " " + q.Unit.code
}
