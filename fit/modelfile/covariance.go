package modelfile

import (
	"fmt"
	"math"
	"strconv"

	"gonum.org/v1/gonum/mat"
)

// This file checks the covariance of a calibration.

// Tolerances of a covariance. A file keeps every digit, so both leave room for files
// that were rounded to ten digits by other tools.
const (
	// uncertaintySlack is the relative difference between a standard uncertainty and
	// the root of its variance.
	uncertaintySlack = 1e-9
	// definiteSlack is how far below zero the smallest eigenvalue of the matrix of
	// correlations may lie. Rounding n² products to 2⁻⁵³ moves it by n²·2⁻⁵³ at
	// most: 1e-10 for n = 1000.
	definiteSlack = 1e-9
)

func (c *checker) covariance() {
	n, cov := len(c.file.Parameters), c.file.Covariance
	if cov == nil {
		c.at(nil, "found nothing, expected the covariance of the parameters", "covariance")
		return
	}
	before := len(c.problems)
	if len(cov.Labels) != n {
		c.at(nil, fmt.Sprintf("found %d labels, expected one for each of the %d parameters", len(cov.Labels), n), "covariance", "labels")
	}
	if len(cov.LowerTriangle) != n {
		c.at(nil, fmt.Sprintf("found %d rows, expected one for each of the %d parameters", len(cov.LowerTriangle), n), "covariance", "lower_triangle")
	}
	for i, row := range cov.LowerTriangle {
		if len(row) != i+1 {
			c.at(nil, fmt.Sprintf("found %d numbers, expected %d: the lower triangle of a symmetric matrix", len(row), i+1), "covariance", "lower_triangle", i)
		}
	}
	for i := range min(n, len(cov.Labels)) {
		e := c.file.Parameters[i].estimate()
		if want := e.Label(); cov.Labels[i] != want {
			c.at(nil, foundExpected(strconv.Quote(cov.Labels[i]), strconv.Quote(want)+" as in /parameters"), "covariance", "labels", i)
		}
	}
	if len(c.problems) > before {
		return
	}
	for i := range n {
		c.variance(i)
	}
	if len(c.problems) == before && n > 0 && !definite(cov.LowerTriangle) {
		c.at(nil, "found a matrix with a negative eigenvalue, expected a positive semidefinite one", "covariance", "lower_triangle")
	}
}

// variance checks row i against the standard uncertainty of its parameter.
func (c *checker) variance(i int) {
	row, u := c.file.Covariance.LowerTriangle[i], c.file.Parameters[i].U
	for j, v := range row {
		expected := ""
		switch none := u == nil || c.file.Parameters[j].U == nil; {
		case !finite(v):
			expected = "a finite number"
		case none && v != 0:
			expected = "0, since a parameter of this row or column has no uncertainty"
		default:
			continue
		}
		c.at(nil, foundExpected(number(v), expected), "covariance", "lower_triangle", i, j)
		return
	}
	if u == nil {
		return
	}
	if v := row[i]; !(v >= 0 && math.Abs(math.Sqrt(v)-*u) <= uncertaintySlack**u) {
		c.at(nil, foundExpected(number(v), "the square of the standard uncertainty "+number(*u)), "covariance", "lower_triangle", i, i)
	}
}

// definite tells whether the correlations of a lower triangle with finite entries
// and a diagonal ≥ 0 have no eigenvalue below −definiteSlack: whether a Cholesky
// factor exists once that is added to the diagonal.
func definite(lower [][]float64) bool {
	n := len(lower)
	s := mat.NewSymDense(n, nil)
	for i, row := range lower {
		s.SetSym(i, i, 1+definiteSlack)
		for j, v := range row[:i] {
			if v == 0 {
				continue
			}
			r := v / math.Sqrt(row[i]) / math.Sqrt(lower[j][j])
			if !finite(r) {
				return false
			}
			s.SetSym(i, j, r)
		}
	}
	var chol mat.Cholesky
	return chol.Factorize(s)
}
