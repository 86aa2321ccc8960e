package fit

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// This file makes intervals of predictions from the covariance of the parameters and
// the scatter of readings.
//
// With V_l = gᵀCg the variance of the limit, s the spread and ν_l, ν_s the degrees of
// freedom of V_l and s², those of V = V_l + s² follow from Var V. Both parts are
// estimated from the same residuals, so that their errors are added as if they were
// fully correlated: ν = V²/(V_l/√ν_l + s²/√ν_s)². Where all variance is one spread this
// is exactly the n − p of linear regression. (F. E. Satterthwaite, Biometrics Bulletin
// 2 (1946) 110, with the terms added linearly; from memory.)

// manyDegrees stands for a known variance: Student's t is normal to 1e-6 there.
const manyDegrees = 1e6

// degreesOf is ν of an estimate.
func (m *Model) degreesOf(e *Estimate) float64 {
	if e.Degrees > 0 {
		return e.Degrees
	}
	return math.Max(1, float64(m.Degrees))
}

// student is a quantile of Student's t.
func student(p, ν float64) float64 {
	if ν >= manyDegrees {
		return distuv.UnitNormal.Quantile(p)
	}
	return distuv.StudentsT{Mu: 0, Sigma: 1, Nu: ν}.Quantile(p)
}

// Interval is that of Student's t about the estimate at a two-sided level; ok is
// false where there is no uncertainty.
func (e *Estimate) Interval(level float64) (lo, hi float64, ok bool) {
	ν := e.Degrees
	if ν == 0 {
		ν = manyDegrees
	}
	w := student(0.5+level/2, ν) * e.U
	return e.Value - w, e.Value + w, e.HasU
}

// sum adds variances and keeps the degrees of freedom of the sum.
type sum struct{ v, root float64 }

func (s *sum) add(v, ν float64) {
	s.v += v
	s.root += v / math.Sqrt(ν)
}

func (s *sum) degrees() float64 {
	if !(s.root > 0) {
		return manyDegrees
	}
	return math.Min(math.Max(1, s.v*s.v/(s.root*s.root)), manyDegrees)
}

// uncertainty combines gᵀCg with the scatter of readings.
func (m *Model) uncertainty(out *Prediction, q *Query, l *limitValue, found *[locations]lookup) {
	if !m.Calibrated || m.Covariance == nil {
		return
	}
	g := make([]float64, len(m.Parameters))
	var limit sum
	complete := true
	for i, f := range found {
		d := derivative(&l.d, i)
		if f.at >= 0 {
			g[f.at] += d
			e := &m.Parameters[f.at]
			if !e.HasU && d != 0 && e.AtBound == "" {
				complete = false
			}
		}
		if f.variance > 0 {
			limit.add(d*d*f.variance, m.poolDegrees(locationNames[i]))
		}
	}
	if !complete {
		out.Warnings = append(out.Warnings, "no uncertainty: the calibration has none for a parameter that the limit depends on")
		return
	}
	// The degrees of gᵀCg are those of its parameters, weighted by their parts g²C of it.
	parts, root := 0.0, 0.0
	for i := range g {
		if e := &m.Parameters[i]; g[i] != 0 && e.HasU {
			c := g[i] * g[i] * e.U * e.U
			parts += c
			root += c / math.Sqrt(m.degreesOf(e))
		}
	}
	if parts > 0 {
		limit.add(quadratic(m.Covariance, g), parts*parts/(root*root))
	}
	out.HasU = true
	out.ULimit = math.Sqrt(limit.v)

	s, ν := m.spreadOf(q)
	total := limit
	total.add(s*s, ν)
	out.Degrees = total.degrees()
	out.spread, out.steepness = s, l.steepness
	m.scatter(q, l, s, out)
	out.UPressure = math.Abs(out.U / l.dTdP)
	if q.LimitOnly {
		return
	}
	t := student(0.975, limit.degrees())
	limitLow, limitHigh := -t*out.ULimit, t*out.ULimit
	low, high := m.reach(q, l, s, out)
	scale, centre := 1.0, out.Temperature
	if q.AtTemperature {
		scale, centre = 1/math.Abs(l.dTdP), out.Pressure
		if l.dTdP > 0 { // a reading above the line of limits boils at a lower pressure
			low, high = -high, -low
		}
	}
	out.Low, out.High = centre+scale*low, centre+scale*high
	out.LimitLow, out.LimitHigh = centre+scale*limitLow, centre+scale*limitHigh
}

// scatter fills the standard uncertainty of a new reading with the spread s.
func (m *Model) scatter(q *Query, l *limitValue, s float64, out *Prediction) {
	u := out.ULimit
	out.U = math.Hypot(u, s)
	switch κ := l.steepness; {
	case m.Noise.Kind == Student:
		if n := m.Noise.Degrees; n > 2 {
			out.U = math.Sqrt(u*u + s*s*n/(n-2))
		} else { // no finite variance: the scale
			out.Warnings = append(out.Warnings, "student noise of two or fewer degrees of freedom has no standard deviation; its scale is given instead")
		}
	case m.Noise.Kind == Survival && q.Hazard > 0 && κ > 0:
		out.U = math.Sqrt(u*u + s*s + varianceLogHazard/(κ*κ))
	}
}

// reach is the 95 % interval of a new reading about the limit, in K.
func (m *Model) reach(q *Query, l *limitValue, s float64, out *Prediction) (low, high float64) {
	u, ν := out.ULimit, out.Degrees
	switch κ := l.steepness; {
	case m.Noise.Kind == Student:
		w := math.Hypot(student(0.975, ν)*u, student(0.975, m.Noise.Degrees)*s)
		return -w, w
	case m.Noise.Kind == Survival && q.Hazard > 0 && κ > 0:
		blur := math.Hypot(u, s) * student(0.975, ν) / student(0.975, manyDegrees)
		// P(reading above y) falls from 1 to 0.
		quantile := func(p float64) float64 {
			w := 20/κ + 10*blur
			lo, hi := -w, w
			for range 60 {
				y := 0.5 * (lo + hi)
				if ln, _, _ := blurred(κ*y+math.Log(q.Hazard), κ*blur, true); math.Exp(ln) > p {
					lo = y
				} else {
					hi = y
				}
			}
			return 0.5 * (lo + hi)
		}
		return quantile(0.975), quantile(0.025)
	}
	w := student(0.975, ν) * out.U
	return -w, w
}

// Level is the two-sided level of the interval of a new reading that ends r kelvins from
// the limit p of the query q, for a reading of stated variance v in K². A reading lies
// inside all intervals of a higher level. The law is that of Predict, whose scale is
// widened for the uncertainty of the limit as its interval of 95 % asks for. p must have
// an uncertainty.
func (m *Model) Level(q *Query, p *Prediction, r, v float64) float64 {
	var total sum
	total.add(p.ULimit*p.ULimit+p.spread*p.spread, p.Degrees)
	total.add(v, math.Inf(1)) // known
	ν, s := total.degrees(), math.Hypot(p.spread, math.Sqrt(v))
	switch κ := p.steepness; {
	case m.Noise.Kind == Student:
		n := m.Noise.Degrees
		u := p.ULimit * student(0.975, ν) / student(0.975, n)
		return central(math.Abs(r)/math.Hypot(u, s), n)
	case m.Noise.Kind == Survival && q.Hazard > 0 && κ > 0:
		blur := math.Hypot(p.ULimit, s) * student(0.975, ν) / student(0.975, manyDegrees)
		above, _, _ := blurred(κ*r+math.Log(q.Hazard), κ*blur, true)
		return math.Abs(1 - 2*math.Exp(above))
	}
	return central(math.Abs(r)/math.Hypot(p.ULimit, s), ν)
}

// central is the probability of Student's t between −z and z.
func central(z, ν float64) float64 {
	if ν >= manyDegrees {
		return math.Erf(z / math.Sqrt2)
	}
	return 2*distuv.StudentsT{Mu: 0, Sigma: 1, Nu: ν}.CDF(z) - 1
}

// poolDegrees are those of the variance between groups of a pooled parameter.
func (m *Model) poolDegrees(name string) float64 {
	for i := range m.Parameters {
		if e := &m.Parameters[i]; e.Name == name && e.Role == RolePoolSpread {
			return m.spreadDegrees(e)
		}
	}
	return manyDegrees
}

// spreadDegrees are those of the square of a spread: Var(s²) = 4s²u² = 2s⁴/ν.
func (m *Model) spreadDegrees(e *Estimate) float64 {
	if !e.HasU || !(e.U > 0) {
		return m.degreesOf(e)
	}
	return math.Min(math.Max(1, e.Value*e.Value/(2*e.U*e.U)), manyDegrees)
}

// spreadOf is the spread of a reading of the query in K with the degrees of freedom
// of its square: that of its group or, for a group that was not measured, the largest.
func (m *Model) spreadOf(q *Query) (s, ν float64) {
	tuned := false
	for i := range m.Parameters {
		e := &m.Parameters[i]
		if e.Name != Spread {
			continue
		}
		if e.Group == m.groupFor(e.By, q) {
			return e.Value, m.spreadDegrees(e)
		}
		if !tuned || e.Value > s {
			s, ν = e.Value, m.spreadDegrees(e)
		}
		tuned = true
	}
	if !tuned {
		if p, err := parameterOf(Spread, &m.Variant); err == nil {
			s = m.settings.value(p, "")
		}
		ν = manyDegrees
	}
	return s, ν
}
