// Package translate prints a small subset of Go in other languages: C, Fortran,
// Python, Octave and Modelica.
//
// The subset is that of package kernel: functions over float64, int, bool, one slice
// of constants and arrays of float64; if, counted for, break, return; calls, and
// math functions that every language has. Branches on constants known beforehand are
// decided, functions that are not reached are left out. What is outside the subset is
// an error of the kernel, reported with its position, never printed half.
package translate
