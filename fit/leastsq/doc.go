// Package leastsq fits parameters to data: bounded nonlinear least squares
// (Solve) and the minimum of a smooth negative log-likelihood (Minimize), with
// the uncertainty of the estimates, profile intervals and the directions that
// the data leave undetermined.
//
// Symbols:
//
//	θ, n     parameters and their number, in the units of the caller
//	r, m     residuals and their number; RSS = Σ r_i²
//	J        ∂r_i/∂θ_j, m×n
//	g, H     gradient and curvature (information matrix) of an objective, n, n×n
//	p, D, λ  step, its diagonal scale, damping: steps minimise model + ½λ‖Dp‖²
//	s²       RSS/(m−p), p the number of parameters that are not at a bound
//
// Both searches are methods of gonum optimize and are driven by it. They are
// sequential: the same input and seed give the same bytes. Each evaluated point,
// those of differences included, lies between the bounds. A trial point that
// cannot be evaluated shortens the step; only a problem without any start that can be
// evaluated is an error.
//
// An answer has two flags and a sentence: Usable (X may be looked at), Converged
// (X is a local optimum) and Reason.
//
// The package does not know where residuals come from, does not weight or drop
// any, does not prove that a minimum is the global one (Settings.Starts looks at
// more starts), takes no constraints but bounds, and suits tens of parameters,
// not thousands: matrices are dense.
package leastsq
