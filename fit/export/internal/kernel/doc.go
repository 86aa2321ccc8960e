// Package kernel is the computation that exported source code carries: limit of
// superheat, spinodal, saturation, flux and standard uncertainty of one fluid from a
// row of constants.
//
// It repeats what packages eos, eos/tension and eos/nucleation do, in a form without
// structs, interfaces, closures and errors, so that package translate can print it in
// other languages. All that distinguishes fluids and models is in the row c, whose
// columns layout.go names. Where a formula comes from is said there; here only the
// methods of search are simpler: every root is bracketed first.
//
// Symbols: t temperature in K; p pressure in Pa, or reduced, P·b/(RT), where it goes
// with x; x = v/b; tau = a/(bRT); c the row of constants. Functions have one unnamed
// result, or several named ones. There is no shadowing, no continue, no use of the
// order of && and ||, no division by what can be zero and no exponential that can
// overflow: not every language forgives them.
package kernel

import "embed"

// Sources are the files that are translated, in the order of their names.
//
//go:embed k_*.go
var Sources embed.FS

// NoAnswer is returned for a number that does not exist, beside a status or a flag.
func NoAnswer() float64 { return noAnswer() }
