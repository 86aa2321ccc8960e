package fit

import (
	"fmt"
	"math"
	"sort"
	"strings"

	"gonum.org/v1/gonum/mat"
)

// Identity says what the data tell apart.
type Identity struct {
	// Condition is the ratio of the largest to the smallest singular value of the
	// weighted derivatives, each column scaled to length one. 1 is perfect; above
	// 1e4 two parameters are one direction for practical purposes.
	Condition float64
	// SingularValues of the scaled derivatives in falling order.
	SingularValues []float64
	// Correlated pairs, |correlation| > 0.95, strongest first.
	Correlated []Correlation
	AtBound    []string
	// Reason says why there is no covariance, or is empty.
	Reason   string
	Warnings []string

	cov *mat.SymDense
}

// Correlation of two estimates.
type Correlation struct {
	A, B  string
	Value float64
}

// covariance of the active parameters.
func (d *Identity) covariance() (*mat.SymDense, bool) { return d.cov, d.cov != nil }

// Thresholds of the identifiability report.
const (
	strongCorrelation = 0.95
	// hopelessCondition is where the smallest eigenvalue of the scaled information,
	// 1/condition², is lost in the rounding of the sums that form it.
	hopelessCondition = 1e7
	poorCondition     = 1e4
)

// identify studies the information matrix of the active parameters, scaled to a
// unit diagonal: its eigenvalues are the squares of the scaled singular values.
func identify(h *mat.SymDense, active []int, l *layout, lik *likelihood) Identity {
	var d Identity
	for i := range l.theta {
		f := &l.theta[i]
		if lik.at == nil {
			continue
		}
		if side := atBound(lik.at[i], f); side != "" {
			d.AtBound = append(d.AtBound, f.Label())
			d.Warnings = append(d.Warnings, fmt.Sprintf("%s stands at its %s bound, %.6g: the data ask for a value beyond it; it has no uncertainty and the others are taken as if it were known", f.Label(), side, lik.at[i]))
		}
	}
	k := len(active)
	if k == 0 {
		d.Reason = "no active parameter"
		return d
	}
	scale := make([]float64, k)
	for a, i := range active {
		scale[a] = math.Sqrt(h.At(i, i))
		if !(scale[a] > 0) {
			d.Reason = l.theta[i].Label() + " has no effect on any reading"
			d.Warnings = append(d.Warnings, d.Reason)
			return d
		}
	}
	s := mat.NewSymDense(k, nil)
	for a, i := range active {
		for b := a; b < k; b++ {
			s.SetSym(a, b, h.At(i, active[b])/(scale[a]*scale[b]))
		}
	}
	var eig mat.EigenSym
	if !eig.Factorize(s, true) {
		d.Reason = "the information matrix could not be decomposed"
		d.Warnings = append(d.Warnings, d.Reason)
		return d
	}
	values := eig.Values(nil)
	for i := k - 1; i >= 0; i-- {
		d.SingularValues = append(d.SingularValues, math.Sqrt(math.Max(0, values[i])))
	}
	largest, smallest := d.SingularValues[0], d.SingularValues[k-1]
	d.Condition = largest / math.Max(smallest, largest/1e12)
	var vectors mat.Dense
	eig.VectorsTo(&vectors)
	if d.Condition > hopelessCondition {
		names := direction(&vectors, active, l)
		d.Reason = "the data do not tell apart " + join(names)
		d.Warnings = append(d.Warnings, d.Reason+": they move every reading in the same proportion. "+advice(names, lik))
		return d
	}
	var chol mat.Cholesky
	if !chol.Factorize(s) {
		d.Reason = "the information matrix is not positive definite"
		d.Warnings = append(d.Warnings, d.Reason)
		return d
	}
	d.cov = mat.NewSymDense(k, nil)
	if err := chol.InverseTo(d.cov); err != nil && !isCondition(err) {
		d.cov, d.Reason = nil, err.Error()
		return d
	}
	for a := range k {
		for b := a + 1; b < k; b++ {
			r := d.cov.At(a, b) / math.Sqrt(d.cov.At(a, a)*d.cov.At(b, b))
			if math.Abs(r) > strongCorrelation {
				d.Correlated = append(d.Correlated, Correlation{l.theta[active[a]].Label(), l.theta[active[b]].Label(), r})
			}
		}
	}
	sort.SliceStable(d.Correlated, func(i, j int) bool {
		return math.Abs(d.Correlated[i].Value) > math.Abs(d.Correlated[j].Value)
	})
	for a := range k {
		for b := a; b < k; b++ {
			d.cov.SetSym(a, b, d.cov.At(a, b)/(scale[a]*scale[b]))
		}
	}
	if d.Condition > poorCondition {
		names := direction(&vectors, active, l)
		d.Warnings = append(d.Warnings, fmt.Sprintf("the data barely tell apart %s (condition %.1e). %s", join(names), d.Condition, advice(names, lik)))
	} else if len(d.Correlated) > 0 {
		c := d.Correlated[0]
		more := ""
		if n := len(d.Correlated) - 1; n > 0 {
			more = fmt.Sprintf(" (and %d more pairs above %.2f)", n, strongCorrelation)
		}
		d.Warnings = append(d.Warnings, fmt.Sprintf("%s and %s are correlated by %.3f%s: their sum is known better than either. %s",
			c.A, c.B, c.Value, more, advice([]string{c.A, c.B}, lik)))
	}
	return d
}

// direction names the parameters that make up the weakest direction.
func direction(vectors *mat.Dense, active []int, l *layout) []string {
	top := 0.0
	for a := range active {
		top = math.Max(top, math.Abs(vectors.At(a, 0)))
	}
	var names []string
	for a, i := range active {
		if math.Abs(vectors.At(a, 0)) > 0.2*top {
			names = append(names, l.theta[i].Label())
		}
	}
	return names
}

func join(names []string) string {
	switch n := len(names); {
	case n == 0:
		return "the parameters"
	case n == 1:
		return names[0]
	case n > 6:
		return strings.Join(names[:5], ", ") + fmt.Sprintf(" and %d others", n-5)
	default:
		return strings.Join(names[:n-1], ", ") + " and " + names[n-1]
	}
}

// advice says which measurement would separate parameters.
func advice(labels []string, lik *likelihood) string {
	has := map[string]bool{}
	for _, s := range labels {
		name, _, _ := strings.Cut(s, "[")
		has[name] = true
	}
	fluids, _ := groups(lik.obs, ByFluid)
	flux := has[Threshold] || has[Prefactor]
	switch {
	case has[Threshold] && has[Prefactor]:
		return "Only rows with their own flux (droplet volume and heating rate, holding time, or lifetime) separate prefactor from threshold."
	case flux && (has[SurfaceTension] || has[Tolman]):
		return "A second flux (another droplet volume or a heating rate a hundred times different) or a second pressure would separate them; so would a prior on the surface tension."
	case flux && (has[Slope] || has[Attraction] || has[Covolume]):
		return "Another pressure, another fluid, or an anchor (vapour-pressure, liquid-density) would separate them."
	case has[Slope] && has[Attraction] || has[Attraction] && has[Covolume] || has[Slope] && has[Covolume]:
		return "An anchor (vapour-pressure, liquid-density) would separate them; so would limits over a wider range of pressure."
	case has[Offset] && len(fluids) > 1:
		return "Measuring one fluid at one pressure with both methods would separate them."
	case has[SurfaceTension] && has[Tolman]:
		return "Limits over a wider range of pressure would separate them."
	}
	return "Measurements at another flux, another pressure or on another fluid would separate them."
}
