package validate

import (
	"math"
	"strings"
	"testing"

	"limsup/data/measure"
	"limsup/fit"
)

// assessed tunes the plan to simulated rows, the last of which is intact, and one of
// which is wrong by 30 K.
func assessed(t *testing.T, plan fit.Plan) (*Assessment, *measure.Set) {
	t.Helper()
	lib := library(t)
	set := simulate(t, lib, sample{threshold: 11, fluids: alkanes[:4], pressures: []float64{101325, 5e5}, repeats: 2, noise: 1, stated: 0.5, seed: 11})
	set.Rows[5].Temperature -= 30
	last := &set.Rows[len(set.Rows)-1]
	last.Outcome, last.Temperature = measure.Intact, last.Temperature-20
	d := prepared(t, set, lib, plan)
	c := calibrated(t, d, plan)
	f, err := NewFolds("fluid", d.Observations, 1)
	if err != nil {
		t.Fatal(err)
	}
	cv, err := CrossValidate(d, plan, f, c)
	if err != nil {
		t.Fatal(err)
	}
	return Assess(c, cv), set
}

// Sums are taken anew from the rows; intact rows enter none of them.
func TestGroupsAndSums(t *testing.T) {
	a, set := assessed(t, fit.Plan{})
	n := len(set.Rows)
	if a.Boiled != n-1 || a.Intact != 1 || len(a.Rows) != n {
		t.Fatalf("%d boiled, %d intact of %d", a.Boiled, a.Intact, n)
	}
	total := map[string]int{}
	for _, g := range a.Groups {
		total[g.By] += g.N
		var sum, squares, abs, worst, left float64
		count := 0
		for i := range set.Rows {
			o := &a.Data.Observations[i]
			member := map[string]bool{"fluid": o.Key == g.Name, "method": o.Method == g.Name, "batch": o.Batch == g.Name,
				"pressure": strings.HasPrefix(g.Name, map[bool]string{true: "101.3", false: "500"}[o.Pressure < 2e5])}[g.By]
			if !member || set.Rows[i].Outcome == measure.Intact {
				continue
			}
			e := set.Rows[i].Temperature - a.Rows[i].Predicted
			count++
			sum, squares, abs, left = sum+e, squares+e*e, abs+math.Abs(e), left+a.Rows[i].LeftOut*a.Rows[i].LeftOut
			if math.Abs(e) > math.Abs(worst) {
				worst = e
			}
		}
		m := float64(count)
		for name, pair := range map[string][2]float64{"bias": {g.Bias, sum / m}, "rmse": {g.RMSE, math.Sqrt(squares / m)}, "mean absolute": {g.MeanAbsErr, abs / m},
			"worst": {g.Worst, worst}, "left out": {g.LeftOutRMSE, math.Sqrt(left / m)}} {
			if g.N != count || math.Abs(pair[0]-pair[1]) > 1e-10 { // rounding of differences of 400 K
				t.Errorf("%s %s, %s: %g of %d rows, want %g of %d", g.By, g.Name, name, pair[0], g.N, pair[1], count)
			}
		}
	}
	for by, m := range total {
		if m != n-1 {
			t.Errorf("groups by %s hold %d rows", by, m)
		}
	}
	if len(total) != 4 {
		t.Errorf("groups by %v", total)
	}
	for _, x := range a.Coverage {
		if x.Rows != n-1 {
			t.Errorf("coverage of %d rows", x.Rows)
		}
	}
	if a.Normality.N != n-1 || a.Normality.P > 0.01 {
		t.Errorf("normality with a row 30 K off: %+v", a.Normality)
	}
}

func TestWorstRowIsExplained(t *testing.T) {
	a, _ := assessed(t, fit.Plan{})
	if len(a.Worst) == 0 || a.Worst[0].Index != 5 {
		t.Fatalf("%+v", a.Worst)
	}
	for _, want := range []string{"simulated.csv:7", "n-butane by wire", "below the prediction", "standard deviations", "look at this reading first"} {
		if !strings.Contains(a.Worst[0].Text, want) {
			t.Errorf("%q does not say %q", a.Worst[0].Text, want)
		}
	}
}

// A residual that grows with pressure is a trend with pressure and none is found without.
func TestTrends(t *testing.T) {
	lib := library(t)
	set := simulate(t, lib, sample{threshold: 12, fluids: alkanes, pressures: []float64{1e5, 2e5, 4e5, 8e5}, noise: 1, stated: 1, seed: 5})
	m, err := fit.Untuned(fit.Variant{})
	if err != nil {
		t.Fatal(err)
	}
	for _, slope := range []float64{0, 4} { // K per doubling
		tilted := &measure.Set{}
		for _, r := range set.Rows {
			r.Temperature += slope * math.Log2(r.Pressure/2.8e5)
			tilted.Rows = append(tilted.Rows, r)
		}
		a, err := AssessModel(prepared(t, tilted, lib, PlanOf(m)), m)
		if err != nil {
			t.Fatal(err)
		}
		p, f := a.Trends[0], a.Trends[2]
		if p.Against != "pressure" || !p.Tested || (p.P < 0.001) != (slope > 0) || slope > 0 && p.Rho < 0.5 {
			t.Errorf("slope %g: %+v", slope, p)
		}
		if f.Tested || f.Reason != "all rows have the same log10 flux" {
			t.Errorf("flux: %+v", f)
		}
	}
}

// A calibrated model on rows that it has not seen: predictions, uncertainties and coverage
// are those of the model; its own rows come back the same as in the calibration.
func TestAssessModel(t *testing.T) {
	lib := library(t)
	plan := fit.Plan{Terms: []fit.Term{{Name: fit.Threshold}, {Name: fit.SurfaceTension, By: fit.ByFluid, Pooled: true}}}
	train := simulate(t, lib, sample{threshold: 10, fluids: alkanes[:5], pressures: []float64{101325}, repeats: 4, noise: 1, stated: 0.5, seed: 6})
	test := simulate(t, lib, sample{threshold: 10, fluids: alkanes, pressures: []float64{101325}, repeats: 50, noise: 1, stated: 0.5, seed: 7})
	c := calibrated(t, prepared(t, train, lib, plan), plan)
	m := c.Model()
	own, err := AssessModel(prepared(t, train, lib, PlanOf(m)), m)
	if err != nil {
		t.Fatal(err)
	}
	for i := range c.Rows {
		// Two solutions of one limit, from different starts: their tolerance is 1e-9 K.
		if math.Abs(own.Rows[i].Residual-c.Rows[i].Residual) > 1e-8 {
			t.Errorf("row %d: %.12g, calibration %.12g", i, own.Rows[i].Residual, c.Rows[i].Residual)
		}
	}
	a, err := AssessModel(prepared(t, test, lib, PlanOf(m)), m)
	if err != nil {
		t.Fatal(err)
	}
	for i := range a.Rows {
		r, o := &a.Rows[i], &a.Data.Observations[i]
		p, err := m.Predict(o.Query())
		if err != nil {
			t.Fatal(err)
		}
		if want := math.Hypot(p.U, 0.5); r.HasLeverage || r.HasLeftOut || !r.HasU || math.Abs(r.U-want) > 1e-12 {
			t.Fatalf("row %d: %+v, want u = %g", i, r, want)
		}
		if foreign := o.Key == alkanes[5]; foreign != (len(r.Warnings) > 0) {
			t.Fatalf("row %d of %s: %v", i, o.Key, r.Warnings)
		}
	}
	// The noise is the model's own: 1 K, of which 0.5 K is stated; the spread is estimated
	// from 20 rows to some 20 %, so that 95 % may become 88 to 99 %.
	if x := a.Coverage[2]; x.Rows != 300 || x.Observed < 0.88 {
		t.Errorf("%+v", x)
	}
}

// Without a calibration the stated uncertainty is all there is, and without that, nothing.
func TestAssessUntuned(t *testing.T) {
	lib := library(t)
	for _, stated := range []float64{0, 0.5} {
		set := simulate(t, lib, sample{threshold: 10, fluids: alkanes, pressures: []float64{101325}, noise: 1, stated: stated, seed: 6})
		m, err := fit.Untuned(fit.Variant{})
		if err != nil {
			t.Fatal(err)
		}
		a, err := AssessModel(prepared(t, set, lib, PlanOf(m)), m)
		if err != nil {
			t.Fatal(err)
		}
		if a.Coverage != nil || a.CoverageReason == "" {
			t.Errorf("coverage %+v", a.Coverage)
		}
		if z, ok := a.Rows[0].Standardised(); ok != (stated > 0) || ok && math.Abs(z-a.Rows[0].Residual/stated) > 1e-12 {
			t.Errorf("stated %g: standardised %g, %v", stated, z, ok)
		}
		if stated == 0 && (a.Normality.Tested || a.Normality.Reason != "no standardised residuals") {
			t.Errorf("%+v", a.Normality)
		}
	}
}

// The uncertainty of a set pressure counts along the line of limits: u² = u(T)² +
// (dT/dP·u(P))², with the slope from two predictions 2 kPa apart, whose curvature leaves
// some 1e-6 of it.
func TestSetPressureCounts(t *testing.T) {
	lib := library(t)
	set := simulate(t, lib, sample{threshold: 12, fluids: alkanes[:3], pressures: []float64{5e5}, repeats: 2, noise: 1, stated: 0.5, seed: 6})
	for i := range set.Rows {
		set.Rows[i].UPressure = 5e4
	}
	m, err := fit.Untuned(fit.Variant{})
	if err != nil {
		t.Fatal(err)
	}
	a, err := AssessModel(prepared(t, set, lib, PlanOf(m)), m)
	if err != nil {
		t.Fatal(err)
	}
	for i := range a.Rows {
		q := a.Data.Observations[i].Query()
		var T [2]float64
		for side, P := range []float64{5e5 - 1e3, 5e5 + 1e3} {
			q.Pressure = P
			p, err := m.Predict(q)
			if err != nil {
				t.Fatal(err)
			}
			T[side] = p.Temperature
		}
		want := math.Hypot(0.5, (T[1]-T[0])/2e3*5e4)
		if got := a.Rows[i].U; math.Abs(got-want) > 1e-5*want || want < 0.6 {
			t.Errorf("row %d: u = %.8g K, want %.8g K", i, got, want)
		}
	}
}

// Prepare with the plan of a model asks the model itself, not its published start: the
// Redlich-Kwong equation tuned to a low threshold predicts rows that it does not at 10¹².
func TestPlanOfStartsWhereTheModelIs(t *testing.T) {
	lib := library(t)
	set := published(t, lib)
	m := &fit.Model{Variant: fit.Variant{Equation: "redlich-kwong"}, Calibrated: true,
		Parameters: []fit.Estimate{{Name: fit.Threshold, Role: fit.RoleValue, Unit: "1", Value: 6, Start: 12, Lower: 0, Upper: 35}}}
	if err := m.Prepare(); err != nil {
		t.Fatal(err)
	}
	with, without := len(prepared(t, set, lib, PlanOf(m)).Observations), len(prepared(t, set, lib, fit.Plan{Variant: m.Variant}).Observations)
	if with != 35 || without != 31 {
		t.Errorf("%d rows with the model's threshold, %d at the start; want 35 and 31", with, without)
	}
}

// Whether model or reading is in doubt depends on the other rows of the fluid: all on the
// same side and at least half as far speak against the model.
func TestCompanyOfTheWorstRow(t *testing.T) {
	rec, err := library(t).Find("water")
	if err != nil {
		t.Fatal(err)
	}
	for _, tt := range []struct {
		residuals []float64 // K; the first is explained
		says      string
	}{
		{[]float64{-30}, "the only row of water"},
		{[]float64{-30, -20, -14}, "the model rather than the reading is in doubt"},
		{[]float64{-30, -20, -8}, "look at this reading first"},
		{[]float64{-30, -40, 5}, "look at this reading first"},
		{[]float64{30, 20, 14}, "30.00 K above the prediction"},
	} {
		a := &Assessment{Data: &fit.Data{}}
		for i, e := range tt.residuals {
			a.Rows = append(a.Rows, Residual{Index: i, Residual: e})
			a.Data.Observations = append(a.Data.Observations, fit.Observation{Row: measure.Row{File: "a.csv", Line: i + 2, Temperature: 550, Pressure: 101325}, Record: rec})
		}
		if got := a.explain(0); !strings.Contains(got, tt.says) {
			t.Errorf("%v: %q does not say %q", tt.residuals, got, tt.says)
		}
	}
}
