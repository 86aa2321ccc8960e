package modelfile

import (
	"bytes"
	"errors"
	"fmt"
	"strings"
	"testing"

	"limsup/data/fluid"
	"limsup/data/schema"
	"limsup/eos"
	"limsup/fit"
)

// mutations are the golden file with one text replaced by another, and what the
// first error says.
var mutations = []struct{ name, old, new, want string }{
	// text
	{"cut off", "\"seed\": 1\n}\n", "\"seed\": 1\n", "273:1: unexpected end of JSON input"},
	{"stray comma", `"seed": 1`, `"seed": 1,`, "273:1: invalid character '}' looking for beginning of object key string"},
	{"NaN", `"bias_K": -0.05`, `"bias_K": NaN`, "168:15: invalid character 'N' looking for beginning of value"},
	{"key twice", `"seed": 1`, `"seed": 1, "seed": 2`, "/seed: found the key twice in one object, expected it once"},
	{"key twice in a record", `"Tc": 470,`, `"Tc": 470, "Tc": 471,`, "/fluids/0/surface_tension/Tc: found the key twice in one object, expected it once"},
	{"huge number", `"bias_K": -0.05`, `"bias_K": 1e999`, "/statistics/bias_K: found number 1e999, expected one in the range of 64-bit floating point"},
	{"vanishing number", `"bias_K": -0.05`, `"bias_K": 1e-999`, "/statistics/bias_K: found number 1e-999, expected one in the range of 64-bit floating point"},
	{"nesting", `"a made-up warning"`, strings.Repeat("[", 40) + strings.Repeat("]", 40), "/identifiability/warnings/0" + strings.Repeat("/0", 29) + ": found objects or arrays nested more than 32 deep"},
	{"half a character", `a made-up warning`, `\ud800`, "/identifiability/warnings/0: found half of a surrogate pair in a string, expected whole characters"},
	{"not UTF-8", `a made-up warning`, "\xff", "183:8: byte 0xff is not UTF-8"},

	// format and version
	{"other format", `"limsup-model"`, `"limsup-plan"`, `/format: found "limsup-plan", expected "limsup-model"; this is not a model file of limsup`},
	{"format of another type", `"limsup-model"`, `3`, `/format: found 3, expected "limsup-model"`},
	{"later version", `"version": 1`, `"version": 2`, "/version: version 2 was written by a later limsup; this one reads version 1"},
	{"much later version", `"version": 1`, `"version": 99999999999999999999`, "/version: version 99999999999999999999 was written by a later limsup; this one reads version 1"},
	{"earlier version", `"version": 1`, `"version": 0`, "/version: version 0 is not known; this limsup reads version 1"},
	{"version as text", `"version": 1`, `"version": "1"`, `/version: found "1", expected 1`},
	{"version with a point", `"version": 1`, `"version": 1.0`, "/version: found number 1.0, expected an integer written without point and exponent"},

	// shape
	{"unknown key", `"seed": 1`, `"seed": 1, "made_on": "today"`, "/made_on: found an unknown key, expected one of cautions, covariance, "},
	{"unknown key below", `"rows_used": 26`, `"rows_used": 26, "rows": 1`, "/statistics/rows: found an unknown key, expected one of bias_K, cross_validation, "},
	{"other case", `"seed": 1`, `"Seed": 1`, "/Seed: found an unknown key, expected one of "},
	{"missing key", `"threshold",
      "role": "value",`, `"threshold",`, "/parameters/0/role: found nothing, expected this key"},
	{"missing equation", `"equation": {
    "name": "soave"
  },`, ``, "/equation: found nothing, expected this key"},
	{"missing degrees", `  "degrees_of_freedom": 21,`, ``, "/degrees_of_freedom: found nothing, expected this key beside parameters"},
	{"value as text", `"value": 11.5`, `"value": "11.5"`, `/parameters/0/value: found "11.5", expected a number`},
	{"value null", `"value": 11.5`, `"value": null`, "/parameters/0/value: found null, expected a number"},
	{"unknown parameter", `"name": "spread"`, `"name": "width"`, `/parameters/7/name: found "width", expected one of "threshold", "prefactor", `},
	{"unknown role", `"role": "pooled mean"`, `"role": "mean"`, `/parameters/3/role: found "mean", expected one of "value", "pooled mean", "pooled spread"`},
	{"unknown verdict", `"no measurable gain"`, `"splendid"`, `/verdict: found "splendid", expected one of "better", "no measurable gain", "worse"`},
	{"unknown limit", `"kinetic"`, `"thermal"`, `/options/limit: found "thermal", expected one of "kinetic", "spinodal"`},
	{"unknown noise", `"student"`, `"pink"`, `/noise/kind: found "pink", expected one of "gaussian", "student", "survival"`},
	{"noise degrees", `"degrees_of_freedom": 4`, `"degrees_of_freedom": 0.5`, "/noise/degrees_of_freedom: found 0.5, expected at least 1"},
	{"rows below zero", `"rows_used": 26`, `"rows_used": -1`, "/statistics/rows_used: found -1, expected at least 0"},
	{"rows with an exponent", `"rows_used": 26`, `"rows_used": 2e1`, "/statistics/rows_used: found number 2e1, expected an integer written without point and exponent"},
	{"degrees of freedom", `"degrees_of_freedom": 21`, `"degrees_of_freedom": 0`, "/degrees_of_freedom: found 0, expected at least 1"},
	{"condition", `12.5`, `0.5`, "/identifiability/condition: found 0.5, expected at least 1"},
	{"negative uncertainty", `"standard_uncertainty": 0.75`, `"standard_uncertainty": -0.75`, "/parameters/5/standard_uncertainty: found -0.75, expected at least 0"},
	{"no reason", `"reason": "at its upper bound",`, ``, "/parameters/4/reason: found nothing, expected this key"},
	{"folder in a name", `synthetic.csv`, `folder/synthetic.csv`, `/inputs/0/file: found "folder/synthetic.csv", expected a file name without folders`},
	{"short hash", `89abcdef"`, `"`, `/inputs/0/sha256: found "0123456789abcdef0123456789abcdef01234567...", expected 64 hexadecimal digits in lower case`},
	{"seed", `"seed": 1`, `"seed": -1`, "/seed: found -1, expected at least 0"},
	{"range of one", `[410.25, 487.125]`, `[410.25]`, "/validity/temperature_K: found an array of 1 item, expected at least 2 items"},

	// meaning: equation and options
	{"unknown equation", `"soave"`, `"suave"`, `/equation/name: found "suave", expected one of van-der-waals, berthelot, redlich-kwong, soave, peng-robinson, or delta1, delta2 and alpha beside another name`},
	{"built-in equation redefined", `"name": "soave"`, `"name": "soave", "delta1": 1, "delta2": 0, "alpha": {"form": "power", "coefficients": [0.5]}`, `/equation/name: found "soave", expected a name that no built-in equation has, since the file defines its own`},
	{"options that exclude each other", `"properties": "equation"`, `"properties": "correlation", "x": 0`, "/options/x: found an unknown key"},
	{"exact with correlations", "\"properties\": \"equation\",\n    \"embryo_pressure\": \"poynting\"", `"properties": "correlation", "embryo_pressure": "exact"`, `/options/embryo_pressure: found "exact", expected poynting with properties from correlations`},
	{"parameter without effect", `"limit": "kinetic"`, `"limit": "spinodal"`, `/parameters/0/name: found tune "threshold", expected another parameter: the spinodal depends on the equation of state alone`},

	// meaning: settings
	{"setting out of bounds", `"value": 0.1`, `"value": 7`, `/settings/0: found value of tolman "7", expected -0.5 to 0.5`},
	{"setting twice", `"name": "prefactor"`, `"name": "tolman"`, "/settings/1: found a second value of tolman, expected one for each parameter and group"},
	{"set and tuned", `"name": "prefactor",
      "value": -0.5`, `"name": "threshold",
      "value": 12`, `/parameters/0/name: found tune "threshold", expected a parameter that is not fixed at the same time`},

	// meaning: parameters
	{"parameter twice", `"group": "fluid-b",
      "role": "value"`, `"group": "fluid-a",
      "role": "value"`, "/parameters/2: found slope[fluid-a] a second time, expected each parameter once"},
	{"unit", `"unit": "K",
      "standard_uncertainty": 0.75`, `"unit": "Cel",
      "standard_uncertainty": 0.75`, `/parameters/5/unit: found "Cel", expected "K"`},
	{"value beyond its bounds", `"value": 11.5`, `"value": 35.5`, "/parameters/0/value: found 35.5, expected a value between the bounds 0 and 35"},
	{"bounds exchanged", `"lower": 0,
      "upper": 35`, `"lower": 35,
      "upper": 0`, "/parameters/0/lower: found bounds 35 and 0, expected the lower one first"},
	{"not at its bound", `"value": 1.5,`, `"value": 1.4,`, `/parameters/4/at_bound: found "upper" with the value 1.4, expected the value at that bound`},
	{"group without record", `"group": "fluid-a"`, `"group": "fluid-c"`, `/parameters/1/group: found "fluid-c", expected a fluid with a record under /fluids`},
	{"group without method", `"group": "pulse"`, `"group": "spark"`, `/parameters/5/group: found "spark", expected a method of /validity/methods`},
	{"group of a shared parameter", `"name": "threshold",`, `"name": "threshold", "group": "fluid-a",`, `/parameters/0/group: found "fluid-a", expected no group of a shared parameter`},
	{"no group", `"group": "pulse",`, ``, "/parameters/5/group: found nothing, expected a method"},
	{"two scopes", `"by": "fluid",
      "group": "fluid-b"`, `"by": "method",
      "group": "bulb"`, `/parameters/2/by: found "method", expected "fluid" as in /parameters/1`},
	{"pool without spread", `"name": "slope",
      "by": "fluid",
      "role": "pooled spread"`, `"name": "attraction",
      "by": "fluid",
      "role": "pooled spread"`, "/parameters/3/role: found a pooled mean without a pooled spread of slope, expected both"},
	{"pool of a shared parameter", `"name": "spread",
      "role": "value"`, `"name": "spread",
      "role": "pooled mean"`, "/parameters/7/role: found a pooled mean of spread, expected one of a parameter by fluid, method or batch other than spread"},
	{"no reference", `"method": "bulb"`, ``, "/offset_references/method: found nothing, expected the method whose offset is zero"},
	{"reference of no data", `"method": "bulb"`, `"method": "spark"`, `/offset_references/method: found "spark", expected a method of /validity/methods`},
	{"reference with an offset", `"method": "bulb"`, `"method": "pulse"`, `/parameters/5/group: found an offset of "pulse", expected none: it is the reference`},
	{"reference of another scope", `"method": "bulb"`, `"method": "bulb", "batch": "b"`, `/offset_references/batch: found "b", expected no reference batch without an offset by batch`},

	// meaning: covariance
	{"label", `"slope[fluid-a]",`, `"slope[fluid-b]",`, `/covariance/labels/1: found "slope[fluid-b]", expected "slope[fluid-a]" as in /parameters`},
	{"label missing", `"slope[fluid-a]",`, ``, "/covariance/labels: found 7 labels, expected one for each of the 8 parameters"},
	{"row missing", `[0.25],`, ``, "/covariance/lower_triangle: found 7 rows, expected one for each of the 8 parameters"},
	{"full matrix", `[0.25],`, `[0.25, 0.00375, 0.005, 0, 0, 0, 0, 0],`, "/covariance/lower_triangle/0: found 8 numbers, expected 1: the lower triangle of a symmetric matrix"},
	{"variance", `[0.25],`, `[0.26],`, "/covariance/lower_triangle/0/0: found 0.26, expected the square of the standard uncertainty 0.5"},
	{"negative variance", `[0.25],`, `[-0.25],`, "/covariance/lower_triangle/0/0: found -0.25, expected the square of the standard uncertainty 0.5"},
	{"variance without uncertainty", `[0, 0, 0, 0, 0],`, `[0, 0, 0, 0, 1],`, "/covariance/lower_triangle/4/4: found 1, expected 0, since a parameter of this row or column has no uncertainty"},
	{"covariance without uncertainty", `[0, 0, 0, 0, 0],`, `[1, 0, 0, 0, 0],`, "/covariance/lower_triangle/4/0: found 1, expected 0, since a parameter of this row or column has no uncertainty"},
	{"correlation above one", `[0.00375, 0.0001]`, `[0.006, 0.0001]`, "/covariance/lower_triangle: found a matrix with a negative eigenvalue, expected a positive semidefinite one"},
	{"correlations that contradict", `[0.00375, 0.0001],
      [0.005, 0, 0.0004]`, `[0.00475, 0.0001],
      [0.0095, -0.00019, 0.0004]`, "/covariance/lower_triangle: found a matrix with a negative eigenvalue, expected a positive semidefinite one"},

	// meaning: validity and fluids
	{"validity without record", "\"fluid-a\",\n      \"fluid-b\"", `"fluid-a", "fluid-c"`, `/validity/fluids/1: found "fluid-c", expected a fluid with a record under /fluids`},
	{"method twice", "\"bulb\",\n      \"pulse\"", `"bulb", "pulse", "pulse"`, `/validity/methods/2: found "pulse" a second time, expected each name once`},
	{"range exchanged", `[101325, 1500000]`, `[1500000, 101325]`, "/validity/pressure_Pa: found 1.5e+06 to 101325, expected the lower number first"},
	{"absolute zero", `[410.25, 487.125]`, `[-1, 487.125]`, "/validity/temperature_K/0: found -1, expected a temperature above 0 K"},
	{"record twice", `"key": "fluid-b"`, `"key": "fluid-a"`, `/fluids/1/key: found a second record of "fluid-a", expected one for each fluid`},
	{"record not an object", `"fluids": [
    {`, `"fluids": [7,
    {`, "/fluids/0: found 7, expected an object"},
	{"record without a constant", `"critical_temperature"`, `"critical_temperatur"`, "/fluids/0: found a fluid record that cannot be used: no critical_temperature"},
	{"record with a wrong unit", `"unit": "Pa"`, `"unit": "K"`, `/fluids/0/critical_pressure/unit: found a fluid record that cannot be used: unit "K": wrong kind of quantity`},
	{"record with a bad term", `[0.05, 1.25]`, `[0.05, "x"]`, `/fluids/0/surface_tension/terms/0/1: found a fluid record that cannot be used: text "x", want a number`},
}

func TestMutationsAreRefused(t *testing.T) {
	text := string(golden(t))
	for _, tt := range mutations {
		t.Run(tt.name, func(t *testing.T) {
			if !strings.Contains(text, tt.old) {
				t.Fatalf("the golden file has no %q", tt.old)
			}
			_, err := Decode(strings.NewReader(strings.Replace(text, tt.old, tt.new, 1)), "lab.json")
			if err == nil {
				t.Fatal("accepted")
			}
			first, _, _ := strings.Cut(err.Error(), "\n")
			sep := ": "
			var se *SyntaxError
			if errors.As(err, &se) {
				sep = ":"
			}
			if !strings.HasPrefix(first, "lab.json"+sep+tt.want) {
				t.Errorf("got  %s\nwant lab.json%s%s", first, sep, tt.want)
			}
			var invalid *InvalidError
			if se == nil && (!errors.As(err, &invalid) || invalid.File != "lab.json" || !strings.HasPrefix(tt.want, invalid.Pointer)) {
				t.Errorf("got %#v", invalid)
			}
		})
	}
}

// Of many problems twenty are spelled out, all are there for errors.As.
func TestManyProblems(t *testing.T) {
	text := strings.ReplaceAll(string(golden(t)), `"value": `, `"value": 1, "worth": `)
	_, err := Decode(strings.NewReader(text), "lab.json")
	var ps Problems
	if !errors.As(err, &ps) {
		t.Fatalf("got %v", err)
	}
	lines := strings.Split(err.Error(), "\n")
	// 2 settings and 8 parameters; records have a reader of their own.
	if len(ps) != 10 || len(lines) != 10 {
		t.Errorf("%d problems on %d lines:\n%v", len(ps), len(lines), err)
	}
	text = strings.Replace(text, `"settings": [`, `"settings": [`+strings.Repeat("0, ", 15), 1)
	_, err = Decode(strings.NewReader(text), "lab.json")
	if !errors.As(err, &ps) {
		t.Fatalf("got %v", err)
	}
	lines = strings.Split(err.Error(), "\n")
	if len(ps) != 25 || len(lines) != 21 || lines[20] != "and 5 more" {
		t.Errorf("%d problems on %d lines:\n%v", len(ps), len(lines), err)
	}
}

func TestOversized(t *testing.T) {
	_, err := Decode(&endless{}, "lab.json")
	var size *schema.SizeError
	if !errors.As(err, &size) || err.Error() != "lab.json: found a file larger than the limit of 64 MiB" {
		t.Errorf("got %v", err)
	}
}

// endless is a reader that never ends.
type endless struct{}

func (*endless) Read(b []byte) (int, error) {
	for i := range b {
		b[i] = ' '
	}
	return len(b), nil
}

func TestCausesAreKept(t *testing.T) {
	text := string(golden(t))
	var option *fit.OptionError
	if _, err := Decode(strings.NewReader(strings.Replace(text, `"value": 0.1`, `"value": 7`, 1)), "x"); !errors.As(err, &option) || option.Option != "value of tolman" {
		t.Errorf("%v", err)
	}
	var problem *fluid.Problem
	if _, err := Decode(strings.NewReader(strings.Replace(text, `"unit": "Pa"`, `"unit": "K"`, 1)), "x"); !errors.As(err, &problem) {
		t.Errorf("%v", err)
	}
	var parameter *eos.ParameterError
	own := `"name": "own", "delta1": 1, "delta2": 0, "alpha": {"form": "power", "coefficients": [-50]}`
	_, err := Decode(strings.NewReader(strings.Replace(text, `"name": "soave"`, own, 1)), "x")
	var invalid *InvalidError
	if !errors.As(err, &parameter) || !errors.As(err, &invalid) || invalid.Pointer != "/fluids/0" {
		t.Errorf("%v", err)
	}
}

// A message stays one line whatever a file contains.
func TestMessagesArePrintable(t *testing.T) {
	text := strings.Replace(string(golden(t)), `"seed": 1`, `"seed": 1, "\u001b[31m\n": 1`, 1)
	_, err := Decode(strings.NewReader(text), "lab.json")
	if err == nil || strings.ContainsAny(err.Error(), "\n\x1b") {
		t.Errorf("got %q", fmt.Sprint(err))
	}
}

func FuzzDecode(f *testing.F) {
	text := golden(f)
	f.Add(text)
	f.Add([]byte(`{"format": "limsup-model", "version": 1, "equation": {"name": "soave"}}`))
	f.Add([]byte(`{"format": "limsup-model", "version": 1, "equation": {"name": "own", "delta1": 1, "delta2": 0, "alpha": {"form": "soave", "coefficients": [0.4, 1.5, -0.2]}}, "settings": [{"name": "slope", "value": 1.1}], "seed": 3}`))
	for _, m := range mutations {
		f.Add(bytes.Replace(text, []byte(m.old), []byte(m.new), 1))
	}
	f.Fuzz(func(t *testing.T, text []byte) {
		file, err := Decode(bytes.NewReader(text), "x")
		if err != nil {
			var invalid *InvalidError
			var syntax *SyntaxError
			if !errors.As(err, &invalid) && !errors.As(err, &syntax) {
				t.Fatalf("%#v", err)
			}
			return
		}
		// What was accepted predicts without a panic, and is written so that it reads
		// back the same.
		m, records, err := file.Model()
		if err != nil {
			t.Fatal(err)
		}
		for _, r := range records {
			p, err := m.Predict(fit.Query{Record: r, Pressure: 101325})
			if err == nil && !(p.Temperature == p.Temperature && p.U == p.U) {
				t.Fatalf("not a number: %+v", p)
			}
		}
		b := encode(t, file)
		again, err := Decode(bytes.NewReader(b), "x")
		if err != nil || !equalFiles(file, again) {
			t.Fatalf("read back %v\n%s", err, b)
		}
	})
}
