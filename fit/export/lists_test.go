package export

import (
	"bytes"
	"encoding/csv"
	"errors"
	"flag"
	"math"
	"math/rand/v2"
	"os"
	"regexp"
	"sort"
	"strconv"
	"strings"
	"testing"

	"limsup/data/fluid"
	"limsup/fit"
)

var update = flag.Bool("update", false, "write the golden files under testdata anew")

// read splits a list into its comments, joined, and its rows without the head.
func read(t *testing.T, text string) (comments string, head []string, rows [][]string) {
	t.Helper()
	var notes []string
	for _, l := range strings.Split(text, "\n") {
		if s, ok := strings.CutPrefix(l, "# "); ok {
			notes = append(notes, s)
		}
	}
	r := csv.NewReader(strings.NewReader(text))
	r.Comment = '#'
	all, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	return strings.Join(notes, " "), all[0], all[1:]
}

// listCases are models with a limit all over their range.
func listCases(t *testing.T) []modelCase {
	all := modelCases(t)
	out := []modelCase{all[1], all[3], all[4], all[8], all[9]}
	out[3].from, out[3].to, out[4].from = -1e6, 3e6, 1e4
	for i := range out {
		out[i].fluids = []string{"n-pentane", "water"}
	}
	if testing.Short() {
		out[4].fluids = out[4].fluids[:1]
		return out[4:]
	}
	return out
}

// randomPressures of a fixed seed.
func randomPressures(c *modelCase) []float64 {
	r := rand.New(rand.NewPCG(5, 7))
	out := make([]float64, 1000)
	for i := range out {
		out[i] = c.from + (c.to-c.from)*r.Float64()
	}
	return out
}

func TestTableKeepsItsStatedError(t *testing.T) {
	for _, c := range listCases(t) {
		comments, head, rows := read(t, c.write(t, Table))
		s, _ := source(t, &c)
		for _, rec := range s.o.Records {
			m := regexp.MustCompile(rec.Key + `: (\d+) rows\. A straight line between neighbours errs by at most (\S+) K in temperature, (\S+) K in standard_uncertainty, (\S+) K in saturation, (\S+) K in spinodal`).FindStringSubmatch(comments)
			if m == nil {
				t.Fatalf("no statement for %s in %s", rec.Key, comments)
			}
			var grid [][]float64 // pressure and the columns, NaN where empty
			for _, r := range rows {
				if r[0] != rec.Key {
					continue
				}
				var v []float64
				for _, text := range r[1:] {
					x, err := strconv.ParseFloat(text, 64)
					if err != nil {
						x = math.NaN()
					}
					v = append(v, x)
				}
				grid = append(grid, v)
			}
			if m[1] != strconv.Itoa(len(grid)) || grid[0][0] != c.from || grid[len(grid)-1][0] != c.to {
				t.Errorf("%s: %d rows from %g to %g Pa, stated %s", rec.Key, len(grid), grid[0][0], grid[len(grid)-1][0], m[1])
			}
			compared := make([]int, len(tableColumns))
			for _, P := range randomPressures(&c) {
				i := sort.Search(len(grid), func(i int) bool { return grid[i][0] >= P })
				a, b := grid[i-1], grid[i]
				x := s.at(rec, P)
				for k, col := range tableColumns {
					stated, _ := strconv.ParseFloat(m[2+k], 64)
					if stated > s.o.Tolerance {
						t.Errorf("%s %s: stated error %g K, tolerance %g K", rec.Key, head[2+k], stated, s.o.Tolerance)
					}
					v, ok := col.of(&x)
					line := a[1+k] + (b[1+k]-a[1+k])*(P-a[0])/(b[0]-a[0])
					if !ok || math.IsNaN(line) {
						continue
					}
					compared[k]++
					if !(math.Abs(line-v) <= stated) {
						t.Errorf("%s at %g Pa: %s from the table %.9g, model %.9g, stated error %g", rec.Key, P, head[2+k], line, v, stated)
					}
				}
			}
			if compared[0] != 1000 || compared[1] != 1000 || compared[3] < 990 {
				t.Errorf("%s %s: compared %v", c.prefix, rec.Key, compared)
			}
		}
	}
}

func TestSeriesKeepsItsStatedError(t *testing.T) {
	for _, c := range listCases(t) {
		comments, _, rows := read(t, c.write(t, Series))
		s, _ := source(t, &c)
		for _, rec := range s.o.Records {
			for _, col := range seriesColumns {
				m := regexp.MustCompile(rec.Key + `, ` + col.name + `: (\d+) terms; largest deviation from the model (\S+) K\.`).FindStringSubmatch(comments)
				if m == nil {
					t.Fatalf("no statement for %s %s in %s", rec.Key, col.name, comments)
				}
				stated, _ := strconv.ParseFloat(m[2], 64)
				if stated > s.o.Tolerance {
					t.Errorf("%s %s: stated deviation %g K", rec.Key, col.name, stated)
				}
				var coefficients []float64
				for _, r := range rows {
					if r[0] == rec.Key && r[1] == col.name {
						v, err := strconv.ParseFloat(r[6], 64)
						if err != nil || r[5] != strconv.Itoa(len(coefficients)) {
							t.Fatalf("row %q", r)
						}
						coefficients = append(coefficients, v)
					}
				}
				if m[1] != strconv.Itoa(len(coefficients)) {
					t.Errorf("%s %s: %d terms, stated %s", rec.Key, col.name, len(coefficients), m[1])
				}
				for _, P := range randomPressures(&c) {
					x := s.at(rec, P)
					want, ok := col.of(&x)
					z := (2*P - c.from - c.to) / (c.to - c.from)
					got := 0.0
					for k, v := range coefficients { // the definition, not the recurrence of the program
						got += v * math.Cos(float64(k)*math.Acos(z))
					}
					if !ok || !(math.Abs(got-want) <= stated) {
						t.Errorf("%s at %g Pa: %s by the series %.9g, model %.9g, stated deviation %g", rec.Key, P, col.name, got, want, stated)
					}
				}
			}
		}
	}
}

// synthetic is a fluid that does not exist, with round numbers.
func synthetic(t *testing.T) []*fluid.Record {
	t.Helper()
	const text = `[[fluid]]
key = "synthetic"
molar_mass = {value = 80, unit = "g/mol", source = "synthetic"}
critical_temperature = {value = 470, unit = "K", source = "synthetic"}
critical_pressure = {value = 3.5, unit = "MPa", source = "synthetic"}
acentric_factor = {value = 0.25, unit = "1", source = "synthetic"}
surface_tension = {form = "power-sum", Tc = 470, terms = [[0.05, 1.25]], unit = "N/m", range = [200, 470], source = "synthetic"}
`
	r, err := fluid.Parse(strings.NewReader(text), "synthetic.toml")
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// The golden files are what others read; a change of them is a change for everybody who has
// such files. Their numbers come from made-up models. Series are rounded to 1e-6 K before they
// are compared: the last digits are those of the mathematics library.
func TestGoldenLists(t *testing.T) {
	m := calibrated(t, fit.Variant{}, 1.03)
	o := Options{Records: synthetic(t), Version: "0.0.0-test", Verdict: "no measurable gain",
		Inputs:   []Input{{"synthetic.csv", "0123456789abcdef0123456789abcdef0123456789abcdef0123456789abcdef"}},
		Cautions: []string{"Synthetic: made for tests."}}
	for _, form := range []Form{Parameters, Series} {
		var b bytes.Buffer
		if err := Write(&b, form, m, o); err != nil {
			t.Fatal(err)
		}
		got := b.String()
		if form == Series {
			got = regexp.MustCompile(`-?\d+\.\d{7,}(e[-+]\d+)?|-?\d+(\.\d+)?e-\d+`).ReplaceAllStringFunc(got, func(s string) string {
				v, err := strconv.ParseFloat(s, 64)
				if err != nil {
					t.Fatal(err)
				}
				return strconv.FormatFloat(v+0, 'f', 6, 64)
			})
		}
		name := "testdata/synthetic-" + string(form) + ".csv"
		if *update {
			if err := os.WriteFile(name, []byte(got), 0o644); err != nil {
				t.Fatal(err)
			}
		}
		want, err := os.ReadFile(name)
		if err != nil {
			t.Fatal(err)
		}
		if got != string(want) {
			t.Errorf("the export as %s is no longer %s:\n%s", form, name, got)
		}
	}
}

func TestWriteTwiceGivesTheSameBytes(t *testing.T) {
	for _, c := range modelCases(t)[3:4] {
		c.fluids = []string{"n-pentane", "water"}
		for _, form := range Forms() {
			if a, b := c.write(t, form), c.write(t, form); a != b || len(a) < 500 {
				t.Errorf("%s as %s: %d and %d bytes, which differ or are few", c.prefix, form, len(a), len(b))
			}
		}
	}
}

// Where a liquid has no kinetic limit the table is empty and says so, and there is no series.
func TestWhereThereIsNoLimit(t *testing.T) {
	for _, tt := range []struct {
		at    int // of modelCases
		fluid string
		all   bool // no limit at all
		want  string
	}{
		{6, "n-pentane", false, "nothing may be interpolated"},
		{5, "n-pentane", true, "there is no limit: no kinetic limit"},
	} {
		c := modelCases(t)[tt.at]
		c.fluids = []string{tt.fluid}
		comments, _, rows := read(t, c.write(t, Table))
		empty := 0
		for _, r := range rows {
			if r[2] == "" {
				empty++
			}
		}
		if empty == 0 || (empty == len(rows)) != tt.all || !strings.Contains(comments, tt.want) {
			t.Errorf("%d of %d rows are empty; %s", empty, len(rows), comments)
		}
		err := Write(&bytes.Buffer{}, Series, c.model, c.options(t))
		var e *ToleranceError
		if !errors.As(err, &e) || e.Fluid != tt.fluid || !strings.Contains(err.Error(), "no kinetic limit") {
			t.Errorf("series without a limit: %v", err)
		}
	}
}

func TestOnePressure(t *testing.T) {
	m := calibrated(t, fit.Variant{}, 1.03)
	m.Validity.PressureLow, m.Validity.PressureHigh = 101325, 101325
	o := Options{Records: records(t, "n-pentane")}
	var b bytes.Buffer
	if err := Write(&b, Table, m, o); err != nil {
		t.Fatal(err)
	}
	if _, _, rows := read(t, b.String()); len(rows) != 1 || rows[0][1] != "101325" {
		t.Errorf("rows %v", rows)
	}
	if err := Write(&b, C, m, o); err != nil {
		t.Error(err)
	}
	var e *ToleranceError
	if err := Write(&b, Series, m, o); !errors.As(err, &e) {
		t.Errorf("series over one pressure: %v", err)
	}
}

func TestBadOptions(t *testing.T) {
	m := calibrated(t, fit.Variant{}, 1.03)
	r := records(t, "n-pentane")
	for _, tt := range []struct {
		form Form
		o    Options
		want string
	}{
		{"cobol", Options{Records: r}, `as "cobol"`},
		{C, Options{}, "at least one"},
		{C, Options{Records: append(r, r...)}, "each fluid once"},
		{C, Options{Records: r, Prefix: "Lab_"}, `prefix "Lab_"`},
		{C, Options{Records: r, Prefix: "lab"}, `prefix "lab"`},
		{C, Options{Records: r, Prefix: "a__b_"}, `prefix "a__b_"`},
		{C, Options{Records: r, Prefix: "9_"}, `prefix "9_"`},
		{Table, Options{Records: r, Tolerance: -1}, "tolerance"},
		{Table, Options{Records: r, From: 2e6, To: 1e6}, "range of pressure"},
		{Table, Options{Records: r, From: math.NaN(), To: 1e6}, "range of pressure"},
	} {
		err := Write(&bytes.Buffer{}, tt.form, m, tt.o)
		var e *OptionError
		if !errors.As(err, &e) || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("%s %+v: %v, want an *OptionError with %q", tt.form, tt.o, err, tt.want)
		}
	}
	v, err := fit.Untuned(fit.Variant{Tension: fit.CorrespondingStates})
	if err != nil {
		t.Fatal(err)
	}
	var f *FluidError
	if err := Write(&bytes.Buffer{}, C, v, Options{Records: records(t, "carbon-dioxide")}); !errors.As(err, &f) || f.Fluid != "carbon-dioxide" {
		t.Errorf("carbon dioxide has no boiling temperature at 101325 Pa: %v", err)
	}
}
