package fluid

import (
	"embed"
	"fmt"
	"maps"
	"slices"
	"strings"
	"unicode"

	"limsup/data/quantity"
)

//go:embed library/*.toml
var files embed.FS

// Library is a set of records found by name. It does not change once made and may
// be used concurrently.
type Library struct {
	records map[string]*Record // by key
	names   map[string]string  // normal form of keys and aliases to key
}

// Builtin returns the library that comes with the program, read anew on each call.
//
// Errors: Problems if an embedded file is damaged.
func Builtin() (*Library, error) {
	entries, err := files.ReadDir("library")
	if err != nil {
		return nil, err
	}
	var records []*Record
	for _, e := range entries { // in the order of their names
		f, err := files.Open("library/" + e.Name())
		if err != nil {
			return nil, err
		}
		rs, err := Parse(f, "library/"+e.Name())
		f.Close()
		if err != nil {
			return nil, err
		}
		records = append(records, rs...)
	}
	return NewLibrary(records...), nil
}

// NewLibrary returns a library of the records given; see With.
func NewLibrary(records ...*Record) *Library {
	return (&Library{}).With(records...)
}

// With returns a new library with the records added; l stays as it is. A record
// replaces the one of the same key (compared like names in Find). Where two records
// claim a name, a key goes before an alias and the later record before the earlier.
func (l *Library) With(records ...*Record) *Library {
	n := &Library{records: map[string]*Record{}, names: map[string]string{}}
	byName := map[string]string{} // normal form of key to key
	var order []*Record
	for _, k := range l.Keys() {
		order = append(order, l.records[k])
	}
	for _, r := range append(order, records...) {
		if old, ok := byName[normal(r.Key)]; ok {
			delete(n.records, old)
		}
		byName[normal(r.Key)] = r.Key
		n.records[r.Key] = r
	}
	for _, r := range append(order, records...) {
		if n.records[r.Key] != r {
			continue
		}
		for _, a := range append([]string{r.Name, r.CAS}, r.Aliases...) {
			if a = normal(a); a != "" {
				n.names[a] = r.Key
			}
		}
	}
	maps.Copy(n.names, byName)
	return n
}

// Keys returns the keys of all records, sorted.
func (l *Library) Keys() []string { return slices.Sorted(maps.Keys(l.records)) }

// All returns all records in the order of Keys.
func (l *Library) All() []*Record {
	var out []*Record
	for _, k := range l.Keys() {
		out = append(out, l.records[k])
	}
	return out
}

// Find returns the record with a key, name, alias or CAS number; only letters and
// digits count, and their case does not: "R134a" finds "r-134a".
//
// Errors: *UnknownError with the keys of similar names.
func (l *Library) Find(name string) (*Record, error) {
	if r, ok := l.records[name]; ok {
		return r, nil
	}
	if key, ok := l.names[normal(name)]; ok {
		return l.records[key], nil
	}
	return nil, &UnknownError{Name: name, Suggestions: l.suggest(name)}
}

// suggestions is the most that an UnknownError names.
const suggestions = 5

// suggest returns the keys of names that begin with name, leading digits aside, else
// of those within a few edits of it, else of those that contain it.
func (l *Library) suggest(name string) []string {
	n := normal(name)
	if n == "" {
		return nil
	}
	var out []string
	add := func(k string) {
		if !slices.Contains(out, k) && len(out) < suggestions {
			out = append(out, k)
		}
	}
	all := slices.Sorted(maps.Keys(l.names))
	const short = 3 // fewer letters begin too many names
	for _, a := range all {
		if len(n) >= short && strings.HasPrefix(strings.TrimLeft(a, "0123456789"), n) {
			add(l.names[a])
		}
	}
	if len(out) == 0 {
		for _, near := range quantity.Near(n, all) {
			add(l.names[near])
		}
	}
	if len(out) == 0 && len(n) >= short {
		for _, r := range l.Search(name) {
			add(r.Key)
		}
	}
	return out
}

// Search returns the records in whose key, name, aliases, CAS number or formula the
// letters and digits of text occur, in the order of Keys; all records if text has
// none.
func (l *Library) Search(text string) []*Record {
	n := normal(text)
	var out []*Record
	for _, r := range l.All() {
		for _, s := range append([]string{r.Key, r.Name, r.CAS, r.Formula}, r.Aliases...) {
			if strings.Contains(normal(s), n) {
				out = append(out, r)
				break
			}
		}
	}
	return out
}

// String tells how many records there are.
func (l *Library) String() string { return fmt.Sprintf("library of %d fluids", len(l.records)) }

// normal is a name without case and without anything but letters and digits.
func normal(s string) string {
	return strings.Map(func(c rune) rune {
		if !unicode.IsLetter(c) && !unicode.IsDigit(c) {
			return -1
		}
		return unicode.ToLower(c)
	}, s)
}
