package export

import (
	"fmt"
	"strings"
)

// OptionError reports an option that cannot be used.
type OptionError struct {
	Option, Value string
	Want          string
}

func (e *OptionError) Error() string {
	return fmt.Sprintf("export: %s %q: want %s", e.Option, e.Value, e.Want)
}

// UnsupportedError reports a property that exported code does not know.
type UnsupportedError struct {
	Fluid, Property string
}

func (e *UnsupportedError) Error() string {
	if e.Fluid == "" {
		return "export: no code for " + e.Property
	}
	return fmt.Sprintf("export of %s: no code for %s", e.Fluid, e.Property)
}

// FluidError reports a fluid that cannot be exported.
type FluidError struct {
	Fluid string
	Err   error
}

func (e *FluidError) Error() string {
	if text := e.Err.Error(); strings.Contains(text, e.Fluid) {
		return "export: " + text
	}
	return fmt.Sprintf("export of %s: %v", e.Fluid, e.Err)
}

// Unwrap returns the reason.
func (e *FluidError) Unwrap() error { return e.Err }

// ToleranceError reports a limit that does not follow a series or a table to the
// tolerance: it ends inside the range, or bends too sharply.
type ToleranceError struct {
	Fluid, Form, Reason string
	From, To            float64 // Pa
}

func (e *ToleranceError) Error() string {
	return fmt.Sprintf("%s of %s from %.6g Pa to %.6g Pa: %s", e.Form, e.Fluid, e.From, e.To, e.Reason)
}
