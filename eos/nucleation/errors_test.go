package nucleation

import (
	"errors"
	"math"
	"strings"
	"testing"

	"limsup/eos"
	"limsup/eos/tension"
)

// isType tells whether err wraps an error of type E.
func isType[E error](err error) bool {
	var e E
	return errors.As(err, &e)
}

// TestBadConfig: each value outside its meaning is refused, with the fluid, the name and the value.
func TestBadConfig(t *testing.T) {
	pentane := named(t, "n-pentane")
	m, err := eos.Untuned("soave", pentane.Substance)
	if err != nil {
		t.Fatal(err)
	}
	early, err := tension.NewPowerSum(0.1*pentane.CriticalT, tension.Term{Coefficient: 0.05, Exponent: 1.2})
	if err != nil {
		t.Fatal(err)
	}
	nan := math.NaN()
	for _, c := range []struct {
		name string
		text string
		set  func(c *Config)
	}{
		{"no mass", "molar mass", func(c *Config) { c.MolarMass = 0 }},
		{"negative mass", "molar mass", func(c *Config) { c.MolarMass = -0.07 }},
		{"mass in g/mol of a protein", "molar mass", func(c *Config) { c.MolarMass = 66e3 }},
		{"mass not a number", "molar mass", func(c *Config) { c.MolarMass = nan }},
		{"no tension", "surface tension", func(c *Config) { c.Tension = nil }},
		{"negative factor", "surface-tension", func(c *Config) { c.TensionFactor = -1 }},
		{"factor not a number", "surface-tension", func(c *Config) { c.TensionFactor = nan }},
		{"infinite factor", "surface-tension", func(c *Config) { c.TensionFactor = math.Inf(1) }},
		{"δ in nm", "tolman length", func(c *Config) { c.TolmanLength = 0.2 }},
		{"δ not a number", "tolman length", func(c *Config) { c.TolmanLength = nan }},
		{"prefactor", "prefactor", func(c *Config) { c.Prefactor = 1e4 }},
		{"prefactor not a number", "prefactor", func(c *Config) { c.Prefactor = nan }},
		{"embryo pressure", "embryo pressure ideal", func(c *Config) { c.EmbryoPressure = "ideal" }},
		{"kinetics", "kinetics fast", func(c *Config) { c.Kinetics = "fast" }},
		{"exact with correlations", "poynting", func(c *Config) {
			c.Correlations, c.EmbryoPressure = textbook{pentane.Substance}, Exact
		}},
		{"tension that ends too early", "upper end", func(c *Config) {
			c.Tension, c.Correlations = early, textbook{pentane.Substance}
		}},
	} {
		conf := Config{Model: m, MolarMass: pentane.MolarMass, Tension: pentane.tension}
		c.set(&conf)
		f, err := New(conf)
		var bad *eos.ParameterError
		if !errors.As(err, &bad) || bad.Fluid != "n-pentane" || bad.Equation != "soave" {
			t.Errorf("%s: %v, %v; want an *eos.ParameterError that names fluid and equation", c.name, f, err)
			continue
		}
		if !strings.Contains(err.Error(), c.text) || !strings.Contains(err.Error(), "n-pentane") {
			t.Errorf("%s: %q does not say %q", c.name, err, c.text)
		}
	}
}

// TestDefaults: what an empty option means.
func TestDefaults(t *testing.T) {
	pentane := named(t, "n-pentane")
	f := untuned(t, "soave", pentane, Config{})
	if c := f.Config(); c.EmbryoPressure != Exact || c.Kinetics != Mechanical || c.TensionFactor != 1 {
		t.Errorf("defaults %q, %q, %g", c.EmbryoPressure, c.Kinetics, c.TensionFactor)
	}
	if c := untuned(t, "soave", pentane, Config{Correlations: textbook{pentane.Substance}}).Config(); c.EmbryoPressure != Poynting {
		t.Errorf("default with correlations %q", c.EmbryoPressure)
	}
	if f.Name() != "n-pentane" {
		t.Errorf("name %q", f.Name())
	}
	m := f.Config().Model
	if lo, hi := f.Range(); lo != m.MinT || hi != m.Tc {
		t.Errorf("range %g to %g K", lo, hi)
	}
}

// TestBadStates: each state without an answer has an error of its own type that
// names the fluid.
func TestBadStates(t *testing.T) {
	pentane := named(t, "n-pentane")
	f := untuned(t, "soave", pentane, Config{})
	corr := untuned(t, "soave", pentane, Config{Correlations: textbook{pentane.Substance}})
	vdw := untuned(t, "van-der-waals", pentane, Config{})
	// A fit of the tension that ends below Tc, in the middle of the properties.
	short, err := tension.NewPowerSum(420, tension.Term{Coefficient: 0.05, Exponent: 1.2})
	if err != nil {
		t.Fatal(err)
	}
	ended := untuned(t, "soave", pentane, Config{Tension: short})
	thick := untuned(t, "soave", pentane, Config{TolmanLength: 5e-9})
	holed := untuned(t, "soave", pentane, Config{Correlations: holes{textbook{pentane.Substance}}})
	nan, inf := math.NaN(), math.Inf(1)

	flux := func(f *Fluid, T, P float64) func() error {
		return func() error { _, err := f.Flux(T, P); return err }
	}
	embryo := func(f *Fluid, T, P float64) func() error {
		return func() error { _, err := f.Embryo(T, P); return err }
	}
	limit := func(f *Fluid, P float64, g Target) func() error {
		return func() error { _, err := f.KineticLimit(P, g, 0); return err }
	}
	pressure := func(f *Fluid, T float64, g Target) func() error {
		return func() error { _, err := f.KineticPressure(T, g, 0); return err }
	}
	domain, phase := isType[*eos.DomainError], isType[*eos.PhaseError]
	stable, state, none := isType[*NotMetastableError], isType[*StateError], isType[*NoLimitError]
	for _, c := range []struct {
		name string
		call func() error
		is   func(error) bool
		text string
	}{
		{"flux at Tc", flux(f, pentane.CriticalT, 3e6), domain, "temperature 469.7 K"},
		{"flux at 0 K", flux(f, 0, 1e5), domain, "temperature 0 K"},
		{"flux at NaN", flux(f, nan, 1e5), domain, "NaN"},
		{"flux at a pressure that is no number", flux(f, 400, nan), domain, "pressure NaN"},
		{"flux at infinite pressure", flux(f, 400, inf), domain, "pressure +Inf"},
		{"flux at infinite tension", flux(f, 400, -inf), domain, "pressure -Inf"},
		{"flux by correlation at NaN", flux(corr, 400, nan), domain, "pressure NaN"},
		{"flux by correlation at infinite tension", flux(corr, 400, -inf), domain, "pressure -Inf"},
		{"flux beyond the spinodal", flux(f, 460, -1e6), phase, "liquid spinodal"},
		{"flux of a compressed liquid", flux(f, 400, 2e6), stable, "not superheated"},
		{"flux of a very dense liquid", flux(f, 300, 1e9), stable, "not superheated"},
		{"flux by correlation of a compressed liquid", flux(corr, 400, 2e6), stable, "not superheated"},
		{"flux above a short tension", flux(ended, 430, 1e5), domain, "to 420 K"},
		{"flux below correlations", flux(corr, 100, 1e5), domain, "correlation"},
		{"flux in a hole of correlations", flux(holed, 400, 1e5), domain, "correlation"},
		{"flux with δ beyond the radius", flux(thick, 415, 1e5), state, "Tolman length"},
		{"embryo at NaN", embryo(f, nan, 1e5), domain, "NaN"},
		{"embryo at a pressure that is no number", embryo(f, 400, nan), domain, "pressure NaN"},
		{"embryo at infinite pressure", embryo(f, 400, inf), domain, "pressure +Inf"},
		{"embryo beyond the liquid spinodal", embryo(f, 460, -1e6), phase, "liquid spinodal"},
		{"embryo in a hole of correlations", embryo(holed, 400, 1e5), isType[error], "no saturation"},
		{"limit at Pc", limit(f, pentane.CriticalP, Threshold(12)), domain, "pressure"},
		{"limit at NaN", limit(f, nan, Threshold(12)), domain, "NaN"},
		{"limit at -Inf", limit(f, -inf, Threshold(12)), domain, "-Inf"},
		{"limit of vdW at 1 atm", limit(vdw, atmosphere, Threshold(12)), none, "up to the spinodal at 398.08"},
		{"limit of an absurd threshold", limit(f, atmosphere, Threshold(60)), none, "up to the spinodal"},
		{"limit of no time", limit(f, atmosphere, Held(1e-9, 0)), domain, "target"},
		{"limit of negative volume", limit(f, atmosphere, Heated(-1e-9, 1)), domain, "target"},
		{"limit of no heating", limit(f, atmosphere, Heated(1e-9, 0)), domain, "target"},
		{"limit of a threshold that is no number", limit(f, atmosphere, Threshold(nan)), domain, "target"},
		{"limit above correlations", limit(corr, 0.97*pentane.CriticalP, Threshold(12)), none, "end of the properties"},
		{"pressure at Tc", pressure(f, pentane.CriticalT, Threshold(12)), domain, "temperature"},
		{"pressure at NaN", pressure(f, nan, Threshold(12)), domain, "NaN"},
		{"pressure of vdW", pressure(vdw, 0.7*pentane.CriticalT, Threshold(12)), none, "up to the spinodal"},
		{"pressure of no time", pressure(f, 400, Lived(1e-9, 0)), domain, "target"},
		{"pressure by correlation of an absurd threshold", pressure(corr, 300, Threshold(60)), none, "end of the properties"},
	} {
		err := c.call()
		if err == nil || !c.is(err) {
			t.Errorf("%s: %T %v", c.name, err, err)
			continue
		}
		if !strings.Contains(err.Error(), "n-pentane") || !strings.Contains(err.Error(), c.text) {
			t.Errorf("%s: %q does not name the fluid and say %q", c.name, err, c.text)
		}
	}
}

// holes are correlations whose values are missing inside their range.
type holes struct{ textbook }

func (holes) VapourPressure(T float64) (p, slope float64, err error) {
	return 0, 0, errors.New("no value")
}

// TestErrorTexts: what the two errors that a user meets most say in full.
func TestErrorTexts(t *testing.T) {
	for _, c := range []struct {
		err  error
		want string
	}{
		{&NotMetastableError{Fluid: "water", Phase: "liquid", T: 300, P: 1e5, Saturation: 3536},
			"embryo of water: the liquid at 300 K and 100000 Pa is not superheated: saturation is at 3536 Pa"},
		{&NotMetastableError{Fluid: "water", Phase: "vapour", T: 300, P: 3500, Saturation: 3536},
			"embryo of water: the vapour at 300 K and 3500 Pa is not supersaturated: saturation is at 3536 Pa"},
		{&NoLimitError{Fluid: "water", Given: 101325, Threshold: 12, Reached: -3, Known: true, End: 546.2, Spinodal: true},
			"no kinetic limit of water at 101325 Pa: log10 J* = 12 is not reached up to the spinodal at 546.2 K; log10 J reaches -3 there"},
		{&NoLimitError{Fluid: "water", Given: 400, AtT: true, Threshold: 12, End: -1e6},
			"no kinetic limit of water at 400 K: log10 J* = 12 is not reached up to the end of the properties at -1000000 Pa; the flux is zero there"},
		{&StateError{"water", 400, 1e5, "a reason"}, "flux of water at 400 K and 100000 Pa: a reason"},
		{&ConvergenceError{Fluid: "water", Equation: "soave", Given: 400, AtT: true, Lo: 1, Hi: 2, Residual: 0.5, Iterations: 9},
			"kinetic limit of water (soave) at 400 K: not converged after 9 steps, bracket 1 to 2 Pa, ln J off by 0.5"},
		{&ConvergenceError{Fluid: "water", Equation: "soave", Given: 1e5, Lo: 1, Hi: 2, Residual: 0.5, Iterations: 9},
			"kinetic limit of water (soave) at 100000 Pa: not converged after 9 steps, bracket 1 to 2 K, ln J off by 0.5"},
	} {
		if got := c.err.Error(); got != c.want {
			t.Errorf("%T: %q, want %q", c.err, got, c.want)
		}
	}
}
