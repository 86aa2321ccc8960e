package fit_test

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"limsup/data/measure"
	"limsup/fit"
)

// scene is data and a plan that do or do not provoke a warning.
type scene struct {
	set  *measure.Set
	plan fit.Plan
}

// states are rows at limits of a truth, one per pressure, fluid and flux (0: threshold)
// with errors from a fixed seed.
func states(t *testing.T, truth *fit.Model, fluids []string, pressures, fluxes []float64, sd float64) *measure.Set {
	t.Helper()
	rng := rand.New(rand.NewPCG(2, 9))
	set := &measure.Set{}
	for _, key := range fluids {
		for _, P := range pressures {
			for _, J := range fluxes {
				for range 2 {
					set.Rows = append(set.Rows, measure.Row{File: "scene.csv", Line: len(set.Rows) + 2, Fluid: key, Key: key, Pressure: P, Flux: J, Temperature: 1, UTemperature: 0.2, HasUTemperature: true})
				}
			}
		}
	}
	if err := fillStudy(library(t), truth, set, func(fit.Prediction, fit.Sensitivity) float64 { return sd * rng.NormFloat64() }); err != nil {
		t.Fatal(err)
	}
	return set
}

func plan(t *testing.T, names ...string) fit.Plan { return fit.Plan{Terms: terms(t, names...)} }

// TestWarnings provokes each warning of a calibration and shows a case without it.
func TestWarnings(t *testing.T) {
	truth := untuned()
	several := []string{"n-pentane", "benzene", "r-134a"}
	one, two := []float64{101325}, []float64{101325, 9e5}
	low := untuned(fit.Setting{Name: fit.SurfaceTension, Value: 0.8})
	with := func(p fit.Plan, change func(p *fit.Plan)) fit.Plan { change(&p); return p }
	edit := func(s *measure.Set, change func(s *measure.Set)) *measure.Set { change(s); return s }
	heated := func(s *measure.Set) {
		for i := range s.Rows {
			r := &s.Rows[i]
			r.Flux, r.Volume, r.HeatingRate = 0, 1e-10, 1
		}
	}
	for _, tt := range []struct {
		name            string
		text            []string // all of them in one warning
		provoke, absent scene
	}{
		{"classic: threshold against surface tension at one flux and pressure", []string{"do not tell apart threshold and surface-tension", "nother flux", "another pressure", "a prior on the surface tension"},
			scene{states(t, truth, several, one, []float64{0}, 0.2), plan(t, "threshold", "surface-tension")},
			scene{states(t, truth, several, two, []float64{1e6, 1e21}, 0.2), plan(t, "prefactor", "surface-tension")}},
		{"no direction at all: one fluid", []string{"do not tell apart threshold and surface-tension", "another fluid"},
			scene{states(t, truth, several[:1], one, []float64{0, 0}, 0.2), plan(t, "threshold", "surface-tension")},
			scene{states(t, truth, several, one, []float64{0}, 0.2), plan(t, "threshold")}},
		{"threshold and prefactor", []string{"do not tell apart threshold and prefactor", "Only rows with their own flux"},
			scene{states(t, truth, several, two, []float64{0}, 0.2), plan(t, "threshold", "prefactor")},
			scene{states(t, truth, several, two, []float64{0, 1e15}, 0.2), plan(t, "threshold", "prefactor")}},
		{"correlated", []string{"are correlated by", "would separate them"},
			scene{states(t, truth, several, []float64{101325, 4e5, 9e5}, []float64{0}, 0.2), plan(t, "threshold", "slope")},
			scene{states(t, truth, several, two, []float64{0}, 0.2), plan(t, "threshold")}},
		{"at a bound", []string{"surface-tension stands at its lower bound, 0.9"},
			scene{states(t, low, several, two, []float64{0}, 0.2), with(plan(t, "surface-tension"), func(p *fit.Plan) { p.Bounds = []fit.Bound{{Name: fit.SurfaceTension, Lower: 0.9, Upper: 1.1}} })},
			scene{states(t, low, several, two, []float64{0}, 0.2), plan(t, "surface-tension")}},
		{"one row drives", []string{"single rows drive the result: without scene.csv:2 (n-pentane) threshold would change by", "of its standard uncertainty"},
			scene{edit(states(t, truth, several, two, []float64{0}, 0.2), func(s *measure.Set) { s.Rows[0].Temperature += 6 }), with(plan(t, "threshold"), func(p *fit.Plan) { p.Fixed = []fit.Setting{{Name: fit.Spread, Value: 0}} })},
			scene{states(t, truth, several, two, []float64{0}, 0.2), plan(t, "threshold")}},
		{"one row alone", []string{"nothing checks scene.csv:8 (r-134a): a parameter is determined by that row alone"},
			scene{edit(states(t, truth, several, one, []float64{0}, 0.2), func(s *measure.Set) { s.Rows[5].Line = 8; s.Rows = append(s.Rows[:4], s.Rows[5]) }), plan(t, "slope/fluid")},
			scene{states(t, truth, several, one, []float64{0}, 0.2), plan(t, "slope/fluid")}},
		{"survival without hazard", []string{"12 of 12 rows have no survival probability of their own", "count as gaussian"},
			scene{states(t, truth, several, two, []float64{0}, 0.2), with(plan(t, "threshold"), func(p *fit.Plan) { p.Noise.Kind = fit.Survival })},
			scene{edit(states(t, truth, several, two, []float64{0}, 0.2), heated), with(plan(t, "prefactor"), func(p *fit.Plan) { p.Noise.Kind = fit.Survival })}},
		{"at the spinodal", []string{"does not reach its target before the spinodal, which stands in"},
			scene{edit(states(t, truth, several, two, []float64{0}, 0.2), func(s *measure.Set) {
				for i := range s.Rows {
					s.Rows[i].Temperature += 9
				}
			}), plan(t, "threshold")},
			scene{states(t, truth, several, two, []float64{0}, 0.2), plan(t, "threshold")}},
		{"on a kink at the spinodal", []string{"the search ended on a kink: the limits of", "n-hexane", "an offset by method"},
			scene{read(t, library(t), "../data/demo/droplets.csv"), plan(t, "prefactor", "slope")},
			scene{read(t, library(t), "../data/demo/droplets.csv"), plan(t, "prefactor", "slope", "offset/method")}},
		{"surface tension beyond its range", []string{"the surface tension fit is used above the range that its source states for cyclohexane"},
			scene{states(t, truth, []string{"cyclohexane"}, two, []float64{0}, 0.2), plan(t, "threshold")},
			scene{states(t, truth, []string{"n-pentane"}, two, []float64{0}, 0.2), plan(t, "threshold")}},
		{"a pool without spread", []string{"the data show no difference between the groups of surface-tension: its pooled values are practically one"},
			scene{states(t, truth, several, two, []float64{-0.1, 0, 0.1}, 0.2), plan(t, "surface-tension/fluid/pooled")},
			scene{edit(states(t, truth, several, two, []float64{-0.1, 0, 0.1}, 0.2), func(s *measure.Set) {
				for i := range s.Rows {
					s.Rows[i].Temperature += map[string]float64{"n-pentane": -2, "r-134a": 2}[s.Rows[i].Key]
				}
			}), plan(t, "surface-tension/fluid/pooled")}},
		{"spread without adjustment", []string{"the spread is taken by maximum likelihood without adjustment"},
			scene{states(t, truth, several[:1], one, []float64{0, 0}, 0.2), plan(t, "threshold", "prefactor")},
			scene{states(t, truth, several, two, []float64{0}, 0.2), plan(t, "threshold")}},
	} {
		t.Run(tt.name, func(t *testing.T) {
			said := func(s scene) (string, bool) {
				c := calibrate(t, s.set, library(t), s.plan, fit.Options{})
				for _, w := range c.Warnings {
					all := true
					for _, part := range tt.text {
						all = all && strings.Contains(w, part)
					}
					if all {
						return w, true
					}
				}
				return strings.Join(c.Warnings, "\n"), false
			}
			if text, ok := said(tt.provoke); !ok {
				t.Errorf("not said: %q; said: %s", tt.text, text)
			}
			if text, ok := said(tt.absent); ok {
				t.Errorf("said without cause: %s", text)
			}
		})
	}
}

// TestInfluence compares the one-step measures with calibrations without the row, the
// spread held: exact for one linear parameter, else within a few per cent of a
// standard uncertainty.
func TestInfluence(t *testing.T) {
	lib := library(t)
	set := states(t, untuned(), []string{"n-pentane", "benzene", "r-134a"}, []float64{101325, 9e5}, []float64{0}, 0.5)
	p := plan(t, "threshold", "slope")
	p.Fixed = []fit.Setting{{Name: fit.Spread, Value: 0.4}}
	c := calibrate(t, set, lib, p, fit.Options{})
	for i := range c.Rows {
		f := c.Rows[i].Influence
		rest := &measure.Set{Rows: append(append([]measure.Row{}, set.Rows[:i]...), set.Rows[i+1:]...)}
		d := calibrate(t, rest, lib, p, fit.Options{})
		e := c.Parameters[f.Of]
		want := (estimate(t, d, e.Label()).Value - e.Value) / e.U
		if math.Abs(f.Shift-want) > 0.03+0.1*math.Abs(want) {
			t.Errorf("row %d: %s shifts by %.4f, by refitting %.4f", i, e.Label(), f.Shift, want)
		}
		x, err := d.Model().Predict(c.Data.Observations[i].Query())
		if err != nil {
			t.Fatal(err)
		}
		own, err := c.Model().Predict(c.Data.Observations[i].Query())
		if err != nil {
			t.Fatal(err)
		}
		if want := (own.Temperature - x.Temperature) / own.ULimit; math.Abs(f.Dffits-want) > 0.03+0.1*math.Abs(want) {
			t.Errorf("row %d: DFFITS %.4f, by refitting %.4f", i, f.Dffits, want)
		}
		if want := f.Dffits * f.Dffits / 2; math.Abs(f.Cook-want) > 1e-12 {
			t.Errorf("row %d: Cook's distance %g, want DFFITS²/p = %g", i, f.Cook, want)
		}
	}
}

// TestPredictionWarnings does the same for predictions.
func TestPredictionWarnings(t *testing.T) {
	lib := library(t)
	several := []string{"n-pentane", "benzene", "r-134a"}
	find := func(key string) *fit.Query {
		r, err := lib.Find(key)
		if err != nil {
			t.Fatal(err)
		}
		return &fit.Query{Record: r, Pressure: 2e5}
	}
	truth := untuned()
	p := plan(t, "threshold")
	plain := calibrate(t, states(t, truth, several, []float64{101325, 9e5}, []float64{0}, 0.2), lib, p, fit.Options{}).Model()
	p.Noise = fit.Noise{Kind: fit.Student, Degrees: 2}
	heavy := calibrate(t, states(t, truth, several, []float64{101325, 9e5}, []float64{0}, 0.2), lib, p, fit.Options{}).Model()
	grouped := calibrate(t, states(t, truth, several, []float64{101325, 9e5}, []float64{0}, 0.2), lib, plan(t, "slope/fluid"), fit.Options{}).Model()
	blind := calibrate(t, states(t, truth, several[:1], []float64{101325}, []float64{0, 0}, 0.2), lib, plan(t, "threshold", "prefactor"), fit.Options{}).Model()
	known := find("n-pentane")
	for _, tt := range []struct {
		text            string
		provoke, absent *fit.Model
		q, absentQ      *fit.Query
	}{
		{"no uncertainty: the calibration has none for a parameter that the limit depends on", blind, plain, known, known},
		{"student noise of two or fewer degrees of freedom has no standard deviation", heavy, plain, known, known},
		{"n-hexane was not among the fluids of the calibration", plain, plain, find("n-hexane"), known},
		{"the pressure is outside the calibrated range", plain, plain, &fit.Query{Record: known.Record, Pressure: 1.2e6}, known},
		{"not measured for this group, so taken from the mean of the groups or as published: slope", grouped, grouped, find("n-hexane"), known},
		{"the surface tension fit of cyclohexane is stated for", plain, plain, find("cyclohexane"), known},
	} {
		said := func(m *fit.Model, q *fit.Query) bool {
			x, err := m.Predict(*q)
			if err != nil {
				t.Fatal(err)
			}
			return strings.Contains(strings.Join(x.Warnings, "\n"), tt.text)
		}
		if !said(tt.provoke, tt.q) {
			t.Errorf("not said: %s", tt.text)
		}
		if said(tt.absent, tt.absentQ) {
			t.Errorf("said without cause: %s", tt.text)
		}
	}
}
