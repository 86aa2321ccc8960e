package export

import (
	"math"

	"limsup/fit"
	"limsup/fit/export/internal/kernel"
)

// locations are the parameters that move a limit, in the order of the covariance in a
// row of constants.
var locations = [8]string{fit.Threshold, fit.Prefactor, fit.Attraction, fit.Covolume, fit.Slope, fit.SurfaceTension, fit.Tolman, fit.Offset}

// covarianceColumns fills in offset, spread and the covariance of the parameters of a
// query. Whether there is an uncertainty at all is asked of the model itself, later.
func (s *subject) covarianceColumns(c []float64, q *fit.Query) {
	var at [len(locations)]int
	var value, variance [len(locations)]float64
	for i, name := range locations {
		at[i], value[i], variance[i] = s.model.Origin(name, q)
	}
	c[kernel.KOffset] = value[len(locations)-1]
	if !s.model.Calibrated || s.model.Covariance == nil {
		return
	}
	spread := s.model.Spread(q)
	if n := s.model.Noise; n.Kind == fit.Student && n.Degrees > 2 {
		spread *= math.Sqrt(n.Degrees / (n.Degrees - 2))
	}
	c[kernel.KSpread] = spread * spread
	k := kernel.KCovariance
	for i := range at {
		for j := range i + 1 {
			if at[i] >= 0 && at[j] >= 0 {
				c[k] = s.model.Covariance.At(at[i], at[j])
			}
			if i == j {
				c[k] += variance[i]
			}
			k++
		}
	}
}
