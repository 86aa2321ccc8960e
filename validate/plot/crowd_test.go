package plot

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"limsup/validate"
)

// many are the demonstration rows (synthetic) again and again, each time a little
// warmer, as a model judges them that was tuned to the first of them.
func many(t *testing.T) (*validate.Assessment, *Input) {
	t.Helper()
	c, _, with := calibrated(t)
	d := *c.Data
	d.Observations = nil
	for k := 0; len(d.Observations) <= Many; k++ {
		for _, o := range c.Data.Observations {
			o.Temperature += 0.01 * float64(k)
			d.Observations = append(d.Observations, o)
		}
	}
	a, err := validate.AssessModel(&d, c.Model())
	if err != nil {
		t.Fatal(err)
	}
	return a, &Input{a.Model, with.Record, a}
}

// TestCrowd: of many rows each is drawn once in a panel, those farthest off by
// themselves, and the figure says how many they are.
func TestCrowd(t *testing.T) {
	a, in := many(t)
	mine := 0
	for i := range a.Rows {
		if in.mine(i) {
			mine++
		}
	}
	for _, tt := range []struct {
		build func() (*Figure, error)
		rows  int
	}{
		{func() (*Figure, error) { return Residuals(a), nil }, len(a.Rows)},
		{func() (*Figure, error) { return Prediction(a), nil }, len(a.Rows)},
		{func() (*Figure, error) { return LimitMap(in) }, mine},
	} {
		f, err := tt.build()
		if err != nil || f.Check() != nil {
			t.Fatal(err)
		}
		for k := range f.Panels {
			var crowded, single []float64
			for _, s := range f.Panels[k].Series {
				switch {
				case s.Shape == Crowd:
					crowded = append(crowded, s.X...)
				case s.Shape == Points && s.Style.Colour != Ink:
					single = append(single, s.X...)
					if len(s.Text) != len(s.X) {
						t.Errorf("%s: %d texts of %d points", f.ID, len(s.Text), len(s.X))
					}
				}
			}
			if len(single) != Listed || len(single)+len(crowded) != tt.rows {
				t.Errorf("%s, panel %d: %d rows alone and %d in crowds, want %d of %d", f.ID, k, len(single), len(crowded), Listed, tt.rows)
			}
		}
		want := fmt.Sprintf("Of its %d rows the %d with the largest standardised residuals are marked one by one; the other %d ", tt.rows, Listed, tt.rows-Listed)
		if n := strings.Count(strings.Join(f.Notes, " "), want); n != 1 {
			t.Errorf("%s: the notes say %d times %q: %q", f.ID, n, want, f.Notes)
		}
	}
	// The rows that stand alone are those of Farthest: their residuals say so.
	var want []float64
	for _, i := range a.Farthest(Listed, func(int) bool { return true }) {
		want = append(want, a.Rows[i].Residual)
	}
	var got []float64
	for _, s := range Residuals(a).Panels[0].Series {
		if s.Shape == Points {
			got = append(got, s.Y...)
		}
	}
	slices.Sort(want)
	slices.Sort(got)
	if !slices.Equal(got, want) {
		t.Error("other rows than the farthest stand alone")
	}
}

// TestNoCrowd: of few rows each is a point.
func TestNoCrowd(t *testing.T) {
	_, a, in := calibrated(t)
	f, err := LimitMap(in)
	if err != nil {
		t.Fatal(err)
	}
	for _, f := range []*Figure{f, Residuals(a), Prediction(a)} {
		for k := range f.Panels {
			for _, s := range f.Panels[k].Series {
				if s.Shape == Crowd {
					t.Errorf("%s has a crowd %s", f.ID, s.Name)
				}
			}
		}
		if strings.Contains(strings.Join(f.Notes, " "), "share small marks") {
			t.Errorf("%s: %q", f.ID, f.Notes)
		}
	}
}

// TestHeaps: each row is in one heap, a heap is no wider than a cell, a row far from
// the others keeps its place, the largest mark is that of the most rows.
func TestHeaps(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		n := rapid.IntRange(1, 300).Draw(t, "rows")
		s := Series{Shape: Crowd, X: []float64{1000}, Y: []float64{-50}}
		for i := range n {
			s.X = append(s.X, rapid.Float64Range(400, 500).Draw(t, fmt.Sprint("x", i)))
			s.Y = append(s.Y, rapid.Float64Range(-3, 3).Draw(t, fmt.Sprint("y", i)))
		}
		p := &Panel{Series: []Series{{Name: "line", X: []float64{390, 400}, Y: []float64{1, 2}}, s}}
		all := p.Heaps()
		if all[0] != nil {
			t.Fatal("heaps of a line")
		}
		x, y := p.Scales()
		sum, most, largest := 0, 0, 0.0
		for _, h := range all[1] {
			sum += h.Rows
			most = max(most, h.Rows)
			largest = math.Max(largest, h.Size)
			near := 0
			for i := range s.X {
				if math.Abs(x.Place(s.X[i])-h.X) <= 1.0/heapColumns && math.Abs(y.Place(s.Y[i])-h.Y) <= 1.0/heapRows {
					near++
				}
			}
			if near < h.Rows {
				t.Errorf("a heap of %d rows has %d about it", h.Rows, near)
			}
		}
		if sum != n+1 {
			t.Errorf("%d rows in heaps, want %d", sum, n+1)
		}
		if most > 1 && largest != 1 {
			t.Errorf("the heap of %d rows has a mark of size %g", most, largest)
		}
		lone := all[1][len(all[1])-1] // from left to right
		if lone.Rows != 1 || lone.Size != 0 || lone.X != x.Place(1000) || lone.Y != y.Place(-50) {
			t.Errorf("the row apart became %+v", lone)
		}
	})
}

// TestFewerHeld: the points of a profile of many rows reach as far as those of few.
func TestFewerHeld(t *testing.T) {
	few, lots := sides(Many), sides(Many+1)
	for k := range few {
		if a, b := few[k], lots[k]; a[0]*b[0] < 0 || a[len(a)-1] != b[len(b)-1] || len(b) >= len(a) {
			t.Errorf("%v against %v", b, a)
		}
	}
}
