package quantity

import (
	"errors"
	"math"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

func TestParse(t *testing.T) {
	tests := []struct {
		text string
		dim  Dimension
		want float64
	}{
		{"0.5 MPa", Pressure, 5e5},
		{"0.5MPa", Pressure, 5e5},
		{"-3 MPa", Pressure, -3e6},
		{"−3 MPa", Pressure, -3e6}, // U+2212
		{"+1 atm", Pressure, 101325},
		{"147 degC", Temperature, 420.15},
		{"147°C", Temperature, 420.15},
		{"  420 K ", Temperature, 420},
		{"420\u00a0K", Temperature, 420}, // no-break space
		{"1e-3 mm", Length, 1e-6},
		{"1E3mm", Length, 1},
		{".5 m", Length, 0.5},
		{"5. m", Length, 5},
		{"2 EPa", Pressure, 2e18},
		{"1e12 m-3.s-1", Flux, 1e12},
		{"5 %", Dimensionless, 0.05},
		{"5 1", Dimensionless, 5},
		{"5", Dimensionless, 5},
		{"0 Pa", Pressure, 0},
	}
	for _, tt := range tests {
		if got, err := ParseIn(tt.text, tt.dim); err != nil || got != tt.want {
			t.Errorf("ParseIn(%q, %v) = %.17g, %v; want %.17g", tt.text, tt.dim, got, err, tt.want)
		}
	}
}

func TestParseErrors(t *testing.T) {
	tests := []struct {
		text string
		dim  Dimension
		kind Kind
		want string
	}{
		{"0.5", Pressure, NoUnit, `quantity "0.5": has no unit; expected a pressure in Pa, kPa, MPa, bar, atm or [psi]`},
		{"420", Temperature, NoUnit, `quantity "420": has no unit; expected a temperature in K, Cel or [degF]`},
		{"5", Amount, NoUnit, `quantity "5": has no unit; expected an amount of substance in mol or mmol`},
		{"5", Pressure + Time, NoUnit, `quantity "5": has no unit; expected a unit convertible to m-1.kg.s-1`},
		{"0,5 MPa", Pressure, DecimalComma, `number "0,5 MPa": has a comma; write the decimal mark as a point and leave out thousands separators`},
		{"101,325 Pa", Pressure, DecimalComma, `number "101,325 Pa": has a comma; write the decimal mark as a point and leave out thousands separators`},
		{",5 MPa", Pressure, DecimalComma, `number ",5 MPa": has a comma; write the decimal mark as a point and leave out thousands separators`},
		{"NaN K", Temperature, NotFinite, `number "NaN K": is not finite`},
		{"-inf Pa", Pressure, NotFinite, `number "-inf Pa": is not finite`},
		{"1e999 Pa", Pressure, OutOfRange, `number "1e999 Pa": is out of range`},
		{"1e-999 Pa", Pressure, OutOfRange, `number "1e-999 Pa": is out of range`},
		{"1e308 MPa", Pressure, OutOfRange, `number "1e+308 MPa": is out of range`},
		{"0x10 Pa", Pressure, NotANumber, `number "0x10 Pa": not a decimal number; expected digits without separators, with a point as decimal mark, as in 1013.25`},
		{"1_000 Pa", Pressure, NotANumber, `number "1_000 Pa": not a decimal number; expected digits without separators, with a point as decimal mark, as in 1013.25`},
		{"1 000 Pa", Pressure, NotANumber, `number "1 000 Pa": not a decimal number; expected digits without separators, with a point as decimal mark, as in 1013.25`},
		{"hot", Temperature, NotANumber, `number "hot": not a decimal number; expected digits with a point as decimal mark, as in 420.9 or 1e-3`},
		{"", Temperature, NotANumber, `number "": not a decimal number; expected digits with a point as decimal mark, as in 420.9 or 1e-3`},
		{"0.5 KPa", Pressure, UnknownUnit, `unit "KPa": unknown; did you mean kPa?`},
		{"0.5 K", Pressure, WrongDimension, `unit "K": wrong kind of quantity (temperature); expected a pressure in Pa, kPa, MPa, bar, atm or [psi]`},
		{"-300 degC", Temperature, BelowAbsoluteZero, `quantity "-300 Cel": is not above absolute zero`},
		{"0 K", Temperature, BelowAbsoluteZero, `quantity "0 K": is not above absolute zero`},
		{"2 barg", Pressure, GaugePressure, `unit "barg": is a gauge pressure; add the pressure of the atmosphere and give the absolute pressure`},
	}
	for _, tt := range tests {
		v, err := ParseIn(tt.text, tt.dim)
		var e *Error
		if !errors.As(err, &e) {
			t.Errorf("ParseIn(%q) = %g, %v; want *Error", tt.text, v, err)
			continue
		}
		if e.Kind != tt.kind || e.Error() != tt.want {
			t.Errorf("ParseIn(%q): kind %d\n got %s\nwant %s", tt.text, e.Kind, e, tt.want)
		}
	}
}

func TestDifferenceIn(t *testing.T) {
	q, err := Parse("9 degF")
	if err != nil {
		t.Fatal(err)
	}
	if got, err := q.DifferenceIn(Temperature); err != nil || got != 5 {
		t.Errorf("difference of 9 degF = %g K, %v; want 5 K", got, err)
	}
	var zero Quantity
	if v, err := zero.In(Dimensionless); err == nil {
		t.Errorf("zero Quantity converts to %g; want an error", v)
	}
}

func TestNear(t *testing.T) {
	names := []string{"temperature", "pressure", "diameter"}
	for word, want := range map[string]string{"temprature": "temperature", "Pressure": "pressure", "diametre": "diameter", "mass": "", "": "",
		strings.Repeat("x", 1000): ""} {
		if got := strings.Join(Near(word, names), ","); got != want {
			t.Errorf("Near(%q) = %q, want %q", word, got, want)
		}
	}
}

func TestQuantityRoundTrip(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		v := rapid.Float64().Draw(t, "v")
		if math.IsInf(v, 0) || math.IsNaN(v) {
			v = 0
		}
		u, err := ParseUnit(unitCode().Draw(t, "unit"))
		if err != nil {
			return
		}
		q := Quantity{Value: v, Unit: u}
		back, err := Parse(q.String())
		if err != nil || back != q {
			t.Fatalf("%v reads back as %v, %v", q, back, err)
		}
	})
}

func FuzzParse(f *testing.F) {
	for _, s := range []string{"0.5 MPa", "147degC", "-3 MPa", "1e-3 mm", "420 K", "1e12 (m-3.s-1)", "5 10*3.Pa", "0,5 bar", "NaN K", "0x1p3 K", "1 m^-3·s⁻¹", "((((", "1 [psi", "1 /s"} {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, s string) {
		q, err := Parse(s)
		if err != nil {
			var e *Error
			if !errors.As(err, &e) || e.Error() == "" {
				t.Fatalf("Parse(%q): error %v is no *Error", s, err)
			}
			return
		}
		if math.IsNaN(q.Value) || math.IsInf(q.Value, 0) {
			t.Fatalf("Parse(%q) = %v", s, q)
		}
		back, err := Parse(q.String())
		if err != nil || back != q {
			t.Fatalf("Parse(%q) = %v, which reads back as %v, %v", s, q, back, err)
		}
		if v, err := q.In(q.Unit.Dimension()); err == nil && (math.IsNaN(v) || math.IsInf(v, 0)) {
			t.Fatalf("%v in SI = %g", q, v)
		}
	})
}
