package main

import (
	"fmt"
	"slices"
	"strconv"
	"strings"

	"github.com/urfave/cli/v2"

	"limsup/data/quantity"
	"limsup/fit"
	"limsup/fit/planfile"
)

// tuneFlags say what a calibration frees, fixes and knows beforehand.
func tuneFlags() []cli.Flag {
	return []cli.Flag{
		&cli.StringFlag{Name: "plan", Usage: "TOML `FILE` with model, noise, parameters, bounds, priors and anchors (see the package fit/planfile); flags take precedence over it"},
		&cli.StringSliceFlag{Name: "tune", Usage: "free a parameter, `NAME`, NAME/fluid, NAME/method or NAME/batch, the last three optionally with /pooled (repeatable; default: threshold, or prefactor where every row has its own flux). Names: threshold, prefactor, attraction, covolume, slope, surface-tension, tolman, offset, spread"},
		&cli.StringSliceFlag{Name: "fix", Usage: "hold a parameter, `NAME=VALUE`, e.g. spread=0 (repeatable)"},
		&cli.StringSliceFlag{Name: "start", Usage: "start value, `NAME=VALUE` or NAME[GROUP]=VALUE (repeatable)"},
		&cli.StringSliceFlag{Name: "bounds", Usage: "bounds of a parameter, `NAME=LOW..HIGH` (repeatable)"},
		&cli.StringSliceFlag{Name: "prior", Usage: "normal prior, `NAME=MEAN+-SD` or NAME[GROUP]=MEAN+-SD (repeatable)"},
		&cli.StringSliceFlag{Name: "anchor", Usage: "hold the equation to the fluid's own correlation, `PROPERTY=U` with U its relative standard uncertainty, e.g. vapour-pressure=1% or liquid-density=2% (repeatable)"},
		&cli.StringFlag{Name: "noise", Usage: "`DISTRIBUTION` of the residuals: gaussian; student, student=DEGREES or student=estimate; survival (default: gaussian)"},
		&cli.IntFlag{Name: "restarts", Usage: "`NUMBER` of further starts of the search, spread over the bounds"},
	}
}

// planFromFlags reads the plan of a calibration. Commands without tuneFlags get
// the default plan of their variant.
func planFromFlags(c *cli.Context) (fit.Plan, error) {
	p, hasSeed, err := planFile(c)
	if err != nil {
		return p, err
	}
	if p.Variant, err = variantOver(c, p.Variant); err != nil {
		return p, err
	}
	var terms []fit.Term
	for _, s := range c.StringSlice("tune") {
		t, err := fit.ParseTerm(s)
		if err != nil {
			return p, err
		}
		terms = append(terms, t)
	}
	fixed, err := settings(c, "fix")
	if err != nil {
		return p, err
	}
	// Flags replace what the file says, not each other: among flags a contradiction is an error.
	for _, t := range terms {
		drop(&p, t.Name)
	}
	for _, s := range fixed {
		drop(&p, s.Name)
	}
	p.Terms = append(p.Terms, terms...)
	set, err := settings(c, "set")
	if err != nil {
		return p, err
	}
	for _, s := range set {
		// A set parameter that is tuned starts there; another one stays there.
		if tuned(p.Terms, s.Name) {
			p.Starts = append(p.Starts, s)
		} else {
			p.Fixed = append(p.Fixed, s)
		}
	}
	p.Fixed = append(p.Fixed, fixed...)
	starts, err := settings(c, "start")
	if err != nil {
		return p, err
	}
	p.Starts = append(p.Starts, starts...)
	for _, s := range c.StringSlice("bounds") {
		b, err := parseBound(s)
		if err != nil {
			return p, err
		}
		p.Bounds = append(p.Bounds, b) // the last of a parameter holds
	}
	for _, s := range c.StringSlice("prior") {
		r, err := parsePrior(s)
		if err != nil {
			return p, err
		}
		p.Priors = slices.DeleteFunc(p.Priors, func(old fit.Prior) bool { return old.Name == r.Name && old.Group == r.Group })
		p.Priors = append(p.Priors, r)
	}
	for _, s := range c.StringSlice("anchor") {
		a, err := parseAnchor(s)
		if err != nil {
			return p, err
		}
		p.Anchors = slices.DeleteFunc(p.Anchors, func(old fit.Anchor) bool { return old.Property == a.Property })
		p.Anchors = append(p.Anchors, a)
	}
	if s := c.String("noise"); s != "" {
		if p.Noise, err = parseNoise(s); err != nil {
			return p, err
		}
	}
	if c.IsSet("restarts") {
		p.Restarts = c.Int("restarts")
	}
	if c.IsSet("seed") || !hasSeed {
		p.Seed = c.Uint64("seed")
	}
	if p.Restarts < 0 || p.Restarts > 10000 {
		return p, &usageError{fmt.Sprintf("--restarts %d: want 0 to 10000", p.Restarts)}
	}
	return p, nil
}

// drop removes what a plan file says of tuning or holding a parameter.
func drop(p *fit.Plan, name string) {
	p.Terms = slices.DeleteFunc(p.Terms, func(t fit.Term) bool { return t.Name == name })
	p.Fixed = slices.DeleteFunc(p.Fixed, func(s fit.Setting) bool { return s.Name == name })
}

// planFile reads the plan file, if there is one.
func planFile(c *cli.Context) (p fit.Plan, hasSeed bool, err error) {
	name := c.String("plan")
	if name == "" {
		return p, false, nil
	}
	f, err := openInput(c, "plan", name)
	if err != nil {
		return p, false, err
	}
	defer f.Close()
	p, hasSeed, err = planfile.Read(f, name)
	if e, ok := err.(planfile.Problems); ok {
		err = &usageError{e.Error()}
	}
	return p, hasSeed, err
}

func tuned(terms []fit.Term, name string) bool {
	for _, t := range terms {
		if t.Name == name {
			return true
		}
	}
	return false
}

func parseBound(s string) (fit.Bound, error) {
	name, value, ok := strings.Cut(s, "=")
	lo, hi, two := strings.Cut(value, "..")
	if !ok || !two {
		return fit.Bound{}, &usageError{fmt.Sprintf("--bounds %q: want NAME=LOW..HIGH", s)}
	}
	b := fit.Bound{Name: name}
	var err error
	if b.Lower, err = quantity.ParseNumber(lo); err != nil {
		return b, fmt.Errorf("--bounds %q: %w", s, err)
	}
	if b.Upper, err = quantity.ParseNumber(hi); err != nil {
		return b, fmt.Errorf("--bounds %q: %w", s, err)
	}
	return b, nil
}

func parsePrior(s string) (fit.Prior, error) {
	text, sd, ok := strings.Cut(s, "+-")
	if !ok {
		return fit.Prior{}, &usageError{fmt.Sprintf("--prior %q: want NAME=MEAN+-SD", s)}
	}
	v, err := parseSetting("prior", text)
	if err != nil {
		return fit.Prior{}, err
	}
	r := fit.Prior{Name: v.Name, Group: v.Group, Mean: v.Value}
	if r.Spread, err = quantity.ParseNumber(sd); err != nil {
		return r, fmt.Errorf("--prior %q: %w", s, err)
	}
	return r, nil
}

func parseAnchor(s string) (fit.Anchor, error) {
	name, value, ok := strings.Cut(s, "=")
	if !ok {
		return fit.Anchor{}, &usageError{fmt.Sprintf("--anchor %q: want PROPERTY=U, e.g. vapour-pressure=1%%", s)}
	}
	number, percent := strings.CutSuffix(strings.TrimSpace(value), "%")
	v, err := quantity.ParseNumber(strings.TrimSpace(number))
	if err != nil {
		return fit.Anchor{}, fmt.Errorf("--anchor %q: %w", s, err)
	}
	if percent {
		v /= 100
	}
	return fit.Anchor{Property: name, Relative: v}, nil
}

func parseNoise(s string) (fit.Noise, error) {
	kind, degrees, given := strings.Cut(s, "=")
	n := fit.Noise{Kind: fit.NoiseKind(kind)}
	if !given {
		return n, nil
	}
	if degrees == "estimate" && n.Kind == fit.Student {
		n.Estimate = true
		return n, nil
	}
	v, err := strconv.ParseFloat(degrees, 64)
	if err != nil || n.Kind != fit.Student || v == 0 { // 0 would stand for the default
		return n, &usageError{fmt.Sprintf("--noise %q: want gaussian, student, student=DEGREES, student=estimate or survival", s)}
	}
	n.Degrees = v
	return n, nil
}
