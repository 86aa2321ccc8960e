package kernel

// Columns of the row of constants; layout.go describes them.
const (
	KDelta1       = 0
	KDelta2       = 1
	KXc           = 2
	KTauc         = 3
	KX0           = 4
	KTau0         = 5
	KKappa        = 6
	KB            = 7
	KTref         = 8
	KTau1         = 9
	KAlpha        = 10
	KSlope        = 11
	KDSlope       = 12
	KTc           = 13
	KPc           = 14
	KMinT         = 15
	KAttraction   = 16
	KCovolume     = 17
	KMass         = 18
	KSigma        = 19
	KTolman       = 20
	KPrefactor    = 21
	KThreshold    = 22
	KOffset       = 23
	KSpread       = 24
	KHasU         = 25
	KCold         = 26
	KHot          = 27
	KLow          = 28
	KHigh         = 29
	KLimit        = 30
	KProperties   = 31
	KEmbryo       = 32
	KKinetics     = 33
	KTension      = 34
	KTensionTc    = 35
	KTensionLow   = 36
	KTensionHigh  = 37
	KTensionAt    = 38
	KTensionCount = 39
	KVapour       = 40
	KVapourLow    = 41
	KVapourHigh   = 42
	KVapourAt     = 43
	KVapourCount  = 44
	KDensity      = 45
	KDensityTc    = 46
	KDensityAt    = 47
	KDensityCount = 48
	KRule         = 49
	KRuleCount    = 50
	KCovariance   = 51
	KFixed        = 87 // number of fixed columns
)

// Values of the columns that choose.
const (
	PowerAlpha, SoaveAlpha                             = 1, 2
	KineticLimit, SpinodalLimit                        = 1, 2
	ByEquation, ByCorrelation                          = 1, 2
	ExactEmbryo, PoyntingEmbryo                        = 1, 2
	MechanicalKinetics, ChemicalKinetics, StepKinetics = 1, 2, 3
	PowerSum, DIPPR106, Parachor                       = 1, 2, 3
	Table, ClosedForm                                  = 1, 2
)

// Status of an answer.
const (
	Fine         = 0
	OutOfRange   = 1 // the pressure is outside the stated range
	NoLimit      = 2 // the flux stays below the threshold up to the spinodal
	NoState      = 3 // outside the domain of the equation or of a correlation
	NotConverged = 4
	NoFluid      = 5
)

// Constants of the SI, exact.
const (
	boltzmann   = 1.380649e-23     // J/K
	avogadro    = 6.02214076e23    // 1/mol
	gasConstant = 8.31446261815324 // J/(mol.K)
	ln10        = 2.302585092994046
	pi          = 3.141592653589793
)
