package table

import (
	"encoding/csv"
	"encoding/json"
	"errors"
	"math"
	"strconv"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"pgregory.net/rapid"
)

func TestShape(t *testing.T) {
	for _, tt := range []struct {
		name   string
		values []float64
		digits int
		fixed  bool
		want   []string
	}{
		{"default digits of the largest", []float64{419.23, 1.5}, 0, false, []string{"419.2", "1.5"}},
		{"the smallest keeps two digits", []float64{419.23, 0.0123}, 0, false, []string{"419.230", "0.012"}},
		{"rounding carries into the next decade", []float64{99.996}, 4, false, []string{"100.0"}},
		{"scientific from 1e6", []float64{1e6, 1}, 3, false, []string{"1.00e+06", "1.00e+00"}},
		{"plain just below 1e6", []float64{999999, 1}, 3, false, []string{"999999.0", "1.0"}},
		{"scientific below 1e-4", []float64{9.9e-5, 1}, 3, false, []string{"9.90e-05", "1.00e+00"}},
		{"plain at 1e-4", []float64{1e-4}, 2, false, []string{"0.00010"}},
		{"zero does not count", []float64{0, 12}, 2, false, []string{"0", "12"}},
		{"only zeros", []float64{0, math.Copysign(0, -1)}, 5, false, []string{"0", "0"}},
		{"fixed", []float64{1234567.891, 1e-9, -1e-9}, 2, true, []string{"1234567.89", "0.00", "0.00"}},
		{"fixed without decimals", []float64{2.5, -0.4}, 0, true, []string{"2", "0"}},
		{"fixed, beyond the reach of decimals", []float64{1e15}, 2, true, []string{"1.000e+15"}},
		{"one digit", []float64{3e7, 2e-7}, 1, false, []string{"3e+07", "2e-07"}},
		{"three-digit exponents", []float64{math.MaxFloat64, math.SmallestNonzeroFloat64}, 2, false, []string{"1.8e+308", "4.9e-324"}},
	} {
		form := shapeOf(tt.values, tt.digits, tt.fixed)
		var got []string
		for _, v := range tt.values {
			got = append(got, form.format(v))
		}
		if diff := cmp.Diff(tt.want, got); diff != "" {
			t.Errorf("%s (-want +got):\n%s", tt.name, diff)
		}
	}
}

func TestNumber(t *testing.T) {
	for _, tt := range []struct {
		v      float64
		digits int
		want   string
	}{
		{419.2345, 5, "419.23"}, {0.00012345, 3, "0.000123"}, {1e12, 2, "1.0e+12"}, {0, 3, "0"}, {-2.5, 0, "-2.500"}, {1.5, -1, "1.500"},
		{1.0 / 3, 99, "0.33333333333333331"},
	} {
		if got, err := Number(tt.v, tt.digits); err != nil || got != tt.want {
			t.Errorf("Number(%g, %d) = %q, %v; want %q", tt.v, tt.digits, got, err, tt.want)
		}
	}
	for _, v := range []float64{math.NaN(), math.Inf(1), math.Inf(-1)} {
		var bad *NumberError
		if got, err := Number(v, 3); !errors.As(err, &bad) || got != "" {
			t.Errorf("Number(%g) = %q, %v; want a *NumberError", v, got, err)
		}
	}
}

// finite draws any finite float64 by its bits, subnormal numbers and negative zero included.
func finite() *rapid.Generator[float64] {
	return rapid.Custom(func(t *rapid.T) float64 {
		v := math.Float64frombits(rapid.Uint64().Draw(t, "bits"))
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return 0
		}
		return v
	})
}

// moderate draws values of ordinary size, which share a column in plain notation.
func moderate() *rapid.Generator[float64] {
	return rapid.OneOf(rapid.Float64Range(-1e6, 1e6), rapid.Float64Range(-1, 1), rapid.Just(0.0))
}

func TestNumbersReadBackExactly(t *testing.T) {
	rapid.Check(t, func(r *rapid.T) {
		values := rapid.SliceOfN(finite(), 1, 20).Draw(r, "values")
		table := &Table{Columns: []Column{{Name: "x", Unit: "K", Kind: KindNumber}}}
		for _, v := range values {
			table.Rows = append(table.Rows, []Cell{Num(v)})
		}
		records, err := csv.NewReader(strings.NewReader(render(t, table, CSV, Options{}))).ReadAll()
		if err != nil {
			r.Fatal(err)
		}
		var rows []map[string]float64
		if err := json.Unmarshal([]byte(render(t, table, JSON, Options{})), &rows); err != nil {
			r.Fatal(err)
		}
		lines := strings.Split(render(t, table, Markdown, Options{}), "\n")
		for i, v := range values {
			fromCSV, err := strconv.ParseFloat(records[i+1][0], 64)
			fromMarkdown := parse(t, strings.Trim(lines[i+2], "|"))
			for format, got := range map[string]float64{"csv": fromCSV, "json": rows[i]["x_K"], "markdown": fromMarkdown} {
				if err != nil || math.Float64bits(got) != math.Float64bits(v) {
					r.Fatalf("%s: %v became %v (%v)", format, v, got, err)
				}
			}
		}
	})
}

func TestDecimalSignsLineUp(t *testing.T) {
	rapid.Check(t, func(r *rapid.T) {
		generator := rapid.OneOf(finite(), moderate())
		if rapid.Bool().Draw(r, "plain") {
			generator = moderate()
		}
		values := rapid.SliceOfN(generator, 1, 20).Draw(r, "values")
		col := Column{
			Name: "x", Kind: KindNumber,
			Digits: rapid.IntRange(0, maxDigits).Draw(r, "digits"), Fixed: rapid.Bool().Draw(r, "fixed"),
		}
		table := &Table{Columns: []Column{{Name: "a"}, col, {Name: "z"}}}
		for i, v := range values {
			cell := Num(v)
			if i%3 == 1 {
				cell = cell.Note("remark " + strconv.Itoa(i%2))
			}
			table.Rows = append(table.Rows, []Cell{Text(strings.Repeat("水", i%4)), cell, Text("end")})
		}
		table.Rows = append(table.Rows,
			[]Cell{Text("whole"), Int(rapid.IntRange(-1000, 1000).Draw(r, "whole")), Text("end")},
			[]Cell{Text("none"), Missing(""), Text("end")})
		lines := strings.Split(render(t, table, Screen, Options{}), "\n")[2:]
		point, end := -1, -1
		for i := range table.Rows {
			text, number := lines[i], strings.Fields(lines[i])
			at := strings.LastIndex(text, number[len(number)-2])
			printed, _, _ := strings.Cut(number[len(number)-2], "[")
			left, _ := split(printed)
			p, e := displayWidth(text[:at])+len(left), displayWidth(text)
			if i == 0 {
				point, end = p, e
			}
			if p != point || e != end {
				r.Fatalf("row %d: decimal sign at %d, end at %d; row 0: %d, %d\n%s", i, p, e, point, end, strings.Join(lines, "\n"))
			}
		}
	})
}

// TestRoundingIsTheStated checks that a printed number is its value rounded to the last printed place: the error
// is at most half a unit of that place.
func TestRoundingIsTheStated(t *testing.T) {
	rapid.Check(t, func(r *rapid.T) {
		values := rapid.SliceOfN(moderate(), 1, 10).Draw(r, "values")
		form := shapeOf(values, rapid.IntRange(1, 9).Draw(r, "digits"), false)
		for _, v := range values {
			printed := form.format(v)
			unit := math.Pow(10, -float64(form.decimals))
			if form.scientific && v != 0 {
				unit *= math.Pow(10, float64(exponent(v, form.decimals+1)))
			}
			// 0.5 for the rounding; 4e-16 of the value for reading the decimal back and subtracting.
			if got := parse(t, printed); math.Abs(got-v) > 0.5*unit*(1+1e-12)+4e-16*math.Abs(v) {
				r.Fatalf("%v printed as %s: off by more than half of %g", v, printed, unit)
			}
		}
	})
}
