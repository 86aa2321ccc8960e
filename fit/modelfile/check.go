package modelfile

import (
	"errors"
	"fmt"
	"slices"
	"strconv"
	"strings"

	"limsup/data/schema"
	"limsup/eos"
	"limsup/fit"
)

// checker collects what in a file of the right shape has no meaning.
type checker struct {
	file     *File
	name     string
	variant  fit.Variant // complete
	problems Problems
}

// at reports a problem at a path of keys and indices.
func (c *checker) at(err error, message string, path ...any) {
	steps := make([]string, len(path))
	for i, s := range path {
		steps[i] = fmt.Sprint(s)
	}
	c.problems = append(c.problems, &InvalidError{File: c.name, Pointer: schema.Pointer(steps...), Message: message, Err: err})
}

// check lists what in the file has no meaning. It does not rely on the shape, so
// that it serves for files that were put together in memory.
func (f *File) check(name string) Problems {
	c := &checker{file: f, name: name}
	if f.Format != Format {
		c.at(nil, foundExpected(strconv.Quote(f.Format), strconv.Quote(Format)), "format")
	}
	if f.Version != Version {
		c.at(nil, foundExpected(strconv.Itoa(f.Version), strconv.Itoa(Version)), "version")
	}
	if !c.options() {
		return c.problems // all else depends on the variant
	}
	c.settings()
	c.fluids()
	if f.Parameters != nil {
		c.calibration()
	}
	if len(c.problems) > 0 {
		return c.problems
	}
	m, err := f.model()
	if err != nil {
		c.at(err, err.Error())
		return c.problems
	}
	c.physics(m)
	return c.problems
}

func foundExpected(found, expected string) string { return "found " + found + ", expected " + expected }

// number writes a number without loss.
func number(x float64) string { return strconv.FormatFloat(x, 'g', -1, 64) }

// optionKeys are the keys of a file for the options that errors of fit name.
var optionKeys = map[string]string{"limit": "limit", "surface-tension": "surface_tension", "properties": "properties",
	"embryo-pressure": "embryo_pressure", "kinetics": "kinetics"}

// options checks equation, options and noise, and completes the variant.
func (c *checker) options() bool {
	e := &c.file.Equation
	builtin := slices.Contains(eos.EquationNames(), e.Name)
	switch {
	case e.Definition == nil && !builtin:
		c.at(nil, foundExpected(strconv.Quote(e.Name), "one of "+strings.Join(eos.EquationNames(), ", ")+", or delta1, delta2 and alpha beside another name"), "equation", "name")
	case e.Definition != nil && (builtin || e.Name == ""):
		c.at(nil, foundExpected(strconv.Quote(e.Name), "a name that no built-in equation has, since the file defines its own"), "equation", "name")
	case e.Definition != nil:
		want := map[eos.AlphaForm]int{eos.AlphaPower: 1, eos.AlphaSoave: 3}[e.Alpha.Form]
		if n := len(e.Alpha.Coefficients); want == 0 || n != want {
			c.at(nil, fmt.Sprintf("found %d coefficients of form %q, expected 1 of power or 3 of soave", n, string(e.Alpha.Form)), "equation", "alpha")
		}
		if _, err := eos.NewForm(e.Delta1, e.Delta2); err != nil {
			c.at(err, err.Error(), "equation")
		}
	}
	if len(c.problems) > 0 {
		return false
	}
	var err error
	if c.variant, err = c.file.variant().Complete(); err != nil {
		var o *fit.OptionError
		if errors.As(err, &o) && optionKeys[o.Option] != "" {
			c.at(err, foundExpected(strconv.Quote(o.Value), o.Want), "options", optionKeys[o.Option])
		} else {
			c.at(err, err.Error(), "options")
		}
		return false
	}
	if err := c.plan(fit.Plan{Noise: c.file.noise()}); err != nil {
		c.at(err, err.Error(), "noise")
		return false
	}
	return true
}

// plan completes a plan under the variant of the file.
func (c *checker) plan(p fit.Plan) error {
	p.Variant = c.variant
	_, err := p.Complete()
	return err
}

func (c *checker) settings() {
	seen := map[Setting]bool{}
	for i, s := range c.file.Settings {
		if err := c.plan(fit.Plan{Fixed: []fit.Setting{fit.Setting(s)}}); err != nil {
			c.option(err, "settings", i)
		}
		k := Setting{Name: s.Name, Group: s.Group}
		if seen[k] {
			c.at(nil, "found a second value of "+s.Name+", expected one for each parameter and group", "settings", i)
		}
		seen[k] = true
	}
}

// option reports an error of fit about a parameter.
func (c *checker) option(err error, path ...any) {
	message := err.Error()
	var o *fit.OptionError
	if errors.As(err, &o) {
		message = fmt.Sprintf("found %s %q, expected %s", o.Option, o.Value, o.Want)
	}
	c.at(err, message, path...)
}

// fluids checks that each record is there once.
func (c *checker) fluids() {
	seen := map[string]bool{}
	for i, r := range c.file.Fluids {
		switch {
		case r == nil:
			c.at(nil, "found nothing, expected a fluid record", "fluids", i)
		case seen[r.Key]:
			c.at(nil, fmt.Sprintf("found a second record of %q, expected one for each fluid", r.Key), "fluids", i, "key")
		default:
			seen[r.Key] = true
		}
	}
}

func (c *checker) hasFluid(key string) bool {
	for _, r := range c.file.Fluids {
		if r != nil && r.Key == key {
			return true
		}
	}
	return false
}

// physics applies the equation, with the parameters of the model, to each record.
func (c *checker) physics(m *fit.Model) {
	for i, r := range c.file.Fluids {
		if _, err := fit.NewEquationPhysics(m.Variant, r, m.Values(&fit.Query{Record: r})); err != nil {
			c.at(err, "found constants or parameters that the equation cannot take: "+err.Error(), "fluids", i)
		}
	}
}
