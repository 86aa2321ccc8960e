// Package validate judges a calibration: residuals, cross-validation against the
// untuned model on the same folds, and a verdict.
//
// It computes tables of numbers; rendering them is for the callers. Folds run in
// parallel, each writing its own element; sums are taken in row order, so results
// do not depend on the number of processors.
package validate
