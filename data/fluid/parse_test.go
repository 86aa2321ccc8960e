package fluid_test

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"reflect"
	"strings"
	"testing"

	"limsup/data/fluid"
	"limsup/data/quantity"
	"pgregory.net/rapid"
)

// good is a user's record with every kind of property; tests break single lines of it.
const good = `# mine
[[fluid]]
key = "mine"
aliases = ["my fluid"]
cas = "109-66-0"
molar_mass = {value = 72.15, unit = "g/mol", source = "label"}
critical_temperature = {value = 196.55, unit = "Cel", source = "handbook"}
critical_pressure = {value = 33.7, unit = "bar", source = "handbook"}
acentric_factor = {value = 0.251, unit = "1", source = "handbook"}
critical_density = {value = 232, unit = "kg/m3", source = "handbook"}
boiling_temperature = {value = 36.06, unit = "Cel", source = "handbook"}

[fluid.surface_tension]
form = "power-sum"
Tc = 469.7
terms = [[52.02, 1.2]]
unit = "mN/m"
range = [220, 460]
source = "own fit"

[fluid.vapour_pressure]
form = "table"
unit = "kPa"
source = "own measurements"
points = [
  [300, 73.3],
  [350, 340],
  [400, 1040],
  [450, 2480],
]
`

func problems(t testing.TB, text string) fluid.Problems {
	t.Helper()
	rs, err := fluid.Parse(strings.NewReader(text), "mine.toml")
	if err == nil {
		return nil
	}
	var ps fluid.Problems
	if !errors.As(err, &ps) || rs != nil {
		t.Fatalf("%v records, error %v; want Problems", rs, err)
	}
	return ps
}

func TestParse(t *testing.T) {
	r := parseOne(t, good)
	if r.CriticalTemperature.Value != 196.55+273.15 || r.CriticalTemperature.Given != 196.55 || r.CriticalTemperature.Unit != "Cel" {
		t.Errorf("critical temperature %+v", r.CriticalTemperature)
	}
	if math.Abs(r.CriticalPressure.Value/33.7e5-1) > 3e-16 || r.Name != "mine" {
		t.Errorf("critical pressure %+v, name %q", r.CriticalPressure, r.Name)
	}
	f, err := r.Tension()
	if err != nil {
		t.Fatal(err)
	}
	d, err := fluid.NewValue(52.02, "mN/m", quantity.SurfaceTension, "")
	if err != nil {
		t.Fatal(err)
	}
	if s, _, err := f.Sigma(469.7 / 2); err != nil || s < 0.43*d.Value || s > 0.44*d.Value { // 2^-1.2 = 0.4353
		t.Errorf("σ = %g N/m, %v", s, err)
	}
	if p, _, err := r.VapourPressure.At(350); err != nil || p < 339.9999e3 || p > 340.0001e3 {
		t.Errorf("P(350 K) = %g Pa, %v", p, err)
	}
	// A byte order mark, as Windows editors write it, is no error.
	if parseOne(t, "\ufeff"+good).Key != "mine" {
		t.Error("byte order mark")
	}
}

// One line of a good file replaced by a bad one, and the one problem that this makes.
func TestParseProblems(t *testing.T) {
	for _, tt := range []struct{ old, new, want string }{
		{`cas = "109-66-0"`, `cass = "109-66-0"`, `mine.toml:5:1: mine: cass: unknown key "cass"; did you mean cas?`},
		{`cas = "109-66-0"`, `cas = "109-66-1"`, `mine.toml:5:1: mine: cas: "109-66-1" is not a CAS registry number`},
		{`cas = "109-66-0"`, `cas = 109`, `mine.toml:5:1: mine: cas: number 109, want text`},
		{`key = "mine"`, ``, `mine.toml:2:3: no key`},
		{`key = "mine"`, `key = "--"`, `mine.toml:3:1: --: key: "--" has no letter or digit`},
		{`"my fluid"`, `"my fluid", 5`, `mine.toml:4:24: mine: aliases[1]: number 5, want text`},
		{`{value = 72.15, unit = "g/mol", source = "label"}`, `72.15`, `mine.toml:6:1: mine: molar_mass: number 72.15, want a table`},
		{`72.15, unit = "g/mol", source = "label"`, `72.15, unit = "g/mol"`, `mine.toml:6:1: mine: molar_mass: no source`},
		{`72.15, unit = "g/mol", source = "label"`, `72.15, unit = "g/mol", source = " "`, `mine.toml:6:46: mine: molar_mass.source: source is blank`},
		{`72.15, unit = "g/mol"`, `72.15, unit = "g/mole"`, `mine.toml:6:30: mine: molar_mass.unit: unit "g/mole": unknown symbol "mole"`},
		{`72.15, unit = "g/mol"`, `72.15, unit = "kg"`, `mine.toml:6:30: mine: molar_mass.unit: unit "kg": wrong kind of quantity (mass)`},
		{`72.15, unit = "g/mol"`, `"72.15", unit = "g/mol"`, `mine.toml:6:15: mine: molar_mass.value: text "72.15", want a number`},
		{`72.15, unit = "g/mol"`, `-72.15, unit = "g/mol"`, `mine.toml:6:15: mine: molar_mass.value: -72.15 g/mol is not positive`},
		{`72.15, unit = "g/mol"`, `nan, unit = "g/mol"`, `mine.toml:6:15: mine: molar_mass.value: number NaN is not finite`},
		{`196.55, unit = "Cel"`, `-300, unit = "Cel"`, `mine.toml:7:25: mine: critical_temperature.value: quantity "-300 Cel": is not above absolute zero`},
		{`33.7, unit = "bar"`, `33.7, unit = "barg"`, `mine.toml:8:36: mine: critical_pressure.unit: unit "barg": is a gauge pressure`},
		{`0.251, unit = "1"`, `2.51, unit = "1"`, `mine.toml:9:20: mine: acentric_factor.value: acentric factor 2.51, want between -0.5 and 1.5`},
		{`232, unit = "kg/m3"`, `2.32, unit = "kg/m3"`, `mine.toml:10:21: mine: critical_density.value: 2.32 kg/m3 gives a critical compressibility factor of 26.8`},
		{`36.06, unit`, `336.06, unit`, `mine.toml:11:24: mine: boiling_temperature.value: 609.21 K is not below the critical temperature, 469.7 K`},
		{`form = "power-sum"`, `form = "power-sun"`, `mine.toml:14:1: mine: surface_tension.form: unknown form "power-sun", want power-sum or dippr-106`},
		{`[[52.02, 1.2]]`, `[[52.02]]`, `mine.toml:16:11: mine: surface_tension.terms[0]: 1 numbers, want 2`},
		{`[[52.02, 1.2]]`, `[[-52.02, 1.2]]`, `mine.toml:13:8: mine: surface_tension: surface tension (power-sum): -0.01227 N/m at 328.79 K is not positive`},
		{`[220, 460]`, `[460, 220]`, `mine.toml:18:1: mine: surface_tension.range: range 460 to 220 K, want 0 < lower < upper`},
		{`[220, 460]`, `[220, 500]`, `mine.toml:18:1: mine: surface_tension.range: range ends at 500 K, above Tc = 469.7 K`},
		{`unit = "kPa"`, `unit = "mN/m"`, `mine.toml:23:1: mine: vapour_pressure.unit: unit "mN/m": wrong kind of quantity`},
		{`[350, 340]`, `[290, 340]`, `mine.toml:27:4: mine: vapour_pressure.points[1]: temperature 290 K does not rise above the row before it`},
		{`[350, 340]`, `[350, 34]`, `mine.toml:27:4: mine: vapour_pressure.points[1]: value at 350 K does not rise from the row before it`},
		{`[350, 340]`, `[350, 1030]`, `mine.toml:28:4: mine: vapour_pressure.points[2]: rows are not smooth: the curve turns back between 350 and 400 K`},
		{"  [350, 340],\n", ``, `mine.toml:21:8: mine: vapour_pressure: 3 rows, want at least 4`},
		{`[350, 340]`, `[350, "340"]`, `mine.toml:27:9: mine: vapour_pressure.points[1][1]: text "340", want a number`},
		{`form = "table"`, `form = "wagner-3-6"`, `mine.toml:21:8: mine: vapour_pressure: no Tc`},
		{`key = "mine"`, `key = "mine`, `mine.toml:3:`},
		{`[[fluid]]`, `[[fluids]]`, `mine.toml:2:3: fluids: unknown key "fluids"; did you mean fluid?`},
		{`[[fluid]]`, `[fluid]`, `mine.toml:2:2: fluid: a table, want a list`},
	} {
		text := strings.Replace(good, tt.old, tt.new, 1)
		if text == good {
			t.Fatalf("%q is not in the file", tt.old)
		}
		ps := problems(t, text)
		var lines []string
		hit := false
		for _, p := range ps {
			lines = append(lines, p.Error())
			hit = hit || strings.HasPrefix(p.Error(), tt.want)
		}
		if !hit {
			t.Errorf("%s instead of %s:\n%s\nwant a problem that begins with\n%s", tt.new, tt.old, strings.Join(lines, "\n"), tt.want)
		}
	}
}

// All problems of a file come at once, in the order of its lines.
func TestParseReportsAllProblems(t *testing.T) {
	text := strings.NewReplacer(`unit = "bar"`, `unit = "K"`, `0.251`, `"0.251"`, `[350, 340]`, `[350]`, `key = "mine"`, `key = "mine"
colour = "blue"`).Replace(good)
	text += strings.Replace(good, "109-66-0", "109-66-00", 1) + strings.Replace(good, `"mine"`, `"MINE"`, 1) + strings.Replace(good, `"mine"`, `"mi ne"`, 1)
	ps := problems(t, text)
	var got []string
	last := 0
	for _, p := range ps {
		got = append(got, p.Field)
		if p.Line < last {
			t.Errorf("line %d after line %d", p.Line, last)
		}
		last = p.Line
		if p.Column == 0 {
			t.Errorf("no column: %v", p)
		}
	}
	want := "colour critical_pressure.unit acentric_factor.value vapour_pressure.points[1] cas key"
	if s := strings.Join(got, " "); s != want {
		t.Errorf("problems in %s, want %s\n%v", s, want, ps)
	}
	// Places inside the tables of a second record are its own.
	second := strings.NewReplacer(`"mine"`, `"other"`, `[350, 340]`, `[350, 34]`).Replace(good)
	n := strings.Count(good, "\n")
	if ps := problems(t, good+second); len(ps) != 1 || ps[0].Line != n+27 || ps[0].Fluid != "other" {
		t.Errorf("problem of a second record: %v, want it at line %d", ps, n+27)
	}
	var q *quantity.Error
	if !errors.As(ps, &q) || q.Kind != quantity.WrongDimension {
		t.Errorf("no *quantity.Error inside %v", ps)
	}
	many := problems(t, "[[fluid]]\nkey = \"x\"\n"+strings.Repeat("[[fluid]]\n", 30))
	if n := strings.Count(many.Error(), "\n"); n != 20 || !strings.Contains(many.Error(), "more") {
		t.Errorf("%d lines of error", n)
	}
}

func TestWarnings(t *testing.T) {
	if w := parseOne(t, good).Warnings(); len(w) != 0 {
		t.Errorf("warnings about a good record: %v", w)
	}
	for _, tt := range []struct{ old, new, want string }{
		{"value = 0.251", "value = 0.351", "acentric factor 0.351, but its vapour pressure at 0.7 Tc gives 0.2"},
		{"value = 36.06", "value = 40", "boiling temperature 313.15 K, but its vapour pressure gives 309"},
		{"Tc = 469.7", "Tc = 480", "surface tension vanishes at 480 K"},
	} {
		w := parseOne(t, strings.Replace(good, tt.old, tt.new, 1)).Warnings()
		if len(w) != 1 || !strings.Contains(w[0], tt.want) {
			t.Errorf("%s: warnings %q, want one with %q", tt.new, w, tt.want)
		}
	}
}

func TestJSONIsChecked(t *testing.T) {
	text, err := json.Marshal(struct{ Fluids []*fluid.Record }{[]*fluid.Record{parseOne(t, good)}})
	if err != nil {
		t.Fatal(err)
	}
	for old, field := range map[string]string{
		`"unit":"bar"`: "critical_pressure.unit", `"key":`: "", `"value":0.251`: "acentric_factor.value", `"form":"power-sum"`: "surface_tension.form",
	} {
		bad := bytes.Replace(text, []byte(old), []byte(map[string]string{
			`"unit":"bar"`: `"unit":"K"`, `"key":`: `"kee":`, `"value":0.251`: `"value":251`, `"form":"power-sum"`: `"form":"?"`,
		}[old]), 1)
		if bytes.Equal(bad, text) {
			t.Fatalf("%s is not in %s", old, text)
		}
		var out struct{ Fluids []*fluid.Record }
		err := json.Unmarshal(bad, &out)
		var p *fluid.Problem
		if !errors.As(err, &p) || p.Field != field {
			t.Errorf("without %s: %v; want a problem in %q", old, err, field)
		}
	}
}

// A record of random numbers survives TOML and JSON bit by bit.
func TestRandomRecordsRoundTrip(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		tc := rapid.Float64Range(5, 900).Draw(t, "Tc")
		text := rapid.StringOf(rapid.RuneFrom([]rune(`abc "\'#=é→,[]{}`)))
		quote := func(s string) string { return `"` + strings.NewReplacer(`\`, `\\`, `"`, `\"`).Replace(s) + `"` }
		toml := fmt.Sprintf(`[[fluid]]
key = %s
name = %s
note = %s
molar_mass = {value = %v, unit = "g/mol", source = "x"}
critical_temperature = {value = %v, unit = "K", source = "x"}
critical_pressure = {value = %v, unit = "kPa", source = "x"}
acentric_factor = {value = %v, unit = "1", source = "x"}
surface_tension = {form = "dippr-106", Tc = %v, coefficients = [%v, %v, 0, 0, 0], unit = "mN/m", source = "x"}
`, quote("k"+text.Draw(t, "key")), quote(text.Draw(t, "name")), quote(text.Draw(t, "note")), rapid.Float64Range(2, 1000).Draw(t, "M"), tc,
			rapid.Float64Range(200, 1e5).Draw(t, "Pc"), rapid.Float64Range(-0.4, 1.4).Draw(t, "ω"), tc, rapid.Float64Range(1, 200).Draw(t, "A"), rapid.Float64Range(0.5, 2).Draw(t, "B"))
		rs, err := fluid.Parse(strings.NewReader(toml), "random")
		if err != nil {
			t.Fatalf("%v in\n%s", err, toml)
		}
		roundTrip(t, rs[0])
	})
}

func roundTrip(t interface{ Fatalf(string, ...any) }, r *fluid.Record) {
	text, err := r.MarshalTOML()
	if err != nil {
		t.Fatalf("%v", err)
	}
	again, err := fluid.Parse(bytes.NewReader(text), "again")
	if err != nil || len(again) != 1 || !reflect.DeepEqual(again[0], r) {
		t.Fatalf("TOML gives %+v, %v; want %+v\n%s", again, err, r, text)
	}
	asJSON, err := json.Marshal(r)
	if err != nil {
		t.Fatalf("%v", err)
	}
	var back fluid.Record
	if err := json.Unmarshal(asJSON, &back); err != nil || !reflect.DeepEqual(&back, r) {
		t.Fatalf("JSON gives %+v, %v; want %+v\n%s", back, err, r, asJSON)
	}
}

// No text makes Parse panic; problems have a place; a record that is read can be used,
// written and read again.
func FuzzParse(f *testing.F) {
	f.Add(good)
	f.Add(pentane("wagner-3-6"))
	f.Add(strings.ReplaceAll(good, "fluid.vapour", "fluid.liquid"))
	f.Add("[[fluid]]\nkey.a = [{}, [1, 'x']]\n[fluid.\"a.b\"]\nx = 1\n")
	f.Add("fluid = [{key = 'a'}, 3]\n[fluid]\n")
	f.Fuzz(func(t *testing.T, text string) {
		rs, err := fluid.Parse(strings.NewReader(text), "fuzz")
		if err != nil {
			var ps fluid.Problems
			if !errors.As(err, &ps) || len(ps) == 0 || ps.Error() == "" {
				t.Fatalf("error %v", err)
			}
			return
		}
		l := fluid.NewLibrary(rs...)
		for _, r := range rs {
			roundTrip(t, r)
			r.Warnings()
			if got, err := l.Find(r.Key); err != nil || got.Key != r.Key {
				t.Fatalf("Find(%q) = %v, %v", r.Key, got, err)
			}
			if r.VapourPressure != nil {
				lo, hi := r.VapourPressure.Range()
				for _, T := range []float64{lo, lo + (hi-lo)/3, hi} {
					if p, s, err := r.VapourPressure.At(T); err != nil || !(p > 0) || s != s {
						t.Fatalf("P(%g) = %g, %g, %v", T, p, s, err)
					}
				}
			}
		}
	})
}

func ExampleParse() {
	const file = `[[fluid]]
key = "mystery"
molar_mass = {value = 72.15, unit = "g/mol"}
critical_temperature = {value = 469.7, unit = "kPa", source = "label"}
critical_pressure = {value = 33.7, unit = "bar", source = "label"}
acentric = 0.25
`
	_, err := fluid.Parse(strings.NewReader(file), "mine.toml")
	fmt.Println(err)
	// Output:
	// mine.toml:1:3: mystery: no acentric_factor
	// mine.toml:3:1: mystery: molar_mass: no source
	// mine.toml:4:40: mystery: critical_temperature.unit: unit "kPa": wrong kind of quantity (pressure); expected a temperature in K, Cel or [degF]
	// mine.toml:6:1: mystery: acentric: unknown key "acentric"; did you mean acentric_factor?
}
