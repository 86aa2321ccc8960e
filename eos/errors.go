package eos

import "fmt"

// DomainError reports an argument for which a quantity is not defined.
type DomainError struct {
	Fluid, Equation string
	Quantity        string  // what was asked for, e.g. "saturation pressure"
	Argument        string  // which argument is outside, e.g. "temperature"
	Value           float64 // its value, SI
	Lo, Hi          float64 // the open interval that is allowed, SI
	Unit            string
}

func (e *DomainError) Error() string {
	return fmt.Sprintf("%s of %s (%s): %s %.10g %s is outside %.10g to %.10g %s",
		e.Quantity, e.Fluid, e.Equation, e.Argument, e.Value, e.Unit, e.Lo, e.Hi, e.Unit)
}

// PhaseError reports that a phase does not exist at a state, not even as a
// metastable one: the state lies beyond the phase's spinodal.
type PhaseError struct {
	Fluid, Equation string
	Phase           string  // "liquid" or "vapour"
	T, P            float64 // K, Pa
	Spinodal        float64 // spinodal pressure of that phase at T, Pa
}

func (e *PhaseError) Error() string {
	side := "below"
	if e.Phase == "vapour" {
		side = "above"
	}
	return fmt.Sprintf("%s of %s (%s): no %s at %.10g K and %.10g Pa: the pressure is %s the %s spinodal, %.10g Pa",
		e.Phase, e.Fluid, e.Equation, e.Phase, e.T, e.P, side, e.Phase, e.Spinodal)
}

// ConvergenceError reports a search that ended without an answer.
type ConvergenceError struct {
	Fluid, Equation string
	Quantity        string
	At              float64 // the argument (K or Pa, see Unit)
	Unit            string
	Lo, Hi          float64 // bracket left, in the variable of the search
	Residual        float64
	Iterations      int
}

func (e *ConvergenceError) Error() string {
	return fmt.Sprintf("%s of %s (%s) at %.10g %s: not converged after %d steps, bracket %.10g to %.10g, residual %.3g",
		e.Quantity, e.Fluid, e.Equation, e.At, e.Unit, e.Iterations, e.Lo, e.Hi, e.Residual)
}

// ParameterError reports a constant or option that an equation cannot take.
type ParameterError struct {
	Fluid, Equation string
	Name            string
	Value           float64
	Want            string // the condition broken, e.g. "> 0"
}

func (e *ParameterError) Error() string {
	return fmt.Sprintf("%s (%s): %s = %.10g, want %s", e.Fluid, e.Equation, e.Name, e.Value, e.Want)
}
