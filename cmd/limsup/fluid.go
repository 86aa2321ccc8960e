package main

import (
	"fmt"
	"os"
	"strings"

	"limsup/cmd/limsup/internal/table"
	"limsup/data/fluid"
)

// fluidProduct shows records in full: every value as its source gives it.
func fluidProduct(lib *fluid.Library, names []string) (*product, error) {
	j := struct {
		Fluids []*fluid.Record `json:"fluids"`
	}{}
	p := &product{csv: &table.Table{Columns: []table.Column{{Name: "fluid"}, {Name: "property"}, {Name: "value"}, {Name: "unit"}, {Name: "source"}}}}
	for _, name := range names {
		r, err := lib.Find(name)
		if err != nil {
			return nil, err
		}
		j.Fluids = append(j.Fluids, r)
		t := &table.Table{Title: r.Name, Columns: []table.Column{{Name: "property", Title: "property"}, {Name: "value", Title: "value", Wrap: 40}, {Name: "unit", Title: "unit"}}}
		for _, row := range recordRows(r) {
			name := table.Text(row[0])
			if row[3] != "" {
				name = name.Note(row[3])
			}
			t.Rows = append(t.Rows, []table.Cell{name, table.Text(row[1]), table.Text(row[2])})
			cells := []table.Cell{table.Text(r.Key)}
			for _, s := range row {
				cells = append(cells, table.Text(s))
			}
			p.csv.Rows = append(p.csv.Rows, cells)
		}
		if r.Note != "" {
			t.Notes = append(t.Notes, r.Note)
		}
		t.Notes = append(t.Notes, r.Warnings()...)
		p.blocks = append(p.blocks, block{table: t})
	}
	p.json = func() any { return j }
	return p, nil
}

// recordRows are property, value, unit and source of a record.
func recordRows(r *fluid.Record) [][4]string {
	rows := [][4]string{
		{"key", r.Key, "", ""}, {"aliases", strings.Join(r.Aliases, "; "), "", ""},
		{"CAS number", r.CAS, "", ""}, {"formula", r.Formula, "", ""}, {"hazard", r.Hazard, "", ""},
	}
	value := func(name string, v *fluid.Value) {
		if v != nil {
			rows = append(rows, [4]string{name, fmt.Sprint(v.Given), v.Unit, v.Source})
		}
	}
	value("molar mass", &r.MolarMass)
	value("critical temperature", &r.CriticalTemperature)
	value("critical pressure", &r.CriticalPressure)
	value("critical density", r.CriticalDensity)
	value("acentric factor", &r.AcentricFactor)
	value("boiling temperature", r.BoilingTemperature)
	value("triple point temperature", r.TripleTemperature)
	if t := r.SurfaceTension; t != nil {
		var terms []string
		for _, k := range t.Terms {
			terms = append(terms, fmt.Sprintf("%v·(1−T/Tc)^%v", k.Coefficient, k.Exponent))
		}
		for _, k := range t.Coefficients {
			terms = append(terms, fmt.Sprint(k))
		}
		text := fmt.Sprintf("%s, Tc %v K: %s", t.Form, t.CriticalTemperature, strings.Join(terms, " + "))
		if t.Form == "dippr-106" {
			text = fmt.Sprintf("%s, Tc %v K: A…E = %s", t.Form, t.CriticalTemperature, strings.Join(terms, ", "))
		}
		if lo, hi, ok := r.TensionRange(); ok {
			text += fmt.Sprintf("; stated for %v K to %v K", lo, hi)
		}
		rows = append(rows, [4]string{"surface tension", text, t.Unit, t.Source})
		if t.Note != "" {
			rows = append(rows, [4]string{"", t.Note, "", ""})
		}
	}
	if c := r.VapourPressure; c != nil {
		lo, hi := c.Range()
		rows = append(rows, [4]string{"vapour pressure", fmt.Sprintf("%s, %.6g K to %.6g K", c.Form, lo, hi), "", c.Source})
	}
	if c := r.LiquidDensity; c != nil {
		lo, hi := c.Range()
		rows = append(rows, [4]string{"liquid density", fmt.Sprintf("%s, %.6g K to %.6g K", c.Form, lo, hi), "", c.Source})
	}
	if c := r.VapourDensity; c != nil {
		lo, hi := c.Range()
		rows = append(rows, [4]string{"vapour density", fmt.Sprintf("%s, %.6g K to %.6g K", c.Form, lo, hi), "", c.Source})
	}
	return rows
}

// readFluids reads a file of fluid records.
func readFluids(name string) ([]*fluid.Record, error) {
	f, err := os.Open(name)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	return fluid.Parse(f, name)
}
