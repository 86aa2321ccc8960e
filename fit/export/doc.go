// Package export carries a model out of limsup: as lists of numbers (parameters, a
// table of limits, Chebyshev series) and as source code that holds the whole
// computation, in C, Fortran, Python, Octave and Modelica.
//
// The code of all five languages is one program: package kernel, whose branches that the
// model does not use are left out and which package translate prints. The constants of
// each fluid stand in one row. Exported code answers with the same limit to 1e-6 K (the
// tests compile and run it) and carries expected values to check itself.
//
// Temperatures are in K, pressures in Pa, absolute. Everything is deterministic: the same
// model gives the same bytes. The package does not write files, and it does not invent
// numbers: where the model has no answer, table and code say so.
package export
