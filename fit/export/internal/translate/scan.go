package translate

import "strconv"

// This file answers what the statements of a function use and set.

// uses counts how often a variable is read in a list of statements.
func uses(list []statement, v string) int {
	n := 0
	var in func(x expression)
	all := func(xs []expression) {
		for _, x := range xs {
			in(x)
		}
	}
	in = func(x expression) {
		switch x := x.(type) {
		case name:
			if x.name == v {
				n++
			}
		case index:
			if x.array.name == v {
				n++
			}
			in(x.at)
		case binary:
			in(x.x)
			in(x.y)
		case negative:
			in(x.x)
		case not:
			in(x.x)
		case paren:
			in(x.x)
		case truncate:
			in(x.x)
		case apply:
			all(x.args)
		case builtin:
			all(x.args)
		}
	}
	for _, s := range list {
		switch s := s.(type) {
		case assign:
			if i, ok := s.to.(index); ok {
				in(i.at)
			}
			in(s.value)
		case call:
			all(s.args)
		case branch:
			in(s.condition)
			n += uses(s.then, v) + uses(s.els, v)
		case loop:
			in(s.from)
			in(s.past)
			n += uses(s.body, v)
		case finish:
			if s.value != nil {
				in(s.value)
			}
		}
	}
	return n
}

// spares are the kinds of results that are not wanted, with the variables that take
// them in languages that cannot leave a place empty.
func spares(f *function) []variable {
	var out []variable
	seen := map[variable]bool{}
	var walk func(list []statement)
	walk = func(list []statement) {
		for _, s := range list {
			switch s := s.(type) {
			case call:
				for i, t := range s.to {
					if t == nil {
						if v := spare(&s, i); !seen[v] {
							seen[v] = true
							out = append(out, v)
						}
					}
				}
			case branch:
				walk(s.then)
				walk(s.els)
			case loop:
				walk(s.body)
			}
		}
	}
	walk(f.body)
	return out
}

// spare is the variable for result i of a call.
func spare(s *call, i int) variable {
	k := s.kind[i]
	n := 1
	for j := range i {
		if s.to[j] == nil && s.kind[j].kind == k.kind && s.kind[j].size == k.size {
			n++
		}
	}
	k.name = map[kind]string{realKind: "spare", intKind: "spareCount", boolKind: "spareFlag", arrayKind: "spareList"}[k.kind] + strconv.Itoa(n)
	return k
}

// declared are the locals that a language must declare: those that occur at all.
func (f *function) declared() []variable {
	var out []variable
	for _, v := range f.locals {
		if uses(f.body, v.name) > 0 || writes(f.body, v.name) {
			out = append(out, v)
		}
	}
	return append(out, spares(f)...)
}

// writes tells whether a variable is set.
func writes(list []statement, v string) bool {
	target := func(x expression) bool {
		switch x := x.(type) {
		case name:
			return x.name == v
		case index:
			return x.array.name == v
		}
		return false
	}
	for _, s := range list {
		switch s := s.(type) {
		case assign:
			if target(s.to) {
				return true
			}
		case zero:
			if s.v.name == v {
				return true
			}
		case call:
			for _, t := range s.to {
				if target(t) {
					return true
				}
			}
		case branch:
			if writes(s.then, v) || writes(s.els, v) {
				return true
			}
		case loop:
			if s.index == v || writes(s.body, v) {
				return true
			}
		}
	}
	return false
}

// loopIndices collects the variables that loops set.
func loopIndices(list []statement, out map[string]bool) {
	for _, s := range list {
		switch s := s.(type) {
		case branch:
			loopIndices(s.then, out)
			loopIndices(s.els, out)
		case loop:
			out[s.index] = true
			loopIndices(s.body, out)
		}
	}
}
