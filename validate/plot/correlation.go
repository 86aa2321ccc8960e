package plot

import (
	"fmt"
	"math"
	"slices"
	"sort"
	"strconv"

	"limsup/fit"
)

// most is the number of parameters that a matrix or a row of profiles shows.
const most = 12

// Correlation shows the correlations of the estimates of a calibrated model.
//
// Errors: *EmptyError for a model without calibration or with fewer than two
// uncertain parameters.
func Correlation(m *fit.Model) (*Figure, error) {
	f := &Figure{ID: "correlation", Kind: "correlation", Title: "Correlation of the estimates",
		Caption: "Each cell is the correlation of two estimates. Near +1 or −1 the data know a combination of the two better than either; beyond ±0.95 they should not be read apart. Shade grows with the magnitude, and the sign is printed in the cell."}
	var known []int
	for i := range m.Parameters {
		if m.Parameters[i].HasU && m.Covariance != nil && m.Covariance.At(i, i) > 0 {
			known = append(known, i)
		}
	}
	if len(known) < 2 {
		return nil, &EmptyError{Figure: f.ID, About: m.Variant.Name(), Reason: "fewer than two estimates have an uncertainty"}
	}
	value := func(i, j int) float64 {
		if i == j {
			return 1
		}
		c := m.Covariance.At(i, j) / math.Sqrt(m.Covariance.At(i, i)*m.Covariance.At(j, j))
		return math.Max(-1, math.Min(1, c)) // beyond by rounding only
	}
	if len(known) > most {
		// Those that correlate most with any other.
		strongest := map[int]float64{}
		for _, i := range known {
			for _, j := range known {
				if i != j {
					strongest[i] = math.Max(strongest[i], math.Abs(value(i, j)))
				}
			}
		}
		all := len(known)
		sort.SliceStable(known, func(a, b int) bool { return strongest[known[a]] > strongest[known[b]] })
		known = known[:most]
		sort.Ints(known)
		f.Notes = append(f.Notes, fmt.Sprintf("The %d of %d parameters that correlate most are shown; the model file has all.", most, all))
	}
	p := Panel{X: Axis{Label: "parameter"}, Y: Axis{Label: "parameter"}, Matrix: &Matrix{}}
	for n, i := range known {
		p.X.Categories = append(p.X.Categories, strconv.Itoa(n+1)+" "+Visible(m.Parameters[i].Label()))
		row, ok := make([]float64, len(known)), make([]bool, len(known))
		for k, j := range known {
			row[k], ok[k] = value(i, j), true
		}
		p.Matrix.Value, p.Matrix.Known = append(p.Matrix.Value, row), append(p.Matrix.Known, ok)
		p.X.Short = append(p.X.Short, strconv.Itoa(n+1))
	}
	// The first parameter stands at the top.
	p.Y.Categories = slices.Clone(p.X.Categories)
	slices.Reverse(p.Y.Categories)
	slices.Reverse(p.Matrix.Value)
	f.Panels = []Panel{p}
	return f, nil
}
