// Package quantity reads numbers with units and carries them to SI.
//
// A unit is written as a case-sensitive UCUM code: symbols with decimal prefixes, exponents
// ("m-3"), products ("Pa.s"), quotients ("K/min") and parentheses ("J/(mol.K)"), read from left to
// right, so that "J/mol.K" is (J/mol).K. Everyday spellings of the same units are accepted besides:
// degC, °C, degF, °F, psi, mmHg, Torr, µ for u, ^ or superscript digits for exponents, · for products.
//
// Five base dimensions: length (m), mass (kg), time (s), thermodynamic temperature (K) and
// amount of substance (mol; UCUM itself counts the mole as a pure number, limsup does not).
//
// # Temperatures and differences of temperature
//
// Cel and [degF] have a shifted zero. Alone, as in "147 Cel", ToSI adds the shift. A standard
// uncertainty or a step in Cel means degrees of the size of a kelvin: DifferenceToSI leaves the shift
// out. Inside a product or quotient ("Cel/min") the degree is a difference as well; a product that is
// again a plain temperature ("Cel.1") is refused, since nobody could tell which of the two is meant.
//
// # What it will not do
//
// It does not guess: a bare number, a decimal comma, a digit separator, a hexadecimal number, NaN or
// an infinity, a gauge pressure (barg, psig) and a symbol in the wrong case are errors that name what
// was found, what was expected and near units. It knows no logarithmic units, no currencies of local
// custom beyond [psi], [degF] and [degR], and no correction of gauge to absolute pressure.
package quantity
