package leastsq

import "gonum.org/v1/gonum/mat"

// Side says whether a parameter stands at a bound.
type Side int

// The sides of a parameter.
const (
	Inside  Side = iota // between its bounds
	AtLower             // at its lower bound
	AtUpper             // at its upper bound
	Held                // lower and upper bound are equal
)

func (s Side) String() string {
	return [...]string{"inside", "at lower bound", "at upper bound", "held"}[s]
}

// Result of a search. Vectors and matrices have one entry per parameter, in the
// order of the problem.
type Result struct {
	Names []string
	X     []float64 // estimate
	Value float64   // ½ Σ r² or the value of the objective

	Residuals []float64     // r at X, length m; least squares only
	Jacobian  *mat.Dense    // ∂r/∂θ at X, m×n; least squares only
	Curvature *mat.SymDense // information at X, n×n; Minimize only
	Gradient  []float64     // of Value at X

	// Covariance of the estimates: s²(JᵀJ)⁻¹ with s² = RSS/(m−p) for least squares
	// (p parameters off their bounds), the inverse of the curvature for Minimize.
	// A parameter at a bound is taken as known: its row and column are zero. Nil
	// where there is none; CovarianceReason then says why.
	Covariance       *mat.SymDense
	CovarianceReason string
	// StdErr is the square root of the diagonal of Covariance; 0 where there is
	// none, and then NoStdErr says why ("" elsewhere).
	StdErr   []float64
	NoStdErr []string

	AtBound []Side
	// SingularValues of the derivatives of the parameters off their bounds, each
	// column scaled to length one, falling: their squares are the eigenvalues of
	// the information matrix with unit diagonal.
	SingularValues []float64
	Rank           int // singular values above the rounding of the derivatives

	// Converged: X is an optimum to Settings.Tolerance, or to the rounding of the
	// value. Usable: X is that, or at least lower than the start it came from.
	Converged, Usable bool
	Reason            string // why the search ended, one sentence
	Warnings          []string

	Method      string // the search that found X
	Iterations  int    // accepted steps of all searches
	Evaluations int    // calls of the caller's functions
	// Distance to the optimum that the last step left, in standard errors.
	Distance float64

	unscaled *mat.SymDense
	null     []Direction
}

// UnscaledCovariance is (JᵀJ)⁻¹ of a least-squares result, the covariance when
// residuals are already in units of their known standard deviation. Nil where
// there is none. For a result of Minimize it equals Covariance.
func (r *Result) UnscaledCovariance() *mat.SymDense { return r.unscaled }

// DegreesOfFreedom is the number of residuals less the number of parameters off
// their bounds.
func (r *Result) DegreesOfFreedom() int {
	n := len(r.Residuals)
	for _, s := range r.AtBound {
		if s == Inside {
			n--
		}
	}
	return n
}
