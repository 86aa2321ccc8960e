// Package campaign plans measurements of superheat limits: it turns fluids,
// pressures, methods and droplet sizes into candidates of package design, ranks
// them for a target, chooses a batch, says in words why, and checks by simulation
// what it promised.
//
// Symbols and units:
//
//	θ     tuned parameters of a model, in their own units
//	T     predicted limit, K
//	g     ∂T/∂θ by the implicit function theorem (package fit)
//	v     variance of a reading: u(T)² + (dT/dP·u(P))² + spread², K²
//	κ     share of the way from a rival variant (0) to the model (1)
//	C     covariance of θ, before or after measurements
//
// What is known before is the covariance of the model's calibration. Where that
// says nothing – a fluid or method without a row in a model with values of its own
// for each, parameters that the data do not tell apart, a plan from scratch – no more
// is known than the bounds: the present uncertainty is that of a uniform distribution
// over them, and a note says so. A batch is chosen so that its readings, not the
// bounds, determine the parameters.
//
// Promised uncertainties hold for the parameters that the model has now (a locally
// optimal design), for independent readings and for the stated uncertainties. An
// error that readings share, such as a miscalibrated thermometer, does not average
// out and is in none of them.
//
// The package opens no files, prints nothing and makes no choice of a target. Its
// energies are bounds for a first look at protection, not a hazard analysis.
package campaign
