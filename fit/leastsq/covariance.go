package leastsq

import (
	"fmt"
	"math"
	"strings"

	"gonum.org/v1/gonum/mat"
)

// spectrum is the decomposition of the derivatives of the free parameters,
// columns scaled to length one: J_F D⁻¹ = U Σ Vᵀ, or D⁻¹H D⁻¹ = V Σ² Vᵀ.
type spectrum struct {
	free   []int     // parameters that are not at a bound
	dead   []int     // of those, parameters with a zero column
	live   []int     // the others: the rows of V
	scale  []float64 // D of live
	values []float64 // Σ, falling
	v      *mat.Dense
	rank   int
}

// spectrumOf a Jacobian. cut is the relative rounding of its entries.
func spectrumOf(jac *mat.Dense, free []int, cut float64) (*spectrum, bool) {
	s := &spectrum{free: free}
	m, _ := jac.Dims()
	for _, j := range free {
		norm := 0.0
		for i := range m {
			norm = math.Hypot(norm, jac.At(i, j))
		}
		s.add(j, norm)
	}
	if len(s.live) == 0 {
		return s, true
	}
	// Zero rows below a wide J give V its missing columns.
	a := mat.NewDense(max(m, len(s.live)), len(s.live), nil)
	for c, j := range s.live {
		for i := range m {
			a.Set(i, c, jac.At(i, j)/s.scale[c])
		}
	}
	var svd mat.SVD
	if !svd.Factorize(a, mat.SVDThinV) {
		return nil, false
	}
	s.values = svd.Values(nil)
	s.v = &mat.Dense{}
	svd.VTo(s.v)
	s.count(cut)
	return s, true
}

// spectrumOfCurvature likewise from an information matrix.
func spectrumOfCurvature(h *mat.SymDense, free []int, cut float64) (*spectrum, bool) {
	s := &spectrum{free: free}
	for _, j := range free {
		s.add(j, math.Sqrt(math.Max(0, h.At(j, j))))
	}
	n := len(s.live)
	if n == 0 {
		return s, true
	}
	a := mat.NewSymDense(n, nil)
	for r, i := range s.live {
		for c := r; c < n; c++ {
			a.SetSym(r, c, h.At(i, s.live[c])/s.scale[r]/s.scale[c])
		}
	}
	var eig mat.EigenSym
	if !eig.Factorize(a, true) {
		return nil, false
	}
	var v mat.Dense
	eig.VectorsTo(&v)
	rising := eig.Values(nil)
	s.values = make([]float64, n)
	s.v = mat.NewDense(n, n, nil)
	for k := range n { // falling order
		s.values[k] = math.Sqrt(math.Max(0, rising[n-1-k]))
		for i := range n {
			s.v.Set(i, k, v.At(i, n-1-k))
		}
	}
	s.count(cut)
	return s, true
}

func (s *spectrum) add(j int, norm float64) {
	if norm == 0 {
		s.dead = append(s.dead, j)
		return
	}
	s.live = append(s.live, j)
	s.scale = append(s.scale, norm)
}

// count sets the rank: singular values above cut times the largest.
func (s *spectrum) count(cut float64) {
	for _, v := range s.values {
		if v > cut*s.values[0] {
			s.rank++
		}
	}
}

func (s *spectrum) full() bool { return s.rank == len(s.free) }

// inverse is D⁻¹VΣ⁻²VᵀD⁻¹ in an n×n matrix with zeros for the others.
func (s *spectrum) inverse(n int) *mat.SymDense {
	c := mat.NewSymDense(n, nil)
	for a, i := range s.live {
		for b := a; b < len(s.live); b++ {
			sum := 0.0
			for k, σ := range s.values {
				sum += (s.v.At(a, k) / σ) * (s.v.At(b, k) / σ)
			}
			c.SetSym(i, s.live[b], sum/s.scale[a]/s.scale[b])
		}
	}
	return c
}

// null lists the directions in θ, length n, along which nothing changes: a unit
// vector for each dead parameter and D⁻¹v for each lost singular value, the
// latter with its largest share |v_i|, the first of equals, scaled to one.
func (s *spectrum) null(n int) []Direction {
	var list []Direction
	for _, j := range s.dead {
		d := Direction{Change: make([]float64, n), Share: make([]float64, n)}
		d.Change[j], d.Share[j] = 1, 1
		list = append(list, d)
	}
	for k := s.rank; k < len(s.live); k++ {
		d := Direction{Change: make([]float64, n), Share: make([]float64, n)}
		top := 0.0
		for a := range s.live {
			if v := s.v.At(a, k); math.Abs(v) > (1+1e-6)*math.Abs(top) { // of equals, the first
				top = v
			}
		}
		for a, j := range s.live {
			d.Share[j] = s.v.At(a, k) / top
			d.Change[j] = d.Share[j] / s.scale[a]
		}
		list = append(list, d)
	}
	return list
}

// uncertainties fills the covariance part of r. factor is s², or its reason to
// be missing.
func (r *Result) uncertainties(s *spectrum, factor float64, noFactor string) {
	n := len(r.X)
	r.SingularValues, r.Rank = s.values, s.rank
	r.null = s.null(n)
	reason := noFactor
	switch {
	case len(s.free) == 0:
		reason = "every parameter is at a bound"
	case !s.full():
		reason = r.blame(s)
	default:
		r.unscaled = s.inverse(n)
		if !allFinite(r.unscaled.RawSymmetric().Data) {
			r.unscaled, reason = nil, "the inverse of the information exceeds the range of numbers"
		}
	}
	r.missing(reason)
	if reason != "" {
		return
	}
	r.Covariance = mat.NewSymDense(n, nil)
	r.Covariance.ScaleSym(factor, r.unscaled)
	for _, i := range s.free {
		r.StdErr[i] = math.Sqrt(r.Covariance.At(i, i))
		r.NoStdErr[i] = ""
	}
}

// participation is the share above which a parameter is named as part of a
// direction that the data do not determine.
const participation = 0.1

// blame names the parameters that the data do not determine.
func (r *Result) blame(s *spectrum) string {
	var parts []string
	if len(s.dead) > 0 {
		var names []string
		for _, j := range s.dead {
			names = append(names, r.Names[j])
		}
		parts = append(parts, join(names)+map[bool]string{true: " has", false: " have"}[len(names) == 1]+" no effect on the value")
	}
	for _, d := range r.null[len(s.dead):] {
		var names []string
		for i, v := range d.Share {
			if math.Abs(v) >= participation {
				names = append(names, r.Names[i])
			}
		}
		parts = append(parts, fmt.Sprintf("%s cannot be told apart", join(names)))
	}
	return strings.Join(parts, "; ")
}

func join(names []string) string {
	if n := len(names); n > 1 {
		return strings.Join(names[:n-1], ", ") + " and " + names[n-1]
	}
	return strings.Join(names, "")
}
