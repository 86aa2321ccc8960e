package export

import (
	"fmt"
	"io"
	"math"
	"slices"

	"limsup/data/fluid"
	"limsup/fit/export/internal/kernel"
)

// This file writes limits over a grid of pressure that halves itself until the line
// between neighbours is near enough to the model.

const (
	// A part is cut when the line errs at one of its inner points by more than
	// tableSafety of the tolerance. The stated error is the largest one seen times
	// statedMargin: between the points, which divide a part into probes+1, a smooth curve
	// errs by at most 1/(probes+1)² more than at the nearest, 2 % for 7.
	tableSafety  = 0.8
	statedMargin = 1.05
	probes       = 7
	// edgeHalvings bounds the cutting towards the end of a column, mostHalvings that of
	// a bend: saturation near zero pressure needs one for every octave.
	edgeHalvings = 14
	mostHalvings = 40
)

// columns of temperature that a table interpolates.
var tableColumns = []struct {
	name string
	of   func(*expected) (float64, bool)
}{
	{"temperature/K", func(x *expected) (float64, bool) { return x.T, x.Status == kernel.Fine }},
	{"standard_uncertainty/K", func(x *expected) (float64, bool) { return x.U, x.Status == kernel.Fine && x.HasU }},
	{"saturation/K", func(x *expected) (float64, bool) { return x.Saturation, x.Status == kernel.Fine && x.HasSat }},
	{"spinodal/K", func(x *expected) (float64, bool) { return x.Spinodal, x.Status == kernel.Fine && x.HasSpinodal }},
}

// grid holds the states of one fluid and what the lines between them err by.
type grid struct {
	states []expected
	error  [4]float64 // largest error seen, by column, K
	ends   bool       // some part has a limit at one end only
}

func (s *subject) table(w io.Writer) error {
	head := []string{"fluid", "pressure/Pa"}
	for _, c := range tableColumns {
		head = append(head, c.name)
	}
	comments := s.comments("Limits of superheat over pressure, for interpolation along straight lines")
	comments = append(comments, s.rangeText())
	var rows [][]string
	for _, r := range s.o.Records {
		g, err := s.grid(r)
		if err != nil {
			return err
		}
		comments = append(comments, s.gridText(r, g))
		for i := range g.states {
			x := &g.states[i]
			row := []string{r.Key, number(x.P)}
			for _, c := range tableColumns {
				text := ""
				if v, ok := c.of(x); ok {
					text = number(v)
				}
				row = append(row, text)
			}
			rows = append(rows, row)
		}
	}
	return list(w, comments, head, rows)
}

// gridText states what interpolation costs.
func (s *subject) gridText(r *fluid.Record, g *grid) string {
	t := fmt.Sprintf("%s: %d rows. ", r.Key, len(g.states))
	if len(g.states) == 1 {
		return t + "The range is one pressure; nothing is interpolated."
	}
	if !slices.ContainsFunc(g.states, func(x expected) bool { return x.Status == kernel.Fine }) {
		return t + "At each of them there is no limit: " + statuses()[g.states[0].Status] + "."
	}
	t += "A straight line between neighbours errs by at most"
	for k, c := range tableColumns {
		if k > 0 {
			t += ","
		}
		t += fmt.Sprintf(" %s K in %s", number(roundUp(g.error[k]*statedMargin)), c.name[:len(c.name)-2])
	}
	t += fmt.Sprintf(" (asked for: %s K).", number(s.o.Tolerance))
	if g.ends {
		t += " Where a neighbour is empty there is no limit or no such state, and nothing may be interpolated."
	}
	return t
}

// roundUp gives two significant digits, not below v.
func roundUp(v float64) float64 {
	if !(v > 0) {
		return 0
	}
	scale := math.Pow(10, 1-math.Floor(math.Log10(v)))
	return math.Ceil(v*scale) / scale
}

// grid cuts the range until every column is near its lines.
func (s *subject) grid(r *fluid.Record) (*grid, error) {
	if _, err := s.row(r); err != nil {
		return nil, &FluidError{r.Key, err}
	}
	g := &grid{}
	first := s.at(r, s.low)
	g.states = append(g.states, first)
	if s.low == s.high {
		return g, nil
	}
	const start = 4
	last := first
	for i := 1; i <= start; i++ {
		x := s.at(r, s.low+(s.high-s.low)*float64(i)/start)
		if err := s.cut(r, g, last, x, 0); err != nil {
			return nil, err
		}
		last = x
	}
	return g, nil
}

// cut appends the states after a up to and with b.
func (s *subject) cut(r *fluid.Record, g *grid, a, b expected, depth int) error {
	inner := make([]expected, probes)
	for i := range inner {
		inner[i] = s.at(r, a.P+(b.P-a.P)*float64(i+1)/(probes+1))
	}
	var seen [4]float64
	edge := false
	for k, c := range tableColumns {
		va, oka := c.of(&a)
		vb, okb := c.of(&b)
		if oka != okb {
			edge = true
		}
		for i := range inner {
			v, ok := c.of(&inner[i])
			switch {
			case ok != oka || ok != okb:
				edge = true
			case ok:
				line := va + (vb-va)*float64(i+1)/(probes+1)
				seen[k] = math.Max(seen[k], math.Abs(v-line))
			}
		}
	}
	worst := slices.Max(seen[:])
	bent := worst > tableSafety*s.o.Tolerance
	if bent && depth < mostHalvings || edge && depth < edgeHalvings {
		m := inner[probes/2]
		if err := s.cut(r, g, a, m, depth+1); err != nil {
			return err
		}
		return s.cut(r, g, m, b, depth+1)
	}
	if bent {
		return &ToleranceError{r.Key, "table", fmt.Sprintf("the line still errs by %.3g K after %d halvings; allow more with a larger tolerance", worst, depth), a.P, b.P}
	}
	g.ends = g.ends || edge
	for k := range seen {
		g.error[k] = math.Max(g.error[k], seen[k])
	}
	g.states = append(g.states, b)
	return nil
}
