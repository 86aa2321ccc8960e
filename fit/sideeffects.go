package fit

import (
	"math"
	"sort"
)

// SideEffect tells what tuning did to the equation of one fluid beyond the limits
// it was tuned to: its critical point, and how it reproduces the fluid's own
// correlations of the saturated state.
type SideEffect struct {
	Fluid         string
	Before, After Saturated
	// Points is the number of temperatures compared, between Low and High in K, and
	// is zero where the fluid has no correlations.
	Points    int
	Low, High float64
}

// Saturated are the properties of an equation that tuning may spoil. Deviations
// are relative, model/correlation − 1; the largest one keeps its sign.
type Saturated struct {
	CriticalTemperature, CriticalPressure float64 // K, Pa
	VapourPressureMean, VapourPressureMax float64 // mean of absolute values, largest
	LiquidDensityMean, LiquidDensityMax   float64
}

// sideEffectPoints is the number of temperatures at which correlations are compared.
const sideEffectPoints = 9

// SideEffects compares each fluid of the calibration before and after tuning,
// where saturation exists in both and in the correlations, from 0.6 to 0.95 Tc.
func (m *Model) SideEffects(q []Query) ([]SideEffect, error) {
	var out []SideEffect
	untuned, err := Untuned(Variant{Equation: m.Variant.Equation, Custom: m.Variant.Custom})
	if err != nil {
		return nil, err
	}
	for _, q := range q {
		before, err := NewEquationPhysics(untuned.Variant, q.Record, untuned.Values(&q))
		if err != nil {
			return nil, err
		}
		after, err := NewEquationPhysics(m.Variant, q.Record, m.Values(&q))
		if err != nil {
			return nil, err
		}
		e := SideEffect{Fluid: q.Record.Key}
		e.Before.CriticalTemperature, e.Before.CriticalPressure = before.Model.Tc, before.Model.Pc
		e.After.CriticalTemperature, e.After.CriticalPressure = after.Model.Tc, after.Model.Pc
		Tc := math.Min(q.Record.CriticalTemperature.Value, math.Min(before.Model.Tc, after.Model.Tc))
		e.Low, e.High = 0.6*Tc, 0.95*Tc
		for _, property := range []string{"vapour-pressure", "liquid-density"} {
			if _, lo, hi, err := correlationOf(q.Record, property); err == nil {
				e.Low, e.High = math.Max(e.Low, lo), math.Min(e.High, hi)
			}
		}
		if e.Low < e.High {
			if err := e.compare(q, before, after); err != nil {
				return nil, err
			}
		}
		out = append(out, e)
	}
	sort.SliceStable(out, func(i, j int) bool { return out[i].Fluid < out[j].Fluid })
	return out, nil
}

func (e *SideEffect) compare(q Query, before, after *Physics) error {
	for _, property := range []string{"vapour-pressure", "liquid-density"} {
		at, _, _, err := correlationOf(q.Record, property)
		if err != nil {
			continue // the record has none
		}
		e.Points = sideEffectPoints
		for side, ph := range map[*Saturated]*Physics{&e.Before: before, &e.After: after} {
			mean, worst := 0.0, 0.0
			for k := range sideEffectPoints {
				T := e.Low + (e.High-e.Low)*float64(k)/(sideEffectPoints-1)
				want, _, err := at(T)
				if err != nil {
					return err
				}
				ln, _, err := saturationProperty(&ph.Model, q.Record.MolarMass.Value, T, property == "liquid-density")
				if err != nil {
					return err
				}
				d := math.Expm1(ln - math.Log(want))
				mean += math.Abs(d) / sideEffectPoints
				if math.Abs(d) > math.Abs(worst) {
					worst = d
				}
			}
			if property == "vapour-pressure" {
				side.VapourPressureMean, side.VapourPressureMax = mean, worst
			} else {
				side.LiquidDensityMean, side.LiquidDensityMax = mean, worst
			}
		}
	}
	return nil
}

// Queries returns one query for each fluid of the calibration, in the order of
// the fluids' names.
func (c *Calibration) Queries() []Query {
	var out []Query
	seen := map[string]bool{}
	for i := range c.Data.Observations {
		o := &c.Data.Observations[i]
		if !seen[o.Record.Key] {
			seen[o.Record.Key] = true
			out = append(out, Query{Record: o.Record, Pressure: o.Pressure})
		}
	}
	sort.SliceStable(out, func(i, j int) bool { return out[i].Record.Key < out[j].Record.Key })
	return out
}
