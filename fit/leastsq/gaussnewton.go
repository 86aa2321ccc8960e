package leastsq

import (
	"math"

	"gonum.org/v1/gonum/blas"
	"gonum.org/v1/gonum/blas/blas64"
	"gonum.org/v1/gonum/lapack/lapack64"
	"gonum.org/v1/gonum/mat"
)

// gaussNewton is the model ½‖r + J p‖² of a least-squares problem. J D⁻¹ is
// factored once per point by Householder reflections into QR; a damped step is
// the least-squares solution of the stacked system
//
//	[ R   ]       [ −Qᵀr ]
//	[ √λI ] D p = [   0  ]
//
// again by reflections, so that JᵀJ, which squares the condition, never appears.
type gaussNewton struct {
	p          Problem
	m, n, k    int // k = min(m, n) rows of R
	diff       *differences
	err        error
	derived    bool // derivatives of the trial are at hand
	r, trial   []float64
	rss, trss  float64
	jac        *mat.Dense // at the trial, later the current point
	d          []float64
	q          blas64.General // work for the factorisation of J D⁻¹
	rt         blas64.General // R of the current point, k×n
	c          blas64.General // Qᵀr, m×1
	stack      blas64.General
	rhs        blas64.General
	tau, work  []float64
	qtau       []float64 // of q
	second     blas64.General
	column     []float64
	evals      int
	floorValue float64
	seen, grad []float64 // largest column norms met; gradient of at
}

// scaleMemory: a column of J that shrinks gives up the scale D that it had by
// half a step. With the maximum ever met (memory 1) a parameter that was
// influential far from the optimum is held back for ever; without memory D
// jumps. Measured on the certified sets: 1 loses MGH10 from its first start, 0
// and 0.1 take several times more steps on Eckerle4 and Rat43.
const scaleMemory = 0.5

var (
	_ local       = (*gaussNewton)(nil)
	_ accelerator = (*gaussNewton)(nil)
)

func newGaussNewton(p Problem, b *box) *gaussNewton {
	m, n := p.Size, len(p.Params)
	k := min(m, n)
	general := func(r, c int) blas64.General {
		return blas64.General{Rows: r, Cols: c, Stride: c, Data: make([]float64, r*c)}
	}
	g := &gaussNewton{p: p, m: m, n: n, k: k, diff: newDifferences(p, b),
		r: make([]float64, m), trial: make([]float64, m), jac: mat.NewDense(m, n, nil), d: make([]float64, n),
		q: general(m, n), rt: general(k, n), c: general(m, 1), stack: general(k+n, n), rhs: general(k+n, 1),
		tau: make([]float64, n), qtau: make([]float64, n), second: general(m, 1), column: make([]float64, n), seen: make([]float64, n), grad: make([]float64, n)}
	g.work = make([]float64, 64*(m+n)+n)
	// Squared relative rounding of the derivatives: ε, or ε^(2/3) of central
	// differences, each with a margin of ten.
	g.floorValue = math.Pow(10*0x1p-52, 2)
	if p.Jacobian == nil {
		g.floorValue = math.Pow(10*math.Pow(0x1p-52, 2.0/3), 2)
	}
	return g
}

func (g *gaussNewton) value(theta []float64) float64 {
	g.derived = false
	g.evals++
	g.err = g.p.Residuals(g.trial, theta)
	if g.err != nil || !allFinite(g.trial) {
		return math.Inf(1)
	}
	g.trss = sumSquares(g.trial)
	if !finite(g.trss) {
		return math.Inf(1)
	}
	return 0.5 * g.trss
}

func (g *gaussNewton) derive(grad, theta []float64) {
	clear(grad)
	if g.err != nil || !finite(g.trss) {
		return
	}
	if g.err = g.diff.jacobian(g.jac, theta); g.err != nil {
		return
	}
	for i, r := range g.trial {
		row := g.jac.RawRowView(i)
		for j, v := range row {
			grad[j] += v * r
		}
	}
	g.derived = allFinite(grad)
}

func (g *gaussNewton) adopt(d []float64) bool {
	if !g.derived {
		return false
	}
	g.r, g.trial = g.trial, g.r
	g.rss = g.trss
	for j := range g.n {
		norm := 0.0
		for i := range g.m {
			norm = math.Hypot(norm, g.jac.At(i, j))
		}
		d[j] = math.Max(norm, scaleMemory*d[j])
		g.seen[j] = math.Max(g.seen[j], norm)
		g.d[j] = d[j]
		if g.d[j] == 0 { // no effect so far: leave its step at zero
			g.d[j] = 1
		}
	}
	for i := range g.m {
		row := g.jac.RawRowView(i)
		for j, v := range row {
			g.q.Data[i*g.q.Stride+j] = v / g.d[j]
		}
		g.c.Data[i] = g.r[i]
	}
	lapack64.Geqrf(g.q, g.qtau[:g.k], g.work, len(g.work))
	g.reflect(g.c)
	for i := range g.k {
		for j := range g.n {
			v := 0.0
			if j >= i {
				v = g.q.Data[i*g.q.Stride+j]
			}
			g.rt.Data[i*g.rt.Stride+j] = v
		}
	}
	return true
}

// reflect replaces v by Qᵀv.
func (g *gaussNewton) reflect(v blas64.General) {
	q := g.q
	q.Cols = g.k
	lapack64.Ormqr(blas.Left, blas.Trans, q, g.qtau[:g.k], v, g.work, len(g.work))
}

func (g *gaussNewton) solve(p []float64, free []int, λ float64) bool {
	return g.solveFor(g.c, p, free, λ)
}

// bend solves for a = −½(JᵀJ+λD²)⁻¹Jᵀr″, r″ the second derivative of the
// residuals along p: 2[(r(θ+hp)−r)/h − J p]/h.
func (g *gaussNewton) bend(a, p []float64, free []int, h, λ float64) bool {
	for i := range g.m {
		jp := 0.0
		for j, v := range g.jac.RawRowView(i) {
			jp += v * p[j]
		}
		g.second.Data[i] = ((g.trial[i]-g.r[i])/h - jp) / h
	}
	g.reflect(g.second)
	clear(a)
	return g.solveFor(g.second, a, free, λ)
}

// solveFor solves the stacked system with c in the place of Qᵀr.
func (g *gaussNewton) solveFor(qr blas64.General, p []float64, free []int, λ float64) bool {
	nf := len(free)
	rows := g.k + nf
	a := blas64.General{Rows: rows, Cols: nf, Stride: nf, Data: g.stack.Data[:rows*nf]}
	b := blas64.General{Rows: rows, Cols: 1, Stride: 1, Data: g.rhs.Data[:rows]}
	clear(a.Data)
	clear(b.Data)
	for j := range p { // others move as told
		g.column[j] = p[j] * g.d[j]
	}
	for _, j := range free {
		g.column[j] = 0
	}
	for i := range g.k {
		row := g.rt.Data[i*g.rt.Stride : i*g.rt.Stride+g.n]
		s := qr.Data[i]
		for j := i; j < g.n; j++ {
			s += row[j] * g.column[j]
		}
		b.Data[i] = -s
		for c, j := range free {
			a.Data[i*nf+c] = row[j]
		}
	}
	root := math.Sqrt(λ)
	for c := range free {
		a.Data[(g.k+c)*nf+c] = root
	}
	lapack64.Geqrf(a, g.tau[:nf], g.work, len(g.work))
	lapack64.Ormqr(blas.Left, blas.Trans, a, g.tau[:nf], b, g.work, len(g.work))
	for i := range nf {
		if a.Data[i*nf+i] == 0 {
			return false
		}
	}
	blas64.Trsv(blas.NoTrans, blas64.Triangular{Uplo: blas.Upper, Diag: blas.NonUnit, N: nf, Stride: nf, Data: a.Data},
		blas64.Vector{N: nf, Inc: 1, Data: b.Data[:nf]})
	for c, j := range free {
		p[j] = b.Data[c] / g.d[j]
	}
	return true
}

// predicted is ½‖c‖² − ½‖c + R D p‖² = −½ Σ s_i(2c_i + s_i), s = R D p.
func (g *gaussNewton) predicted(p []float64) float64 {
	sum := 0.0
	for i := range g.k {
		row := g.rt.Data[i*g.rt.Stride : i*g.rt.Stride+g.n]
		s := 0.0
		for j := i; j < g.n; j++ {
			s += row[j] * p[j] * g.d[j]
		}
		sum -= 0.5 * s * (2*g.c.Data[i] + s)
	}
	return sum
}

// decrease is ½Σ(r−t)(r+t): unlike the difference of the two sums it keeps its
// digits when r and t are nearly equal.
func (g *gaussNewton) decrease() float64 {
	s := 0.0
	for i, r := range g.r {
		s += (r - g.trial[i]) * (r + g.trial[i])
	}
	return 0.5 * s
}

// unit is ½s²: the value rises by it one standard error from the optimum.
func (g *gaussNewton) unit() float64 {
	return 0.5 * g.rss / math.Max(1, float64(g.m-g.n))
}

// noise: residuals that are differences of larger numbers carry more rounding
// than their own, which only the stalling test can see.
func (g *gaussNewton) noise() float64 { return 4 * 0x1p-52 * g.rss }

func (g *gaussNewton) floor() float64 { return g.floorValue }

// at makes theta the current point, with its gradient in g.grad.
func (g *gaussNewton) at(theta []float64) bool {
	if !finite(g.value(theta)) {
		return false
	}
	g.derive(g.grad, theta)
	return g.adopt(make([]float64, g.n))
}
