package modelfile

import (
	"bytes"
	"encoding/json"
	"fmt"
	"io"
	"regexp"
)

// Encode writes the file: two spaces of indent, an array of numbers on one line, keys
// in a fixed order, numbers with as many digits as read back to the same bits, a
// newline at the end. What Decode would refuse is not written.
//
// Errors: Problems, each an *InvalidError; those of w.
func (f *File) Encode(w io.Writer) error {
	b, err := f.text("model file")
	if err != nil {
		return err
	}
	_, err = w.Write(b)
	return err
}

// text is the text of the file, once it was seen to read back.
func (f *File) text(name string) ([]byte, error) {
	b, err := f.marshal()
	if err != nil {
		// NaN and infinities, which JSON does not have; check names the place if it is
		// a parameter.
		if p := f.check(name); len(p) > 0 {
			return nil, p
		}
		return nil, Problems{{File: name, Message: "found what JSON cannot hold: " + err.Error(), Err: err}}
	}
	g, err := decode(b, name)
	if err != nil {
		return nil, err
	}
	again, err := g.marshal()
	if err != nil || !bytes.Equal(b, again) {
		at := 0
		for at < len(b) && at < len(again) && b[at] == again[at] {
			at++
		}
		return nil, Problems{{File: name, Message: fmt.Sprintf("found text that does not read back to itself in line %d, expected valid UTF-8 throughout", 1+bytes.Count(b[:at], []byte("\n")))}}
	}
	return b, nil
}

func (f *File) marshal() ([]byte, error) {
	var b bytes.Buffer
	e := json.NewEncoder(&b)
	e.SetEscapeHTML(false)
	e.SetIndent("", "  ")
	if err := e.Encode(f); err != nil {
		return nil, err
	}
	return numbers.ReplaceAllFunc(b.Bytes(), func(array []byte) []byte {
		line := bytes.Join(bytes.Fields(array), []byte(" "))
		line = bytes.Replace(line, []byte("[ "), []byte("["), 1)
		return append(line[:len(line)-len(" ]")], ']')
	}), nil
}

// numbers is an array of numbers that the encoder spread over lines, one number
// each. A string cannot look like it, since JSON has no line breaks in strings.
var numbers = regexp.MustCompile(`\[\n\s+-?[0-9][-+.0-9eE]*(,\n\s+-?[0-9][-+.0-9eE]*)*\n\s+\]`)
