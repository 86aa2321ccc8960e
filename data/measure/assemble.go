package measure

import (
	"cmp"
	"crypto/sha256"
	"encoding/binary"
	"errors"
	"fmt"
	"slices"
	"strings"

	"limsup/data/quantity"
)

// position is where a field stands.
type position struct {
	line, column int
	where        string
}

// assembler turns records into a Set. A reader of one file format feeds it the header, then each
// record with the positions of its fields, and closes it.
type assembler struct {
	options Options
	limits  limits
	info    FileInfo
	layout  layout
	set     Set
	doubts  doubts
	ps      Problems
	seen    map[[16]byte]int // digest of each record and its line
	digest  []byte
	texts   map[string]string
	fluids  map[string]verdict
	share   func() float64    // how much of the file has been read, 0 to 1; 0 if not known
	spoilt  [columnCount]bool // columns of the present record whose field is already reported
}

// verdict is what Options.KnownFluid said of a name.
type verdict struct {
	key string
	err error
}

func newAssembler(name string, o Options, l limits) *assembler {
	return &assembler{options: o, limits: l, info: FileInfo{Name: name}, seen: map[[16]byte]int{}, texts: map[string]string{}, fluids: map[string]verdict{}}
}

func (a *assembler) fail(at position, header, found, expected string, cause error) {
	a.ps = append(a.ps, &Problem{File: a.info.Name, Line: at.line, Column: at.column, Where: at.where,
		Header: header, Found: found, Expected: expected, Err: cause})
}

// cause reports an error of package quantity (or another), its expectation kept apart.
func (a *assembler) cause(at position, header string, err error) {
	var e *quantity.Error
	if !errors.As(err, &e) {
		a.fail(at, header, err.Error(), "", err)
		return
	}
	plain := *e
	plain.Expected = ""
	a.fail(at, header, plain.Error(), e.Expected, err)
}

// record reads one row. The fields may be overwritten afterwards. It returns false if the rest of the file need
// not be read, since it is too long or full of problems.
func (a *assembler) record(fields []string, at func(int) position) bool {
	a.add(fields, at)
	start := at(0)
	switch {
	case len(a.ps) >= a.limits.problems:
		a.fail(position{line: start.line + 1, where: start.where}, "", fmt.Sprintf("reading stopped after %d problems", a.limits.problems), "", nil)
		return false
	case len(a.set.Rows)+len(a.set.Excluded) > a.limits.rows:
		e := &LimitError{What: "rows", Limit: int64(a.limits.rows)}
		a.fail(position{line: start.line, where: start.where}, "", e.Error(), "at most that (divide the file)", e)
		return false
	}
	return true
}

func (a *assembler) add(fields []string, at func(int) position) {
	start := at(0)
	if len(fields) != a.layout.width {
		found := fmt.Sprintf("row has %d fields", len(fields))
		if len(fields) > a.layout.width {
			found += " (a comma inside a field needs quotes, a decimal mark is a point)"
		}
		a.fail(position{line: start.line, where: start.where}, "", found, fmt.Sprintf("%d as in the header", a.layout.width), nil)
		return
	}
	blank := true
	for i, f := range fields {
		fields[i] = strings.TrimSpace(f)
		blank = blank && fields[i] == ""
	}
	if blank {
		a.exclude(start, "", "no entry in any column")
		return
	}
	before := len(a.ps)
	r := a.row(fields, at)
	key := a.key(fields)
	first, repeat := a.seen[key]
	switch {
	case repeat:
		kind := "line"
		if start.where != "" {
			kind = "row"
		}
		a.exclude(start, r.Fluid, fmt.Sprintf("same as %s %d in every column; if it is another droplet, add a column that numbers the droplets", kind, first))
	case len(a.ps) == before:
		a.seen[key] = start.line
		a.grow()
		a.set.Rows = append(a.set.Rows, r)
		a.judge(&a.set.Rows[len(a.set.Rows)-1], fields)
	default:
		a.seen[key] = start.line
	}
}

// grow makes room for as many rows as the share of the file read so far leads to expect, so that a large
// file is not copied from one slice to the next several times over.
func (a *assembler) grow() {
	n := len(a.set.Rows)
	if n < cap(a.set.Rows) || n < firstGuess || a.share == nil {
		return
	}
	const margin = 1.02 // numbers get longer towards the end of a file, so the guess is mostly high as it is
	if s := a.share(); s > 0 && s <= 1 {
		a.set.Rows = slices.Grow(a.set.Rows, int(min(float64(n)*(margin/s-1), float64(a.limits.rows)))+firstGuess)
	}
}

// firstGuess is how many rows are read before a guess is made.
const firstGuess = 1 << 10

func (a *assembler) exclude(at position, fluid, reason string) {
	a.set.Excluded = append(a.set.Excluded, Exclusion{File: a.info.Name, Line: at.line, Where: at.where, Fluid: fluid, Reason: reason})
}

// key returns a digest of the record: equal for equal fields, different otherwise save with
// probability 2^-128 per pair of rows.
func (a *assembler) key(fields []string) (k [16]byte) {
	a.digest = a.digest[:0]
	for _, f := range fields {
		a.digest = binary.AppendUvarint(a.digest, uint64(len(f)))
		a.digest = append(a.digest, f...)
	}
	sum := sha256.Sum256(a.digest)
	copy(k[:], sum[:])
	return k
}

// keep returns a copy of s that does not hold on to the record it was cut from; equal texts share one copy.
func (a *assembler) keep(s string) string {
	if t, ok := a.texts[s]; ok {
		return t
	}
	t := strings.Clone(s)
	if len(a.texts) < 1<<16 { // numbered notes need not fill the table
		a.texts[t] = t
	}
	return t
}

// close ends the file whose bytes have the given digest.
//
// Errors: Problems, if there are any or if there is no row.
func (a *assembler) close(sum string) (*Set, error) {
	if len(a.ps) == 0 && len(a.set.Rows) == 0 {
		a.fail(position{}, "", "no rows below the header", "at least one row of measurements", nil)
	}
	if len(a.ps) > 0 {
		slices.SortStableFunc(a.ps, func(p, q *Problem) int { return cmp.Or(cmp.Compare(p.Line, q.Line), cmp.Compare(p.Column, q.Column)) })
		return nil, a.ps
	}
	a.info.SHA256, a.info.Rows = sum, len(a.set.Rows)
	set := a.set // a copy lets go of the digests
	set.Files = []FileInfo{a.info}
	set.Warnings = a.doubts.list
	return &set, nil
}
