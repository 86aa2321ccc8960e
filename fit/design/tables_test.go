package design

import "testing"

// TestSampleSizeByTable: with the quantiles 0.975 of Student's t from printed tables
// (t₁ = 12.706, t₂ = 4.303, t₄ = 2.776, t₅ = 2.571, t₆ = 2.447, t₁₆ = 2.120, t₁₇ = 2.110; common practice), the
// smallest n with t(n−1)/√n at most the half-width over the standard deviation.
func TestSampleSizeByTable(t *testing.T) {
	for _, tt := range []struct {
		half float64
		want int
	}{
		{9.0, 2},   // t₁/√2 = 8.985
		{8.9, 3},   // t₂/√3 = 2.484
		{1.25, 5},  // t₄/√5 = 1.241, t₃/√4 = 1.591
		{1.0, 7},   // t₅/√6 = 1.050, t₆/√7 = 0.925
		{0.5, 18},  // t₁₆/√17 = 0.514, t₁₇/√18 = 0.497
		{0.925, 7}, // t₆/√7 = 0.9249
	} {
		if got, err := SampleSize(1, tt.half, 0.95); err != nil || got != tt.want {
			t.Errorf("half-width %g: %d, %v; want %d", tt.half, got, err, tt.want)
		}
	}
}
