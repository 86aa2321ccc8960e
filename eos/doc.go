// Package eos computes the thermodynamics of a pure fluid from a cubic equation
// of state: pressure and its derivatives, fugacity and chemical potential, the
// two spinodal branches, vapour–liquid coexistence, and the state (stable,
// metastable, unstable) of a point in the P–v plane.
//
// All equations share one form,
//
//	P = RT/(v − b) − a(T)/((v + δ₁b)(v + δ₂b)),    a(T) = a_c·α(T/Tc),
//
// and an equation is one entry of a table: δ₁, δ₂ and the form of α. Written in
// the reduced variables
//
//	x = v/b,    p = P·b/(RT),    τ = a(T)/(bRT)
//
// temperature enters through τ alone, so that everything about phase stability
// is a function of τ for a given (δ₁, δ₂). The type Form computes in these
// variables; the type Model adds the fluid and the SI units.
//
// Symbols:
//
//	P, T, v   pressure in Pa (absolute; negative for a liquid under tension),
//	          temperature in K, molar volume in m³/mol
//	a, b      attraction parameter in Pa·m⁶/mol², covolume in m³/mol
//	f, μ      fugacity in Pa, chemical potential in J/mol
//	s, t      δ₁ + δ₂ and δ₁·δ₂
//	q         (x + δ₁)(x + δ₂)
//	I         ∫dx/q from x to ∞
//	F         ln(f·b/(RT))
//
// The package keeps to pure fluids below and at their critical point where two
// phases are concerned; it knows no mixtures, no solid, and no transport
// properties. Nothing in it allocates on the way to a number, prints, or keeps
// state; every value may be used by many goroutines at once.
package eos
