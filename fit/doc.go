// Package fit tunes a superheat model to measured superheat limits: a cubic
// equation of state, a surface tension and a threshold flux, with any of their
// parameters free, shared or one per fluid, method or batch.
//
// A Variant says which theory is used; a Plan says what is free, fixed, bounded
// or known beforehand; Prepare turns measured rows into observations and lists
// the rows it cannot use; Calibrate finds the parameters and their uncertainty;
// a Model predicts with them.
//
// Symbols:
//
//	θ       free parameters that move a predicted limit (locations)
//	ψ       spreads: standard deviations beyond the stated uncertainties
//	T_i(θ)  predicted limit of row i in K
//	r_i     measured − predicted − offset in K
//	v_i     variance of r_i: u(T)² + (dT/dP·u(P))² + spread² in K²
//	H       information: curvature of −ln L with respect to θ
//
// Predicted limits are differentiated by the implicit function theorem (package
// eos/nucleation); no limit is solved twice for a derivative.
//
// The package is a library: it does not print, read flags or files, and keeps no
// state between calls. Results do not depend on the number of processors.
package fit
