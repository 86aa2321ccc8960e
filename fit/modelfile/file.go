package modelfile

import (
	"limsup/data/fluid"
	"limsup/eos"
)

// Format and Version are the first two members of a model file.
const (
	Format  = "limsup-model"
	Version = 1
)

// File is a model file. Fields whose description says "may be absent" are left out
// of the file when they are empty. A file by hand needs Format, Version and
// Equation only; Parameters and what follows from them are those of a calibration.
type File struct {
	Format        string   `json:"format"`
	Version       int      `json:"version"`
	LimsupVersion string   `json:"limsup_version,omitzero"` // that wrote the file; may be absent
	Cautions      []string `json:"cautions,omitzero"`       // may be absent

	Equation Equation  `json:"equation"`
	Options  Options   `json:"options,omitzero"`  // may be absent: the defaults of package fit
	Noise    Noise     `json:"noise,omitzero"`    // may be absent: gaussian
	Settings []Setting `json:"settings,omitzero"` // may be absent

	// Parameters is nil for a model without calibration, not for one without free
	// parameters. The fields below it, up to Fluids, go with it.
	Parameters       []Parameter       `json:"parameters,omitzero"`
	Covariance       *Covariance       `json:"covariance,omitzero"`
	Degrees          int               `json:"degrees_of_freedom,omitzero"`
	OffsetReferences *OffsetReferences `json:"offset_references,omitzero"` // may be absent: no offset by group
	Validity         *Validity         `json:"validity,omitzero"`
	Statistics       *Statistics       `json:"statistics,omitzero"`      // may be absent
	Verdict          string            `json:"verdict,omitzero"`         // may be absent: not cross-validated
	Identifiability  *Identifiability  `json:"identifiability,omitzero"` // may be absent

	Fluids []*fluid.Record `json:"fluids,omitzero"` // in the order of their keys when written by New
	Inputs []Input         `json:"inputs,omitzero"`
	Seed   uint64          `json:"seed"` // 0 if absent
}

// Equation is a built-in equation or, with a definition, one of its own, whose name
// must not be that of a built-in one.
type Equation struct {
	Name string `json:"name"`
	*Definition
}

// Definition defines P = RT/(v−b) − a_c·α/((v+δ₁b)(v+δ₂b)).
type Definition struct {
	Delta1 float64 `json:"delta1"` // δ₁
	Delta2 float64 `json:"delta2"` // δ₂
	Alpha  Alpha   `json:"alpha"`
}

// Alpha is the dependence of the attraction on temperature: n of Tr^(−n) for
// "power"; m₀, m₁, m₂ of (1+m(1−√Tr))², m = m₀ + m₁ω + m₂ω², for "soave".
type Alpha struct {
	Form         eos.AlphaForm `json:"form"`
	Coefficients []float64     `json:"coefficients"`
}

// Options are the words of fit.Variant.
type Options struct {
	Limit          string `json:"limit,omitzero"`
	SurfaceTension string `json:"surface_tension,omitzero"`
	Properties     string `json:"properties,omitzero"`
	EmbryoPressure string `json:"embryo_pressure,omitzero"`
	Kinetics       string `json:"kinetics,omitzero"`
}

// Noise is fit.Noise.
type Noise struct {
	Kind    string  `json:"kind"`
	Degrees float64 `json:"degrees_of_freedom,omitzero"` // of student noise; may be absent
}

// Setting is a parameter that was set instead of tuned.
type Setting struct {
	Name  string  `json:"name"`
	Group string  `json:"group,omitzero"` // absent: every group
	Value float64 `json:"value"`
}

// Parameter is fit.Estimate.
type Parameter struct {
	Name    string   `json:"name"`
	By      string   `json:"by,omitzero"`    // absent for a shared parameter
	Group   string   `json:"group,omitzero"` // absent for a shared one and for the mean and the spread of a pool
	Role    string   `json:"role"`
	Value   float64  `json:"value"`
	Unit    string   `json:"unit"`                        // UCUM
	U       *float64 `json:"standard_uncertainty"`        // null where there is none, for the reason
	Degrees float64  `json:"degrees_of_freedom,omitzero"` // of the square of U; may be absent
	Reason  string   `json:"reason,omitzero"`
	AtBound string   `json:"at_bound,omitzero"` // "lower" or "upper"
	Lower   float64  `json:"lower"`
	Upper   float64  `json:"upper"`
	Start   float64  `json:"start"`
}

// Covariance of the parameters, n×n: row i of the lower triangle has i+1 numbers.
// Rows of parameters without an uncertainty are zero.
type Covariance struct {
	Labels        []string    `json:"labels"` // of the parameters, in their order
	LowerTriangle [][]float64 `json:"lower_triangle"`
}

// OffsetReferences are the groups whose offset is zero by definition.
type OffsetReferences struct {
	Fluid  string `json:"fluid,omitzero"`
	Method string `json:"method,omitzero"`
	Batch  string `json:"batch,omitzero"`
}

// Validity is what the rows of the calibration covered.
type Validity struct {
	Fluids      []string   `json:"fluids"`
	Methods     []string   `json:"methods"`
	Pressure    [2]float64 `json:"pressure_Pa"`   // lowest, highest
	Temperature [2]float64 `json:"temperature_K"` // lowest, highest
}

// Statistics summarise the calibration.
type Statistics struct {
	RowsUsed        int              `json:"rows_used"`
	RowsExcluded    int              `json:"rows_excluded"`
	RMSE            float64          `json:"rmse_K"`
	Bias            float64          `json:"bias_K"`
	Spread          float64          `json:"spread_K"`
	LogLikelihood   float64          `json:"log_likelihood"`
	CrossValidation *CrossValidation `json:"cross_validation,omitzero"` // may be absent
}

// CrossValidation compares the tuned with the untuned model on left-out rows.
type CrossValidation struct {
	Folds        string  `json:"folds"` // "rows", "fluid", "method", "batch", "pressure", or a number of parts
	RMSE         float64 `json:"rmse_K"`
	UntunedRMSE  float64 `json:"untuned_rmse_K"`
	Difference   float64 `json:"difference_K"` // RMSE − UntunedRMSE: negative is better
	DifferenceSE float64 `json:"difference_se_K"`
}

// Identifiability says how well the data tell the parameters apart.
type Identifiability struct {
	Condition float64  `json:"condition,omitzero"` // of the scaled derivatives, ≥ 1; absent without free locations
	Warnings  []string `json:"warnings"`
}

// Input is a file of measurements.
type Input struct {
	File   string `json:"file"`   // its name without folders
	SHA256 string `json:"sha256"` // of its bytes, 64 hexadecimal digits in lower case
}
