package validate

import (
	"fmt"
	"slices"

	"limsup/data/fluid"
	"limsup/data/measure"
	"limsup/fit"
)

// prepare finds the rows that each candidate can predict, the untuned form of each
// candidate before it. Repeated candidates are joined.
func prepare(set *measure.Set, lib *fluid.Library, candidates []Candidate) ([]member, error) {
	var out []member
	names := map[string]bool{}
	add := func(m member) {
		if !names[m.name] {
			names[m.name] = true
			out = append(out, m)
		}
	}
	for _, k := range candidates {
		d, err := fit.Prepare(set, lib, k.Plan)
		if err != nil {
			return nil, err
		}
		if k, err = k.resolve(len(d.Observations) > 0 && d.OwnFlux() == len(d.Observations)); err != nil {
			return nil, err
		}
		u, err := k.untuned()
		if err != nil {
			return nil, err
		}
		add(member{Candidate: u, name: u.name(), data: d})
		if k.UntunedOnly {
			continue
		}
		m := member{Candidate: k, name: k.name(), untuned: u.name(), data: d}
		if err := m.moveStart(set, lib); err != nil {
			return nil, err
		}
		add(m)
	}
	return out, nil
}

// reach lists other starts, in the order in which they are tried, for parameters on
// which it depends whether a flux is reached at all.
var reach = map[string][]float64{
	fit.Threshold: {10, 8, 6, 4, 2, 0},
	fit.Prefactor: {2, 4, 6, 8, 10, 12},
}

// moveStart starts the search for a threshold lower, or for a prefactor higher, where
// more rows can be predicted there: a flux of 10¹² is more than some equations reach for
// some fluids, and where the search starts is no part of a tuned model. A start that was
// chosen is kept.
func (m *member) moveStart(set *measure.Set, lib *fluid.Library) error {
	plan, before := m.Plan, len(m.data.Observations)
	for _, t := range plan.Terms {
		given := slices.ContainsFunc(plan.Starts, func(s fit.Setting) bool { return s.Name == t.Name })
		for _, s := range reach[t.Name] {
			if given || len(m.data.Observations) == len(set.Rows) {
				break
			}
			p := plan
			p.Starts = append(slices.Clone(plan.Starts), fit.Setting{Name: t.Name, Value: s})
			d, err := fit.Prepare(set, lib, p)
			if err != nil {
				return err
			}
			if len(d.Observations) > len(m.data.Observations) {
				m.Plan, m.data = p, d
				m.note = fmt.Sprintf("the search starts at %s %g: with the usual %g it predicts %d rows only", t.Name, s, start(t.Name), before)
			}
		}
	}
	return nil
}
