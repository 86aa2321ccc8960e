package validate

import "math"

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
	var out []Group
	for _, by := range []struct {
		word  string
		label func(i int) string
	}{
		{"fluid", func(i int) string { return obs[i].Record.Key }},
		{"method", func(i int) string { return obs[i].Method }},
		{"batch", func(i int) string { return obs[i].Batch }},
		{"pressure", func(i int) string { return bands[i] }},
	} {
		var names []string
		members := map[string][]int{}
		for i := range obs {
			g := by.label(i)
			if members[g] == nil {
				names = append(names, g)
			}
			members[g] = append(members[g], i)
		}
		if by.word != "fluid" && len(names) < 2 {
			continue
		}
		for _, name := range names {
			g := a.group(by.word, name, members[name])
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

// group sums over its members, in row order.
func (a *Assessment) group(by, name string, members []int) Group {
	g := Group{By: by, Name: name}
	var e, left []float64
	for _, i := range members {
		r := &a.Rows[i]
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
