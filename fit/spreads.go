package fit

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/mat"

	"limsup/fit/leastsq"
)

// This file estimates the spreads ψ: standard deviations of the noise and of
// pooled groups. Maximising the likelihood over θ and ψ together would take them
// too small, as dividing a sum of squares by n instead of n − p does. They are
// therefore taken where the likelihood with θ integrated out is largest, by
// Laplace's method about the best θ,
//
//	A(ψ) = min_θ[−ln L(θ, ψ)] + ½ ln det H(θ, ψ),
//
// which for Gaussian rows and linear predictions is the restricted maximum
// likelihood of H. D. Patterson and R. Thompson, Biometrika 58 (1971) 545, and for
// pooled groups the scheme of M. J. Lindstrom and D. M. Bates, Biometrics 46
// (1990) 673: the predictions are linearised at the current θ, ψ is found, θ is
// found again, until neither moves. (Citations from memory.)

// linearised is −ln L with every prediction replaced by its tangent at θ. It
// calls no physics.
type linearised struct {
	l      *likelihood
	theta  []float64
	active []int // elements of θ that are free to move: not at a bound
	r      []float64
	a      []float64    // anchor residuals
	da     [][3]float64 // and their slopes

	// work space
	delta, shifted, grad, variance, step []float64
	curv                                 *mat.SymDense
}

func newLinearised(l *likelihood, theta []float64, active []int) (*linearised, error) {
	if err := l.evaluate(theta); err != nil {
		return nil, err
	}
	n, p := len(l.obs), len(theta)
	z := &linearised{l: l, theta: theta, active: active, r: make([]float64, n),
		delta: make([]float64, p), shifted: make([]float64, p), grad: make([]float64, p),
		variance: make([]float64, n), step: make([]float64, len(active)), curv: mat.NewSymDense(max(p, 1), nil)}
	for i := range z.r {
		z.r[i] = l.residual(i)
	}
	for k := range l.anchors {
		r, d, err := l.anchors[k].residual(l.cells)
		if err != nil {
			return nil, err
		}
		z.a, z.da = append(z.a, r), append(z.da, d)
	}
	return z, nil
}

// residual is that of a row at θ + δ.
func (z *linearised) residual(i int) float64 {
	r := z.r[i]
	idx, d := &z.l.lay.index[i], &z.l.limit[i].d
	for a := range idx {
		if at := idx[a]; at >= 0 {
			r -= derivative(d, a) * z.delta[at]
		}
	}
	return r
}

// terms is −ln L at θ + δ, with its derivatives, the second ones of the given kind.
func (z *linearised) terms(psi []float64, derivatives bool, kind curvature) float64 {

	l := z.l
	var grad []float64
	var curv *mat.SymDense
	if derivatives {
		grad, curv = z.grad, z.curv
	}
	clearAll(grad, curv)
	noise := l.law(psi)
	value := l.addRows(&noise, z.residual, z.variance, grad, curv, kind)
	for i := range z.shifted {
		z.shifted[i] = z.theta[i] + z.delta[i]
	}
	value += l.addPenalties(z.shifted, psi, grad, curv)
	for k := range l.anchors {
		r := z.a[k]
		for i, at := range l.lay.cells[l.anchors[k].cell].index[2:5] {
			if at >= 0 {
				r += z.da[k][i] * z.delta[at]
			}
		}
		value += 0.5 * r * r
		if derivatives {
			l.addAnchor(&l.anchors[k], r, z.da[k], grad, curv)
		}
	}
	return value
}

// information is the active block of the curvature, factorised.
func (z *linearised) information() (*mat.Cholesky, bool) {
	k := len(z.active)
	h := mat.NewSymDense(k, nil)
	for a, i := range z.active {
		for b := a; b < k; b++ {
			h.SetSym(a, b, z.curv.At(i, z.active[b]))
		}
	}
	var c mat.Cholesky
	ok := c.Factorize(h)
	return &c, ok
}

// adjusted is A(ψ); ok is false where the information is singular.
func (z *linearised) adjusted(psi []float64) (value float64, ok bool) {
	z.l.variances(psi, z.variance)
	if len(z.active) == 0 {
		clear(z.delta)
		return z.terms(psi, false, expected), true
	}
	kind := expected
	if z.l.noise.Kind == Student {
		// The only noise with more than one minimum: every ψ is to find the same one.
		clear(z.delta)
		kind = observed
	}
	value, chol, ok := z.descend(psi, kind)
	if !ok && kind == observed {
		clear(z.delta)
		value, chol, ok = z.descend(psi, expected)
	} else if ok && kind == observed {
		value = z.terms(psi, true, expected)
		chol, ok = z.information()
	}
	if !ok {
		return 0, false
	}
	return value + 0.5*chol.LogDet(), finite(value)
}

// The determinant of the information of censored and survival rows changes with δ in
// proportion, so that δ must be known to 1e-9 of its standard errors. Decreases below
// the rounding of −ln L are taken on trust of the gradient.
const (
	settledDecrease = 1e-18
	trustedDecrease = 1e-9
)

// descend minimises −ln L over δ by Newton's method, from the δ at hand. One step is
// exact for Gaussian rows; the others take a few, halved where they do not descend. ok is
// false where the curvature is not positive definite.
func (z *linearised) descend(psi []float64, kind curvature) (value float64, chol *mat.Cholesky, ok bool) {
	value = z.terms(psi, true, kind)
	g := mat.NewVecDense(len(z.active), nil)
	s := mat.NewVecDense(len(z.active), z.step)
	for range 30 {
		if chol, ok = z.information(); !ok {
			return 0, nil, false
		}
		for a, i := range z.active {
			g.SetVec(a, z.grad[i])
		}
		if err := chol.SolveVecTo(s, g); err != nil && !isCondition(err) {
			return 0, nil, false
		}
		decrease := mat.Dot(s, g)
		if decrease < settledDecrease {
			break
		}
		before := value
		for scale := 1.0; scale > 1e-4; scale /= 2 {
			for a, i := range z.active {
				z.delta[i] -= scale * z.step[a]
			}
			if value = z.terms(psi, true, kind); value <= before || decrease < trustedDecrease {
				break
			}
			for a, i := range z.active {
				z.delta[i] += scale * z.step[a]
			}
		}
	}
	return value, chol, true
}

func isCondition(err error) bool {
	_, ok := err.(mat.Condition)
	return ok
}

// scatter is ψ with the spread of each group of rows where the median of their squared
// residuals would put it, which saves the search from far off a dozen steps.
func (z *linearised) scatter(psi []float64) []float64 {
	l := z.l
	squares := make([][]float64, len(psi))
	for i := range l.obs {
		if at := l.lay.spread[i]; at >= 0 && l.obs[i].Outcome == 0 {
			squares[at] = append(squares[at], z.r[i]*z.r[i]-l.stated[i])
		}
	}
	x := append([]float64(nil), psi...)
	for at, s := range squares {
		if len(s) == 0 {
			continue
		}
		slices.Sort(s)
		if v := s[len(s)/2] / medianSquare; v > 0 {
			x[at] = clamp(math.Sqrt(v), l.lay.psi[at].Lower, l.lay.psi[at].Upper)
		}
	}
	return x
}

// medianSquare is the median of the square of a standard normal variable.
const medianSquare = 0.454936423119572

// estimate minimises A from psi and returns the new spreads, and their covariance
// from the curvature of A (nil when it is not positive definite).
//
// The search is in the variances w = ψ²: A is even in each spread, so that as a
// function of ψ it is stationary at zero whether or not the minimum is there. For
// degrees of freedom ν it is in w = 1/ν, in which the normal limit is an ordinary
// point.
func (z *linearised) estimate(psi []float64, free []Free) (x []float64, covariance *mat.SymDense, err error) {
	k := len(psi)
	_, floor := z.variables(psi, free)
	res, err := leastsq.Minimize(z.outer(psi, free), leastsq.Settings{Local: true, Tolerance: spreadTolerance})
	if err != nil {
		return nil, nil, err
	}
	x = unfold(res.X, free)
	g, h := make([]float64, k), mat.NewSymDense(k, nil)
	if err := z.hessian(res.X, res.Value, floor, free, g, h); err != nil {
		return x, nil, nil
	}
	// From w to ψ by the chain rule.
	slope, bend := make([]float64, k), make([]float64, k)
	for i, f := range free {
		slope[i], bend[i] = 2*x[i], 2
		if f.Name == DegreesOfNoise {
			slope[i], bend[i] = -1/(x[i]*x[i]), 2/(x[i]*x[i]*x[i])
		}
	}
	for i := range k {
		for j := i; j < k; j++ {
			v := slope[i] * slope[j] * h.At(i, j)
			if i == j {
				v += bend[i] * g[i]
			}
			h.SetSym(i, j, v)
		}
		if x[i] <= free[i].Lower || x[i] >= free[i].Upper { // known, as far as the others are concerned
			for j := range k {
				h.SetSym(i, j, 0)
			}
			h.SetSym(i, i, 1)
		}
	}
	var c mat.Cholesky
	if c.Factorize(h) {
		covariance = mat.NewSymDense(k, nil)
		if err := c.InverseTo(covariance); err != nil && !isCondition(err) {
			covariance = nil
		}
	}
	return x, covariance, nil
}

// variables are the w of the search at ψ, and the sizes below which a change of
// one means nothing.
func (z *linearised) variables(psi []float64, free []Free) (params []leastsq.Param, floor []float64) {
	k := len(psi)
	params = make([]leastsq.Param, k)
	floor = make([]float64, k)
	for i, f := range free {
		if f.Name == DegreesOfNoise {
			w := 1 / psi[i]
			params[i] = leastsq.Param{Name: f.Label(), Start: clamp(w, 1/f.Upper, 1/f.Lower), Lower: 1 / f.Upper, Upper: 1 / f.Lower, Scale: 0.1}
			floor[i] = 0.1
			continue
		}
		lo, hi := f.Lower*f.Lower, f.Upper*f.Upper
		w := psi[i] * psi[i]
		params[i] = leastsq.Param{Name: f.Label(), Start: clamp(w, lo, hi), Lower: lo, Upper: hi, Scale: math.Max(w, 1e-4*f.Start*f.Start)}
		floor[i] = 1e-3 * math.Max(lo, z.typicalVariance())
		if f.Role == RolePoolSpread {
			floor[i] = math.Max(lo, 1e-6*f.Start*f.Start)
		}
	}
	return params, floor
}

// typicalVariance is the mean square of the residuals, the size on which
// variances are to be seen.
func (z *linearised) typicalVariance() float64 {
	s := 0.0
	for _, r := range z.r {
		s += r * r
	}
	return s/float64(len(z.r)) + 1e-12
}

// unfold returns ψ from the variables w of the search.
func unfold(w []float64, free []Free) []float64 {
	x := make([]float64, len(w))
	for i := range w {
		if free[i].Name == DegreesOfNoise {
			x[i] = 1 / w[i]
		} else {
			x[i] = math.Sqrt(math.Max(0, w[i]))
		}
	}
	return x
}

// differences fills gradient and a positive curvature of A by differences.
func (z *linearised) differences(w []float64, v float64, floor []float64, free []Free, grad []float64, curv *mat.SymDense) error {
	k := len(w)
	h := mat.NewSymDense(k, nil)
	g := make([]float64, k)
	if err := z.hessian(w, v, floor, free, g, h); err != nil {
		return err
	}
	copy(grad, g)
	if curv == nil {
		return nil
	}
	var c mat.Cholesky
	if !c.Factorize(h) { // far from the minimum: keep the diagonal, positive
		for i := range k {
			for j := range i {
				h.SetSym(i, j, 0)
			}
			h.SetSym(i, i, math.Abs(h.At(i, i))+1e-9)
		}
	}
	curv.CopySym(h)
	return nil
}

// varianceStep is the relative step of the differences of A in the variances:
// small enough that third derivatives do not matter, large enough that the
// rounding of A (some 1e-13) does not either.
const varianceStep = 1e-4

// hessian fills the gradient and the Hessian of A at the variances w by central
// differences; the centre is moved up by one step where it stands at zero.
func (z *linearised) hessian(w []float64, v float64, floor []float64, free []Free, g []float64, h *mat.SymDense) error {

	k := len(w)
	step := make([]float64, k)
	centre := append([]float64(nil), w...)
	moved := false
	for i := range w {
		step[i] = varianceStep * math.Max(w[i], floor[i])
		if centre[i] < step[i] {
			centre[i], moved = step[i], true
		}
	}
	at := func(i int, si float64, j int, sj float64) (float64, error) {
		y := append([]float64(nil), centre...)
		y[i] += si * step[i]
		if j >= 0 {
			y[j] += sj * step[j]
		}
		a, ok := z.adjusted(unfold(y, free))
		if !ok {
			return 0, errSingular
		}
		return a, nil
	}
	if moved {
		var err error
		if v, err = at(0, 0, -1, 0); err != nil {
			return err
		}
	}
	for i := range k {
		up, err := at(i, 1, -1, 0)
		if err != nil {
			return err
		}
		down, err := at(i, -1, -1, 0)
		if err != nil {
			return err
		}
		g[i] = (up - down) / (2 * step[i])
		h.SetSym(i, i, (up-2*v+down)/(step[i]*step[i]))
		for j := range i {
			var f [4]float64
			for q, s := range [...][2]float64{{1, 1}, {1, -1}, {-1, 1}, {-1, -1}} {
				if f[q], err = at(i, s[0], j, s[1]); err != nil {
					return err
				}
			}
			h.SetSym(i, j, (f[0]-f[1]-f[2]+f[3])/(4*step[i]*step[j]))
		}
	}
	return nil
}

func clamp(x, lo, hi float64) float64 { return math.Min(math.Max(x, lo), hi) }

// spreadTolerance is how close to the smallest A the spreads are taken, in their own
// standard errors. A is known to 1e-13 of itself, and its slope, by differences, to some
// 1e-9 standard errors for the largest data.
const spreadTolerance = 1e-7
