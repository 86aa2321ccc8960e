package fit

import (
	"fmt"
	"math"
	"slices"
	"sort"

	"gonum.org/v1/gonum/mat"

	"limsup/data/fluid"
	"limsup/eos/nucleation"
)

// Model predicts superheat limits: a variant with parameters, and what is known of
// their uncertainty and of the range in which they were found.
type Model struct {
	Variant  Variant
	Settings []Setting // parameters that were not tuned but set
	// Parameters and Covariance are those of the calibration, empty for an untuned model.
	Parameters []Estimate
	Covariance *mat.SymDense
	Degrees    int // degrees of freedom of the calibration
	Noise      Noise
	References map[string]string
	Validity   Validity
	Calibrated bool

	settings Plan // completed, for start values
}

// Validity is the range of the data behind a calibrated model.
type Validity struct {
	Fluids                          []string
	Methods                         []string
	PressureLow, PressureHigh       float64 // Pa
	TemperatureLow, TemperatureHigh float64 // K
}

// Untuned returns the model of a variant with its published parameters, or those
// that settings give.
//
// Errors: *OptionError, *eos.UnknownEquationError.
func Untuned(v Variant, settings ...Setting) (*Model, error) {
	p, err := Plan{Variant: v, Fixed: append([]Setting{{Name: Spread, Value: 0}}, settings...)}.Complete()
	if err != nil {
		return nil, err
	}
	return &Model{Variant: p.Variant, Settings: settings, settings: p}, nil
}

// Model is the calibrated model.
func (c *Calibration) Model() *Model {
	m := &Model{Variant: c.Plan.Variant, Settings: c.Plan.Fixed, Parameters: c.Parameters, Covariance: c.Covariance, Degrees: c.Degrees,
		Noise: c.noise(), References: c.References, Calibrated: true}
	m.Validity = validity(c.Data.Observations)
	if err := m.Prepare(); err != nil {
		panic("fit: plan of a calibration no longer completes: " + err.Error()) // it did when the calibration began
	}
	return m
}

// Prepare completes a model that was put together from its exported fields.
//
// Errors: *OptionError, *eos.UnknownEquationError.
func (m *Model) Prepare() error {
	p := Plan{Variant: m.Variant, Fixed: m.Settings, Noise: m.Noise}
	for _, s := range m.Settings { // the calibration may have had wider bounds than the default ones
		p.Bounds = append(p.Bounds, Bound{s.Name, math.Min(s.Value, 0) - 1, math.Max(s.Value, 0) + 1})
		if s.Name == Spread {
			p.Bounds[len(p.Bounds)-1].Lower = 0
		}
	}
	p, err := p.Complete()
	if err != nil {
		return err
	}
	m.Variant, m.Noise, m.settings = p.Variant, p.Noise, p
	return nil
}

func validity(obs []Observation) Validity {
	v := Validity{PressureLow: math.Inf(1), PressureHigh: math.Inf(-1), TemperatureLow: math.Inf(1), TemperatureHigh: math.Inf(-1)}
	for i := range obs {
		o := &obs[i]
		v.PressureLow, v.PressureHigh = math.Min(v.PressureLow, o.Pressure), math.Max(v.PressureHigh, o.Pressure)
		v.TemperatureLow, v.TemperatureHigh = math.Min(v.TemperatureLow, o.Temperature), math.Max(v.TemperatureHigh, o.Temperature)
	}
	v.Fluids, _ = groups(obs, ByFluid)
	v.Methods, _ = groups(obs, ByMethod)
	return v
}

// Query is a state to predict.
type Query struct {
	Record *fluid.Record
	// Pressure in Pa asks for the limit temperature; with AtTemperature, Temperature
	// in K asks for the limit pressure.
	Pressure      float64
	Temperature   float64
	AtTemperature bool
	// Method and Batch choose values that a model has by method or batch. "" is the
	// reference method, whose offset is zero.
	Method, Batch string
	// Target, if OwnFlux, replaces the threshold. Hazard is as in Observation.
	Target  nucleation.Target
	OwnFlux bool
	Hazard  float64
	// OrSpinodal lets the spinodal stand in where the flux does not reach its target
	// before it, instead of an error; the prediction says so.
	OrSpinodal bool
	// LimitOnly leaves SpinodalT, SaturationT and the intervals out of the prediction,
	// which take longer than the limit and its uncertainty.
	LimitOnly bool
}

// Prediction is a predicted limit.
type Prediction struct {
	Fluid       string
	Limit       Limit
	Temperature float64 // K
	Pressure    float64 // Pa
	Slope       float64 // dT/dP along the line of limits, K/Pa
	// U is the standard uncertainty of a new measurement of the limit: of the
	// temperature in K, also for a limit pressure, mapped along the line of limits.
	// It combines the covariance of the parameters and the spread; HasU is false
	// for a model without calibration or without covariance.
	U, UPressure float64 // K, Pa
	HasU         bool
	Low, High    float64 // 95 % interval of the quantity asked for, K or Pa
	// ULimit is the standard uncertainty of the limit itself in K, without the scatter
	// of readings, and LimitLow to LimitHigh its 95 % interval.
	ULimit              float64
	LimitLow, LimitHigh float64
	// Degrees of freedom of U².
	Degrees   float64
	Log10Flux float64 // at the limit; 0 with HasFlux false for a spinodal
	HasFlux   bool
	// SpinodalT and SaturationT are on the same equation at the same pressure; the
	// flags say whether they exist there.
	SpinodalT, SaturationT float64
	HasSpinodal            bool
	HasSaturation          bool
	AtSpinodal             bool // the spinodal stands in for a kinetic limit, see Query.OrSpinodal
	Extrapolated           bool
	Warnings               []string

	spread, steepness float64 // of a new reading in K; κ in 1/K
}

// lookup finds the value of a parameter for a query: the index of its estimate,
// or -1 and the value, and the extra variance of a group that was not measured.
type lookup struct {
	at       int
	value    float64
	variance float64
	foreign  bool // the group was not in the data
}

func (m *Model) lookup(name string, q *Query) lookup {
	found := lookup{at: -1}
	tuned := false
	mean, pooled, spread := -1, false, 0.0
	for i := range m.Parameters {
		e := &m.Parameters[i]
		if e.Name != name {
			continue
		}
		tuned = true
		switch e.Role {
		case RolePoolMean:
			mean = i
		case RolePoolSpread:
			pooled, spread = true, e.Value
		default:
			if e.Group == m.groupFor(e.By, q) {
				return lookup{at: i, value: e.Value}
			}
		}
	}
	if mean >= 0 {
		return lookup{at: mean, value: m.Parameters[mean].Value, variance: spread * spread, foreign: true}
	}
	if pooled { // offsets scattered about zero
		by := m.Parameters[slices.IndexFunc(m.Parameters, func(e Estimate) bool { return e.Name == name })].By
		return lookup{at: -1, variance: spread * spread, foreign: m.groupFor(by, q) != ""}
	}
	p, err := parameterOf(name, &m.Variant)
	if err == nil {
		found.value = m.settings.value(p, "")
	}
	if tuned {
		// Not a measured group. The reference group of an offset is zero by definition.
		found.foreign = !(name == Offset && m.isReference(q))
	}
	return found
}

// Origin tells where the model takes the parameter name of a query from: the index at of
// an estimate in m.Parameters, that of the group of the query, else the mean of a pool, or
// −1 without one. value is in the unit of the parameter, and variance, in its square, that
// of a pool for a group that was not measured. An offset pooled about zero has a variance
// and no estimate.
func (m *Model) Origin(name string, q *Query) (at int, value, variance float64) {
	l := m.lookup(name, q)
	return l.at, l.value, l.variance
}

func (m *Model) isReference(q *Query) bool {
	for i := range m.Parameters {
		if e := &m.Parameters[i]; e.Name == Offset {
			g := m.groupFor(e.By, q)
			return g == m.References[string(e.By)]
		}
	}
	return true
}

// groupFor is the group of a query.
func (m *Model) groupFor(by By, q *Query) string {
	switch by {
	case ByFluid:
		return q.Record.Key
	case ByMethod:
		if q.Method == "" {
			return m.References[string(ByMethod)]
		}
		return q.Method
	case ByBatch:
		if q.Batch == "" {
			return m.References[string(ByBatch)]
		}
		return q.Batch
	}
	return ""
}

// Values are the parameters that the model uses for a query.
func (m *Model) Values(q *Query) Values {
	v, _ := m.values(q)
	return v
}

func (m *Model) values(q *Query) (v Values, found [locations]lookup) {
	for i, f := range v.fields() {
		found[i] = m.lookup(locationNames[i], q)
		*f = found[i].value
	}
	found[locOffset] = m.lookup(Offset, q)
	return v, found
}

// Physics builds the fluid of a query under the model.
//
// Errors: as NewPhysics.
func (m *Model) Physics(q *Query) (*Physics, error) {
	return NewPhysics(m.Variant, q.Record, m.Values(q))
}

// Predict returns the limit of a query.
//
// Errors: *nucleation.NoLimitError, *eos.DomainError and the other errors of the
// physics; *UnavailableError.
func (m *Model) Predict(q Query) (Prediction, error) {
	v, found := m.values(&q)
	ph, err := NewPhysics(m.Variant, q.Record, v)
	if err != nil {
		return Prediction{}, err
	}
	out := Prediction{Fluid: q.Record.Key, Limit: m.Variant.Limit, Pressure: q.Pressure, Temperature: q.Temperature}
	offset := found[locOffset].value
	if q.AtTemperature {
		if out.Pressure, err = ph.limitPressure(q.Temperature-offset, q.Target, q.OwnFlux); err != nil {
			return Prediction{}, err
		}
	}
	find := ph.limit
	if q.OrSpinodal {
		find = ph.limitOrSpinodal
	}
	l, err := find(out.Pressure, q.Target, q.OwnFlux, q.Temperature)
	if err != nil {
		return Prediction{}, err
	}
	out.AtSpinodal = l.atSpinodal
	if !q.AtTemperature {
		out.Temperature = l.T + offset
	}
	out.Slope = l.dTdP
	if m.Variant.Limit == Kinetic && !l.atSpinodal {
		out.Log10Flux, out.HasFlux = l.lnJ/math.Ln10, true
	}
	m.uncertainty(&out, &q, &l, &found)
	if !q.LimitOnly {
		s, err := ph.Model.LiquidSpinodalTemperature(out.Pressure)
		out.SpinodalT, out.HasSpinodal = s.T, err == nil
		out.SaturationT, out.HasSaturation = ph.saturationTemperature(out.Pressure)
	}
	if r := q.Record; m.Variant.Limit == Kinetic && m.Variant.Tension == TensionCorrelation {
		if lo, hi, ok := r.TensionRange(); ok && (l.T < lo || l.T > hi) {
			out.Warnings = append(out.Warnings, fmt.Sprintf("the surface tension fit of %s is stated for %.5g K to %.5g K and used beyond", r.Key, lo, hi))
		}
	}
	if l.held {
		out.Warnings = append(out.Warnings, nucleation.HeldNote)
	}
	m.compareRange(&out, &q, &found)
	out.doubt(q.Record)
	return out, nil
}

// limitPressure is the pressure at which the liquid at T reaches its limit.
func (ph *Physics) limitPressure(T float64, t nucleation.Target, own bool) (float64, error) {
	if ph.Variant.Limit == Spinodal {
		s, _, err := ph.Model.Spinodal(T)
		return s.P, err
	}
	if !own {
		t = nucleation.Threshold(ph.Threshold)
	}
	k, err := ph.Fluid.KineticPressure(T, t, 0)
	return k.P, err
}

// saturationTemperature is that of the source of properties: of the correlation
// by bisection inside its range, else of the equation.
func (ph *Physics) saturationTemperature(P float64) (float64, bool) {
	if ph.Variant.Properties == nucleation.FromCorrelation {
		c := ph.Record.VapourPressure
		lo, hi := c.Range()
		at := func(T float64) float64 { p, _, _ := c.At(T); return p }
		if !(P > at(lo) && P < at(hi)) {
			return 0, false
		}
		for range 60 {
			if mid := 0.5 * (lo + hi); at(mid) < P {
				lo = mid
			} else {
				hi = mid
			}
		}
		return 0.5 * (lo + hi), true
	}
	s, err := ph.Model.SaturationTemperature(P)
	return s.T, err == nil
}

// Spread is the standard deviation in K of a reading of the query beyond its stated
// uncertainty: that of its group or, for a group that was not measured, the largest.
func (m *Model) Spread(q *Query) float64 {
	s, _ := m.spreadOf(q)
	return s
}

// compareRange compares a prediction with the data behind the model.
func (m *Model) compareRange(out *Prediction, q *Query, found *[locations]lookup) {
	if !m.Calibrated {
		return
	}
	v := &m.Validity
	warn := func(s string) {
		out.Extrapolated = true
		out.Warnings = append(out.Warnings, s)
	}
	if !slices.Contains(v.Fluids, q.Record.Key) {
		warn(q.Record.Key + " was not among the fluids of the calibration")
	}
	const slack = 1e-9
	if w := slack * math.Abs(v.PressureHigh); out.Pressure < v.PressureLow-w || out.Pressure > v.PressureHigh+w {
		warn("the pressure is outside the calibrated range")
	}
	var foreign []string
	for i, f := range found {
		if f.foreign {
			foreign = append(foreign, locationNames[i])
		}
	}
	if len(foreign) > 0 {
		sort.Strings(foreign)
		warn("not measured for this group, so taken from the mean of the groups or as published: " + join(foreign))
	}
}
