package fit

import (
	"fmt"
	"math"
	"sort"
)

// Influence says what a row does to the result: what would change without it, by one
// Newton step with the spreads held (R. D. Cook, Technometrics 19 (1977) 15, and
// D. A. Belsley, E. Kuh and R. E. Welsch, Regression Diagnostics, Wiley 1980; from
// memory). With q = gᵀCg, h the leverage and d the slope of −ln of the row's density:
//
//	Δθ = −C g d/(1−h),   Cook's distance = d²q/(p(1−h)²),   DFFITS = d√q/(1−h).
type Influence struct {
	Cook   float64 // squared change of all p active locations in units of their joint uncertainty, over p
	Dffits float64 // change of the row's own prediction with it, in its standard uncertainties
	// Shift is the largest change of a location without the row, in its standard
	// uncertainties, and Of the index of that location in Calibration.Parameters; -1
	// where there is no covariance.
	Shift float64
	Of    int
	// Sole is set where the row alone determines some combination of locations.
	Sole bool
}

// Rows that move an estimate by more than one of its standard uncertainties drive the
// result; above a leverage of soleLeverage a row predicts itself.
const (
	largeShift   = 1
	soleLeverage = 1 - 1e-6
)

// gradient is ∂(T + offset)/∂θ of a row, sparse: indices and values.
func (l *likelihood) gradient(i int, at *[locations]int, value *[locations]float64) (n int) {
	d := &l.limit[i].d
	for a, k := range l.lay.index[i] {
		if k < 0 {
			continue
		}
		if v := derivative(d, a); v != 0 {
			at[n], value[n] = int(k), v
			n++
		}
	}
	return n
}

// influence is that of a row; p is the number of active locations.
func (c *Calibration) influence(lik *likelihood, i, p int, d density) (leverage float64, f Influence) {
	var at [locations]int
	var g [locations]float64
	n := lik.gradient(i, &at, &g)
	q := 0.0
	for a := range n {
		for b := range n {
			q += g[a] * g[b] * c.Covariance.At(at[a], at[b])
		}
	}
	q = math.Max(0, q)
	leverage = math.Min(1, d.irr*q)
	f.Of = -1
	if p == 0 || q == 0 {
		return leverage, f
	}
	if f.Sole = leverage > soleLeverage; f.Sole {
		return leverage, f
	}
	k := d.dr / (1 - leverage)
	f.Cook = k * k * q / float64(p)
	f.Dffits = k * math.Sqrt(q)
	for j := range c.theta {
		if !c.Parameters[j].HasU {
			continue
		}
		s := 0.0
		for a := range n {
			s += c.Covariance.At(j, at[a]) * g[a]
		}
		if s *= -k / c.Parameters[j].U; math.Abs(s) > math.Abs(f.Shift) {
			f.Shift, f.Of = s, j
		}
	}
	return leverage, f
}

// warnInfluence names the rows that drive the result.
func (c *Calibration) warnInfluence() {
	var sole []string
	var driving []*RowResult
	for i := range c.Rows {
		r := &c.Rows[i]
		if r.Influence.Sole {
			sole = append(sole, c.rowName(r))
		} else if math.Abs(r.Influence.Shift) > largeShift {
			driving = append(driving, r)
		}
	}
	if len(sole) > 0 {
		c.warn("nothing checks " + join(sole) + ": a parameter is determined by that row alone")
	}
	if len(driving) == 0 {
		return
	}
	sort.SliceStable(driving, func(a, b int) bool {
		return math.Abs(driving[a].Influence.Shift) > math.Abs(driving[b].Influence.Shift)
	})
	text := ""
	const most = 3
	for k, r := range driving {
		if k == most {
			text += fmt.Sprintf("; and %d more rows", len(driving)-most)
			break
		}
		if k > 0 {
			text += "; "
		}
		text += fmt.Sprintf("without %s %s would change by %+.1f of its standard uncertainty", c.rowName(r), c.Parameters[r.Influence.Of].Label(), r.Influence.Shift)
	}
	c.warn("single rows drive the result: " + text)
}

func (c *Calibration) rowName(r *RowResult) string {
	o := &c.Data.Observations[r.Index]
	return o.At() + " (" + o.Record.Key + ")"
}
