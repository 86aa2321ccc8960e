package draw

import (
	"testing"

	figure "limsup/validate/plot"
)

// TestCrowd: the file of a crowd grows with its heaps, not with its rows.
func TestCrowd(t *testing.T) {
	size := func(rows int) int {
		s := figure.Series{Name: "crowd", Shape: figure.Crowd, Style: figure.Style{Colour: figure.First}}
		for i := range rows {
			s.X, s.Y = append(s.X, float64(i%10)), append(s.Y, float64(i%3))
		}
		return len(write(t, &figure.Figure{ID: "f", Title: "f", Panels: []figure.Panel{{Series: []figure.Series{s}}}}, "svg"))
	}
	none, few, many := size(0), size(30), size(30000)
	if few <= none || many > few+few/10 {
		t.Errorf("%d bytes without rows, %d for 30, %d for 30000 at the same 30 places", none, few, many)
	}
}
