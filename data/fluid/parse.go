package fluid

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"slices"
	"strings"

	"github.com/pelletier/go-toml/v2"

	"limsup/data/problem"
)

// Parse reads a TOML file of records, [[fluid]] tables with the keys of the built-in
// library; name is the file's name for error texts. A key that is not known, a value
// without unit or source, a unit of the wrong kind or a value that no fluid can have
// is a problem; the other records of the file are then not returned either.
//
// Errors: Problems, all of the file at once, or the error of r.
func Parse(r io.Reader, name string) ([]*Record, error) {
	data, err := io.ReadAll(r)
	if err != nil {
		return nil, fmt.Errorf("%s: %w", name, err)
	}
	data = bytes.TrimPrefix(data, []byte("\ufeff"))
	var doc map[string]any
	if err := toml.Unmarshal(data, &doc); err != nil {
		p := &Problem{File: name, Found: strings.TrimPrefix(err.Error(), "toml: "), Err: err}
		var d *toml.DecodeError
		if errors.As(err, &d) {
			p.Line, p.Column = d.Position()
		}
		return nil, Problems{p}
	}
	var rd reader
	records := rd.document(doc)
	if len(rd.problems) == 0 {
		return records, nil
	}
	at := locate(data)
	out := make(Problems, len(rd.problems))
	for i, f := range rd.problems {
		p := at.find(f.path)
		out[i] = &Problem{File: name, Line: p.line, Column: p.column, Found: f.text, Err: f.err}
		out[i].Fluid, out[i].Field = split(doc, f.path)
	}
	slices.SortStableFunc(out, func(a, b *Problem) int {
		if a.Line != b.Line {
			return a.Line - b.Line
		}
		return a.Column - b.Column
	})
	return nil, out
}

// document reads the top level of a file.
func (r *reader) document(doc map[string]any) []*Record {
	f := &fields{r, "", doc, map[string]bool{}}
	l, path := f.list("fluid")
	f.close()
	if l != nil && len(l) == 0 {
		r.problem(path, "no record")
	}
	var out []*Record
	first := map[string]string{}
	for i, v := range l {
		p := fmt.Sprintf("%s[%d]", path, i)
		rec := r.record(p, v)
		if rec == nil {
			continue
		}
		if key := normal(rec.Key); first[key] != "" {
			r.problem(join(p, "key"), "%s is already the key of a record of this file", problem.Quoted(rec.Key))
		} else {
			first[key] = p
		}
		out = append(out, rec)
	}
	return out
}

// split divides a path into the key of the fluid, if it has one, and the field.
func split(doc map[string]any, path string) (key, field string) {
	var i int
	if n, _ := fmt.Sscanf(path, "fluid[%d]", &i); n != 1 {
		return "", path
	}
	if l, ok := doc["fluid"].([]any); ok && i < len(l) {
		if m, ok := l[i].(map[string]any); ok {
			key, _ = m["key"].(string)
		}
	}
	if key != "" {
		key = strings.Trim(problem.Quoted(key), `"`)
	}
	_, field, _ = strings.Cut(path, "].")
	return key, field
}

// UnmarshalJSON reads what MarshalJSON wrote, with the checks of Parse.
//
// Errors: Problems, without lines.
func (r *Record) UnmarshalJSON(data []byte) error {
	var doc any
	if err := json.Unmarshal(data, &doc); err != nil {
		return err
	}
	var rd reader
	rec := rd.record("", doc)
	if rec == nil {
		out := make(Problems, len(rd.problems))
		for i, f := range rd.problems {
			out[i] = &Problem{File: "fluid record", Field: f.path, Found: f.text, Err: f.err}
			if m, ok := doc.(map[string]any); ok {
				out[i].Fluid, _ = m["key"].(string)
			}
		}
		return out
	}
	*r = *rec
	return nil
}
