package export

import (
	"fmt"
	"io"
	"math"
	"slices"

	"limsup/data/fluid"
	"limsup/fit"
	"limsup/fit/export/internal/kernel"
)

// Form names what a model is written as.
type Form string

// The forms.
const (
	Parameters Form = "parameters"
	Table      Form = "table"
	Series     Form = "series"
	C          Form = "c"
	Fortran    Form = "fortran"
	Python     Form = "python"
	Octave     Form = "octave"
	Modelica   Form = "modelica"
)

// Forms lists the forms in their order.
func Forms() []Form {
	return []Form{Parameters, Table, Series, C, Fortran, Python, Octave, Modelica}
}

// Input is a file that a number comes from.
type Input struct {
	File   string // its name without folders
	SHA256 string // 64 hexadecimal digits
}

// Options of an export. The zero value of a field is its default.
type Options struct {
	Records       []*fluid.Record // the fluids, at least one
	Method, Batch string          // whose parameters and offset are used; "": the reference
	// From and To are the range of absolute pressure in Pa. Both 0: that of the
	// calibration, else 0.1 MPa to 0.9 of the lowest critical pressure.
	From, To  float64
	Tolerance float64 // of table and series in K; 0: 0.01
	Prefix    string  // of names in source code; "": "limsup_"
	// Provenance
	Version  string // of limsup
	Inputs   []Input
	Verdict  string // of the cross-validation
	Cautions []string
}

const (
	defaultTolerance = 0.01
	defaultPrefix    = "limsup_"
	// defaultTop is the part of the critical pressure to which an untuned model is
	// exported: beyond, limit and critical temperature all but coincide. defaultBottom, in
	// Pa, is about that of the air.
	defaultTop    = 0.9
	defaultBottom = 1e5
)

// subject is what is exported.
type subject struct {
	model      *fit.Model
	o          Options
	low, high  float64
	rangeGiven bool
}

// Write writes a model in a form. It does not change the model.
//
// Errors: *OptionError, *FluidError with the error of the physics, *UnsupportedError,
// *ToleranceError, those of w.
func Write(w io.Writer, form Form, m *fit.Model, o Options) error {
	s, err := newSubject(m, o)
	if err != nil {
		return err
	}
	switch form {
	case Parameters:
		return s.parameters(w)
	case Table:
		return s.table(w)
	case Series:
		return s.series(w)
	case C, Fortran, Python, Octave, Modelica:
		return s.source(w, form)
	}
	return &OptionError{"as", string(form), fmt.Sprint("one of ", Forms())}
}

func newSubject(m *fit.Model, o Options) (*subject, error) {
	s := &subject{model: m, o: o}
	if len(o.Records) == 0 {
		return nil, &OptionError{"fluid", "", "at least one"}
	}
	for i, r := range o.Records {
		if slices.ContainsFunc(o.Records[:i], func(p *fluid.Record) bool { return p.Key == r.Key }) {
			return nil, &OptionError{"fluid", r.Key, "each fluid once"}
		}
	}
	if s.o.Tolerance == 0 {
		s.o.Tolerance = defaultTolerance
	}
	if !(s.o.Tolerance > 0 && s.o.Tolerance < 1e3) {
		return nil, &OptionError{"tolerance", number(s.o.Tolerance) + " K", "more than 0 K and less than 1000 K"}
	}
	if s.o.Prefix == "" {
		s.o.Prefix = defaultPrefix
	}
	if !legalPrefix(s.o.Prefix) {
		return nil, &OptionError{"prefix", s.o.Prefix, "a lower-case letter, then up to 22 letters, digits or single underscores in lower case, ending in an underscore: legal in every language"}
	}
	return s, s.setRange()
}

// legalPrefix accepts what begins a name in every language, Fortran included, which
// tells no case apart. The underscore at the end keeps names off all keywords.
func legalPrefix(p string) bool {
	if len(p) < 2 || len(p) > 24 || p[len(p)-1] != '_' || !(p[0] >= 'a' && p[0] <= 'z') {
		return false
	}
	for i := 1; i < len(p); i++ {
		if b := p[i]; !(b >= 'a' && b <= 'z' || b >= '0' && b <= '9' || b == '_' && p[i-1] != '_') {
			return false
		}
	}
	return true
}

func (s *subject) setRange() error {
	s.low, s.high = s.o.From, s.o.To
	s.rangeGiven = s.low != 0 || s.high != 0
	switch {
	case s.rangeGiven:
	case s.model.Calibrated && s.model.Validity.PressureLow <= s.model.Validity.PressureHigh:
		s.low, s.high = s.model.Validity.PressureLow, s.model.Validity.PressureHigh
	default:
		s.high = math.Inf(1)
		for _, r := range s.o.Records {
			s.high = math.Min(s.high, defaultTop*r.CriticalPressure.Value)
		}
		s.low = math.Min(defaultBottom, 0.1*s.high)
	}
	if !(math.Abs(s.low) <= 1e15 && math.Abs(s.high) <= 1e15 && s.low <= s.high) {
		return &OptionError{"range of pressure", number(s.low) + " Pa to " + number(s.high) + " Pa", "a lower end that is not above the upper one"}
	}
	return nil
}

// query asks for the limit of a fluid at a pressure.
func (s *subject) query(r *fluid.Record, P float64) fit.Query {
	return fit.Query{Record: r, Pressure: P, Method: s.o.Method, Batch: s.o.Batch}
}

// expected is a prediction in the terms of exported code.
type expected struct {
	P, T, U float64
	HasU    bool
	Status  int
	// spinodal and saturation, where they exist
	Spinodal, Saturation float64
	HasSpinodal, HasSat  bool
}

// at predicts the limit of a fluid at a pressure.
func (s *subject) at(r *fluid.Record, P float64) expected {
	p, err := s.model.Predict(s.query(r, P))
	if err != nil {
		return expected{P: P, Status: statusOf(err)}
	}
	return expected{P: P, T: p.Temperature, U: p.U, HasU: p.HasU, Status: kernel.Fine,
		Spinodal: p.SpinodalT, HasSpinodal: p.HasSpinodal, Saturation: p.SaturationT, HasSat: p.HasSaturation}
}
