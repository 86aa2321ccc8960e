package measure

import (
	"errors"
	"fmt"
	"strings"
	"testing"
)

// knownFluid is a small stand-in for the library of fluids.
func knownFluid(name string) (string, error) {
	switch name {
	case "n-pentane", "pentane":
		return "n-pentane", nil
	case "water", "1,3-butadiene", "n-hexane":
		return name, nil
	}
	return "", fmt.Errorf("fluid %q is not known; near: n-pentane", name)
}

const head = "fluid,temperature/K,pressure/kPa\n"
const good = "n-pentane,420.9,101.325\n"

// Whole error texts of files that cannot be used.
var bad = []struct{ name, file, want string }{
	{"empty", "", `d.csv:1:1: no header in the file; expected a header such as fluid,temperature/K,pressure/kPa`},
	{"only comments", "# nothing\n\n# more\n", `d.csv:1:1: no header in the file; expected a header such as fluid,temperature/K,pressure/kPa`},
	{"header only", head, `d.csv: no rows below the header; expected at least one row of measurements`},
	{"blank rows only", head + ",,\n", `d.csv: no rows below the header; expected at least one row of measurements`},
	{"one column missing", "fluid,temperature/K\nn-pentane,420\n", `d.csv:1:1: column pressure is missing; expected a header such as pressure/kPa`},
	{"near misses of required columns", "substance,T/K,Pressure (kPa)\nn-pentane,420.9,101.325\n", `d.csv:1:1: column fluid is missing (there is "substance"); expected a header such as fluid
d.csv:1:1: column temperature is missing (there is "T/K"); expected a header such as temperature/K
d.csv:1:1: column pressure is missing (there is "Pressure (kPa)"); expected a header such as pressure/kPa`},
	{"no unit", "fluid,temperature,pressure/\nn-pentane,420.9,101.325\n", `d.csv:1:7: temperature: column temperature has no unit; expected quantity/unit, as in temperature/K
d.csv:1:19: pressure/: column pressure has no unit; expected quantity/unit, as in pressure/kPa`},
	{"unit of a text column", "fluid,temperature/K,pressure/kPa,method/1\n" + "n-pentane,420.9,101.325,droplet\n", `d.csv:1:34: method/1: column method has a unit; expected method`},
	{"unknown unit", "fluid,temperature/kelvin,pressure/KPa\nn-pentane,420.9,101.325\n", `d.csv:1:7: temperature/kelvin: unit "kelvin": unknown; did you mean K?
d.csv:1:26: pressure/KPa: unit "KPa": unknown; did you mean kPa?`},
	{"gauge unit", "fluid,temperature/K,pressure/barg\nn-pentane,420.9,1\n", `d.csv:1:21: pressure/barg: unit "barg": is a gauge pressure; add the pressure of the atmosphere and give the absolute pressure`},
	{"wrong dimension", "fluid,temperature/kPa,pressure/K,flux/(m-3)\nn-pentane,420.9,101.325,\n", `d.csv:1:7: temperature/kPa: unit "kPa": wrong kind of quantity (pressure); expected a unit of temperature, as in temperature/K
d.csv:1:23: pressure/K: unit "K": wrong kind of quantity (temperature); expected a unit of pressure, as in pressure/kPa
d.csv:1:34: flux/(m-3): unit "m-3": wrong kind of quantity (m-3); expected a unit of flux, as in flux/(m-3.s-1)`},
	{"duplicate column", "fluid,temperature/K,temperature/Cel,pressure/kPa,run,run\nn-pentane,420.9,147.75,101.325,1,1\n", `d.csv:1:21: temperature/Cel: column temperature given twice, first as "temperature/K" in field 2; expected each column once
d.csv:1:54: run: column run given twice, first as "run" in field 5; expected each column once`},
	{"text in numbers", head + "n-pentane,hot,101.325\nn-pentane,420.9,n/a\n", `d.csv:2:11: temperature/K: number "hot": not a decimal number; expected digits with a point as decimal mark, as in 420.9 or 1e-3
d.csv:3:17: pressure/kPa: number "n/a": not a decimal number; expected digits with a point as decimal mark, as in 420.9 or 1e-3`},
	{"decimal comma", head + "n-pentane,\"420,9\",101.325\nn-pentane,420,9,101,325\n", `d.csv:2:11: temperature/K: number "420,9": has a comma; write the decimal mark as a point and leave out thousands separators
d.csv:3: row has 5 fields (a comma inside a field needs quotes, a decimal mark is a point); expected 3 as in the header`},
	{"refused numbers", head + "n-pentane,0x1A,101.325\nn-pentane,420.9,1_000\nn-pentane,NaN,101.325\nn-pentane,420.9,Inf\nn-pentane,1e999,101.325\nn-pentane,420.9,1e308\nn-pentane,420.9 K,101.325\n", `d.csv:2:11: temperature/K: number "0x1A": not a decimal number; expected digits without separators, with a point as decimal mark, as in 1013.25
d.csv:3:17: pressure/kPa: number "1_000": not a decimal number; expected digits without separators, with a point as decimal mark, as in 1013.25
d.csv:4:11: temperature/K: number "NaN": is not finite
d.csv:5:17: pressure/kPa: number "Inf": is not finite
d.csv:6:11: temperature/K: number "1e999": is out of range
d.csv:7:17: pressure/kPa: "1e308" is out of range in Pa
d.csv:8:11: temperature/K: number "420.9 K": not a decimal number; expected digits with a point as decimal mark, as in 420.9 or 1e-3`},
	{"not above absolute zero", head + "n-pentane,-12,101.325\nn-pentane,0,101.325\n", `d.csv:2:11: temperature/K: -12 K is not above 0 K; expected a temperature above absolute zero (is the column in Cel?)
d.csv:3:11: temperature/K: 0 K is not above 0 K; expected a temperature above absolute zero (is the column in Cel?)`},
	{"below zero in Cel", "fluid,temperature/degC,pressure/kPa\nn-pentane,-300,101.325\n", `d.csv:2:11: temperature/degC: -300 Cel is not above 0 K; expected a temperature above absolute zero`},
	{"pressure of zero", head + "n-pentane,420.9,0\nn-pentane,420.9,-0.0\n", `d.csv:2:17: pressure/kPa: a pressure of 0 looks like a gauge reading; expected the absolute pressure (an open vessel has about 101.325 kPa)
d.csv:3:17: pressure/kPa: a pressure of 0 looks like a gauge reading; expected the absolute pressure (an open vessel has about 101.325 kPa)`},
	{"empty required fields", head + ",420.9,101.325\nn-pentane,,101.325\nn-pentane,420.9,\n", `d.csv:2:1: fluid: empty; expected the name of a fluid
d.csv:3:11: temperature/K: empty; expected a number
d.csv:4:17: pressure/kPa: empty; expected a number`},
	{"uncertainties", "fluid,temperature/K,pressure/kPa,u_temperature/K,u_pressure/kPa\nn-pentane,420.9,101.325,0,-1\n", `d.csv:2:25: u_temperature/K: a standard uncertainty of 0 claims a perfect reading; expected a value above 0, or an empty field if the uncertainty is not known
d.csv:2:27: u_pressure/kPa: "-1" is negative; expected a value above 0, or an empty field if the uncertainty is not known`},
	{"not above zero", "fluid,temperature/K,pressure/kPa,diameter/mm,volume/nL,heating_rate/(K/s),holding_time/s,lifetime/s,flux/(m-3.s-1)\n" +
		"n-pentane,420.9,101.325,-1,,,,,\nn-pentane,420.9,101.325,,0,,,,\nn-pentane,420.9,101.325,1,,-5,,,\nn-pentane,420.9,101.325,1,,,0,,\nn-pentane,420.9,101.325,1,,,,-3,\nn-pentane,420.9,101.325,1,,,,,0\n", `d.csv:2:25: diameter/mm: "-1" is negative; expected a value above 0, or an empty field if it is not known
d.csv:3:26: volume/nL: a volume of 0; expected a value above 0, or an empty field if it is not known
d.csv:4:28: heating_rate/(K/s): "-5" is negative; expected a value above 0, or an empty field if it is not known
d.csv:5:29: holding_time/s: a holding time of 0; expected a value above 0, or an empty field if it is not known
d.csv:6:30: lifetime/s: "-3" is negative; expected a value above 0, or an empty field if it is not known
d.csv:7:31: flux/(m-3.s-1): a flux of 0; expected a value above 0, or an empty field if it is not known`},
	{"underflow", "fluid,temperature/K,pressure/kPa,diameter/nm\nn-pentane,420.9,101.325,1e-110\n", `d.csv:2:25: diameter/nm: "1e-110" is out of range in m`},
	{"words", "fluid,temperature/K,pressure/kPa,observed,outcome\nn-pentane,420.9,101.325,Pressure,popped\n", `d.csv:2:25: observed: "Pressure" unknown; expected temperature or pressure
d.csv:2:34: outcome: "popped" unknown; expected boiled or intact`},
	{"unknown fluid", head + "pentan,420.9,101.325\n", `d.csv:2:1: fluid: fluid "pentan" is not known; near: n-pentane`},
	{"volume against diameter", "fluid,temperature/K,pressure/kPa,diameter/mm,volume/nL\nn-pentane,420.9,101.325,1,523.6\nn-pentane,421.9,101.325,1,530\n", `d.csv:3:27: volume/nL: volume 530 nL disagrees with diameter 1 mm; expected 523.6 nL within 1 % (a sphere), or one of the two empty`},
	{"two ways to the flux", "fluid,temperature/K,pressure/kPa,diameter/mm,heating_rate/(K/s),lifetime/s,flux/(m-3.s-1)\nn-pentane,420.9,101.325,1,2,,1e12\nn-pentane,420.9,101.325,1,2,3,1e12\n", `d.csv:2:30: flux/(m-3.s-1): row has heating_rate and flux; expected at most one of heating_rate, holding_time, lifetime and flux, since each sets the flux
d.csv:3:29: lifetime/s: row has heating_rate and lifetime and flux; expected at most one of heating_rate, holding_time, lifetime and flux, since each sets the flux`},
	{"no size", "fluid,temperature/K,pressure/kPa,diameter/mm,heating_rate/(K/s),holding_time/s,lifetime/s\nn-pentane,420.9,101.325,,2,,\nn-pentane,420.9,101.325,,,2,\nn-pentane,420.9,101.325,,,,2\n", `d.csv:2:26: heating_rate/(K/s): heating_rate without the size of the liquid; expected a volume or diameter in the same row
d.csv:3:27: holding_time/s: holding_time without the size of the liquid; expected a volume or diameter in the same row
d.csv:4:28: lifetime/s: lifetime without the size of the liquid; expected a volume or diameter in the same row`},
	{"field count", head + "n-pentane,420.9\nn-pentane,420.9,101.325,,\n" + good, `d.csv:2: row has 2 fields; expected 3 as in the header
d.csv:3: row has 5 fields (a comma inside a field needs quotes, a decimal mark is a point); expected 3 as in the header`},
	{"open quote", head + good + "\"n-pentane,420.9,101.325\n" + good, `d.csv:3: quoted field still open at line 4; expected a closing quotation mark before the comma or the end of the line`},
	{"quotes", head + "n-\"pentane\",420.9,101.325\n\"n\"-pentane,420.9,101.325\n" + "n-pentane,hot,101.325\n", `d.csv:2:3: quotation mark inside a field without quotes; expected the whole field in quotes, marks inside doubled
d.csv:3:3: quoted field without a proper end; expected a comma or the end of the line after the mark, marks inside doubled
d.csv:4:11: temperature/K: number "hot": not a decimal number; expected digits with a point as decimal mark, as in 420.9 or 1e-3`},
	{"quote open at the end", head + good + "\"n-pentane,421,101.325", `d.csv:3:23: quoted field without a proper end; expected a comma or the end of the line after the mark, marks inside doubled`},
	{"quote in header", "fluid,\"temperature/K,pressure/kPa\n" + good, `d.csv:1: quoted field still open at line 2; expected a closing quotation mark before the comma or the end of the line`},
	{"semicolons", "fluid;temperature/K;pressure/kPa\nn-pentane;420,9;101,325\n", `d.csv:1:1: fields are separated by semicolons; expected commas between fields and points as decimal marks`},
	{"tabs", "fluid\ttemperature/K\tpressure/kPa\nn-pentane\t420.9\t101.325\n", `d.csv:1:1: fields are separated by tabs; expected commas between fields`},
	{"carriage returns", "fluid,temperature/K,pressure/kPa\rn-pentane,420.9,101.325\r", `d.csv:1:1: lines end with CR alone; expected lines that end with LF or CRLF`},
	{"latin-1", head + "n-pentane,420.9,101.325\nh\xe9xane,420.9,101.325\n", `d.csv:3:2: byte 0xE9 is not UTF-8 at byte 59 of the file; expected UTF-8 (is the file in Latin-1 or Windows-1252? save as "CSV UTF-8")`},
	{"cut character", head + "n-pentane,420.9,101.325\n\xc3", `d.csv:3:1: byte 0xC3 is not UTF-8 at byte 58 of the file; expected UTF-8 (is the file in Latin-1 or Windows-1252? save as "CSV UTF-8")`},
	{"utf-16", "\xff\xfef\x00l\x00u\x00i\x00d\x00", `d.csv:1:1: file begins with the byte order mark of UTF-16; expected UTF-8 (save as "CSV UTF-8")`},
	{"utf-16 without mark", "f\x00l\x00u\x00i\x00d\x00", `d.csv:1:2: NUL byte at byte 2 of the file; expected text (is the file in UTF-16, or a workbook?)`},
	{"nul", head + "n-pentane,420.9\x00,101.325\n", `d.csv:2:16: NUL byte at byte 49 of the file; expected text (is the file in UTF-16, or a workbook?)`},
	{"nul after a problem", head + "n-pentane,hot,101.325\nn-pentane,420.9,\x00101.325\n", `d.csv:2:11: temperature/K: number "hot": not a decimal number; expected digits with a point as decimal mark, as in 420.9 or 1e-3
d.csv:3:17: NUL byte at byte 72 of the file; expected text (is the file in UTF-16, or a workbook?)`},
	{"byte order mark keeps columns", "\ufefffluid,temperature/K,pressure/kPa\r\nn-pentane,hot,101.325\r\n", `d.csv:2:11: temperature/K: number "hot": not a decimal number; expected digits with a point as decimal mark, as in 420.9 or 1e-3`},
	{"lines count comments, blank lines and lines in quotes", "# c\n\n" + head + "# c\n\"n-\npentane\",420.9,101.325\nn-pentane,hot,101.325\n", `d.csv:5:1: fluid: fluid "n-\npentane" is not known; near: n-pentane
d.csv:7:11: temperature/K: number "hot": not a decimal number; expected digits with a point as decimal mark, as in 420.9 or 1e-3`},
	{"problems of a row in the order of its fields", "pressure/kPa,outcome,temperature/K,fluid\n0,popped,hot,pentan\n", `d.csv:2:1: pressure/kPa: a pressure of 0 looks like a gauge reading; expected the absolute pressure (an open vessel has about 101.325 kPa)
d.csv:2:3: outcome: "popped" unknown; expected boiled or intact
d.csv:2:10: temperature/K: number "hot": not a decimal number; expected digits with a point as decimal mark, as in 420.9 or 1e-3
d.csv:2:14: fluid: fluid "pentan" is not known; near: n-pentane`},
	{"byte order mark counts as bytes of the file", "\ufeff\xe9", `d.csv:1:1: byte 0xE9 is not UTF-8 at byte 4 of the file; expected UTF-8 (is the file in Latin-1 or Windows-1252? save as "CSV UTF-8")`},
	{"terminal control in a header", "fluid,temperature/\x1b[2J,pressure/kPa\n" + good, `d.csv:1:7: "temperature/\x1b[2J": unit "\x1b[2J": cannot be read at "\x1b[2J"; expected a UCUM code such as kPa, K/s or m-3.s-1`},
	{"terminal control", head + "\"\x1b[31mred\",1\x1b[2J,101.325\n", `d.csv:2:1: fluid: fluid "\x1b[31mred" is not known; near: n-pentane
d.csv:2:12: temperature/K: number "1\x1b[2J": not a decimal number; expected digits with a point as decimal mark, as in 420.9 or 1e-3`},
	{"long field", head + "n-pentane," + strings.Repeat("9", 30) + strings.Repeat("x", 30) + ",101.325\n", `d.csv:2:11: temperature/K: number "999999999999999999999999999999xxxxxxxxxx"...: not a decimal number; expected digits with a point as decimal mark, as in 420.9 or 1e-3`},
}

func TestBadFiles(t *testing.T) {
	for _, tt := range bad {
		t.Run(tt.name, func(t *testing.T) {
			s, err := ReadCSV(strings.NewReader(tt.file), "d.csv", Options{KnownFluid: knownFluid})
			if s != nil || err == nil {
				t.Fatalf("read %+v, %v", s, err)
			}
			var ps Problems
			if !errors.As(err, &ps) {
				t.Fatalf("%v (%T) is no Problems", err, err)
			}
			if got := err.Error(); got != tt.want {
				t.Errorf("\n got %s\nwant %s", got, tt.want)
			}
		})
	}
}
