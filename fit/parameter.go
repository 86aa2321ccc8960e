package fit

import (
	"fmt"
	"math"
	"slices"
	"strings"
)

// Parameter describes a quantity that can be tuned.
type Parameter struct {
	Name         string
	Unit         string // UCUM
	Meaning      string
	Start        float64
	Lower, Upper float64
}

// Names of the parameters.
const (
	Threshold      = "threshold"
	Prefactor      = "prefactor"
	Attraction     = "attraction"
	Covolume       = "covolume"
	Slope          = "slope"
	SurfaceTension = "surface-tension"
	Tolman         = "tolman"
	Offset         = "offset"
	Spread         = "spread"
	DegreesOfNoise = "degrees" // of freedom of Student noise
)

// ParameterTable returns the parameters in their order.
func ParameterTable() []Parameter { return slices.Clone(parameters) }

var parameters = []Parameter{
	{Threshold, "1", "log10 of the threshold flux J* in m-3.s-1", 12, 0, 35},
	{Prefactor, "1", "decades added to log10 J", 0, -20, 20},
	{Attraction, "1", "factor on the attraction a", 1, 0.7, 1.3},
	{Covolume, "1", "factor on the covolume b", 1, 0.7, 1.3},
	{Slope, "1", "factor on the slope m or the exponent n of alpha (van der Waals: the exponent itself)", 1, -1, 3},
	{SurfaceTension, "1", "factor on the surface tension", 1, 0.5, 1.5},
	{Tolman, "nm", "Tolman length", 0, -0.5, 0.5},
	{Offset, "K", "bias of a method against the reference method", 0, -30, 30},
	{Spread, "K", "standard deviation beyond the stated uncertainties", 1, 0, 50},
	{DegreesOfNoise, "1", "degrees of freedom of student noise", 4, fewestDegrees, mostDegrees},
}

// parameterOf returns the description of a parameter under a variant.
func parameterOf(name string, v *Variant) (Parameter, error) {
	i := slices.IndexFunc(parameters, func(p Parameter) bool { return p.Name == name })
	if i < 0 {
		var names []string
		for _, p := range parameters {
			names = append(names, p.Name)
		}
		return Parameter{}, &OptionError{"parameter", name, "one of " + strings.Join(names, ", ")}
	}
	found := parameters[i]
	if name == Slope {
		if e, err := v.equation(); err == nil {
			found.Start = e.Untuned().Slope
		}
	}
	return found, nil
}

// By says for what a parameter has a value of its own.
type By string

// The scopes of a parameter.
const (
	Shared   By = ""
	ByFluid  By = "fluid"
	ByMethod By = "method"
	ByBatch  By = "batch"
)

// Term frees one parameter.
type Term struct {
	Name string
	By   By
	// Pooled lets the values of the groups share a normal distribution whose mean
	// and spread are estimated.
	Pooled bool
}

// String is the term as it is written: "slope/fluid/pooled".
func (t Term) String() string {
	s := t.Name
	if t.By != Shared {
		s += "/" + string(t.By)
	}
	if t.Pooled {
		s += "/pooled"
	}
	return s
}

// ParseTerm reads "NAME", "NAME/fluid", "NAME/method", "NAME/batch", each group
// with an optional "/pooled".
//
// Errors: *OptionError.
func ParseTerm(s string) (Term, error) {
	parts := strings.Split(s, "/")
	t := Term{Name: parts[0]}
	v := DefaultVariant()
	if _, err := parameterOf(t.Name, &v); err != nil {
		return t, err
	}
	if len(parts) > 1 {
		t.By = By(parts[1])
		if !slices.Contains([]By{ByFluid, ByMethod, ByBatch}, t.By) {
			return t, &OptionError{"tune", s, "NAME, NAME/fluid, NAME/method or NAME/batch, the last three optionally with /pooled"}
		}
	}
	if t.Name == DegreesOfNoise && t.By != Shared {
		return t, &OptionError{"tune", s, "degrees, shared by all rows"}
	}
	if len(parts) > 2 {
		if parts[2] != "pooled" || len(parts) > 3 {
			return t, &OptionError{"tune", s, "nothing but /pooled after the group"}
		}
		if t.Name == Spread {
			return t, &OptionError{"tune", s, "spread without /pooled: a spread of spreads is not estimated"}
		}
		t.Pooled = true
	}
	return t, nil
}

// Setting gives a parameter a value; Group "" is every group.
type Setting struct {
	Name  string
	Group string
	Value float64
}

// Bound limits a parameter.
type Bound struct {
	Name         string
	Lower, Upper float64
}

// Prior is what is known of a parameter before the measurements: a normal
// distribution. Group "" is every group.
type Prior struct {
	Name   string
	Group  string
	Mean   float64
	Spread float64 // standard deviation, > 0
}

// Anchor adds the fluid's own correlation as measurements, so that tuning does
// not spoil what the equation already gets right.
type Anchor struct {
	Property string  // "vapour-pressure" or "liquid-density"
	Relative float64 // standard uncertainty of the correlation points, relative, > 0
}

// Plan says what a calibration frees, fixes and knows beforehand.
type Plan struct {
	Variant  Variant
	Terms    []Term
	Fixed    []Setting // never tuned; also what a parameter that is not freed is set to
	Starts   []Setting
	Bounds   []Bound
	Priors   []Prior
	Anchors  []Anchor
	Noise    Noise
	Restarts int    // further starts of the search, from a space-filling sample
	Seed     uint64 // of that sample
	// References names, by scope ("method"), the group whose offset is zero; a group
	// that the data do not hold, and nil, leave it to the group with most rows.
	References map[string]string
	// DefaultTerms is set by Complete when no term was given: the threshold, or the
	// prefactor where every row carries its own flux.
	DefaultTerms bool
}

// Complete checks a plan and fills in its defaults: the spread is free unless
// fixed.
//
// Errors: *OptionError, *eos.UnknownEquationError.
func (p Plan) Complete() (Plan, error) {
	var err error
	if p.Variant, err = p.Variant.Complete(); err != nil {
		return p, err
	}
	if p.Noise, err = p.Noise.complete(); err != nil {
		return p, err
	}
	p.Terms = slices.Clone(p.Terms)
	seen := map[string]bool{}
	for _, t := range p.Terms {
		if _, err := parameterOf(t.Name, &p.Variant); err != nil {
			return p, err
		}
		if seen[t.Name] {
			return p, &OptionError{"tune", t.String(), "each parameter once"}
		}
		seen[t.Name] = true
		if p.fixed(t.Name) {
			return p, &OptionError{"tune", t.String(), "a parameter that is not fixed at the same time"}
		}
		if why := idle(t.Name, &p.Variant); why != "" {
			return p, &OptionError{"tune", t.String(), why}
		}
	}
	if len(p.Terms) == 0 || len(p.Terms) == 1 && seen[Spread] {
		p.DefaultTerms = !p.fixed(Threshold) && idle(Threshold, &p.Variant) == ""
		if p.DefaultTerms {
			p.Terms = append([]Term{{Name: Threshold}}, p.Terms...)
		}
	}
	if !seen[Spread] && !p.fixed(Spread) {
		p.Terms = append(p.Terms, Term{Name: Spread})
	}
	p.completeDegrees(seen)
	for _, list := range [][]Setting{p.Fixed, p.Starts} {
		for _, s := range list {
			q, err := parameterOf(s.Name, &p.Variant)
			if err != nil {
				return p, err
			}
			lo, hi := p.bounds(q)
			if !(s.Value >= lo && s.Value <= hi) {
				return p, &OptionError{"value of " + s.Name, fmt.Sprintf("%.10g", s.Value), fmt.Sprintf("%.10g to %.10g", lo, hi)}
			}
		}
	}
	for _, b := range p.Bounds {
		if _, err := parameterOf(b.Name, &p.Variant); err != nil {
			return p, err
		}
		if math.IsInf(b.Lower, 0) || math.IsInf(b.Upper, 0) {
			return p, &OptionError{"bounds of " + b.Name, fmt.Sprintf("%.10g..%.10g", b.Lower, b.Upper), "finite numbers"}
		}
		if !(b.Lower < b.Upper) {
			return p, &OptionError{"bounds of " + b.Name, fmt.Sprintf("%.10g..%.10g", b.Lower, b.Upper), "the lower bound below the upper one"}
		}
		if b.Name == Spread && b.Lower < 0 {
			return p, &OptionError{"bounds of spread", fmt.Sprintf("%.10g..%.10g", b.Lower, b.Upper), "a lower bound of 0 or more"}
		}
	}
	for _, r := range p.Priors {
		if _, err := parameterOf(r.Name, &p.Variant); err != nil {
			return p, err
		}
		if !(r.Spread > 0 && math.Abs(r.Mean) <= math.MaxFloat64 && r.Spread <= math.MaxFloat64) {
			return p, &OptionError{"prior of " + r.Name, fmt.Sprintf("%.10g+-%.10g", r.Mean, r.Spread), "finite numbers and a standard deviation > 0"}
		}
		if r.Name == Spread || r.Name == DegreesOfNoise {
			return p, &OptionError{"prior of " + r.Name, fmt.Sprintf("%.10g", r.Mean), "a prior on another parameter; bound this one instead"}
		}
	}
	for _, a := range p.Anchors {
		if a.Property != "vapour-pressure" && a.Property != "liquid-density" {
			return p, &OptionError{"anchor", a.Property, "vapour-pressure or liquid-density"}
		}
		if !(a.Relative > 0 && a.Relative < 1) {
			return p, &OptionError{"anchor " + a.Property, fmt.Sprintf("%.10g", a.Relative), "a relative standard uncertainty between 0 and 1"}
		}
	}
	return p, nil
}

// completeDegrees brings the degrees of freedom of the noise and the parameter of
// that name together.
func (p *Plan) completeDegrees(seen map[string]bool) {
	if p.Noise.Kind != Student {
		return // newLayout refuses a free parameter
	}
	for _, list := range [][]Setting{p.Fixed, p.Starts} {
		for _, s := range list {
			if s.Name == DegreesOfNoise {
				p.Noise.Degrees = s.Value
			}
		}
	}
	if p.Noise.Estimate && !seen[DegreesOfNoise] && !p.fixed(DegreesOfNoise) {
		p.Terms = append(p.Terms, Term{Name: DegreesOfNoise})
	}
	_, p.Noise.Estimate = p.term(DegreesOfNoise)
}

// idle tells why a parameter has no effect under a variant, or "".
func idle(name string, v *Variant) string {
	switch name {
	case Threshold, Prefactor, SurfaceTension, Tolman:
		if v.Limit == Spinodal {
			return "another parameter: the spinodal depends on the equation of state alone"
		}
	case Attraction, Covolume, Slope:
		if v.Properties == "correlation" && v.Tension != TensionFromParachor {
			return "another parameter: with properties from correlations the equation of state has no effect"
		}
	}
	return ""
}

func (p *Plan) fixed(name string) bool {
	return slices.ContainsFunc(p.Fixed, func(s Setting) bool { return s.Name == name && s.Group == "" })
}

func (p *Plan) term(name string) (Term, bool) {
	i := slices.IndexFunc(p.Terms, func(t Term) bool { return t.Name == name })
	if i < 0 {
		return Term{}, false
	}
	return p.Terms[i], true
}

func (p *Plan) bounds(q Parameter) (lo, hi float64) {
	lo, hi = q.Lower, q.Upper
	for _, b := range p.Bounds {
		if b.Name == q.Name {
			lo, hi = b.Lower, b.Upper
		}
	}
	return lo, hi
}

// value is the start of a parameter in a group, or the value it is fixed at.
func (p *Plan) value(q Parameter, group string) float64 {
	v := q.Start
	for _, list := range [][]Setting{p.Fixed, p.Starts} {
		for _, s := range list {
			if s.Name == q.Name && (s.Group == "" || s.Group == group) {
				v = s.Value
			}
		}
	}
	return v
}
