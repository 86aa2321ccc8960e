package quantity

import (
	"errors"
	"math"
	"math/big"
	"strings"
	"testing"

	"gonum.org/v1/gonum/floats/scalar"
	"pgregory.net/rapid"
)

// SI values of one unit (and of the zero where it is shifted). Sources: exact definitions, SI Brochure
// 9th edition (from memory); [psi] 6894.757293168361 Pa, Torr 133.32236842105263 Pa are the quotients
// 4.4482216152605/0.00064516 and 101325/760 worked out with more digits (bc).
func TestToSI(t *testing.T) {
	tests := []struct {
		unit string
		v    float64
		want float64
		dim  Dimension
		code string
	}{
		{"K", 420.9, 420.9, Temperature, "K"},
		{"mK", 10, 0.01, Temperature, "mK"},
		{"Cel", 0, 273.15, Temperature, "Cel"},
		{"degC", 147, 420.15, Temperature, "Cel"},
		{"°C", -273.15, 0, Temperature, "Cel"},
		{"ºC", 25, 298.15, Temperature, "Cel"},
		{"(Cel)", 25, 298.15, Temperature, "Cel"},
		{"[degF]", 32, 273.15, Temperature, "[degF]"},
		{"degF", 212, 373.15, Temperature, "[degF]"},
		{"[degR]", 491.67, 273.15, Temperature, "[degR]"},
		{"Pa", 101325, 101325, Pressure, "Pa"},
		{"hPa", 1013.25, 101325, Pressure, "hPa"},
		{"kPa", 101.325, 101325, Pressure, "kPa"},
		{"MPa", 0.5, 5e5, Pressure, "MPa"},
		{"bar", 1, 1e5, Pressure, "bar"},
		{"mbar", 1013.25, 101325, Pressure, "mbar"},
		{"atm", 1, 101325, Pressure, "atm"},
		{"psi", 1, 6894.757293168361, Pressure, "[psi]"},
		{"[psi]", 1, 6894.757293168361, Pressure, "[psi]"},
		{"Torr", 1, 133.32236842105263, Pressure, "Torr"},
		{"mmHg", 760, 101324.72, Pressure, "mm[Hg]"},
		{"N/m2", 1, 1, Pressure, "N/m2"},
		{"mm", 1.2, 0.0012, Length, "mm"},
		{"um", 1, 1e-6, Length, "um"},
		{"µm", 1, 1e-6, Length, "um"}, // U+00B5
		{"μm", 1, 1e-6, Length, "um"}, // U+03BC
		{"nm", 1, 1e-9, Length, "nm"},
		{"m3", 1, 1, Volume, "m3"},
		{"m³", 1, 1, Volume, "m3"},
		{"mm3", 1, 1e-9, Volume, "mm3"},
		{"L", 1, 1e-3, Volume, "L"},
		{"mL", 1, 1e-6, Volume, "mL"},
		{"uL", 1, 1e-9, Volume, "uL"},
		{"µL", 1, 1e-9, Volume, "uL"},
		{"nL", 1, 1e-12, Volume, "nL"},
		{"s", 1, 1, Time, "s"},
		{"ms", 1, 1e-3, Time, "ms"},
		{"us", 1, 1e-6, Time, "us"},
		{"min", 1, 60, Time, "min"},
		{"h", 1, 3600, Time, "h"},
		{"K/s", 1, 1, HeatingRate, "K/s"},
		{"(K/s)", 1, 1, HeatingRate, "K/s"},
		{"K/min", 60, 1, HeatingRate, "K/min"},
		{"Cel/min", 60, 1, HeatingRate, "Cel/min"},
		{"[degF]/s", 9, 5, HeatingRate, "[degF]/s"},
		{"m-3.s-1", 1, 1, Flux, "m-3.s-1"},
		{"m^-3·s^-1", 1, 1, Flux, "m-3.s-1"},
		{"m⁻³·s⁻¹", 1, 1, Flux, "m-3.s-1"},
		{"(cm-3.s-1)", 1, 1e6, Flux, "cm-3.s-1"},
		{"/(cm3.s)", 1, 1e6, Flux, "/(cm3.s)"},
		{"1/(m3.s)", 1, 1, Flux, "1/(m3.s)"},
		{"10*12.m-3.s-1", 2, 2e12, Flux, "10*12.m-3.s-1"},
		{"g/mol", 72.14878, 0.07214878, MolarMass, "g/mol"},
		{"kg/mol", 1, 1, MolarMass, "kg/mol"},
		{"kg/kmol", 1, 1e-3, MolarMass, "kg/kmol"},
		{"N/m", 1, 1, SurfaceTension, "N/m"},
		{"mN/m", 16, 0.016, SurfaceTension, "mN/m"},
		{"dyn/cm", 16, 0.016, SurfaceTension, "dyn/cm"},
		{"J/m2", 1, 1, SurfaceTension, "J/m2"},
		{"kg/m3", 621, 621, Density, "kg/m3"},
		{"g/cm3", 0.621, 621, Density, "g/cm3"},
		{"J", 1, 1, Energy, "J"},
		{"kJ/mol", 1, 1000, MolarEnergy, "kJ/mol"},
		{"J/(mol.K)", 1, 1, MolarEntropy, "J/(mol.K)"},
		{"J/mol/K", 1, 1, MolarEntropy, "J/mol/K"},
		{"cm3/mol", 1, 1e-6, MolarVolume, "cm3/mol"},
		{"1", 7, 7, Dimensionless, "1"},
		{"%", 1, 0.01, Dimensionless, "%"},
		{"Pa.s", 1, 1, Pressure + Time, "Pa.s"},
		{"J/mol.K", 1, 1, MolarEnergy + Temperature, "J/mol.K"}, // left to right
	}
	for _, tt := range tests {
		u, err := ParseUnit(tt.unit)
		if err != nil {
			t.Errorf("ParseUnit(%q): %v", tt.unit, err)
			continue
		}
		// At most three roundings (shift, product, quotient): 1.5 ulp < 4e-16 of the larger of value and shift.
		if got := u.ToSI(tt.v); !scalar.EqualWithinAbs(got, tt.want, 4e-16*math.Max(math.Abs(tt.want), u.DifferenceToSI(u.zero))) {
			t.Errorf("%g %s = %.17g in SI, want %.17g", tt.v, tt.unit, got, tt.want)
		}
		if u.Dimension() != tt.dim || u.String() != tt.code {
			t.Errorf("%q: dimension %v, code %q; want %v, %q", tt.unit, u.Dimension(), u, tt.dim, tt.code)
		}
	}
}

// Prefixed units convert with one rounding: the result is the float64 nearest to the exact product of
// the float64 v and the power of ten, worked out here in rational arithmetic.
func TestDecimalConversionRoundsOnce(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		v := rapid.Float64Range(-1e9, 1e9).Draw(t, "v")
		c := rapid.SampledFrom([]struct{ unit, factor string }{{"mm", "1/1000"}, {"um", "1/1000000"}, {"nL", "1/1000000000000"},
			{"mm3", "1/1000000000"}, {"kPa", "1000"}, {"MPa", "1000000"}, {"cm-3.s-1", "1000000"}, {"g/cm3", "1000"}, {"g/mol", "1/1000"}}).Draw(t, "unit")
		factor, _ := new(big.Rat).SetString(c.factor)
		want, _ := new(big.Rat).Mul(new(big.Rat).SetFloat64(v), factor).Float64()
		u, err := ParseUnit(c.unit)
		if got := u.ToSI(v); err != nil || (got != want && math.Abs(v) > 1e-200) { // not in the subnormal range
			t.Fatalf("%g %s = %.17g, %v; want exactly %.17g", v, c.unit, got, err, want)
		}
	})
}

func TestDifferenceToSI(t *testing.T) {
	for _, tt := range []struct {
		unit string
		want float64 // of 9 units
	}{{"K", 9}, {"Cel", 9}, {"degC", 9}, {"[degF]", 5}, {"[degR]", 5}, {"mK", 0.009}, {"kPa", 9000}} {
		u, err := ParseUnit(tt.unit)
		if got := u.DifferenceToSI(9); err != nil || got != tt.want {
			t.Errorf("difference of 9 %s = %g, %v; want %g", tt.unit, got, err, tt.want)
		}
	}
}

func TestParseUnitErrors(t *testing.T) {
	tests := []struct {
		unit string
		kind Kind
		text string
	}{
		{"", NoUnit, `quantity "": has no unit; expected a UCUM code such as K, kPa or m-3.s-1`},
		{"KPa", UnknownUnit, `unit "KPa": unknown; did you mean kPa?`},
		{"mpa", UnknownUnit, `unit "mpa": unknown; did you mean MPa?`},
		{"kelvin", UnknownUnit, `unit "kelvin": unknown; did you mean K?`},
		{"C", UnknownUnit, `unit "C": unknown; did you mean Cel?`},
		{"F", UnknownUnit, `unit "F": unknown; did you mean [degF]?`},
		{"celsius", UnknownUnit, `unit "celsius": unknown; did you mean Cel?`},
		{"K/sec", UnknownUnit, `unit "K/sec": unknown symbol "sec"; did you mean s?`},
		{"furlong", UnknownUnit, `unit "furlong": unknown; expected a UCUM code such as K, kPa or m-3.s-1 (case matters)`},
		{"mCel", UnknownUnit, `unit "mCel": unknown; did you mean Cel?`},
		{"barg", GaugePressure, `unit "barg": is a gauge pressure; add the pressure of the atmosphere and give the absolute pressure`},
		{"psig", GaugePressure, `unit "psig": is a gauge pressure; add the pressure of the atmosphere and give the absolute pressure`},
		{"kPa(g)", GaugePressure, `unit "kPa(g)": is a gauge pressure; add the pressure of the atmosphere and give the absolute pressure`},
		{"BAR_G", GaugePressure, `unit "BAR_G": is a gauge pressure; add the pressure of the atmosphere and give the absolute pressure`},
		{"PSI", UnknownUnit, `unit "PSI": unknown; did you mean [psi]?`},
		{"Cel.1", OffsetInProduct, `unit "Cel.1": a degree with a shifted zero must stand alone`},
		{"Cel1", OffsetInProduct, `unit "Cel1": a degree with a shifted zero must stand alone`},
		{"K/", Syntax, `unit "K/": cannot be read; expected a UCUM code such as kPa, K/s or m-3.s-1`},
		{"K//s", Syntax, `unit "K//s": cannot be read at "/s"; expected a UCUM code such as kPa, K/s or m-3.s-1`},
		{"(K/s", Syntax, `unit "(K/s": cannot be read; expected a UCUM code such as kPa, K/s or m-3.s-1`},
		{"K/s)", Syntax, `unit "K/s)": cannot be read at ")"; expected a UCUM code such as kPa, K/s or m-3.s-1`},
		{"K K", Syntax, `unit "K K": cannot be read at " K"; expected a UCUM code such as kPa, K/s or m-3.s-1`},
		{"m0", Syntax, `unit "m0": cannot be read at "0"; expected a UCUM code such as kPa, K/s or m-3.s-1`},
		{"m99", Syntax, `unit "m99": cannot be read at "99"; expected a UCUM code such as kPa, K/s or m-3.s-1`},
		{"[psi", Syntax, `unit "[psi": cannot be read at "[psi"; expected a UCUM code such as kPa, K/s or m-3.s-1`},
		{"10*999.Pa", Syntax, `unit "10*999.Pa": cannot be read; expected a unit within 100 powers of ten of the SI unit`},
	}
	for _, tt := range tests {
		_, err := ParseUnit(tt.unit)
		var e *Error
		if !errors.As(err, &e) {
			t.Errorf("ParseUnit(%q) = %v, want *Error", tt.unit, err)
			continue
		}
		if e.Kind != tt.kind || e.Error() != tt.text {
			t.Errorf("ParseUnit(%q): kind %d\n got %s\nwant %s", tt.unit, e.Kind, e, tt.text)
		}
	}
}

// unitCode draws a random product of known symbols.
func unitCode() *rapid.Generator[string] {
	return rapid.Custom(func(t *rapid.T) string {
		part := rapid.SampledFrom([]string{"m", "mm", "kg", "s", "min", "K", "Cel", "mol", "kPa", "[psi]", "Torr", "uL", "dyn", "%", "cm-3", "s-1", "K2", "(J/mol)"})
		code := part.Draw(t, "first")
		for range rapid.IntRange(0, 4).Draw(t, "more") {
			code += rapid.SampledFrom([]string{".", "/"}).Draw(t, "operator") + part.Draw(t, "part")
		}
		return code
	})
}

func TestUnitProperties(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		code := unitCode().Draw(t, "code")
		u, err := ParseUnit(code)
		var e *Error
		if errors.As(err, &e) && e.Kind == OffsetInProduct {
			return // such as Cel/%: rightly refused
		}
		if err != nil {
			t.Fatalf("ParseUnit(%q): %v", code, err)
		}
		again, err := ParseUnit(u.String())
		if err != nil || again != u {
			t.Fatalf("%q prints as %q, which reads as %+v, %v; want %+v", code, u, again, err, u)
		}
		v := rapid.Float64Range(-1e6, 1e6).Draw(t, "v")
		// Two conversions of three roundings each, 6·2^-53 < 7e-16 of the value or of the shift it hides in;
		// below 2^-1022 numbers have fewer digits.
		if back := u.FromSI(u.ToSI(v)); math.Abs(u.ToSI(v)) >= 0x1p-1022 && !scalar.EqualWithinAbs(back, v, 7e-16*(math.Abs(v)+u.zero)) {
			t.Fatalf("%g %s -> %g -> %g", v, u, u.ToSI(v), back)
		}
		w := rapid.Float64Range(-1e6, 1e6).Draw(t, "w")
		// A difference of two values converts as the difference of their conversions.
		size := u.DifferenceToSI(math.Abs(v) + math.Abs(w) + 2*u.zero)
		if d := u.DifferenceToSI(v - w); !scalar.EqualWithinAbs(d, u.ToSI(v)-u.ToSI(w), 1e-15*size) {
			t.Fatalf("difference %g - %g %s: %g against %g", v, w, u, d, u.ToSI(v)-u.ToSI(w))
		}
		inverse, err := ParseUnit("1/(" + u.String() + ")")
		if err != nil && !errors.As(err, &e) {
			t.Fatal(err)
		}
		if err == nil && inverse.Dimension() != -u.Dimension() {
			t.Fatalf("1/(%s) has dimension %v, want the inverse of %v", u, inverse.Dimension().SI(), u.Dimension().SI())
		}
	})
}

// No code can be read as two different units, with or without prefix.
func TestCodesAreUnambiguous(t *testing.T) {
	seen := map[string]bool{}
	for _, a := range atoms() {
		codes := []string{a.code}
		if a.metric {
			for _, p := range strings.Fields("Y Z E P T G M k h da d c m u n p f a z y") {
				codes = append(codes, p+a.code)
			}
		}
		for _, c := range codes {
			if seen[c] {
				t.Errorf("%s has two readings", c)
			}
			seen[c] = true
			if u, err := ParseUnit(c); err == nil && u.Dimension() != a.dim {
				t.Errorf("%s reads as %v, want %v", c, u.Dimension(), a.dim)
			} else if err != nil && c != "10*" {
				t.Error(err)
			}
		}
	}
}

// Every dimension's SI code is a unit of that dimension with factor 1, and the units offered in error
// texts are known.
func TestDimensionCodes(t *testing.T) {
	for _, d := range []Dimension{Dimensionless, Length, Mass, Time, Temperature, Amount, Area, Volume, Force, Pressure,
		SurfaceTension, Energy, MolarEnergy, MolarEntropy, MolarMass, MolarVolume, Density, HeatingRate, Flux,
		Pressure + Time, -3*Length + 2*Amount, 9*Mass - 9*Temperature} {
		u, err := ParseUnit(d.SI())
		if err != nil || u.Dimension() != d || u.ToSI(3) != 3 {
			t.Errorf("%v: SI code %q reads as %+v, %v", d, d.SI(), u, err)
		}
	}
	for _, code := range common() {
		if u, err := ParseUnit(code); err != nil || u.String() != code {
			t.Errorf("suggested unit %q reads as %q, %v", code, u, err)
		}
	}
}
