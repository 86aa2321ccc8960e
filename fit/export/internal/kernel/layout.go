package kernel

// Column describes a column of the row of constants.
type Column struct {
	Index int
	Name  string
	Unit  string // UCUM
}

// Columns lists the fixed columns in their order; coefficients of correlations and
// the rule of the stepwise sum follow them.
func Columns() []Column {
	return []Column{
		{KDelta1, "delta1 of the equation of state", "1"},
		{KDelta2, "delta2 of the equation of state", "1"},
		{KXc, "critical x", "1"},
		{KTauc, "critical tau", "1"},
		{KX0, "x of the liquid spinodal at zero pressure", "1"},
		{KTau0, "tau there", "1"},
		{KKappa, "curvature of the spinodal at the critical point", "1"},
		{KB, "covolume b, tuned", "m3/mol"},
		{KTref, "reference temperature of alpha(T)", "K"},
		{KTau1, "tau at the reference temperature, tuned", "1"},
		{KAlpha, "alpha: 1 = (T/Tref)^(-n), 2 = (1+m(1-sqrt(T/Tref)))^2", ""},
		{KSlope, "n or m, tuned", "1"},
		{KDSlope, "change of n or m per unit of the parameter slope", "1"},
		{KTc, "critical temperature of the tuned equation", "K"},
		{KPc, "critical pressure of the tuned equation", "Pa"},
		{KMinT, "lowest temperature of two phases", "K"},
		{KAttraction, "factor on the attraction", "1"},
		{KCovolume, "factor on the covolume", "1"},
		{KMass, "molar mass", "kg/mol"},
		{KSigma, "factor on the surface tension", "1"},
		{KTolman, "Tolman length", "m"},
		{KPrefactor, "decades added to log10 of the flux", "1"},
		{KThreshold, "log10 of the threshold flux in m-3.s-1", "1"},
		{KOffset, "offset of the method", "K"},
		{KSpread, "variance of a reading about the limit", "K2"},
		{KHasU, "1: an uncertainty is known", ""},
		{KCold, "lowest temperature of all properties", "K"},
		{KHot, "highest temperature of all properties", "K"},
		{KLow, "lowest pressure of the stated range", "Pa"},
		{KHigh, "highest pressure of the stated range", "Pa"},
		{KLimit, "limit: 1 = kinetic, 2 = spinodal", ""},
		{KProperties, "properties: 1 = equation of state, 2 = correlations", ""},
		{KEmbryo, "embryo pressure: 1 = exact, 2 = Poynting", ""},
		{KKinetics, "kinetics: 1 = mechanical, 2 = chemical, 3 = stepwise", ""},
		{KTension, "surface tension: 1 = sum of powers, 2 = DIPPR 106, 3 = parachor", ""},
		{KTensionTc, "temperature at which the tension vanishes", "K"},
		{KTensionLow, "temperature at and below which the tension is not positive", "K"},
		{KTensionHigh, "temperature at and above which the tension is not positive", "K"},
		{KTensionAt, "first column of its coefficients (from 0)", ""},
		{KTensionCount, "number of its terms", ""},
		{KVapour, "vapour pressure: 1 = table, 2 = Wagner", ""},
		{KVapourLow, "lowest temperature of the vapour pressure", "K"},
		{KVapourHigh, "highest temperature of the vapour pressure", "K"},
		{KVapourAt, "first column of its coefficients (from 0)", ""},
		{KVapourCount, "number of its rows or terms", ""},
		{KDensity, "liquid density: 1 = table, 2 = Rackett", ""},
		{KDensityTc, "its critical temperature", "K"},
		{KDensityAt, "first column of its coefficients (from 0)", ""},
		{KDensityCount, "number of its rows", ""},
		{KRule, "first column of the rule of integration (from 0): nodes, then weights", ""},
		{KRuleCount, "number of its positive nodes", ""},
		{KCovariance, "first of 36 columns: lower triangle of the covariance of threshold, prefactor, attraction, covolume, slope, surface tension, Tolman length in nm, offset in K", ""},
	}
}

// Options are the columns that choose between branches. Where all rows agree, the
// other branches are left out of a translation.
func Options() []int {
	return []int{KAlpha, KHasU, KLimit, KProperties, KEmbryo, KKinetics, KTension, KVapour, KDensity}
}
