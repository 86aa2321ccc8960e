package share

import (
	"encoding/json"
	"fmt"
	"slices"
	"strconv"
	"strings"
)

// Whole is what parts are together.
type Whole struct {
	Kind    string
	Seed    uint64
	Plan    []Flag
	Inputs  []Input // with their contents
	Results []json.RawMessage
}

// Join puts parts together, in any order. limsup is the version that is going to use
// them; "" accepts any.
//
// Errors: Problems, made of *ForeignError (against the parts that most agree with, the
// earlier ones where that is undecided), *DoubledError and *MissingError; all of them
// at once.
func Join(parts []*Part, limsup string) (*Whole, error) {
	if len(parts) == 0 {
		return nil, Problems{&FormatError{"gather", "no part given", nil}}
	}
	model := commonest(parts)
	var problems Problems
	have := make(map[int]*Part, model.N)
	for _, p := range parts {
		if err := foreign(p, model, limsup); err != nil {
			problems = append(problems, err)
			continue
		}
		if first := have[p.K]; first != nil {
			problems = append(problems, &DoubledError{p.Share, first.File, p.File})
			continue
		}
		have[p.K] = p
	}
	w := &Whole{Kind: model.Kind, Seed: model.Seed, Plan: model.Plan}
	for k := 1; k <= model.N; k++ {
		p := have[k]
		if p == nil {
			problems = append(problems, &MissingError{Share{k, model.N}})
			continue
		}
		if k == 1 {
			w.Inputs = p.Inputs
		}
		w.Results = append(w.Results, p.Results...)
	}
	if len(problems) > 0 {
		return nil, problems
	}
	return w, nil
}

// commonest is the first of the parts that most parts agree with.
func commonest(parts []*Part) *Part {
	count := map[string]int{}
	best := parts[0]
	keys := make([]string, len(parts))
	for i, p := range parts {
		keys[i] = key(p)
		count[keys[i]]++
	}
	most := 0
	for i, p := range parts {
		if n := count[keys[i]]; n > most {
			most, best = n, p
		}
	}
	return best
}

// trait is something in which all parts of a computation agree.
type trait struct{ what, value string }

func traits(p *Part) []trait {
	out := []trait{
		{"kind", p.Kind}, {"limsup version", p.Limsup}, {"architecture", p.Architecture},
		{"number of shares", strconv.Itoa(p.N)}, {"seed", strconv.FormatUint(p.Seed, 10)}, {"plan", planText(p.Plan)},
		{"number of inputs", strconv.Itoa(len(p.Inputs))},
	}
	for _, in := range p.Inputs {
		out = append(out, trait{in.Role + " of SHA-256", in.SHA256}, trait{in.Role + " file", strconv.Quote(in.Name)})
	}
	return append(out, trait{"number of jobs", strconv.Itoa(p.Jobs)})
}

func key(p *Part) string { return fmt.Sprintf("%q", traits(p)) }

// foreign tells the first trait in which p differs from the model, or from the
// version that is going to use it.
func foreign(p, model *Part, limsup string) error {
	want := traits(model)
	for i, t := range traits(p) {
		if t != want[i] {
			return &ForeignError{p.File, t.what, t.value, want[i].value, model.File}
		}
	}
	if limsup != "" && p.Limsup != limsup {
		return &ForeignError{p.File, "limsup version", p.Limsup, limsup, "this program"}
	}
	return nil
}

// planText writes a plan as flags.
func planText(plan []Flag) string {
	var out []string
	for _, f := range plan {
		for _, v := range f.Values {
			out = append(out, "--"+f.Name+"="+v)
		}
	}
	if slices.ContainsFunc(out, func(s string) bool { return strings.ContainsAny(s, " \t\n\"") }) {
		for i := range out {
			out[i] = strconv.Quote(out[i])
		}
	}
	return "(" + strings.Join(out, " ") + ")"
}
