package fluid

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"limsup/data/problem"
	"limsup/data/quantity"
	"limsup/eos/tension"
)

// record reads one record; nil after a problem.
func (r *reader) record(path string, v any) *Record {
	before := len(r.problems)
	f, ok := r.table(path, v)
	if !ok {
		return nil
	}
	rec := &Record{Key: f.required("key"), Name: f.text("name"), CAS: f.text("cas"), Formula: f.text("formula"), Hazard: f.text("hazard"), Note: f.text("note")}
	if rec.Key != "" && normal(rec.Key) == "" {
		r.problem(join(path, "key"), "%s has no letter or digit", problem.Quoted(rec.Key))
	}
	if rec.Name == "" {
		rec.Name = rec.Key
	}
	if _, _, ok := f.get("aliases"); ok {
		l, p := f.list("aliases")
		for i, v := range l {
			rec.Aliases = append(rec.Aliases, r.asText(fmt.Sprintf("%s[%d]", p, i), v))
		}
	}
	if c := rec.CAS; c != "" && !validCAS(c) {
		r.problem(join(path, "cas"), "%s is not a CAS registry number: its check digit or its form is wrong", problem.Quoted(c))
	}
	rec.MolarMass = f.value("molar_mass", positive, quantity.MolarMass)
	rec.CriticalTemperature = f.value("critical_temperature", positive, quantity.Temperature)
	rec.CriticalPressure = f.value("critical_pressure", positive, quantity.Pressure)
	rec.AcentricFactor = f.value("acentric_factor", anySign, quantity.Dimensionless)
	rec.BoilingTemperature = f.optional("boiling_temperature", quantity.Temperature)
	rec.TripleTemperature = f.optional("triple_temperature", quantity.Temperature)
	rec.CriticalDensity = f.optional("critical_density", quantity.Density, amountDensity)
	if d := rec.CriticalDensity; d != nil && rec.MolarMass.Value > 0 {
		if factor, err := density(d.Unit, rec.MolarMass.Value); err == nil {
			d.Value = factor(d.Given)
		}
	}
	if len(r.problems) == before {
		r.plausible(path, rec)
	}
	rec.SurfaceTension = f.tension("surface_tension")
	rec.VapourPressure = f.pressure("vapour_pressure", rec)
	rec.LiquidDensity = f.density("liquid_density", "liquid density", rec)
	rec.VapourDensity = f.density("vapour_density", "vapour density", rec)
	f.close()
	if len(r.problems) > before {
		return nil
	}
	return rec
}

type sign bool

const (
	positive sign = true
	anySign  sign = false
)

// value reads {value, unit, source}; it must be there.
func (f *fields) value(key string, s sign, dims ...quantity.Dimension) Value {
	v, path, ok := f.get(key)
	if !ok {
		f.r.problem(f.path, "no %s", key)
		return Value{}
	}
	t, ok := f.r.table(path, v)
	if !ok {
		return Value{}
	}
	defer t.close()
	given, unit, source := t.number("value"), t.required("unit"), t.required("source")
	if math.IsNaN(given) || unit == "" {
		return Value{}
	}
	u, err := quantity.ParseUnit(unit)
	if err != nil {
		f.r.failure(join(path, "unit"), err)
		return Value{}
	}
	d := dims[0]
	if slices.Contains(dims, u.Dimension()) {
		d = u.Dimension()
	}
	out, err := valueIn(given, unit, u, d, source)
	if err != nil {
		at := "value"
		var q *quantity.Error
		if errors.As(err, &q) && q.Kind == quantity.WrongDimension {
			at = "unit"
		}
		f.r.failure(join(path, at), err)
		return Value{}
	}
	if s == positive && !(out.Value > 0) {
		f.r.problem(join(path, "value"), "%g %s is not positive", given, unit)
		return Value{}
	}
	return out
}

// optional is value for a positive quantity that may be left out.
func (f *fields) optional(key string, dims ...quantity.Dimension) *Value {
	if _, _, ok := f.get(key); !ok {
		return nil
	}
	v := f.value(key, positive, dims...)
	if v.Unit == "" {
		return nil
	}
	return &v
}

// plausible refuses constants that no fluid can have.
func (r *reader) plausible(path string, rec *Record) {
	tc := rec.CriticalTemperature.Value
	check := func(key string, ok bool, format string, a ...any) {
		if !ok {
			r.problem(join(path, key)+".value", format, a...)
		}
	}
	ω := rec.AcentricFactor.Value
	check("acentric_factor", ω > -0.5 && ω < 1.5, "acentric factor %.4g, want between -0.5 and 1.5", ω)
	m := rec.MolarMass.Value
	check("molar_mass", m > 1e-3 && m < 2, "%.6g kg/mol, want between 0.001 and 2", m)
	check("critical_temperature", tc > 1 && tc < 5000, "%.6g K, want between 1 and 5000", tc)
	pc := rec.CriticalPressure.Value
	check("critical_pressure", pc > 1e4 && pc < 1e9, "%.6g Pa, want between 1e4 and 1e9", pc)
	if b := rec.BoilingTemperature; b != nil {
		check("boiling_temperature", b.Value < tc, "%.6g K is not below the critical temperature, %.6g K", b.Value, tc)
		check("boiling_temperature", pc > 101325, "a boiling temperature at 101325 Pa, but the critical pressure is %.6g Pa", pc)
	}
	if t := rec.TripleTemperature; t != nil {
		check("triple_temperature", t.Value < tc, "%.6g K is not below the critical temperature, %.6g K", t.Value, tc)
	}
	if d := rec.CriticalDensity; d != nil {
		z := pc * m / (d.Value * 8.314462618 * tc) // Pc/(ρc·R·Tc), 0.23 to 0.38 for known fluids
		check("critical_density", z > 0.15 && z < 0.5, "%.6g kg/m3 gives a critical compressibility factor of %.3g, want between 0.15 and 0.5", d.Value, z)
	}
}

// table reads a table that may be absent; nil then, and after a problem.
func (f *fields) table(key string) *fields {
	v, path, ok := f.get(key)
	if !ok {
		return nil
	}
	t, _ := f.r.table(path, v)
	return t
}

func (f *fields) tension(key string) *Tension {
	t := f.table(key)
	if t == nil {
		return nil
	}
	before := len(f.r.problems)
	out := &Tension{Form: t.form("power-sum", "dippr-106"), CriticalTemperature: t.number("Tc"), Unit: t.required("unit"), Source: t.required("source"), Note: t.text("note")}
	out.Lo, out.Hi = t.interval("range")
	switch out.Form {
	case "power-sum":
		for _, p := range t.pairs("terms") {
			out.Terms = append(out.Terms, tension.Term{Coefficient: p[0], Exponent: p[1]})
		}
	case "dippr-106":
		out.Coefficients = t.numbers("coefficients", 5)
	}
	if out.Form != "" {
		t.close()
	}
	if len(f.r.problems) > before {
		return nil
	}
	fn, err := out.build()
	if err != nil {
		f.r.failure(t.path, err)
		return nil
	}
	if out.Hi > out.CriticalTemperature {
		f.r.problem(join(t.path, "range"), "range ends at %.10g K, above Tc = %.10g K", out.Hi, out.CriticalTemperature)
		return nil
	}
	out.fn = fn
	return out
}

// form reads which form a correlation has; "" after a problem.
func (f *fields) form(known ...string) string {
	s := f.required("form")
	if s == "" || slices.Contains(known, s) {
		return s
	}
	f.r.problem(join(f.path, "form"), "unknown form %s, want %s", problem.Quoted(s), strings.Join(known, " or "))
	return ""
}

// ranged reads the range of a closed form, which must be there.
func (f *fields) ranged() (lo, hi float64) {
	if _, _, ok := f.get("range"); !ok {
		f.r.problem(f.path, "no range")
		return 0, 0
	}
	return f.interval("range")
}

func (f *fields) pressure(key string, rec *Record) *SaturationPressure {
	t := f.table(key)
	if t == nil {
		return nil
	}
	before := len(f.r.problems)
	out := &SaturationPressure{Form: t.form("table", "wagner-2.5-5", "wagner-3-6"), Unit: t.required("unit"), Source: t.required("source"), Note: t.text("note")}
	switch out.Form {
	case "table":
		out.Points = t.pairs("points")
	case "wagner-2.5-5", "wagner-3-6":
		out.Tc, out.Pc, out.Coefficients = t.number("Tc"), t.number("Pc"), t.numbers("coefficients", 4)
		out.Lo, out.Hi = t.ranged()
	}
	if out.Form != "" {
		t.close()
	}
	if len(f.r.problems) > before || !f.r.built(t.path, out.build(rec.Key)) {
		return nil
	}
	return out
}

func (f *fields) density(key, property string, rec *Record) *Density {
	t := f.table(key)
	if t == nil {
		return nil
	}
	before := len(f.r.problems)
	forms := []string{"table", "rackett"}
	if property == "vapour density" {
		forms = forms[:1]
	}
	out := &Density{Form: t.form(forms...), Unit: t.required("unit"), Source: t.required("source"), Note: t.text("note")}
	switch out.Form {
	case "table":
		out.Points = t.pairs("points")
	case "rackett":
		out.Coefficients = t.numbers("coefficients", 4)
		out.Lo, out.Hi = t.ranged()
	}
	if out.Form != "" {
		t.close()
	}
	tc, m := rec.CriticalTemperature.Value, rec.MolarMass.Value
	if len(f.r.problems) > before || tc == 0 || m == 0 { // the latter are problems of their own
		return nil
	}
	if !f.r.built(t.path, out.build(rec.Key, property, tc, m)) {
		return nil
	}
	return out
}

// built reports a failure to build a correlation at its row, if that is known.
func (r *reader) built(path string, err error) bool {
	if err == nil {
		return true
	}
	var p *pointError
	var q *quantity.Error
	switch {
	case errors.As(err, &p):
		path = fmt.Sprintf("%s.points[%d]", path, p.row)
	case errors.As(err, &q):
		path = join(path, "unit")
	}
	r.failure(path, err)
	return false
}

// validCAS checks the form and the check digit of a CAS registry number: the digits
// before the last, weighted 1, 2, 3, ... from the right, modulo 10.
func validCAS(s string) bool {
	parts := strings.Split(s, "-")
	if len(parts) != 3 || len(parts[0]) < 2 || len(parts[0]) > 7 || len(parts[1]) != 2 || len(parts[2]) != 1 {
		return false
	}
	digits := parts[0] + parts[1] + parts[2]
	sum, n := 0, len(digits)
	for i := range n {
		if digits[i] < '0' || digits[i] > '9' {
			return false
		}
		if i < n-1 {
			sum += int(digits[i]-'0') * (n - 1 - i)
		}
	}
	return sum%10 == int(digits[n-1]-'0')
}
