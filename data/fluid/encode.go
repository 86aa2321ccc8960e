package fluid

import (
	"bytes"
	"encoding/json"
	"fmt"
	"io"
	"strconv"
	"strings"
)

// The JSON form has the keys and the order of the TOML form.
type (
	valueJSON struct {
		Value  float64 `json:"value"`
		Unit   string  `json:"unit"`
		Source string  `json:"source"`
	}
	correlationJSON struct {
		Form         string       `json:"form"`
		Tc           float64      `json:"Tc,omitempty"`
		Pc           float64      `json:"Pc,omitempty"`
		Terms        [][2]float64 `json:"terms,omitempty"`
		Coefficients []float64    `json:"coefficients,omitempty"`
		Unit         string       `json:"unit"`
		Range        []float64    `json:"range,omitempty"`
		Source       string       `json:"source"`
		Note         string       `json:"note,omitempty"`
		Points       [][2]float64 `json:"points,omitempty"`
	}
	recordJSON struct {
		Key                 string           `json:"key"`
		Name                string           `json:"name"`
		Aliases             []string         `json:"aliases,omitempty"`
		CAS                 string           `json:"cas,omitempty"`
		Formula             string           `json:"formula,omitempty"`
		Hazard              string           `json:"hazard,omitempty"`
		Note                string           `json:"note,omitempty"`
		MolarMass           *valueJSON       `json:"molar_mass"`
		CriticalTemperature *valueJSON       `json:"critical_temperature"`
		CriticalPressure    *valueJSON       `json:"critical_pressure"`
		AcentricFactor      *valueJSON       `json:"acentric_factor"`
		CriticalDensity     *valueJSON       `json:"critical_density,omitempty"`
		BoilingTemperature  *valueJSON       `json:"boiling_temperature,omitempty"`
		TripleTemperature   *valueJSON       `json:"triple_temperature,omitempty"`
		SurfaceTension      *correlationJSON `json:"surface_tension,omitempty"`
		VapourPressure      *correlationJSON `json:"vapour_pressure,omitempty"`
		LiquidDensity       *correlationJSON `json:"liquid_density,omitempty"`
		VapourDensity       *correlationJSON `json:"vapour_density,omitempty"`
	}
)

func (v *Value) plain() *valueJSON {
	if v == nil {
		return nil
	}
	return &valueJSON{v.Given, v.Unit, v.Source}
}

func interval(lo, hi float64) []float64 {
	if hi == 0 {
		return nil
	}
	return []float64{lo, hi}
}

func (t *Tension) plain() *correlationJSON {
	if t == nil {
		return nil
	}
	c := &correlationJSON{Form: t.Form, Tc: t.CriticalTemperature, Coefficients: t.Coefficients, Unit: t.Unit, Range: interval(t.Lo, t.Hi), Source: t.Source, Note: t.Note}
	for _, k := range t.Terms {
		c.Terms = append(c.Terms, [2]float64{k.Coefficient, k.Exponent})
	}
	return c
}

func (s *SaturationPressure) plain() *correlationJSON {
	if s == nil {
		return nil
	}
	c := &correlationJSON{Form: s.Form, Points: s.Points, Tc: s.Tc, Pc: s.Pc, Coefficients: s.Coefficients, Unit: s.Unit, Source: s.Source, Note: s.Note}
	if s.Form != "table" {
		c.Range = interval(s.Lo, s.Hi)
	}
	return c
}

func (d *Density) plain() *correlationJSON {
	if d == nil {
		return nil
	}
	c := &correlationJSON{Form: d.Form, Points: d.Points, Coefficients: d.Coefficients, Unit: d.Unit, Source: d.Source, Note: d.Note}
	if d.Form != "table" {
		c.Range = interval(d.Lo, d.Hi)
	}
	return c
}

func (r *Record) plain() *recordJSON {
	return &recordJSON{
		Key: r.Key, Name: r.Name, Aliases: r.Aliases, CAS: r.CAS, Formula: r.Formula, Hazard: r.Hazard, Note: r.Note,
		MolarMass: r.MolarMass.plain(), CriticalTemperature: r.CriticalTemperature.plain(), CriticalPressure: r.CriticalPressure.plain(),
		AcentricFactor: r.AcentricFactor.plain(), CriticalDensity: r.CriticalDensity.plain(), BoilingTemperature: r.BoilingTemperature.plain(),
		TripleTemperature: r.TripleTemperature.plain(), SurfaceTension: r.SurfaceTension.plain(), VapourPressure: r.VapourPressure.plain(),
		LiquidDensity: r.LiquidDensity.plain(), VapourDensity: r.VapourDensity.plain(),
	}
}

// MarshalJSON writes the record with its numbers and units as given, so that reading
// it back gives an equal record.
func (r Record) MarshalJSON() ([]byte, error) { return json.Marshal(r.plain()) }

// MarshalTOML returns what WriteTOML writes.
func (r *Record) MarshalTOML() ([]byte, error) {
	var b bytes.Buffer
	err := r.WriteTOML(&b)
	return b.Bytes(), err
}

// WriteTOML writes the record as a [[fluid]] table that Parse reads back as an equal
// record. Same record, same bytes.
func (r *Record) WriteTOML(w io.Writer) error {
	p := r.plain()
	b := &strings.Builder{}
	b.WriteString("[[fluid]]\n")
	line(b, "key", p.Key)
	line(b, "name", p.Name)
	if len(p.Aliases) > 0 {
		quotedAliases := make([]string, len(p.Aliases))
		for i, a := range p.Aliases {
			quotedAliases[i] = tomlString(a)
		}
		fmt.Fprintf(b, "aliases = [%s]\n", strings.Join(quotedAliases, ", "))
	}
	line(b, "cas", p.CAS)
	line(b, "formula", p.Formula)
	line(b, "hazard", p.Hazard)
	line(b, "note", p.Note)
	for _, v := range []struct {
		key string
		v   *valueJSON
	}{
		{"molar_mass", p.MolarMass}, {"critical_temperature", p.CriticalTemperature}, {"critical_pressure", p.CriticalPressure},
		{"acentric_factor", p.AcentricFactor}, {"critical_density", p.CriticalDensity}, {"boiling_temperature", p.BoilingTemperature},
		{"triple_temperature", p.TripleTemperature},
	} {
		if v.v != nil {
			fmt.Fprintf(b, "%s = {value = %s, unit = %s, source = %s}\n", v.key, number(v.v.Value), tomlString(v.v.Unit), tomlString(v.v.Source))
		}
	}
	for _, c := range []struct {
		key string
		c   *correlationJSON
	}{
		{"surface_tension", p.SurfaceTension}, {"vapour_pressure", p.VapourPressure}, {"liquid_density", p.LiquidDensity}, {"vapour_density", p.VapourDensity},
	} {
		if c.c != nil {
			c.c.writeTOML(b, c.key)
		}
	}
	_, err := io.WriteString(w, b.String())
	return err
}

func (c *correlationJSON) writeTOML(b *strings.Builder, key string) {
	fmt.Fprintf(b, "\n[fluid.%s]\n", key)
	line(b, "form", c.Form)
	if c.Tc != 0 {
		fmt.Fprintf(b, "Tc = %s\n", number(c.Tc))
	}
	if c.Pc != 0 {
		fmt.Fprintf(b, "Pc = %s\n", number(c.Pc))
	}
	if c.Terms != nil {
		fmt.Fprintf(b, "terms = [%s]\n", strings.Join(rows(c.Terms), ", "))
	}
	if c.Coefficients != nil {
		fmt.Fprintf(b, "coefficients = [%s]\n", numbers(c.Coefficients))
	}
	line(b, "unit", c.Unit)
	if c.Range != nil {
		fmt.Fprintf(b, "range = [%s]\n", numbers(c.Range))
	}
	line(b, "source", c.Source)
	line(b, "note", c.Note)
	if c.Points != nil {
		fmt.Fprintf(b, "points = [\n  %s,\n]\n", strings.Join(rows(c.Points), ",\n  "))
	}
}

// line writes a key with its text unless that is empty.
func line(b *strings.Builder, key, text string) {
	if text != "" {
		fmt.Fprintf(b, "%s = %s\n", key, tomlString(text))
	}
}

// number is the shortest text that reads back as v.
func number(v float64) string { return strconv.FormatFloat(v, 'g', -1, 64) }

func numbers(v []float64) string {
	s := make([]string, len(v))
	for i, x := range v {
		s[i] = number(x)
	}
	return strings.Join(s, ", ")
}

func rows(v [][2]float64) []string {
	s := make([]string, len(v))
	for i, p := range v {
		s[i] = "[" + numbers(p[:]) + "]"
	}
	return s
}

// tomlString is s as a TOML basic string.
func tomlString(s string) string {
	var b strings.Builder
	b.WriteByte('"')
	for _, c := range s {
		switch {
		case c == '"' || c == '\\':
			b.WriteByte('\\')
			b.WriteRune(c)
		case c < ' ' || c == 0x7f:
			fmt.Fprintf(&b, `\u%04X`, c)
		default:
			b.WriteRune(c)
		}
	}
	b.WriteByte('"')
	return b.String()
}
