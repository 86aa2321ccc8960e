package nucleation

import (
	"encoding/csv"
	"flag"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"reflect"
	"strconv"
	"testing"

	"limsup/eos"
	"limsup/eos/tension"
)

// TestMain gives the property tests a fixed seed; -rapid.seed=N changes it.
func TestMain(m *testing.M) {
	flag.Parse()
	if f := flag.Lookup("rapid.seed"); f != nil && f.Value.String() == "0" {
		if err := f.Value.Set("1"); err != nil {
			fmt.Fprintln(os.Stderr, err)
			os.Exit(1)
		}
	}
	os.Exit(m.Run())
}

const atmosphere = 101325 // Pa, exact

// table reads a CSV file of testdata; each row maps its header to its cells.
func table(t tb, name string) []map[string]string {
	t.Helper()
	f, err := os.Open(filepath.Join("testdata", name))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	all, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var rows []map[string]string
	for _, cells := range all[1:] {
		row := map[string]string{}
		for i, c := range cells {
			row[all[0][i]] = c
		}
		rows = append(rows, row)
	}
	if len(rows) == 0 {
		t.Fatalf("%s has no rows", name)
	}
	return rows
}

// number is a cell as a number; a blank one is zero.
func number(t tb, cell string) float64 {
	t.Helper()
	if cell == "" {
		return 0
	}
	v, err := strconv.ParseFloat(cell, 64)
	if err != nil {
		t.Fatal(err)
	}
	return v
}

// record is a fluid of testdata/fluids.csv.
type record struct {
	eos.Substance
	tension tension.Func
}

// records are the fluids of testdata/fluids.csv in their order, and by name.
func records(t tb) (all []record, byName map[string]record) {
	t.Helper()
	byName = map[string]record{}
	for _, row := range table(t, "fluids.csv") {
		x := func(name string) float64 { return number(t, row[name]) }
		var terms []tension.Term
		for _, i := range []string{"0", "1", "2"} {
			if s := x("s" + i + "/(N/m)"); s != 0 {
				terms = append(terms, tension.Term{Coefficient: s, Exponent: x("n" + i)})
			}
		}
		fit, err := tension.NewPowerSum(x("tension_Tc/K"), terms...)
		if err != nil {
			t.Fatal(err)
		}
		r := record{
			eos.Substance{
				Name: row["fluid"], MolarMass: 1e-3 * x("molar_mass/(g/mol)"),
				CriticalT: x("critical_temperature/K"), CriticalP: 1e3 * x("critical_pressure/kPa"), Acentric: x("acentric"),
			},
			fit,
		}
		all = append(all, r)
		byName[r.Name] = r
	}
	return all, byName
}

func named(t tb, name string) record {
	t.Helper()
	_, by := records(t)
	r, ok := by[name]
	if !ok {
		t.Fatalf("no fluid %s in fluids.csv", name)
	}
	return r
}

// untuned is a fluid under the published equation; c holds the options.
func untuned(t tb, equation string, r record, c Config) *Fluid {
	t.Helper()
	m, err := eos.Untuned(equation, r.Substance)
	if err != nil {
		t.Fatal(err)
	}
	c.Model, c.MolarMass = m, r.MolarMass
	if c.Tension == nil {
		c.Tension = r.tension
	}
	f, err := New(c)
	if err != nil {
		t.Fatal(err)
	}
	return f
}

// variant is one way of computing the flux.
type variant struct {
	name string
	set  func(t tb, r record, c *Config)
}

// variants differ in one option each from the first.
var variants = []variant{
	{"exact", func(tb, record, *Config) {}},
	{"poynting", func(_ tb, _ record, c *Config) { c.EmbryoPressure = Poynting }},
	{"chemical", func(_ tb, _ record, c *Config) { c.Kinetics = Chemical }},
	{"stepwise", func(_ tb, _ record, c *Config) { c.Kinetics = Stepwise }},
	{"parachor", func(t tb, r record, c *Config) {
		T := 0.7 * min(r.CriticalT, c.Model.Tc)
		σ, _, err := r.tension.Sigma(T)
		if err != nil {
			t.Fatal(err)
		}
		p, err := tension.NewParachor(c.Model, T, σ)
		if err != nil {
			t.Fatal(err)
		}
		c.Tension = p
	}},
	{"correlation", func(_ tb, r record, c *Config) { c.Correlations = textbook{r.Substance} }},
	{"correlation stepwise", func(_ tb, r record, c *Config) {
		c.Correlations, c.Kinetics = textbook{r.Substance}, Stepwise
	}},
}

// textbook are correlations of corresponding states with simple slopes: the vapour pressure
// ln(P/Pc) = h(1 − Tc/T), h = (7/3)ln10·(1+ω), through the definition of the acentric factor, and
// the volume v = v_c·z^((1−Tr)^(2/7)) of H. G. Rackett (1970) with z = 0.29056 − 0.08775ω
// (T. Yamada and R. D. Gunn, 1973; both from memory). What they serve here needs no accuracy.
type textbook struct{ eos.Substance }

func (s textbook) VapourPressure(T float64) (p, slope float64, err error) {
	h := 7. / 3 * math.Ln10 * (1 + s.Acentric)
	return s.CriticalP * math.Exp(h*(1-s.CriticalT/T)), h * s.CriticalT / (T * T), nil
}

func (s textbook) LiquidVolume(T float64) (v, slope float64, err error) {
	z := 0.29056 - 0.08775*s.Acentric
	θ := 1 - T/s.CriticalT
	v = z * eos.GasConstant * s.CriticalT / s.CriticalP * math.Exp(math.Log(z)*math.Pow(θ, 2./7))
	return v, -math.Log(z) * 2. / 7 * math.Pow(θ, -5./7) / s.CriticalT, nil
}

func (s textbook) Range() (lo, hi float64) { return 0.4 * s.CriticalT, 0.98 * s.CriticalT }

// deviation is |a/b − 1|, or |a − b| for b = 0; it is +Inf when either is not finite.
func deviation(a, b float64) float64 {
	if math.IsNaN(a) || math.IsInf(a, 0) || math.IsNaN(b) || math.IsInf(b, 0) {
		return math.Inf(1)
	}
	if b == 0 {
		return math.Abs(a)
	}
	return math.Abs(a/b - 1)
}

// within reports an error unless |got − want| ≤ tol.
func within(t tb, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s = %.17g, want %.17g ± %.2g (off by %.2g)", what, got, want, tol, math.Abs(got-want))
	}
}

// unusable names the first field of a struct that is NaN or infinite, or "".
func unusable(v any) string { return walk(reflect.TypeOf(v).Name(), reflect.ValueOf(v)) }

func walk(name string, v reflect.Value) string {
	switch v.Kind() {
	case reflect.Float64:
		if x := v.Float(); math.IsNaN(x) || math.IsInf(x, 0) {
			return fmt.Sprintf("%s = %g", name, x)
		}
	case reflect.Struct:
		for i := range v.NumField() {
			if s := walk(name+"."+v.Type().Field(i).Name, v.Field(i)); s != "" {
				return s
			}
		}
	case reflect.Array, reflect.Slice:
		for i := range v.Len() {
			if s := walk(fmt.Sprintf("%s[%d]", name, i), v.Index(i)); s != "" {
				return s
			}
		}
	}
	return ""
}

// fivePoint is the central difference of fourth order, with an error of h⁴f⁗′/30.
func fivePoint(f func(x float64) float64, x, h float64) float64 {
	return (8*(f(x+h)-f(x-h)) - (f(x+2*h) - f(x-2*h))) / (12 * h)
}

// variantOf is a fluid under the published equation and a variant.
func variantOf(t tb, equation string, r record, v variant) *Fluid {
	t.Helper()
	m, err := eos.Untuned(equation, r.Substance)
	if err != nil {
		t.Fatal(err)
	}
	c := Config{Model: m, MolarMass: r.MolarMass, Tension: r.tension}
	v.set(t, r, &c)
	f, err := New(c)
	if err != nil {
		t.Fatal(err)
	}
	return f
}

// tb is what tests, benchmarks and properties have in common.
type tb interface {
	Helper()
	Errorf(format string, args ...any)
	Fatal(args ...any)
	Fatalf(format string, args ...any)
	Logf(format string, args ...any)
}
