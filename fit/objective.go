package fit

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// This file holds −ln of the likelihood of the locations θ at given spreads ψ,
//
//	−ln L = Σ_i nll(r_i, v_i) + Σ_pools Σ_g ½((θ_g − μ)/τ)² + Σ_priors ½((θ − θ₀)/s)² + Σ_anchors ½a²,
//
// with its gradient and its expected curvature. Constants that do not depend on θ
// are kept so that values compare across ψ.

// likelihood is the objective of one calibration.
type likelihood struct {
	*system
	anchors []anchored
	noise   Noise

	// As of the last hold: variance of each row from its stated uncertainties in K², and
	// the steepness κ of the hazard of its sample in 1/K, 0 for rows without.
	stated, steepness []float64
	blocks            []block // work space of addRows

	// misfit divides the information of Student rows, see misfitOf; 0 is 1.
	misfit float64
}

func newLikelihood(p *Plan, obs []Observation, lay *layout, workers int) (*likelihood, error) {
	l := &likelihood{system: newSystem(p, obs, lay, workers), noise: p.Noise,
		stated: make([]float64, len(obs)), steepness: make([]float64, len(obs))}
	var err error
	l.anchors, err = newAnchors(p, obs, lay)
	return l, err
}

// hold takes the widths of the rows at the limits of the last evaluation. They are
// constants of a search for θ: their own dependence on θ carries next to no
// information (a decade of flux changes κ by 1 % and moves the limit by a third of a
// kelvin), and with the widths held the scores have expectation zero at the truth.
func (l *likelihood) hold() {
	for i := range l.obs {
		l.stated[i] = l.system.stated(i)
		l.steepness[i] = 0
		if l.noise.Kind == Survival && l.obs[i].Hazard > 0 {
			l.steepness[i] = l.limit[i].steepness
		}
	}
}

// rounding is the error of differences of −ln L: that of the quadratures of survival
// rows, 1e-10 each, beyond which arithmetic is exact.
func (l *likelihood) rounding() float64 {
	if l.noise.Kind != Survival {
		return 0
	}
	return 1e-9 * math.Sqrt(float64(len(l.obs)))
}

// law is the noise at the spreads ψ.
func (l *likelihood) law(psi []float64) law {
	if at := l.lay.degrees; at >= 0 {
		return lawOf(true, psi[at])
	}
	return l.noise.law()
}

// terms is −ln L with its derivatives with respect to θ, the second ones of the given
// kind. grad and curv may be nil.
func (l *likelihood) terms(theta, psi []float64, variance []float64, grad []float64, curv *mat.SymDense, kind curvature) (float64, error) {

	if err := l.evaluate(theta); err != nil {
		return 0, err
	}
	clearAll(grad, curv)
	noise := l.law(psi)
	value := l.addRows(&noise, l.residual, variance, grad, curv, kind)
	value += l.addPenalties(theta, psi, grad, curv)
	for k := range l.anchors {
		r, d, err := l.anchors[k].residual(l.cells)
		if err != nil {
			return 0, err
		}
		value += 0.5 * r * r
		if grad != nil {
			l.addAnchor(&l.anchors[k], r, d, grad, curv)
		}
	}
	return value, nil
}

// density is the noise density of observation i for a residual r.
func (l *likelihood) density(noise *law, i int, r, v float64) density {
	intact := l.obs[i].Outcome != 0
	if κ := l.steepness[i]; κ > 0 {
		return boiling(r, v, κ, l.obs[i].Hazard, intact)
	}
	d := noise.of(r, v, intact)
	if l.misfit > 0 {
		d.irr /= l.misfit
	}
	return d
}

// misfitOf is the variance of robust estimates from the residuals themselves over the
// one that Student's distribution with the ν at hand promises, for errors that are
// symmetric but not Student's: with z = r/√v, ψ(z) = (ν+1)z/(ν+z²) and n rows,
//
//	[Σψ²/(n−p)]/[Σψ′/n]² · (ν+1)/(ν+3)
//
// (P. J. Huber, Robust Statistics, Wiley 1981, chapter 7; from memory). It is 1 on
// average where the noise is as assumed.
func (l *likelihood) misfitOf(noise *law, variance []float64, p int) float64 {
	ν := noise.ν
	var square, slope float64
	n := 0
	for i := range l.obs {
		if l.obs[i].Outcome != 0 {
			continue
		}
		r := l.residual(i)
		q := r * r / variance[i]
		square += (ν + 1) * (ν + 1) * q / ((ν + q) * (ν + q))
		slope += (ν + 1) * (ν - q) / ((ν + q) * (ν + q))
		n++
	}
	if n <= p || !(slope > 0) || !(square > 0) {
		return 1
	}
	m := slope / float64(n)
	return square / float64(n-p) / (m * m) * (ν + 1) / (ν + 3)
}

// addRow adds the derivatives of one row: slope is ∂nll/∂T_predicted, info the
// information about it.
func (l *likelihood) addRow(i int, slope, info float64, grad []float64, curv *mat.SymDense) {
	idx, d := &l.lay.index[i], &l.limit[i].d
	for a := range idx {
		ia := int(idx[a])
		if ia < 0 {
			continue
		}
		da := derivative(d, a)
		grad[ia] += slope * da
		if curv == nil {
			continue
		}
		// The locations of a row are laid out in order, so that this is the upper triangle.
		raw := curv.RawSymmetric()
		row := raw.Data[ia*raw.Stride:]
		for b := a; b < len(idx); b++ {
			if ib := int(idx[b]); ib >= 0 {
				row[ib] += info * da * derivative(d, b)
			}
		}
	}
}

// derivative is ∂(T_predicted + offset)/∂location.
func derivative(d *[locations]float64, a int) float64 {
	if a == locOffset {
		return 1
	}
	return d[a]
}

// add adds to an element of a symmetric matrix. The cross term of two different
// locations that happen to be the same free parameter cannot occur.
func add(m *mat.SymDense, i, j int, v float64) { m.SetSym(i, j, m.At(i, j)+v) }

// addPenalties adds pools and priors.
func (l *likelihood) addPenalties(theta, psi []float64, grad []float64, curv *mat.SymDense) float64 {
	value := 0.0
	normal := func(x, s float64, plus, minus int) {
		value += 0.5*x*x/(s*s) + math.Log(s) + 0.5*math.Log(2*math.Pi)
		if grad == nil {
			return
		}
		w := 1 / (s * s)
		grad[plus] += w * x
		if minus >= 0 {
			grad[minus] -= w * x
		}
		if curv != nil {
			add(curv, plus, plus, w)
			if minus >= 0 {
				add(curv, minus, minus, w)
				add(curv, plus, minus, -w)
			}
		}
	}
	for _, p := range l.lay.pools {
		for _, g := range p.values {
			x := theta[g]
			if p.mean >= 0 {
				x -= theta[p.mean]
			}
			normal(x, psi[p.spread], g, p.mean)
		}
	}
	for _, p := range l.lay.priors {
		normal(theta[p.at]-p.mean, p.spread, p.at, -1)
	}
	return value
}

func (l *likelihood) addAnchor(a *anchored, r float64, d [3]float64, grad []float64, curv *mat.SymDense) {
	idx := l.lay.cells[a.cell].index[2:5]
	for i := range idx {
		ii := int(idx[i])
		if ii < 0 {
			continue
		}
		grad[ii] += r * d[i]
		for j := i; curv != nil && j < len(idx); j++ {
			if jj := int(idx[j]); jj >= 0 {
				add(curv, ii, jj, d[i]*d[j])
			}
		}
	}
}

func clearAll(grad []float64, curv *mat.SymDense) {
	clear(grad)
	if curv != nil {
		curv.Zero()
	}
}

// variances are v_i at the limits held and the spreads ψ.
func (l *likelihood) variances(psi, dst []float64) []float64 {
	if dst == nil {
		dst = make([]float64, len(l.obs))
	}
	for i := range dst {
		sd := l.lay.sdOf(i, psi)
		dst[i] = l.stated[i] + float64(sd*sd)
	}
	return dst
}
