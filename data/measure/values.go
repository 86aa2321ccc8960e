package measure

import (
	"fmt"
	"math"
	"strings"

	"limsup/data/problem"
	"limsup/data/quantity"
)

// row reads the known columns of a record with trimmed fields; what it cannot read it reports.
func (a *assembler) row(fields []string, at func(int) position) Row {
	start := at(0)
	r := Row{File: a.info.Name, Line: start.line, Where: start.where}
	text := func(c int) string {
		if i := a.layout.field[c]; i >= 0 {
			return a.keep(fields[i])
		}
		return ""
	}
	r.Fluid = text(fluidColumn)
	r.Key = a.fluid(r.Fluid, at)
	r.Method, r.Batch = text(methodColumn), text(batchColumn)
	r.Source, r.Provenance, r.Note = text(sourceColumn), text(provenanceColumn), text(noteColumn)
	r.Observed = Observed(a.choice(observedColumn, text(observedColumn), observedWords(), at))
	r.Outcome = Outcome(a.choice(outcomeColumn, text(outcomeColumn), outcomeWords(), at))

	r.Temperature = a.temperature(fields, at)
	r.Pressure = a.pressure(fields, at)
	const reading = "a value above 0, or an empty field if the uncertainty is not known"
	r.UTemperature, r.HasUTemperature = a.positive(uTemperatureColumn, fields, at, "a standard uncertainty of 0 claims a perfect reading", reading)
	r.UPressure, r.HasUPressure = a.positive(uPressureColumn, fields, at, "a standard uncertainty of 0 claims a perfect reading", reading)
	r.Volume = a.volume(fields, at)
	const absent = "a value above 0, or an empty field if it is not known"
	r.HeatingRate, _ = a.positive(heatingRateColumn, fields, at, "a heating rate of 0", absent)
	r.HoldingTime, _ = a.positive(holdingTimeColumn, fields, at, "a holding time of 0", absent)
	r.Lifetime, _ = a.positive(lifetimeColumn, fields, at, "a lifetime of 0", absent)
	r.Flux, _ = a.positive(fluxColumn, fields, at, "a flux of 0", absent)
	a.conditions(fields, at)
	return r
}

// fluid resolves the name of the fluid, once per name.
func (a *assembler) fluid(name string, at func(int) position) (key string) {
	i := a.layout.field[fluidColumn]
	if i < 0 || a.spoilt[fluidColumn] {
		return ""
	}
	if name == "" {
		a.fail(at(i), a.layout.header[fluidColumn], "empty", "the name of a fluid", nil)
		return ""
	}
	if a.options.KnownFluid == nil {
		return name
	}
	v, ok := a.fluids[name]
	if !ok {
		v.key, v.err = a.options.KnownFluid(name)
		a.fluids[name] = v
	}
	if v.err != nil {
		a.fail(at(i), a.layout.header[fluidColumn], v.err.Error(), "", v.err)
	}
	return v.key
}

// choice returns the index of a word; an empty field is the first.
func (a *assembler) choice(c int, text string, words []string, at func(int) position) int {
	if text == "" {
		return 0
	}
	for i, w := range words {
		if text == w {
			return i
		}
	}
	a.fail(at(a.layout.field[c]), a.layout.header[c], problem.Quoted(text)+" unknown", strings.Join(words, " or "), nil)
	return 0
}

// number reads the number in column c; ok is false if the column cannot be used or its field is empty
// or wrong, the last reported.
func (a *assembler) number(c int, fields []string, at func(int) position) (v float64, ok bool) {
	i := a.layout.field[c]
	if i < 0 || !a.layout.usable[c] || a.spoilt[c] {
		return 0, false
	}
	if fields[i] == "" {
		if c < required {
			a.fail(at(i), a.layout.header[c], "empty", "a number", nil)
		}
		return 0, false
	}
	v, err := quantity.ParseNumber(fields[i])
	if err != nil {
		a.cause(at(i), a.layout.header[c], err)
		return 0, false
	}
	return v, true
}

func (a *assembler) temperature(fields []string, at func(int) position) float64 {
	v, ok := a.number(temperatureColumn, fields, at)
	if !ok {
		return 0
	}
	u := a.layout.unit[temperatureColumn]
	T := u.ToSI(v)
	if T <= 0 {
		expected := "a temperature above absolute zero"
		if u.String() == "K" {
			expected += " (is the column in Cel?)"
		}
		a.fail(at(a.layout.field[temperatureColumn]), a.layout.header[temperatureColumn], fmt.Sprintf("%g %s is not above 0 K", v, u), expected, nil)
		return 0
	}
	return a.finite(temperatureColumn, T, fields, at)
}

func (a *assembler) pressure(fields []string, at func(int) position) float64 {
	v, ok := a.number(pressureColumn, fields, at)
	if !ok {
		return 0
	}
	u := a.layout.unit[pressureColumn]
	if v == 0 {
		a.fail(at(a.layout.field[pressureColumn]), a.layout.header[pressureColumn], "a pressure of 0 looks like a gauge reading",
			fmt.Sprintf("the absolute pressure (an open vessel has about %.6g %s)", u.FromSI(101325), u), nil)
		return 0
	}
	return a.finite(pressureColumn, u.ToSI(v), fields, at)
}

// finite returns the SI value v of a nonzero field, or reports that it left the range of numbers.
func (a *assembler) finite(c int, v float64, fields []string, at func(int) position) float64 {
	if math.IsInf(v, 0) || v == 0 {
		i := a.layout.field[c]
		a.fail(at(i), a.layout.header[c], problem.Quoted(fields[i])+" is out of range in "+a.layout.unit[c].Dimension().SI(), "", nil)
		return 0
	}
	return v
}

// positive reads a difference or magnitude that must be above 0; zero says what a written 0 would mean.
func (a *assembler) positive(c int, fields []string, at func(int) position, zero, expected string) (v float64, ok bool) {
	v, ok = a.number(c, fields, at)
	if !ok {
		return 0, false
	}
	i := a.layout.field[c]
	switch {
	case v == 0:
		a.fail(at(i), a.layout.header[c], zero, expected, nil)
		return 0, false
	case v < 0:
		a.fail(at(i), a.layout.header[c], problem.Quoted(fields[i])+" is negative", expected, nil)
		return 0, false
	}
	v = a.finite(c, a.layout.unit[c].DifferenceToSI(v), fields, at)
	return v, v > 0
}

// volume reads volume and diameter d, V = πd³/6.
func (a *assembler) volume(fields []string, at func(int) position) float64 {
	const expected = "a value above 0, or an empty field if it is not known"
	V, hasV := a.positive(volumeColumn, fields, at, "a volume of 0", expected)
	d, hasD := a.positive(diameterColumn, fields, at, "a diameter of 0", expected)
	if !hasD {
		return V
	}
	sphere := a.finite(diameterColumn, math.Pi/6*d*d*d, fields, at)
	if hasV && sphere > 0 && math.Abs(V-sphere) > 0.01*sphere {
		u := a.layout.unit[volumeColumn]
		a.fail(at(a.layout.field[volumeColumn]), a.layout.header[volumeColumn],
			fmt.Sprintf("volume %s %s disagrees with diameter %s %s", fields[a.layout.field[volumeColumn]], u,
				fields[a.layout.field[diameterColumn]], a.layout.unit[diameterColumn]),
			fmt.Sprintf("%.4g %s within 1 %% (a sphere), or one of the two empty", u.FromSI(sphere), u), nil)
	}
	if hasV {
		return V
	}
	return sphere
}

// conditions checks that the row states its flux in one way, with the volume that needs.
func (a *assembler) conditions(fields []string, at func(int) position) {
	filled := func(c int) bool { i := a.layout.field[c]; return i >= 0 && fields[i] != "" }
	var places [4]int // on the stack: this runs for every row
	given := places[:0]
	for _, c := range [...]int{heatingRateColumn, holdingTimeColumn, lifetimeColumn, fluxColumn} {
		if filled(c) {
			given = append(given, c)
		}
	}
	if len(given) > 1 {
		known := columns()
		var names []string
		for _, c := range given {
			names = append(names, known[c].name)
		}
		c := given[1]
		a.fail(at(a.layout.field[c]), a.layout.header[c], "row has "+strings.Join(names, " and "),
			"at most one of heating_rate, holding_time, lifetime and flux, since each sets the flux", nil)
	}
	if len(given) == 1 && given[0] != fluxColumn && !filled(volumeColumn) && !filled(diameterColumn) {
		c := given[0]
		a.fail(at(a.layout.field[c]), a.layout.header[c], columns()[c].name+" without the size of the liquid",
			"a volume or diameter in the same row", nil)
	}
}
