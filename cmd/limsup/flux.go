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

func fluxCommand() *cli.Command {
	return &cli.Command{
		Name:  "flux",
		Usage: "nucleation flux against temperature at one pressure",
		Description: "Shows log10 of the flux J in m-3.s-1 and how many decades it gains per kelvin. Without --temperature, --from and --to the points cover the last 2 % below the limit.\n\n" +
			"Example: limsup flux --fluid n-hexane --pressure \"1 atm\" --from \"450 K\" --to \"460 K\" --count 11",
		Flags: flags(stateFlags(), sweepFlags("TEMPERATURE"), modelFlags(), []cli.Flag{formatFlag(), outFlag("the table")}),
		Action: func(c *cli.Context) error {
			s, r, err := beginWithFluid(c)
			if err != nil {
				return err
			}
			P, err := one(c, "pressure", quantity.Pressure)
			if err != nil {
				return err
			}
			ph, err := s.physics(r, true)
			if err != nil {
				return err
			}
			ts, err := fluxTemperatures(c, ph, P)
			if err != nil {
				return err
			}
			p, missing := fluxProduct(ph, P, ts)
			if err := show(c, p); err != nil {
				return err
			}
			if missing > 0 {
				return &noAnswerError{fmt.Sprintf("%d of %d states have no flux; see the table", missing, len(ts))}
			}
			return nil
		},
	}
}

// fluxTemperatures are the given ones, or the last 2 % below the end of the
// superheated liquid: its kinetic limit, else its spinodal.
func fluxTemperatures(c *cli.Context, ph *fit.Physics, P float64) ([]float64, error) {
	ts, err := quantities(c, "temperature", quantity.Temperature)
	if err != nil {
		return nil, err
	}
	more, err := sweep(c, quantity.Temperature, 21)
	if err != nil {
		return nil, err
	}
	if ts = append(ts, more...); len(ts) > 0 {
		return ts, nil
	}
	n, err := points(c, 21)
	if err != nil {
		return nil, err
	}
	end := 0.0
	if l, err := ph.Limit(P); err == nil {
		end = l.T + 0.002*l.T
	}
	if s, err := ph.Model.LiquidSpinodalTemperature(P); err == nil && (end == 0 || end > s.T) {
		end = s.T * (1 - 1e-6)
	}
	if end == 0 {
		return nil, &usageError{"flux needs --temperature, or --from and --to: no limit was found to start from"}
	}
	for i := range n {
		ts = append(ts, end*(0.98+0.02*float64(i)/float64(n-1)))
	}
	return ts, nil
}

type fluxJSON struct {
	Fluid    string   `json:"fluid"`
	Pressure float64  `json:"pressure_Pa"`
	Points   []any    `json:"points"` // fluxPointJSON or noFluxJSON
	Limit    *float64 `json:"limit_K"`
	Notes    []string `json:"notes,omitempty"`
	NoLimit  string   `json:"no_limit,omitempty"`
}

type fluxPointJSON struct {
	Temperature float64 `json:"temperature_K"`
	Log10Flux   float64 `json:"log10_flux"`
	Decades     float64 `json:"decades_per_K"`
	Barrier     float64 `json:"barrier_over_kT"`
}

// noFluxJSON is a state without a flux.
type noFluxJSON struct {
	Temperature float64   `json:"temperature_K"`
	Error       errorJSON `json:"error"`
}

// fluxProduct holds a flux for every temperature, or the reason why there is none.
func fluxProduct(ph *fit.Physics, P float64, ts []float64) (p *product, missing int) {
	j := fluxJSON{Fluid: ph.Record.Key, Pressure: P}
	t := &table.Table{
		Title: fmt.Sprintf("Nucleation flux of superheated %s at %s kPa", ph.Record.Key, number(P/1e3, 6)),
		Columns: []table.Column{
			{Name: "temperature", Title: "T", Unit: "K", Kind: table.KindNumber, Digits: 7},
			{Name: "log10_flux", Title: "lg J/(m-3.s-1)", Kind: table.KindNumber, Digits: 2, Fixed: true},
			{Name: "decades_per_K", Title: "decades", Unit: "1/K", Kind: table.KindNumber, Digits: 4},
			{Name: "barrier_over_kT", Title: "ΔG*/kT", Kind: table.KindNumber, Digits: 5, Priority: 1},
		},
	}
	for _, T := range ts {
		x, err := ph.Fluid.Flux(T, P)
		if err != nil {
			missing++
			j.Points = append(j.Points, noFluxJSON{T, errorJSON{errorKind(err), err.Error()}})
			none := table.Missing("no flux")
			t.Rows = append(t.Rows, []table.Cell{table.Num(T), none.Note(err.Error()), none, none})
			continue
		}
		j.Points = append(j.Points, fluxPointJSON{T, x.Log10J(), x.DT / math.Ln10, x.Barrier})
		lg := table.Num(x.Log10J())
		if x.Held {
			lg = lg.Note(nucleation.HeldNote)
			j.Notes = []string{nucleation.HeldNote}
		}
		t.Rows = append(t.Rows, []table.Cell{table.Num(T), lg, table.Num(x.DT / math.Ln10), table.Num(x.Barrier)})
	}
	text := ""
	if l, err := ph.Limit(P); err == nil {
		j.Limit = &l.T
		text = fmt.Sprintf("Kinetic limit at lg J* = %s: %s K.", number(ph.Threshold, 4), number(l.T, 7))
	} else {
		j.NoLimit = err.Error()
		text = err.Error() + "."
	}
	return &product{json: func() any { return j }, csv: t, blocks: []block{{table: t}, {text: text}, cautionBlock()}}, missing
}
