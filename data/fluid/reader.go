package fluid

import (
	"fmt"
	"maps"
	"math"
	"slices"
	"strings"

	"limsup/data/problem"
	"limsup/data/quantity"
)

// reader takes records out of decoded TOML or JSON and collects every problem on
// the way. Paths are as in positions.
type reader struct {
	problems []found
}

// found is a problem whose place is not yet looked up.
type found struct {
	path, text string
	err        error
}

func (r *reader) problem(path, format string, a ...any) {
	r.problems = append(r.problems, found{path: path, text: fmt.Sprintf(format, a...)})
}

func (r *reader) failure(path string, err error) {
	r.problems = append(r.problems, found{path: path, text: err.Error(), err: err})
}

// fields is one table: keys that are read are struck off, what is left is unknown.
type fields struct {
	r    *reader
	path string
	m    map[string]any
	seen map[string]bool
}

// table returns the table at path; ok is false after a problem.
func (r *reader) table(path string, v any) (f *fields, ok bool) {
	m, ok := v.(map[string]any)
	if !ok {
		r.problem(path, "%s, want a table", kindOf(v))
		return nil, false
	}
	return &fields{r, path, m, map[string]bool{}}, true
}

func kindOf(v any) string {
	switch v := v.(type) {
	case nil:
		return "nothing"
	case string:
		return "text " + problem.Quoted(v)
	case bool:
		return "a truth value"
	case int64, float64:
		return fmt.Sprintf("number %v", v)
	case []any:
		return "a list"
	case map[string]any:
		return "a table"
	}
	return fmt.Sprintf("a %T", v)
}

// get strikes a key off.
func (f *fields) get(key string) (v any, path string, ok bool) {
	f.seen[key] = true
	v, ok = f.m[key]
	return v, join(f.path, key), ok && v != nil
}

// close reports the keys that nothing read.
func (f *fields) close() {
	known := slices.Sorted(maps.Keys(f.seen))
	for _, k := range slices.Sorted(maps.Keys(f.m)) {
		if f.seen[k] {
			continue
		}
		text := fmt.Sprintf("unknown key %s", problem.Quoted(k))
		near := quantity.Near(k, known)
		if len(near) == 0 {
			near = slices.DeleteFunc(slices.Clone(known), func(s string) bool { return k == "" || !strings.HasPrefix(s, k) })
		}
		if len(near) > 0 {
			text += "; did you mean " + strings.Join(near, " or ") + "?"
		}
		f.r.problem(join(f.path, k), "%s", text)
	}
}

// text reads an optional text without control characters.
func (f *fields) text(key string) string {
	v, path, ok := f.get(key)
	if !ok {
		return ""
	}
	return f.r.asText(path, v)
}

func (r *reader) asText(path string, v any) string {
	s, ok := v.(string)
	if !ok {
		r.problem(path, "%s, want text", kindOf(v))
		return ""
	}
	if i := strings.IndexFunc(s, func(c rune) bool { return c < ' ' || c == 0x7f || c == '\uFFFD' }); i >= 0 {
		r.problem(path, "text %s holds a control character", problem.Quoted(s))
		return ""
	}
	return s
}

// required reads a text that must be there and not blank.
func (f *fields) required(key string) string {
	v, path, ok := f.get(key)
	if !ok {
		f.r.problem(f.path, "no %s", key)
		return ""
	}
	s := f.r.asText(path, v)
	if _, isText := v.(string); isText && strings.TrimSpace(s) == "" {
		f.r.problem(path, "%s is blank", key)
	}
	return s
}

// largest bounds every number of a record, so that products of a few of them stay finite.
const largest = 1e30

func (r *reader) asNumber(path string, v any) float64 {
	var x float64
	switch v := v.(type) {
	case float64:
		x = v
	case int64:
		x = float64(v)
	default:
		r.problem(path, "%s, want a number", kindOf(v))
		return math.NaN()
	}
	if !(math.Abs(x) <= largest) {
		r.problem(path, "number %g is not finite or too large", x)
		return math.NaN()
	}
	return x
}

// number reads a number that must be there; NaN after a problem.
func (f *fields) number(key string) float64 {
	v, path, ok := f.get(key)
	if !ok {
		f.r.problem(f.path, "no %s", key)
		return math.NaN()
	}
	return f.r.asNumber(path, v)
}

// list reads a list that must be there.
func (f *fields) list(key string) (l []any, path string) {
	v, path, ok := f.get(key)
	if !ok {
		f.r.problem(f.path, "no %s", key)
		return nil, path
	}
	l, ok = v.([]any)
	if !ok {
		f.r.problem(path, "%s, want a list", kindOf(v))
		return nil, path
	}
	return l, path
}

// numbers reads a list of n numbers; nil after a problem.
func (f *fields) numbers(key string, n int) []float64 {
	l, path := f.list(key)
	if l == nil {
		return nil
	}
	return f.r.asNumbers(path, l, n)
}

func (r *reader) asNumbers(path string, l []any, n int) []float64 {
	if len(l) != n {
		r.problem(path, "%d numbers, want %d", len(l), n)
		return nil
	}
	out := make([]float64, n)
	for i, v := range l {
		out[i] = r.asNumber(fmt.Sprintf("%s[%d]", path, i), v)
		if math.IsNaN(out[i]) {
			return nil
		}
	}
	return out
}

// pairs reads a list of pairs of numbers; nil after a problem.
func (f *fields) pairs(key string) [][2]float64 {
	l, path := f.list(key)
	var out [][2]float64
	good := l != nil
	for i, v := range l {
		p := fmt.Sprintf("%s[%d]", path, i)
		pair, ok := v.([]any)
		if !ok {
			f.r.problem(p, "%s, want a pair of numbers", kindOf(v))
			good = false
			continue
		}
		n := f.r.asNumbers(p, pair, 2)
		if n == nil {
			good = false
			continue
		}
		out = append(out, [2]float64{n[0], n[1]})
	}
	if !good {
		return nil
	}
	return out
}

// interval reads an optional pair lo < hi of temperatures in K.
func (f *fields) interval(key string) (lo, hi float64) {
	if _, _, ok := f.get(key); !ok {
		return 0, 0
	}
	n := f.numbers(key, 2)
	if n == nil {
		return 0, 0
	}
	if !(n[0] > 0 && n[0] < n[1]) {
		f.r.problem(join(f.path, key), "range %g to %g K, want 0 < lower < upper", n[0], n[1])
		return 0, 0
	}
	return n[0], n[1]
}
