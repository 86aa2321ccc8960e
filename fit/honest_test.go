package fit_test

import (
	"errors"
	"fmt"
	"math"
	"reflect"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"limsup/data/fluid"
	"limsup/eos"
	"limsup/eos/nucleation"
	"limsup/eos/tension"
	"limsup/fit"
)

// notFinite names the first number of v that is NaN or infinite, or "".
func notFinite(name string, v reflect.Value) string {
	switch v.Kind() {
	case reflect.Float64:
		if x := v.Float(); math.IsNaN(x) || math.IsInf(x, 0) {
			return fmt.Sprintf("%s = %g", name, x)
		}
	case reflect.Struct:
		for i := range v.NumField() {
			if s := notFinite(name+"."+v.Type().Field(i).Name, v.Field(i)); s != "" {
				return s
			}
		}
	case reflect.Array, reflect.Slice:
		for i := range v.Len() {
			if s := notFinite(fmt.Sprintf("%s[%d]", name, i), v.Index(i)); s != "" {
				return s
			}
		}
	}
	return ""
}

// promised tells whether an error of Predict says that there is no answer, or why none
// can be had.
func promised(err error) bool {
	var (
		noLimit     *nucleation.NoLimitError
		state       *nucleation.StateError
		metastable  *nucleation.NotMetastableError
		domain      *eos.DomainError
		phase       *eos.PhaseError
		parameter   *eos.ParameterError
		unavailable *fit.UnavailableError
		missing     *fluid.MissingError
		bad         *tension.ParameterError
		outside     *fluid.RangeError
		negative    *tension.NonPositiveError
		above       *tension.RangeError
	)
	return errors.As(err, &noLimit) || errors.As(err, &state) || errors.As(err, &metastable) || errors.As(err, &domain) || errors.As(err, &phase) ||
		errors.As(err, &parameter) || errors.As(err, &unavailable) || errors.As(err, &missing) || errors.As(err, &bad) || errors.As(err, &outside) || errors.As(err, &negative) || errors.As(err, &above)
}

// TestPredictIsHonest predicts for every fluid under drawn variants and parameters at
// drawn states, absurd ones included: a finite prediction, or an error with a type that
// names the fluid.
func TestPredictIsHonest(t *testing.T) {
	all := library(t).All()
	found := 0
	rapid.Check(t, func(t *rapid.T) {
		v := fit.Variant{Equation: rapid.SampledFrom(eos.EquationNames()).Draw(t, "equation"), Limit: rapid.SampledFrom([]fit.Limit{fit.Kinetic, fit.Kinetic, fit.Spinodal}).Draw(t, "limit"),
			Tension:  rapid.SampledFrom([]fit.Tension{fit.TensionCorrelation, fit.CorrespondingStates, fit.TensionFromParachor}).Draw(t, "tension"),
			Kinetics: rapid.SampledFrom([]nucleation.Kinetics{nucleation.Mechanical, nucleation.Chemical, nucleation.Stepwise}).Draw(t, "kinetics")}
		if v.Limit == fit.Kinetic {
			v.Properties = rapid.SampledFrom([]nucleation.Properties{nucleation.FromEquation, nucleation.FromCorrelation}).Draw(t, "properties")
		}
		set := []fit.Setting{{Name: fit.Attraction, Value: rapid.Float64Range(0.7, 1.3).Draw(t, "attraction")}, {Name: fit.Slope, Value: rapid.Float64Range(-1, 3).Draw(t, "slope")}}
		if v.Properties == nucleation.FromCorrelation {
			set = nil
		}
		if v.Limit == fit.Kinetic {
			set = append(set, fit.Setting{Name: fit.Threshold, Value: rapid.Float64Range(0, 35).Draw(t, "threshold")}, fit.Setting{Name: fit.Tolman, Value: rapid.Float64Range(-0.5, 0.5).Draw(t, "tolman")},
				fit.Setting{Name: fit.SurfaceTension, Value: rapid.Float64Range(0.5, 1.5).Draw(t, "factor")})
		}
		m, err := fit.Untuned(v, set...)
		if err != nil {
			var option *fit.OptionError
			if !errors.As(err, &option) {
				t.Fatal(err)
			}
			return
		}
		r := rapid.SampledFrom(all).Draw(t, "fluid")
		q := fit.Query{Record: r, OrSpinodal: rapid.Bool().Draw(t, "or spinodal")}
		if q.AtTemperature = rapid.Bool().Draw(t, "at temperature"); q.AtTemperature {
			q.Temperature = rapid.OneOf(rapid.Float64Range(0.3*r.CriticalTemperature.Value, r.CriticalTemperature.Value), rapid.Float64()).Draw(t, "T")
		} else {
			q.Pressure = rapid.OneOf(rapid.Float64Range(-r.CriticalPressure.Value, r.CriticalPressure.Value), rapid.Float64()).Draw(t, "P")
		}
		p, err := m.Predict(q)
		var lost *nucleation.ConvergenceError
		if errors.As(err, &lost) {
			// Far beyond what a liquid bears a search may end without an answer; it says so, with
			// equation, state and bracket.
			if ordinary := !q.AtTemperature && math.Abs(q.Pressure) <= r.CriticalPressure.Value; ordinary || lost.Equation == "" || !(lost.Lo <= lost.Hi) || !strings.Contains(err.Error(), lost.Equation) {
				t.Fatalf("%v (%+v)", err, lost)
			}
			return
		}
		if err != nil {
			if !promised(err) {
				t.Fatalf("%v (%T)", err, err)
			}
			if !strings.Contains(err.Error(), r.Key) {
				t.Fatalf("%v: does not name %s", err, r.Key)
			}
			return
		}
		found++
		if s := notFinite("prediction", reflect.ValueOf(p)); s != "" {
			t.Fatalf("%s: %+v", s, p)
		}
		if !(p.Temperature > 0 && p.Temperature < 2*r.CriticalTemperature.Value) {
			t.Fatalf("%+v", p)
		}
	})
	t.Logf("%d predictions", found)
	if found < 5 { // of 100 draws, or of 20 with -short
		t.Errorf("only %d predictions: hardly tried", found)
	}
}
