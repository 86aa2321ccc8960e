package validate

import (
	"math"
	"sort"

	"gonum.org/v1/gonum/stat/distuv"
)

// exactBelow is the number of pairs below which the p-value of a rank correlation
// counts all permutations (at most 9! = 362 880).
const exactBelow = 10

// Spearman returns the rank correlation ρ of pairs, tied values sharing their mean
// rank, and its two-sided p-value against no association: from all permutations below
// 10 pairs, else from Student's t = ρ√((n−2)/(1−ρ²)) with n − 2 degrees of freedom.
// Values of x within tie of each other are tied. ok is false for fewer than 4 pairs,
// of which no arrangement is rare, or when all x or all y are tied.
//
// Formula: M. G. Kendall, Rank Correlation Methods (from memory).
func Spearman(x, y []float64, tie float64) (rho, p float64, ok bool) {
	n := len(x)
	if n < 4 || len(y) != n {
		return 0, 0, false
	}
	rx, ry := ranks(x, tie), ranks(y, 0)
	sx, sy := dot(rx, rx), dot(ry, ry)
	if sx == 0 || sy == 0 {
		return 0, 0, false
	}
	norm := math.Sqrt(sx * sy)
	rho = math.Max(-1, math.Min(1, dot(rx, ry)/norm))
	switch {
	case n < exactBelow:
		return rho, permuted(rx, ry, math.Abs(rho)*norm), true
	case math.Abs(rho) == 1:
		return rho, 0, true
	}
	t := math.Abs(rho) * math.Sqrt(float64(n-2)/(1-rho*rho))
	return rho, 2 * distuv.StudentsT{Mu: 0, Sigma: 1, Nu: float64(n - 2)}.Survival(t), true
}

// ranks are centred: their sum is zero.
func ranks(x []float64, tie float64) []float64 {
	n := len(x)
	order := make([]int, n)
	for i := range order {
		order[i] = i
	}
	sort.SliceStable(order, func(a, b int) bool { return x[order[a]] < x[order[b]] })
	r := make([]float64, n)
	for i := 0; i < n; {
		j := i
		for j < n && x[order[j]]-x[order[i]] <= tie {
			j++
		}
		for _, k := range order[i:j] {
			r[k] = 0.5 * float64(i+j-n)
		}
		i = j
	}
	return r
}

func dot(a, b []float64) float64 {
	s := 0.0
	for i := range a {
		s += float64(a[i] * b[i])
	}
	return s
}

// permuted is the share of the orders of y whose |Σxy| reaches level.
func permuted(x, y []float64, level float64) float64 {
	level -= 1e-9 * level // sums of half-integers are exact; the norm is not
	y = append([]float64(nil), y...)
	hit, all := 0, 0
	count := func() {
		all++
		if math.Abs(dot(x, y)) >= level {
			hit++
		}
	}
	var permute func(k int)
	permute = func(k int) {
		if k == 1 {
			count()
			return
		}
		for i := range k {
			y[i], y[k-1] = y[k-1], y[i]
			permute(k - 1)
			y[i], y[k-1] = y[k-1], y[i]
		}
	}
	permute(len(y))
	return float64(hit) / float64(all)
}
