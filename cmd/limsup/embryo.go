package main

import (
	"fmt"
	"math"

	"github.com/urfave/cli/v2"

	"limsup/cmd/limsup/internal/table"
	"limsup/data/quantity"
	"limsup/eos/nucleation"
	"limsup/fit"
)

func embryoCommand() *cli.Command {
	return &cli.Command{
		Name:  "embryo",
		Usage: "the critical bubble (or droplet) of one metastable state, and its free energy",
		Description: "For a superheated liquid (pressure below saturation) the embryo is a bubble, for a supersaturated vapour a droplet. Smaller embryos collapse, larger ones grow.\n\n" +
			"Example: limsup embryo --fluid n-pentane --temperature \"145 degC\" --pressure \"1 atm\"",
		Flags: flags(stateFlags(), []cli.Flag{&cli.IntFlag{Name: "count", Value: 33, Usage: "`NUMBER` of points of the free energy curve"}}, modelFlags(), []cli.Flag{formatFlag(), outFlag("the table")}),
		Action: func(c *cli.Context) error {
			s, r, err := beginWithFluid(c)
			if err != nil {
				return err
			}
			T, err := one(c, "temperature", quantity.Temperature)
			if err != nil {
				return err
			}
			P, err := one(c, "pressure", quantity.Pressure)
			if err != nil {
				return err
			}
			n, err := points(c, c.Int("count"))
			if err != nil {
				return err
			}
			ph, err := s.physics(r, true)
			if err != nil {
				return err
			}
			e, err := ph.Fluid.Embryo(T, P)
			if err != nil {
				return err
			}
			return show(c, embryoProduct(r.Key, &ph.Variant, &e, n))
		},
	}
}

type embryoJSON struct {
	Fluid          string          `json:"fluid"`
	Temperature    float64         `json:"temperature_K"`
	Pressure       float64         `json:"pressure_Pa"`
	Kind           nucleation.Kind `json:"kind"`
	Saturation     float64         `json:"saturation_pressure_Pa"`
	EmbryoPressure float64         `json:"embryo_pressure_Pa"`
	Approximate    float64         `json:"embryo_pressure_approx_Pa"`
	Tension        float64         `json:"surface_tension_N_m"`
	EmbryoTension  float64         `json:"embryo_surface_tension_N_m"`
	Radius         float64         `json:"critical_radius_m"`
	Barrier        float64         `json:"barrier_J"`
	BarrierOverKT  float64         `json:"barrier_over_kT"`
	Molecules      float64         `json:"molecules"`
	Excess         float64         `json:"excess_molecules"`
	Log10Flux      float64         `json:"log10_flux"`
	Notes          []string        `json:"notes,omitempty"`
	Curve          []curveJSON     `json:"curve"`
}

type curveJSON struct {
	Radius     float64 `json:"radius_m"`
	FreeEnergy float64 `json:"free_energy_J"`
}

func embryoProduct(fluid string, v *fit.Variant, e *nucleation.Embryo, n int) *product {
	j := embryoJSON{Fluid: fluid, Temperature: e.T, Pressure: e.P, Kind: e.Kind, Saturation: e.Saturation,
		EmbryoPressure: e.Pressure, Approximate: e.Approximate, Tension: e.TensionFlat, EmbryoTension: e.Tension,
		Radius: e.Radius, Barrier: e.Barrier, BarrierOverKT: e.BarrierOverKT, Molecules: e.Molecules, Excess: e.Excess, Log10Flux: e.LnJ / math.Ln10}
	form, inside, around := "Poynting", "vapour", ""
	if e.Kind == nucleation.Droplet {
		form, inside, around = "Kelvin", "liquid", ", in supersaturated vapour"
		if v.Kinetics != nucleation.Mechanical || v.EmbryoPressure == nucleation.Poynting {
			j.Notes = append(j.Notes, "the options kinetics and embryo-pressure are of bubbles and do not act on a droplet")
		}
	}
	if e.Held {
		j.Notes = append(j.Notes, nucleation.HeldNote)
	}
	facts := table.Facts{
		{Label: "embryo", Value: fmt.Sprintf("critical %s of %s%s", e.Kind, fluid, around)},
		fact("temperature", e.T, 6, "K"),
		fact("pressure", e.P/1e3, 6, "kPa"),
		fact("saturation pressure", e.Saturation/1e3, 6, "kPa"),
		fact(inside+" pressure inside", e.Pressure/1e3, 6, "kPa"),
		fact("the same after "+form, e.Approximate/1e3, 6, "kPa"),
		fact("surface tension", e.Tension*1e3, 5, "mN/m"),
		fact("critical radius", e.Radius*1e9, 5, "nm"),
		fact("barrier", e.Barrier, 5, "J"),
		fact("barrier / kT", e.BarrierOverKT, 5, ""),
		fact("molecules inside", e.Molecules, 4, ""),
		fact("excess molecules", e.Excess, 4, ""),
		fact("log10 J", e.LnJ/math.Ln10, 6, "(J in m-3.s-1)"),
	}
	for _, n := range j.Notes {
		facts = append(facts, table.Fact{Label: "note", Value: n})
	}
	t := &table.Table{
		Title: "Free energy of formation",
		Columns: []table.Column{
			{Name: "radius", Title: "r", Unit: "m", Kind: table.KindNumber, Digits: 5},
			{Name: "free_energy", Title: "ΔG", Unit: "J", Kind: table.KindNumber, Digits: 5},
			{Name: "relative", Title: "ΔG/ΔG*", Kind: table.KindNumber, Digits: 4, Fixed: true},
		},
		Notes: []string{"The maximum is at the critical radius: smaller embryos collapse, larger ones grow."},
	}
	for _, p := range e.Curve(n) {
		j.Curve = append(j.Curve, curveJSON{p.Radius, p.FreeEnergy})
		t.Rows = append(t.Rows, []table.Cell{table.Num(p.Radius), table.Num(p.FreeEnergy), table.Num(p.FreeEnergy / e.Barrier)})
	}
	return &product{json: func() any { return j }, csv: t, blocks: []block{{facts: facts}, {table: t}, cautionBlock()}}
}
