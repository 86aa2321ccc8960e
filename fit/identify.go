package fit

import (
	"fmt"
	"math"
	"slices"
	"sort"
	"strings"

	"gonum.org/v1/gonum/mat"
)

// Identity says what the data tell apart.
type Identity struct {
	// Condition is the ratio of the largest to the smallest singular value of the
	// weighted derivatives, each column scaled to length one. 1 is perfect.
	Condition float64
	// Inflation is the largest ratio of a standard uncertainty to the one that would be
	// left if all other locations were known: the root of the variance inflation
	// factor 1/(1−R²). Above 10 parameters are one direction for practical purposes.
	Inflation float64
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
	// poorInflation: beyond it 99 % of the effect of a parameter on the readings can be
	// imitated by the others, and a usual data set says nothing about it alone.
	poorInflation = 10
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
		d.hopeless(labels(active, l), lik)
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
		d.hopeless(direction(&vectors, active, l), lik)
		return d
	}
	var chol mat.Cholesky
	if !chol.Factorize(s) {
		d.hopeless(direction(&vectors, active, l), lik)
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
	worst := 0
	for a := range k {
		if f := math.Sqrt(d.cov.At(a, a)); f > d.Inflation {
			d.Inflation, worst = f, a
		}
	}
	for a := range k {
		for b := a; b < k; b++ {
			d.cov.SetSym(a, b, d.cov.At(a, b)/(scale[a]*scale[b]))
		}
	}
	switch {
	case d.Inflation > poorInflation:
		names := direction(&vectors, active, l)
		if name, ok := l.oneOf(names); ok {
			d.Warnings = append(d.Warnings, "the data show no difference between the groups of "+name+": its pooled values are practically one")
			break
		}
		d.Warnings = append(d.Warnings, fmt.Sprintf("in practice the data do not tell apart %s: were the others known, %s would be known %.0f times better. %s",
			join(names), l.theta[active[worst]].Label(), d.Inflation, advice(names, lik)))
	case len(d.Correlated) > 0:
		c := d.Correlated[0]
		more := ""
		if n := len(d.Correlated) - 1; n > 0 {
			more = fmt.Sprintf(" (and %d more pairs above %.2f)", n, strongCorrelation)
		}
		d.Warnings = append(d.Warnings, fmt.Sprintf("%s and %s are correlated by %.3f%s: a combination of them is known better than either. %s",
			c.A, c.B, c.Value, more, advice([]string{c.A, c.B}, lik)))
	}
	return d
}

// hopeless records parameters that the data do not tell apart at all.
func (d *Identity) hopeless(names []string, lik *likelihood) {
	d.Reason = "the data do not tell apart " + join(names)
	d.Warnings = append(d.Warnings, d.Reason+": they move every reading in the same proportion. "+advice(names, lik))
}

func labels(active []int, l *layout) []string {
	var names []string
	for _, i := range active {
		names = append(names, l.theta[i].Label())
	}
	return names
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

// oneOf names the pooled parameter to which all labels belong, if there is one.
func (l *layout) oneOf(labels []string) (name string, ok bool) {
	for _, p := range l.pools {
		members := make([]string, 0, len(p.values)+1)
		for _, i := range p.values {
			members = append(members, l.theta[i].Label())
		}
		if p.mean >= 0 {
			members = append(members, l.theta[p.mean].Label())
		}
		if !slices.ContainsFunc(labels, func(s string) bool { return !slices.Contains(members, s) }) {
			return l.psi[p.spread].Name, true
		}
	}
	return "", false
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

// variety is what the rows already vary.
type variety struct{ flux, pressure, fluid, ownFlux bool }

// Rows vary flux if their limits span two decades of it, pressure if they span two
// bar.
func varietyOf(lik *likelihood) variety {
	var v variety
	loJ, hiJ := math.Inf(1), math.Inf(-1)
	loP, hiP := math.Inf(1), math.Inf(-1)
	for i := range lik.obs {
		o := &lik.obs[i]
		loP, hiP = math.Min(loP, o.Pressure), math.Max(hiP, o.Pressure)
		if l := &lik.limit[i]; !l.atSpinodal {
			loJ, hiJ = math.Min(loJ, l.lnJ/math.Ln10), math.Max(hiJ, l.lnJ/math.Ln10)
		}
		v.ownFlux = v.ownFlux || o.OwnFlux
		v.fluid = v.fluid || o.Record.Key != lik.obs[0].Record.Key
	}
	v.flux = hiJ-loJ > 2
	v.pressure = hiP-loP > 2e5
	return v
}

// advice says which measurement would separate parameters: of what would help, what
// the rows do not vary yet.
func advice(names []string, lik *likelihood) string {
	has := map[string]bool{}
	for _, s := range names {
		name, _, _ := strings.Cut(s, "[")
		has[name] = true
	}
	v := varietyOf(lik)
	flux := has[Threshold] || has[Prefactor]
	equation := has[Slope] || has[Attraction] || has[Covolume]
	var help []string
	say := func(wanted bool, s string) {
		if wanted {
			help = append(help, s)
		}
	}
	switch {
	case has[Threshold] && has[Prefactor]:
		return "Only rows with their own flux (droplet volume and heating rate, holding time, or lifetime) separate prefactor from threshold."
	case has[Offset] && !flux && !equation && !has[SurfaceTension]:
		return "Measuring one fluid at one pressure in both groups would separate them."
	}
	say(!v.flux && (flux || has[SurfaceTension] || has[Tolman]), "another flux (a droplet volume or a heating rate a hundred times different)")
	say(!v.pressure, "another pressure")
	say(!v.fluid && (flux || equation), "another fluid")
	say(has[Offset] && flux, "one fluid at one pressure and flux in both groups")
	say(equation, "an anchor (vapour-pressure, liquid-density)")
	say(has[SurfaceTension] || has[Tolman], "a prior on the surface tension")
	if len(help) == 0 {
		return "More readings, over a wider range of flux and pressure, would separate them."
	}
	sentence := strings.Join(help, ", or ")
	return strings.ToUpper(sentence[:1]) + sentence[1:] + " would separate them."
}
