package fit

import "math"

// Effect is the derivative of a predicted limit with respect to one tuned
// parameter.
type Effect struct {
	// At is the index of the parameter in Model.Parameters, or -1 for the value of a
	// group that no row was measured of; Label names that value, "slope[n-octane]".
	At         int
	Label      string
	Unit       string
	Derivative float64 // K per unit of the parameter

	// What is known of a group without rows: a normal distribution about the
	// parameter with index Mean of standard deviation Tau, or, with Mean -1, no more
	// than the bounds.
	Mean         int
	Tau          float64
	Value        float64
	Lower, Upper float64
}

// Sensitivity is how a limit depends on the parameters of a model.
type Sensitivity struct {
	Prediction
	Effects []Effect // parameters on which the limit does not depend are left out
	// SpreadAt is the index of the spread of such a reading in Model.Parameters, or
	// -1; Spread is its value in K.
	SpreadAt int
	Spread   float64
	// Steepness is dlnJ/dT at the limit in 1/K; 0 for a spinodal.
	Steepness float64
	OwnFlux   bool // of the query
}

// Sensitivity predicts the limit of a query at a given pressure together with its
// derivatives by the implicit function theorem.
//
// Errors: as Predict.
func (m *Model) Sensitivity(q Query) (Sensitivity, error) {
	v, found := m.values(&q)
	ph, err := NewPhysics(m.Variant, q.Record, v)
	if err != nil {
		return Sensitivity{}, err
	}
	find := ph.limit
	if q.OrSpinodal {
		find = ph.limitOrSpinodal
	}
	l, err := find(q.Pressure, q.Target, q.OwnFlux, 0)
	if err != nil {
		return Sensitivity{}, err
	}
	s := Sensitivity{Spread: m.Spread(&q), SpreadAt: -1, Steepness: l.steepness, OwnFlux: q.OwnFlux}
	if s.Prediction, err = m.Predict(q); err != nil {
		return Sensitivity{}, err
	}
	for i := range m.Parameters {
		if e := &m.Parameters[i]; e.Name == Spread && e.Group == m.groupFor(e.By, &q) {
			s.SpreadAt = i
		}
	}
	for i, f := range found {
		d := derivative(&l.d, i)
		if d == 0 {
			continue
		}
		switch {
		case f.at >= 0 && f.variance == 0 && m.Parameters[f.at].Role == RoleValue:
			e := &m.Parameters[f.at]
			s.Effects = append(s.Effects, Effect{At: f.at, Label: e.Label(), Unit: e.Unit, Derivative: d, Mean: -1, Value: e.Value, Lower: e.Lower, Upper: e.Upper})
		case f.foreign:
			s.Effects = append(s.Effects, m.unmeasured(locationNames[i], &q, f, d))
		}
	}
	return s, nil
}

// unmeasured is the effect of a tuned parameter in a group without rows.
func (m *Model) unmeasured(name string, q *Query, f lookup, d float64) Effect {
	out := Effect{At: -1, Derivative: d, Mean: f.at, Tau: math.Sqrt(f.variance), Value: f.value}
	for i := range m.Parameters {
		if e := &m.Parameters[i]; e.Name == name && e.Role != RolePoolSpread {
			free := Free{Name: name, By: e.By, Group: m.groupFor(e.By, q), Role: RoleValue}
			out.Label, out.Unit, out.Lower, out.Upper = free.Label(), e.Unit, e.Lower, e.Upper
			break
		}
	}
	return out
}

// ReadingInformation is what one reading of a sample whose limit is s tells about
// its limit, in 1/K², and about the variance v in K² of its error, in 1/K⁴. With
// survival noise a timed sample boils at random about its limit besides, and the
// expectations are taken over that law (survival.go):
//
//	limit: κ² E[(dln g/dx)²],   variance: κ⁴ E[(dln g/d(ρ²))²].
func (n Noise) ReadingInformation(s *Sensitivity, v float64) (limit, variance float64) {
	κ := s.Steepness
	if n.Kind != Survival || !s.OwnFlux || !(κ > 0) {
		return n.Information(v)
	}
	ρ := κ * math.Sqrt(v)
	// Below −30 the extreme-value law has a weight of e^−30, above 5 one of e^−148; the
	// normal law beyond 8 standard deviations one of 1e-15. Steps of a quarter of the
	// narrower law leave 1e-6 (halving them was measured to change less).
	lo, hi := -30-8*ρ, 5+8*ρ
	steps := int((hi-lo)/math.Max(0.1, 0.25*ρ)) + 1
	h := (hi - lo) / float64(steps)
	for i := range steps + 1 {
		ln, first, second := blurred(lo+h*float64(i), ρ, false)
		w := h * math.Exp(ln)
		if w == 0 {
			continue
		}
		q := 0.5 * (second + first*first)
		limit += float64(w * first * first)
		variance += float64(w * q * q)
	}
	return κ * κ * limit, κ * κ * κ * κ * variance
}
