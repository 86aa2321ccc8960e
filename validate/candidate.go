package validate

import (
	"fmt"
	"slices"
	"strings"

	"limsup/data/quantity"
	"limsup/eos/nucleation"
	"limsup/fit"
)

// Candidate is a variant to compare: tuned by the terms of its plan, and beside it
// untuned. Without terms it is tuned by its default: the threshold (the prefactor where
// every row carries its own flux), or the slope for a spinodal.
type Candidate struct {
	Plan        fit.Plan
	UntunedOnly bool
}

// DefaultCandidates is the grid that is compared when none is chosen: every equation
// with a kinetic limit, the other ways to surface tension and properties for the
// default equation, three spinodals, and threshold with slope for the default equation.
func DefaultCandidates() []Candidate {
	var out []Candidate
	add := func(v fit.Variant, terms ...fit.Term) {
		out = append(out, Candidate{Plan: fit.Plan{Variant: v, Terms: terms}})
	}
	for _, e := range []string{"soave", "peng-robinson", "redlich-kwong", "berthelot", "van-der-waals"} {
		add(fit.Variant{Equation: e})
	}
	add(fit.Variant{}, fit.Term{Name: fit.Threshold}, fit.Term{Name: fit.Slope})
	add(fit.Variant{Tension: fit.CorrespondingStates})
	add(fit.Variant{Tension: fit.TensionFromParachor})
	add(fit.Variant{Properties: nucleation.FromCorrelation})
	for _, e := range []string{"soave", "redlich-kwong", "van-der-waals"} {
		add(fit.Variant{Equation: e, Limit: fit.Spinodal})
	}
	return out
}

// candidateKeys are the words of ParseCandidate.
var candidateKeys = []string{"equation", "limit", "surface-tension", "properties", "embryo-pressure", "kinetics", "set", "tune"}

// ParseCandidate reads a candidate: parts KEY=VALUE joined by semicolons, with the keys
// equation, limit, surface-tension, properties, embryo-pressure, kinetics, set
// (NAME=VALUE) and tune (a term, or none). set and tune may occur several times. A
// part without = is the name of an equation:
//
//	soave; surface-tension=parachor; tune=threshold; tune=slope/fluid
//
// Errors: *fit.OptionError, *eos.UnknownEquationError.
func ParseCandidate(s string) (Candidate, error) {
	var c Candidate
	v := &c.Plan.Variant
	bad := func(want string) (Candidate, error) {
		return Candidate{}, &fit.OptionError{Option: "variant", Value: s, Want: want}
	}
	seen := map[string]bool{}
	for part := range strings.SplitSeq(s, ";") {
		part = strings.TrimSpace(part)
		if part == "" {
			continue
		}
		key, value, ok := strings.Cut(part, "=")
		key, value = strings.TrimSpace(key), strings.TrimSpace(value)
		if !ok {
			key, value = "equation", key
		}
		if seen[key] && key != "set" && key != "tune" {
			return bad(key + " once")
		}
		seen[key] = true
		if value == "" {
			return bad("a value after " + key + "=")
		}
		switch key {
		case "equation":
			v.Equation = value
		case "limit":
			v.Limit = fit.Limit(value)
		case "surface-tension":
			v.Tension = fit.Tension(value)
		case "properties":
			v.Properties = nucleation.Properties(value)
		case "embryo-pressure":
			v.EmbryoPressure = nucleation.EmbryoPressure(value)
		case "kinetics":
			v.Kinetics = nucleation.Kinetics(value)
		case "set":
			name, number, _ := strings.Cut(value, "=")
			x, err := quantity.ParseNumber(strings.TrimSpace(number))
			if err != nil {
				return bad("set=NAME=VALUE with a number: " + err.Error())
			}
			c.Plan.Fixed = append(c.Plan.Fixed, fit.Setting{Name: strings.TrimSpace(name), Value: x})
		case "tune":
			if value == "none" {
				c.UntunedOnly = true
				continue
			}
			t, err := fit.ParseTerm(value)
			if err != nil {
				return Candidate{}, err
			}
			c.Plan.Terms = append(c.Plan.Terms, t)
		default:
			return bad("KEY=VALUE parts joined by semicolons, with the keys " + strings.Join(candidateKeys, ", "))
		}
	}
	if c.UntunedOnly && len(c.Plan.Terms) > 0 {
		return bad("tune=none alone")
	}
	c.startWhereSet()
	p, err := c.Plan.Complete()
	if err != nil {
		return Candidate{}, err
	}
	c.Plan.Variant = p.Variant
	return c, nil
}

// startWhereSet lets a parameter that is both set and tuned start where it is set.
func (c *Candidate) startWhereSet() {
	var fixed []fit.Setting
	for _, s := range c.Plan.Fixed {
		if slices.ContainsFunc(c.Plan.Terms, func(t fit.Term) bool { return t.Name == s.Name }) {
			c.Plan.Starts = append(c.Plan.Starts, s)
		} else {
			fixed = append(fixed, s)
		}
	}
	c.Plan.Fixed = fixed
}

// resolve completes a candidate for data of which all rows carry their own flux, or not.
func (c Candidate) resolve(ownFlux bool) (Candidate, error) {
	p, err := c.Plan.Complete()
	if err != nil {
		return c, err
	}
	named := func(t fit.Term) bool { return t.Name != fit.Spread }
	if !c.UntunedOnly && (p.DefaultTerms || !slices.ContainsFunc(p.Terms, named)) {
		name := fit.Threshold
		switch {
		case p.Variant.Limit == fit.Spinodal:
			name = fit.Slope
		case ownFlux:
			name = fit.Prefactor
		}
		rest := slices.DeleteFunc(slices.Clone(c.Plan.Terms), named)
		c.Plan.Terms = append([]fit.Term{{Name: name}}, rest...)
		c.startWhereSet()
	}
	c.Plan, err = c.Plan.Complete()
	return c, err
}

// untuned is the candidate with all locations held where they start; the spread alone
// is estimated.
func (c Candidate) untuned() (Candidate, error) {
	p := c.Plan
	terms := p.Terms
	p.Terms, p.DefaultTerms, p.Priors, p.Anchors, p.Starts = nil, false, nil, nil, nil
	p.Fixed = append(slices.Clone(p.Fixed), c.Plan.Starts...)
	if !slices.ContainsFunc(p.Fixed, func(s fit.Setting) bool { return s.Name == fit.Threshold && s.Group == "" }) {
		p.Fixed = append(p.Fixed, fit.Setting{Name: fit.Threshold, Value: start(fit.Threshold)})
	}
	for _, t := range terms {
		if t.Name == fit.Spread {
			p.Terms = append(p.Terms, t)
		}
	}
	p, err := p.Complete()
	return Candidate{Plan: p, UntunedOnly: true}, err
}

// start is the published value of a parameter.
func start(name string) float64 {
	for _, p := range fit.ParameterTable() {
		if p.Name == name {
			return p.Start
		}
	}
	return 0
}

// name is unique within a comparison: "soave, parachor + threshold + slope/fluid".
func (c *Candidate) name() string {
	s := c.Plan.Variant.Name()
	for _, f := range append(slices.Clone(c.Plan.Fixed), c.Plan.Starts...) {
		if !(f.Name == fit.Threshold && f.Value == start(fit.Threshold)) {
			s += fmt.Sprintf(", %s %.6g", f.Name, f.Value)
		}
	}
	if c.UntunedOnly {
		return s
	}
	for _, t := range c.Plan.Terms {
		if t.Name != fit.Spread || t.By != fit.Shared {
			s += " + " + t.String()
		}
	}
	return s
}
