package tension

import "fmt"

// RangeError reports a temperature at which a surface tension is not defined.
type RangeError struct {
	Form string  // "power-sum", "dippr-106", "corresponding-states"
	T    float64 // K
	Tc   float64 // critical temperature of the form, K; 0 < T < Tc is allowed
}

func (e *RangeError) Error() string {
	return fmt.Sprintf("surface tension (%s): temperature %.10g K is outside 0 to %.10g K, the critical temperature of the fit", e.Form, e.T, e.Tc)
}

// NonPositiveError reports a temperature below the critical one at which the terms
// of a fit cancel, so that its value is no surface tension.
type NonPositiveError struct {
	Form          string
	T, Sigma      float64 // K, N/m
	PositiveAbove float64 // the fit is positive between these temperatures, K; both 0 where it is positive nowhere
	PositiveBelow float64
}

func (e *NonPositiveError) Error() string {
	if !(e.PositiveBelow > e.PositiveAbove) {
		return fmt.Sprintf("surface tension (%s): %.4g N/m at %.10g K is not positive, nor is the fit at any other temperature", e.Form, e.Sigma, e.T)
	}
	return fmt.Sprintf("surface tension (%s): %.4g N/m at %.10g K is not positive; the fit holds from %.10g K to %.10g K", e.Form, e.Sigma, e.T, e.PositiveAbove, e.PositiveBelow)
}

// ParameterError reports a constant that a form cannot take.
type ParameterError struct {
	Form, Name string
	Value      float64
	Want       string // the condition broken, e.g. "> 0"
}

func (e *ParameterError) Error() string {
	return fmt.Sprintf("surface tension (%s): %s = %.10g, want %s", e.Form, e.Name, e.Value, e.Want)
}
