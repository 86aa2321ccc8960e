package eos

import (
	"encoding/csv"
	"flag"
	"fmt"
	"math"
	"os"
	"strconv"
	"testing"

	"gonum.org/v1/gonum/diff/fd"
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

const eps = 0x1p-52

// pentane has rounded constants of n-pentane: examples and states, no reference.
var pentane = Substance{Name: "n-pentane", CriticalT: 469.7, CriticalP: 3.3675e6, Acentric: 0.251, MolarMass: 0.07215}

func untuned(t testing.TB, equation string, s Substance) Model {
	t.Helper()
	m, err := Untuned(equation, s)
	if err != nil {
		t.Fatal(err)
	}
	return m
}

// tuned is a model of every equation away from its published form.
func tunedModels(t testing.TB) []Model {
	t.Helper()
	var all []Model
	for _, e := range Equations() {
		m, err := NewModel(e, pentane, e.Untuned())
		if err != nil {
			t.Fatal(err)
		}
		u := Tuning{Attraction: 1.1, Covolume: 0.9, Slope: 0.8}
		m2, err := NewModel(e, pentane, u)
		if err != nil {
			t.Fatal(err)
		}
		m2.Equation += " tuned"
		all = append(all, m, m2)
	}
	return all
}

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
func within(t testing.TB, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s = %.17g, want %.17g ± %.2g (off by %.2g)", what, got, want, tol, math.Abs(got-want))
	}
}

// fivePoint is the central difference of fourth order: its error is
// h⁴f⁽⁵⁾/30 + 1.5ε|f|/h.
var fivePoint = fd.Formula{
	Stencil:    []fd.Point{{Loc: -2, Coeff: 1. / 12}, {Loc: -1, Coeff: -2. / 3}, {Loc: 1, Coeff: 2. / 3}, {Loc: 2, Coeff: -1. / 12}},
	Derivative: 1,
	Step:       1e-3,
}

func slope(f func(float64) float64, x, h float64) float64 {
	return fd.Derivative(f, x, &fd.Settings{Formula: fivePoint, Step: h})
}

// csvTable reads a file of testdata with its header into one map a row.
func csvTable(t testing.TB, name string) []map[string]string {
	t.Helper()
	file, err := os.Open("testdata/" + name)
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	rows, err := csv.NewReader(file).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var out []map[string]string
	for _, r := range rows[1:] {
		m := map[string]string{}
		for i, h := range rows[0] {
			m[h] = r[i]
		}
		out = append(out, m)
	}
	return out
}

func number(t testing.TB, s string) float64 {
	t.Helper()
	v, err := strconv.ParseFloat(s, 64)
	if err != nil {
		t.Fatal(err)
	}
	return v
}

// substances are the fluids of testdata/constants.csv.
func substances(t testing.TB) map[string]Substance {
	t.Helper()
	out := map[string]Substance{}
	for _, r := range csvTable(t, "constants.csv") {
		out[r["fluid"]] = Substance{
			Name:      r["fluid"],
			CriticalT: number(t, r["Tc_K"]),
			CriticalP: 1e3 * number(t, r["Pc_kPa"]),
			Acentric:  number(t, r["acentric"]),
			MolarMass: 1e-3 * number(t, r["molar_mass_g_mol"]),
		}
	}
	return out
}
