package measure

import (
	"crypto/sha256"
	"errors"
	"fmt"
	"io"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"testing/iotest"
	"unsafe"

	"github.com/google/go-cmp/cmp"

	"limsup/data/quantity"
)

func read(t *testing.T, file string, o Options) *Set {
	t.Helper()
	s, err := ReadCSV(strings.NewReader(file), "d.csv", o)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

func TestEveryColumn(t *testing.T) {
	file := "\ufeff# heated droplets\r\n" +
		"fluid,temperature/degC,pressure/bar,u_temperature/degC,u_pressure/mbar,method,batch,diameter/mm,volume/nL,heating_rate/(K/min),holding_time/ms,lifetime/s,flux/(cm-3.s-1),observed,outcome,source,provenance,note,operator,,\r\n" +
		"pentane ,147, 1.01325,0.5,2,droplet,b1,1,523.6,120,,,,,, \"Doe, J.\",measured,\"first\r\nline\",ann,,\r\n" +
		"\"1,3-butadiene\",104,-2,,,bubble,,,600,,250,,,pressure,intact,,,,,,\r\n" +
		"water,250,1,,,capillary,,,1e9,,,3600,,temperature,boiled,,,,,,\r\n" +
		"water,300,1,,,pulse,,,,,,,1e20,,,,,,,,\r\n"
	got := read(t, file, Options{KnownFluid: knownFluid})
	want := &Set{
		Files: []FileInfo{{Name: "d.csv", SHA256: fmt.Sprintf("%x", sha256.Sum256([]byte(file))), Rows: 4,
			Columns: []string{"fluid", "temperature/degC", "pressure/bar", "u_temperature/degC", "u_pressure/mbar", "method", "batch", "diameter/mm", "volume/nL",
				"heating_rate/(K/min)", "holding_time/ms", "lifetime/s", "flux/(cm-3.s-1)", "observed", "outcome", "source", "provenance", "note"},
			IgnoredColumns: []string{"operator", "column 20", "column 21"}}},
		Rows: []Row{
			{File: "d.csv", Line: 3, Fluid: "pentane", Key: "n-pentane", Temperature: 420.15, Pressure: 101325, UTemperature: 0.5, UPressure: 200,
				HasUTemperature: true, HasUPressure: true, Method: "droplet", Batch: "b1", Volume: 523.6e-12, HeatingRate: 2, Source: "Doe, J.", Provenance: "measured", Note: "first\nline"},
			{File: "d.csv", Line: 5, Fluid: "1,3-butadiene", Key: "1,3-butadiene", Temperature: 377.15, Pressure: -2e5, Method: "bubble", Volume: 600e-12,
				HoldingTime: 0.25, Observed: Pressure, Outcome: Intact},
			{File: "d.csv", Line: 6, Fluid: "water", Key: "water", Temperature: 523.15, Pressure: 1e5, Method: "capillary", Volume: 1e-3, Lifetime: 3600},
			{File: "d.csv", Line: 7, Fluid: "water", Key: "water", Temperature: 573.15, Pressure: 1e5, Method: "pulse", Flux: 1e26},
		},
	}
	// Conversions here are at most three roundings, 3·2^-53 relative.
	near := cmp.Comparer(func(x, y float64) bool { return math.Abs(x-y) <= 4e-16*math.Abs(x) })
	if diff := cmp.Diff(want, got, near); diff != "" {
		t.Error(diff)
	}
}

func TestVolumeOfDiameter(t *testing.T) {
	s := read(t, "fluid,temperature/K,pressure/kPa,diameter/mm\nwater,523,101,1.5\nwater,524,101,\n", Options{})
	// π·1.5³/6 mm³; two multiplications and the conversion round: 6·2^-53 relative.
	if got, want := s.Rows[0].Volume, math.Pi*1.5*1.5*1.5/6*1e-9; math.Abs(got-want) > 7e-16*want {
		t.Errorf("volume %g m3, want %g", got, want)
	}
	if s.Rows[1].Volume != 0 {
		t.Errorf("volume of an empty field %g, want 0", s.Rows[1].Volume)
	}
}

func TestExclusions(t *testing.T) {
	s := read(t, "fluid,temperature/K,pressure/kPa,droplet\nwater,523,101,1\nwater,523,101,2\n,,,\n water,523,101,1\n\"water\",523, 101 ,1\nwater,523,101.0,1\n", Options{})
	want := []string{
		"d.csv:4: no entry in any column",
		"d.csv:5: water: same as line 2 in every column; if it is another droplet, add a column that numbers the droplets",
		"d.csv:6: water: same as line 2 in every column; if it is another droplet, add a column that numbers the droplets",
	}
	var got []string
	for _, e := range s.Excluded {
		got = append(got, e.String())
	}
	if diff := cmp.Diff(want, got); diff != "" {
		t.Error(diff)
	}
	// The rows kept: droplets 1 and 2, and the row whose text differs.
	if len(s.Rows) != 3 || s.Files[0].Rows != 3 || s.Rows[2].Line != 7 {
		t.Errorf("%d rows kept, %d in FileInfo: %+v", len(s.Rows), s.Files[0].Rows, s.Rows)
	}
}

// Records are compared field by field, not as one text.
func TestFieldsKeepTheirBounds(t *testing.T) {
	if s := read(t, "fluid,temperature/K,pressure/kPa,a,b\nwater,523,101,1,23\nwater,523,101,12,3\n", Options{}); len(s.Rows) != 2 {
		t.Errorf("excluded %v", s.Excluded)
	}
}

// Rows share one copy of equal texts and hold on to nothing else of their record.
func TestEqualTextsAreShared(t *testing.T) {
	s := read(t, "fluid,temperature/K,pressure/kPa,method\nwater,523,101,droplet\nwater,524,101,droplet\n", Options{})
	if a, b := s.Rows[0].Method, s.Rows[1].Method; unsafe.StringData(a) != unsafe.StringData(b) {
		t.Errorf("%q is kept twice", a)
	}
}

func liquidRange(key string) (low, high float64, ok bool) {
	switch key {
	case "n-pentane": // rounded triple and critical temperature
		return 143.5, 469.7, true
	case "argon":
		return 83.8, 150.7, true
	}
	return 0, 0, false
}

func TestWarnings(t *testing.T) {
	known := Options{LiquidRange: liquidRange}
	tests := []struct {
		name, file string
		options    Options
		want       []string
	}{
		{"none", head + good + "argon,131,101\n", known, nil},
		{"cold without fluid data", head + "n-pentane,147,101\nn-hexane,140,101\nargon,131,101\nn-hexane,150,101\n", Options{},
			[]string{"d.csv:2: n-pentane: 147 K is very cold for a superheat limit; is the column in Cel? (and 2 more rows)"}},
		{"Cel in a column in K", head + "n-pentane,120,101\nargon,131,101\nn-pentane,121,101\n", known,
			[]string{"d.csv:2: n-pentane: 120 K is below the liquid range (143.5 K to 469.7 K); is the column in Cel? (and 1 more row)"}},
		{"Cel in a column in K, inside the liquid range", head + "n-pentane,147.8,101\nn-pentane,148,-500\n", known,
			[]string{"d.csv:2: n-pentane: 147.8 K is below 0.7 of the upper end of the liquid range (469.7 K); is the column in Cel?"}},
		{"cold", head + "n-pentane,320,101\nn-pentane,300,101\nn-pentane,329,101\nargon,105,101\n", known,
			[]string{"d.csv:2: n-pentane: 320 K is below 0.7 of the upper end of the liquid range (469.7 K), colder than superheat limits are known (and 1 more row)",
				"d.csv:5: argon: 105 K is below 0.7 of the upper end of the liquid range (150.7 K), colder than superheat limits are known"}},
		{"K in a column in Cel", "fluid,temperature/Cel,pressure/kPa\nn-pentane,420.9,101\n", known,
			[]string{"d.csv:2: n-pentane: 420.9 Cel is above the liquid range (143.5 K to 469.7 K); is the column in K?"}},
		{"outside the liquid range", head + "argon,40,101\nargon,160,101\n", Options{LiquidRange: func(string) (float64, float64, bool) { return 83.8, 150.7, true }},
			[]string{"d.csv:2: argon: 40 K is below the liquid range (83.8 K to 150.7 K)", "d.csv:3: argon: 160 K is above the liquid range (83.8 K to 150.7 K)"}},
		{"gauge readings", head + "n-pentane,420,0.5\nn-pentane,420,-0.5\nn-pentane,420,1\nn-pentane,420,-2\n", known,
			[]string{"d.csv:2: n-pentane: pressure 500 Pa is within 1 kPa of zero; is it absolute? (and 1 more row)"}},
		{"sizes", "fluid,temperature/K,pressure/kPa,diameter/mm\nwater,520,101,21\nwater,520,101,19\nwater,520,101,0.0009\nwater,520,101,0.002\n", known,
			[]string{"d.csv:2: water: diameter 21 mm is above 20 mm", "d.csv:4: water: diameter 0.9 um is below 1 um"}},
		{"heating rates", "fluid,temperature/K,pressure/kPa,volume/nL,heating_rate/(K/s),method,observed\nwater,520,101,1,1e5,Droplet,\nwater,520,101,1,1e6,pulse,\nwater,520,101,1,1e4,droplet,\nwater,520,101,1,1,droplet,pressure\n", known,
			[]string{"d.csv:2: water: heating rate 1e+05 K/s is above 10000 K/s, too fast for a droplet in a host liquid",
				"d.csv:5: water: the pressure is observed but a heating rate is given"}},
		{"uncertainty", "fluid,temperature/K,pressure/kPa,u_temperature/K\nwater,520,101,25\nwater,521,101,15\n", known,
			[]string{"d.csv:2: water: standard uncertainty of 25 K is very large"}},
		{"ignored near misses", "fluid,temperature/K,pressure/kPa,Method,heating rate/(K/s),operator\nwater,520,101,droplet,1,ann\n", known,
			[]string{`d.csv:1: column "Method" is ignored; was method meant?`, `d.csv:1: column "heating rate/(K/s)" is ignored; was heating_rate/(K/s) meant?`}},
		{"control characters", head + "\"a\x1b[2J\",520,0.1\n", known, []string{`d.csv:2: "a\x1b[2J": pressure 100 Pa is within 1 kPa of zero; is it absolute?`}},
	}
	for _, tt := range tests {
		t.Run(tt.name, func(t *testing.T) {
			var got []string
			for _, w := range read(t, tt.file, tt.options).Warnings {
				got = append(got, w.String())
			}
			if diff := cmp.Diff(tt.want, got); diff != "" {
				t.Error(diff)
			}
		})
	}
}

func TestProblemCarriesPlaceAndCause(t *testing.T) {
	_, err := ReadCSV(strings.NewReader(head+good+"n-pentane,\"420,9\",101.325\n"), "d.csv", Options{})
	var p *Problem
	if !errors.As(err, &p) || p.File != "d.csv" || p.Line != 3 || p.Column != 11 || p.Header != "temperature/K" {
		t.Fatalf("problem %+v of %v", p, err)
	}
	var e *quantity.Error
	if !errors.As(err, &e) || e.Kind != quantity.DecimalComma {
		t.Errorf("cause %v", p.Err)
	}
}

func TestManyProblems(t *testing.T) {
	_, err := ReadCSV(strings.NewReader(head+strings.Repeat("x,hot,cold\n", 30)), "d.csv", Options{})
	var ps Problems
	if !errors.As(err, &ps) || len(ps) != 60 {
		t.Fatalf("%d problems, want 60", len(ps))
	}
	lines := strings.Split(err.Error(), "\n")
	if len(lines) != 21 || lines[20] != "and 40 more" || !strings.HasPrefix(lines[19], "d.csv:11:7:") {
		t.Errorf("%d lines, the last ones %q", len(lines), lines[len(lines)-2:])
	}
}

func TestKnownFluidIsAskedOncePerName(t *testing.T) {
	calls := 0
	_, err := ReadCSV(strings.NewReader(head+"a,400,101\na,401,101\nb,400,101\nb,401,101\n"), "d.csv", Options{KnownFluid: func(n string) (string, error) {
		calls++
		if n == "b" {
			return "", errors.New("no b")
		}
		return n, nil
	}})
	var ps Problems
	if !errors.As(err, &ps) || len(ps) != 2 || calls != 2 {
		t.Errorf("%d calls, %v", calls, err)
	}
}

// The text must not depend on how the bytes arrive.
func TestSmallReads(t *testing.T) {
	file := "\ufefffluid,temperature/°C,pressure/kPa,note\r\nwater,250,101,größer\r\nwater,251,101,\"π\n✓\"\r\n"
	want := read(t, file, Options{})
	for name, wrap := range map[string]func(io.Reader) io.Reader{"one byte": iotest.OneByteReader, "half": iotest.HalfReader, "data with EOF": iotest.DataErrReader} {
		got, err := ReadCSV(wrap(strings.NewReader(file)), "d.csv", Options{})
		if err != nil {
			t.Fatalf("%s: %v", name, err)
		}
		if diff := cmp.Diff(want, got); diff != "" {
			t.Errorf("%s: %s", name, diff)
		}
	}
	for _, tt := range bad {
		_, err := ReadCSV(iotest.OneByteReader(strings.NewReader(tt.file)), "d.csv", Options{KnownFluid: knownFluid})
		if err == nil || err.Error() != tt.want {
			t.Errorf("%s, byte by byte: %v", tt.name, err)
		}
	}
}

// A wrong byte far into the file, beyond the first buffer, is named by its own line and column.
func TestWrongByteBeyondTheBuffer(t *testing.T) {
	file := head + strings.Repeat(good, 5000) // 120 kB
	file += "h\xe9,1,1\n"
	want := fmt.Sprintf("d.csv:5002:2: byte 0xE9 is not UTF-8 at byte %d of the file", strings.IndexByte(file, 0xe9)+1)
	if _, err := ReadCSV(strings.NewReader(file), "d.csv", Options{}); err == nil || !strings.HasPrefix(err.Error(), want) {
		t.Errorf("%v, want %s", err, want)
	}
}

func TestReadingFails(t *testing.T) {
	broken := errors.New("cable pulled")
	_, err := ReadCSV(io.MultiReader(strings.NewReader(head+good), iotest.ErrReader(broken)), "d.csv", Options{})
	if !errors.Is(err, broken) {
		t.Errorf("error %v, want %v", err, broken)
	}
}

func TestReadFile(t *testing.T) {
	path := filepath.Join(t.TempDir(), "drops.csv")
	if err := os.WriteFile(path, []byte(head+good), 0o600); err != nil {
		t.Fatal(err)
	}
	s, err := ReadFile(path, Options{})
	if err != nil || len(s.Rows) != 1 || s.Rows[0].At() != path+":2" {
		t.Errorf("%+v, %v", s, err)
	}
	if _, err := ReadFile(path+".none", Options{}); !errors.Is(err, os.ErrNotExist) {
		t.Errorf("absent file: %v", err)
	}
	for _, name := range []string{"drops.xls", "drops.ODS", "drops.xlsb"} {
		var p *Problem
		if _, err := ReadFile(name, Options{}); !errors.As(err, &p) || !strings.Contains(p.Found, "a workbook of another format") {
			t.Errorf("%s: %v", name, err)
		}
	}
}

func TestJoin(t *testing.T) {
	a := read(t, head+good+"n-pentane,421,101.325\n", Options{})
	b, err := ReadCSV(strings.NewReader("# later\n"+head+good+"n-pentane,422,101.325\n"), "e.csv", Options{})
	if err != nil {
		t.Fatal(err)
	}
	s, err := Join(a, b)
	if err != nil || len(s.Rows) != 4 || len(s.Files) != 2 || s.Rows[2].File != "e.csv" {
		t.Fatalf("%+v, %v", s, err)
	}
	if len(s.Warnings) != 1 || s.Warnings[0].String() != "e.csv:3: n-pentane: same as d.csv:2 in every column read; both are kept" {
		t.Errorf("warnings %v", s.Warnings)
	}
	if len(a.Rows) != 2 || len(a.Warnings) != 0 {
		t.Errorf("argument changed: %+v", a)
	}
	if _, err := Join(a, a); err == nil || err.Error() != "d.csv: same bytes as d.csv; expected each file of measurements once" {
		t.Errorf("same file twice: %v", err)
	}
	if _, err := Join(); err == nil || err.Error() != "measurements: no rows; expected at least one row in one file" {
		t.Errorf("nothing: %v", err)
	}
}
