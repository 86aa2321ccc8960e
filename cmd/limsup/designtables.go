package main

import (
	"fmt"

	"limsup/cmd/limsup/internal/table"
	"limsup/data/caution"
	"limsup/fit/design/campaign"
)

// product renders a plan.
func (d *campaignDesign) product(top int) (*product, error) {
	sizes, err := d.sizes()
	if err != nil {
		return nil, err
	}
	stored, failed := d.stored()
	best := &d.Singles[0]
	p := &product{json: func() any { return d.json(sizes, stored) }, csv: d.stepTable()}
	p.blocks = append(p.blocks,
		block{heading: "Next measurement", text: d.describe(best.Reading) + ". " + best.Why},
		block{facts: d.facts()},
		block{table: d.singleTable(top)},
		block{table: d.stepTable()},
		block{table: d.parametersTable()})
	if len(d.Target.Limits) > 0 {
		p.blocks = append(p.blocks, block{table: d.limitTable()})
	}
	if d.check != nil {
		p.blocks = append(p.blocks, block{table: d.checkTable()})
	}
	p.blocks = append(p.blocks, block{table: sizesTable(d, sizes)}, block{table: storedTable(stored, failed)})
	for _, s := range campaign.Precautions(stored) {
		p.blocks = append(p.blocks, block{text: s})
	}
	if len(d.Unusable) > 0 {
		p.blocks = append(p.blocks, block{table: d.unusableTable()})
	}
	for _, n := range d.Notes {
		p.blocks = append(p.blocks, block{text: "Note: " + n + "."})
	}
	p.blocks = append(p.blocks, cautionBlock())
	return p, nil
}

// describe says what to measure and what to expect.
func (d *campaignDesign) describe(reading int) string {
	r := &d.Readings[reading]
	t := r.Subject()
	if c := r.Conditions(); c != "" {
		t += " (" + c + ")"
	}
	return fmt.Sprintf("%s: expect %.2f K, scattering by %s K", t, r.Expected, number(r.U, 2))
}

// alone tells whether the target is one quantity, whose uncertainty has a unit.
func (d *campaignDesign) alone() bool { return d.Tell != nil || len(d.Quantities) == 1 }

// mean writes a mean standard uncertainty: of one quantity in its unit, of several as
// a share of the present one.
func (d *campaignDesign) mean(u float64) string {
	switch {
	case d.Tell != nil:
		return number(u, 3) + " of the way from rival to model"
	case len(d.Quantities) == 1:
		q := &d.Quantities[0]
		if q.Unit == "1" {
			return number(u, 3)
		}
		return number(u, 3) + " " + q.Unit
	}
	return fmt.Sprintf("%.1f %% of the present one", 100*u/d.Before)
}

func (d *campaignDesign) facts() table.Facts {
	f := table.Facts{
		{Label: "target", Value: d.Target.Criterion()},
		{Label: "candidates", Value: fmt.Sprintf("%d, and %d that cannot be used", len(d.Readings), len(d.Unusable))},
	}
	if d.alone() {
		f = append(f, table.Fact{Label: "standard uncertainty now", Value: d.mean(d.Before)})
	}
	f = append(f,
		table.Fact{Label: fmt.Sprintf("after the batch of %d", d.N), Value: d.mean(d.After)},
		table.Fact{Label: fmt.Sprintf("after %d evenly spaced", d.N), Value: fmt.Sprintf("%s: %.2f times that of the batch", d.mean(d.Spaced), d.Factor())})
	if times, ok := d.Worth(); ok && d.alone() {
		f = append(f, table.Fact{Label: "worth", Value: fmt.Sprintf("as much new information as %.3g evenly spaced measurements", times*float64(d.N))})
	}
	if d.Slack < 0.5 { // else the bound says nothing
		f = append(f, table.Fact{Label: "no batch of as many", Value: fmt.Sprintf("leaves less than %.1f %% of the uncertainty that this one leaves", 100*(1-d.Slack))})
	}
	if t := d.Tell; t != nil {
		return append(f,
			table.Fact{Label: "power now", Value: fmt.Sprintf("%s at 95 %%, if the model is true", chance(t.PowerBefore))},
			table.Fact{Label: "power after the batch", Value: fmt.Sprintf("%s; evenly spaced %s", chance(t.PowerAfter), chance(t.PowerSpaced))},
			table.Fact{Label: "right choice", Value: chance(t.RightAfter) + " that the model fits better than its rival after the batch"})
	}
	v := &d.Verdict
	if v.Reason != "" {
		return append(f, table.Fact{Label: "expected verdict", Value: "none: " + v.Reason})
	}
	return append(f, table.Fact{Label: "expected verdict", Value: fmt.Sprintf("on the batch alone the tuned model is found better than the untuned one with %s, worse with %s", chance(v.Better), chance(v.Worse))})
}

func chance(p float64) string {
	switch {
	case p > 0.995:
		return "a chance above 99 %"
	case p < 0.005:
		return "a chance below 1 %"
	}
	return fmt.Sprintf("a chance of %.0f %%", 100*p)
}

// candidateColumns are those that describe a candidate.
func candidateColumns() []table.Column {
	return []table.Column{
		{Name: "fluid", Title: "fluid"},
		{Name: "pressure", Title: "P", Unit: "kPa", Kind: table.KindNumber, Digits: 6},
		{Name: "method", Title: "method", Priority: 2},
		{Name: "sample", Title: "sample", Priority: 3},
		{Name: "expected", Title: "T", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true, Priority: 1},
	}
}

func candidateCells(r *campaign.Reading, notes ...string) []table.Cell {
	name := table.Text(r.Record.Key)
	for _, n := range notes {
		name = name.Note(n)
	}
	return []table.Cell{name, table.Num(r.Pressure / 1e3), table.Text(r.Method), table.Text(r.Conditions()), table.Num(r.Expected)}
}

// afterColumn is the uncertainty after a measurement.
func (d *campaignDesign) afterColumn() table.Column {
	c := table.Column{Name: "uncertainty_after", Title: "u after", Kind: table.KindNumber, Digits: 3}
	if !d.alone() {
		c.Name, c.Title, c.Unit, c.Digits, c.Fixed = "uncertainty_after", "u after", "%", 1, true
	} else if d.Tell == nil && d.Quantities[0].Unit != "1" {
		c.Unit = d.Quantities[0].Unit
	}
	return c
}

func (d *campaignDesign) afterCell(u float64) table.Cell {
	if !d.alone() {
		return table.Num(100 * u / d.Before)
	}
	return table.Num(u)
}

func (d *campaignDesign) singleTable(top int) *table.Table {
	n := min(top, len(d.Singles))
	t := &table.Table{Title: "Single next measurements", Columns: append([]table.Column{{Name: "rank", Title: "rank", Kind: table.KindInteger}}, append(candidateColumns(),
		d.afterColumn(),
		table.Column{Name: "gain", Title: "gain", Unit: "%", Kind: table.KindNumber, Digits: 2, Fixed: true},
		table.Column{Name: "repeats", Title: "repeats", Kind: table.KindText},
		table.Column{Name: "uncertainty_repeated", Title: "u then", Kind: table.KindNumber, Digits: 3, Priority: 4})...)}
	then := &t.Columns[len(t.Columns)-1]
	then.Unit, then.Digits, then.Fixed = d.afterColumn().Unit, d.afterColumn().Digits, d.afterColumn().Fixed
	for i := range d.Singles[:n] {
		s := &d.Singles[i]
		repeats, then := table.Missing(""), table.Missing("")
		if s.AtStop > 0 {
			text := fmt.Sprint(s.Repeats)
			if s.Bounded {
				text = "over " + text
			}
			repeats, then = table.Text(text), d.afterCell(s.AtStop)
		}
		t.Rows = append(t.Rows, append(append([]table.Cell{table.Int(i + 1)}, candidateCells(&d.Readings[s.Reading])...),
			d.afterCell(s.After), table.Num(100*s.Gain), repeats, then))
	}
	if !d.alone() {
		t.Notes = append(t.Notes, "Uncertainties in per cent of the present mean one.")
	}
	t.Notes = append(t.Notes, fmt.Sprintf("Repeats: how often to measure the same state until one more gains less than %.3g %%.", 100*d.Stop))
	if n < len(d.Singles) {
		t.Notes = append(t.Notes, fmt.Sprintf("%d further candidates; --top shows more, --format json has all.", len(d.Singles)-n))
	}
	return t
}

func (d *campaignDesign) stepTable() *table.Table {
	t := &table.Table{Title: fmt.Sprintf("Batch of %d, in the order of their worth", d.N), Columns: append([]table.Column{{Name: "step", Title: "step", Kind: table.KindInteger}},
		append(candidateColumns(), d.afterColumn())...)}
	why := map[int]string{}
	for _, g := range d.Groups {
		why[g.Reading] = g.Why
	}
	for i, s := range d.Steps {
		r := &d.Readings[s.Reading]
		cells := candidateCells(r)
		if text := why[s.Reading]; text != "" {
			cells = candidateCells(r, text)
			delete(why, s.Reading)
		}
		t.Rows = append(t.Rows, append(append([]table.Cell{table.Int(i + 1)}, cells...), d.afterCell(s.After)))
	}
	if !d.alone() {
		t.Notes = append(t.Notes, "Uncertainties in per cent of the present mean one.")
	}
	return t
}

func (d *campaignDesign) parametersTable() *table.Table {
	t := &table.Table{Title: "Parameters before and after the batch", Columns: []table.Column{
		{Name: "parameter", Title: "parameter"},
		{Name: "value", Title: "value", Kind: table.KindNumber, Digits: 4},
		{Name: "before", Title: "u now", Kind: table.KindNumber, Digits: 3},
		{Name: "after", Title: "u after", Kind: table.KindNumber, Digits: 3},
		{Name: "unit", Title: "unit"},
	}}
	const most = 25
	for i := range d.Parameters {
		x := &d.Parameters[i]
		if i == most && len(d.Parameters) > most+1 {
			t.Notes = append(t.Notes, fmt.Sprintf("%d further parameters; --format json has all.", len(d.Parameters)-most))
			break
		}
		name := table.Text(x.Label)
		if x.Assumed {
			name = name.Note("only its bounds are known")
		}
		unit := x.Unit
		if unit == "1" {
			unit = ""
		}
		t.Rows = append(t.Rows, []table.Cell{name, table.Num(x.Value), table.Num(x.Before), table.Num(x.After), table.Text(unit)})
	}
	return t
}

func (d *campaignDesign) limitTable() *table.Table {
	t := &table.Table{Title: "Predicted limits before and after the batch", Columns: []table.Column{
		{Name: "quantity", Title: "quantity"},
		{Name: "value", Title: "T", Unit: "K", Kind: table.KindNumber, Digits: 2, Fixed: true},
		{Name: "before", Title: "u now", Unit: "K", Kind: table.KindNumber, Digits: 3},
		{Name: "after", Title: "u after", Unit: "K", Kind: table.KindNumber, Digits: 3},
		{Name: "spaced", Title: "evenly spaced", Unit: "K", Kind: table.KindNumber, Digits: 3},
	}, Notes: []string{"Of the limit itself; a single reading scatters about it as well."}}
	for i := range d.Quantities {
		q := &d.Quantities[i]
		t.Rows = append(t.Rows, []table.Cell{table.Text(q.Label), table.Num(q.Value), table.Num(q.Before), table.Num(q.After), table.Num(q.Spaced)})
	}
	return t
}

func (d *campaignDesign) checkTable() *table.Table {
	c := d.check
	t := &table.Table{Title: fmt.Sprintf("The plan carried out in %d simulated campaigns", c.Campaigns), Columns: []table.Column{
		{Name: "quantity", Title: "quantity"}, {Name: "campaign", Title: "measured"},
		{Name: "promised", Title: "promised u", Kind: table.KindNumber, Digits: 3},
		{Name: "realised", Title: "realised", Kind: table.KindNumber, Digits: 3},
		{Name: "ratio", Title: "ratio", Kind: table.KindNumber, Digits: 2, Fixed: true},
		{Name: "ratio_se", Title: "± ", Kind: table.KindNumber, Digits: 2, Fixed: true, Priority: 1},
		{Name: "bias", Title: "bias", Kind: table.KindNumber, Digits: 3, Priority: 2},
		{Name: "unit", Title: "unit", Priority: 3},
	}}
	for k, list := range [][]campaign.Realised{c.Quantities, c.Spaced} {
		for _, r := range list {
			unit := r.Unit
			if unit == "1" {
				unit = ""
			}
			t.Rows = append(t.Rows, []table.Cell{table.Text(r.Label), table.Text([]string{"batch", "evenly spaced"}[k]), table.Num(r.Promised), table.Num(r.SD),
				table.Num(r.Ratio()), table.Num(r.SE / r.Promised), table.Num(r.Bias), table.Text(unit)})
		}
	}
	if c.Failed > 0 {
		t.Notes = append(t.Notes, fmt.Sprintf("%d campaigns did not calibrate and are not counted; the first: %s.", c.Failed, c.FirstError))
	}
	if c.AtBound > 0 {
		t.Notes = append(t.Notes, fmt.Sprintf("In %d of the campaigns a parameter stood at a bound.", c.AtBound))
	}
	if d.Tell != nil {
		t.Notes = append(t.Notes, fmt.Sprintf("The model was likelier than its rival in %.1f %% of the campaigns; the plan says %.1f %%.", 100*c.Right, 100*c.PromisedRight))
	}
	for _, n := range c.Notes {
		t.Notes = append(t.Notes, n+".")
	}
	return t
}

// sizes are the sample sizes for the reading that is worth most.
func (d *campaignDesign) sizes() ([]campaign.Droplets, error) {
	return d.SampleSizes(d.Singles[0].Reading, campaign.HalfWidths(), campaign.Levels())
}

func sizesTable(d *campaignDesign, sizes []campaign.Droplets) *table.Table {
	r := &d.Readings[d.Singles[0].Reading]
	t := &table.Table{Title: "How many droplets", Columns: []table.Column{{Name: "half_width", Title: "±", Unit: "K", Kind: table.KindNumber, Digits: 1, Fixed: true}},
		Notes: []string{fmt.Sprintf("Mean: alike readings that scatter by %s K (%s), with Student's t; errors that they share do not average out.", number(r.U, 2), r.Subject())}}
	through := len(d.Target.Limits) > 0
	for _, l := range campaign.Levels() {
		t.Columns = append(t.Columns, table.Column{Name: fmt.Sprintf("mean_%.0f", 100*l), Title: fmt.Sprintf("mean, %.0f %%", 100*l), Kind: table.KindInteger})
	}
	if through {
		for _, l := range campaign.Levels() {
			t.Columns = append(t.Columns, table.Column{Name: fmt.Sprintf("planned_%.0f", 100*l), Title: fmt.Sprintf("planned, %.0f %%", 100*l), Kind: table.KindInteger})
		}
		t.Notes = append(t.Notes, fmt.Sprintf("Planned: further measurements, each the best next one, until the %s is known as well through the model; a dash: not within %d.", d.Quantities[0].Label, campaign.MostPlanned))
	}
	n := len(campaign.Levels())
	for i := 0; i+n <= len(sizes); i += n {
		row := []table.Cell{table.Num(sizes[i].Half)}
		for _, s := range sizes[i : i+n] {
			row = append(row, table.Int(s.Mean))
		}
		for _, s := range sizes[i : i+n] {
			switch {
			case through && s.Reached:
				row = append(row, table.Int(s.Planned))
			case through:
				row = append(row, table.Missing(""))
			}
		}
		t.Rows = append(t.Rows, row)
	}
	return t
}

// stored are the energies of the different readings of the batch, and why some
// have none.
func (d *campaignDesign) stored() (out []campaign.Stored, failed []string) {
	for _, g := range d.Groups {
		s, err := d.Store(g.Reading)
		if err != nil {
			failed = append(failed, "No energy of "+d.Readings[g.Reading].Subject()+": "+err.Error()+".")
		}
		out = append(out, s)
	}
	return out, failed
}

func storedTable(stored []campaign.Stored, failed []string) *table.Table {
	t := &table.Table{Title: "What a sample stores at its limit", Columns: []table.Column{
		{Name: "fluid", Title: "fluid"},
		{Name: "pressure", Title: "P", Unit: "kPa", Kind: table.KindNumber, Digits: 6, Priority: 2},
		{Name: "temperature", Title: "T", Unit: "K", Kind: table.KindNumber, Digits: 1, Fixed: true, Priority: 1},
		{Name: "volume", Title: "sample"},
		{Name: "energy", Title: "energy", Unit: "J", Kind: table.KindNumber, Digits: 2},
		{Name: "specific_energy", Title: "per mass", Unit: "kJ/kg", Kind: table.KindNumber, Digits: 3},
		{Name: "expansion", Title: "grows by", Kind: table.KindNumber, Digits: 3, Priority: 3},
		{Name: "closed_pressure", Title: "closed vessel", Unit: "kPa", Kind: table.KindNumber, Digits: 4},
		{Name: "hazard", Title: "hazard", Priority: 4, Wrap: 24},
	}, Notes: append([]string{"Energy: upper bound of the work that the sample can do when it turns to vapour at 101.325 kPa, from the equation of state (heat, if any, taken up at the limit temperature). Burning and the energy of a hot bath are not in it. Closed vessel: the saturation pressure that it must hold."}, failed...)}
	for _, s := range stored {
		sample, energy := table.Missing("no sample volume stated"), table.Missing("no sample volume stated")
		if s.Volume > 0 {
			sample, energy = table.Text(campaign.Size(s.Volume)), table.Num(s.Energy)
		}
		t.Rows = append(t.Rows, []table.Cell{table.Text(s.Fluid), table.Num(s.Pressure / 1e3), table.Num(s.Temperature), sample, energy,
			table.Num(s.SpecificEnergy / 1e3), table.Num(s.Expansion), table.Num(s.SaturationP / 1e3), table.Text(s.Hazard)})
	}
	return t
}

func (d *campaignDesign) unusableTable() *table.Table {
	t := &table.Table{Title: "Candidates that cannot be used", Columns: []table.Column{{Name: "fluid", Title: "fluid"},
		{Name: "pressure", Title: "P", Unit: "kPa", Kind: table.KindNumber, Digits: 6}, {Name: "method", Title: "method", Priority: 1}, {Name: "reason", Title: "reason", Wrap: 30}}}
	const most = 12
	for i, u := range d.Unusable {
		if i == most && len(d.Unusable) > most+1 {
			t.Notes = append(t.Notes, fmt.Sprintf("%d more; --format json has all.", len(d.Unusable)-most))
			break
		}
		t.Rows = append(t.Rows, []table.Cell{table.Text(u.Record.Key), table.Num(u.Pressure / 1e3), table.Text(u.Method), table.Text(u.Reason)})
	}
	return t
}

// cautions of the JSON form.
func (d *campaignDesign) cautions(stored []campaign.Stored) []string {
	return append(campaign.Precautions(stored), caution.Sentences()...)
}
