// Package plot builds the figures of a calibration as data: which series, on which
// axes, with which words. Package plot/svg writes them into a page, package
// plot/draw into a file; both read the same Figure, so that they cannot differ in
// a number.
//
// The kinds of figure:
//
//	map          saturation line, spinodal and limit of a fluid in the T–P plane, with measurements
//	residuals    measured less predicted, against pressure, reduced temperature and method
//	prediction   predicted against measured limits
//	flux         nucleation flux against temperature, with its threshold
//	isotherm     pressure against volume, with binodal and spinodals
//	potential    chemical potential against pressure along the same isotherm
//	embryo       free energy of formation against radius
//	profile      how fast the likelihood falls away from each estimate
//	correlation  correlations of the estimates
//
// Symbols and units on the axes, written as quantity/unit:
//
//	T, P    temperature in K, absolute pressure in MPa
//	v       molar volume in cm³/mol
//	μ       chemical potential in J/mol, counted from saturation
//	lg J    decimal logarithm of the flux in m⁻³s⁻¹
//	r, ΔG   radius in nm, free energy of formation in units of kT
//
// Every number in a Figure is finite. What could not be drawn is said in its Notes;
// nothing is clipped or thinned out in silence. Of more than Many rows, the Listed
// ones that are farthest off are points, the others a crowd, and the Notes say so.
//
// The package neither draws nor writes files, and chooses no colour by itself
// except by role; see Palette.
package plot
