package quantity

// atom is a unit symbol: (v + zero)·num/den·10^ten is the SI value.
type atom struct {
	code     string // UCUM, or the name in common use where UCUM has none (Torr)
	num, den float64
	ten      int
	zero     float64 // shift of the zero, in the unit itself
	dim      Dimension
	metric   bool // takes decimal prefixes
}

// atoms is the table of symbols. Conversion factors are exact by definition; sources:
// SI Brochure, 9th edition (Pa, N, J, L, min, h, d, Cel), NIST SP 811 appendix B (atm 101 325 Pa,
// Torr atm/760, dyn, lbf and inch exactly 4.448 221 615 260 5 N and 0.0254 m) and UCUM 2.1
// (codes; m[Hg] 133.3220 kPa): all from memory.
func atoms() []atom {
	const lbf, squareInch = 44482216152605, 64516 // 1e-13 N, 1e-8 m²
	return []atom{
		{"m", 1, 1, 0, 0, Length, true},
		{"g", 1, 1, -3, 0, Mass, true},
		{"s", 1, 1, 0, 0, Time, true},
		{"K", 1, 1, 0, 0, Temperature, true},
		{"mol", 1, 1, 0, 0, Amount, true},
		{"Cel", 1, 1, 0, 273.15, Temperature, false},
		{"[degF]", 5, 9, 0, 459.67, Temperature, false},
		{"[degR]", 5, 9, 0, 0, Temperature, false},
		{"Pa", 1, 1, 0, 0, Pressure, true},
		{"bar", 1, 1, 5, 0, Pressure, true},
		{"atm", 101325, 1, 0, 0, Pressure, false},
		{"[psi]", lbf, squareInch, -5, 0, Pressure, false},
		{"Torr", 101325, 760, 0, 0, Pressure, true},
		{"m[Hg]", 133322, 1, 0, 0, Pressure, true},
		{"L", 1, 1, -3, 0, Volume, true},
		{"l", 1, 1, -3, 0, Volume, true},
		{"min", 60, 1, 0, 0, Time, false},
		{"h", 3600, 1, 0, 0, Time, false},
		{"d", 86400, 1, 0, 0, Time, false},
		{"N", 1, 1, 0, 0, Force, true},
		{"dyn", 1, 1, -5, 0, Force, true},
		{"J", 1, 1, 0, 0, Energy, true},
		{"erg", 1, 1, -7, 0, Energy, true},
		{"1", 1, 1, 0, 0, Dimensionless, false},
		{"10*", 1, 1, 1, 0, Dimensionless, false},
		{"%", 1, 1, -2, 0, Dimensionless, false},
		{"[ppth]", 1, 1, -3, 0, Dimensionless, false},
		{"[ppm]", 1, 1, -6, 0, Dimensionless, false},
	}
}

// prefix returns the power of ten of a UCUM prefix.
func prefix(code string) (ten int, ok bool) {
	switch code {
	case "Y":
		return 24, true
	case "Z":
		return 21, true
	case "E":
		return 18, true
	case "P":
		return 15, true
	case "T":
		return 12, true
	case "G":
		return 9, true
	case "M":
		return 6, true
	case "k":
		return 3, true
	case "h":
		return 2, true
	case "da":
		return 1, true
	case "d":
		return -1, true
	case "c":
		return -2, true
	case "m":
		return -3, true
	case "u":
		return -6, true
	case "n":
		return -9, true
	case "p":
		return -12, true
	case "f":
		return -15, true
	case "a":
		return -18, true
	case "z":
		return -21, true
	case "y":
		return -24, true
	}
	return 0, false
}

// spelling returns the UCUM code behind an accepted everyday spelling.
func spelling(symbol string) string {
	switch symbol {
	case "degC", "°C", "℃":
		return "Cel"
	case "degF", "°F", "℉":
		return "[degF]"
	case "psi":
		return "[psi]"
	case "mmHg":
		return "mm[Hg]"
	case "ppm":
		return "[ppm]"
	}
	return symbol
}

// mistaken returns what a word that is no unit here was probably meant to be.
func mistaken(lower string) []string {
	switch lower {
	case "c", "celsius", "centigrade", "deg", "°", "degree", "degrees":
		return []string{"Cel"}
	case "f", "fahrenheit":
		return []string{"[degF]"}
	case "kelvin", "degk", "°k":
		return []string{"K"}
	case "pascal", "pascals":
		return []string{"Pa"}
	case "bara":
		return []string{"bar"}
	case "psia", "psi":
		return []string{"[psi]"}
	case "sec", "second", "seconds":
		return []string{"s"}
	case "minute", "minutes", "mins":
		return []string{"min"}
	case "hr", "hrs", "hour", "hours":
		return []string{"h"}
	case "cc", "ccm":
		return []string{"cm3", "mL"}
	case "micron", "microns":
		return []string{"um"}
	case "percent":
		return []string{"%"}
	}
	return nil
}

// common lists the codes offered as near misses.
func common() []string {
	return []string{"K", "Cel", "[degF]", "Pa", "kPa", "MPa", "hPa", "bar", "mbar", "atm", "[psi]", "Torr", "mm[Hg]",
		"m", "cm", "mm", "um", "nm", "m3", "cm3", "mm3", "L", "mL", "uL", "nL", "s", "ms", "us", "min", "h",
		"g", "kg", "mol", "kmol", "mmol", "N", "mN", "dyn", "J", "kJ", "mJ", "%", "1"}
}
