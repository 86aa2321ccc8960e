package fit

import (
	"cmp"
	"errors"
	"fmt"
	"math"
	"slices"

	"limsup/data/fluid"
	"limsup/data/measure"
	"limsup/eos"
	"limsup/eos/nucleation"
)

// Observation is one usable row of measurements.
type Observation struct {
	measure.Row
	Record *fluid.Record
	// OwnFlux is set when the row carries the flux at which its limit is reached;
	// Target is that flux. Other rows stand at the threshold.
	OwnFlux bool
	Target  nucleation.Target
	// Hazard is −ln of the share of such samples that survive up to Target: ln 2 at a
	// median, 1 at a mean waiting time; 0 where the row states no volume and time or rate.
	Hazard float64
	// Start is the limit predicted with the start values, in K.
	Start float64
}

// Data are the observations that a variant can be compared with.
type Data struct {
	Observations []Observation
	Excluded     []measure.Exclusion
	Warnings     []measure.Warning
	Files        []measure.FileInfo
}

// OwnFlux counts the observations that carry their own flux.
func (d *Data) OwnFlux() int {
	n := 0
	for i := range d.Observations {
		if d.Observations[i].OwnFlux {
			n++
		}
	}
	return n
}

// Subset returns the data restricted to the observations whose index keep allows.
func (d *Data) Subset(keep func(i int) bool) *Data {
	n := 0
	for i := range d.Observations {
		if keep(i) {
			n++
		}
	}
	s := &Data{Files: d.Files, Observations: make([]Observation, 0, n)}
	for i := range d.Observations {
		if keep(i) {
			s.Observations = append(s.Observations, d.Observations[i])
		}
	}
	return s
}

// rowTarget is the flux of a row, from the most direct statement it carries, and
// the hazard there.
func rowTarget(r *measure.Row) (t nucleation.Target, own bool, hazard float64) {
	switch {
	case r.Flux > 0:
		return nucleation.Stated(r.Flux), true, 0
	case r.Lifetime > 0 && r.Volume > 0:
		return nucleation.Lived(r.Volume, r.Lifetime), true, 1
	case r.HoldingTime > 0 && r.Volume > 0:
		return nucleation.Held(r.Volume, r.HoldingTime), true, math.Ln2
	case r.HeatingRate > 0 && r.Volume > 0:
		return nucleation.Heated(r.Volume, r.HeatingRate), true, math.Ln2
	}
	return nucleation.Target{}, false, 0
}

// Prepare pairs rows with fluids and finds out which of them the plan's variant
// can predict at its start values. Rows that cannot be used are listed with their
// reason; none is dropped in silence.
//
// Errors: *fluid.UnknownError for a fluid that the library does not hold;
// whatever the variant reports that is not a property of one row.
func Prepare(set *measure.Set, lib *fluid.Library, p Plan) (*Data, error) {
	p, err := p.Complete()
	if err != nil {
		return nil, err
	}
	d := &Data{Excluded: append([]measure.Exclusion(nil), set.Excluded...), Warnings: set.Warnings, Files: set.Files}
	exclude := func(r *measure.Row, reason string) {
		d.Excluded = append(d.Excluded, measure.Exclusion{File: r.File, Line: r.Line, Where: r.Where, Fluid: r.Key, Reason: reason})
	}
	type state struct {
		record *fluid.Record
		values Values
	}
	cache := map[state]*Physics{}
	for i := range set.Rows {
		r := &set.Rows[i]
		rec, err := lib.Find(r.Key)
		if err != nil {
			return nil, fmt.Errorf("%s: %w", r.At(), err)
		}
		if reason := unphysical(r, rec, &p.Variant); reason != "" {
			exclude(r, reason)
			continue
		}
		o := Observation{Row: *r, Record: rec}
		o.Key = rec.Key
		o.Target, o.OwnFlux, o.Hazard = rowTarget(r)
		values, err := p.startValues(r)
		if err != nil {
			return nil, err
		}
		key := state{rec, values}
		ph := cache[key]
		if ph == nil {
			ph, err = NewPhysics(p.Variant, rec, values)
			if err != nil {
				if reason, ok := rowReason(err); ok {
					exclude(r, reason)
					continue
				}
				return nil, fmt.Errorf("%s: %w", r.At(), err)
			}
			cache[key] = ph
		}
		l, err := ph.limit(r.Pressure, o.Target, o.OwnFlux, r.Temperature)
		if err != nil {
			if reason, ok := rowReason(err); ok {
				exclude(r, "not predictable with "+p.Variant.Name()+" at the start values: "+reason)
				continue
			}
			return nil, fmt.Errorf("%s: %w", r.At(), err)
		}
		o.Start = l.T
		d.Observations = append(d.Observations, o)
	}
	d.sortExcluded()
	return d, nil
}

// sortExcluded brings exclusions of the reader and of Prepare into the order of files and lines.
func (d *Data) sortExcluded() {
	order := map[string]int{}
	for i, f := range d.Files {
		order[f.Name] = i
	}
	slices.SortStableFunc(d.Excluded, func(a, b measure.Exclusion) int {
		return cmp.Or(cmp.Compare(order[a.File], order[b.File]), cmp.Compare(a.Line, b.Line))
	})
}

// rowReason tells whether an error is a property of the row (its fluid, its
// state) rather than of the computation, and gives its text.
func rowReason(err error) (string, bool) {
	var (
		noLimit     *nucleation.NoLimitError
		domain      *eos.DomainError
		unavailable *UnavailableError
		state       *nucleation.StateError
		phase       *eos.PhaseError
	)
	if errors.As(err, &noLimit) || errors.As(err, &domain) || errors.As(err, &unavailable) || errors.As(err, &state) || errors.As(err, &phase) {
		return err.Error(), true
	}
	return "", false
}

// unphysical tells why a row cannot be a superheat limit, whatever the model.
func unphysical(r *measure.Row, rec *fluid.Record, v *Variant) string {
	if Tc := rec.CriticalTemperature.Value; r.Temperature >= Tc {
		return fmt.Sprintf("temperature %.6g K is not below the critical temperature of %s, %.6g K", r.Temperature, rec.Key, Tc)
	}
	if Pc := rec.CriticalPressure.Value; r.Pressure >= Pc {
		return fmt.Sprintf("pressure %.6g kPa is not below the critical pressure of %s, %.6g kPa", r.Pressure/1e3, rec.Key, Pc/1e3)
	}
	psat, source, ok := saturationPressure(r.Temperature, rec, v)
	if ok && r.Pressure >= psat {
		return fmt.Sprintf("not superheated: at %.6g K %s boils at %.4g kPa (%s), the row states %.6g kPa", r.Temperature, rec.Key, psat/1e3, source, r.Pressure/1e3)
	}
	return ""
}

// saturationPressure is the fluid's own correlation where it reaches, else that
// of the untuned equation.
func saturationPressure(T float64, rec *fluid.Record, v *Variant) (p float64, source string, ok bool) {
	if rec.VapourPressure != nil {
		if lo, hi := rec.VapourPressure.Range(); T >= lo && T <= hi {
			if p, _, err := rec.VapourPressure.At(T); err == nil {
				return p, "its vapour pressure correlation", true
			}
		}
	}
	e, err := v.equation()
	if err != nil {
		return 0, "", false
	}
	m, err := eos.NewModel(e, Substance(rec), e.Untuned())
	if err != nil {
		return 0, "", false
	}
	s, err := m.Saturation(T)
	if err != nil {
		return 0, "", false
	}
	return s.P, "untuned " + e.Name + " equation", true
}

// startValues are the parameters of a row before tuning.
func (p *Plan) startValues(r *measure.Row) (Values, error) {
	var out Values
	for i, field := range out.fields() {
		q, err := parameterOf(locationNames[i], &p.Variant)
		if err != nil {
			return out, err
		}
		group := ""
		if t, ok := p.term(q.Name); ok {
			group = groupOf(t.By, r)
		}
		*field = p.value(q, group)
	}
	return out, nil
}

// locationNames are the parameters that move a predicted limit, in the order of
// Values.fields, then the offset.
var locationNames = [...]string{Threshold, Prefactor, Attraction, Covolume, Slope, SurfaceTension, Tolman, Offset}

const (
	locations  = len(locationNames)
	locOffset  = locations - 1
	physicals  = locations - 1
	locThresh  = 0
	locPrefact = 1
)

func (v *Values) fields() [physicals]*float64 {
	return [physicals]*float64{&v.Threshold, &v.Prefactor, &v.Attraction, &v.Covolume, &v.Slope, &v.SurfaceTension, &v.Tolman}
}

// groupOf is the group of a row.
func groupOf(by By, r *measure.Row) string {
	name := ""
	switch by {
	case Shared:
		return ""
	case ByFluid:
		name = r.Key
	case ByMethod:
		name = r.Method
	case ByBatch:
		name = r.Batch
	}
	if name == "" {
		return "(none)"
	}
	return name
}

// limitValue is a predicted limit with its derivatives.
type limitValue struct {
	T         float64            // K
	d         [locations]float64 // ∂T/∂location; the offset's is 0
	dTdP      float64            // K/Pa
	steepness float64            // dlnJ/dT, 1/K; 0 for the spinodal
	lnJ       float64
	held      bool // see nucleation.Flux
	// atSpinodal is set where the flux does not reach the target and the spinodal
	// stands in; lnJ and steepness are then 0.
	atSpinodal bool
}

// limit predicts the limit at P for a row target or, without one, the threshold.
func (ph *Physics) limit(P float64, t nucleation.Target, own bool, guess float64) (limitValue, error) {
	return ph.find(P, t, own, guess, false)
}

// find is limit; a brief error does not tell how far from its target the flux stays.
func (ph *Physics) find(P float64, t nucleation.Target, own bool, guess float64, brief bool) (limitValue, error) {
	var l limitValue
	if ph.Variant.Limit == Spinodal {
		return ph.spinodal(P)
	}
	if !own {
		t = nucleation.Threshold(ph.Threshold)
	}
	find := ph.Fluid.KineticLimit
	if brief {
		find = ph.Fluid.LimitIfAny
	}
	k, err := find(P, t, guess)
	if err != nil {
		return l, err
	}
	l.T, l.dTdP, l.steepness, l.lnJ, l.held = k.T, k.DGiven, k.DT, k.LnJ, k.Held
	if !own {
		l.d[locThresh] = k.DThreshold
	}
	g := &k.Gradient
	l.d[locPrefact] = g[nucleation.Prefactor]
	l.d[2], l.d[3], l.d[4] = g[nucleation.Attraction], g[nucleation.Covolume], g[nucleation.Slope]
	l.d[5], l.d[6] = g[nucleation.SurfaceTension], g[nucleation.TolmanLength]*1e-9
	return l, nil
}

// Query asks a model for the limit of the observation.
func (o *Observation) Query() Query {
	return Query{Record: o.Record, Pressure: o.Pressure, Method: o.Method, Batch: o.Batch, Target: o.Target, OwnFlux: o.OwnFlux, Hazard: o.Hazard, OrSpinodal: true}
}

// Limit is the limit at P in Pa at the model's threshold.
//
// Errors: those of nucleation.KineticLimit, or of the spinodal.
func (ph *Physics) Limit(P float64) (nucleation.Limit, error) {
	return ph.Fluid.KineticLimit(P, nucleation.Threshold(ph.Threshold), 0)
}

// spinodal predicts the spinodal temperature at P.
func (ph *Physics) spinodal(P float64) (limitValue, error) {
	var l limitValue
	s, err := ph.Model.LiquidSpinodalTemperature(P)
	if err != nil {
		return l, err
	}
	dP, tuning := ph.Model.SpinodalGradient(s)
	l.T, l.dTdP = s.T, dP
	copy(l.d[2:5], tuning[:])
	return l, nil
}

// limitOrSpinodal is limit, except that the spinodal stands in where the flux does
// not reach its target before it: no liquid lives longer than that. It makes the
// predicted limit a continuous function of the parameters, so that a search is
// not stopped by the edge of the region in which every row has a kinetic limit.
func (ph *Physics) limitOrSpinodal(P float64, t nucleation.Target, own bool, guess float64) (limitValue, error) {
	l, err := ph.find(P, t, own, guess, true)
	if e, ok := err.(*nucleation.NoLimitError); ok && e.Spinodal {
		l, err = ph.spinodal(P)
		l.atSpinodal = true
	}
	return l, err
}

// FluxQuery is Query for a row that has not been through Prepare: it takes the
// flux from the row.
func (o *Observation) FluxQuery() Query {
	c := *o
	c.Target, c.OwnFlux, c.Hazard = rowTarget(&o.Row)
	return c.Query()
}
