// Package tension gives the surface tension of a flat interface between the liquid
// and the vapour of a pure fluid.
//
//	σ   surface tension, N/m
//	T   temperature, K;  Tc critical temperature, K;  Tr = T/Tc
//	θ   1 − Tr, the reduced distance from the critical temperature
//
// A Func is one model for one fluid: a published fit (PowerSum, DIPPR106), an
// estimate from the critical point and the boiling temperature
// (CorrespondingStates) or one from the densities of an equation of state
// (Parachor). Each returns σ and dσ/dT together, since solvers need both.
//
// The package knows no curvature: the tension of a small embryo is a matter of
// package nucleation. It holds no data and does not know the range in which a fit
// was made; the fluid's record does.
package tension
