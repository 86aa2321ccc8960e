package plot

import (
	"fmt"
	"math"
)

// Figure is one figure: panels that share a caption and a legend.
type Figure struct {
	ID      string // unique on a page: letters, digits and hyphens
	Kind    string
	Title   string
	Caption string // what to see
	Panels  []Panel
	Notes   []string // what is not shown, and why
}

// Panel is one pair of axes.
type Panel struct {
	Title  string // may be empty when the figure has one panel
	X, Y   Axis
	Series []Series
	Matrix *Matrix // instead of Series
}

// Axis is one axis. With Categories the values are their indices from 0.
type Axis struct {
	Label      string // quantity/unit
	Log        bool   // decimal logarithm; every value is > 0
	Categories []string
	// Short names categories along a narrow edge; nil: Categories.
	Short []string
}

// Shape tells how a series is drawn.
type Shape int

// The shapes.
const (
	Line    Shape = iota // through the points in their order
	Points               // a marker at each
	Band                 // the area between (X, Y) and (X2, Y2)
	Level                // a line across the panel at Y[0]
	Upright              // a line up the panel at X[0]
	Crowd                // many points, in heaps; see Heaps
)

// Series is one set of points.
type Series struct {
	Name   string // in legend and table
	Shape  Shape
	X, Y   []float64
	X2, Y2 []float64 // the other border of a Band
	Style  Style
	// Text of each of the Points, shown on hovering. nil: the numbers.
	Text []string
	// Shift moves each of the Points by a part of a category, so that they do not hide
	// each other; the value stays X or Y.
	Shift []float64
}

// Matrix is a square of numbers from −1 to 1 over the categories of both axes.
type Matrix struct {
	Value [][]float64 // by row (Y category), then column (X category)
	Known [][]bool    // false: there is no such number
}

// NumberError reports a number that cannot be drawn.
type NumberError struct {
	Figure, Series string
	Index          int
	Value          float64
	Want           string
}

func (e *NumberError) Error() string {
	return fmt.Sprintf("figure %s: series %q: point %d: %g, want %s", e.Figure, e.Series, e.Index, e.Value, e.Want)
}

// Check makes sure that all numbers of the figure can be drawn: finite, and
// positive on a logarithmic axis; coordinates in pairs.
//
// Errors: *NumberError.
func (f *Figure) Check() error {
	for i := range f.Panels {
		p := &f.Panels[i]
		for k := range p.Series {
			s := &p.Series[k]
			for _, v := range []struct {
				values []float64
				axis   *Axis
			}{{s.X, &p.X}, {s.X2, &p.X}, {s.Y, &p.Y}, {s.Y2, &p.Y}, {s.Shift, &Axis{}}} {
				for n, x := range v.values {
					if math.IsNaN(x) || math.IsInf(x, 0) {
						return &NumberError{f.ID, s.Name, n, x, "a finite number"}
					}
					if v.axis.Log && x <= 0 {
						return &NumberError{f.ID, s.Name, n, x, "a number above 0 on a logarithmic axis"}
					}
				}
			}
			if s.Shape != Level && s.Shape != Upright && len(s.X) != len(s.Y) || len(s.X2) != len(s.Y2) {
				return &NumberError{f.ID, s.Name, min(len(s.X), len(s.Y)), float64(len(s.X) - len(s.Y)), "as many x as y"}
			}
		}
		if p.Matrix != nil {
			for r, row := range p.Matrix.Value {
				for c, x := range row {
					if p.Matrix.Known[r][c] && !(x >= -1 && x <= 1) {
						return &NumberError{f.ID, "matrix", r*len(row) + c, x, "a number from −1 to 1"}
					}
				}
			}
		}
	}
	return nil
}

// Legend returns one series for each name of the figure, in order, for drawing a
// legend. Series without a name have none.
func (f *Figure) Legend() []Series {
	var out []Series
	seen := map[string]bool{}
	for i := range f.Panels {
		for _, s := range f.Panels[i].Series {
			if s.Name != "" && !seen[s.Name] {
				seen[s.Name] = true
				out = append(out, s)
			}
		}
	}
	return out
}
