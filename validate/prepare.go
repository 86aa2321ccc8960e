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
		if err := m.lowerStart(set, lib); err != nil {
			return nil, err
		}
		add(m)
	}
	return out, nil
}

// lowerStart starts the search for a threshold lower where more rows can be predicted
// there: a flux of 10¹² is more than some equations reach for some fluids, and where
// the search starts is no part of a tuned model. A start that was chosen is kept.
func (m *member) lowerStart(set *measure.Set, lib *fluid.Library) error {
	free := slices.ContainsFunc(m.Plan.Terms, func(t fit.Term) bool { return t.Name == fit.Threshold })
	given := slices.ContainsFunc(m.Plan.Starts, func(s fit.Setting) bool { return s.Name == fit.Threshold })
	if !free || given {
		return nil
	}
	plan, before := m.Plan, len(m.data.Observations)
	for s := start(fit.Threshold) - 2; s >= 0 && len(m.data.Observations) < len(set.Rows); s -= 2 {
		p := plan
		p.Starts = append(slices.Clone(plan.Starts), fit.Setting{Name: fit.Threshold, Value: s})
		d, err := fit.Prepare(set, lib, p)
		if err != nil {
			return err
		}
		if len(d.Observations) > len(m.data.Observations) {
			m.Plan, m.data = p, d
			m.note = fmt.Sprintf("the search starts at threshold %g: with the usual %g it predicts %d rows only", s, start(fit.Threshold), before)
		}
	}
	return nil
}
