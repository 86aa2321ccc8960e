// Package validate judges calibrations: residuals by row and by group, prediction of
// rows that were left out of the tuning, coverage of prediction intervals, tests for
// trend and normality, and the comparison of many variants on the same rows.
//
// Symbols and units:
//
//	e    residual, measured − predicted limit, K
//	h    leverage: share of a row's own reading in its prediction, 1
//	u    standard uncertainty of a residual, K
//	n    rows that boiled
//	k    free parameters: locations, and one for the spread
//	ρ    Spearman's rank correlation, 1
//	W    statistic of Shapiro and Wilk, 1
//
// Rows with outcome intact are bounds, not readings: they are predicted and listed,
// and enter no error, bias, coverage or test.
//
// The package computes numbers and sentences; rendering them is for the callers.
// Independent jobs run in parallel, each writing its own element, and sums are taken
// afterwards in row order, so that results do not depend on the number of processors.
// It does not choose for the user: a ranking states which of its members the data
// cannot tell apart.
package validate
