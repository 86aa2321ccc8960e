package leastsq

import "fmt"

// InputError is a problem or setting that cannot be worked on.
type InputError struct {
	What   string // the parameter, setting or function at fault
	Reason string
}

func (e *InputError) Error() string { return e.What + ": " + e.Reason }

// EvaluationError says that no start could be evaluated.
type EvaluationError struct {
	Starts int       // starts tried
	Theta  []float64 // the given start
	Err    error     // what the caller's function said there; nil when a value was not finite
}

func (e *EvaluationError) Error() string {
	why := "a value or derivative is not finite"
	if e.Err != nil {
		why = e.Err.Error()
	}
	if e.Starts == 1 {
		return fmt.Sprintf("start %v: %s", e.Theta, why)
	}
	return fmt.Sprintf("start %v and %d others: %s", e.Theta, e.Starts-1, why)
}

func (e *EvaluationError) Unwrap() error { return e.Err }
