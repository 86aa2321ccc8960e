package validate

import (
	"slices"
	"testing"
)

// TestFarthest: by standard deviations, those without any last; an intact row counts
// only above its prediction; equals in the order of the rows.
func TestFarthest(t *testing.T) {
	a := &Assessment{Rows: []Residual{
		{Residual: 9},                                     // 9 K, of no known deviation
		{Residual: -1, U: 0.5, HasU: true},                // −2
		{Residual: 6, U: 6, HasU: true},                   // 1
		{Residual: -8, U: 1, HasU: true, Intact: true},    // below: nothing against the model
		{Residual: 2.5, U: 0.5, HasU: true, Intact: true}, // 5
		{Residual: -10},
		{Residual: 2, U: 1, HasU: true}, // 2
	}}
	for _, tt := range []struct {
		n    int
		keep func(int) bool
		want []int
	}{
		{9, func(int) bool { return true }, []int{4, 1, 6, 2, 3, 5, 0}},
		{3, func(int) bool { return true }, []int{4, 1, 6}},
		{2, func(i int) bool { return i != 4 && i != 1 }, []int{6, 2}},
		{2, func(int) bool { return false }, []int{}},
	} {
		if got := a.Farthest(tt.n, tt.keep); !slices.Equal(got, tt.want) {
			t.Errorf("the farthest %d: %v, want %v", tt.n, got, tt.want)
		}
	}
}
