package validate

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"reflect"
	"strings"
	"testing"

	"limsup/fit"
)

// distributed makes a comparison in n shares, each from the start, with its results
// sent through JSON.
func distributed(t *testing.T, n int, jobs func() *Jobs) *Comparison {
	t.Helper()
	var all []JobResult
	for k := range n {
		w := jobs()
		first, last := w.Len()*k/n, w.Len()*(k+1)/n
		results, err := w.Run(context.Background(), first, last)
		if err != nil {
			t.Fatal(err)
		}
		text, err := json.Marshal(results)
		if err != nil {
			t.Fatal(err)
		}
		var read []JobResult
		if err := json.Unmarshal(text, &read); err != nil {
			t.Fatal(err)
		}
		all = append(all, read...)
	}
	c, err := jobs().Finish(all)
	if err != nil {
		t.Fatal(err)
	}
	return c
}

// TestJobsAsCompare puts comparisons together from shares and wants what Compare finds,
// bit for bit: with an outer loop, with a variant that has too few rows
// without a fold, and with folds too few for the outer loop.
func TestJobsAsCompare(t *testing.T) {
	lib := library(t)
	set := simulate(t, lib, sample{threshold: 12, fluids: alkanes[:4], pressures: []float64{1e5, 4e5}, noise: 0.5, stated: 0.3, seed: 9})
	candidates := []Candidate{
		{Plan: fit.Plan{}},
		{Plan: fit.Plan{Terms: []fit.Term{{Name: fit.Threshold}, {Name: fit.Slope, By: fit.ByFluid}}}},
		{Plan: fit.Plan{Variant: fit.Variant{Equation: "redlich-kwong", Limit: fit.Spinodal}}, UntunedOnly: true},
		{Plan: fit.Plan{Terms: []fit.Term{{Name: fit.Threshold}, {Name: fit.Offset, By: fit.ByMethod}}}}, // without a fold, another method may lead
	}
	for _, tt := range []struct {
		folds  string
		nested bool
		aside  int
		shares []int
	}{
		{"fluid", true, 0, []int{1, 3, 7}},
		{"3", true, 1, []int{2}},
		{"2", true, 1, []int{5}},
	} {
		t.Run(tt.folds, func(t *testing.T) {
			o := CompareOptions{Candidates: candidates, Folds: tt.folds, Seed: 1, Keep: DefaultKeep, Nested: tt.nested}
			want, err := Compare(context.Background(), set, lib, o)
			if err != nil {
				t.Fatal(err)
			}
			if len(want.Aside) != tt.aside {
				t.Fatalf("%d set aside, want %d: %v", len(want.Aside), tt.aside, want.Aside)
			}
			for _, n := range tt.shares {
				got := distributed(t, n, func() *Jobs {
					w, err := NewJobs(set, lib, o)
					if err != nil {
						t.Fatal(err)
					}
					return w
				})
				same(t, fmt.Sprintf("%d shares", n), got, want)
			}
		})
	}
}

// same compares all that a comparison shows. Of calibrations, parameters, warnings and
// the columns of TunedRows travel.
func same(t *testing.T, what string, got, want *Comparison) {
	t.Helper()
	equal := func(name string, a, b any) {
		t.Helper()
		if !reflect.DeepEqual(a, b) {
			t.Errorf("%s: %s: %v, want %v", what, name, a, b)
		}
	}
	equal("observations", got.Observations, want.Observations)
	equal("folds", got.Folds, want.Folds)
	equal("excluded", got.Excluded, want.Excluded)
	equal("set aside", got.Aside, want.Aside)
	equal("unfinished", got.Unfinished, want.Unfinished)
	equal("warnings", got.Warnings, want.Warnings)
	equal("nested", got.Nested, want.Nested)
	equal("no nested", got.NestedReason, want.NestedReason)
	equal("simplest", got.Simplest, want.Simplest)
	equal("verdict", got.Verdict, want.Verdict)
	if len(got.Entries) != len(want.Entries) {
		t.Fatalf("%s: %d entries, want %d", what, len(got.Entries), len(want.Entries))
	}
	for i := range want.Entries {
		g, w := got.Entries[i], want.Entries[i]
		if w.Calibration != nil {
			a, b := g.Calibration, w.Calibration
			equal(w.Name+" parameters", a.Parameters, b.Parameters)
			equal(w.Name+" warnings", a.Warnings, b.Warnings)
			equal(w.Name+" references", a.References, b.References)
			equal(w.Name+" figures", []any{a.Locations, a.RMSE, a.Bias, a.Spread, a.LogLik, a.Degrees, a.Converged, a.Usable, a.Reason, a.Evaluations},
				[]any{b.Locations, b.RMSE, b.Bias, b.Spread, b.LogLik, b.Degrees, b.Converged, b.Usable, b.Reason, b.Evaluations})
			for j := range b.Rows {
				equal(w.Name+" row", []any{a.Rows[j].Index, a.Rows[j].Residual, a.Rows[j].Leverage}, []any{b.Rows[j].Index, b.Rows[j].Residual, b.Rows[j].Leverage})
			}
		}
		g.Calibration, w.Calibration = nil, nil
		equal(w.Name, g, w)
	}
}

// TestFinishRefuses gives results that do not belong to the jobs.
func TestFinishRefuses(t *testing.T) {
	lib := library(t)
	set := simulate(t, lib, sample{threshold: 12, fluids: alkanes[:3], pressures: []float64{1e5, 4e5}, noise: 0.5, stated: 0.3, seed: 9})
	w, err := NewJobs(set, lib, CompareOptions{Candidates: []Candidate{{}}, Seed: 1, Nested: true})
	if err != nil {
		t.Fatal(err)
	}
	good, err := w.Run(context.Background(), 0, w.Len())
	if err != nil {
		t.Fatal(err)
	}
	// Untuned: all rows, three fluids; tuned: the same, and three pairs.
	if len(good) != 11 {
		t.Fatalf("%d jobs", len(good))
	}
	if _, err := w.Finish(good); err != nil {
		t.Fatal(err)
	}
	for _, tt := range []struct {
		name string
		says string
		bend func(r []JobResult) []JobResult
	}{
		{"one fewer", "10 for 11 jobs", func(r []JobResult) []JobResult { return r[1:] }},
		{"empty", "result of job 3: it is of another kind", func(r []JobResult) []JobResult { r[2] = JobResult{}; return r }},
		{"exchanged", "result of job 2: it is of another kind", func(r []JobResult) []JobResult { r[1], r[2] = r[2], r[1]; return r }},
		{"no calibration", "result of job 2: it is of another kind", func(r []JobResult) []JobResult { r[1] = JobResult{Tuned: &TunedRows{}}; return r }},
		{"a residual lost", "5 residuals and 6 leverages of 6 rows", func(r []JobResult) []JobResult {
			x := *r[0].Tuned
			x.Residual = x.Residual[1:]
			r[0].Tuned = &x
			return r
		}},
		{"locations", "9 locations among", func(r []JobResult) []JobResult {
			x := *r[0].Tuned
			c := *x.Calibration
			c.Locations, x.Calibration = 9, &c
			r[0].Tuned = &x
			return r
		}},
		{"a column short", "a column of 0 values for the 2 rows", func(r []JobResult) []JobResult {
			x := *r[2].Left
			x.Variance = nil
			r[2].Left = &x
			return r
		}},
		{"a pair short", "1 residuals for the 4 rows of two folds", func(r []JobResult) []JobResult { r[10].Nested = r[10].Nested[:1]; return r }},
	} {
		_, err := w.Finish(tt.bend(append([]JobResult(nil), good...)))
		var bad *ResultError
		if !errors.As(err, &bad) || !strings.Contains(err.Error(), tt.says) {
			t.Errorf("%s: %v, want …%s…", tt.name, err, tt.says)
		}
	}
}

// TestJobsInterrupted gives no results at all.
func TestJobsInterrupted(t *testing.T) {
	lib := library(t)
	set := simulate(t, lib, sample{threshold: 12, fluids: alkanes[:3], pressures: []float64{1e5}, noise: 0.5, seed: 9})
	w, err := NewJobs(set, lib, CompareOptions{Candidates: []Candidate{{}}})
	if err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if r, err := w.Run(ctx, 0, w.Len()); r != nil || !errors.Is(err, context.Canceled) {
		t.Errorf("%v, %v", r, err)
	}
	if _, err := NewJobs(set, lib, CompareOptions{Keep: 2}); err == nil {
		t.Error("a share of 2 was taken")
	}
}
