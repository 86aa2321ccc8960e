package validate

import (
	"cmp"
	"fmt"
	"math"
	"slices"
	"sort"

	"limsup/fit"
)

// Finding describes a row that lies far from its prediction.
type Finding struct {
	Index int
	Text  string
}

const (
	worstShown = 5
	farFrom    = 2 // standard deviations from which a row is worth a sentence
)

// worst explains the rows that are farthest off, by standard deviations where they are
// known: all beyond two, at most five, at least one.
func (a *Assessment) worst() []Finding {
	size := func(i int) float64 {
		if z, ok := a.Rows[i].Blind(); ok {
			return math.Abs(z)
		}
		return math.Abs(a.Rows[i].Residual)
	}
	var order []int
	for i := range a.Rows {
		if !a.Rows[i].Intact {
			order = append(order, i)
		}
	}
	sort.SliceStable(order, func(p, q int) bool { return size(order[p]) > size(order[q]) })
	var out []Finding
	for _, i := range order {
		z, ok := a.Rows[i].Blind()
		if len(out) == worstShown || len(out) > 0 && !(ok && math.Abs(z) > farFrom) {
			break
		}
		out = append(out, Finding{i, a.explain(i)})
	}
	return out
}

// Farthest returns the rows that keep allows with the largest standardised residuals,
// or residuals where a row has none, which come last: at most n, the largest first. A
// row that stayed intact is off only by as much as its reading lies above the
// prediction.
func (a *Assessment) Farthest(n int, keep func(i int) bool) []int {
	type row struct {
		index int
		known bool
		size  float64
	}
	var rows []row
	for i := range a.Rows {
		if !keep(i) {
			continue
		}
		r := &a.Rows[i]
		z, ok := r.Standardised()
		if !ok {
			z = r.Residual
		}
		if r.Intact {
			z = math.Max(z, 0)
		}
		rows = append(rows, row{i, ok, math.Abs(z)})
	}
	slices.SortStableFunc(rows, func(a, b row) int {
		if a.known != b.known {
			return map[bool]int{true: -1, false: 1}[a.known]
		}
		return cmp.Compare(b.size, a.size)
	})
	out := make([]int, min(n, len(rows)))
	for k := range out {
		out[k] = rows[k].index
	}
	return out
}

// explain says how far a row is off, and whether its fluid is off with it.
func (a *Assessment) explain(i int) string {
	r, o := &a.Rows[i], &a.Data.Observations[i]
	where := o.Record.Key
	if o.Method != "" {
		where += " by " + o.Method
	}
	if o.Batch != "" {
		where += ", batch " + o.Batch
	}
	side := "above"
	if r.Residual < 0 {
		side = "below"
	}
	s := fmt.Sprintf("%s, %s at %.6g kPa: measured %.2f K, %.2f K %s the prediction", o.At(), where, o.Pressure/1e3, o.Temperature, math.Abs(r.Residual), side)
	if r.HasLeftOut {
		s += fmt.Sprintf(" (%.2f K off when left out)", math.Abs(r.LeftOut))
	}
	if z, ok := r.Blind(); ok {
		s += fmt.Sprintf(", %.1f standard deviations", math.Abs(z))
	}
	return s + a.company(i, func(p *fit.Observation) bool { return p.Record.Key == o.Record.Key }, o.Record.Key) + "."
}

// company compares a row with the others of its fluid.
func (a *Assessment) company(i int, same func(*fit.Observation) bool, name string) string {
	n, agree, sum := 0, 0, 0.0
	for j := range a.Rows {
		r := &a.Rows[j]
		if j == i || r.Intact || !same(&a.Data.Observations[j]) {
			continue
		}
		n++
		sum += r.Residual
		if math.Signbit(r.Residual) == math.Signbit(a.Rows[i].Residual) {
			agree++
		}
	}
	own := a.Rows[i].Residual
	switch {
	case n == 0:
		return fmt.Sprintf("; the only row of %s, so reading and model cannot be told apart", name)
	case agree == n && math.Abs(sum/float64(n)) > math.Abs(own)/2:
		return fmt.Sprintf("; the other rows of %s (%d) are off by %.2f K on average to the same side, so the model rather than the reading is in doubt for it", name, n, sum/float64(n))
	}
	return fmt.Sprintf("; the other rows of %s (%d) are off by %.2f K on average, so look at this reading first", name, n, sum/float64(n))
}
