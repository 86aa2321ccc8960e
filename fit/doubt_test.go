package fit_test

import (
	"math"
	"strings"
	"testing"

	"limsup/fit"
)

// Values of de Boer's parameter from measured Lennard-Jones constants, as textbooks of
// molecular theory list them (from memory). A reduced critical point that holds for all
// fluids alike is good to some 10 %.
func TestDeBoer(t *testing.T) {
	lib := library(t)
	for _, tt := range []struct {
		fluid string
		want  float64
	}{{"argon", 0.187}, {"methane", 0.24}, {"neon", 0.59}, {"hydrogen", 1.73}, {"xenon", 0.064}} {
		r, err := lib.Find(tt.fluid)
		if err != nil {
			t.Fatal(err)
		}
		if got := fit.DeBoer(r); math.Abs(got/tt.want-1) > 0.1 {
			t.Errorf("%s: %.3f, want %.3f ± 10 %%", tt.fluid, got, tt.want)
		}
	}
}

// TestDoubtfulPredictions: quantum fluids and states near the critical point are
// marked, others are not.
func TestDoubtfulPredictions(t *testing.T) {
	lib := library(t)
	m, err := fit.Untuned(fit.DefaultVariant())
	if err != nil {
		t.Fatal(err)
	}
	quantum := 0
	for _, r := range lib.All() {
		for _, part := range []float64{0.05, 0.89, 0.91} {
			p, err := m.Predict(fit.Query{Record: r, Pressure: part * r.CriticalPressure.Value})
			if err != nil {
				continue // too steep a threshold, or no surface tension: not the matter here
			}
			text := strings.Join(p.Warnings, "\n")
			if got, want := strings.Contains(text, "critical pressure"), part > 0.9; got != want {
				t.Errorf("%s at %g Pc: %q", r.Key, part, text)
			}
			got, want := strings.Contains(text, "quantum"), r.Key == "hydrogen" || r.Key == "neon"
			if got != want {
				t.Errorf("%s at %g Pc: %q", r.Key, part, text)
			}
			if got {
				quantum++
			}
		}
	}
	if quantum < 2 {
		t.Error("no prediction of a quantum fluid")
	}
}
