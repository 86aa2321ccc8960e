package schema

import (
	"encoding/json"
	"errors"
	"reflect"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

func TestParse(t *testing.T) {
	got, ps, err := Parse([]byte(` {"a": [1, -2.5, 1e3, true, null, "é"], "b": {}, "c": 123456789012345678901234567890} `))
	want := map[string]any{"a": []any{json.Number("1"), -2.5, 1000.0, true, nil, "é"}, "b": map[string]any{}, "c": 123456789012345678901234567890.0}
	if err != nil || ps != nil || !reflect.DeepEqual(got, want) {
		t.Errorf("got %#v, %v, %v", got, ps, err)
	}
}

func TestParseRefuses(t *testing.T) {
	deep := func(n int) string { return strings.Repeat("[", n) + strings.Repeat("]", n) }
	for _, tt := range []struct{ name, text, want string }{
		{"empty", "", "1:1: the file is empty"},
		{"blank", " \n ", "2:2: the file is empty"},
		{"cut off", "{\"a\": 1,\n", "2:1: unexpected end of JSON input"},
		{"comma", "{\"a\": 1,\n  }", "2:3: invalid character '}' looking for beginning of object key string"},
		{"two values", "{}\n{}", "2:1: invalid character '{' after top-level value"},
		{"NaN", "[1, NaN]", "1:5: invalid character 'N' looking for beginning of value"},
		{"byte order mark", "\ufeff{}", "1:1: the file begins with a byte order mark; JSON has none"},
		{"Latin-1", "{\"a\":\n \"\xe9\"}", "2:3: byte 0xe9 is not UTF-8"},
		{"comment", "{} // no", "1:4: invalid character '/' after top-level value"},
		{"twice", `{"a": {"b": 1, "c": 2, "b": 3}}`, "/a/b: found the key twice in one object, expected it once"},
		{"overflow", `{"a": [0, 1e999]}`, "/a/1: found number 1e999, expected one in the range of 64-bit floating point"},
		{"huge exponent", `[-1e999999999999]`, "/0: found number -1e999999999999, expected one in the range of 64-bit floating point"},
		{"underflow", `[1e-999]`, "/0: found number 1e-999, expected one in the range of 64-bit floating point"},
		{"all of them", `{"x": 1e999, "y": 1, "y": 2}`, "/x: found number 1e999, expected one in the range of 64-bit floating point\n/y: found the key twice in one object, expected it once"},
		{"surrogate", `{"a": "\ud800"}`, "/a: found half of a surrogate pair in a string, expected whole characters"},
		{"surrogate key", `{"\udc00x": 1}`, "/\ufffdx: found half of a surrogate pair in a string, expected whole characters"},
		{"deep", deep(MaxDepth + 1), strings.Repeat("/0", MaxDepth) + ": found objects or arrays nested more than 32 deep"},
		{"deeper than the library reads", deep(20000), "1:10001: invalid character '[' exceeded max depth"},
		{"many", "[" + strings.Repeat("0,", MaxValues) + "0]", "/999999: found more than 1000000 values, expected a smaller file"},
		{"large", strings.Repeat(" ", MaxBytes+1), "larger than the limit of 64 MiB"},
	} {
		t.Run(tt.name, func(t *testing.T) {
			if got := checkText(t, tt.text); got != tt.want {
				t.Errorf("got\n%.300s\nwant\n%.300s", got, tt.want)
			}
		})
	}
}

func TestParseTakes(t *testing.T) {
	deep := strings.Repeat("[", MaxDepth) + strings.Repeat("]", MaxDepth)
	for _, text := range []string{deep, `0`, `-0.0`, `0e-999`, `1.7976931348623157e308`, `5e-324`, `"�"`, `"\ufffd \ud83d\ude00"`, `[{"a":1},{"a":1}]`} {
		if _, ps, err := Parse([]byte(text)); err != nil || ps != nil {
			t.Errorf("%s: %v, %v", text, ps, err)
		}
	}
}

func TestSyntaxErrorIsTyped(t *testing.T) {
	_, _, err := Parse([]byte("{\n\n  x"))
	var se *SyntaxError
	if !errors.As(err, &se) || se.Line != 3 || se.Column != 3 {
		t.Errorf("got %#v", err)
	}
}

func TestPointerRoundTrip(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		path := rapid.SliceOf(rapid.OneOf(rapid.String(), rapid.StringMatching(`[~/01]*`))).Draw(t, "path")
		p := Pointer(path...)
		got := split(p)
		if len(got) != len(path) || strings.Join(got, "\x00") != strings.Join(path, "\x00") {
			t.Fatalf("%q → %q → %q", path, p, got)
		}
		if compare(p, p) != 0 {
			t.Fatalf("%q differs from itself", p)
		}
	})
}

// The values of the examples in RFC 6901, section 5.
func TestPointerExamples(t *testing.T) {
	for want, path := range map[string][]string{"": nil, "/foo/0": {"foo", "0"}, "/": {""}, "/a~1b": {"a/b"}, "/m~0n": {"m~n"}, "/ ": {" "}, `/k"l`: {`k"l`}} {
		if got := Pointer(path...); got != want {
			t.Errorf("Pointer(%q) = %q, want %q", path, got, want)
		}
	}
}

func FuzzParse(f *testing.F) {
	for _, s := range []string{`{}`, `{"a":[1,2.5,{"b":null}]}`, `[1e999,"\ud800"]`, "\xff", `{"a":1,"a":2}`, `{"format":"limsup-model","version":1,"equation":{"name":"soave"}}`} {
		f.Add([]byte(s))
	}
	f.Fuzz(func(t *testing.T, text []byte) {
		doc, ps, err := Parse(text)
		if err != nil || len(ps) > 0 {
			if doc != nil {
				t.Error("a document beside an error")
			}
			return
		}
		// What was read is what the text says: written again, it reads the same.
		again, err := json.Marshal(doc)
		if err != nil {
			t.Fatal(err)
		}
		if back, ps, err := Parse(again); err != nil || ps != nil || !reflect.DeepEqual(back, doc) {
			if !sameNumbers(back, doc) {
				t.Errorf("%s read back as %s: %v %v", text, again, ps, err)
			}
		}
		found, err := CheckModel(doc)
		if err != nil {
			t.Fatal(err)
		}
		for _, p := range found {
			if path := split(p.Pointer); len(path) > 0 {
				if _, ok := follow(doc, path[:len(path)-1]); !ok {
					t.Errorf("no place for %q", p.Pointer)
				}
			}
		}
	})
}

// sameNumbers compares documents in which 1e3 may have become 1000.
func sameNumbers(a, b any) bool {
	x, errX := json.Marshal(a)
	y, errY := json.Marshal(b)
	return errX == nil && errY == nil && string(x) == string(y)
}
