// Package design chooses measurements: which of many candidates, and how often
// each, so that a fit to them leaves the least uncertainty in what is wanted.
//
// A candidate is known by its information matrix alone, the expected curvature of
// −ln of the density of its reading with respect to the p parameters of a model,
// and enters as a sum of outer products. Where the numbers come from – which
// model, which quantity, which laboratory – the package does not know.
//
// Symbols:
//
//	p, n      parameters, measurements of a batch
//	f         factor row of a candidate: gradient of its prediction divided by the
//	          standard uncertainty of its reading, p
//	M, C      information Σffᵀ with what was known before, covariance M⁻¹, p×p
//	a         direction: the quantity aᵀθ has the standard uncertainty √(aᵀCa)
//	Φ         criterion: ln of a mean standard uncertainty, to be made small
//
// All criteria are logarithms of a mean standard uncertainty, so that a difference
// of 0.01 is one per cent of uncertainty, and n alike measurements count n times.
//
// A batch is found by adding the best candidate n times (greedy), then exchanging
// one member at a time for the best candidate until no exchange helps (R. D. Cook
// and C. J. Nachtsheim, Technometrics 22 (1980) 315, after V. V. Fedorov, Theory of
// Optimal Experiments, 1972; citations from memory). The search can end at a batch
// that only several exchanges at once would improve; Batch.Bound says by how much
// at most any other batch of n is better.
//
// Equal candidates are taken in their order, so that the same problem gives the
// same batch. The package does no random search, knows no continuous factors, and
// takes the gradients where the caller took them: a design for a nonlinear model
// is as good as the parameters it was made with.
package design
