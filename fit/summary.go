package fit

import (
	"fmt"
	"math"
	"slices"
	"sort"
)

// This file sums up the replicates of a bootstrap.

// Resampled summarises one quantity over the replicates.
type Resampled struct {
	Label    string
	Estimate float64
	N        int     // replicates that have it
	SD       float64 // standard deviation of the replicates
	Bias     float64 // their mean less the estimate
	// Percentile and Basic intervals: quantiles q of the replicates, and 2·estimate − q.
	Percentile, Basic [2]float64
}

// Bootstrap is the summary of replicates.
type Bootstrap struct {
	Level      float64
	Replicates int
	Failed     int
	Failures   []string // different reasons, with how often each came up
	Parameters []Resampled
	Limits     []Resampled // of the queries
}

// Summarise summarises replicates of the same calibration at a two-sided level.
//
// Errors: *OptionError for a level; *ConvergenceError when fewer than two replicates
// are left.
func (c *Calibration) Summarise(reps []Replicate, queries []Query, level float64) (*Bootstrap, error) {
	if !(level > 0 && level < 1) {
		return nil, &OptionError{"level", fmt.Sprintf("%.10g", level), "a number between 0 and 1"}
	}
	b := &Bootstrap{Level: level, Replicates: len(reps)}
	reps = slices.Clone(reps)
	sort.SliceStable(reps, func(i, j int) bool { return reps[i].Index < reps[j].Index })
	count := map[string]int{}
	for i := range reps {
		if f := reps[i].Failure; f != "" {
			b.Failed++
			count[f]++
		}
	}
	for f, n := range count {
		b.Failures = append(b.Failures, fmt.Sprintf("%d times: %s", n, f))
	}
	sort.Strings(b.Failures)
	if b.Replicates-b.Failed < 2 {
		return nil, &ConvergenceError{c.Plan.Variant.Name(), fmt.Sprintf("bootstrap: %d of %d replicates failed; %s", b.Failed, b.Replicates, join(b.Failures)), nil}
	}
	for i := range c.Parameters {
		e := &c.Parameters[i]
		b.Parameters = append(b.Parameters, summarise(e.Label(), e.Value, level, reps, func(r *Replicate) (float64, bool) { return r.Values[i], r.HasValue[i] }))
	}
	m := c.Model()
	for k, q := range queries {
		q.OrSpinodal = true
		p, err := m.Predict(q)
		if err != nil {
			return nil, err
		}
		label := fmt.Sprintf("%s at %.6g kPa", q.Record.Key, q.Pressure/1e3)
		b.Limits = append(b.Limits, summarise(label, p.Temperature, level, reps, func(r *Replicate) (float64, bool) { return r.Limits[k], r.HasLimit[k] }))
	}
	return b, nil
}

func summarise(label string, estimate, level float64, reps []Replicate, of func(r *Replicate) (float64, bool)) Resampled {
	s := Resampled{Label: label, Estimate: estimate}
	var x []float64
	for i := range reps {
		if reps[i].Failure != "" {
			continue
		}
		if v, ok := of(&reps[i]); ok {
			x = append(x, v)
		}
	}
	s.N = len(x)
	if s.N < 2 {
		return s
	}
	mean, ss := 0.0, 0.0
	for _, v := range x {
		mean += v / float64(s.N)
	}
	for _, v := range x {
		ss += (v - mean) * (v - mean)
	}
	s.SD, s.Bias = math.Sqrt(ss/float64(s.N-1)), mean-estimate
	sort.Float64s(x)
	for side, p := range [2]float64{0.5 - level/2, 0.5 + level/2} {
		s.Percentile[side] = quantileOf(x, p)
	}
	s.Basic = [2]float64{2*estimate - s.Percentile[1], 2*estimate - s.Percentile[0]}
	return s
}

// quantileOf interpolates between order statistics at (n−1)p.
func quantileOf(sorted []float64, p float64) float64 {
	h := p * float64(len(sorted)-1)
	k := min(int(h), len(sorted)-2)
	return sorted[k] + (h-float64(k))*(sorted[k+1]-sorted[k])
}
