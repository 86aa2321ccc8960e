package measure

import (
	"fmt"
	"strings"

	"limsup/data/problem"
	"limsup/data/quantity"
)

// The columns the reader knows.
const (
	fluidColumn = iota
	temperatureColumn
	pressureColumn
	uTemperatureColumn
	uPressureColumn
	methodColumn
	batchColumn
	diameterColumn
	volumeColumn
	heatingRateColumn
	holdingTimeColumn
	lifetimeColumn
	fluxColumn
	observedColumn
	outcomeColumn
	sourceColumn
	provenanceColumn
	noteColumn
	columnCount
)

// required columns come first.
const required = pressureColumn + 1

// column describes a known column: header is an example with its unit, dim its dimension (text if it has no unit).
type column struct {
	name, header string
	dim          quantity.Dimension
	text         bool
}

func columns() [columnCount]column {
	return [columnCount]column{
		fluidColumn:        {"fluid", "fluid", 0, true},
		temperatureColumn:  {"temperature", "temperature/K", quantity.Temperature, false},
		pressureColumn:     {"pressure", "pressure/kPa", quantity.Pressure, false},
		uTemperatureColumn: {"u_temperature", "u_temperature/K", quantity.Temperature, false},
		uPressureColumn:    {"u_pressure", "u_pressure/kPa", quantity.Pressure, false},
		methodColumn:       {"method", "method", 0, true},
		batchColumn:        {"batch", "batch", 0, true},
		diameterColumn:     {"diameter", "diameter/mm", quantity.Length, false},
		volumeColumn:       {"volume", "volume/nL", quantity.Volume, false},
		heatingRateColumn:  {"heating_rate", "heating_rate/(K/s)", quantity.HeatingRate, false},
		holdingTimeColumn:  {"holding_time", "holding_time/s", quantity.Time, false},
		lifetimeColumn:     {"lifetime", "lifetime/s", quantity.Time, false},
		fluxColumn:         {"flux", "flux/(m-3.s-1)", quantity.Flux, false},
		observedColumn:     {"observed", "observed", 0, true},
		outcomeColumn:      {"outcome", "outcome", 0, true},
		sourceColumn:       {"source", "source", 0, true},
		provenanceColumn:   {"provenance", "provenance", 0, true},
		noteColumn:         {"note", "note", 0, true},
	}
}

// layout says where each known column stands in a record.
type layout struct {
	width  int              // fields of a record
	field  [columnCount]int // index of the field; -1 if absent
	header [columnCount]string
	unit   [columnCount]quantity.Unit
	usable [columnCount]bool // present with a unit that can be used
}

// header reads the names and units of the columns.
func (a *assembler) header(fields []string, at func(int) position) {
	known := columns()
	l := &a.layout
	l.width = len(fields)
	for c := range l.field {
		l.field[c] = -1
	}
	first := map[string]int{}
	var ignored []int
	for i, raw := range fields {
		h := strings.TrimSpace(raw)
		name, unit, hasUnit := strings.Cut(h, "/")
		name = strings.TrimSpace(name)
		c := columnNamed(known[:], name)
		id := h
		if c >= 0 {
			id = name
		}
		if j, twice := first[id]; twice && id != "" {
			a.fail(at(i), h, fmt.Sprintf("column %s given twice, first as %s in field %d", id, problem.Quoted(strings.TrimSpace(fields[j])), j+1), "each column once", nil)
			continue
		}
		first[id] = i
		if c < 0 {
			ignored = append(ignored, i)
			if h == "" {
				h = fmt.Sprintf("column %d", i+1)
			}
			a.info.IgnoredColumns = append(a.info.IgnoredColumns, h)
			continue
		}
		a.info.Columns = append(a.info.Columns, h)
		l.field[c], l.header[c] = i, h
		l.usable[c] = a.unit(c, known[c], unit, hasUnit, at(i))
	}
	a.missing(known[:], fields, ignored, at)
}

// unit reads the unit of a known column and reports whether its fields can be read.
func (a *assembler) unit(c int, k column, unit string, hasUnit bool, at position) bool {
	h := a.layout.header[c]
	switch {
	case k.text && hasUnit:
		a.fail(at, h, "column "+k.name+" has a unit", k.header, nil)
		return false
	case k.text:
		return true
	case strings.TrimSpace(unit) == "":
		a.fail(at, h, "column "+k.name+" has no unit", "quantity/unit, as in "+k.header, nil)
		return false
	}
	u, err := quantity.ParseUnit(unit)
	if err == nil && u.Dimension() != k.dim {
		err = &quantity.Error{Kind: quantity.WrongDimension, Found: u.String(), Symbol: u.Dimension().String(), Expected: "a unit of " + k.dim.String() + ", as in " + k.header}
	}
	if err != nil {
		a.cause(at, h, err)
		return false
	}
	a.layout.unit[c] = u
	return true
}

// missing reports required columns that are absent, and warns of ignored headers that resemble an absent
// one.
func (a *assembler) missing(known []column, fields []string, ignored []int, at func(int) position) {
	for c, k := range known {
		if a.layout.field[c] >= 0 {
			continue
		}
		var near []string
		for _, i := range ignored {
			h := strings.TrimSpace(fields[i])
			if !resembles(h, k.name) {
				continue
			}
			near = append(near, problem.Quoted(h))
			a.doubts.add("ignored "+k.name, Warning{File: a.info.Name, Line: at(i).line, Where: at(i).where,
				Text: fmt.Sprintf("column %s is ignored; was %s meant?", problem.Quoted(h), k.header)})
		}
		if c < required {
			found := "column " + k.name + " is missing"
			if near != nil {
				found += " (there is " + strings.Join(near, " and ") + ")"
			}
			a.fail(at(0), "", found, "a header such as "+k.header, nil)
		}
	}
}

func columnNamed(known []column, name string) int {
	for c := range known {
		if known[c].name == name {
			return c
		}
	}
	return -1
}

// resembles reports whether header could be a misspelling of the column called name.
func resembles(header, name string) bool {
	h := strings.ToLower(header)
	if i := strings.IndexAny(h, "/([,;"); i >= 0 {
		h = h[:i]
	}
	h = strings.NewReplacer(" ", "_", "-", "_").Replace(strings.TrimSpace(h))
	switch h {
	case "":
		return false
	case "t", "temp", "t_limit":
		return name == "temperature"
	case "p", "press":
		return name == "pressure"
	case "substance", "liquid", "species", "compound":
		return name == "fluid"
	case "d", "diam":
		return name == "diameter"
	case "v", "vol":
		return name == "volume"
	case "j", "nucleation_rate":
		return name == "flux"
	case "ut", "u_t", "sigma_t":
		return name == "u_temperature"
	case "up", "u_p", "sigma_p":
		return name == "u_pressure"
	}
	return strings.HasPrefix(h, name) || quantity.Near(h, []string{name}) != nil
}
