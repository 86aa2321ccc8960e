package fluid

import (
	"fmt"

	"github.com/pelletier/go-toml/v2/unstable"
)

// position is a place in a text: line and column from 1, the column in bytes.
type position struct{ line, column int }

// positions maps the path of every key and array element of a TOML text, such as
// "fluid[0].surface_tension.terms[2]", to its place.
type positions map[string]position

// locate walks a text that is already known to be valid TOML.
func locate(data []byte) positions {
	var p unstable.Parser
	p.Reset(data)
	w := walker{p: &p, at: positions{}, count: map[string]int{}, lines: lineStarts(data)}
	table := ""
	for p.NextExpression() {
		e := p.Expression()
		switch e.Kind {
		case unstable.Table, unstable.ArrayTable:
			table = w.header(e)
		case unstable.KeyValue:
			w.keyValue(table, e)
		}
	}
	return w.at
}

type walker struct {
	p     *unstable.Parser
	at    positions
	count map[string]int // elements so far of each array of tables
	lines []int
}

// header notes [a.b] or [[a.b]] and returns its path; a part that names an array of
// tables means its last element.
func (w *walker) header(e *unstable.Node) string {
	path := ""
	for it := e.Key(); it.Next(); {
		k := it.Node()
		path = join(path, string(k.Data))
		w.note(path, k)
		last := it.IsLast()
		switch n := w.count[path]; {
		case last && e.Kind == unstable.ArrayTable:
			w.count[path] = n + 1
			path = fmt.Sprintf("%s[%d]", path, n)
			w.note(path, k)
		case n > 0:
			path = fmt.Sprintf("%s[%d]", path, n-1)
		}
	}
	return path
}

func (w *walker) keyValue(table string, e *unstable.Node) {
	path := table
	for it := e.Key(); it.Next(); {
		path = join(path, string(it.Node().Data))
		w.note(path, it.Node())
	}
	w.value(path, e.Value())
}

func (w *walker) value(path string, v *unstable.Node) {
	if len(path) > longestPath {
		return
	}
	it := v.Children()
	switch v.Kind {
	case unstable.InlineTable:
		for it.Next() {
			if it.Node().Kind == unstable.KeyValue {
				w.keyValue(path, it.Node())
			}
		}
	case unstable.Array:
		for i := 0; it.Next(); {
			n := it.Node()
			if n.Kind == unstable.Comment {
				continue
			}
			element := fmt.Sprintf("%s[%d]", path, i)
			w.note(element, firstOf(n))
			w.value(element, n)
			i++
		}
	}
}

// firstOf returns the first node inside n that knows its place: arrays do not.
func firstOf(n *unstable.Node) *unstable.Node {
	for n.Raw.Length == 0 {
		c := n.Child()
		if c == nil || !c.Valid() {
			break
		}
		n = c
	}
	return n
}

func (w *walker) note(path string, n *unstable.Node) {
	if n.Raw.Length == 0 {
		return
	}
	offset := int(n.Raw.Offset)
	lo, hi := 0, len(w.lines) // the last line that starts at or before offset
	for hi-lo > 1 {
		if mid := (lo + hi) / 2; w.lines[mid] <= offset {
			lo = mid
		} else {
			hi = mid
		}
	}
	if _, known := w.at[path]; !known {
		w.at[path] = position{lo + 1, offset - w.lines[lo] + 1}
	}
}

func lineStarts(data []byte) []int {
	starts := []int{0}
	for i, c := range data {
		if c == '\n' {
			starts = append(starts, i+1)
		}
	}
	return starts
}

// find returns the place of a path or of the nearest one that encloses it.
func (at positions) find(path string) position {
	for {
		if p, ok := at[path]; ok {
			return p
		}
		i := len(path) - 1
		for i > 0 && path[i] != '.' && path[i] != '[' {
			i--
		}
		if i <= 0 {
			return position{}
		}
		path = path[:i]
	}
}

// longestPath bounds the paths that are told apart: no record nests so deep, and building
// the paths of a text that does would take a time quadratic in its length.
const longestPath = 1 << 10

// join appends a key to a path. What lies deeper than longestPath shares the place of
// what encloses it.
func join(path, key string) string {
	if path == "" {
		return key
	}
	if len(path) > longestPath {
		return path
	}
	return path + "." + key
}
