package leastsq

import (
	"math"
	"math/rand/v2"

	"gonum.org/v1/gonum/optimize"
)

// This file hands a problem on which the damped search came to rest without an
// optimum to other methods of gonum optimize. They know no bounds: they search
// in z with θ_i = fold(x_i + s_i z_i), s the scale of θ and fold the reflection
// at the bounds, so that every point evaluated lies between them.

// fallback is another method, started at x.
type fallback struct {
	name string
	run  func(x []float64, value float64) ([]float64, bool)
}

// evaluationsPerParameter bounds a fallback: simplex and evolution strategy
// need some hundred evaluations per parameter to come to rest on smooth
// functions of up to ten parameters.
const evaluationsPerParameter = 500

func (q *search) fallbacks() []fallback {
	var list []fallback
	if q.smooth {
		list = append(list, fallback{"BFGS", func(x []float64, v float64) ([]float64, bool) {
			return q.folded(x, v, &optimize.BFGS{}, true)
		}})
	}
	return append(list,
		fallback{"Nelder–Mead", func(x []float64, v float64) ([]float64, bool) {
			return q.folded(x, v, &optimize.NelderMead{SimplexSize: 0.1}, false)
		}},
		fallback{"CMA-ES", func(x []float64, v float64) ([]float64, bool) {
			return q.folded(x, v, &optimize.CmaEsChol{InitStepSize: 0.3, Src: rand.NewPCG(q.s.Seed, 0x636d61)}, false)
		}})
}

// folded runs method in the folded variables and reports a point lower than value.
func (q *search) folded(x []float64, value float64, method optimize.Method, gradient bool) ([]float64, bool) {
	n := len(x)
	scale := make([]float64, n)
	for i := range scale {
		scale[i] = q.b.size(i, x[i])
	}
	theta, sign := make([]float64, n), make([]float64, n)
	unfold := func(z []float64) {
		for i := range z {
			theta[i], sign[i] = q.b.fold(i, x[i]+scale[i]*z[i])
		}
	}
	best, lowest := make([]float64, n), value
	p := optimize.Problem{Func: func(z []float64) float64 {
		unfold(z)
		f := q.m.value(theta)
		if f < lowest {
			lowest = f
			copy(best, theta)
		}
		return f
	}}
	if gradient {
		p.Grad = func(g, z []float64) {
			unfold(z)
			q.m.value(theta)
			q.m.derive(g, theta)
			for i := range g {
				g[i] *= scale[i] * sign[i]
			}
		}
	}
	// A method that gives up reports an error; the best point counts all the same.
	_, _ = optimize.Minimize(p, make([]float64, n), &optimize.Settings{
		Converger:       &optimize.FunctionConverge{Relative: 1e-12, Iterations: 50 * n},
		FuncEvaluations: evaluationsPerParameter * n,
		Concurrent:      1,
	}, method)
	return best, lowest < value
}

// fold reflects t at the bounds of θ_i into them; sign is dθ/dt.
func (b *box) fold(i int, t float64) (θ, sign float64) {
	lo, hi := b.lower[i], b.upper[i]
	sign = 1
	switch w := hi - lo; {
	case w == 0:
		return lo, 0
	case !math.IsInf(w, 0):
		u := math.Mod(math.Abs(t-lo), 2*w)
		if t < lo {
			sign = -sign
		}
		if u > w {
			u, sign = 2*w-u, -sign
		}
		t = lo + u
	case t < lo:
		t, sign = lo+(lo-t), -1
	case t > hi:
		t, sign = hi-(t-hi), -1
	}
	return math.Min(math.Max(t, lo), hi), sign
}
