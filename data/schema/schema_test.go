package schema

import (
	"bytes"
	"fmt"
	"sort"
	"strings"
	"testing"

	"github.com/santhosh-tekuri/jsonschema/v6"
)

func TestSchemaFitsTheMetaschema(t *testing.T) {
	meta, err := jsonschema.NewCompiler().Compile("https://json-schema.org/draft/2020-12/schema")
	if err != nil {
		t.Fatal(err)
	}
	doc, err := jsonschema.UnmarshalJSON(bytes.NewReader(Model()))
	if err != nil {
		t.Fatal(err)
	}
	if err := meta.Validate(doc); err != nil {
		t.Error(err)
	}
	if err := meta.Validate(map[string]any{"type": 5}); err == nil {
		t.Error("the metaschema takes a type that is a number: it checks nothing")
	}
	root := doc.(map[string]any)
	if root["$schema"] != "https://json-schema.org/draft/2020-12/schema" || root["$id"] != modelURL {
		t.Errorf("$schema %v, $id %v", root["$schema"], root["$id"])
	}
}

// A key that nothing describes is refused in every object; fluid records have a
// reader of their own.
func TestObjectsAreClosed(t *testing.T) {
	c, err := model()
	if err != nil {
		t.Fatal(err)
	}
	var open []string
	var walk func(v any, path []string)
	walk = func(v any, path []string) {
		switch v := v.(type) {
		case map[string]any:
			if v["type"] == "object" && v["additionalProperties"] != false {
				open = append(open, Pointer(path...))
			}
			for k, w := range v {
				walk(w, append(path[:len(path):len(path)], k))
			}
		case []any:
			for i, w := range v {
				walk(w, append(path[:len(path):len(path)], fmt.Sprint(i)))
			}
		}
	}
	walk(c.source, nil)
	sort.Strings(open)
	if got := strings.Join(open, " "); got != "/properties/fluids/items" {
		t.Errorf("open objects at %s", got)
	}
}

func TestModelIsACopy(t *testing.T) {
	m := Model()
	clear(m)
	if Model()[0] != '{' {
		t.Error("the caller changed the schema")
	}
}

// checkText is Parse and CheckModel, as lines "pointer: message".
func checkText(t *testing.T, text string) string {
	t.Helper()
	doc, ps, err := Parse([]byte(text))
	if err != nil {
		return err.Error()
	}
	if len(ps) == 0 {
		if ps, err = CheckModel(doc); err != nil {
			t.Fatal(err)
		}
	}
	var lines []string
	for i := range ps {
		lines = append(lines, ps[i].Pointer+": "+ps[i].Message())
	}
	return strings.Join(lines, "\n")
}

func TestCheckModel(t *testing.T) {
	const head = `"format": "limsup-model", "version": 1`
	for _, tt := range []struct{ name, text, want string }{
		{"smallest", `{` + head + `, "equation": {"name": "soave"}}`, ""},
		{"own equation", `{` + head + `, "equation": {"name": "x", "delta1": 1, "delta2": 0, "alpha": {"form": "power", "coefficients": [0.5]}}}`, ""},
		{"array", `[]`, ": found an array of 0 items, expected an object"},
		{"nothing there", `{}`, "/equation: found nothing, expected this key\n/format: found nothing, expected this key\n/version: found nothing, expected this key"},
		{"unknown key", `{` + head + `, "equation": {"name": "x", "colour": 1}}`, "/equation/colour: found an unknown key, expected one of alpha, delta1, delta2, name"},
		{"half a definition", `{` + head + `, "equation": {"name": "x", "delta1": 1}}`, "/equation/alpha: found nothing, expected this key beside delta1\n/equation/delta2: found nothing, expected this key beside delta1"},
		{"coefficients", `{` + head + `, "equation": {"name": "x", "delta1": 1, "delta2": 0, "alpha": {"form": "soave", "coefficients": [1]}}}`, "/equation/alpha/coefficients: found an array of 1 item, expected at least 3 items"},
		{"too many coefficients", `{` + head + `, "equation": {"name": "x", "delta1": 1, "delta2": 0, "alpha": {"form": "power", "coefficients": [1, 2]}}}`, "/equation/alpha/coefficients: found an array of 2 items, expected at most 1 items"},
		{"pole", `{` + head + `, "equation": {"name": "x", "delta1": -1, "delta2": 1000, "alpha": {"form": "power", "coefficients": [1]}}}`, "/equation/delta1: found -1, expected more than -1\n/equation/delta2: found 1000, expected less than 1000"},
		{"word", `{` + head + `, "equation": {"name": "x"}, "options": {"limit": "thermal"}}`, `/options/limit: found "thermal", expected one of "kinetic", "spinodal"`},
		{"text for number", `{` + head + `, "equation": {"name": "x"}, "settings": [{"name": "slope", "value": "1"}]}`, `/settings/0/value: found "1", expected a number`},
		{"order of items", `{` + head + `, "equation": {"name": "x"}, "settings": [1,1,1,1,1,1,1,1,1,1,1]}`,
			"/settings/0: found 1, expected an object\n/settings/1: found 1, expected an object\n/settings/2: found 1, expected an object\n/settings/3: found 1, expected an object\n/settings/4: found 1, expected an object\n/settings/5: found 1, expected an object\n/settings/6: found 1, expected an object\n/settings/7: found 1, expected an object\n/settings/8: found 1, expected an object\n/settings/9: found 1, expected an object\n/settings/10: found 1, expected an object"},
		{"seed", `{` + head + `, "equation": {"name": "x"}, "seed": 18446744073709551615}`, ""},
		{"seed too large", `{` + head + `, "equation": {"name": "x"}, "seed": 18446744073709551616}`, "/seed: found 18446744073709551616, expected at most 18446744073709551615"},
		{"seed below zero", `{` + head + `, "equation": {"name": "x"}, "seed": -1}`, "/seed: found -1, expected at least 0"},
		{"seed not whole", `{` + head + `, "equation": {"name": "x"}, "seed": 1.5}`, "/seed: found 1.5, expected an integer"},
		{"hash", `{` + head + `, "equation": {"name": "x"}, "inputs": [{"file": "a/b.csv", "sha256": "00"}]}`, "/inputs/0/file: found \"a/b.csv\", expected a file name without folders\n/inputs/0/sha256: found \"00\", expected 64 hexadecimal digits in lower case"},
		{"without parameters", `{` + head + `, "equation": {"name": "x"}, "verdict": "better"}`, "/parameters: found nothing, expected this key beside verdict"},
		{"empty name", `{` + head + `, "equation": {"name": ""}}`, `/equation/name: found "", expected a string of at least 1 characters`},
		{"escaped pointer", `{` + head + `, "equation": {"name": "x", "a/b~c": 1}}`, "/equation/a~1b~0c: found an unknown key, expected one of alpha, delta1, delta2, name"},
	} {
		t.Run(tt.name, func(t *testing.T) {
			if got := checkText(t, tt.text); got != tt.want {
				t.Errorf("got\n%s\nwant\n%s", got, tt.want)
			}
		})
	}
}

func ExampleCheckModel() {
	document, _, err := Parse([]byte(`{"format": "limsup-model", "version": 1, "equation": {"name": 7}}`))
	if err != nil {
		fmt.Println(err)
		return
	}
	problems, err := CheckModel(document)
	if err != nil {
		fmt.Println(err)
		return
	}
	for _, p := range problems {
		fmt.Printf("%s: %s\n", p.Pointer, p.Message())
	}
	// Output:
	// /equation/name: found 7, expected a string
}
