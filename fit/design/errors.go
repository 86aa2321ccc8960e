package design

import "fmt"

// InputError reports a problem that is not well posed.
type InputError struct {
	What string // "candidate 3", "prior", "criterion", "batch"
	Want string
}

func (e *InputError) Error() string { return "design: " + e.What + ": want " + e.Want }

// SingularError reports that measurements, together with what was known before,
// do not determine the parameters.
type SingularError struct {
	Measurements int // in the batch; 0 for what was known before
	Parameters   int
	All          bool // not even all candidates together would
}

func (e *SingularError) Error() string {
	switch {
	case e.All:
		return fmt.Sprintf("design: all candidates together do not determine the %d parameters", e.Parameters)
	case e.Measurements == 0:
		return fmt.Sprintf("design: what is known before does not determine the %d parameters", e.Parameters)
	}
	return fmt.Sprintf("design: a batch of %d does not determine the %d parameters", e.Measurements, e.Parameters)
}
