package schema

import (
	"encoding/json"
	"errors"
	"fmt"
	"math/big"
	"slices"
	"sort"
	"strconv"
	"strings"

	"github.com/santhosh-tekuri/jsonschema/v6"
	"github.com/santhosh-tekuri/jsonschema/v6/kind"
)

// check lists what in a document departs from the schema.
func (c *compiled) check(document any) []Problem {
	err := c.schema.Validate(document)
	var v *jsonschema.ValidationError
	if !errors.As(err, &v) {
		return nil
	}
	var out []Problem
	c.collect(v, document, &out)
	// The library visits maps in random order.
	sort.SliceStable(out, func(i, j int) bool {
		if d := compare(out[i].Pointer, out[j].Pointer); d != 0 {
			return d < 0
		}
		return out[i].Message() < out[j].Message()
	})
	return out
}

// collect takes the leaves of a tree of errors.
func (c *compiled) collect(e *jsonschema.ValidationError, document any, out *[]Problem) {
	if len(e.Causes) > 0 {
		for _, cause := range e.Causes {
			c.collect(cause, document, out)
		}
		return
	}
	at := e.InstanceLocation
	add := func(key, found, expected string) {
		path := slices.Clone(at)
		if key != "" {
			path = append(path, key)
		}
		*out = append(*out, Problem{Pointer(path...), found, expected})
	}
	missing := func(keys []string, because string) {
		for _, k := range keys {
			add(k, "nothing", "this key"+because)
		}
	}
	value, _ := follow(document, at)
	switch k := e.ErrorKind.(type) {
	case *kind.Required:
		missing(k.Missing, "")
	case *kind.DependentRequired:
		missing(k.Missing, " beside "+k.Prop)
	case *kind.AdditionalProperties:
		for _, name := range k.Properties {
			path := append(slices.Clone(at), name)
			*out = append(*out, Problem{Pointer(path...), "an unknown key", "one of " + c.keys(e)})
		}
	default:
		add("", describe(value), c.expected(e))
	}
}

// expected says in words what a failed keyword asks for.
func (c *compiled) expected(e *jsonschema.ValidationError) string {
	switch k := e.ErrorKind.(type) {
	case *kind.Type:
		return types(k.Want)
	case *kind.Const:
		return describe(k.Want)
	case *kind.Enum:
		var words []string
		for _, w := range k.Want {
			words = append(words, describe(w))
		}
		return "one of " + strings.Join(words, ", ")
	case *kind.Minimum:
		return "at least " + rational(k.Want)
	case *kind.Maximum:
		return "at most " + rational(k.Want)
	case *kind.ExclusiveMinimum:
		return "more than " + rational(k.Want)
	case *kind.ExclusiveMaximum:
		return "less than " + rational(k.Want)
	case *kind.MinItems:
		return fmt.Sprintf("at least %d items", k.Want)
	case *kind.MaxItems:
		return fmt.Sprintf("at most %d items", k.Want)
	case *kind.MinLength:
		return fmt.Sprintf("a string of at least %d characters", k.Want)
	case *kind.MaxLength:
		return fmt.Sprintf("a string of at most %d characters", k.Want)
	case *kind.Pattern:
		if d, ok := c.keyword(e, "description").(string); ok {
			return d
		}
		return "a string that matches " + k.Want
	}
	return "what the schema asks for at " + e.SchemaURL
}

// keyword is the value of a keyword beside the one that failed.
func (c *compiled) keyword(e *jsonschema.ValidationError, name string) any {
	_, fragment, _ := strings.Cut(e.SchemaURL, "#")
	v, _ := follow(c.source, append(split(fragment), name))
	return v
}

// keys lists the keys that an object may have.
func (c *compiled) keys(e *jsonschema.ValidationError) string {
	known, _ := c.keyword(e, "properties").(map[string]any)
	var names []string
	for k := range known {
		names = append(names, k)
	}
	sort.Strings(names)
	return strings.Join(names, ", ")
}

func types(want []string) string {
	var words []string
	for _, w := range want {
		switch w {
		case "array", "object", "integer":
			words = append(words, "an "+w)
		case "null":
			words = append(words, w)
		default:
			words = append(words, "a "+w)
		}
	}
	return strings.Join(words, " or ")
}

func rational(r *big.Rat) string {
	if r.IsInt() {
		return r.Num().String()
	}
	f, _ := r.Float64()
	return strconv.FormatFloat(f, 'g', -1, 64)
}

// describe shows a value in an error text.
func describe(v any) string {
	switch v := v.(type) {
	case nil:
		return "null"
	case bool:
		return strconv.FormatBool(v)
	case json.Number:
		return v.String()
	case float64:
		return strconv.FormatFloat(v, 'g', -1, 64)
	case string:
		return strconv.Quote(clip(v))
	case []any:
		if len(v) == 1 {
			return "an array of 1 item"
		}
		return fmt.Sprintf("an array of %d items", len(v))
	case map[string]any:
		return "an object"
	}
	return fmt.Sprintf("%T", v)
}
