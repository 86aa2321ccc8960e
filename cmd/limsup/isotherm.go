package main

import (
	"fmt"
	"math"

	"github.com/urfave/cli/v2"

	"limsup/cmd/limsup/internal/table"
	"limsup/data/fluid"
	"limsup/data/quantity"
	"limsup/eos"
)

func isothermCommand() *cli.Command {
	return &cli.Command{
		Name:  "isotherm",
		Usage: "pressure, chemical potential and stability along one temperature",
		Description: "Shows saturation, both spinodal branches and points from the compressed liquid to the thin vapour. Without --from and --to (molar volumes) the points cover the metastable and unstable region.\n\n" +
			"Example: limsup isotherm --fluid n-pentane --temperature \"147 degC\" --count 40",
		Flags: flags(stateFlags()[:2], sweepFlags("VOLUME"), modelFlags(), []cli.Flag{formatFlag(), outFlag("the table")}),
		Action: func(c *cli.Context) error {
			s, r, err := beginWithFluid(c)
			if err != nil {
				return err
			}
			T, err := one(c, "temperature", quantity.Temperature)
			if err != nil {
				return err
			}
			ph, err := s.physics(r, false)
			if err != nil {
				return err
			}
			iso, err := ph.Model.Isotherm(T)
			if err != nil {
				return err
			}
			volumes, err := sweep(c, quantity.MolarVolume, 25)
			if err != nil {
				return err
			}
			if volumes == nil {
				if volumes, err = isothermVolumes(&ph.Model, &iso, c); err != nil {
					return err
				}
			}
			p, err := isothermProduct(&ph.Model, &iso, volumes)
			if err != nil {
				return err
			}
			return show(c, p)
		},
	}
}

// begin checks what every command checks.
func begin(c *cli.Context) error {
	if err := noArguments(c); err != nil {
		return err
	}
	return checkFormat(c)
}

// beginWithFluid begins a command that shows one fluid under a model.
func beginWithFluid(c *cli.Context) (*source, *fluid.Record, error) {
	if err := begin(c); err != nil {
		return nil, nil, err
	}
	s, err := sourceFromFlags(c)
	if err != nil {
		return nil, nil, err
	}
	r, err := s.oneFluid(c)
	return s, r, err
}

// isothermVolumes are volumes in geometric steps from the compressed liquid to
// twice the volume of the saturated vapour.
func isothermVolumes(m *eos.Model, iso *eos.Isotherm, c *cli.Context) ([]float64, error) {
	n, err := points(c, 25)
	if err != nil {
		return nil, err
	}
	lo, hi := 1.2*m.B, 100*m.B
	if iso.Subcritical {
		lo, hi = math.Max(1.02*m.B, 0.97*iso.Saturation.Vl), 2*iso.Saturation.Vv
	}
	v := make([]float64, n)
	for i := range v {
		v[i] = lo * math.Pow(hi/lo, float64(i)/float64(n-1))
	}
	return v, nil
}

type isothermJSON struct {
	Fluid       string         `json:"fluid"`
	Equation    string         `json:"equation"`
	Temperature float64        `json:"temperature_K"`
	Saturation  *saturatedJSON `json:"saturation"`
	Spinodal    *spinodalJSON  `json:"spinodal"`
	Points      []pointJSON    `json:"points"`
}

type saturatedJSON struct {
	Pressure float64 `json:"pressure_Pa"`
	Liquid   float64 `json:"liquid_m3_mol"`
	Vapour   float64 `json:"vapour_m3_mol"`
}

type spinodalJSON struct {
	Liquid branchJSON `json:"liquid"`
	Vapour branchJSON `json:"vapour"`
}

type branchJSON struct {
	Pressure float64 `json:"pressure_Pa"`
	Volume   float64 `json:"volume_m3_mol"`
}

type pointJSON struct {
	Volume            float64   `json:"volume_m3_mol"`
	Pressure          float64   `json:"pressure_Pa"`
	ChemicalPotential *float64  `json:"chemical_potential_J_mol"` // null above the critical temperature
	State             eos.State `json:"state"`
}

func isothermProduct(m *eos.Model, iso *eos.Isotherm, volumes []float64) (*product, error) {
	j := isothermJSON{Fluid: m.Fluid, Equation: m.Equation, Temperature: iso.T}
	t := &table.Table{
		Title: fmt.Sprintf("Isotherm of %s by the %s equation", m.Fluid, m.Equation),
		Columns: []table.Column{
			{Name: "volume", Title: "v", Unit: "m3/mol", Kind: table.KindNumber, Digits: 5},
			{Name: "pressure", Title: "P", Unit: "kPa", Kind: table.KindNumber, Digits: 6},
			{Name: "chemical_potential", Title: "μ − μsat", Unit: "J/mol", Kind: table.KindNumber, Digits: 5, Priority: 1},
			{Name: "state", Title: "state"},
		},
		Notes: []string{"The chemical potential is counted from saturation at this temperature. At equal pressure the phase with the lower one is stable, the other metastable."},
	}
	for _, v := range volumes {
		p, err := iso.At(v)
		if err != nil {
			return nil, err
		}
		mu := table.Num(p.Mu)
		if !iso.Subcritical {
			mu = table.Missing("no saturation above the critical temperature")
		}
		j.Points = append(j.Points, pointJSON{p.V, p.P, optional(p.Mu, iso.Subcritical), p.State})
		t.Rows = append(t.Rows, []table.Cell{table.Num(p.V), table.Num(p.P / 1e3), mu, table.Text(string(p.State))})
	}
	facts := table.Facts{fact("temperature", iso.T, 6, "K")}
	if iso.Subcritical {
		s := &iso.Saturation
		j.Saturation = &saturatedJSON{s.P, s.Vl, s.Vv}
		j.Spinodal = &spinodalJSON{branchJSON{iso.Liquid.P, iso.Liquid.V}, branchJSON{iso.Vapour.P, iso.Vapour.V}}
		facts = append(facts,
			fact("saturation pressure", s.P/1e3, 6, "kPa"),
			fact("saturated liquid", s.Vl*1e6, 6, "cm3/mol"),
			fact("saturated vapour", s.Vv*1e6, 6, "cm3/mol"),
			fact("liquid spinodal pressure", iso.Liquid.P/1e3, 6, "kPa"),
			fact("liquid spinodal volume", iso.Liquid.V*1e6, 6, "cm3/mol"),
			fact("vapour spinodal pressure", iso.Vapour.P/1e3, 6, "kPa"),
			fact("vapour spinodal volume", iso.Vapour.V*1e6, 6, "cm3/mol"))
	} else {
		facts = append(facts, table.Fact{Label: "critical temperature", Value: number(m.Tc, 6), Unit: "K: above it there is one phase only"})
	}
	return &product{json: func() any { return j }, csv: t, blocks: []block{{facts: facts}, {table: t}}}, nil
}

// fact is a labelled number.
func fact(label string, v float64, digits int, unit string) table.Fact {
	return table.Fact{Label: label, Value: number(v, digits), Unit: unit}
}

// number prints a finite number; every number that reaches it is one.
func number(v float64, digits int) string {
	s, err := table.Number(v, digits)
	if err != nil {
		return "(not a number)"
	}
	return s
}
