// Command build writes the built-in fluid library from a directory of reference
// tables:
//
//	go run ./data/fluid/internal/build -reference DIR -out data/fluid/library
//
// DIR holds constants.csv, surface_tension.csv, vapour_pressure.csv,
// liquid_density.csv, vapour_density.csv, water-iapws.csv and sources.csv; each fluid of
// constants.csv that is not held out becomes one file. The same tables give the same
// bytes. Names, hazards and remarks are in names.go.
//
// Changes on the way: the form of Somayajulu becomes a power sum with the exponents
// 1.25, 2.25 and 3.25; water takes its saturation table from the finer water-iapws.csv.
// No number is rounded or fitted.
package main

import (
	"bytes"
	"errors"
	"flag"
	"fmt"
	"os"
	"path/filepath"
	"regexp"
	"slices"
	"strconv"
	"strings"

	"limsup/data/fluid"
	"limsup/data/quantity"
	"limsup/eos/tension"
)

func main() {
	reference := flag.String("reference", "", "`directory` of the reference tables")
	out := flag.String("out", "", "`directory` to write the records to")
	flag.Parse()
	if err := run(*reference, *out); err != nil {
		fmt.Fprintln(os.Stderr, err)
		os.Exit(1)
	}
}

func run(reference, out string) error {
	records, err := build(reference)
	if err != nil {
		return err
	}
	for _, r := range records {
		text, err := file(r)
		if err != nil {
			return err
		}
		if err := os.WriteFile(filepath.Join(out, fileName(r.Key)), text, 0o666); err != nil {
			return err
		}
	}
	return nil
}

const header = `# %s
# Values: see the source beside each; carriers and their licences: ../../NOTICE.md.
# Name and aliases: from memory. Hazard: common practice, not a safety data sheet.
`

// file is the text of a record's file, checked to read back.
func file(r *fluid.Record) ([]byte, error) {
	var b bytes.Buffer
	fmt.Fprintf(&b, header, r.Name)
	if err := r.WriteTOML(&b); err != nil {
		return nil, err
	}
	if _, err := fluid.Parse(bytes.NewReader(b.Bytes()), r.Key); err != nil {
		return nil, err
	}
	return b.Bytes(), nil
}

// fileName is a name that every file system takes.
func fileName(key string) string {
	return strings.Map(func(c rune) rune {
		if c >= 'a' && c <= 'z' || c >= '0' && c <= '9' {
			return c
		}
		return '-'
	}, strings.TrimSuffix(key, ")")) + ".toml"
}

// tables are the reference tables, rows by key.
type tables struct {
	cite                                       citations
	constants                                  []map[string]string
	tension, pressure, liquid, vapour, iapws95 map[string][]map[string]string
}

func build(dir string) ([]*fluid.Record, error) {
	var t tables
	var errs [7]error
	t.cite, errs[0] = readCitations(dir)
	t.constants, errs[1] = rows(dir, "constants.csv")
	t.tension, errs[2] = byKey(dir, "surface_tension.csv")
	t.pressure, errs[3] = byKey(dir, "vapour_pressure.csv")
	t.liquid, errs[4] = byKey(dir, "liquid_density.csv")
	t.vapour, errs[5] = byKey(dir, "vapour_density.csv")
	t.iapws95, errs[6] = byKey(dir, "water-iapws.csv")
	if err := errors.Join(errs[:]...); err != nil {
		return nil, err
	}
	var out []*fluid.Record
	for _, row := range t.constants {
		if slices.Contains(heldOut(), row["key"]) {
			continue
		}
		r, err := t.record(row)
		if err != nil {
			return nil, fmt.Errorf("%s: %w", row["key"], err)
		}
		out = append(out, r)
	}
	return out, nil
}

func byKey(dir, name string) (map[string][]map[string]string, error) {
	rs, err := rows(dir, name)
	if err != nil {
		return nil, err
	}
	out := map[string][]map[string]string{}
	for _, r := range rs {
		out[r["key"]] = append(out[r["key"]], r)
	}
	return out, nil
}

func (t *tables) record(row map[string]string) (*fluid.Record, error) {
	key := row["key"]
	e, ok := entries()[key]
	if !ok {
		return nil, errors.New("no entry in names.go")
	}
	critical, err := t.cite.expand(row["source_critical"])
	if err != nil {
		return nil, err
	}
	ω, err := t.cite.expand(row["source_acentric"])
	if err != nil {
		return nil, err
	}
	boiling, err := t.boilingSource(key)
	if err != nil {
		return nil, err
	}
	molar := critical
	if !strings.HasPrefix(row["source_critical"], "CoolProp") {
		molar = "identifiers of " + chemicals
	}
	r := &fluid.Record{Key: key, Name: e.name, CAS: row["cas"], Formula: hill(row["formula"]), Hazard: e.hazard, Note: e.note}
	for _, a := range e.aliases {
		if a != key && a != e.name && !slices.Contains(r.Aliases, a) {
			r.Aliases = append(r.Aliases, a)
		}
	}
	p := &parser{}
	r.MolarMass = *p.value(row["molar_mass_g_mol"], "g/mol", quantity.MolarMass, molar)
	r.CriticalTemperature = *p.value(row["Tc_K"], "K", quantity.Temperature, critical)
	r.CriticalPressure = *p.value(row["Pc_kPa"], "kPa", quantity.Pressure, critical)
	r.AcentricFactor = *p.value(row["acentric"], "1", quantity.Dimensionless, ω)
	r.CriticalDensity = p.value(row["rhoc_mol_m3"], "mol/m3", quantity.Amount-quantity.Volume, critical)
	r.BoilingTemperature = p.value(row["Tb_K"], "K", quantity.Temperature, boiling)
	if row["Ttriple_K"] != "" {
		source, err := t.cite.expand(row["source_Ttriple"])
		if err != nil {
			return nil, err
		}
		r.TripleTemperature = p.value(row["Ttriple_K"], "K", quantity.Temperature, source)
	}
	if p.err != nil {
		return nil, p.err
	}
	if r.SurfaceTension, err = t.surfaceTension(key); err != nil {
		return nil, err
	}
	return r, t.saturation(r)
}

// element is a symbol with its count in a sum formula.
var element = regexp.MustCompile(`[A-Z][a-z]?[0-9]*`)

// hill puts a sum formula with carbon into Hill order: C, H, then the rest by alphabet.
func hill(formula string) string {
	parts := element.FindAllString(formula, -1)
	symbol := func(s string) string { return strings.TrimRight(s, "0123456789") }
	if !slices.ContainsFunc(parts, func(s string) bool { return symbol(s) == "C" }) {
		return formula
	}
	rank := func(s string) string {
		switch s = symbol(s); s {
		case "C":
			return "0"
		case "H":
			return "1"
		}
		return s
	}
	slices.SortStableFunc(parts, func(a, b string) int { return strings.Compare(rank(a), rank(b)) })
	return strings.Join(parts, "")
}

func (t *tables) boilingSource(key string) (string, error) {
	const computed = "temperature at which the vapour pressure is 101.325 kPa by "
	if key == "cyclopropane" {
		return computed + "Wagner 3-6 (McGarry 1983), by way of " + chemicals, nil
	}
	source, err := t.cite.expand(t.pressure[key][0]["source"])
	return computed + source, err
}

// parser keeps the first error of a series of conversions.
type parser struct{ err error }

func (p *parser) number(s string) float64 {
	v, err := strconv.ParseFloat(s, 64)
	if err != nil && p.err == nil {
		p.err = err
	}
	return v
}

// value is nil for an empty cell.
func (p *parser) value(s, unit string, d quantity.Dimension, source string) *fluid.Value {
	if s == "" {
		return nil
	}
	v, err := fluid.NewValue(p.number(s), unit, d, source)
	if err != nil && p.err == nil {
		p.err = err
	}
	return &v
}

func (t *tables) surfaceTension(key string) (*fluid.Tension, error) {
	if len(t.tension[key]) == 0 {
		return nil, nil
	}
	row := t.tension[key][0]
	source, err := t.cite.expand(row["source"])
	if err != nil {
		return nil, err
	}
	p := &parser{}
	out := &fluid.Tension{Form: "power-sum", CriticalTemperature: p.number(row["Tc_K"]), Unit: "N/m", Source: source}
	var notes []string
	const tabled = "the range is melting point to Tc as tabled, not that of the measurements"
	switch row["form"] {
	case "mulero-cachadina":
		for _, i := range []string{"0", "1", "2"} {
			if row["s"+i] != "" {
				out.Terms = append(out.Terms, tension.Term{Coefficient: p.number(row["s"+i]), Exponent: p.number(row["n"+i])})
			}
		}
	case "somayajulu":
		out.Unit = "mN/m"
		for i, c := range []string{"A", "B", "C"} {
			out.Terms = append(out.Terms, tension.Term{Coefficient: p.number(row[c]), Exponent: float64(i) + 1.25})
		}
		notes = append(notes, tabled)
	case "eq106":
		out.Form = "dippr-106"
		for _, c := range []string{"A", "B", "C", "D", "E"} {
			out.Coefficients = append(out.Coefficients, p.number(row[c]))
		}
		notes = append(notes, tabled)
	default:
		return nil, fmt.Errorf("surface tension form %q", row["form"])
	}
	if row["Tmax_K"] == "" {
		notes = append(notes, "no range known")
	} else {
		out.Lo, out.Hi = p.number(row["Tmin_K"]), p.number(row["Tmax_K"])
		if tr := out.Hi / out.CriticalTemperature; tr < 0.85 {
			notes = append(notes, fmt.Sprintf("the range ends at Tr %.2f, below superheat limits: extrapolated there", tr))
		}
	}
	if p.err != nil {
		return nil, p.err
	}
	if n := tensionNotes()[key]; n != "" {
		notes = append(notes, n)
	}
	if out.Form == "power-sum" && out.Unit == "N/m" {
		f, err := tension.NewPowerSum(out.CriticalTemperature, out.Terms...)
		if err != nil {
			return nil, err
		}
		if gap := out.CriticalTemperature - f.PositiveBelow(); gap > 0 {
			notes = append(notes, fmt.Sprintf("not positive within %.2g K of its Tc", gap))
		}
	}
	out.Note = strings.Join(notes, "; ")
	return out, nil
}

// saturation fills in the tables of vapour pressure and densities.
func (t *tables) saturation(r *fluid.Record) error {
	pressure, liquid, vapour := t.pressure[r.Key], t.liquid[r.Key], t.vapour[r.Key]
	column := [3]string{"P_kPa", "rho_kg_m3", "rho_kg_m3"}
	unit, source := "kPa", func(rs []map[string]string) (string, error) { return t.cite.expand(rs[0]["source"]) }
	if r.Key == "water" {
		all := t.iapws95[""]
		pressure, liquid, vapour = all, all, all
		column = [3]string{"Psat_MPa", "rhoL_kg_m3", "rhoV_kg_m3"}
		unit, source = "MPa", func([]map[string]string) (string, error) {
			return "IAPWS-95: " + t.cite["Wagner-JPCRD-2002"] + "; computed with python3-iapws 1.5.2", nil
		}
	}
	p := &parser{}
	points := func(rs []map[string]string, column string) (out [][2]float64) {
		for _, row := range rs {
			out = append(out, [2]float64{p.number(row["T_K"]), p.number(row[column])})
		}
		return out
	}
	for i, rs := range [][]map[string]string{pressure, liquid, vapour} {
		if len(rs) == 0 {
			continue
		}
		s, err := source(rs)
		if err != nil {
			return err
		}
		pts := points(rs, column[i])
		switch i {
		case 0:
			r.VapourPressure = &fluid.SaturationPressure{Form: "table", Points: pts, Unit: unit, Source: s}
		case 1:
			r.LiquidDensity = &fluid.Density{Form: "table", Points: pts, Unit: "kg/m3", Source: s}
		default:
			r.VapourDensity = &fluid.Density{Form: "table", Points: pts, Unit: "kg/m3", Source: s}
		}
	}
	return p.err
}
