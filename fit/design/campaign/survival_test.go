package campaign_test

import (
	"context"
	"math"
	"testing"

	"limsup/data/fluid"
	"limsup/data/measure"
	"limsup/fit"
	"limsup/fit/design/campaign"
)

// The other likelihoods keep their promises as well: Student's readings, and droplets
// that boil at random. The spread is fixed, since the survival law and a spread are
// hard to tell apart in a few dozen rows.
func TestPromiseIsKeptWithOtherNoise(t *testing.T) {
	lib, err := fluid.Builtin()
	if err != nil {
		t.Fatal(err)
	}
	set, err := measure.ReadFile("../../../data/demo/droplets.csv", measure.Options{})
	if err != nil {
		t.Fatal(err)
	}
	for _, noise := range []fit.Noise{{Kind: fit.Student, Degrees: 4}, {Kind: fit.Survival}} {
		tune := fit.Plan{Noise: noise, Fixed: []fit.Setting{{Name: fit.Spread, Value: 0.2}},
			Terms: []fit.Term{{Name: fit.Prefactor}, {Name: fit.Offset, By: fit.ByMethod}}}
		d, err := fit.Prepare(set, lib, tune)
		if err != nil {
			t.Fatal(err)
		}
		d = d.Subset(func(i int) bool { return twoFluids(&d.Observations[i]) })
		c, err := fit.Calibrate(d, tune, fit.Options{})
		if err != nil {
			t.Fatal(err)
		}
		p := plan(t, campaign.Input{Calibration: c, Candidates: expand(t, c, lib), N: 12})
		k, err := p.Check(context.Background(), c.Plan, campaign.CheckOptions{Campaigns: 200, Seed: 1})
		if err != nil {
			t.Fatal(err)
		}
		for _, r := range k.Quantities {
			t.Logf("%s, %s: promised %.4g, realised %.4g ± %.2g, bias %.2g", noise.Kind, r.Label, r.Promised, r.SD, r.SE, r.Bias)
			// Three standard errors of 5 %: the Fisher information is a limit for many readings,
			// which skewed and heavy-tailed ones approach slowly.
			if math.Abs(r.Ratio()-1) > 0.15 {
				t.Errorf("%s, %s: realised %.4g is %.3f of the promised %.4g", noise.Kind, r.Label, r.SD, r.Ratio(), r.Promised)
			}
		}
	}
}
