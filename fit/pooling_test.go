package fit_test

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"limsup/data/measure"
	"limsup/fit"
)

// dyestuff are the yields in g of six batches of five (O. L. Davies and P. L.
// Goldsmith, Statistical Methods in Research and Production, 4th ed. 1972; data from
// memory). Their variance components by restricted maximum likelihood are 1764.05
// between and 2451.25 within batches (analysis of variance: between = (MSB − MSW)/5).
var dyestuff = [6][5]float64{
	{1545, 1440, 1440, 1520, 1580}, {1540, 1555, 1490, 1560, 1495}, {1595, 1550, 1605, 1510, 1560},
	{1445, 1440, 1595, 1465, 1545}, {1595, 1630, 1515, 1635, 1625}, {1520, 1455, 1450, 1480, 1445},
}

// TestDyestuff: with one fluid at one pressure the threshold moves all limits alike,
// and offsets by batch are a one-way classification. Yields stand for temperatures in
// units of 10 mK about 420 K.
func TestDyestuff(t *testing.T) {
	lib := library(t)
	const unit = 0.01
	set := &measure.Set{}
	for b, batch := range dyestuff {
		for _, y := range batch {
			set.Rows = append(set.Rows, measure.Row{File: "dyestuff", Line: len(set.Rows) + 1, Fluid: "n-pentane", Key: "n-pentane", Pressure: 101325,
				Temperature: 420 + unit*(y-1527.5), Batch: fmt.Sprint("batch ", b+1)})
		}
	}
	c := calibrate(t, set, lib, fit.Plan{Terms: terms(t, "threshold", "offset/batch/pooled")}, fit.Options{})
	if !c.Converged {
		t.Error(c.Reason)
	}
	var between, within, level fit.Estimate
	for _, e := range c.Parameters {
		switch {
		case e.Role == fit.RolePoolSpread:
			between = e
		case e.Name == fit.Spread:
			within = e
		case e.Name == fit.Threshold:
			level = e
		}
	}
	// 1764.05 and 2451.25 are printed to 1e-2: the tolerance on the root, and as much
	// again for the search.
	for _, x := range []struct {
		e    fit.Estimate
		want float64
	}{{between, 1764.05}, {within, 2451.25}} {
		if got := x.e.Value * x.e.Value / (unit * unit); math.Abs(got-x.want) > 0.02 {
			t.Errorf("%s: variance %.4f, want %.2f", x.e.Label(), got, x.want)
		}
	}
	// The mean of balanced data is that of the batch means: 420 K, with the standard
	// error √(between/6 + within/30) and Student's t of 5 degrees of freedom.
	x, err := c.Model().Predict(c.Data.Observations[0].Query())
	if err != nil {
		t.Fatal(err)
	}
	q := c.Data.Observations[0].Query()
	q.Batch = "another"
	if x, err = c.Model().Predict(q); err != nil {
		t.Fatal(err)
	}
	if math.Abs(x.Temperature-420) > 1e-6 {
		t.Errorf("mean %.9f K, want 420", x.Temperature)
	}
	if got, want := level.Degrees, 5.0; math.Abs(got-want) > 0.01 {
		t.Errorf("%.3f degrees of freedom of the mean, want %g", got, want)
	}
	mean := 1764.05/6 + 2451.25/30
	if got, want := x.ULimit, unit*math.Sqrt(mean+1764.05); math.Abs(got-want) > 1e-4*want {
		t.Errorf("standard uncertainty of the mean of a new batch %.6g K, want %.6g", got, want)
	}
	if got, want := x.U, unit*math.Sqrt(mean+1764.05+2451.25); math.Abs(got-want) > 1e-4*want {
		t.Errorf("standard uncertainty of a reading in a new batch %.6g K, want %.6g", got, want)
	}
	// Shrinkage of a batch towards the mean: between/(between + within/5).
	for _, e := range c.Parameters {
		if e.Group == "batch 1" {
			want := unit * (1505 - 1527.5) * 1764.05 / (1764.05 + 2451.25/5)
			if math.Abs(e.Value-want) > 1e-5 {
				t.Errorf("%s = %.7f K, want %.7f", e.Label(), e.Value, want)
			}
		}
	}
}

// TestPooledFluids: a new fluid is predicted at the mean, with the spread between
// fluids in its uncertainty; fluids share strength. By method and batch alike.
func TestPooledFluids(t *testing.T) {
	lib := library(t)
	rng := rand.New(rand.NewPCG(5, 5))
	set := &measure.Set{}
	for _, key := range []string{"n-pentane", "benzene", "r-134a", "n-hexane", "toluene", "propane"} {
		truth := untuned(fit.Setting{Name: fit.Slope, Value: 1 + 0.2*rng.NormFloat64()})
		part := &measure.Set{}
		for k, P := range []float64{101325, 4e5, 9e5} {
			part.Rows = append(part.Rows, measure.Row{File: "pooled", Line: len(set.Rows) + k + 1, Fluid: key, Key: key, Pressure: P, Temperature: 1,
				Method: []string{"bulb", "wire", "drop"}[k], Batch: key})
		}
		if err := fillStudy(lib, truth, part, func(fit.Prediction, fit.Sensitivity) float64 { return 0.3 * rng.NormFloat64() }); err != nil {
			t.Fatal(err)
		}
		set.Rows = append(set.Rows, part.Rows...)
	}
	octane, err := lib.Find("n-octane")
	if err != nil {
		t.Fatal(err)
	}
	for _, by := range []string{"fluid", "method", "batch"} {
		c := calibrate(t, set, lib, fit.Plan{Terms: terms(t, "slope/"+by+"/pooled"), Fixed: []fit.Setting{{Name: fit.Threshold, Value: 12}}}, fit.Options{})
		var mean, spread fit.Estimate
		for _, e := range c.Parameters {
			switch e.Role {
			case fit.RolePoolMean:
				mean = e
			case fit.RolePoolSpread:
				spread = e
			}
		}
		m := c.Model()
		q := fit.Query{Record: octane, Pressure: 101325, Method: "new", Batch: "new"}
		s, err := m.Sensitivity(q)
		if err != nil {
			t.Fatal(err)
		}
		if v := m.Values(&q); v.Slope != mean.Value {
			t.Errorf("by %s: slope of a new group is %g, want the mean %g", by, v.Slope, mean.Value)
		}
		d := 0.0
		for _, e := range s.Effects {
			d += e.Derivative
		}
		if want := math.Abs(d) * math.Hypot(mean.U, spread.Value); math.Abs(s.ULimit-want) > 1e-9*want {
			t.Errorf("by %s: uncertainty of a new group %g K, want %g", by, s.ULimit, want)
		}
	}
}
