package plot

import (
	"fmt"
	"math"

	"limsup/eos"
)

// Isotherm shows pressure against molar volume along the isotherm of the state's
// temperature, with the binodal and both spinodals of the fluid.
//
// Errors: *EmptyError above the critical temperature; those of the physics.
func Isotherm(in *Input, s State) (*Figure, error) {
	f, m, iso, err := subcritical(in, s, "isotherm")
	if err != nil {
		return nil, err
	}
	f.Title = fmt.Sprintf("Isotherm of %s at %s K", Visible(in.Record.Key), fixed(iso.T, 2))
	f.Caption = "Volume grows from left to right, from liquid to vapour. Under the binodal the saturated phases coexist at the pressure of the level line. The dashed stretches of the isotherm, between binodal and spinodal, are metastable: superheated liquid on the left, supersaturated vapour on the right. The dotted stretch, where pressure rises with volume, cannot exist."
	top := 1.15 * m.Pc
	bottom := math.Min(iso.Liquid.P, 0) - 0.02*m.Pc
	first, err := m.Liquid(iso.T, top)
	if err != nil {
		return nil, err
	}
	last := 4 * iso.Saturation.Vv
	sat := &iso.Saturation
	p := Panel{X: Axis{Label: "v/(cm³/mol)", Log: true}, Y: Axis{Label: "P/MPa"}}
	p.Series, err = lines(iso, first, last, func(x eos.Point) (float64, float64) { return x.V * 1e6, x.P / mega })
	if err != nil {
		return nil, err
	}
	bin := Series{Name: "binodal", Style: Style{Colour: First, Dash: LongDashed}}
	spin := Series{Name: "spinodals", Style: Style{Colour: Third, Dash: DashDotted}}
	type side struct{ vl, pl, vv, pv float64 }
	var sats, spins []side
	// Towards the critical point both curves become flat in volume as the square root
	// of the distance, so steps grow with its square.
	for i := range sweep {
		u := float64(i) / float64(sweep-1)
		T := m.Tc * (1 - 1e-6 - 0.35*u*u)
		if T <= m.MinT {
			break
		}
		if x, err := m.Saturation(T); err == nil && x.Vv <= last {
			sats = append(sats, side{x.Vl, x.P, x.Vv, x.P})
		}
		if l, v, err := m.Spinodal(T); err == nil && l.P >= bottom && v.V <= last {
			spins = append(spins, side{l.V, l.P, v.V, v.P})
		}
	}
	for _, c := range []struct {
		from []side
		to   *Series
	}{{sats, &bin}, {spins, &spin}} {
		for i := len(c.from) - 1; i >= 0; i-- {
			c.to.X, c.to.Y = append(c.to.X, c.from[i].vl*1e6), append(c.to.Y, c.from[i].pl/mega)
		}
		for _, x := range c.from {
			c.to.X, c.to.Y = append(c.to.X, x.vv*1e6), append(c.to.Y, x.pv/mega)
		}
	}
	p.Series = append(p.Series, bin, spin,
		Series{Name: "saturation at this temperature", X: []float64{sat.Vl * 1e6, sat.Vv * 1e6}, Y: []float64{sat.P / mega, sat.P / mega}, Style: Style{Colour: Ink, Width: 0.8}},
		Series{Name: "saturated phases", Shape: Points, X: []float64{sat.Vl * 1e6, sat.Vv * 1e6}, Y: []float64{sat.P / mega, sat.P / mega},
			Text:  []string{statePoint("saturated liquid", sat.Vl, sat.P), statePoint("saturated vapour", sat.Vv, sat.P)},
			Style: Style{Colour: First, Marker: Circle}},
		Series{Name: "limits of stability", Shape: Points, X: []float64{iso.Liquid.V * 1e6, iso.Vapour.V * 1e6}, Y: []float64{iso.Liquid.P / mega, iso.Vapour.P / mega},
			Text:  []string{statePoint("liquid spinodal", iso.Liquid.V, iso.Liquid.P), statePoint("vapour spinodal", iso.Vapour.V, iso.Vapour.P)},
			Style: Style{Colour: Third, Marker: Diamond}})
	f.Panels = []Panel{p}
	return f, nil
}

func statePoint(name string, v, P float64) string {
	return fmt.Sprintf("%s: %s cm³/mol, %s MPa", name, significant(v*1e6, 5), significant(P/mega, 5))
}

// subcritical begins a figure of a kind that shows an isotherm of a state, which must
// lie below the critical temperature.
func subcritical(in *Input, s State, kind string) (*Figure, *eos.Model, *eos.Isotherm, error) {
	s, err := in.complete(s)
	if err != nil {
		return nil, nil, nil, err
	}
	ph, err := in.equation()
	if err != nil {
		return nil, nil, nil, err
	}
	m := &ph.Model
	iso, err := m.Isotherm(s.T)
	if err != nil {
		return nil, nil, nil, err
	}
	f := &Figure{ID: kind + "-" + slug(in.Record.Key), Kind: kind}
	if !iso.Subcritical {
		return nil, nil, nil, &EmptyError{Figure: f.ID, About: in.Record.Key, Err: &eos.DomainError{Fluid: m.Fluid, Equation: m.Equation, Quantity: "binodal", Argument: "temperature", Value: s.T, Lo: m.MinT, Hi: m.Tc, Unit: "K"}}
	}
	return f, m, &iso, nil
}

// stretch is a part of an isotherm of one kind of state.
type stretch struct {
	name     string
	from, to float64 // m³/mol
	style    Style
}

// stretches cut an isotherm at saturation and at the spinodals.
func stretches(iso *eos.Isotherm, first, last float64) []stretch {
	s := &iso.Saturation
	stable, meta := Style{Colour: Ink, Width: 1.8}, Style{Colour: Second, Dash: Dashed, Width: 2.2}
	return []stretch{
		{"isotherm, stable", math.Min(first, s.Vl), s.Vl, stable},
		{"metastable", s.Vl, iso.Liquid.V, meta},
		{"unstable", iso.Liquid.V, iso.Vapour.V, Style{Colour: Quiet, Dash: Dotted, Width: 1.8}},
		{"metastable", iso.Vapour.V, s.Vv, meta},
		{"isotherm, stable", s.Vv, last, stable},
	}
}

// lines draw the stretches of an isotherm by the coordinates at of a state.
func lines(iso *eos.Isotherm, first, last float64, at func(eos.Point) (x, y float64)) ([]Series, error) {
	var out []Series
	for _, part := range stretches(iso, first, last) {
		line := Series{Name: part.name, Style: part.style}
		for _, v := range geometric(part.from, part.to, sweep) {
			s, err := iso.At(v)
			if err != nil {
				return nil, err
			}
			x, y := at(s)
			line.X, line.Y = append(line.X, x), append(line.Y, y)
		}
		out = append(out, line)
	}
	return out, nil
}

// Potential shows the chemical potential against pressure along an isotherm.
//
// Errors: as Isotherm.
func Potential(in *Input, s State) (*Figure, error) {
	f, m, iso, err := subcritical(in, s, "potential")
	if err != nil {
		return nil, err
	}
	f.Title = fmt.Sprintf("Chemical potential of %s at %s K", Visible(in.Record.Key), fixed(iso.T, 2))
	f.Caption = "Of two phases at one pressure the one with the lower chemical potential is stable. The branches of liquid and vapour cross at saturation, the zero of the scale. Beyond the crossing each goes on as a metastable phase (dashed) up to its cusp, the spinodal; the arc between the cusps is unstable."
	sat := &iso.Saturation
	// As much of the stable branches as the metastable ones extend.
	span := math.Max(iso.Vapour.P-sat.P, math.Min(sat.P-iso.Liquid.P, sat.P))
	first, err := m.Liquid(iso.T, sat.P+0.6*span)
	if err != nil {
		return nil, err
	}
	last, err := m.Vapour(iso.T, math.Max(0.55*sat.P, sat.P-0.6*span))
	if err != nil {
		return nil, err
	}
	p := Panel{X: Axis{Label: "P/MPa"}, Y: Axis{Label: "(μ − μ(saturation))/(J/mol)"}}
	p.Series, err = lines(iso, first, last, func(x eos.Point) (float64, float64) { return x.P / mega, x.Mu })
	if err != nil {
		return nil, err
	}
	cusps := Series{Name: "limits of stability", Shape: Points, Style: Style{Colour: Third, Marker: Diamond}}
	for i, x := range []eos.SpinodalState{iso.Liquid, iso.Vapour} {
		at, err := iso.At(x.V)
		if err != nil {
			return nil, err
		}
		cusps.X, cusps.Y = append(cusps.X, at.P/mega), append(cusps.Y, at.Mu)
		cusps.Text = append(cusps.Text, fmt.Sprintf("%s spinodal: %s MPa, μ %s J/mol", []string{"liquid", "vapour"}[i], significant(at.P/mega, 5), significant(at.Mu, 4)))
	}
	p.Series = append(p.Series, cusps,
		Series{Name: "saturation", Shape: Points, X: []float64{sat.P / mega}, Y: []float64{0}, Text: []string{fmt.Sprintf("saturation: %s MPa", significant(sat.P/mega, 5))}, Style: Style{Colour: First, Marker: Circle}})
	f.Panels = []Panel{p}
	return f, nil
}
