package modelfile

import (
	"slices"

	"gonum.org/v1/gonum/mat"

	"limsup/data/fluid"
	"limsup/fit"
)

// Model returns the model of a file, ready to predict, and the records of its
// fluids in the order of the file. The records are those of the file, not copies;
// all else is new.
//
// Errors: Problems for a File that was put together by hand and does not hold
// together; none for one from New or Decode.
func (f *File) Model() (*fit.Model, []*fluid.Record, error) {
	if err := f.check("model file").err(); err != nil {
		return nil, nil, err
	}
	m, err := f.model()
	if err != nil {
		return nil, nil, err
	}
	return m, slices.Clone(f.Fluids), nil
}

// model is Model for a file that was checked.
func (f *File) model() (*fit.Model, error) {
	m := &fit.Model{Variant: f.variant(), Noise: f.noise(), Settings: f.settings(), Calibrated: f.Parameters != nil}
	if m.Calibrated {
		n := len(f.Parameters)
		m.Parameters = make([]fit.Estimate, n)
		m.Covariance = mat.NewSymDense(max(n, 1), nil) // 1×1 zero without parameters, as from a calibration
		for i := range f.Parameters {
			m.Parameters[i] = f.Parameters[i].estimate()
			for j, c := range f.Covariance.LowerTriangle[i] {
				m.Covariance.SetSym(i, j, c)
			}
		}
		m.Degrees = f.Degrees
		m.References = f.references()
		v := f.Validity
		m.Validity = fit.Validity{Fluids: slices.Clone(v.Fluids), Methods: slices.Clone(v.Methods),
			PressureLow: v.Pressure[0], PressureHigh: v.Pressure[1], TemperatureLow: v.Temperature[0], TemperatureHigh: v.Temperature[1]}
	}
	if err := m.Prepare(); err != nil {
		return nil, err
	}
	return m, nil
}

func (f *File) noise() fit.Noise {
	return fit.Noise{Kind: fit.NoiseKind(f.Noise.Kind), Degrees: f.Noise.Degrees}
}

func (f *File) settings() []fit.Setting {
	var out []fit.Setting
	for _, s := range f.Settings {
		out = append(out, fit.Setting(s))
	}
	return out
}

func (f *File) references() map[string]string {
	out := map[string]string{}
	if r := f.OffsetReferences; r != nil {
		for by, g := range map[fit.By]string{fit.ByFluid: r.Fluid, fit.ByMethod: r.Method, fit.ByBatch: r.Batch} {
			if g != "" {
				out[string(by)] = g
			}
		}
	}
	return out
}

func (p *Parameter) estimate() fit.Estimate {
	e := fit.Estimate{Name: p.Name, By: fit.By(p.By), Group: p.Group, Role: fit.Role(p.Role), Unit: p.Unit, Value: p.Value,
		Degrees: p.Degrees, Reason: p.Reason, AtBound: p.AtBound, Start: p.Start, Lower: p.Lower, Upper: p.Upper}
	if p.U != nil {
		e.U, e.HasU = *p.U, true
	}
	return e
}
