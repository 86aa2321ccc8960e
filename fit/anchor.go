package fit

import (
	"fmt"
	"math"

	"limsup/data/fluid"
	"limsup/eos"
)

// anchorPoints is the number of temperatures at which a correlation anchors the
// equation, equally spaced over the part of the correlation between Tr = 0.6 and 0.95.
const anchorPoints = 5

// anchored is one pseudo-measurement: ln of a saturation property of a fluid.
type anchored struct {
	cell     int // whose equation is compared
	density  bool
	T        float64
	measured float64 // ln of the value of the correlation
	u        float64 // standard uncertainty of it
}

// newAnchors lists the pseudo-measurements of a plan, for each fluid once.
//
// Errors: *UnavailableError when a fluid has no such correlation.
func newAnchors(p *Plan, obs []Observation, l *layout) ([]anchored, error) {
	var out []anchored
	for _, a := range p.Anchors {
		done := map[string]bool{}
		for c := range l.cells {
			r := obs[l.cells[c].first].Record
			if done[r.Key] {
				continue
			}
			done[r.Key] = true
			at, lo, hi, err := correlationOf(r, a.Property)
			if err != nil {
				return nil, &UnavailableError{r.Key, err}
			}
			Tc := r.CriticalTemperature.Value
			lo, hi = math.Max(lo, 0.6*Tc), math.Min(hi, 0.95*Tc)
			for k := range anchorPoints {
				T := lo + (hi-lo)*float64(k)/(anchorPoints-1)
				v, _, err := at(T)
				if err != nil {
					return nil, &UnavailableError{r.Key, err}
				}
				out = append(out, anchored{cell: c, density: a.Property == "liquid-density", T: T, measured: math.Log(v), u: a.Relative})
			}
		}
	}
	return out, nil
}

// correlationOf returns a saturation correlation of a record and its range.
func correlationOf(r *fluid.Record, property string) (at func(float64) (float64, float64, error), lo, hi float64, err error) {
	switch {
	case property == "vapour-pressure" && r.VapourPressure != nil:
		lo, hi = r.VapourPressure.Range()
		return r.VapourPressure.At, lo, hi, nil
	case property == "liquid-density" && r.LiquidDensity != nil:
		lo, hi = r.LiquidDensity.Range()
		return r.LiquidDensity.At, lo, hi, nil
	}
	return nil, 0, 0, &fluid.MissingError{Fluid: r.Key, Property: property}
}

// saturationProperty is ln of the vapour pressure in Pa or of the saturated liquid
// density in kg/m³ by the equation, and its derivatives with respect to the
// tuning (attraction, covolume, slope).
func saturationProperty(m *eos.Model, molarMass, T float64, density bool) (ln float64, d [3]float64, err error) {
	s, err := m.Saturation(T)
	if err != nil {
		return 0, d, err
	}
	tau, _ := m.Tau(T)
	c, ok := m.Saturate(tau)
	if !ok {
		return 0, d, &eos.ConvergenceError{Fluid: m.Fluid, Equation: m.Equation, Quantity: "saturation", At: T, Unit: "K"}
	}
	a, cv, sl := m.TauGradient(T)
	h, covolume := tau*c.DP/c.P, -1/m.Tuning().Covolume
	ln = math.Log(s.P)
	if density {
		h = -tau * c.DXl / c.Xl
		ln = math.Log(molarMass / s.Vl)
	}
	return ln, [3]float64{h * a, h*cv + covolume, h * sl}, nil
}

// residual is (measured − predicted)/u and its derivatives with respect to the
// tuning.
func (a *anchored) residual(cells []*Physics) (r float64, d [3]float64, err error) {
	ph := cells[a.cell]
	ln, d, err := saturationProperty(&ph.Model, ph.Record.MolarMass.Value, a.T, a.density)
	if err != nil {
		return 0, d, fmt.Errorf("anchor of %s at %.6g K: %w", ph.Record.Key, a.T, err)
	}
	for i := range d {
		d[i] = -d[i] / a.u
	}
	return (a.measured - ln) / a.u, d, nil
}
