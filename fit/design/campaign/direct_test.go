package campaign_test

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"

	"limsup/data/measure"
	"limsup/fit"
	"limsup/fit/design/campaign"
)

// A reading of variance v = u² + ψ² tells about its spread ψ as ½(∂v/∂ψ)²/v² = 2ψ²/v² (the
// information of a normal variance); n of them add n times that.
func TestNarrowingTheSpread(t *testing.T) {
	c, lib := demo(t, twoFluids, nil, "prefactor", "offset/method")
	p := plan(t, campaign.Input{Calibration: c, Candidates: expand(t, c, lib), N: 12, Target: campaign.Target{Parameters: []string{"spread"}}})
	ψ, info := p.Quantities[0].Value, 0.0
	for _, s := range p.Steps {
		u := p.Readings[s.Reading].UTemperature
		v := u*u + ψ*ψ
		info += 2 * ψ * ψ / (v * v)
	}
	before := p.Quantities[0].Before
	if want := 1 / math.Sqrt(1/(before*before)+info); math.Abs(p.After/want-1) > 1e-9 {
		t.Errorf("u(spread) after %.10g, by hand %.10g", p.After, want)
	}
	if m := p.Readings[p.Singles[0].Reading].Method; m != "droplet" { // the sharper readings show the spread
		t.Errorf("measures the spread with the %s", m)
	}
}

// u(κ) is what a regression of all readings, old and planned, on the difference of the
// variants and the gradient of the rival gives. Intact rows are left out.
func TestTellingApartIsARegression(t *testing.T) {
	boiled := func(o *fit.Observation) bool { return twoFluids(o) && o.Outcome == measure.Boiled }
	fixed := []fit.Setting{{Name: fit.Spread, Value: 0.35}}
	c, lib := demo(t, boiled, fixed, "prefactor", "offset/method")
	other := c.Plan
	other.Variant = fit.Variant{Equation: "redlich-kwong"}
	r, err := fit.Calibrate(c.Data, other, fit.Options{})
	if err != nil {
		t.Fatal(err)
	}
	p := plan(t, campaign.Input{Calibration: c, Candidates: expand(t, c, lib), N: 5,
		Target: campaign.Target{Rival: &campaign.Rival{Name: "Redlich and Kwong", Model: r.Model(), Calibration: r}}})
	rival, model := r.Model(), c.Model()
	n := 1 + r.Locations
	m := mat.NewSymDense(n, nil)
	m.SetSym(0, 0, 1e-6)
	add := func(q fit.Query, u float64) {
		a, err := model.Predict(q)
		if err != nil {
			t.Fatal(err)
		}
		b, err := rival.Sensitivity(q)
		if err != nil {
			t.Fatal(err)
		}
		row := make([]float64, n)
		row[0] = a.Temperature - b.Temperature
		for _, e := range b.Effects {
			row[1+e.At] += e.Derivative
		}
		m.SymRankOne(m, 1/(u*u+0.35*0.35), mat.NewVecDense(n, row))
	}
	for i := range c.Data.Observations {
		o := &c.Data.Observations[i]
		add(o.Query(), o.UTemperature)
	}
	check := func(what string, got float64) {
		var inv mat.Dense
		if err := inv.Inverse(m); err != nil {
			t.Fatal(err)
		}
		// The covariance of the calibration was inverted, and inverted back: ten digits; the
		// limits agree to 1e-9 K of differences of a kelvin.
		if want := math.Sqrt(inv.At(0, 0)); math.Abs(got/want-1) > 1e-6 {
			t.Errorf("%s: u(κ) = %.9g, by regression %.9g", what, got, want)
		}
	}
	check("now", p.Tell.UBefore)
	for _, s := range p.Steps {
		add(p.Readings[s.Reading].Query(), p.Readings[s.Reading].UTemperature)
	}
	check("after the batch", p.Tell.UAfter)
}
