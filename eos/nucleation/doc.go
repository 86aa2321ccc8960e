// Package nucleation computes the embryos of a new phase in a metastable one and
// the rate at which they form: Young–Laplace equilibrium, the free energy of
// formation, the classical nucleation flux, and the kinetic limit of superheat,
// the temperature (or pressure) at which the flux reaches a threshold.
//
// The properties come either from a cubic equation of state (package eos) or
// from correlations of the saturated liquid, which together with the Poynting
// factor make the classical hand method.
//
// Symbols:
//
//	T, P_l     temperature in K and pressure of the metastable liquid in Pa
//	P_v        pressure inside the critical bubble
//	σ∞, σ, δ   surface tension of a flat surface, of the embryo, in N/m; Tolman length in m
//	r*, V*     radius and volume of the critical embryo
//	W          barrier ΔG*/(kT)
//	N, m       molecules of liquid per volume, mass of a molecule
//	J          flux, embryos per volume and time in m⁻³s⁻¹; J* its threshold
//	B          kinetic factor of the flux
//
// A critical bubble is an unstable equilibrium: smaller ones collapse, larger
// ones grow. Everything here is homogeneous nucleation; walls, dissolved gas,
// particles and radiation make liquids boil earlier, and the package knows
// nothing of them.
//
// Nothing allocates on the way to a number; values may be used by many
// goroutines at once.
package nucleation
