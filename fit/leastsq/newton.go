package leastsq

import (
	"math"

	"gonum.org/v1/gonum/blas"
	"gonum.org/v1/gonum/blas/blas64"
	"gonum.org/v1/gonum/lapack/lapack64"
	"gonum.org/v1/gonum/mat"
)

// newton is the model f + gᵀp + ½pᵀHp of an objective, H its curvature: Newton's
// method when H is the observed, Fisher scoring when it is the expected
// information. Systems are solved by Cholesky in the scaled variables D p with
// D² the largest diagonal of H met.
type newton struct {
	o               Objective
	n               int
	err             error
	f, trial        float64
	g, tg           []float64
	h, th           *mat.SymDense
	d               []float64
	work, rhs, step []float64
	evals           int
	seen            []float64 // largest √H_ii met
}

var _ local = (*newton)(nil)

func newNewton(o Objective) *newton {
	n := len(o.Params)
	return &newton{o: o, n: n, g: make([]float64, n), tg: make([]float64, n),
		h: mat.NewSymDense(n, nil), th: mat.NewSymDense(n, nil), d: make([]float64, n),
		work: make([]float64, n*n), rhs: make([]float64, n), step: make([]float64, n), seen: make([]float64, n)}
}

// value evaluates derivatives as well: nearly all trials are accepted, and they
// cost little once the value is known.
func (w *newton) value(theta []float64) float64 {
	w.evals++
	clear(w.tg)
	w.th.Zero()
	w.trial, w.err = w.o.Eval(theta, w.tg, w.th)
	if w.err != nil || !finite(w.trial) || !allFinite(w.tg) || !allFinite(w.th.RawSymmetric().Data) {
		w.trial = math.Inf(1)
	}
	return w.trial
}

func (w *newton) derive(g, _ []float64) { copy(g, w.tg) }

func (w *newton) adopt(d []float64) bool {
	if !finite(w.trial) {
		return false
	}
	w.f = w.trial
	w.g, w.tg = w.tg, w.g
	w.h, w.th = w.th, w.h
	for i := range w.n {
		d[i] = math.Max(d[i], math.Sqrt(math.Max(0, w.h.At(i, i))))
		w.seen[i] = math.Max(w.seen[i], d[i])
		w.d[i] = d[i]
		if d[i] == 0 {
			w.d[i] = 1
		}
	}
	return true
}

func (w *newton) solve(p []float64, free []int, λ float64) bool {
	nf := len(free)
	copy(w.step, p)
	for _, j := range free {
		w.step[j] = 0
	}
	a := w.work[:nf*nf]
	for r, i := range free {
		s := w.g[i]
		for j, v := range w.step {
			s += w.h.At(i, j) * v
		}
		w.rhs[r] = -s / w.d[i]
		for c := r; c < nf; c++ {
			a[r*nf+c] = w.h.At(i, free[c]) / w.d[i] / w.d[free[c]]
		}
		a[r*nf+r] += λ
	}
	t, ok := lapack64.Potrf(blas64.Symmetric{Uplo: blas.Upper, N: nf, Stride: nf, Data: a})
	if !ok {
		return false
	}
	lapack64.Potrs(t, blas64.General{Rows: nf, Cols: 1, Stride: 1, Data: w.rhs[:nf]})
	for r, i := range free {
		p[i] = w.rhs[r] / w.d[i]
	}
	return true
}

func (w *newton) predicted(p []float64) float64 {
	s := 0.0
	for i, v := range p {
		hp := 0.0
		for j, u := range p {
			hp += w.h.At(i, j) * u
		}
		s -= v * (w.g[i] + 0.5*hp)
	}
	return s
}

func (w *newton) decrease() float64 { return w.f - w.trial }

// unit: one standard error from its minimum −ln L has risen by ½.
func (w *newton) unit() float64 { return 0.5 }

func (w *newton) noise() float64 {
	return math.Max(w.o.Rounding, 16*0x1p-52*math.Max(1, math.Abs(w.f)))
}

// floor: the curvature is a sum of squares known to ε, with a margin for the sum.
func (w *newton) floor() float64 { return 100 * 0x1p-52 }

// at makes theta the current point.
func (w *newton) at(theta []float64) bool {
	return finite(w.value(theta)) && w.adopt(make([]float64, w.n))
}
