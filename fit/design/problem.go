package design

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
)

// Candidate is one measurement that can be made, once or often.
type Candidate struct {
	// Rows are its k factor rows, each of length p: its information is Σffᵀ. A reading
	// y with prediction η(θ) and standard uncertainty u has one, ∇η/u.
	Rows [][]float64
	// Most is the number of times it may be in a batch; 0: any.
	Most int
}

// Problem is a set of candidates with what they are for. A Problem is not changed
// by its methods.
type Problem struct {
	// Prior is the information before the first measurement, p×p; nil: none.
	Prior      *mat.SymDense
	Candidates []Candidate
	Criterion  Criterion
}

// prepared is a problem in scaled coordinates t_i = θ_i·√(total information)_ii, in
// which no unit matters.
type prepared struct {
	p     int
	scale []float64
	kind  Kind
	a     *mat.Dense
	prior *mat.SymDense
	total *mat.SymDense // prior and every candidate once
	f     []*mat.Dense
	most  []int
}

// prepare checks a problem and scales it.
func (q *Problem) prepare() (*prepared, error) {
	if len(q.Candidates) == 0 {
		return nil, &InputError{"candidates", "one or more"}
	}
	r := &prepared{kind: q.Criterion.Kind}
	if q.Prior != nil {
		r.p = q.Prior.SymmetricDim()
	} else if len(q.Candidates[0].Rows) > 0 {
		r.p = len(q.Candidates[0].Rows[0])
	}
	if r.p == 0 {
		return nil, &InputError{"candidate 0", "at least one parameter"}
	}
	sum := mat.NewSymDense(r.p, nil)
	if q.Prior != nil {
		if !finite(q.Prior.RawSymmetric().Data) {
			return nil, &InputError{"prior", "finite numbers"}
		}
		sum.CopySym(q.Prior)
	}
	for i := range q.Candidates {
		c := &q.Candidates[i]
		if len(c.Rows) == 0 || c.Most < 0 {
			return nil, &InputError{fmt.Sprintf("candidate %d", i), "one factor row or more, and no negative number of times"}
		}
		for _, f := range c.Rows {
			if len(f) != r.p || !finite(f) {
				return nil, &InputError{fmt.Sprintf("candidate %d", i), fmt.Sprintf("rows of %d finite numbers", r.p)}
			}
			sum.SymRankOne(sum, 1, mat.NewVecDense(r.p, append([]float64(nil), f...)))
		}
	}
	r.scale = make([]float64, r.p)
	for i := range r.scale {
		d := sum.At(i, i)
		if !(d > 0) || math.IsInf(d, 0) {
			return nil, &SingularError{Parameters: r.p, All: true}
		}
		r.scale[i] = 1 / math.Sqrt(d)
	}
	var err error
	if r.a, err = q.Criterion.directions(r.scale); err != nil {
		return nil, err
	}
	r.total, r.prior = mat.NewSymDense(r.p, nil), mat.NewSymDense(r.p, nil)
	for i := range r.p {
		for j := i; j < r.p; j++ {
			r.total.SetSym(i, j, sum.At(i, j)*r.scale[i]*r.scale[j])
			if q.Prior != nil {
				r.prior.SetSym(i, j, q.Prior.At(i, j)*r.scale[i]*r.scale[j])
			}
		}
	}
	if invert(r.total) == nil {
		return nil, &SingularError{Parameters: r.p, All: true}
	}
	for i := range q.Candidates {
		c := &q.Candidates[i]
		f := mat.NewDense(len(c.Rows), r.p, nil)
		for k, row := range c.Rows {
			for j, v := range row {
				f.Set(k, j, v*r.scale[j])
			}
		}
		most := c.Most
		if most == 0 {
			most = math.MaxInt
		}
		r.f, r.most = append(r.f, f), append(r.most, most)
	}
	return r, nil
}

// information is start + Σ count·FᵀF, summed in the order of the candidates.
func (r *prepared) information(start *mat.SymDense, count []int) *mat.SymDense {
	m := mat.NewSymDense(r.p, nil)
	m.CopySym(start)
	for i, n := range count {
		if n > 0 {
			m.SymRankK(m, float64(n), r.f[i].T())
		}
	}
	return m
}

// unscaled is a covariance in the units of the caller.
func (r *prepared) unscaled(c *mat.SymDense) *mat.SymDense {
	out := mat.NewSymDense(r.p, nil)
	for i := range r.p {
		for j := i; j < r.p; j++ {
			out.SetSym(i, j, c.At(i, j)*r.scale[i]*r.scale[j])
		}
	}
	return out
}

// Evaluation is what a batch leaves.
type Evaluation struct {
	Value      float64       // Φ, ln of a mean standard uncertainty
	Covariance *mat.SymDense // p×p
}

// Mean is the mean standard uncertainty exp Φ that the criterion makes small.
func (e *Evaluation) Mean() float64 { return math.Exp(e.Value) }

// Uncertainty is the standard uncertainty of the direction a.
func (e *Evaluation) Uncertainty(a []float64) float64 {
	v := mat.NewVecDense(len(a), append([]float64(nil), a...))
	return math.Sqrt(math.Max(0, mat.Inner(v, e.Covariance, v)))
}

// Evaluate judges a batch given as the number of times of each candidate; nil
// counts mean what is known before.
//
// Errors: *InputError, *SingularError.
func (q *Problem) Evaluate(count []int) (*Evaluation, error) {
	r, err := q.prepare()
	if err != nil {
		return nil, err
	}
	n := 0
	if count == nil {
		count = make([]int, len(r.f))
	}
	if len(count) != len(r.f) {
		return nil, &InputError{"batch", fmt.Sprintf("%d counts", len(r.f))}
	}
	for _, k := range count {
		if k < 0 {
			return nil, &InputError{"batch", "counts of 0 or more"}
		}
		n += k
	}
	return r.evaluate(count, n)
}

func (r *prepared) evaluate(count []int, n int) (*Evaluation, error) {
	s, ok := newState(r.kind, r.a, r.information(r.prior, count))
	if !ok {
		return nil, &SingularError{Measurements: n, Parameters: r.p}
	}
	return &Evaluation{Value: s.value, Covariance: r.unscaled(s.c)}, nil
}
