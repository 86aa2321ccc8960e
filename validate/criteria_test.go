package validate

import (
	"math"
	"testing"

	"pgregory.net/rapid"
)

// By hand: n residuals without stated uncertainty have s² = Σe²/n and
// ln L = −½n(ln 2πs² + 1). For e = 1, −1, 2, −2: s² = 2.5, ln L = −2(ln(5π) + 1).
// With k = 1: AICc = −2 ln L + 2 + 4/2; BIC = −2 ln L + ln 4. For k = 2: 4 + 12/1.
func TestCriteriaByHand(t *testing.T) {
	rows := []reading{{e: 1}, {e: -1}, {e: 2}, {e: -2}}
	lnL, s, ok := maximumLikelihood(rows)
	want := -2 * (math.Log(5*math.Pi) + 1)
	// Golden section finds s² to the square root of rounding, ln L to rounding.
	if !ok || math.Abs(lnL-want) > 1e-13 || math.Abs(s-math.Sqrt(2.5)) > 1e-7 {
		t.Errorf("ln L %.15g, s %.10g, %v; want %.15g, √2.5", lnL, s, ok, want)
	}
	for _, tt := range []struct{ k, aicc, bic float64 }{
		{1, -2*want + 2 + 2, -2*want + math.Log(4)},
		{2, -2*want + 4 + 12, -2*want + 2*math.Log(4)},
	} {
		aicc, bic, ok := criteria(want, tt.k, 4)
		if !ok || math.Abs(aicc-tt.aicc) > 1e-13 || math.Abs(bic-tt.bic) > 1e-13 {
			t.Errorf("k = %g: AICc %.15g, BIC %.15g; want %.15g, %.15g", tt.k, aicc, bic, tt.aicc, tt.bic)
		}
	}
	if _, _, ok := criteria(want, 3, 4); ok {
		t.Error("AICc for n = k + 1")
	}
}

// With stated variances that explain the residuals, no spread is needed:
// ln L = Σ −½(ln 2πv + e²/v).
func TestNoSpreadWhereStatedUncertaintiesSuffice(t *testing.T) {
	lnL, s, ok := maximumLikelihood([]reading{{e: 0.5, v: 1}, {e: -1, v: 4}})
	want := -0.5*(math.Log(2*math.Pi)+0.25) - 0.5*(math.Log(8*math.Pi)+0.25)
	if !ok || s != 0 || math.Abs(lnL-want) > 1e-14 {
		t.Errorf("ln L %.15g, s %g, %v; want %.15g, 0", lnL, s, ok, want)
	}
	if _, _, ok := maximumLikelihood([]reading{{}, {}}); ok {
		t.Error("a bounded likelihood of residuals that are all zero")
	}
}

// Two peaks of almost the same height, found by the property test below: the scan had
// the lower one for the higher, and 0.003 of ln L were missed.
func TestSpreadOfTwoPeaks(t *testing.T) {
	rows := []reading{{0.0625, 0.8125, false}, {0.4296875, 0.0478515625, false}, {0.0625, 0.265625, false}, {0.0625, 0.2265625, false},
		{18.5, 10.40625, false}, {1, 50, false}, {0.015625, 1, true}, {0.03125, 0.046875, false}}
	lnL, s, ok := maximumLikelihood(rows)
	if q := 28.77777777777778; !ok || !(lnL >= logLikelihood(rows, q)) || math.Abs(s*s-q) > 5 {
		t.Errorf("ln L %.9g at s² = %g; %.9g at %g", lnL, s*s, logLikelihood(rows, q), q)
	}
}

// The spread found is a maximum: no other of a fine grid is more likely. A maximum
// between grid points exceeds it by at most the curvature times the spacing.
func TestSpreadIsMostLikely(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		n := rapid.IntRange(1, 12).Draw(t, "n")
		rows := make([]reading, n)
		for i := range rows {
			rows[i] = reading{e: rapid.Float64Range(-20, 20).Draw(t, "e"), v: rapid.Float64Range(0.01, 50).Draw(t, "v"), intact: rapid.IntRange(0, 4).Draw(t, "intact") == 0}
		}
		lnL, s, ok := maximumLikelihood(rows)
		if !ok || s < 0 || s > 2*20 {
			t.Fatalf("s %g, %v", s, ok)
		}
		top := 0.0
		for _, r := range rows {
			top = math.Max(top, 4*r.e*r.e)
		}
		for i := range 1000 {
			if q := top * float64(i) / 999; logLikelihood(rows, q) > lnL+1e-9 {
				t.Fatalf("ln L %.12g at s² = %g, but %.12g at %g", lnL, s*s, logLikelihood(rows, q), q)
			}
		}
	})
}
