// Package schema holds the JSON Schemas (draft 2020-12) of the files that limsup
// writes and reads again, and checks documents against them.
//
// Parse reads JSON more strictly than RFC 8259 asks: UTF-8 only, no key twice in
// an object, no number outside the range of 64-bit floating point, no deep nesting.
// CheckModel then compares a document with its schema and names each offending
// place by its JSON pointer (RFC 6901).
//
// The package knows the shape of a file, not its meaning: whether a covariance
// fits its parameters is for package fit/modelfile to say.
package schema

import (
	"bytes"
	_ "embed"
	"fmt"
	"sync"

	"github.com/santhosh-tekuri/jsonschema/v6"
)

//go:embed model.schema.json
var modelSchema []byte

// Model returns the schema of the model file, version 1, as JSON text. The caller
// may change the copy.
func Model() []byte { return bytes.Clone(modelSchema) }

// modelURL is the $id of the schema.
const modelURL = "urn:limsup:schema:model:1"

// compiled is a schema ready for use beside its own document, in which error
// texts look up descriptions and known keys.
type compiled struct {
	schema *jsonschema.Schema
	source any
}

var model = sync.OnceValues(func() (compiled, error) { return compile(modelURL, modelSchema) })

func compile(url string, text []byte) (compiled, error) {
	source, err := jsonschema.UnmarshalJSON(bytes.NewReader(text))
	if err != nil {
		return compiled{}, fmt.Errorf("schema %s: %w", url, err)
	}
	c := jsonschema.NewCompiler()
	c.DefaultDraft(jsonschema.Draft2020)
	c.UseLoader(jsonschema.SchemeURLLoader{}) // nothing is fetched
	if err := c.AddResource(url, source); err != nil {
		return compiled{}, fmt.Errorf("schema %s: %w", url, err)
	}
	s, err := c.Compile(url)
	if err != nil {
		return compiled{}, fmt.Errorf("schema %s: %w", url, err)
	}
	return compiled{s, source}, nil
}

// CheckModel compares a document from Parse with the schema of the model file. The
// problems come in the order of their pointers; none means that the document has
// the right shape. An error means that the schema itself is unusable.
func CheckModel(document any) ([]Problem, error) {
	c, err := model()
	if err != nil {
		return nil, err
	}
	return c.check(document), nil
}
