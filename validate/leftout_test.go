package validate

import (
	"errors"
	"fmt"
	"math"
	"testing"

	"limsup/data/measure"
	"limsup/fit"
)

// refitTolerance is in kelvin. A search ends when no parameter moves by more than 1e-9 of
// its range in a round, 3.5e-8 decades of the threshold or, at about 0.3 K per decade,
// 1e-8 K; rounds approach the end geometrically, which costs a small factor. Measured:
// 4e-8 K at most, below; a margin of 20.
const refitTolerance = 1e-6

// Every left-out residual equals that of deleting the rows from the measurements and
// starting from nothing. Who belongs to a fold is decided here from the rows themselves.
func TestLeftOutEqualsRefittingByHand(t *testing.T) {
	lib := library(t)
	set := simulate(t, lib, sample{threshold: 11, fluids: alkanes[:4], pressures: []float64{101325, 5e5}, repeats: 2, noise: 1, stated: 0.5, seed: 1})
	plans := map[string]fit.Plan{
		"threshold":          {},
		"threshold, slope":   {Terms: []fit.Term{{Name: fit.Threshold}, {Name: fit.Slope}}},
		"offset by method":   {Terms: []fit.Term{{Name: fit.Threshold}, {Name: fit.Offset, By: fit.ByMethod}}},
		"student":            {Noise: fit.Noise{Kind: fit.Student}},
		"spread held at 1 K": {Fixed: []fit.Setting{{Name: fit.Spread, Value: 1}}},
	}
	labels := map[string]func(r *measure.Row) string{
		"rows":     func(r *measure.Row) string { return fmt.Sprint(r.Line) },
		"fluid":    func(r *measure.Row) string { return r.Key },
		"method":   func(r *measure.Row) string { return r.Method },
		"batch":    func(r *measure.Row) string { return r.Batch },
		"pressure": func(r *measure.Row) string { return fmt.Sprint(r.Pressure) },
	}
	worst := 0.0
	for name, plan := range plans {
		d := prepared(t, set, lib, plan)
		all := calibrated(t, d, plan)
		plan.References = all.References
		for _, kind := range append(FoldKinds(), "5") {
			if name != "threshold" && kind != "fluid" {
				continue // the other plans differ in the tuning, not in the folds
			}
			f, err := NewFolds(kind, d.Observations, 7)
			if err != nil {
				t.Fatal(err)
			}
			cv, err := CrossValidate(d, plan, f, all)
			if err != nil {
				t.Fatal(err)
			}
			for i := range set.Rows {
				var keep measure.Set
				for j := range set.Rows {
					same := f.Of[i] == f.Of[j] // parts drawn by lot
					if label := labels[kind]; label != nil {
						same = label(&set.Rows[i]) == label(&set.Rows[j])
					}
					if !same {
						keep.Rows = append(keep.Rows, set.Rows[j])
					}
				}
				m := calibrated(t, prepared(t, &keep, lib, plan), plan).Model()
				p, err := m.Predict(d.Observations[i].Query())
				if err != nil {
					t.Fatal(err)
				}
				diff := math.Abs(set.Rows[i].Temperature - p.Temperature - cv.Rows[i].Tuned)
				worst = math.Max(worst, diff)
				if diff > refitTolerance || math.Abs(p.U-cv.Rows[i].U) > refitTolerance {
					t.Errorf("%s, folds %s, row %d: left out %.10g ± %.10g K, by hand %.10g ± %.10g K", name, kind, i, cv.Rows[i].Tuned, cv.Rows[i].U, set.Rows[i].Temperature-p.Temperature, p.U)
				}
			}
		}
	}
	t.Logf("largest difference %.1e K", worst)
}

// For a model that is linear in its parameter with known variances, leaving one row out
// gives e/(1−h) in closed form. A shared offset is exactly linear, with leverage
// h_i = w_i/Σw for weights w = 1/u²; so is the offset of a method against the reference,
// with h = w_i/Σw over the rows of the method. Rounding: a limit has 1e-9 K, and a search
// of one linear parameter ends in one step.
func TestLeaveOneOutClosedForm(t *testing.T) {
	lib := library(t)
	set := simulate(t, lib, sample{threshold: 12, fluids: alkanes, pressures: []float64{101325}, repeats: 2, noise: 2, stated: 1, seed: 2})
	for i := range set.Rows {
		set.Rows[i].UTemperature = []float64{0.5, 1, 2, 4}[i%4]
	}
	base := fit.Plan{Fixed: []fit.Setting{{Name: fit.Spread, Value: 0}, {Name: fit.Threshold, Value: 12}}}
	for _, by := range []fit.By{fit.Shared, fit.ByMethod} {
		plan := base
		plan.Terms = []fit.Term{{Name: fit.Offset, By: by}}
		d := prepared(t, set, lib, plan)
		c := calibrated(t, d, plan)
		f, err := NewFolds("rows", d.Observations, 1)
		if err != nil {
			t.Fatal(err)
		}
		cv, err := CrossValidate(d, plan, f, c)
		if err != nil {
			t.Fatal(err)
		}
		moved := func(o *fit.Observation) bool {
			return by == fit.Shared || o.Method != c.References[string(fit.ByMethod)]
		}
		sum := 0.0
		for i := range d.Observations {
			if o := &d.Observations[i]; moved(o) {
				sum += 1 / (o.UTemperature * o.UTemperature)
			}
		}
		levered := 0
		for i := range d.Observations {
			o := &d.Observations[i]
			h := 0.0
			if moved(o) {
				h = 1 / (o.UTemperature * o.UTemperature) / sum
				levered++
			}
			if math.Abs(c.Rows[i].Leverage-h) > 1e-9 {
				t.Errorf("by %q, row %d: leverage %.12g, want %.12g", by, i, c.Rows[i].Leverage, h)
			}
			if want := c.Rows[i].Residual / (1 - h); math.Abs(cv.Rows[i].Tuned-want) > 1e-8 {
				t.Errorf("by %q, row %d: left out %.12g K, closed form %.12g K", by, i, cv.Rows[i].Tuned, want)
			}
		}
		if levered < 4 {
			t.Errorf("by %q: only %d rows with a leverage", by, levered)
		}
	}
}

// The threshold moves limits nearly in proportion. Leaving a row out shifts it by
// δ = h·e/(1−h)/g decades, and the curvature κ of T against the threshold leaves
// ½κδ² K in the row's own prediction, and as much through the others; κ and g are taken
// from predictions one decade apart.
func TestLeaveOneOutNearlyLinear(t *testing.T) {
	lib := library(t)
	set := simulate(t, lib, sample{threshold: 11, fluids: alkanes, pressures: []float64{101325, 3e5}, noise: 1, stated: 1, seed: 3})
	plan := fit.Plan{Fixed: []fit.Setting{{Name: fit.Spread, Value: 0}}}
	d := prepared(t, set, lib, plan)
	c := calibrated(t, d, plan)
	f, err := NewFolds("rows", d.Observations, 1)
	if err != nil {
		t.Fatal(err)
	}
	cv, err := CrossValidate(d, plan, f, c)
	if err != nil {
		t.Fatal(err)
	}
	x := c.Parameters[0].Value
	limit := func(i int, threshold float64) float64 {
		m, err := fit.Untuned(fit.Variant{}, fit.Setting{Name: fit.Threshold, Value: threshold})
		if err != nil {
			t.Fatal(err)
		}
		p, err := m.Predict(d.Observations[i].Query())
		if err != nil {
			t.Fatal(err)
		}
		return p.Temperature
	}
	for i := range c.Rows {
		r := &c.Rows[i]
		g := limit(i, x+0.5) - limit(i, x-0.5)
		κ := limit(i, x+1) - 2*limit(i, x) + limit(i, x-1)
		δ := r.Leverage * r.Residual / (1 - r.Leverage) / g
		want := r.Residual / (1 - r.Leverage)
		tol := 2*(0.5*math.Abs(κ)*δ*δ+math.Abs(κ/g*δ*r.Leverage*r.Residual)) + refitTolerance
		if diff := math.Abs(cv.Rows[i].Tuned - want); diff > tol {
			t.Errorf("row %d: left out %.8g K, linear %.8g K, tolerance %.1e K", i, cv.Rows[i].Tuned, want, tol)
		}
		if tol > 0.1*math.Abs(want-r.Residual)+2*refitTolerance {
			t.Errorf("row %d: tolerance %.1e K is no test of a change by %.1e K", i, tol, want-r.Residual)
		}
	}
}

func TestFolds(t *testing.T) {
	lib := library(t)
	set := simulate(t, lib, sample{threshold: 12, fluids: alkanes[:3], pressures: []float64{101325, 102000, 5e5}, seed: 4})
	set.Rows[0].Method = ""
	obs := prepared(t, set, lib, fit.Plan{}).Observations
	for kind, want := range map[string]int{"rows": 9, "fluid": 3, "method": 3, "batch": 3, "pressure": 2, "4": 4} {
		f, err := NewFolds(kind, obs, 1)
		if err != nil || len(f.Names) != want {
			t.Errorf("%s: %v, %v; want %d folds", kind, f, err, want)
		}
	}
	for _, kind := range []string{"", "fluids", "1", "10", "-2"} {
		var option *fit.OptionError
		if _, err := NewFolds(kind, obs, 1); !errors.As(err, &option) {
			t.Errorf("%q: %v", kind, err)
		}
	}
	if _, err := NewFolds("fluid", obs[:2], 1); err == nil {
		t.Error("one fluid was divided")
	}
	if DefaultFolds(obs) != "fluid" || DefaultFolds(obs[:2]) != "rows" {
		t.Error("default folds")
	}
	a, _ := NewFolds("4", obs, 1)
	b, _ := NewFolds("4", obs, 2)
	if fmt.Sprint(a.Of) == fmt.Sprint(b.Of) {
		t.Error("the seed makes no difference")
	}
	size := map[int]int{}
	for _, k := range a.Of {
		size[k]++
	}
	for k, n := range size {
		if n < 2 || n > 3 {
			t.Errorf("part %d has %d of 9 rows", k, n)
		}
	}
}
