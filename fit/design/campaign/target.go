package campaign

import (
	"fmt"
	"slices"
	"strings"

	"limsup/data/fluid"
	"limsup/fit"
	"limsup/fit/design"
)

// Target says what a campaign is for: one of its fields is set; none of them means
// all locations of the model together (D-optimal).
type Target struct {
	// Parameters are labels, "slope[n-pentane]": one is narrowed by itself
	// (c-optimal), several together (D_s-optimal).
	Parameters []string
	// Limits are states whose predicted limits are narrowed, by the mean of their
	// variances (c-optimal for one, I-optimal for several).
	Limits []State
	// Rival is another variant that the model is to be told from.
	Rival *Rival
}

// State asks for the limit of a fluid at a pressure, at the threshold of the model.
type State struct {
	Record   *fluid.Record
	Pressure float64 // Pa
	Method   string
}

// Label names a state.
func (s *State) Label() string {
	t := fmt.Sprintf("limit of %s at %.6g kPa", s.Record.Key, s.Pressure/1e3)
	if s.Method != "" {
		t += " by " + s.Method
	}
	return t
}

func (s *State) query() fit.Query {
	return fit.Query{Record: s.Record, Pressure: s.Pressure, Method: s.Method}
}

// Rival is a variant with its parameters, which are free to follow the new
// measurements as far as they were tuned.
type Rival struct {
	Name        string
	Model       *fit.Model
	Calibration *fit.Calibration // nil for a variant as published
}

// Quantity is one thing that a target is about.
type Quantity struct {
	Label, Unit           string
	Value                 float64
	Before, After, Spaced float64 // standard uncertainty before, after the batch, after as many evenly spaced measurements
	direction             []float64
	state                 *State // of a limit
}

// Criterion names what is made small, in words.
func (t *Target) Criterion() string {
	switch {
	case t.Rival != nil:
		return "T: tell the model from " + t.Rival.Name
	case len(t.Limits) == 1:
		return "c: narrow the " + t.Limits[0].Label()
	case len(t.Limits) > 1:
		return fmt.Sprintf("I: narrow %d predicted limits", len(t.Limits))
	case len(t.Parameters) == 1:
		return "c: narrow " + t.Parameters[0]
	case len(t.Parameters) > 1:
		return "D: narrow " + strings.Join(t.Parameters, ", ") + " together"
	}
	return "D: narrow all parameters together"
}

// quantities resolves a target in a space that reaches its limits.
func (t *Target) quantities(s *space) ([]Quantity, design.Criterion, error) {
	c := design.Criterion{Kind: design.Determinant}
	var out []Quantity
	unit := func(k int) {
		d := make([]float64, len(s.params))
		d[k] = 1
		p := &s.params[k]
		out = append(out, Quantity{Label: p.Label, Unit: p.Unit, Value: p.Value, direction: d})
	}
	switch {
	case len(t.Limits) > 0:
		c.Kind = design.Linear
		for i := range t.Limits {
			st := &t.Limits[i]
			x, err := s.model.Sensitivity(st.query())
			if err != nil {
				return nil, c, fmt.Errorf("target: %s: %w", st.Label(), err)
			}
			g := s.gradient(&x)
			if allZero(g) {
				return nil, c, &InputError{"target", "a limit that depends on a tuned parameter, unlike the " + st.Label()}
			}
			out = append(out, Quantity{Label: st.Label(), Unit: "K", Value: x.Temperature, direction: g, state: st})
		}
	case len(t.Parameters) > 0:
		for i, label := range t.Parameters {
			k := s.find(label)
			if slices.Contains(t.Parameters[:i], label) {
				return nil, c, &InputError{"target " + label, "each parameter once"}
			}
			if k < 0 {
				return nil, c, &InputError{"target " + label, "one of the free parameters " + strings.Join(s.labels(), ", ") + s.held(label)}
			}
			unit(k)
		}
		if len(out) == 1 {
			c.Kind = design.Linear
		}
	default:
		own := len(s.params) - len(s.extra)
		for k := range own {
			if !s.params[k].Spread {
				unit(k)
			}
		}
		if len(out) == 0 {
			return nil, c, &InputError{"target", "a model with a free parameter; this one has tuned none but its spread"}
		}
	}
	for i := range out {
		c.Directions = append(c.Directions, out[i].direction)
	}
	return out, c, nil
}

func allZero(x []float64) bool {
	for _, v := range x {
		if v != 0 {
			return false
		}
	}
	return true
}
