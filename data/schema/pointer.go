package schema

import (
	"strconv"
	"strings"
)

// Pointer writes the path to a place in a document as a JSON pointer (RFC 6901);
// no path at all is the document itself, "". Steps are keys of objects or indices
// of arrays.
func Pointer(path ...string) string {
	var b strings.Builder
	for _, s := range path {
		b.WriteByte('/')
		b.WriteString(escape.Replace(s))
	}
	return b.String()
}

var (
	escape   = strings.NewReplacer("~", "~0", "/", "~1")
	unescape = strings.NewReplacer("~1", "/", "~0", "~")
)

// split is the inverse of Pointer.
func split(pointer string) []string {
	if pointer == "" {
		return nil
	}
	steps := strings.Split(strings.TrimPrefix(pointer, "/"), "/")
	for i := range steps {
		steps[i] = unescape.Replace(steps[i])
	}
	return steps
}

// follow goes down from a value along a path.
func follow(v any, path []string) (any, bool) {
	for _, s := range path {
		switch w := v.(type) {
		case map[string]any:
			next, ok := w[s]
			if !ok {
				return nil, false
			}
			v = next
		case []any:
			i, err := strconv.Atoi(s)
			if err != nil || i < 0 || i >= len(w) {
				return nil, false
			}
			v = w[i]
		default:
			return nil, false
		}
	}
	return v, true
}

// compare orders pointers step by step, indices by their number.
func compare(a, b string) int {
	x, y := split(a), split(b)
	for i := 0; i < len(x) && i < len(y); i++ {
		if x[i] == y[i] {
			continue
		}
		m, errM := strconv.Atoi(x[i])
		n, errN := strconv.Atoi(y[i])
		if errM == nil && errN == nil && m != n {
			return m - n
		}
		return strings.Compare(x[i], y[i])
	}
	return len(x) - len(y)
}
