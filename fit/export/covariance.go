package export

import (
	"math"

	"limsup/fit"
	"limsup/fit/export/internal/kernel"
)

// locations are the parameters that move a limit, in the order of the covariance in a
// row of constants.
var locations = [8]string{fit.Threshold, fit.Prefactor, fit.Attraction, fit.Covolume, fit.Slope, fit.SurfaceTension, fit.Tolman, fit.Offset}

// place is where a parameter of a query comes from: the index of its estimate, or -1,
// and the variance of a group that was not measured.
type place struct {
	at       int
	variance float64
}

// placeOf finds the estimate that fit.Model.Predict uses: that of the group of the
// query, else the mean of a pool with its spread.
func (s *subject) placeOf(name string, q *fit.Query) place {
	mean, pooled, spread := -1, false, 0.0
	for i := range s.model.Parameters {
		e := &s.model.Parameters[i]
		if e.Name != name {
			continue
		}
		switch e.Role {
		case fit.RolePoolMean:
			mean = i
		case fit.RolePoolSpread:
			pooled, spread = true, e.Value
		default:
			if e.Group == s.group(e.By, q) {
				return place{at: i}
			}
		}
	}
	if mean < 0 && !pooled {
		return place{at: -1}
	}
	return place{mean, spread * spread} // offsets may be scattered about zero, without a mean
}

// group is the group of a query, the reference where it names none.
func (s *subject) group(by fit.By, q *fit.Query) string {
	given := ""
	switch by {
	case fit.ByFluid:
		return q.Record.Key
	case fit.ByMethod:
		given = q.Method
	case fit.ByBatch:
		given = q.Batch
	}
	if given == "" {
		return s.model.References[string(by)]
	}
	return given
}

// covarianceColumns fills in offset, spread and the covariance of the parameters of a
// query. Whether there is an uncertainty at all is asked of the model itself, later.
func (s *subject) covarianceColumns(c []float64, q *fit.Query) {
	var at [len(locations)]place
	for i, name := range locations {
		at[i] = s.placeOf(name, q)
	}
	if o := at[len(locations)-1]; o.at >= 0 {
		c[kernel.KOffset] = s.model.Parameters[o.at].Value
	} else if !(o.variance > 0) {
		c[kernel.KOffset] = s.setting(fit.Offset)
	}
	if !s.model.Calibrated || s.model.Covariance == nil {
		return
	}
	spread := s.spread(q)
	if n := s.model.Noise; n.Kind == fit.Student && n.Degrees > 2 {
		spread *= math.Sqrt(n.Degrees / (n.Degrees - 2))
	}
	c[kernel.KSpread] = spread * spread
	k := kernel.KCovariance
	for i := range at {
		for j := range i + 1 {
			if at[i].at >= 0 && at[j].at >= 0 {
				c[k] = s.model.Covariance.At(at[i].at, at[j].at)
			}
			if i == j {
				c[k] += at[i].variance
			}
			k++
		}
	}
}

// setting is the value of a parameter that was set for all groups, else its start.
func (s *subject) setting(name string) float64 {
	v := 0.0
	for _, p := range fit.ParameterTable() {
		if p.Name == name {
			v = p.Start
		}
	}
	for _, x := range s.model.Settings {
		if x.Name == name && x.Group == "" {
			v = x.Value
		}
	}
	return v
}

// spread is the standard deviation of a reading beyond its stated uncertainty: that of
// its group or, for a group that was not measured, the largest.
func (s *subject) spread(q *fit.Query) float64 {
	worst, tuned := 0.0, false
	for i := range s.model.Parameters {
		e := &s.model.Parameters[i]
		if e.Name != fit.Spread {
			continue
		}
		if e.Group == s.group(e.By, q) {
			return e.Value
		}
		worst, tuned = math.Max(worst, e.Value), true
	}
	if tuned {
		return worst
	}
	return s.setting(fit.Spread)
}
