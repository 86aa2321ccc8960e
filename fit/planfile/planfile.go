// Package planfile reads the plan of a calibration from TOML. Every key is checked;
// an unknown one is refused by name and line.
//
//	[model]                        # as the flags of the same names
//	equation = "soave"
//	limit = "kinetic"
//	surface-tension = "correlation"
//	properties = "equation"
//	embryo-pressure = "exact"
//	kinetics = "mechanical"
//
//	[noise]
//	kind = "student"               # gaussian, student, survival
//	degrees = 4                    # of student noise
//	estimate = true                # estimate them, starting there
//
//	[search]
//	restarts = 5                   # further starts over the bounds
//	seed = 1
//
//	[[parameter]]
//	name = "slope"
//	tune = true                    # default: true, unless value is given
//	by = "fluid"                   # one value per fluid, method or batch
//	pooled = true                  # that share a normal distribution
//	start = 1.0
//	lower = 0.8                    # both bounds or none
//	upper = 1.2
//	prior = {mean = 1.0, sd = 0.1}
//	[[parameter.group]]            # the same for one group
//	name = "n-pentane"
//	start = 0.98
//	prior = {mean = 0.98, sd = 0.02}
//
//	[[parameter]]
//	name = "prefactor"
//	value = -1.5                   # held there
//
//	[[anchor]]
//	property = "vapour-pressure"   # or liquid-density
//	uncertainty = 0.01             # relative standard uncertainty
//
// The package checks words and numbers of one plan; whether data can serve it is for
// package fit to say.
package planfile

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"regexp"
	"slices"
	"strings"

	"github.com/pelletier/go-toml/v2"

	"limsup/eos/nucleation"
	"limsup/fit"
)

// Problem is one thing wrong with a plan file.
type Problem struct {
	File    string
	Line    int // 1-based
	Message string
}

func (e *Problem) Error() string { return fmt.Sprintf("%s:%d: %s", e.File, e.Line, e.Message) }

// Problems are all that is wrong with a file.
type Problems []*Problem

func (p Problems) Error() string {
	var b strings.Builder
	for i, e := range p {
		if i > 0 {
			b.WriteByte('\n')
		}
		b.WriteString(e.Error())
	}
	return b.String()
}

type file struct {
	Model struct {
		Equation       string `toml:"equation"`
		Limit          string `toml:"limit"`
		SurfaceTension string `toml:"surface-tension"`
		Properties     string `toml:"properties"`
		EmbryoPressure string `toml:"embryo-pressure"`
		Kinetics       string `toml:"kinetics"`
	} `toml:"model"`
	Noise struct {
		Kind     string   `toml:"kind"`
		Degrees  *float64 `toml:"degrees"`
		Estimate bool     `toml:"estimate"`
	} `toml:"noise"`
	Search struct {
		Restarts int     `toml:"restarts"`
		Seed     *uint64 `toml:"seed"`
	} `toml:"search"`
	Parameter []parameter `toml:"parameter"`
	Anchor    []struct {
		Property    string   `toml:"property"`
		Uncertainty *float64 `toml:"uncertainty"`
	} `toml:"anchor"`
}

type parameter struct {
	Name   string   `toml:"name"`
	Tune   *bool    `toml:"tune"`
	By     string   `toml:"by"`
	Pooled bool     `toml:"pooled"`
	Value  *float64 `toml:"value"`
	Start  *float64 `toml:"start"`
	Lower  *float64 `toml:"lower"`
	Upper  *float64 `toml:"upper"`
	Prior  *prior   `toml:"prior"`
	Group  []group  `toml:"group"`
}

type group struct {
	Name  string   `toml:"name"`
	Start *float64 `toml:"start"`
	Prior *prior   `toml:"prior"`
}

type prior struct {
	Mean *float64 `toml:"mean"`
	SD   *float64 `toml:"sd"`
}

// mostBytes is more than any plan needs.
const mostBytes = 1 << 20

// Read reads a plan. name is the file in messages. HasSeed tells whether the file
// gives the seed of the search. The plan is as written, not completed.
//
// Errors: Problems; errors of r.
func Read(r io.Reader, name string) (p fit.Plan, hasSeed bool, err error) {
	text, err := io.ReadAll(io.LimitReader(r, mostBytes+1))
	if err != nil {
		return p, false, err
	}
	if len(text) > mostBytes {
		return p, false, Problems{{name, 1, fmt.Sprintf("larger than %d bytes", mostBytes)}}
	}
	var f file
	c := &checker{name: name, lines: strings.Split(string(text), "\n")}
	if err := toml.NewDecoder(bytes.NewReader(text)).DisallowUnknownFields().Decode(&f); err != nil {
		c.problems = syntax(err, name)
		f = file{}
		if err := toml.Unmarshal(text, &f); err != nil { // not only keys that are unknown
			return p, false, c.problems
		}
	}
	p = c.plan(&f)
	if len(c.problems) > 0 {
		slices.SortStableFunc(c.problems, func(a, b *Problem) int { return a.Line - b.Line })
		return fit.Plan{}, false, c.problems
	}
	return p, f.Search.Seed != nil, nil
}

// syntax turns errors of the TOML reader into problems.
func syntax(err error, name string) Problems {
	var strict *toml.StrictMissingError
	var one *toml.DecodeError
	switch {
	case errors.As(err, &strict):
		var out Problems
		for i := range strict.Errors {
			line, _ := strict.Errors[i].Position()
			out = append(out, &Problem{name, line, fmt.Sprintf("unknown key %s", strings.Join(strict.Errors[i].Key(), "."))})
		}
		return out
	case errors.As(err, &one):
		line, _ := one.Position()
		key := strings.Join(one.Key(), ".")
		if key != "" {
			key += ": "
		}
		if kind := wrongKind.FindStringSubmatch(one.Error()); kind != nil { // without the names of Go types
			return Problems{{name, line, key + "found TOML " + strings.ToLower(kind[1]) + ", want " + goKinds(kind[2])}}
		}
		return Problems{{name, line, key + strings.TrimPrefix(one.Error(), "toml: ")}}
	}
	return Problems{{name, 1, strings.TrimPrefix(err.Error(), "toml: ")}}
}

var wrongKind = regexp.MustCompile(`cannot decode TOML (\w+) into .* of type (\S+)$`)

// goKinds names a type of Go as the file knows it.
func goKinds(t string) string {
	switch t = strings.TrimLeft(t, "*"); {
	case strings.HasPrefix(t, "int"), strings.HasPrefix(t, "uint"):
		return "a whole number"
	case strings.HasPrefix(t, "float"):
		return "a number"
	case t == "bool":
		return "true or false"
	case t == "string":
		return "text"
	}
	return "a table"
}

type checker struct {
	name     string
	lines    []string
	problems Problems
}

func (c *checker) add(line int, format string, args ...any) {
	c.problems = append(c.problems, &Problem{c.name, line, fmt.Sprintf(format, args...)})
}

var header = regexp.MustCompile(`^\s*\[`)

// line finds a key in the table number n (from 0) with a header, or that header.
func (c *checker) line(table string, n int, key string) int {
	start := regexp.MustCompile(`^\s*\[{1,2}\s*` + regexp.QuoteMeta(table) + `\s*\]`)
	entry := regexp.MustCompile(`^\s*"?` + regexp.QuoteMeta(key) + `"?\s*[=.]`)
	at, inside := 1, false
	for i, l := range c.lines {
		switch {
		case start.MatchString(l):
			if n--; n < -1 {
				return at
			}
			if inside = n == -1; inside {
				at = i + 1
			}
		case header.MatchString(l):
			inside = false
		case inside && entry.MatchString(l):
			return i + 1
		}
	}
	return at
}

func (c *checker) plan(f *file) fit.Plan {
	m := &f.Model
	p := fit.Plan{Variant: fit.Variant{Equation: m.Equation, Limit: fit.Limit(m.Limit), Tension: fit.Tension(m.SurfaceTension),
		Properties: nucleation.Properties(m.Properties), EmbryoPressure: nucleation.EmbryoPressure(m.EmbryoPressure), Kinetics: nucleation.Kinetics(m.Kinetics)},
		Noise: fit.Noise{Kind: fit.NoiseKind(f.Noise.Kind), Estimate: f.Noise.Estimate}, Restarts: f.Search.Restarts}
	if _, err := p.Variant.Complete(); err != nil {
		c.add(c.line("model", 0, ""), "%v", err)
	}
	if d := f.Noise.Degrees; d != nil {
		if p.Noise.Degrees = *d; p.Noise.Kind != fit.Student || !(*d >= 1) {
			c.add(c.line("noise", 0, "degrees"), "degrees %.10g: want 1 or more, with kind = \"student\"", *d)
		}
	}
	if p.Restarts < 0 || p.Restarts > 10000 {
		c.add(c.line("search", 0, "restarts"), "restarts %d: want 0 to 10000", p.Restarts)
	}
	if f.Search.Seed != nil {
		p.Seed = *f.Search.Seed
	}
	seen := map[string]bool{}
	groups := 0
	for i := range f.Parameter {
		c.parameter(&p, i, &f.Parameter[i], seen, &groups)
	}
	for i, a := range f.Anchor {
		if a.Uncertainty == nil {
			c.add(c.line("anchor", i, ""), "anchor: uncertainty is missing")
			continue
		}
		p.Anchors = append(p.Anchors, fit.Anchor{Property: a.Property, Relative: *a.Uncertainty})
		c.complete(fit.Plan{Variant: p.Variant, Anchors: p.Anchors[len(p.Anchors)-1:]}, c.line("anchor", i, ""))
	}
	if len(c.problems) == 0 { // what concerns the plan as a whole
		c.complete(p, 1)
	}
	return p
}

// complete reports what fit says of a plan.
func (c *checker) complete(p fit.Plan, line int) {
	if _, err := p.Complete(); err != nil {
		c.add(line, "%v", err)
	}
}

func (c *checker) parameter(p *fit.Plan, i int, q *parameter, seen map[string]bool, groups *int) {
	at := func(key string) int { return c.line("parameter", i, key) }
	first := *groups
	*groups += len(q.Group)
	if q.Pooled && q.By == "" {
		c.add(at("pooled"), "%s: pooled needs by", q.Name)
		return
	}
	term := q.Name
	if q.By != "" {
		term += "/" + q.By
	}
	if q.Pooled {
		term += "/pooled"
	}
	t, err := fit.ParseTerm(term)
	if err != nil || strings.Contains(q.Name, "/") {
		if err == nil {
			err = fmt.Errorf("parameter %q: want a name; by and pooled are keys of their own", q.Name)
		}
		c.add(at("name"), "%v", err)
		return
	}
	if seen[q.Name] {
		c.add(at("name"), "parameter %s a second time: want each parameter once", q.Name)
		return
	}
	seen[q.Name] = true
	tune := q.Value == nil
	if q.Tune != nil {
		tune = *q.Tune
	}
	one := fit.Plan{Variant: p.Variant, Noise: p.Noise}
	switch {
	case tune && q.Value != nil:
		c.add(at("value"), "%s: value holds a parameter; one that is tuned has a start", q.Name)
	case tune:
		one.Terms = []fit.Term{t}
	case q.Value == nil:
		c.add(at("tune"), "%s: a parameter that is not tuned needs a value", q.Name)
	case q.Start != nil || q.Prior != nil || len(q.Group) > 0 || q.By != "" || q.Pooled:
		c.add(at("value"), "%s: a parameter that is held has neither start, prior, by, pooled nor groups", q.Name)
	default:
		one.Fixed = []fit.Setting{{Name: q.Name, Value: *q.Value}}
	}
	if (q.Lower == nil) != (q.Upper == nil) {
		c.add(at("lower"), "%s: want both bounds or none", q.Name)
	} else if q.Lower != nil && !(*q.Lower < *q.Upper) {
		c.add(at("lower"), "%s: want lower below upper", q.Name)
		return
	} else if q.Lower != nil {
		one.Bounds = []fit.Bound{{Name: q.Name, Lower: *q.Lower, Upper: *q.Upper}}
	}
	start := func(group string, v *float64, line int) {
		if v != nil {
			one.Starts = append(one.Starts, fit.Setting{Name: q.Name, Group: group, Value: *v})
		}
	}
	known := func(group string, v *prior, line int) {
		switch {
		case v == nil:
		case v.Mean == nil || v.SD == nil:
			c.add(line, "%s: a prior needs mean and sd", q.Name)
		default:
			one.Priors = append(one.Priors, fit.Prior{Name: q.Name, Group: group, Mean: *v.Mean, Spread: *v.SD})
		}
	}
	start("", q.Start, at("start"))
	known("", q.Prior, at("prior"))
	for k, g := range q.Group {
		line := c.line("parameter.group", first+k, "name")
		if g.Name == "" || q.By == "" {
			c.add(line, "%s: a group needs a name, and its parameter by", q.Name)
			continue
		}
		start(g.Name, g.Start, line)
		known(g.Name, g.Prior, line)
	}
	c.complete(one, at(""))
	p.Terms = append(p.Terms, one.Terms...)
	p.Fixed = append(p.Fixed, one.Fixed...)
	p.Bounds = append(p.Bounds, one.Bounds...)
	p.Starts = append(p.Starts, one.Starts...)
	p.Priors = append(p.Priors, one.Priors...)
}
