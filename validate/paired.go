package validate

import "math"

// This file compares root-mean-square errors on the same rows. With M the mean square
// of n errors e, RMSE changes by (e² − M)/(2n·RMSE) for one more row, so a difference
// of two is a mean of paired contributions. Those of one fold stay together, since its
// rows share a model: the standard error is that of a sum over clusters.

// scores are errors on left-out rows that boiled, in row order.
type scores struct {
	e     []float64 // K
	fold  []int
	folds int
}

// rmse is the root mean square; 0 without rows.
func rmse(e []float64) float64 {
	if len(e) == 0 {
		return 0
	}
	sum := 0.0
	for _, x := range e {
		sum += float64(x * x)
	}
	return math.Sqrt(sum / float64(len(e)))
}

// influence is the contribution of an error e to a root mean square, about zero.
func influence(e, rms float64) float64 {
	if rms == 0 {
		return 0
	}
	return (float64(e*e) - float64(rms*rms)) / (2 * rms)
}

// differenceSE is the standard error of rmse(a) − rmse(b), of rmse(a) where b is nil,
// and the number of folds that hold a row. It is 0 with fewer than two.
func (a *scores) differenceSE(b []float64) (se float64, clusters int) {
	ra, rb := rmse(a.e), rmse(b)
	sum := make([]float64, a.folds)
	present := make([]bool, a.folds)
	for i, e := range a.e {
		c := influence(e, ra)
		if b != nil {
			c -= influence(b[i], rb)
		}
		sum[a.fold[i]] += c
		present[a.fold[i]] = true
	}
	ss := 0.0
	for k, s := range sum {
		if present[k] {
			clusters++
			ss += float64(s * s)
		}
	}
	if clusters < 2 {
		return 0, clusters
	}
	n, m := float64(len(a.e)), float64(clusters)
	return math.Sqrt(ss*m/(m-1)) / n, clusters
}
