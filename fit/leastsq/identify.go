package leastsq

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// Direction of the parameters along which the derivatives vanish.
type Direction struct {
	// Change of each parameter, in its unit; only the proportions mean something.
	Change []float64
	// Share of each parameter in units in which all have equal effect; the largest
	// is 1. Parameters with a small share are not part of the direction.
	Share []float64
}

// Identification says in numbers what the data determine.
type Identification struct {
	Names          []string
	SingularValues []float64 // as in Result
	Rank           int
	// Condition is the largest over the smallest singular value; +Inf below full rank.
	Condition float64
	// Correlation of the estimates, n×n, ones on the diagonal, zeros beside it for
	// parameters at a bound; nil without covariance.
	Correlation *mat.SymDense
	Null        []Direction // directions that the data do not determine
}

// Identify reads the identifiability of the parameters off a result.
func Identify(r *Result) Identification {
	id := Identification{Names: r.Names, SingularValues: r.SingularValues, Rank: r.Rank, Null: r.null, Condition: math.Inf(1)}
	if n := len(r.SingularValues); n > 0 && len(r.null) == 0 {
		id.Condition = r.SingularValues[0] / r.SingularValues[n-1]
	}
	if r.unscaled == nil {
		return id
	}
	n := len(r.X)
	id.Correlation = mat.NewSymDense(n, nil)
	for i := range n {
		id.Correlation.SetSym(i, i, 1)
		for j := i + 1; j < n; j++ {
			if d := math.Sqrt(r.unscaled.At(i, i)) * math.Sqrt(r.unscaled.At(j, j)); d > 0 {
				id.Correlation.SetSym(i, j, r.unscaled.At(i, j)/d)
			}
		}
	}
	return id
}
