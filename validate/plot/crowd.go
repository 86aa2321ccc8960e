package plot

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"limsup/fit"
	"limsup/validate"
)

// This file draws many rows: a mark, a text and a line of a table for each of them
// would make figures that no program opens.

const (
	// Many is the number of rows of data above which only those farthest off are shown
	// one by one.
	Many = 2000
	// Listed is how many are then shown one by one, in a figure or a table.
	Listed = 200
)

// complete names the command that lists what a figure of many rows does not.
const complete = "All rows: limsup validate --format csv, with the same data and model"

// pointsByMethod are series of the rows that keep allows, one for each method and,
// apart from them, one for its intact rows; coordinates come from at. Of many rows,
// those that are not farthest off become crowds, which come before the points; f gets a
// note of them, once.
func pointsByMethod(f *Figure, obs []fit.Observation, a *validate.Assessment, keep func(i int) bool, at func(i int) (x, y float64)) []Series {
	names, style := methods(obs)
	order := map[string]int{}
	for k, m := range names {
		order[m] = k
	}
	series := make([]Series, 4*len(names)) // crowds and points, boiled and intact of each
	for k := range series {
		m := names[k%len(names)]
		s := Series{Name: m, Shape: Crowd, Style: style[m]}
		if k >= 2*len(names) {
			s.Shape = Points
		}
		if k/len(names)%2 == 1 {
			s.Name, s.Style.Open = m+", intact (the limit lies above)", true
		}
		series[k] = s
	}
	var alone map[int]bool // nil: all
	if len(obs) > Many && a != nil {
		alone = map[int]bool{}
		for _, i := range a.Farthest(Listed, keep) {
			alone[i] = true
		}
	}
	method := methodNames()
	crowded, kept := 0, 0
	for i := range obs {
		if !keep(i) {
			continue
		}
		kept++
		k := order[method(&obs[i])]
		if obs[i].Outcome != 0 {
			k += len(names)
		}
		single := alone == nil || alone[i]
		if single {
			k += 2 * len(names)
		} else {
			crowded++
		}
		s := &series[k]
		x, y := at(i)
		s.X, s.Y = append(s.X, x), append(s.Y, y)
		if single {
			s.Text = append(s.Text, rowText(&obs[i], residualAt(a, i)))
		}
	}
	if crowded > 0 {
		note := fmt.Sprintf("Of its %d rows the %d with the largest standardised residuals are marked one by one; the other %d share small marks, which grow with the logarithm of the number of rows about them. %s.", kept, kept-crowded, crowded, complete)
		if !slices.Contains(f.Notes, note) {
			f.Notes = append(f.Notes, note)
		}
	}
	return dropEmpty(series)
}

// Heap is a part of a crowd: its rows about one place of the panel.
type Heap struct {
	X, Y float64 // mean place along the axes, 0 to 1
	Rows int
	Size float64 // of its mark, 0 for one row to 1 for the most in any heap of the panel
}

// The cells of a panel whose rows make a heap are about half as wide as a marker.
const (
	heapColumns = 80
	heapRows    = 56
)

// Heaps returns the heaps of each series that is a crowd, from left to right and
// upwards; nil for the others.
func (p *Panel) Heaps() [][]Heap {
	x, y := p.Scales()
	out := make([][]Heap, len(p.Series))
	most := 2 // heaps of one row are small, also where there are no others
	for k := range p.Series {
		if p.Series[k].Shape == Crowd {
			out[k] = heaps(&p.Series[k], &x, &y)
			for _, h := range out[k] {
				most = max(most, h.Rows)
			}
		}
	}
	for _, list := range out {
		for i := range list {
			list[i].Size = math.Log(float64(list[i].Rows)) / math.Log(float64(most))
		}
	}
	return out
}

// heaps are those of one crowd, without their sizes.
func heaps(s *Series, x, y *Scale) []Heap {
	type cell struct{ column, row int }
	index := map[cell]int{}
	var out []Heap
	var cells []cell
	for i := range s.X {
		v := s.Y[i]
		if s.Shift != nil {
			v += s.Shift[i]
		}
		px, py := x.Place(s.X[i]), y.Place(v)
		c := cell{int(math.Floor(px * heapColumns)), int(math.Floor(py * heapRows))}
		n, ok := index[c]
		if !ok {
			n = len(out)
			index[c] = n
			out, cells = append(out, Heap{}), append(cells, c)
		}
		h := &out[n]
		h.X, h.Y, h.Rows = h.X+px, h.Y+py, h.Rows+1
	}
	for i := range out {
		out[i].X /= float64(out[i].Rows)
		out[i].Y /= float64(out[i].Rows)
	}
	order := make([]int, len(out))
	for i := range order {
		order[i] = i
	}
	slices.SortFunc(order, func(a, b int) int {
		return cmp.Or(cmp.Compare(cells[a].column, cells[b].column), cmp.Compare(cells[a].row, cells[b].row))
	})
	sorted := make([]Heap, len(out))
	for i, k := range order {
		sorted[i] = out[k]
	}
	return sorted
}
