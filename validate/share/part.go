package share

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"slices"
)

// Format and Version are the first two keys of a part.
const (
	Format  = "limsup-part"
	Version = 1
)

// The kinds of computation that are divided.
const (
	Compare   = "compare"
	Bootstrap = "bootstrap"
)

// Kinds lists the kinds.
func Kinds() []string { return []string{Compare, Bootstrap} }

// mostJobs keeps products with the number of shares within 64 bits.
const mostJobs = 1 << 40

// Part is one share of a computation.
type Part struct {
	Format       string `json:"format"`
	Version      int    `json:"version"`
	Limsup       string `json:"limsup_version"`
	Architecture string `json:"architecture"` // of the processor: last digits may depend on it
	Kind         string `json:"kind"`
	Share
	Seed   uint64  `json:"seed"`
	Plan   []Flag  `json:"plan"`
	Inputs []Input `json:"inputs"`
	Jobs   int     `json:"jobs"` // of all shares together
	// Results holds one value for each job of the share, in their order.
	Results []json.RawMessage `json:"results"`

	File string `json:"-"` // where it was read from
}

// Flag is one setting of the plan.
type Flag struct {
	Name   string   `json:"flag"`
	Values []string `json:"values"`
}

// Input is a file that was read.
type Input struct {
	Role    string `json:"role"` // "data", "fluids": the flag that names it
	Name    string `json:"name"` // as given
	SHA256  string `json:"sha256"`
	Content []byte `json:"content,omitempty"` // in share 1 only
}

// NewInput describes a file.
func NewInput(role, name string, content []byte) Input {
	sum := sha256.Sum256(content)
	return Input{role, name, hex.EncodeToString(sum[:]), content}
}

// Encode writes a part. The contents of inputs are left out of all shares but the
// first.
//
// Errors: *FormatError for a part that Decode would not read; those of w.
func (p *Part) Encode(w io.Writer) error {
	q := *p
	q.Format, q.Version = Format, Version
	q.Plan, q.Inputs = append([]Flag{}, p.Plan...), slices.Clone(p.Inputs)
	q.Results = append([]json.RawMessage{}, p.Results...)
	if q.K != 1 {
		for i := range q.Inputs {
			q.Inputs[i].Content = nil
		}
	}
	if err := q.check(); err != nil {
		return &FormatError{"share " + q.Share.String(), err.Error(), nil}
	}
	e := json.NewEncoder(w)
	e.SetEscapeHTML(false)
	if err := e.Encode(&q); err != nil {
		var unsupported *json.MarshalerError
		if errors.As(err, &unsupported) {
			return &FormatError{"share " + q.Share.String(), "a result is not JSON", err}
		}
		return err
	}
	return nil
}

// Decode reads a part; file is its name in errors.
//
// Errors: *FormatError, also for keys that it does not know and for anything after the
// part; those of r.
func Decode(r io.Reader, file string) (*Part, error) {
	text, err := io.ReadAll(r)
	if err != nil {
		return nil, fmt.Errorf("%s: %w", file, err)
	}
	bad := func(why string, err error) (*Part, error) { return nil, &FormatError{file, why, err} }
	var head struct {
		Format  string `json:"format"`
		Version int    `json:"version"`
	}
	if err := json.Unmarshal(text, &head); err != nil {
		return bad("damaged or cut short", err)
	}
	if head.Format != Format {
		return bad(fmt.Sprintf("its format is %q, not %q", head.Format, Format), nil)
	}
	if head.Version != Version {
		return bad(fmt.Sprintf("version %d of the format; this program reads version %d", head.Version, Version), nil)
	}
	d := json.NewDecoder(bytes.NewReader(text))
	d.DisallowUnknownFields()
	p := &Part{File: file}
	if err := d.Decode(p); err != nil {
		return bad("unexpected content", err)
	}
	if err := p.check(); err != nil {
		return bad(err.Error(), nil)
	}
	return p, nil
}

// check tells what is wrong with a part by itself.
func (p *Part) check() error {
	if !p.Share.valid() {
		return fmt.Errorf("share %s", p.Share)
	}
	if p.Jobs < 0 || p.Jobs > mostJobs {
		return fmt.Errorf("%d jobs", p.Jobs)
	}
	switch first, last := p.Range(p.Jobs); {
	case !slices.Contains(Kinds(), p.Kind):
		return fmt.Errorf("kind %q", p.Kind)
	case p.Limsup == "" || p.Architecture == "":
		return errors.New("no limsup version or architecture")
	case len(p.Results) != last-first:
		return fmt.Errorf("%d results, where share %s of %d jobs has %d", len(p.Results), p.Share, p.Jobs, last-first)
	}
	for _, f := range p.Plan {
		if f.Name == "" || len(f.Values) == 0 {
			return fmt.Errorf("flag %q of the plan without name or value", f.Name)
		}
	}
	for _, in := range p.Inputs {
		sum, err := hex.DecodeString(in.SHA256)
		if err != nil || len(sum) != sha256.Size || in.Role == "" || in.Name == "" {
			return fmt.Errorf("input %q without role, name or SHA-256", in.Name)
		}
		if p.K != 1 {
			if in.Content != nil {
				return fmt.Errorf("content of input %q in another share than the first", in.Name)
			}
			continue
		}
		if got := sha256.Sum256(in.Content); !bytes.Equal(got[:], sum) {
			return fmt.Errorf("the content of input %q does not have its SHA-256", in.Name)
		}
	}
	return nil
}
