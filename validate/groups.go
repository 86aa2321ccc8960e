package validate

import (
	"math"

	"limsup/fit"
)

// Group summarises the residuals of a fluid, method, batch or pressure. Intact rows
// are counted, and enter nothing else.
type Group struct {
	By, Name   string
	N          int // rows that boiled
	Intact     int
	Bias       float64 // mean residual, K
	RMSE       float64 // K
	MeanAbsErr float64 // K
	Worst      float64 // residual of largest magnitude, with its sign, K
	// LeftOutRMSE is that of left-out residuals, in K, with HasLeftOut.
	LeftOutRMSE float64
	HasLeftOut  bool
}

// groups divides the rows by fluid, method, batch and pressure; the last three only
// where there are two or more of them.
func (a *Assessment) groups() []Group {
	obs := a.Data.Observations
	bands := pressureBands(obs)
	at := map[*fit.Observation]string{}
	for i := range obs {
		at[&obs[i]] = bands[i]
	}
	var out []Group
	for _, by := range []struct {
		word  string
		label func(o *fit.Observation) string
	}{
		{"fluid", func(o *fit.Observation) string { return o.Record.Key }},
		{"method", func(o *fit.Observation) string { return o.Method }},
		{"batch", func(o *fit.Observation) string { return o.Batch }},
		{"pressure", func(o *fit.Observation) string { return at[o] }},
	} {
		var names []string
		seen := map[string]bool{}
		for i := range obs {
			if g := by.label(&obs[i]); !seen[g] {
				seen[g] = true
				names = append(names, g)
			}
		}
		if by.word != "fluid" && len(names) < 2 {
			continue
		}
		for _, name := range names {
			g := a.group(by.word, name, func(o *fit.Observation) bool { return by.label(o) == name })
			if g.Name == "" {
				g.Name = none
			}
			out = append(out, g)
		}
	}
	return out
}

// none names the group of rows without a method or batch.
const none = "(none)"

// group sums over the rows that belong to it, in row order.
func (a *Assessment) group(by, name string, has func(*fit.Observation) bool) Group {
	g := Group{By: by, Name: name}
	var e, left []float64
	for i := range a.Rows {
		r := &a.Rows[i]
		if !has(&a.Data.Observations[i]) {
			continue
		}
		if r.Intact {
			g.Intact++
			continue
		}
		e = append(e, r.Residual)
		if r.HasLeftOut {
			left = append(left, r.LeftOut)
		}
		if math.Abs(r.Residual) > math.Abs(g.Worst) {
			g.Worst = r.Residual
		}
	}
	g.N, g.RMSE = len(e), rmse(e)
	for _, x := range e {
		g.Bias += x / float64(len(e))
		g.MeanAbsErr += math.Abs(x) / float64(len(e))
	}
	g.LeftOutRMSE, g.HasLeftOut = rmse(left), len(left) > 0
	return g
}
