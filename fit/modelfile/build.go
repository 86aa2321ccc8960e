package modelfile

import (
	"path/filepath"
	"slices"
	"strings"

	"limsup/data/caution"
	"limsup/data/fluid"
	"limsup/eos"
	"limsup/eos/nucleation"
	"limsup/fit"
)

// Meta is what a model file tells beside the model.
type Meta struct {
	Version string // of limsup
	Seed    uint64
	Inputs  []Input // folders in their names are left out
	// Statistics, Verdict and Identifiability belong to a calibration and are
	// ignored for a model without one.
	Statistics      Statistics
	Verdict         string // "better", "no measurable gain", "worse", or "" if not cross-validated
	Identifiability Identifiability
	// Cautions stand beside those of every model file.
	Cautions []string
}

// New gathers a model, the records of its fluids and what is known about it. The
// records are kept, not copied; they are put in the order of their keys.
//
// Errors: Problems, each an *InvalidError with the place in the file to be.
func New(m *fit.Model, records []*fluid.Record, meta Meta) (*File, error) {
	v := &m.Variant
	f := &File{
		Format: Format, Version: Version, LimsupVersion: meta.Version, Cautions: append(caution.Sentences(), meta.Cautions...),
		Equation: newEquation(v),
		Options: Options{Limit: string(v.Limit), SurfaceTension: string(v.Tension), Properties: string(v.Properties),
			EmbryoPressure: string(v.EmbryoPressure), Kinetics: string(v.Kinetics)},
		Noise: Noise{Kind: string(m.Noise.Kind), Degrees: m.Noise.Degrees},
		Seed:  meta.Seed,
	}
	f.Settings = lastSettings(m.Settings)
	f.Fluids = slices.Clone(records)
	slices.SortStableFunc(f.Fluids, func(a, b *fluid.Record) int { return strings.Compare(key(a), key(b)) })
	for _, in := range meta.Inputs {
		f.Inputs = append(f.Inputs, Input{File: filepath.Base(in.File), SHA256: in.SHA256})
	}
	if m.Calibrated {
		f.calibration(m, &meta)
	}
	if _, err := f.text("model file"); err != nil {
		return nil, err
	}
	return f, nil
}

// lastSettings drops each setting that a later one of the same parameter and group
// replaces.
func lastSettings(all []fit.Setting) []Setting {
	var out []Setting
	for i, s := range all {
		if !slices.ContainsFunc(all[i+1:], func(t fit.Setting) bool { return t.Name == s.Name && t.Group == s.Group }) {
			out = append(out, Setting(s))
		}
	}
	return out
}

// key is "" for a record that is missing, which the check then reports.
func key(r *fluid.Record) string {
	if r == nil {
		return ""
	}
	return r.Key
}

func newEquation(v *fit.Variant) Equation {
	e := Equation{Name: v.Equation}
	if c := v.Custom; c != nil {
		e.Definition = &Definition{Delta1: c.D1, Delta2: c.D2, Alpha: Alpha{Form: c.Alpha, Coefficients: []float64{c.Exponent}}}
		if c.Alpha == eos.AlphaSoave {
			e.Alpha.Coefficients = slices.Clone(c.Slope[:])
		}
	}
	return e
}

// calibration fills what a model without calibration does not have.
func (f *File) calibration(m *fit.Model, meta *Meta) {
	n := len(m.Parameters)
	f.Parameters = make([]Parameter, n)
	f.Covariance = &Covariance{Labels: make([]string, n), LowerTriangle: make([][]float64, n)}
	for i := range m.Parameters {
		e := &m.Parameters[i]
		p := Parameter{Name: e.Name, By: string(e.By), Group: e.Group, Role: string(e.Role), Value: e.Value, Unit: e.Unit,
			Degrees: e.Degrees, Reason: e.Reason, AtBound: e.AtBound, Lower: e.Lower, Upper: e.Upper, Start: e.Start}
		switch u := e.U; {
		case e.HasU:
			p.U = &u
		case p.Reason == "":
			p.Reason = "not estimated"
		}
		f.Parameters[i], f.Covariance.Labels[i] = p, e.Label()
		row := make([]float64, i+1)
		for j := range row {
			if m.Covariance != nil && i < m.Covariance.SymmetricDim() {
				row[j] = m.Covariance.At(i, j)
			}
		}
		f.Covariance.LowerTriangle[i] = row
	}
	f.Degrees = m.Degrees
	if r := m.References; len(r) > 0 {
		f.OffsetReferences = &OffsetReferences{Fluid: r[string(fit.ByFluid)], Method: r[string(fit.ByMethod)], Batch: r[string(fit.ByBatch)]}
	}
	v := &m.Validity
	f.Validity = &Validity{Fluids: notNil(v.Fluids), Methods: notNil(v.Methods),
		Pressure: [2]float64{v.PressureLow, v.PressureHigh}, Temperature: [2]float64{v.TemperatureLow, v.TemperatureHigh}}
	s := meta.Statistics
	f.Statistics, f.Verdict = &s, meta.Verdict
	f.Identifiability = &Identifiability{Condition: meta.Identifiability.Condition, Warnings: notNil(meta.Identifiability.Warnings)}
}

// notNil is a copy that JSON writes as an array even if it is empty.
func notNil(s []string) []string { return append([]string{}, s...) }

// variant is the variant of a file, not completed.
func (f *File) variant() fit.Variant {
	o := &f.Options
	v := fit.Variant{Equation: f.Equation.Name, Limit: fit.Limit(o.Limit), Tension: fit.Tension(o.SurfaceTension),
		Properties: nucleation.Properties(o.Properties), EmbryoPressure: nucleation.EmbryoPressure(o.EmbryoPressure), Kinetics: nucleation.Kinetics(o.Kinetics)}
	if d := f.Equation.Definition; d != nil {
		c := eos.Equation{Name: f.Equation.Name, D1: d.Delta1, D2: d.Delta2, Alpha: d.Alpha.Form}
		if c.Alpha == eos.AlphaSoave {
			copy(c.Slope[:], d.Alpha.Coefficients)
		} else if len(d.Alpha.Coefficients) > 0 {
			c.Exponent = d.Alpha.Coefficients[0]
		}
		v.Custom = &c
	}
	return v
}
