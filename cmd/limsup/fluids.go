package main

import (
	"fmt"

	"github.com/urfave/cli/v2"

	"limsup/cmd/limsup/internal/table"
	"limsup/data/fluid"
)

func fluidsCommand() *cli.Command {
	return &cli.Command{
		Name:  "fluids",
		Usage: "list the fluids, search them, or show one in full with its sources",
		Description: "Examples: limsup fluids\n" +
			"          limsup fluids --search butane\n" +
			"          limsup fluids --fluid n-pentane",
		Flags: []cli.Flag{
			&cli.StringFlag{Name: "search", Usage: "only fluids with `TEXT` in key, name, alias, formula or CAS number"},
			&cli.StringSliceFlag{Name: "fluid", Usage: "show the fluid of this `KEY` or name in full (repeatable)"},
			fluidsFileFlag(), formatFlag(), outFlag("the list"),
		},
		Action: func(c *cli.Context) error {
			if err := begin(c); err != nil {
				return err
			}
			lib, err := library(c)
			if err != nil {
				return err
			}
			if names := c.StringSlice("fluid"); len(names) > 0 {
				p, err := fluidProduct(lib, names)
				if err != nil {
					return err
				}
				return show(c, p)
			}
			records := lib.All()
			if c.IsSet("search") {
				if records = lib.Search(c.String("search")); len(records) == 0 {
					return &usageError{fmt.Sprintf("no fluid matches %q", c.String("search"))}
				}
			}
			return show(c, fluidsProduct(records))
		},
	}
}

type fluidRowJSON struct {
	Key       string  `json:"key"`
	Name      string  `json:"name"`
	Formula   string  `json:"formula"`
	CAS       string  `json:"cas"`
	MolarMass float64 `json:"molar_mass_kg_mol"`
	Tc        float64 `json:"critical_temperature_K"`
	Pc        float64 `json:"critical_pressure_Pa"`
	Acentric  float64 `json:"acentric_factor"`
	Tension   bool    `json:"surface_tension"`
	Hazard    string  `json:"hazard"`
}

func fluidsProduct(records []*fluid.Record) *product {
	j := struct {
		Fluids []fluidRowJSON `json:"fluids"`
	}{[]fluidRowJSON{}}
	t := &table.Table{Title: fmt.Sprintf("Fluids (%d)", len(records)), Columns: []table.Column{
		{Name: "key", Title: "key"}, {Name: "name", Title: "name", Priority: 3}, {Name: "formula", Title: "formula", Priority: 1},
		{Name: "cas", Title: "CAS", Priority: 5},
		{Name: "molar_mass", Title: "M", Unit: "g/mol", Kind: table.KindNumber, Digits: 3, Fixed: true, Priority: 2},
		{Name: "critical_temperature", Title: "Tc", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true},
		{Name: "critical_pressure", Title: "Pc", Unit: "kPa", Kind: table.KindNumber, Digits: 1, Fixed: true},
		{Name: "acentric_factor", Title: "ω", Kind: table.KindNumber, Digits: 4, Fixed: true},
		{Name: "surface_tension", Title: "σ", Kind: table.KindBool, Priority: 4},
		{Name: "hazard", Title: "hazard", Priority: 6},
	}}
	for _, r := range records {
		j.Fluids = append(j.Fluids, fluidRowJSON{r.Key, r.Name, r.Formula, r.CAS, r.MolarMass.Value, r.CriticalTemperature.Value, r.CriticalPressure.Value,
			r.AcentricFactor.Value, r.SurfaceTension != nil, r.Hazard})
		t.Rows = append(t.Rows, []table.Cell{table.Text(r.Key), table.Text(r.Name), table.Text(r.Formula), table.Text(r.CAS), table.Num(r.MolarMass.Value * 1e3),
			table.Num(r.CriticalTemperature.Value), table.Num(r.CriticalPressure.Value / 1e3), table.Num(r.AcentricFactor.Value), table.Bool(r.SurfaceTension != nil), table.Text(r.Hazard)})
	}
	return &product{json: func() any { return j }, csv: t, blocks: []block{{table: t}}}
}
