package modelfile

import (
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"strconv"
	"strings"

	"limsup/data/fluid"
	"limsup/data/schema"
)

// Decode reads a model file; name is what errors call it. The text must be JSON of
// at most 64 MiB without a key given twice or a number out of range, fit the schema
// of package data/schema, and hold together; see the package comment.
//
// Errors: *SyntaxError; Problems, each an *InvalidError; those of r.
func Decode(r io.Reader, name string) (*File, error) {
	b, err := io.ReadAll(io.LimitReader(r, schema.MaxBytes+1))
	if err != nil {
		return nil, fmt.Errorf("%s: %w", name, err)
	}
	return decode(b, name)
}

func decode(text []byte, name string) (*File, error) {
	document, found, err := schema.Parse(text)
	var syntax *schema.SyntaxError
	switch {
	case errors.As(err, &syntax):
		return nil, &SyntaxError{File: name, Line: syntax.Line, Column: syntax.Column, Message: syntax.Message}
	case err != nil:
		return nil, Problems{{File: name, Message: "found a file " + err.Error(), Err: err}}
	case len(found) > 0:
		return nil, problems(name, found)
	}
	if err := identity(document, name); err != nil {
		return nil, err
	}
	if found, err = schema.CheckModel(document); err != nil {
		return nil, err
	}
	if len(found) > 0 {
		return nil, problems(name, found)
	}
	f, err := unmarshal(text, name)
	if err != nil {
		return nil, err
	}
	if err := f.check(name).err(); err != nil {
		return nil, err
	}
	return f, nil
}

func problems(name string, found []schema.Problem) Problems {
	var out Problems
	for i := range found {
		out = append(out, &InvalidError{File: name, Pointer: found[i].Pointer, Message: found[i].Message()})
	}
	return out
}

// identity refuses another format and another version by name, before the schema
// would complain about everything else that differs.
func identity(document any, name string) error {
	o, ok := document.(map[string]any)
	if !ok {
		return nil // the schema says so
	}
	if s, ok := o["format"].(string); ok && s != Format {
		return Problems{{File: name, Pointer: "/format", Message: foundExpected(strconv.Quote(s), strconv.Quote(Format)+"; this is not a model file of limsup")}}
	}
	n, ok := o["version"].(json.Number)
	if !ok || o["format"] == nil {
		return nil
	}
	v, err := n.Int64()
	message := ""
	switch {
	case err != nil || v > Version:
		message = fmt.Sprintf("version %s was written by a later limsup; this one reads version %d", n, Version)
	case v < Version:
		message = fmt.Sprintf("version %s is not known; this limsup reads version %d", n, Version)
	}
	if message == "" {
		return nil
	}
	return Problems{{File: name, Pointer: "/version", Message: message}}
}

// unmarshal turns a text that fits the schema into a File.
func unmarshal(text []byte, name string) (*File, error) {
	type plain File
	wire := struct {
		*plain
		Fluids []json.RawMessage `json:"fluids"` // apart, so that an error names its record
	}{plain: new(plain)}
	if err := json.Unmarshal(text, &wire); err != nil {
		var t *json.UnmarshalTypeError
		if errors.As(err, &t) {
			// The schema takes 1.0 and 1e2 for integers.
			path := strings.Split(strings.TrimPrefix(t.Field, "plain."), ".")
			return nil, Problems{{File: name, Pointer: schema.Pointer(path...), Message: foundExpected(t.Value, "an integer written without point and exponent"), Err: err}}
		}
		return nil, Problems{{File: name, Message: err.Error(), Err: err}}
	}
	f := (*File)(wire.plain)
	var ps Problems
	for i, raw := range wire.Fluids {
		r := new(fluid.Record)
		if err := json.Unmarshal(raw, r); err != nil {
			ps = append(ps, recordProblems(name, i, err)...)
		}
		f.Fluids = append(f.Fluids, r)
	}
	if wire.Fluids != nil && f.Fluids == nil {
		f.Fluids = []*fluid.Record{}
	}
	return f, ps.err()
}

// recordProblems turns what the reader of record i refused into problems with
// pointers: its fields are written as in "surface_tension.terms[2]".
func recordProblems(name string, i int, err error) Problems {
	var fields fluid.Problems
	if !errors.As(err, &fields) {
		return Problems{{File: name, Pointer: schema.Pointer("fluids", strconv.Itoa(i)), Message: err.Error(), Err: err}}
	}
	var out Problems
	for _, p := range fields {
		path := []string{"fluids", strconv.Itoa(i)}
		if p.Field != "" {
			path = append(path, strings.FieldsFunc(p.Field, func(r rune) bool { return strings.ContainsRune(".[]", r) })...)
		}
		out = append(out, &InvalidError{File: name, Pointer: schema.Pointer(path...), Message: "found a fluid record that cannot be used: " + p.Found, Err: p})
	}
	return out
}
