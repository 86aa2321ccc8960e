package validate

import (
	"context"
	"fmt"
	"math"
	"sort"

	"limsup/fit"
)

// Nested is the error of the whole procedure "choose the best by cross-validation, then
// tune it": for each fold, the choice is made on the other folds alone, and the chosen
// variant, tuned on those, predicts the fold. The error of the winner is smaller than
// this on average, because it was picked for being small.
type Nested struct {
	RMSE, SE float64 // K
	// Optimism is RMSE less the cross-validated RMSE of the winner, K.
	Optimism float64
	Chosen   []Choice // most often first
	// Failed counts tunings without two folds that gave no prediction; a variant with
	// one was not chosen for the folds concerned.
	Failed int
}

// Choice tells how often an entry was the best.
type Choice struct {
	Name  string
	Folds int
}

// nested fills c.Nested from the finished entries and their members. An inner fold j
// within the outer fold k needs the model tuned without both, which serves k within j
// as well. Entries without tuned parameters predict the same whatever is left out.
// twoOut stores the residuals of both folds, by member m tuned without them.
func (c *Comparison) nested(ctx context.Context, members []member, twoOut func(m, j, k int, inner [][]float64) error) {
	folds := len(c.Folds.Names)
	if folds < 3 {
		c.NestedReason = "an outer loop needs three or more folds"
		return
	}
	type job struct{ member, j, k int }
	var jobs []job
	for m := range members {
		if members[m].UntunedOnly {
			continue
		}
		for k := range folds {
			for j := range k {
				jobs = append(jobs, job{m, j, k})
			}
		}
	}
	// inner[m][k][i] is the residual of row i by member m tuned without its fold and fold k.
	inner := make([][][]float64, len(members))
	for m := range members {
		inner[m] = make([][]float64, folds)
		for k := range folds {
			inner[m][k] = make([]float64, len(c.Observations))
			for i := range c.Observations {
				inner[m][k][i] = c.Entries[m].CV.Rows[i].Tuned
			}
		}
	}
	failed := make([]bool, len(jobs))
	parallel(len(jobs), len(jobs), func(n int) {
		if ctx.Err() != nil {
			return
		}
		b := jobs[n]
		failed[n] = twoOut(b.member, b.j, b.k, inner[b.member]) != nil
	})
	if ctx.Err() != nil {
		c.NestedReason = "the outer loop was interrupted"
		return
	}
	barred := map[[2]int]bool{}
	out := &Nested{}
	for n, b := range jobs {
		if failed[n] {
			out.Failed++
			barred[[2]int{b.member, b.j}], barred[[2]int{b.member, b.k}] = true, true
		}
	}
	c.choose(out, inner, barred)
	c.Nested = out
}

// leaveTwoOut tunes without folds j and k and stores the residuals of both.
func (c *Comparison) leaveTwoOut(m *member, warm *fit.Calibration, j, k int, inner [][]float64) error {
	of := c.Folds.Of
	plan := m.Plan
	plan.References = warm.References
	cal, err := fit.Calibrate(m.data.Subset(func(i int) bool { return of[i] != j && of[i] != k }), plan, fit.Options{Workers: 1, Warm: warm, WithoutRows: true})
	if err != nil {
		return err
	}
	model := cal.Model()
	for i := range m.data.Observations {
		outer := 0
		switch of[i] {
		case j:
			outer = k
		case k:
			outer = j
		default:
			continue
		}
		o := &m.data.Observations[i]
		q := o.Query()
		q.LimitOnly = true
		p, err := model.Predict(q)
		if err != nil {
			return err
		}
		inner[outer][i] = o.Temperature - p.Temperature
	}
	return nil
}

// choose makes the choice of each outer fold and sums its errors. Published rules take
// part through their residuals, which nothing changes.
func (c *Comparison) choose(out *Nested, inner [][][]float64, barred map[[2]int]bool) {
	rules := Comparison{Observations: c.Observations, Folds: c.Folds}
	rules.addBaselines()
	count := map[string]int{}
	residuals := make([]func(row, boiled int) float64, len(c.Folds.Names))
	for k := range c.Folds.Names {
		best, name := math.Inf(1), ""
		var of func(row, boiled int) float64
		for m := range inner {
			if barred[[2]int{m, k}] {
				continue
			}
			e := &c.Entries[m]
			if r := c.rmseWithout(k, func(row, _ int) float64 { return inner[m][k][row] }); r < best {
				best, name = r, e.Name
				of = func(row, _ int) float64 { return e.CV.Rows[row].Tuned }
			}
		}
		for b := range rules.Entries {
			e := &rules.Entries[b]
			residual := func(_, boiled int) float64 { return e.left.e[boiled] }
			if r := c.rmseWithout(k, residual); r < best {
				best, name, of = r, e.Name, residual
			}
		}
		if of == nil {
			continue
		}
		count[name]++
		residuals[k] = of
	}
	chosen := scores{folds: len(c.Folds.Names)}
	c.eachBoiled(func(row, boiled int) {
		k := c.Folds.Of[row]
		if of := residuals[k]; of != nil {
			chosen.e, chosen.fold = append(chosen.e, of(row, boiled)), append(chosen.fold, k)
		}
	})
	out.RMSE = rmse(chosen.e)
	out.SE, _ = chosen.differenceSE(nil)
	winner := math.Inf(1)
	for i := range c.Entries {
		winner = math.Min(winner, rmse(c.Entries[i].left.e))
	}
	for i := range rules.Entries {
		winner = math.Min(winner, rmse(rules.Entries[i].left.e))
	}
	out.Optimism = out.RMSE - winner
	for name, n := range count {
		out.Chosen = append(out.Chosen, Choice{name, n})
	}
	sort.Slice(out.Chosen, func(i, j int) bool {
		a, b := out.Chosen[i], out.Chosen[j]
		return a.Folds > b.Folds || a.Folds == b.Folds && a.Name < b.Name
	})
}

// rmseWithout is the root mean square over the boiled rows outside fold k.
func (c *Comparison) rmseWithout(k int, residual func(row, boiled int) float64) float64 {
	var e []float64
	c.eachBoiled(func(row, boiled int) {
		if c.Folds.Of[row] != k {
			e = append(e, residual(row, boiled))
		}
	})
	return rmse(e)
}

// eachBoiled visits the rows that boiled with their index among all and among those.
func (c *Comparison) eachBoiled(visit func(row, boiled int)) {
	n := 0
	for i := range c.Observations {
		if c.Observations[i].Outcome == 0 {
			visit(i, n)
			n++
		}
	}
}

// Sentence says what the outer loop found.
func (n *Nested) Sentence() string {
	s := fmt.Sprintf("Choosing the best and then tuning it errs by %.3g K ± %.2g K on rows that neither choice nor tuning had seen, ", n.RMSE, n.SE)
	switch {
	case n.Optimism > 0:
		s += fmt.Sprintf("%.2g K more than the winner's own figure.", n.Optimism)
	case n.Optimism < 0:
		s += fmt.Sprintf("%.2g K less than the winner's own figure.", -n.Optimism)
	default:
		s += "as much as the winner's own figure."
	}
	if n.Failed > 0 {
		s += fmt.Sprintf(" %d tunings without two folds gave no prediction; their variants were not chosen there.", n.Failed)
	}
	return s
}
