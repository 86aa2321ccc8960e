package measure

import (
	"bytes"
	"encoding/csv"
	"errors"
	"math"
	"strconv"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"pgregory.net/rapid"
)

// write puts rows into a CSV file in SI units.
func write(rows []Row) []byte {
	var b bytes.Buffer
	w := csv.NewWriter(&b)
	w.UseCRLF = len(rows)%2 == 0
	w.Write([]string{"fluid", "temperature/K", "pressure/Pa", "u_temperature/K", "u_pressure/Pa", "method", "batch", "volume/m3", "heating_rate/(K/s)", "holding_time/s",
		"lifetime/s", "flux/(m-3.s-1)", "observed", "outcome", "source", "provenance", "note", "run"})
	number := func(v float64) string {
		if v == 0 {
			return ""
		}
		return strconv.FormatFloat(v, 'g', -1, 64)
	}
	for i, r := range rows {
		w.Write([]string{r.Fluid, number(r.Temperature), number(r.Pressure), number(r.UTemperature), number(r.UPressure), r.Method, r.Batch, number(r.Volume), number(r.HeatingRate),
			number(r.HoldingTime), number(r.Lifetime), number(r.Flux), r.Observed.String(), r.Outcome.String(), r.Source, r.Provenance, r.Note, strconv.Itoa(i)})
	}
	w.Flush()
	return b.Bytes()
}

func rowGenerator() *rapid.Generator[Row] {
	text := rapid.Custom(func(t *rapid.T) string {
		s := rapid.StringOf(rapid.SampledFrom([]rune("ab ,\"'#;é€\n1/"))).Draw(t, "text")
		return strings.TrimSpace(s)
	})
	size := func(t *rapid.T, label string) float64 {
		return math.Pow(10, rapid.Float64Range(-30, 30).Draw(t, label))
	}
	return rapid.Custom(func(t *rapid.T) Row {
		r := Row{File: "d.csv", Fluid: "f" + text.Draw(t, "fluid") + "x", Temperature: size(t, "T"), Pressure: size(t, "P"), Method: text.Draw(t, "method"), Batch: text.Draw(t, "batch"),
			Observed: Observed(rapid.IntRange(0, 1).Draw(t, "observed")), Outcome: Outcome(rapid.IntRange(0, 1).Draw(t, "outcome")),
			Source: text.Draw(t, "source"), Provenance: text.Draw(t, "provenance"), Note: text.Draw(t, "note")}
		r.Key = r.Fluid
		if rapid.Bool().Draw(t, "tension") {
			r.Pressure = -r.Pressure
		}
		if r.HasUTemperature = rapid.Bool().Draw(t, "has uT"); r.HasUTemperature {
			r.UTemperature = size(t, "uT")
		}
		if r.HasUPressure = rapid.Bool().Draw(t, "has uP"); r.HasUPressure {
			r.UPressure = size(t, "uP")
		}
		way := rapid.IntRange(0, 4).Draw(t, "way")
		if way > 0 {
			r.Volume = size(t, "V")
			*[]*float64{&r.HeatingRate, &r.HoldingTime, &r.Lifetime, &r.Flux}[way-1] = size(t, "way")
		}
		return r
	})
}

// Numbers and texts written in SI come back bit for bit, each row with the line on which it begins.
func TestRoundTrip(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		rows := rapid.SliceOfN(rowGenerator(), 1, 5).Draw(t, "rows")
		line := 2
		for i := range rows {
			rows[i].Line = line
			r := &rows[i]
			for _, s := range []string{r.Fluid, r.Method, r.Batch, r.Source, r.Provenance, r.Note} {
				line += strings.Count(s, "\n")
			}
			line++
		}
		s, err := ReadCSV(bytes.NewReader(write(rows)), "d.csv", Options{})
		if err != nil {
			t.Fatalf("%v\n%s", err, write(rows))
		}
		if diff := cmp.Diff(rows, s.Rows); diff != "" {
			t.Fatal(diff)
		}
	})
}

func FuzzReadCSV(f *testing.F) {
	f.Add([]byte(head + good))
	f.Add([]byte("\ufeff# c\r\nfluid,temperature/degC,pressure/bar,diameter/mm,heating_rate/(K/min)\r\n\"1,3-butadiene\",104,1,1.2,60\r\n"))
	f.Add([]byte("fluid,temperature/K,pressure/kPa,lifetime/s,volume/nL,observed,outcome,x\nwater,5e2,-3e3,1,2,pressure,intact,\n,,,,,,,\n"))
	for _, tt := range bad {
		f.Add([]byte(tt.file))
	}
	f.Fuzz(func(t *testing.T, file []byte) {
		s, err := ReadCSV(bytes.NewReader(file), "d.csv", Options{LiquidRange: liquidRange})
		if err != nil {
			var ps Problems
			if s != nil || !errors.As(err, &ps) || len(ps) == 0 || err.Error() == "" {
				t.Fatalf("set %v with error %v (%T)", s, err, err)
			}
			return
		}
		if len(s.Rows) == 0 {
			t.Fatal("no rows and no error")
		}
		soundRows(t, s.Rows)
	})
}

// soundRows fails the test for a row that no file may yield.
func soundRows(t *testing.T, rows []Row) {
	for _, r := range rows {
		for _, v := range []float64{r.Temperature, r.Pressure, r.UTemperature, r.UPressure, r.Volume, r.HeatingRate, r.HoldingTime, r.Lifetime, r.Flux} {
			if math.IsNaN(v) || math.IsInf(v, 0) {
				t.Fatalf("row with %g: %+v", v, r)
			}
		}
		if r.Fluid == "" || r.Temperature <= 0 || r.Pressure == 0 || r.Line < 2 || r.UTemperature < 0 || r.UPressure < 0 || r.Volume < 0 {
			t.Fatalf("row %+v", r)
		}
	}
}

// BenchmarkReadCSV reads rows as a droplet apparatus would write them.
func BenchmarkReadCSV(b *testing.B) {
	const rows = 10000
	var file bytes.Buffer
	file.WriteString("fluid,temperature/K,u_temperature/K,pressure/kPa,method,batch,diameter/mm,heating_rate/(K/s),source,run\n")
	for i := range rows {
		file.WriteString("n-pentane," + strconv.FormatFloat(420+float64(i%97)/100, 'f', 2, 64) + ",0.5,101.325,droplet,b1,1.2,2.5,\"Doe, J.\"," + strconv.Itoa(i) + "\n")
	}
	b.SetBytes(int64(file.Len()))
	b.ReportAllocs()
	for b.Loop() {
		if _, err := ReadCSV(bytes.NewReader(file.Bytes()), "d.csv", Options{KnownFluid: knownFluid}); err != nil {
			b.Fatal(err)
		}
	}
	b.ReportMetric(float64(rows)*float64(b.N)/b.Elapsed().Seconds(), "rows/s")
}
