package campaign

import (
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/gonum/mat"

	"limsup/fit"
)

// Parameter is one element of the vector in which a campaign is planned.
type Parameter struct {
	Label, Unit string
	Value       float64
	Spread      bool // a property of the scatter of the readings, not a location
	// Assumed is set where no more than the bounds is known before.
	Assumed       bool
	Before, After float64 // standard uncertainty before and after the batch

	diffuse float64 // the standard deviation of the bounds, where not even they are used
}

// space is the vector of parameters with what is known of it: those of a model,
// then the values of groups that no row was measured of.
type space struct {
	model   *fit.Model
	params  []Parameter
	own     map[int]int    // index in model.Parameters → index here
	extra   map[string]int // label of a group without rows → index here
	entries []entry        // of the information before
	notes   []string
}

// entry is one element of the upper triangle of an information matrix.
type entry struct {
	i, j   int
	v      float64
	bounds bool // it stands for the bounds of a parameter
}

// newSpace lays out the parameters of a calibrated model. c may be nil, where the
// model comes from a file; fresh forgets the measurements.
func newSpace(m *fit.Model, c *fit.Calibration, fresh bool) *space {
	s := &space{model: m, own: map[int]int{}, extra: map[string]int{}}
	for i := range m.Parameters {
		e := &m.Parameters[i]
		if e.Role == fit.RolePoolSpread || e.AtBound != "" && !fresh {
			continue
		}
		s.own[i] = len(s.params)
		s.params = append(s.params, Parameter{Label: e.Label(), Unit: e.Unit, Value: e.Value, Spread: e.Name == fit.Spread || e.Name == fit.DegreesOfNoise})
	}
	if fresh {
		s.forget(c)
		return s
	}
	s.know(c)
	return s
}

// know takes over the covariance of the model or, where there is none, the
// information of the calibration and the bounds.
func (s *space) know(c *fit.Calibration) {
	var locations, spreads []int // in model.Parameters
	complete := s.model.Covariance != nil
	for i := range s.model.Parameters {
		k, ok := s.own[i]
		if !ok {
			continue
		}
		e := &s.model.Parameters[i]
		switch {
		case !s.params[k].Spread:
			locations = append(locations, i)
			complete = complete && e.HasU
		case e.HasU && e.U > 0:
			spreads = append(spreads, i)
		default:
			s.bound(k, e.Lower, e.Upper)
		}
	}
	if len(spreads) > 0 && !s.inverse(spreads) {
		for _, i := range spreads {
			u := s.model.Parameters[i].U
			s.entries = append(s.entries, entry{s.own[i], s.own[i], 1 / (u * u), false})
		}
	}
	if len(locations) == 0 || complete && s.inverse(locations) {
		return
	}
	if c == nil {
		s.notes = append(s.notes, "the model file holds no covariance: planned as if no more than the bounds of the parameters were known; give the data without --model to use what they tell")
	} else {
		s.notes = append(s.notes, "the data do not determine the parameters; where they tell nothing, the bounds stand in")
		for a, i := range locations {
			for _, j := range locations[a:] {
				s.entries = append(s.entries, entry{s.own[i], s.own[j], c.Information.At(i, j), false})
			}
		}
	}
	for _, i := range locations {
		s.bound(s.own[i], s.model.Parameters[i].Lower, s.model.Parameters[i].Upper)
	}
}

// inverse adds the inverse of a block of the covariance; false where it has none.
func (s *space) inverse(block []int) bool {
	n := len(block)
	scale := make([]float64, n)
	for a, i := range block {
		scale[a] = math.Sqrt(s.model.Covariance.At(i, i))
		if !(scale[a] > 0) {
			return false
		}
	}
	c := mat.NewSymDense(n, nil)
	for a, i := range block {
		for b := a; b < n; b++ {
			c.SetSym(a, b, s.model.Covariance.At(i, block[b])/(scale[a]*scale[b]))
		}
	}
	var chol mat.Cholesky
	inv := mat.NewSymDense(n, nil)
	if !chol.Factorize(c) {
		return false
	}
	if err := chol.InverseTo(inv); err != nil {
		if _, ok := err.(mat.Condition); !ok {
			return false
		}
	}
	for a, i := range block {
		for b := a; b < n; b++ {
			s.entries = append(s.entries, entry{s.own[i], s.own[block[b]], inv.At(a, b) / (scale[a] * scale[b]), false})
		}
	}
	return true
}

// forget leaves of a calibration what was known before the measurements: bounds,
// priors, and that pooled groups are alike.
func (s *space) forget(c *fit.Calibration) {
	s.notes = append(s.notes, "planned as if nothing had been measured: the parameters have the values of the calibration and the uncertainty of their bounds")
	for i := range s.model.Parameters {
		k, ok := s.own[i]
		if !ok {
			continue
		}
		e := &s.model.Parameters[i]
		if mean, τ := s.pool(e.Name); mean >= 0 && e.Role == fit.RoleValue && τ > 0 {
			s.link(k, s.own[mean], τ)
			continue
		}
		s.bound(k, e.Lower, e.Upper)
	}
	if c == nil {
		return
	}
	for _, r := range c.Plan.Priors {
		for i := range s.model.Parameters {
			e := &s.model.Parameters[i]
			if k, ok := s.own[i]; ok && e.Name == r.Name && e.Role == fit.RoleValue && (r.Group == "" || r.Group == e.Group) {
				s.entries = append(s.entries, entry{k, k, 1 / (r.Spread * r.Spread), false})
			}
		}
	}
}

// pool is the index in model.Parameters of the mean of a pooled parameter, or -1,
// and the standard deviation of its groups.
func (s *space) pool(name string) (mean int, τ float64) {
	mean = -1
	for i := range s.model.Parameters {
		e := &s.model.Parameters[i]
		switch {
		case e.Name != name:
		case e.Role == fit.RolePoolMean:
			mean = i
		case e.Role == fit.RolePoolSpread:
			τ = e.Value
		}
	}
	if _, ok := s.own[mean]; !ok {
		return -1, 0
	}
	return mean, τ
}

// bound adds the information of a uniform distribution over the bounds.
func (s *space) bound(k int, lo, hi float64) {
	s.params[k].Assumed = true
	s.entries = append(s.entries, entry{k, k, 12 / ((hi - lo) * (hi - lo)), true})
}

// link ties a group to the mean of its pool.
func (s *space) link(k, mean int, τ float64) {
	w := 1 / (τ * τ)
	s.entries = append(s.entries, entry{k, k, w, false}, entry{mean, mean, w, false}, entry{min(k, mean), max(k, mean), -w, false})
}

// diffuse is how many times wider than its bounds the value of a group without rows is
// taken to be where it is not itself of interest: a reading there then finds that value
// and lends nothing to the others, which the bounds alone would make it do.
const diffuse = 1000

// reach makes room for the groups without rows on which a limit depends. wanted
// is set for limits of the target.
func (s *space) reach(x *fit.Sensitivity, wanted bool) {
	for i := range x.Effects {
		e := &x.Effects[i]
		if _, known := s.extra[e.Label]; e.At >= 0 || known {
			continue
		}
		k := len(s.params)
		s.extra[e.Label] = k
		s.params = append(s.params, Parameter{Label: e.Label, Unit: e.Unit, Value: e.Value})
		if mean, ok := s.own[e.Mean]; ok && e.Mean >= 0 && e.Tau > 0 {
			s.link(k, mean, e.Tau)
			continue
		}
		s.bound(k, e.Lower, e.Upper)
		if !wanted {
			s.params[k].diffuse = (e.Upper - e.Lower) / math.Sqrt(12)
			s.entries[len(s.entries)-1].v /= diffuse * diffuse
		}
		s.notes = append(s.notes, fmt.Sprintf("%s was never measured: it starts with no more than its bounds, and the first measurements there only find it", e.Label))
	}
}

// The share of their information with which bounds count. A first measurement is
// ranked with what the bounds tell; a batch is to determine the parameters by itself,
// as the calibration after it must, and the bounds only keep its first steps well posed.
const (
	boundsCount   = 1.0
	boundsSupport = 1e-4
)

// information is that before the first measurement, with bounds counted to a share,
// behind so many parameters in front of which nothing is known.
func (s *space) information(front int, share float64) *mat.SymDense {
	m := mat.NewSymDense(front+len(s.params), nil)
	for _, e := range s.entries {
		v := e.v
		if e.bounds {
			v *= share
		}
		i, j := front+min(e.i, e.j), front+max(e.i, e.j)
		m.SetSym(i, j, m.At(i, j)+v)
	}
	return m
}

// gradient is ∂T/∂θ over the whole vector, after reach.
func (s *space) gradient(x *fit.Sensitivity) []float64 {
	g := make([]float64, len(s.params))
	for i := range x.Effects {
		e := &x.Effects[i]
		if k, ok := s.extra[e.Label]; e.At < 0 && ok {
			g[k] += e.Derivative
		}
		if k, ok := s.own[e.At]; e.At >= 0 && ok {
			g[k] += e.Derivative
		}
	}
	return g
}

// factors are the rows of a reading with variance v: one about its limit and, where
// its spread is tuned, one about its variance (∂v/∂spread = 2·spread).
func (s *space) factors(x *fit.Sensitivity, v float64) [][]float64 {
	irr, ivv := s.model.Noise.ReadingInformation(x, v)
	g := s.gradient(x)
	for i := range g {
		g[i] *= math.Sqrt(irr)
	}
	out := [][]float64{g}
	if k, ok := s.own[x.SpreadAt]; ok && x.SpreadAt >= 0 && x.Spread > 0 {
		row := make([]float64, len(s.params))
		row[k] = 2 * x.Spread * math.Sqrt(ivv)
		out = append(out, row)
	}
	return out
}

// find is the index of a parameter by its label.
func (s *space) find(label string) int {
	return slices.IndexFunc(s.params, func(p Parameter) bool { return p.Label == label })
}

// labels lists the parameters that can be a target.
func (s *space) labels() []string {
	var out []string
	for _, p := range s.params {
		out = append(out, p.Label)
	}
	return out
}

// held says that a parameter stands at a bound and is not free for that reason.
func (s *space) held(label string) string {
	for i := range s.model.Parameters {
		if e := &s.model.Parameters[i]; e.Label() == label && e.AtBound != "" {
			return fmt.Sprintf(" (%s stands at its %s bound)", label, e.AtBound)
		}
	}
	return ""
}
