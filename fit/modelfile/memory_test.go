package modelfile

import (
	"bytes"
	"errors"
	"math"
	"strings"
	"testing"

	"limsup/data/fluid"
	"limsup/fit"
)

// Files changed in memory, in more than one place at once.
func TestChangedFiles(t *testing.T) {
	for _, tt := range []struct {
		name, want string
		change     func(f *File)
	}{
		{"nothing changed", "", func(*File) {}},
		{"covariance of a known parameter", "/covariance/lower_triangle: found a matrix with a negative eigenvalue", func(f *File) {
			*f.Parameters[1].U, f.Covariance.LowerTriangle[1][1] = 0, 0
		}},
		{"known parameter", "", func(f *File) {
			*f.Parameters[1].U, f.Covariance.LowerTriangle[1] = 0, []float64{0, 0}
		}},
		{"infinite covariance", "/covariance/lower_triangle/1/0: found +Inf, expected a finite number", func(f *File) {
			f.Covariance.LowerTriangle[1][0] = math.Inf(1)
		}},
		{"not a number", "/parameters/0/start: found NaN, expected a finite number", func(f *File) { f.Parameters[0].Start = math.NaN() }},
		{"infinite bound", "/parameters/0/lower: found bounds 0 and +Inf", func(f *File) { f.Parameters[0].Upper = math.Inf(1) }},
		{"at the lower bound in name", `/parameters/4/at_bound: found "lower" with the value 1.5`, func(f *File) { f.Parameters[4].AtBound = "lower" }},
		{"at the lower bound", "", func(f *File) { f.Parameters[4].AtBound, f.Parameters[4].Value = "lower", 0.5 }},
		{"spread of a pool below zero", "/parameters/6/value: found -0.04, expected at least 0", func(f *File) {
			f.Parameters[6].Lower, f.Parameters[6].Value = -1, -0.04
		}},
		{"reference fluid without record", `/offset_references/fluid: found "fluid-c", expected a fluid with a record under /fluids`, func(f *File) {
			f.OffsetReferences = &OffsetReferences{Fluid: "fluid-c"}
			f.Parameters[5].By, f.Parameters[5].Group = "fluid", "fluid-a"
			f.Covariance.Labels[5] = "offset[fluid-a]"
		}},
		{"reference fluid", "", func(f *File) {
			f.OffsetReferences = &OffsetReferences{Fluid: "fluid-b"}
			f.Parameters[5].By, f.Parameters[5].Group = "fluid", "fluid-a"
			f.Covariance.Labels[5] = "offset[fluid-a]"
		}},
		{"no validity", "/validity: found nothing, expected the validity of the calibration", func(f *File) { f.Validity = nil }},
		{"no covariance", "/covariance: found nothing, expected the covariance of the parameters", func(f *File) { f.Covariance = nil }},
		{"no fluids at all", "", func(f *File) {
			*f = File{Format: Format, Version: Version, Equation: Equation{Name: "soave"}, Fluids: []*fluid.Record{}}
		}},
	} {
		t.Run(tt.name, func(t *testing.T) {
			f, err := Decode(bytes.NewReader(golden(t)), "x")
			if err != nil {
				t.Fatal(err)
			}
			tt.change(f)
			_, _, err = f.Model()
			message := ""
			if err != nil {
				var invalid *InvalidError
				if !errors.As(err, &invalid) {
					t.Fatalf("%#v", err)
				}
				message = strings.TrimPrefix(invalid.Error(), "model file: ")
			}
			if !strings.HasPrefix(message, tt.want) || (message == "") != (tt.want == "") {
				t.Errorf("got %q, want %q", message, tt.want)
			}
			var b bytes.Buffer
			if encoded := f.Encode(&b); (encoded == nil) != (err == nil) {
				t.Errorf("Model says %v, Encode says %v", err, encoded)
			}
		})
	}
}

// Of several values of one setting the last one counts in package fit, so that one
// is written.
func TestLastSettingIsWritten(t *testing.T) {
	m, err := fit.Untuned(fit.DefaultVariant(), fit.Setting{Name: fit.Threshold, Value: 10}, fit.Setting{Name: fit.Tolman, Value: 0.1}, fit.Setting{Name: fit.Threshold, Value: 11})
	if err != nil {
		t.Fatal(err)
	}
	f, err := New(m, nil, Meta{})
	if err != nil {
		t.Fatal(err)
	}
	if len(f.Settings) != 2 || f.Settings[0] != (Setting{Name: fit.Tolman, Value: 0.1}) || f.Settings[1] != (Setting{Name: fit.Threshold, Value: 11}) {
		t.Errorf("settings %+v", f.Settings)
	}
	read, _, err := f.Model()
	if err != nil {
		t.Fatal(err)
	}
	q := fit.Query{Record: syntheticRecord("fluid-a", 470)}
	if got, want := read.Values(&q), m.Values(&q); got != want {
		t.Errorf("values %+v, want %+v", got, want)
	}
}

func TestTextIsWrittenAsItIs(t *testing.T) {
	f := &File{Format: Format, Version: Version, Equation: Equation{Name: "soave"}, LimsupVersion: "<é & 1>", Cautions: []string{"[\n  1,\n  2\n]"}}
	b := encode(t, f)
	for _, want := range []string{`"<é & 1>"`, `"[\n  1,\n  2\n]"`, "\n  \"seed\": 0\n}\n"} {
		if !strings.Contains(string(b), want) {
			t.Errorf("no %s in\n%s", want, b)
		}
	}
}
