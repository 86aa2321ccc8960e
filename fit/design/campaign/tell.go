package campaign

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/stat/distuv"

	"limsup/fit"
	"limsup/fit/design"
)

// This file tells two variants apart. With κ the share of the way from the rival to
// the model,
//
//	T = T_rival(θ) + κ·(T_model − T_rival(θ₀)),
//
// a reading tells about κ by the difference of the two limits and about θ by the
// gradient of the rival, which is free to follow. 1/u(κ)² is then what is left of
// the sum of squared differences when the rival is refitted: the criterion T of A. C.
// Atkinson and V. V. Fedorov, Biometrika 62 (1975) 57, linearised in θ and with the
// measurements at hand, in the comprehensive model of D. R. Cox, Proc. 4th Berkeley
// Symp. 1 (1961) 105. (Citations from memory.)

// Tell is how well the model and its rival can be told apart if the model is true.
type Tell struct {
	Rival string
	// UBefore, UAfter, USpaced are the standard uncertainty of κ; the model is κ = 1,
	// the rival κ = 0.
	UBefore, UAfter, USpaced float64
	// PowerBefore, PowerAfter, PowerSpaced are the probability that the rival is
	// rejected at 95 %.
	PowerBefore, PowerAfter, PowerSpaced float64
	// RightAfter is the probability that the model fits better than its rival: κ > ½.
	RightAfter float64
}

// tellLevel is the level at which a rival is rejected.
const tellLevel = 0.95

// tellProblem is the choice in the space (κ, θ of the rival).
func (p *Plan) tellProblem(share float64) (*design.Problem, error) {
	rival := p.Target.Rival
	s := newSpace(rival.Model, rival.Calibration, p.Fresh)
	if len(rival.Model.Parameters) == 0 {
		s.notes = nil
	}
	sensitivities := make([]fit.Sensitivity, len(p.Readings))
	for i := range p.Readings {
		x, err := rival.Model.Sensitivity(p.Readings[i].Query())
		if err != nil {
			return nil, err
		}
		s.reach(&x, false)
		sensitivities[i] = x
	}
	n := len(s.params)
	wide := func(κ float64, row []float64) []float64 { return append([]float64{κ}, row...) }
	q := &design.Problem{Prior: s.information(1, share), Criterion: design.Criterion{Kind: design.Linear, Directions: [][]float64{wide(1, make([]float64, n))}}}
	for i := range p.Readings {
		r := &p.Readings[i]
		rows := s.factors(&sensitivities[i], r.variance)
		irr, _ := s.model.Noise.ReadingInformation(&sensitivities[i], r.variance)
		c := design.Candidate{Most: r.Most}
		for k, row := range rows {
			κ := 0.0
			if k == 0 {
				κ = -r.Difference * math.Sqrt(irr)
			}
			c.Rows = append(c.Rows, wide(κ, row))
		}
		q.Candidates = append(q.Candidates, c)
	}
	if err := p.tellBefore(q, s); err != nil {
		return nil, err
	}
	for _, note := range s.notes {
		if note = rival.Name + ": " + note; !slices.Contains(p.Notes, note) {
			p.Notes = append(p.Notes, note)
		}
	}
	return q, nil
}

// tellBefore adds what the measurements at hand tell about κ: their curvature with
// respect to κ and, mixed, to the locations of the rival.
func (p *Plan) tellBefore(q *design.Problem, s *space) error {
	m := q.Prior
	// Next to nothing is known of κ before any measurement: a standard deviation of a
	// thousand shares keeps the first step well posed and no more.
	m.SetSym(0, 0, 1e-6)
	rival := p.Target.Rival
	c := rival.Calibration
	if p.Fresh || p.Data == nil || c == nil {
		return nil
	}
	for i := range c.Rows {
		row := &c.Rows[i]
		o := &c.Data.Observations[row.Index]
		if o.Outcome != 0 {
			continue // a bound, not a reading
		}
		x, err := p.Model.Predict(o.Query())
		if err != nil {
			return err
		}
		δ := x.Temperature - row.Predicted
		y, err := rival.Model.Sensitivity(o.Query())
		if err != nil {
			return err
		}
		irr, _ := s.model.Noise.ReadingInformation(&y, row.Variance)
		m.SetSym(0, 0, m.At(0, 0)+float64(irr*δ*δ))
		for k, g := range row.Gradient {
			if at, ok := s.own[k]; ok && g != 0 {
				m.SetSym(0, at+1, m.At(0, at+1)+float64(irr*δ*g))
			}
		}
	}
	return nil
}

// tell fills the probabilities.
func (p *Plan) tell() {
	t := &Tell{Rival: p.Target.Rival.Name, UBefore: p.Before, UAfter: p.After, USpaced: p.Spaced}
	t.PowerBefore, t.PowerAfter, t.PowerSpaced = design.Power(t.UBefore, tellLevel), design.Power(t.UAfter, tellLevel), design.Power(t.USpaced, tellLevel)
	t.RightAfter = distuv.UnitNormal.CDF(0.5 / t.UAfter)
	p.Tell = t
}
