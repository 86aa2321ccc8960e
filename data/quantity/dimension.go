package quantity

import (
	"fmt"
	"strings"
)

// Dimension is a product of powers of the base dimensions. The exponents are packed as signed
// digits of base 4096, so the dimension of a product is the sum of two Dimensions, that of a
// quotient the difference and that of a power the multiple.
type Dimension int64

// Base dimensions, with the SI unit in which values come back.
const (
	Length      Dimension = 1 << (12 * iota) // m
	Mass                                     // kg
	Time                                     // s
	Temperature                              // K
	Amount                                   // mol
)

// Derived dimensions, with the SI unit in which values come back.
const (
	Dimensionless  Dimension = 0
	Area                     = 2 * Length             // m2
	Volume                   = 3 * Length             // m3
	Force                    = Mass + Length - 2*Time // N
	Pressure                 = Force - Area           // Pa
	SurfaceTension           = Force - Length         // N/m
	Energy                   = Force + Length         // J
	MolarEnergy              = Energy - Amount        // J/mol
	MolarEntropy             = MolarEnergy - Temperature
	MolarMass                = Mass - Amount      // kg/mol
	MolarVolume              = Volume - Amount    // m3/mol
	Density                  = Mass - Volume      // kg/m3
	HeatingRate              = Temperature - Time // K/s
	Flux                     = -Volume - Time     // m-3.s-1, events per volume and time
)

// named lists what the derived dimensions are called, their SI code and units a user may write.
func named(d Dimension) (name, si, units string) {
	switch d {
	case Dimensionless:
		return "pure number", "1", "1 or %"
	case Length:
		return "length", "m", "m, mm, um or nm"
	case Mass:
		return "mass", "kg", "kg, g or mg"
	case Time:
		return "time", "s", "s, ms, us, min or h"
	case Temperature:
		return "temperature", "K", "K, Cel or [degF]"
	case Amount:
		return "amount of substance", "mol", "mol or mmol"
	case Area:
		return "area", "m2", "m2 or mm2"
	case Volume:
		return "volume", "m3", "m3, mm3, mL, uL or nL"
	case Force:
		return "force", "N", "N, mN or dyn"
	case Pressure:
		return "pressure", "Pa", "Pa, kPa, MPa, bar, atm or [psi]"
	case SurfaceTension:
		return "surface tension", "N/m", "N/m, mN/m or dyn/cm"
	case Energy:
		return "energy", "J", "J or kJ"
	case MolarEnergy:
		return "molar energy", "J/mol", "J/mol or kJ/mol"
	case MolarEntropy:
		return "molar entropy", "J/(mol.K)", "J/(mol.K)"
	case MolarMass:
		return "molar mass", "kg/mol", "g/mol or kg/mol"
	case MolarVolume:
		return "molar volume", "m3/mol", "m3/mol or cm3/mol"
	case Density:
		return "density", "kg/m3", "kg/m3 or g/cm3"
	case HeatingRate:
		return "heating rate", "K/s", "K/s, K/min or Cel/min"
	case Flux:
		return "flux", "m-3.s-1", "m-3.s-1 or cm-3.s-1"
	}
	return "", "", ""
}

// String returns the name of d ("pressure"), or its SI code ("m4.s-2") if it has no name here.
func (d Dimension) String() string {
	if name, _, _ := named(d); name != "" {
		return name
	}
	return d.SI()
}

// SI returns the UCUM code of the SI unit of d: "Pa" for Pressure.
func (d Dimension) SI() string {
	if _, si, _ := named(d); si != "" {
		return si
	}
	var parts []string
	for i, e := range d.exponents() {
		switch symbol := [...]string{"m", "kg", "s", "K", "mol"}[i]; e {
		case 0:
		case 1:
			parts = append(parts, symbol)
		default:
			parts = append(parts, fmt.Sprintf("%s%d", symbol, e))
		}
	}
	return strings.Join(parts, ".")
}

// expected describes a value of dimension d for an error text: "a pressure in Pa, kPa or ...".
func (d Dimension) expected() string {
	name, _, units := named(d)
	switch {
	case name == "":
		return "a unit convertible to " + d.SI()
	case strings.ContainsRune("aeiou", rune(name[0])):
		return "an " + name + " in " + units
	}
	return "a " + name + " in " + units
}

// exponents unpacks the signed digits, lowest first.
func (d Dimension) exponents() [5]int {
	var out [5]int
	for i := range out {
		digit := int(d & 0xfff)
		if digit >= 0x800 {
			digit -= 0x1000
		}
		out[i] = digit
		d = (d - Dimension(digit)) >> 12
	}
	return out
}
