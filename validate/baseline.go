package validate

import (
	"fmt"
	"math"

	"limsup/data/fluid"
	"limsup/eos"
	"limsup/fit"
)

// baseline is a published rule that predicts a limit without tuning.
type baseline struct {
	name    string
	source  string
	predict func(o *fit.Observation) (float64, error) // K
}

// Coefficients of published rules for T/Tc of the superheat limit.
const (
	// J. H. Lienhard, Chemical Engineering Science 31 (1976) 847:
	// T/Tc = 0.905 + 0.095 (Tsat/Tc)⁸ (citation from memory).
	lienhardConstant = 0.905
	lienhardFactor   = 0.095
	lienhardPower    = 8
	// Rule of the standard for pressure relief API Std 521, T/Tc = 0.89 + 0.11 P/Pc
	// (from memory).
	linearConstant = 0.89
	linearFactor   = 0.11
)

// BaselineError reports a row for which a rule makes no statement.
type BaselineError struct {
	Rule, At, Fluid string
	Reason          string
}

func (e *BaselineError) Error() string {
	return fmt.Sprintf("%s: %s: %s: %s", e.Rule, e.At, e.Fluid, e.Reason)
}

// baselines lists the rules that stand beside the variants.
func baselines() []baseline {
	out := []baseline{
		{"corresponding-states rule", "Lienhard 1976: T/Tc = 0.905 + 0.095 (Tsat/Tc)^8", func(o *fit.Observation) (float64, error) {
			Tc := o.Record.CriticalTemperature.Value
			Ts, err := saturationTemperature(o.Record, o.Pressure)
			if err != nil {
				return 0, &BaselineError{"corresponding-states rule", o.At(), o.Record.Key, err.Error()}
			}
			return Tc * (lienhardConstant + lienhardFactor*math.Pow(Ts/Tc, lienhardPower)), nil
		}},
		{"linear rule", "API Std 521, from memory: T/Tc = 0.89 + 0.11 P/Pc", func(o *fit.Observation) (float64, error) {
			return o.Record.CriticalTemperature.Value * (linearConstant + linearFactor*o.Pressure/o.Record.CriticalPressure.Value), nil
		}},
	}
	for _, name := range []string{"van-der-waals", "berthelot", "redlich-kwong"} {
		rule := name + " spinodal at zero pressure"
		out = append(out, baseline{rule, "the same reduced temperature for all fluids and pressures", func(o *fit.Observation) (float64, error) {
			e, err := eos.EquationByName(name)
			if err != nil {
				return 0, err
			}
			m, err := eos.NewModel(e, fit.Substance(o.Record), e.Untuned())
			if err != nil {
				return 0, err
			}
			return m.ZeroPressureSpinodalTemperature(), nil
		}})
	}
	return out
}

// saturationTemperature is that of the fluid's own vapour pressure where it reaches,
// else of the untuned default equation.
func saturationTemperature(r *fluid.Record, P float64) (float64, error) {
	if c := r.VapourPressure; c != nil {
		lo, hi := c.Range()
		low, _, err := c.At(lo)
		if err != nil {
			return 0, err
		}
		high, _, err := c.At(hi)
		if err != nil {
			return 0, err
		}
		if P >= low && P <= high {
			for range 60 { // 2⁻⁶⁰ of the range is below rounding
				mid := 0.5 * (lo + hi)
				p, _, err := c.At(mid)
				if err != nil {
					return 0, err
				}
				if p < P {
					lo = mid
				} else {
					hi = mid
				}
			}
			return 0.5 * (lo + hi), nil
		}
	}
	e, err := eos.EquationByName(fit.DefaultVariant().Equation)
	if err != nil {
		return 0, err
	}
	m, err := eos.NewModel(e, fit.Substance(r), e.Untuned())
	if err != nil {
		return 0, err
	}
	s, err := m.SaturationTemperature(P)
	return s.T, err
}
