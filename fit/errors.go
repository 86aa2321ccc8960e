package fit

import "errors"

// errSingular reports that the data do not determine the active parameters.
var errSingular = errors.New("the information matrix of the parameters is singular")

// ConvergenceError reports a calibration that found no usable parameters.
type ConvergenceError struct {
	Variant string
	Reason  string
	Err     error
}

func (e *ConvergenceError) Error() string {
	return "calibration of " + e.Variant + ": " + e.Reason
}

// Unwrap returns the cause, if there is one.
func (e *ConvergenceError) Unwrap() error { return e.Err }
