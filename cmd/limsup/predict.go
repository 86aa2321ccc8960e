package main

import (
	"fmt"
	"math"

	"github.com/urfave/cli/v2"

	"limsup/cmd/limsup/internal/table"
	"limsup/data/caution"
	"limsup/data/fluid"
	"limsup/data/quantity"
	"limsup/eos"
	"limsup/eos/nucleation"
	"limsup/eos/tension"
	"limsup/fit"
)

func predictCommand() *cli.Command {
	return &cli.Command{
		Name:  "predict",
		Usage: "superheat limits of fluids at given pressures (or at given temperatures)",
		Description: "Every fluid is combined with every pressure. With --temperature the answer is the pressure at which a liquid at that temperature reaches its limit on decompression. A calibrated --model adds the standard uncertainty of a new measurement and a 95 % interval.\n\n" +
			"Examples: limsup predict --fluid n-pentane --pressure \"0.5 MPa\" --model lab.json\n" +
			"          limsup predict --fluid propane --temperature \"50 degC\"",
		Flags: flags(stateFlags(), sweepFlags("PRESSURE"), []cli.Flag{
			&cli.StringFlag{Name: "method", Usage: "`METHOD` whose offset and parameters are used (default: the reference method)"},
			&cli.StringFlag{Name: "batch", Usage: "`BATCH` whose parameters are used"},
		}, modelFlags(), []cli.Flag{formatFlag(), outFlag("the table")}),
		Action: func(c *cli.Context) error {
			if err := begin(c); err != nil {
				return err
			}
			s, err := sourceFromFlags(c)
			if err != nil {
				return err
			}
			queries, err := s.queries(c)
			if err != nil {
				return err
			}
			p, missing := predictProduct(s.model, queries)
			if err := show(c, p); err != nil {
				return err
			}
			if missing > 0 {
				return &noAnswerError{fmt.Sprintf("%d of %d states have no limit; see the table", missing, len(queries))}
			}
			return nil
		},
	}
}

// queries combines fluids with pressures or temperatures.
func (s *source) queries(c *cli.Context) ([]fit.Query, error) {
	records, err := s.fluidsOf(c)
	if err != nil {
		return nil, err
	}
	ts, err := quantities(c, "temperature", quantity.Temperature)
	if err != nil {
		return nil, err
	}
	ps, err := quantities(c, "pressure", quantity.Pressure)
	if err != nil {
		return nil, err
	}
	more, err := sweep(c, quantity.Pressure, 11)
	if err != nil {
		return nil, err
	}
	ps = append(ps, more...)
	switch {
	case len(ts) > 0 && len(ps) > 0:
		return nil, &usageError{"predict takes either pressures or temperatures: one of them is the answer"}
	case len(ts) == 0 && len(ps) == 0:
		return nil, &usageError{"predict needs --pressure (for the limit temperature) or --temperature (for the limit pressure)"}
	}
	var out []fit.Query
	for _, r := range records {
		q := fit.Query{Record: r, Method: c.String("method"), Batch: c.String("batch")}
		for _, P := range ps {
			q.Pressure = P
			out = append(out, q)
		}
		for _, T := range ts {
			q.Temperature, q.AtTemperature = T, true
			out = append(out, q)
		}
	}
	return out, nil
}

type predictionJSON struct {
	Fluid        string    `json:"fluid"`
	Pressure     float64   `json:"pressure_Pa"`
	Limit        fit.Limit `json:"limit"`
	Temperature  float64   `json:"temperature_K"`
	U            *float64  `json:"standard_uncertainty_K"`
	Interval     []float64 `json:"interval_95_K"`
	UPressure    *float64  `json:"standard_uncertainty_Pa,omitempty"`
	IntervalP    []float64 `json:"interval_95_Pa,omitempty"`
	Log10Flux    *float64  `json:"log10_flux"`
	Spinodal     *float64  `json:"spinodal_K"`
	Saturation   *float64  `json:"saturation_K"`
	Extrapolated bool      `json:"extrapolated"`
	Warnings     []string  `json:"warnings,omitempty"`
}

// failedJSON is a state without a limit.
type failedJSON struct {
	Fluid        string    `json:"fluid"`
	Pressure     *float64  `json:"pressure_Pa,omitempty"`
	Temperature  *float64  `json:"given_temperature_K,omitempty"`
	Limit        fit.Limit `json:"limit"`
	Extrapolated bool      `json:"extrapolated"`
	Error        errorJSON `json:"error"`
}

type errorJSON struct {
	Kind    string `json:"kind"`
	Message string `json:"message"`
}

// errorKind names an error for programs.
func errorKind(err error) string {
	for _, k := range []struct {
		kind string
		is   func(error) bool
	}{
		{"no kinetic limit", is[*nucleation.NoLimitError]},
		{"not metastable", is[*nucleation.NotMetastableError]},
		{"outside the domain", is[*eos.DomainError]},
		{"outside the range of a correlation", is[*fluid.RangeError]},
		{"no surface tension", is[*tension.NonPositiveError]},
		{"no such phase", is[*eos.PhaseError]},
		{"property not available", is[*fit.UnavailableError]},
		{"not converged", func(err error) bool {
			return is[*nucleation.ConvergenceError](err) || is[*eos.ConvergenceError](err)
		}},
		{"no flux", is[*nucleation.StateError]},
	} {
		if k.is(err) {
			return k.kind
		}
	}
	return "error"
}

func predictProduct(m *fit.Model, queries []fit.Query) (p *product, missing int) {
	j := struct {
		Predictions []any    `json:"predictions"`
		Cautions    []string `json:"cautions"`
	}{Predictions: []any{}, Cautions: caution.Sentences()}
	t := predictTable(m)
	for i := range queries {
		q := &queries[i]
		x, err := m.Predict(*q)
		if err != nil {
			missing++
			j.Predictions = append(j.Predictions, newFailed(m, q, err))
			t.Rows = append(t.Rows, failedRow(m, q, err))
			continue
		}
		j.Predictions = append(j.Predictions, newPrediction(q, &x))
		t.Rows = append(t.Rows, predictedRow(m, q, &x))
	}
	blocks := []block{{table: t}}
	if !m.Calibrated {
		blocks = append(blocks, block{text: "Not calibrated: no uncertainty is known. Published predictions of this kind err by 1 K to 30 K, fluid by fluid."})
	}
	return &product{json: func() any { return j }, csv: t, blocks: append(blocks, cautionBlock())}, missing
}

func newFailed(m *fit.Model, q *fit.Query, err error) failedJSON {
	j := failedJSON{Fluid: q.Record.Key, Limit: m.Variant.Limit, Error: errorJSON{errorKind(err), err.Error()}}
	if q.AtTemperature {
		j.Temperature = &q.Temperature
	} else {
		j.Pressure = &q.Pressure
	}
	return j
}

func newPrediction(q *fit.Query, x *fit.Prediction) predictionJSON {
	j := predictionJSON{Fluid: x.Fluid, Pressure: x.Pressure, Limit: x.Limit, Temperature: x.Temperature,
		U: optional(x.U, x.HasU), Log10Flux: optional(x.Log10Flux, x.HasFlux),
		Spinodal: optional(x.SpinodalT, x.HasSpinodal), Saturation: optional(x.SaturationT, x.HasSaturation),
		Extrapolated: x.Extrapolated, Warnings: x.Warnings}
	switch {
	case x.HasU && q.AtTemperature:
		// the interval of the pressure, mapped to temperature along the line of limits
		j.UPressure, j.IntervalP = &x.UPressure, []float64{x.Low, x.High}
		half := (x.High - x.Low) / 2 / x.UPressure * x.U
		j.Interval = []float64{x.Temperature - half, x.Temperature + half}
	case x.HasU:
		j.Interval = []float64{x.Low, x.High}
	}
	return j
}

func predictTable(m *fit.Model) *table.Table {
	title := "Predicted superheat limits, " + m.Variant.Name()
	if m.Calibrated {
		title += ", calibrated"
	} else {
		title += ", untuned"
	}
	columns := []table.Column{
		{Name: "fluid", Title: "fluid"},
		{Name: "pressure", Title: "P", Unit: "kPa", Kind: table.KindNumber, Digits: 6},
		{Name: "limit", Title: "limit", Priority: 5},
		{Name: "temperature", Title: "T", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true},
		{Name: "temperature_Cel", Title: "t", Unit: "Cel", Kind: table.KindNumber, Digits: 2, Fixed: true, Priority: 2},
	}
	if m.Calibrated {
		columns = append(columns,
			table.Column{Name: "standard_uncertainty", Title: "u", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true},
			table.Column{Name: "low_95", Title: "95 % low", Kind: table.KindText, Priority: 1},
			table.Column{Name: "high_95", Title: "95 % high", Kind: table.KindText, Priority: 1})
	}
	return &table.Table{Title: title, Columns: append(columns,
		table.Column{Name: "log10_flux", Title: "lg J", Kind: table.KindNumber, Digits: 2, Fixed: true, Priority: 6},
		table.Column{Name: "spinodal", Title: "spinodal", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true, Priority: 4},
		table.Column{Name: "saturation", Title: "saturation", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true, Priority: 3})}
}

func failedRow(m *fit.Model, q *fit.Query, err error) []table.Cell {
	T, P, C := table.Missing("no answer"), table.Missing("no answer"), table.Missing("no answer")
	if q.AtTemperature {
		T, C = table.Num(q.Temperature), table.Num(q.Temperature-273.15)
		P = P.Note(err.Error())
	} else {
		P = table.Num(q.Pressure / 1e3)
		T = T.Note(err.Error())
	}
	none := table.Missing("no answer")
	row := []table.Cell{table.Text(q.Record.Key), P, table.Text(string(m.Variant.Limit)), T, C}
	if m.Calibrated {
		row = append(row, none, none, none)
	}
	return append(row, none, none, none)
}

func predictedRow(m *fit.Model, q *fit.Query, x *fit.Prediction) []table.Cell {
	name := table.Text(x.Fluid)
	for _, w := range x.Warnings {
		name = name.Note(w)
	}
	row := []table.Cell{name, table.Num(x.Pressure / 1e3), table.Text(string(x.Limit)), table.Num(x.Temperature), table.Num(x.Temperature - 273.15)}
	if m.Calibrated {
		u, low, high := table.Missing("no uncertainty"), table.Missing("no uncertainty"), table.Missing("no uncertainty")
		if x.HasU {
			u = table.Num(x.U)
			if q.AtTemperature {
				low, high = table.Text(number(x.Low/1e3, 4)+" kPa"), table.Text(number(x.High/1e3, 4)+" kPa")
			} else {
				low, high = table.Text(fmt.Sprintf("%.2f K", x.Low)), table.Text(fmt.Sprintf("%.2f K", x.High))
			}
		}
		row = append(row, u, low, high)
	}
	cell := func(v float64, ok bool, why string) table.Cell {
		if !ok || math.IsNaN(v) {
			return table.Missing(why)
		}
		return table.Num(v)
	}
	const absent = "does not exist at this pressure"
	saturation := absent
	if x.Pressure > 0 && x.Pressure < q.Record.CriticalPressure.Value {
		if saturation = "colder than the equation is used"; m.Variant.Properties == nucleation.FromCorrelation {
			saturation = "outside the vapour pressure correlation"
		}
	}
	return append(row, cell(x.Log10Flux, x.HasFlux, "a spinodal has no flux"), cell(x.SpinodalT, x.HasSpinodal, absent), cell(x.SaturationT, x.HasSaturation, saturation))
}
