package main

import (
	"fmt"
	"math"
	"slices"
	"sort"
	"strings"

	"github.com/urfave/cli/v2"

	"limsup/cmd/limsup/internal/table"
	"limsup/data/fluid"
	"limsup/data/measure"
	"limsup/fit"
)

func checkCommand() *cli.Command {
	return &cli.Command{
		Name:  "check",
		Usage: "read measurements, report every problem with its place, and summarise them",
		Description: "Rows that are no superheat limit, whatever the model, or that the model of the flags cannot predict are listed with their reason.\n\n" +
			"Example: limsup check --data drops.csv",
		Flags: flags([]cli.Flag{dataFlag()}, variantFlags(), []cli.Flag{formatFlag(), outFlag("the summary")}),
		Action: func(c *cli.Context) error {
			if err := begin(c); err != nil {
				return err
			}
			t, err := taskFromFlags(c)
			if err != nil {
				return err
			}
			d, err := fit.Prepare(t.set, t.library, t.plan)
			if err != nil {
				return err
			}
			return show(c, checkProduct(d))
		},
	}
}

// readData reads and joins the files of --data.
func readData(c *cli.Context, lib *fluid.Library) (*measure.Set, error) {
	names := c.StringSlice("data")
	if len(names) == 0 {
		return nil, &usageError{commandName(c) + " needs --data FILE"}
	}
	if c.IsSet("sheet") && !slices.ContainsFunc(names, measure.IsWorkbook) {
		return nil, &usageError{"--sheet goes with a workbook, and no file of --data ends in .xlsx or .xlsm"}
	}
	o := measure.Options{
		Sheet: c.String("sheet"),
		KnownFluid: func(name string) (string, error) {
			r, err := lib.Find(name)
			if err != nil {
				return "", err
			}
			return r.Key, nil
		},
		LiquidRange: func(key string) (low, high float64, ok bool) {
			r, err := lib.Find(key)
			if err != nil || r.TripleTemperature == nil {
				return 0, 0, false
			}
			return r.TripleTemperature.Value, r.CriticalTemperature.Value, true
		},
	}
	var sets []*measure.Set
	var problems measure.Problems
	for _, name := range names {
		set, err := readMeasurements(c, name, o)
		if ps, ok := err.(measure.Problems); ok {
			problems = append(problems, ps...)
			continue
		}
		if err != nil {
			return nil, err
		}
		sets = append(sets, set)
	}
	if len(problems) > 0 {
		return nil, problems
	}
	return measure.Join(sets...)
}

type checkJSON struct {
	Files        []fileJSON     `json:"files"`
	RowsUsed     int            `json:"rows_used"`
	RowsExcluded []excludedJSON `json:"rows_excluded"`
	Warnings     []string       `json:"warnings"`
	Groups       []checkGroup   `json:"groups"`
}

type fileJSON struct {
	Name           string   `json:"file"`
	SHA256         string   `json:"sha256"`
	Rows           int      `json:"rows"`
	IgnoredColumns []string `json:"ignored_columns"`
}

type excludedJSON struct {
	File   string `json:"file"`
	Line   int    `json:"line"`
	Where  string `json:"where,omitempty"`
	Fluid  string `json:"fluid,omitempty"`
	Reason string `json:"reason"`
}

// checkGroup summarises one fluid and method.
type checkGroup struct {
	Fluid       string  `json:"fluid"`
	Method      string  `json:"method"`
	Rows        int     `json:"rows"`
	Intact      int     `json:"intact"`
	OwnFlux     int     `json:"own_flux"`
	PressureLow float64 `json:"pressure_low_Pa"`
	PressureHi  float64 `json:"pressure_high_Pa"`
	TempLow     float64 `json:"temperature_low_K"`
	TempHigh    float64 `json:"temperature_high_K"`
	TrLow       float64 `json:"reduced_temperature_low"`
	TrHigh      float64 `json:"reduced_temperature_high"`
}

func excludedList(list []measure.Exclusion) []excludedJSON {
	out := []excludedJSON{}
	for _, e := range list {
		out = append(out, excludedJSON{e.File, e.Line, e.Where, e.Fluid, e.Reason})
	}
	return out
}

// excludedTable lists excluded rows, or is nil.
func excludedTable(list []measure.Exclusion) *table.Table {
	if len(list) == 0 {
		return nil
	}
	t := &table.Table{Title: fmt.Sprintf("Excluded rows (%d)", len(list)), Columns: []table.Column{{Name: "row", Title: "row"}, {Name: "fluid", Title: "fluid"}, {Name: "reason", Title: "reason", Wrap: 40}}}
	for _, e := range list {
		t.Rows = append(t.Rows, []table.Cell{table.Text(shortPlace(e.File, e.Line, e.Where)), table.Text(e.Fluid), table.Text(e.Reason)})
	}
	return t
}

func checkProduct(d *fit.Data) *product {
	j := checkJSON{RowsUsed: len(d.Observations), RowsExcluded: excludedList(d.Excluded), Warnings: []string{}, Groups: checkGroups(d.Observations)}
	var files []string
	for _, f := range d.Files {
		n := rowsOf(d, f.Name)
		j.Files = append(j.Files, fileJSON{f.Name, f.SHA256, n, append([]string{}, f.IgnoredColumns...)})
		s := fmt.Sprintf("%s: %d rows", f.Name, n)
		if len(f.IgnoredColumns) > 0 {
			s += "; columns kept but not used: " + strings.Join(f.IgnoredColumns, ", ")
		}
		files = append(files, s)
	}
	title := fmt.Sprintf("Usable rows (%d)", len(d.Observations))
	t := &table.Table{Title: title, Columns: []table.Column{
		{Name: "fluid", Title: "fluid"}, {Name: "method", Title: "method"},
		{Name: "rows", Title: "rows", Kind: table.KindInteger},
		{Name: "intact", Title: "intact", Kind: table.KindInteger, Priority: 3},
		{Name: "own_flux", Title: "own flux", Kind: table.KindInteger, Priority: 2},
		{Name: "pressure", Title: "P", Unit: "kPa"}, {Name: "temperature", Title: "T", Unit: "K"}, {Name: "reduced_temperature", Title: "T/Tc", Priority: 1},
	}}
	full := &table.Table{Title: title, Columns: []table.Column{
		{Name: "fluid"}, {Name: "method"}, {Name: "rows", Kind: table.KindInteger}, {Name: "intact", Kind: table.KindInteger}, {Name: "own_flux", Kind: table.KindInteger},
		{Name: "pressure_low", Unit: "kPa", Kind: table.KindNumber}, {Name: "pressure_high", Unit: "kPa", Kind: table.KindNumber},
		{Name: "temperature_low", Unit: "K", Kind: table.KindNumber}, {Name: "temperature_high", Unit: "K", Kind: table.KindNumber},
		{Name: "reduced_temperature_low", Kind: table.KindNumber}, {Name: "reduced_temperature_high", Kind: table.KindNumber},
	}}
	span := func(low, high float64, digits int) table.Cell {
		if low == high {
			return table.Text(number(low, digits))
		}
		return table.Text(number(low, digits) + " to " + number(high, digits))
	}
	for _, g := range j.Groups {
		head := []table.Cell{table.Text(g.Fluid), table.Text(g.Method), table.Int(g.Rows), table.Int(g.Intact), table.Int(g.OwnFlux)}
		t.Rows = append(t.Rows, append(slices.Clone(head), span(g.PressureLow/1e3, g.PressureHi/1e3, 6), span(g.TempLow, g.TempHigh, 5), span(g.TrLow, g.TrHigh, 3)))
		full.Rows = append(full.Rows, append(head, table.Num(g.PressureLow/1e3), table.Num(g.PressureHi/1e3), table.Num(g.TempLow), table.Num(g.TempHigh), table.Num(g.TrLow), table.Num(g.TrHigh)))
	}
	blocks := []block{}
	for _, s := range files {
		blocks = append(blocks, block{text: s})
	}
	blocks = append(blocks, block{table: t})
	if x := excludedTable(d.Excluded); x != nil {
		blocks = append(blocks, block{table: x})
	}
	for _, w := range d.Warnings {
		j.Warnings = append(j.Warnings, w.String())
		blocks = append(blocks, block{text: "Warning: " + w.String()})
	}
	return &product{json: func() any { return j }, csv: full, blocks: blocks}
}

// rowsOf counts the rows of a file, used and excluded.
func rowsOf(d *fit.Data, name string) int {
	n := 0
	for i := range d.Observations {
		if d.Observations[i].File == name {
			n++
		}
	}
	for _, e := range d.Excluded {
		if e.File == name {
			n++
		}
	}
	return n
}

// checkGroups summarises the observations by fluid and method, in order of names.
func checkGroups(obs []fit.Observation) []checkGroup {
	at := map[[2]string]int{}
	out := []checkGroup{}
	for i := range obs {
		o := &obs[i]
		k := [2]string{o.Record.Key, o.Method}
		n, ok := at[k]
		if !ok {
			n = len(out)
			at[k] = n
			out = append(out, checkGroup{Fluid: k[0], Method: k[1], PressureLow: o.Pressure, PressureHi: o.Pressure, TempLow: o.Temperature, TempHigh: o.Temperature})
		}
		g := &out[n]
		g.Rows++
		if o.Outcome != 0 {
			g.Intact++
		}
		if o.OwnFlux {
			g.OwnFlux++
		}
		g.PressureLow, g.PressureHi = math.Min(g.PressureLow, o.Pressure), math.Max(g.PressureHi, o.Pressure)
		g.TempLow, g.TempHigh = math.Min(g.TempLow, o.Temperature), math.Max(g.TempHigh, o.Temperature)
		Tc := o.Record.CriticalTemperature.Value
		g.TrLow, g.TrHigh = g.TempLow/Tc, g.TempHigh/Tc
	}
	sort.SliceStable(out, func(i, j int) bool {
		if out[i].Fluid != out[j].Fluid {
			return out[i].Fluid < out[j].Fluid
		}
		return out[i].Method < out[j].Method
	})
	return out
}
