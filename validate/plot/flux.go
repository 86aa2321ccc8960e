package plot

import (
	"fmt"
	"math"

	"limsup/eos/nucleation"
	"limsup/fit"
)

// State is where the figures of one state are drawn. A zero temperature means the
// limit at the pressure; a zero pressure the one with most rows.
type State struct {
	T, P float64 // K, Pa
}

// complete fills in the state.
func (in *Input) complete(s State) (State, error) {
	if s.P == 0 {
		s.P = in.commonPressure()
	}
	var err error
	if s.T == 0 {
		s.T, _, _, err = in.limitAt(s.P)
	}
	return s, err
}

// Flux shows the nucleation flux of a superheated liquid against temperature at one
// pressure, with the threshold and the rows measured at that pressure.
//
// Errors: *EmptyError; those of the physics.
func Flux(in *Input, s State) (*Figure, error) {
	if s.P == 0 {
		s.P = in.commonPressure()
	}
	q := fit.Query{Record: in.Record}
	v := in.Model.Variant
	v.Limit = fit.Kinetic // a flux is asked for, whatever limit the model predicts
	ph, err := fit.NewPhysics(v, in.Record, in.Model.Values(&q))
	if err != nil {
		return nil, err
	}
	f := &Figure{ID: "flux-" + slug(in.Record.Key), Kind: "flux",
		Title:   fmt.Sprintf("Nucleation flux of %s at %s kPa", Visible(in.Record.Key), significant(s.P/1e3, 6)),
		Caption: "The flux climbs by decades within a kelvin or two. That is why a limit is sharp although boiling is a matter of chance, and why the threshold may be wrong by a decade at the cost of a fraction of a kelvin. Measured points stand at the reading, less the offset of their method, and at the flux at which their own experiment sees half of its samples boil; their distance to the curve along the temperature axis is the residual."}
	obs := in.observations()
	here := func(i int) bool {
		return in.mine(i) && math.Abs(obs[i].Pressure-s.P) <= 1e-9*math.Abs(s.P)
	}
	levels := []float64{ph.Threshold}
	// The offset of a method is what its prediction has beyond the limit of the fluid.
	offset := map[int]float64{}
	for i := range obs {
		if !here(i) || !in.Assessment.Rows[i].HasFlux {
			continue
		}
		t := nucleation.Threshold(ph.Threshold)
		if obs[i].OwnFlux {
			t = obs[i].Target
		}
		if l, err := ph.Fluid.KineticLimit(s.P, t, in.Assessment.Rows[i].Predicted); err == nil {
			offset[i] = in.Assessment.Rows[i].Predicted - l.T
			levels = append(levels, in.Assessment.Rows[i].Log10Flux)
		}
	}
	points := pointsByMethod(f, obs, in.Assessment, func(i int) bool { _, ok := offset[i]; return ok }, func(i int) (float64, float64) {
		return obs[i].Temperature - offset[i], in.Assessment.Rows[i].Log10Flux
	})
	lo, hi := levels[0], levels[0]
	for _, l := range levels {
		lo, hi = math.Min(lo, l), math.Max(hi, l)
	}
	spinodal, hasSpinodal := 0.0, false
	if x, err := ph.Model.LiquidSpinodalTemperature(s.P); err == nil {
		spinodal, hasSpinodal = x.T, true
	}
	from, err := ph.Fluid.KineticLimit(s.P, nucleation.Threshold(lo-8), 0)
	if err != nil {
		return nil, &EmptyError{Figure: f.ID, About: in.Record.Key, Err: err}
	}
	end := 0.0
	if x, err := ph.Fluid.KineticLimit(s.P, nucleation.Threshold(hi+4), 0); err == nil {
		end = x.T
	} else if hasSpinodal {
		end = spinodal * (1 - 1e-6)
	} else {
		return nil, &EmptyError{Figure: f.ID, About: in.Record.Key, Err: err}
	}
	curve := Series{Name: "flux", Style: Style{Colour: Ink}}
	for _, T := range linear(from.T, end, sweep) {
		if x, err := ph.Fluid.Flux(T, s.P); err == nil {
			curve.X, curve.Y = append(curve.X, T), append(curve.Y, x.Log10J())
		}
	}
	p := Panel{X: Axis{Label: "T/K"}, Y: Axis{Label: "lg(J/(1/(m³ s)))"}, Series: []Series{curve,
		{Name: "threshold", Shape: Level, Y: []float64{ph.Threshold}, Style: Style{Colour: Quiet, Dash: Dashed}}}}
	if l, err := ph.Fluid.KineticLimit(s.P, nucleation.Threshold(ph.Threshold), 0); err == nil {
		p.Series = append(p.Series, Series{Name: "kinetic limit at the threshold", Shape: Points, X: []float64{l.T}, Y: []float64{ph.Threshold},
			Text: []string{fmt.Sprintf("kinetic limit %s K at lg J* = %s", fixed(l.T, 2), significant(ph.Threshold, 4))}, Style: Style{Colour: Ink, Marker: Plus}})
	} else {
		f.Notes = append(f.Notes, err.Error()+".")
	}
	if hasSpinodal && spinodal < end+0.3*(end-from.T) {
		p.Series = append(p.Series, Series{Name: "spinodal", Shape: Upright, X: []float64{spinodal}, Style: Style{Colour: Ink, Dash: Dotted}})
	} else if hasSpinodal {
		f.Notes = append(f.Notes, fmt.Sprintf("The spinodal, %s K, lies to the right of the axis.", fixed(spinodal, 2)))
	}
	p.Series = append(p.Series, points...)
	f.Panels = []Panel{p}
	return f, nil
}

// Embryo shows the free energy of formation of a bubble against its radius at a
// state, and 5 K and 10 K below it.
//
// Errors: those of the physics.
func Embryo(in *Input, s State) (*Figure, error) {
	q := fit.Query{Record: in.Record}
	v := in.Model.Variant
	v.Limit = fit.Kinetic
	ph, err := fit.NewPhysics(v, in.Record, in.Model.Values(&q))
	if err != nil {
		return nil, err
	}
	if in.Model.Variant.Limit == fit.Spinodal && s.T == 0 {
		// On the spinodal there is no barrier left; the usual threshold has one.
		if s.P == 0 {
			s.P = in.commonPressure()
		}
		l, err := ph.Fluid.KineticLimit(s.P, nucleation.Threshold(ph.Threshold), 0)
		if err != nil {
			return nil, err
		}
		s.T = l.T
	}
	if s, err = in.complete(s); err != nil {
		return nil, err
	}
	e, err := ph.Fluid.Embryo(s.T, s.P)
	if err != nil {
		return nil, err
	}
	f := &Figure{ID: "embryo-" + slug(in.Record.Key), Kind: "embryo",
		Title:   fmt.Sprintf("Free energy of an embryo of %s at %s kPa", Visible(in.Record.Key), significant(s.P/1e3, 6)),
		Caption: fmt.Sprintf("At %s K the critical %s has a radius of %s nm and a barrier of %s kT. To the left of the maximum an embryo collapses, to the right it grows: the maximum is an unstable equilibrium. A few kelvin further from the limit the hill is much higher, and the flux falls with exp(−ΔG*/kT).", fixed(s.T, 2), e.Kind, significant(e.Radius*1e9, 3), significant(e.BarrierOverKT, 3))}
	p := Panel{X: Axis{Label: "r/nm"}, Y: Axis{Label: "ΔG/kT"}}
	way := -1.0
	if e.Kind == nucleation.Droplet {
		way = 1
	}
	peaks := Series{Name: "critical radius r*", Shape: Points, Style: Style{Colour: Ink, Marker: Circle}}
	for i, dT := range []float64{0, 5, 10} {
		x, err := ph.Fluid.Embryo(s.T+way*dT, s.P)
		if err != nil || x.Kind != e.Kind {
			f.Notes = append(f.Notes, fmt.Sprintf("No embryo %s K away: the phase is stable or does not exist there.", significant(dT, 3)))
			continue
		}
		kT := x.Barrier / x.BarrierOverKT
		c := Series{Name: fixed(x.T, 2) + " K", Style: Style{Colour: []Colour{Second, First, Third}[i], Dash: []Dash{Solid, LongDashed, DashDotted}[i]}}
		for _, r := range linear(0, 1.45*x.Radius, sweep) {
			c.X, c.Y = append(c.X, r*1e9), append(c.Y, x.FreeEnergy(r)/kT)
		}
		p.Series = append(p.Series, c)
		peaks.X, peaks.Y = append(peaks.X, x.Radius*1e9), append(peaks.Y, x.BarrierOverKT)
		peaks.Text = append(peaks.Text, fmt.Sprintf("%s K: r* = %s nm, ΔG* = %s kT", fixed(x.T, 2), significant(x.Radius*1e9, 4), significant(x.BarrierOverKT, 4)))
	}
	p.Series = append(p.Series, Series{Name: "", Shape: Level, Y: []float64{0}, Style: Style{Colour: Ink, Width: 0.8}}, peaks)
	f.Panels = []Panel{p}
	return f, nil
}
