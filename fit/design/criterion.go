package design

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
)

// Kind names a criterion.
type Kind string

// The kinds of criterion.
const (
	// Determinant makes the volume of the joint uncertainty of the directions small
	// (D-optimal; with fewer directions than parameters, D_s-optimal): Φ is ln of the
	// geometric mean standard uncertainty, ln det(AᵀCA)/2s over s directions.
	Determinant Kind = "D"
	// Linear makes the root mean square of the standard uncertainties of the
	// directions small (c-optimal for one direction, I-optimal for many predictions):
	// Φ = ln(Σ aᵀCa/s)/2.
	Linear Kind = "linear"
)

// Criterion says what a batch is for.
type Criterion struct {
	Kind Kind
	// Directions are the quantities aᵀθ that matter, each of length p. None means
	// every parameter by itself.
	Directions [][]float64
}

// directions is A as an s×p matrix in scaled coordinates: θ = S·t means a becomes Sa.
func (c *Criterion) directions(scale []float64) (*mat.Dense, error) {
	p := len(scale)
	if c.Kind != Determinant && c.Kind != Linear {
		return nil, &InputError{"criterion", fmt.Sprintf("%s or %s", Determinant, Linear)}
	}
	rows := c.Directions
	if len(rows) == 0 {
		for i := range p {
			e := make([]float64, p)
			e[i] = 1
			rows = append(rows, e)
		}
	}
	if c.Kind == Determinant && len(rows) > p {
		return nil, &InputError{"criterion", fmt.Sprintf("at most %d directions for a determinant", p)}
	}
	a := mat.NewDense(len(rows), p, nil)
	for i, r := range rows {
		if len(r) != p || !finite(r) {
			return nil, &InputError{fmt.Sprintf("direction %d", i), fmt.Sprintf("%d finite numbers", p)}
		}
		zero := true
		for j, v := range r {
			a.Set(i, j, v*scale[j])
			zero = zero && v == 0
		}
		if zero {
			return nil, &InputError{fmt.Sprintf("direction %d", i), "a quantity that depends on a parameter"}
		}
	}
	return a, nil
}

func finite(x []float64) bool {
	for _, v := range x {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return false
		}
	}
	return true
}

// state is a covariance with all that the criterion needs of it. Everything is in
// scaled coordinates.
type state struct {
	kind  Kind
	a     *mat.Dense    // s×p
	c     *mat.SymDense // covariance, p×p
	ca    *mat.Dense    // C·Aᵀ, p×s
	inv   *mat.SymDense // (A C Aᵀ)⁻¹ of a determinant, s×s
	value float64       // Φ
	trace float64       // tr(A C Aᵀ)
	u     []float64     // work space
}

// newState inverts an information matrix; ok is false where it is singular.
func newState(kind Kind, a *mat.Dense, m *mat.SymDense) (*state, bool) {
	s := &state{kind: kind, a: a}
	if s.c = invert(m); s.c == nil {
		return nil, false
	}
	n, p := a.Dims()
	s.ca = mat.NewDense(p, n, nil)
	s.ca.Mul(s.c, a.T())
	aca := mat.NewDense(n, n, nil)
	aca.Mul(a, s.ca)
	s.trace = mat.Trace(aca)
	if kind == Linear {
		s.value = 0.5 * math.Log(s.trace/float64(n))
		return s, s.trace > 0
	}
	q := symmetric(aca)
	var chol mat.Cholesky
	if !chol.Factorize(q) {
		return nil, false
	}
	s.value = 0.5 * chol.LogDet() / float64(n)
	s.inv = invert(q)
	return s, s.inv != nil
}

// after is Φ when a candidate is added. With F its k factor rows and B = I + F C Fᵀ,
//
//	C' = C − (FC)ᵀ B⁻¹ FC,   A C' Aᵀ = A C Aᵀ − Uᵀ B⁻¹ U,   U = F C Aᵀ,
//
// by the identity of Woodbury; and det(A C' Aᵀ) = det(A C Aᵀ)·det(B − U (A C Aᵀ)⁻¹ Uᵀ)/det B.
func (s *state) after(f *mat.Dense) float64 {
	k, p := f.Dims()
	n, _ := s.a.Dims()
	if k == 1 {
		return s.afterRow(f.RawRowView(0))
	}
	fc := mat.NewDense(k, p, nil)
	fc.Mul(f, s.c)
	b := mat.NewDense(k, k, nil)
	b.Mul(fc, f.T())
	for i := range k {
		b.Set(i, i, b.At(i, i)+1)
	}
	u := mat.NewDense(k, n, nil)
	u.Mul(f, s.ca)
	if s.kind == Determinant {
		ui := mat.NewDense(k, n, nil)
		ui.Mul(u, s.inv)
		d := mat.NewDense(k, k, nil)
		d.Mul(ui, u.T())
		d.Sub(b, d)
		ld, _ := mat.LogDet(d)
		lb, _ := mat.LogDet(b)
		return s.value + 0.5*(ld-lb)/float64(n)
	}
	var chol mat.Cholesky
	x := mat.NewDense(k, n, nil)
	if !chol.Factorize(symmetric(b)) || chol.SolveTo(x, u) != nil {
		return s.value // B is I plus a positive semidefinite matrix: not reached with finite input
	}
	loss := 0.0
	for i := range k {
		for j := range n {
			loss += u.At(i, j) * x.At(i, j)
		}
	}
	return 0.5 * math.Log(math.Max(s.trace-loss, s.trace*1e-300)/float64(n))
}

// afterRow is after for a single factor row, without memory of its own.
func (s *state) afterRow(f []float64) float64 {
	n, _ := s.a.Dims()
	if s.u == nil {
		s.u = make([]float64, n)
	}
	clear(s.u)
	b := 1.0
	for i, x := range f {
		if x == 0 {
			continue
		}
		row := 0.0
		for j, y := range f {
			row += s.c.At(i, j) * y
		}
		b += x * row
		for j, ca := range s.ca.RawRowView(i) {
			s.u[j] += x * ca
		}
	}
	if s.kind == Linear {
		loss := 0.0
		for _, u := range s.u {
			loss += u * u
		}
		return 0.5 * math.Log(math.Max(s.trace-loss/b, s.trace*1e-300)/float64(n))
	}
	d := b
	for i, x := range s.u {
		row := 0.0
		for j, y := range s.u {
			row += s.inv.At(i, j) * y
		}
		d -= x * row
	}
	return s.value + 0.5*math.Log(d/b)/float64(n)
}

// pull is tr(G·FᵀF), where G = −∂(exponent of Φ)/∂M: what a first-order step
// towards a candidate gains. For a determinant G = CAᵀ(ACAᵀ)⁻¹AC, the derivative of
// −ln det ACAᵀ; for the linear criterion G = CAᵀAC, that of −tr ACAᵀ.
func (s *state) pull(f *mat.Dense) float64 {
	k, _ := f.Dims()
	n, _ := s.a.Dims()
	u := mat.NewDense(k, n, nil)
	u.Mul(f, s.ca)
	w := u
	if s.kind == Determinant {
		w = mat.NewDense(k, n, nil)
		w.Mul(u, s.inv)
	}
	g := 0.0
	for i := range k {
		for j := range n {
			g += u.At(i, j) * w.At(i, j)
		}
	}
	return g
}

// bound is the least Φ that can be reached from a batch whose members pull by sum,
// when each of its n members is moved to the candidate that pulls by most. Both
// exponents are convex in M, so that the tangent at the batch lies below them.
func (s *state) bound(n int, sum, most float64) float64 {
	gain := math.Max(0, float64(n)*most-sum)
	d, _ := s.a.Dims()
	if s.kind == Determinant {
		return s.value - 0.5*gain/float64(d)
	}
	if gain >= s.trace {
		return math.Inf(-1)
	}
	return s.value + 0.5*math.Log1p(-gain/s.trace)
}

// singular is the condition number, with every diagonal element scaled to one, above
// which information counts as singular: its inverse would keep fewer than three
// digits.
const singular = 1e13

// invert returns m⁻¹, or nil where m is singular.
func invert(m *mat.SymDense) *mat.SymDense {
	n := m.SymmetricDim()
	scale := make([]float64, n)
	for i := range scale {
		if !(m.At(i, i) > 0) {
			return nil
		}
		scale[i] = 1 / math.Sqrt(m.At(i, i))
	}
	unit := func(a *mat.SymDense) *mat.SymDense {
		out := mat.NewSymDense(n, nil)
		for i := range n {
			for j := i; j < n; j++ {
				out.SetSym(i, j, a.At(i, j)*scale[i]*scale[j])
			}
		}
		return out
	}
	var chol mat.Cholesky
	if !chol.Factorize(unit(m)) || !(chol.Cond() < singular) {
		return nil
	}
	c := mat.NewSymDense(n, nil)
	if err := chol.InverseTo(c); err != nil {
		if _, ok := err.(mat.Condition); !ok {
			return nil
		}
	}
	return unit(c)
}

// symmetric is the symmetric part of a square matrix.
func symmetric(a *mat.Dense) *mat.SymDense {
	n, _ := a.Dims()
	s := mat.NewSymDense(n, nil)
	for i := range n {
		for j := i; j < n; j++ {
			s.SetSym(i, j, 0.5*(a.At(i, j)+a.At(j, i)))
		}
	}
	return s
}
