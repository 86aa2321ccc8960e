package nucleation

import "fmt"

// NotMetastableError reports a state in which no new phase can form: at the
// temperature, the pressure is on the stable side of saturation.
type NotMetastableError struct {
	Fluid      string
	Phase      string  // "liquid" or "vapour": the phase that is stable here
	T, P       float64 // K, Pa
	Saturation float64 // Pa at T; 0 if not known
}

func (e *NotMetastableError) Error() string {
	if e.Phase == "vapour" {
		return fmt.Sprintf("embryo of %s: the vapour at %.10g K and %.10g Pa is not supersaturated: saturation is at %.10g Pa", e.Fluid, e.T, e.P, e.Saturation)
	}
	return fmt.Sprintf("embryo of %s: the liquid at %.10g K and %.10g Pa is not superheated: saturation is at %.10g Pa", e.Fluid, e.T, e.P, e.Saturation)
}

// NoLimitError reports that the flux stays below the threshold up to the
// spinodal (or up to where the properties end): no kinetic limit.
type NoLimitError struct {
	Fluid     string
	Given     float64 // the pressure in Pa or, with AtT, the temperature in K
	AtT       bool
	Threshold float64 // log₁₀(J*/(m⁻³s⁻¹)); of a per-kelvin target that at the end of the search, if Known
	Reached   float64 // log₁₀J where it comes closest, where known
	Known     bool    // Reached is a number
	End       float64 // where the search ended: K, or Pa with AtT
	Spinodal  bool    // the end is the spinodal, else the end of the properties

	inside float64 // where the flux is known to be below its target, K
}

func (e *NoLimitError) Error() string {
	given, end := "Pa", "K"
	if e.AtT {
		given, end = "K", "Pa"
	}
	what := "end of the properties"
	if e.Spinodal {
		what = "spinodal"
	}
	reached := "the flux is zero there"
	if e.Known {
		reached = fmt.Sprintf("log10 J reaches %.6g there", e.Reached)
	}
	return fmt.Sprintf("no kinetic limit of %s at %.10g %s: log10 J* = %.6g is not reached up to the %s at %.10g %s; %s",
		e.Fluid, e.Given, given, e.Threshold, what, e.End, end, reached)
}

// StateError reports a state for which the flux is not defined.
type StateError struct {
	Fluid  string
	T, P   float64 // K, Pa
	Reason string
}

func (e *StateError) Error() string {
	return fmt.Sprintf("flux of %s at %.10g K and %.10g Pa: %s", e.Fluid, e.T, e.P, e.Reason)
}

// ConvergenceError reports a search for a limit that ended without an answer.
type ConvergenceError struct {
	Fluid      string
	Equation   string  // of state, or "correlation"
	Given      float64 // Pa, or K with AtT
	AtT        bool
	Lo, Hi     float64 // bracket left, K or Pa
	Residual   float64 // lnJ − lnJ* at the last point
	Iterations int
}

func (e *ConvergenceError) Error() string {
	given, unit := "Pa", "K"
	if e.AtT {
		given, unit = unit, given
	}
	return fmt.Sprintf("kinetic limit of %s (%s) at %.10g %s: not converged after %d steps, bracket %.10g to %.10g %s, ln J off by %.3g",
		e.Fluid, e.Equation, e.Given, given, e.Iterations, e.Lo, e.Hi, unit, e.Residual)
}
