package quantity

import "math"

// Unit is a unit of measurement. Two Units with the same code are equal (==). The zero Unit is not
// a unit; obtain one from ParseUnit.
type Unit struct {
	code     string
	num, den float64 // SI = (v + zero)·num/den
	zero     float64
	dim      Dimension
}

// String returns the UCUM code, everyday spellings replaced: "Cel" for "°C".
func (u Unit) String() string { return u.code }

// Dimension returns the dimension of u.
func (u Unit) Dimension() Dimension { return u.dim }

// ToSI converts a value v in u to the SI unit of its dimension: (v + zero)·num/den with zero 273.15
// for Cel, 459.67 for [degF] and 0 otherwise. A conversion by a power of ten up to 10²² is one
// multiplication or division by an exact factor, hence one rounding. A finite v can overflow to an infinity or
// underflow to 0; Quantity.In checks that, ToSI does not.
func (u Unit) ToSI(v float64) float64 { return (v + u.zero) * u.num / u.den }

// FromSI is the inverse of ToSI, to rounding.
func (u Unit) FromSI(v float64) float64 { return float64(v*u.den/u.num) - u.zero }

// DifferenceToSI converts a difference (an uncertainty, a step) in u to SI: a Cel is a kelvin, a
// [degF] 5/9 of one. Units without a shifted zero convert as with ToSI.
func (u Unit) DifferenceToSI(v float64) float64 { return v * u.num / u.den }

// term is a unit under construction: num/den·10^ten.
type term struct {
	code     string
	num, den float64
	ten      int
	zero     float64
	dim      Dimension
	shifted  bool // holds a symbol with a shifted zero
}

func (t *term) multiply(f term, sign int) {
	if sign < 0 {
		f.num, f.den, f.ten, f.dim = f.den, f.num, -f.ten, -f.dim
	}
	t.num *= f.num
	t.den *= f.den
	t.ten += f.ten
	t.dim += f.dim
	t.shifted = t.shifted || f.shifted
	t.zero = 0
}

func (t term) power(e int) term {
	if e < 0 {
		t.num, t.den = t.den, t.num
	}
	n := math.Abs(float64(e))
	t.num, t.den = math.Pow(t.num, n), math.Pow(t.den, n)
	t.ten *= e
	t.dim *= Dimension(e)
	t.zero = 0
	return t
}

// unit closes the term; ok is false if its factor leaves the range in which conversions keep their
// precision.
func (t term) unit() (u Unit, ok bool) {
	const largest, tens = 1e150, 100
	if t.num > largest || t.den > largest || t.ten > tens || t.ten < -tens {
		return Unit{}, false
	}
	u = Unit{code: t.code, num: t.num, den: t.den, zero: t.zero, dim: t.dim}
	if t.ten >= 0 {
		u.num *= math.Pow10(t.ten)
	} else {
		u.den *= math.Pow10(-t.ten)
	}
	return u, true
}
