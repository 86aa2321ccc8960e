package measure

import (
	"fmt"
	"hash/maphash"
	"slices"
)

// Set is what one or more files hold.
type Set struct {
	Files    []FileInfo
	Rows     []Row // in the order of files and lines
	Excluded []Exclusion
	Warnings []Warning
}

// FileInfo describes one file that was read.
type FileInfo struct {
	Name           string
	Sheet          string   // of a workbook; empty for text files
	SHA256         string   // of the bytes of the file, hexadecimal
	Rows           int      // rows kept
	Columns        []string // headers used, as written, in the order of the file
	IgnoredColumns []string // other headers, as written; "column 7" for one without a name
}

// Exclusion is a row that was left out, and why.
type Exclusion struct {
	File   string
	Line   int
	Where  string
	Fluid  string
	Reason string
}

// String returns "file:line: fluid: reason".
func (e Exclusion) String() string {
	s := place(e.File, e.Line, 0, e.Where) + ": "
	if e.Fluid != "" {
		s += printable(e.Fluid) + ": "
	}
	return s + e.Reason
}

// Warning is something readable that looks doubtful. Doubts of the same kind about one file are one Warning.
type Warning struct {
	File  string
	Line  int // of the first case
	Where string
	Text  string // about the first case
	Count int    // how many cases
}

// String returns "file:line: text", with the number of further cases.
func (w Warning) String() string {
	s := place(w.File, w.Line, 0, w.Where) + ": " + w.Text
	switch {
	case w.Count == 2:
		s += " (and 1 more row)"
	case w.Count > 2:
		s += fmt.Sprintf(" (and %d more rows)", w.Count-1)
	}
	return s
}

// Join puts sets one after the other. A row that equals a row of an earlier set in every column the
// reader knows is kept with a Warning, since the sets may be repeats of one experiment. A single set shares
// its rows with the result.
//
// Errors: Problems if two files have the same bytes, or if there is no row at all.
func Join(sets ...*Set) (*Set, error) {
	out := &Set{}
	if len(sets) == 1 {
		out.Rows = slices.Clip(sets[0].Rows) // shared: nothing is put behind them
	} else {
		total := 0
		for _, s := range sets {
			total += len(s.Rows)
		}
		out.Rows = make([]Row, 0, total)
	}
	var ps Problems
	sums := map[string]string{}
	index := rowIndex{seed: maphash.MakeSeed(), first: map[uint64]int32{}}
	for n, s := range sets {
		for _, f := range s.Files {
			if first, twice := sums[f.SHA256]; twice {
				ps = append(ps, &Problem{File: f.Name, Found: "same bytes as " + first, Expected: "each file of measurements once"})
			}
			sums[f.SHA256] = f.Name
		}
		var repeats doubts
		for i := range s.Rows {
			r := &s.Rows[i]
			if first := index.find(out.Rows, r); first != nil {
				repeats.add("repeat", Warning{File: r.File, Line: r.Line, Where: r.Where,
					Text: fmt.Sprintf("%s: same as %s in every column read; both are kept", printable(r.Fluid), first.At())})
			}
		}
		if len(sets) > 1 {
			before := len(out.Rows)
			out.Rows = append(out.Rows, s.Rows...)
			if n < len(sets)-1 { // a set follows
				index.add(out.Rows, before)
			}
		}
		out.Files = append(out.Files, s.Files...)
		out.Excluded = append(out.Excluded, s.Excluded...)
		out.Warnings = append(out.Warnings, s.Warnings...)
		out.Warnings = append(out.Warnings, repeats.list...)
	}
	if len(out.Rows) == 0 && len(ps) == 0 {
		ps = append(ps, &Problem{File: "measurements", Found: "no rows", Expected: "at least one row in one file"})
	}
	if len(ps) > 0 {
		return nil, ps
	}
	return out, nil
}

// rowIndex finds the first of equal rows by a hash of all but their place.
type rowIndex struct {
	seed  maphash.Seed
	first map[uint64]int32
}

func (x *rowIndex) hash(r *Row) uint64 { return maphash.Comparable(x.seed, bare(*r)) }

// add enters rows from the given one on.
func (x *rowIndex) add(rows []Row, from int) {
	for i := from; i < len(rows); i++ {
		h := x.hash(&rows[i])
		if _, ok := x.first[h]; !ok {
			x.first[h] = int32(i)
		}
	}
}

// find returns the first row equal to r, or nil. It could miss one only if two different rows had one hash.
func (x *rowIndex) find(rows []Row, r *Row) *Row {
	if len(x.first) == 0 {
		return nil
	}
	if i, ok := x.first[x.hash(r)]; ok && bare(rows[i]) == bare(*r) {
		return &rows[i]
	}
	return nil
}

// bare returns r without its place.
func bare(r Row) Row {
	r.File, r.Line, r.Where = "", 0, ""
	return r
}

// doubts collects warnings, those of one kind in one entry.
type doubts struct {
	list  []Warning
	index map[string]int
}

func (d *doubts) add(kind string, w Warning) {
	if d.index == nil {
		d.index = map[string]int{}
	}
	if i, ok := d.index[kind]; ok {
		d.list[i].Count++
		return
	}
	w.Count = 1
	d.index[kind] = len(d.list)
	d.list = append(d.list, w)
}
