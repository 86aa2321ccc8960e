package export

import (
	"fmt"
	"slices"
	"strings"

	"limsup/data/fluid"
	"limsup/fit"
)

// after is s behind a lead, or nothing.
func after(lead, s string) string {
	if s == "" {
		return ""
	}
	return lead + s
}

func keys(records []*fluid.Record) []string {
	var out []string
	for _, r := range records {
		out = append(out, r.Key)
	}
	return out
}

// title names the model: "soave, poynting, kinetic limit, calibrated".
func (s *subject) title() string {
	t := s.model.Variant.Name()
	if s.model.Variant.Limit == fit.Kinetic {
		t += ", kinetic limit"
	}
	if s.model.Calibrated {
		t += ", calibrated"
	} else {
		t += ", not calibrated, so without uncertainty"
	}
	if s.o.Method != "" {
		t += ", method " + s.o.Method
	}
	if s.o.Batch != "" {
		t += ", batch " + s.o.Batch
	}
	return t
}

// rangeText states the range of pressure and how it compares with the data.
func (s *subject) rangeText() string {
	t := fmt.Sprintf("Stated range of pressure: %s Pa to %s Pa", number(s.low), number(s.high))
	v := &s.model.Validity
	switch {
	case !s.model.Calibrated:
		return t + "; no measurement stands behind it."
	case s.low < v.PressureLow || s.high > v.PressureHigh:
		return t + fmt.Sprintf(". CAUTION: the measurements of the calibration cover only %s Pa to %s Pa.", number(v.PressureLow), number(v.PressureHigh))
	}
	return t + ", covered by the measurements of the calibration."
}

// provenance says where the numbers come from.
func (s *subject) provenance() []string {
	var out []string
	for _, in := range s.o.Inputs {
		out = append(out, "From "+in.File+", SHA-256 "+in.SHA256+".")
	}
	if s.o.Verdict != "" {
		out = append(out, "Cross-validation against the untuned model: "+s.o.Verdict+".")
	}
	if s.model.Calibrated {
		for _, r := range s.o.Records {
			if !slices.Contains(s.model.Validity.Fluids, r.Key) {
				out = append(out, "CAUTION: "+r.Key+" was not among the fluids of the calibration.")
			}
		}
	}
	return out
}

// parameterTexts lists what was tuned and what was set.
func (s *subject) parameterTexts() []string {
	var tuned, set []string
	for i := range s.model.Parameters {
		e := &s.model.Parameters[i]
		t := fmt.Sprintf("%s = %.6g%s", e.Label(), e.Value, after(" ", unit(e.Unit)))
		if e.HasU {
			t += fmt.Sprintf(" (standard uncertainty %.3g)", e.U)
		} else if e.Reason != "" {
			t += " (no uncertainty: " + e.Reason + ")"
		}
		tuned = append(tuned, t)
	}
	for _, x := range s.model.Settings {
		name := x.Name
		if x.Group != "" {
			name += "[" + x.Group + "]"
		}
		set = append(set, name+" = "+number(x.Value))
	}
	var out []string
	if len(tuned) > 0 {
		out = append(out, "Tuned: "+strings.Join(tuned, "; ")+".")
	}
	if len(set) > 0 {
		out = append(out, "Set: "+strings.Join(set, "; ")+".")
	}
	return out
}

// unit leaves out the unit 1.
func unit(u string) string {
	if u == "1" {
		return ""
	}
	return u
}
