package modelfile

import (
	"fmt"
	"math"
	"slices"
	"strconv"

	"limsup/fit"
)

// This file checks what a calibration left in a file: parameters, their groups and
// validity.

func (c *checker) calibration() {
	c.validity()
	c.parameters()
	c.covariance()
	if d := c.file.Degrees; d < 1 {
		c.at(nil, foundExpected(strconv.Itoa(d), "at least 1"), "degrees_of_freedom")
	}
}

func (c *checker) validity() {
	v := c.file.Validity
	if v == nil {
		c.at(nil, "found nothing, expected the validity of the calibration", "validity")
		return
	}
	for _, l := range [...]struct {
		key   string
		names []string
	}{{"fluids", v.Fluids}, {"methods", v.Methods}} {
		seen := map[string]bool{}
		for i, n := range l.names {
			if seen[n] {
				c.at(nil, fmt.Sprintf("found %q a second time, expected each name once", n), "validity", l.key, i)
			}
			seen[n] = true
		}
	}
	for i, key := range v.Fluids {
		if !c.hasFluid(key) {
			c.at(nil, foundExpected(strconv.Quote(key), "a fluid with a record under /fluids"), "validity", "fluids", i)
		}
	}
	c.increasing(v.Pressure, "pressure_Pa")
	if c.increasing(v.Temperature, "temperature_K") && !(v.Temperature[0] > 0) {
		c.at(nil, foundExpected(number(v.Temperature[0]), "a temperature above 0 K"), "validity", "temperature_K", 0)
	}
}

func (c *checker) increasing(r [2]float64, key string) bool {
	ok := r[0] <= r[1] && finite(r[0]) && finite(r[1])
	if !ok {
		c.at(nil, fmt.Sprintf("found %s to %s, expected the lower number first", number(r[0]), number(r[1])), "validity", key)
	}
	return ok
}

func finite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }

// parameters checks each parameter, then those of one name together.
func (c *checker) parameters() {
	labels := map[string]bool{}
	first := map[string]int{}
	for i := range c.file.Parameters {
		p := &c.file.Parameters[i]
		c.parameter(i, p)
		e := p.estimate()
		if l := e.Label(); labels[l] {
			c.at(nil, fmt.Sprintf("found %s a second time, expected each parameter once", l), "parameters", i)
		} else {
			labels[l] = true
		}
		at, seen := first[p.Name]
		if !seen {
			first[p.Name] = i
			if err := c.plan(fit.Plan{Terms: []fit.Term{{Name: p.Name}}, Fixed: c.tunable(p)}); err != nil {
				c.option(err, "parameters", i, "name")
			}
		} else if by := c.file.Parameters[at].By; by != p.By {
			c.at(nil, foundExpected(strconv.Quote(p.By), fmt.Sprintf("%q as in /parameters/%d, since a parameter has one scope", by, at)), "parameters", i, "by")
		}
	}
	for i := range c.file.Parameters {
		c.family(i, first)
	}
	c.references(first)
}

// tunable are the settings that exclude the tuning of a parameter: its own for all
// groups.
func (c *checker) tunable(p *Parameter) []fit.Setting {
	var out []fit.Setting
	for _, s := range c.file.Settings {
		if s.Name == p.Name && s.Group == "" {
			out = append(out, fit.Setting(s))
		}
	}
	return out
}

// boundSlack is how far, relative to the width of its bounds, a value may lie from a
// bound at which it is said to stand, or beyond: the tolerance of package fit, which
// calls a parameter at its bound within 1e-7 of the width.
const boundSlack = 2e-7

func (c *checker) parameter(i int, p *Parameter) {
	for _, q := range fit.ParameterTable() {
		if q.Name == p.Name && q.Unit != p.Unit {
			c.at(nil, foundExpected(strconv.Quote(p.Unit), strconv.Quote(q.Unit)), "parameters", i, "unit")
		}
	}
	slack := boundSlack * (p.Upper - p.Lower)
	switch {
	case !(p.Lower < p.Upper) || !finite(p.Lower) || !finite(p.Upper) || !finite(slack):
		c.at(nil, fmt.Sprintf("found bounds %s and %s, expected the lower one first", number(p.Lower), number(p.Upper)), "parameters", i, "lower")
	case !(p.Value >= p.Lower-slack && p.Value <= p.Upper+slack):
		c.at(nil, foundExpected(number(p.Value), fmt.Sprintf("a value between the bounds %s and %s", number(p.Lower), number(p.Upper))), "parameters", i, "value")
	case p.AtBound == "lower" && p.Value > p.Lower+slack, p.AtBound == "upper" && p.Value < p.Upper-slack:
		c.at(nil, fmt.Sprintf("found %q with the value %s, expected the value at that bound", p.AtBound, number(p.Value)), "parameters", i, "at_bound")
	}
	if !finite(p.Start) {
		c.at(nil, foundExpected(number(p.Start), "a finite number"), "parameters", i, "start")
	}
	switch u := p.U; {
	case u == nil && p.Reason == "":
		c.at(nil, "found nothing, expected the reason why there is no uncertainty", "parameters", i, "reason")
	case u != nil && !(*u >= 0 && finite(*u)):
		c.at(nil, foundExpected(number(*u), "at least 0"), "parameters", i, "standard_uncertainty")
	}
	c.group(i, p)
}

// group checks that the group of a parameter is one of the data.
func (c *checker) group(i int, p *Parameter) {
	v := c.file.Validity
	switch grouped := p.By != "" && p.Role == string(fit.RoleValue); {
	case !grouped && p.Group != "":
		c.at(nil, foundExpected(strconv.Quote(p.Group), "no group of a shared parameter, of a pooled mean or a pooled spread"), "parameters", i, "group")
	case grouped && p.Group == "":
		c.at(nil, foundExpected("nothing", "a "+p.By), "parameters", i, "group")
	case grouped && p.By == string(fit.ByFluid) && !c.hasFluid(p.Group):
		c.at(nil, foundExpected(strconv.Quote(p.Group), "a fluid with a record under /fluids"), "parameters", i, "group")
	case grouped && p.By == string(fit.ByMethod) && v != nil && !slices.Contains(v.Methods, p.Group):
		c.at(nil, foundExpected(strconv.Quote(p.Group), "a method of /validity/methods"), "parameters", i, "group")
	}
}

// family checks that the mean of a pool comes with its spread, and both with a
// scope.
func (c *checker) family(i int, first map[string]int) {
	p := &c.file.Parameters[i]
	role := fit.Role(p.Role)
	if role == fit.RoleValue {
		return
	}
	if role != fit.RolePoolMean && role != fit.RolePoolSpread {
		c.at(nil, foundExpected(strconv.Quote(p.Role), "value, pooled mean or pooled spread"), "parameters", i, "role")
		return
	}
	if p.By == "" || p.Name == fit.Spread {
		c.at(nil, fmt.Sprintf("found a %s of %s, expected one of a parameter by fluid, method or batch other than spread", p.Role, p.Name), "parameters", i, "role")
		return
	}
	partner := fit.RolePoolSpread
	if role == fit.RolePoolSpread {
		partner = fit.RolePoolMean
	}
	if role == fit.RolePoolSpread && p.Name == fit.Offset {
		partner = "" // offsets are scattered about zero
	}
	if partner != "" && !slices.ContainsFunc(c.file.Parameters[first[p.Name]:], func(q Parameter) bool { return q.Name == p.Name && q.Role == string(partner) }) {
		c.at(nil, fmt.Sprintf("found a %s without a %s of %s, expected both", p.Role, partner, p.Name), "parameters", i, "role")
	}
	if role == fit.RolePoolSpread && p.Value < 0 {
		c.at(nil, foundExpected(number(p.Value), "at least 0"), "parameters", i, "value")
	}
}

// references checks that an offset by group has one group at zero, without a value
// of its own.
func (c *checker) references(first map[string]int) {
	references := c.file.references()
	at, tuned := first[fit.Offset]
	// Pooled offsets are scattered about zero; none of them need be the reference.
	pooled := slices.ContainsFunc(c.file.Parameters, func(p Parameter) bool { return p.Name == fit.Offset && p.Role == string(fit.RolePoolSpread) })
	by := ""
	if tuned {
		by = c.file.Parameters[at].By
	}
	for _, scope := range []fit.By{fit.ByFluid, fit.ByMethod, fit.ByBatch} {
		g, ok := references[string(scope)]
		wanted := tuned && by == string(scope)
		switch {
		case ok && !wanted:
			c.at(nil, foundExpected(strconv.Quote(g), "no reference "+string(scope)+" without an offset by "+string(scope)), "offset_references", string(scope))
		case wanted && !ok && !pooled:
			c.at(nil, foundExpected("nothing", "the "+by+" whose offset is zero"), "offset_references", by)
		case wanted && !ok:
		case wanted && scope == fit.ByMethod && c.file.Validity != nil && !slices.Contains(c.file.Validity.Methods, g):
			c.at(nil, foundExpected(strconv.Quote(g), "a method of /validity/methods"), "offset_references", by)
		case wanted && scope == fit.ByFluid && !c.hasFluid(g):
			c.at(nil, foundExpected(strconv.Quote(g), "a fluid with a record under /fluids"), "offset_references", by)
		case wanted:
			for i := range c.file.Parameters {
				if p := &c.file.Parameters[i]; p.Name == fit.Offset && p.Group == g {
					c.at(nil, fmt.Sprintf("found an offset of %q, expected none: it is the reference", g), "parameters", i, "group")
				}
			}
		}
	}
}
