package campaign

import (
	"math"
	"math/rand/v2"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"

	"limsup/fit"
	"limsup/fit/design"
)

// Verdict is the chance that the new measurements show that tuning was worth it.
type Verdict struct {
	// Better is the probability that, on the readings of the batch alone, the model as
	// it is now errs less than the untuned one by more than the test at 95 % asks: the
	// verdict "better". Worse is that of the opposite verdict.
	Better, Worse float64
	Reason        string // why there is none; "" otherwise
}

// draws is the number of simulated batches behind a chance: its standard error is
// at most 0.5/√draws = 0.008.
const draws = 4000

// verdict simulates the readings of the batch under the model, whose parameters
// scatter by what is known of them now, and passes the verdict on each.
func (p *Plan) verdict(own *design.Problem) error {
	if p.N < 3 {
		p.Verdict.Reason = "a verdict needs three measurements or more"
		return nil
	}
	untuned, err := fit.Untuned(p.Model.Variant, p.Model.Settings...)
	if err != nil {
		p.Verdict.Reason = err.Error()
		return nil
	}
	now, err := own.Evaluate(nil)
	if err != nil {
		return err
	}
	var δ, sd, steep []float64
	var g [][]float64
	for _, s := range p.Steps {
		r := &p.Readings[s.Reading]
		q := r.Query()
		q.OrSpinodal = true
		x, err := untuned.Predict(q)
		if err != nil {
			p.Verdict.Reason = "the untuned model does not predict " + r.Subject() + ": " + err.Error()
			return nil
		}
		κ := 0.0
		if boilsAtRandom(p.Model.Noise, &r.sensitivity) {
			κ = r.sensitivity.Steepness
		}
		steep = append(steep, κ)
		δ, sd, g = append(δ, r.Expected-x.Temperature), append(sd, math.Sqrt(r.variance)), append(g, p.space.gradient(&r.sensitivity))
	}
	var chol mat.Cholesky
	n := len(p.space.params)
	var l mat.TriDense
	if !chol.Factorize(now.Covariance) {
		p.Verdict.Reason = "what is known of the parameters is too uneven to draw from"
		return nil
	}
	chol.LTo(&l)
	t := distuv.StudentsT{Mu: 0, Sigma: 1, Nu: float64(len(δ) - 1)}.Quantile(0.5 + tellLevel/2)
	rng := rand.New(rand.NewPCG(p.Seed, 0x5eed))
	better, worse := 0, 0
	z, tuned, plain := make([]float64, n), make([]float64, len(δ)), make([]float64, len(δ))
	noise := drawer{p.Model.Noise, rng}
	for range draws {
		for i := range z {
			z[i] = rng.NormFloat64()
		}
		for i := range δ {
			e := noise.draw(sd[i]) + noise.boil(steep[i], math.Ln2)
			for k, d := range g[i] {
				if d == 0 {
					continue
				}
				for j := 0; j <= k; j++ {
					e += d * l.At(k, j) * z[j]
				}
			}
			tuned[i], plain[i] = e, e+δ[i]
		}
		switch d, se := difference(tuned, plain); {
		case d < -t*se:
			better++
		case d > t*se:
			worse++
		}
	}
	p.Verdict.Better, p.Verdict.Worse = float64(better)/draws, float64(worse)/draws
	return nil
}

// difference is that of two root-mean-square errors on the same rows and its
// standard error: to first order, √(Σe²/n) changes by (e² − mse)/(2·rmse·n) for each
// row.
func difference(a, b []float64) (d, se float64) {
	n := float64(len(a))
	ms := func(e []float64) float64 {
		s := 0.0
		for _, x := range e {
			s += x * x
		}
		return s / n
	}
	A, B := ms(a), ms(b)
	ra, rb := math.Sqrt(A), math.Sqrt(B)
	ss := 0.0
	for i := range a {
		x := (a[i]*a[i]-A)/(2*ra) - (b[i]*b[i]-B)/(2*rb)
		ss += x * x
	}
	return ra - rb, math.Sqrt(ss / (n * (n - 1)))
}

// drawer draws reading errors.
type drawer struct {
	noise fit.Noise
	rng   *rand.Rand
}

// draw is an error of scale sd: normal, or Student's with the degrees of the noise,
// as a normal over the root of a gamma variable.
func (d drawer) draw(sd float64) float64 {
	x := d.rng.NormFloat64()
	if d.noise.Kind == fit.Student {
		ν := d.noise.Degrees
		χ2 := 2 * distuv.Gamma{Alpha: ν / 2, Beta: 1, Src: d.rng}.Rand()
		x /= math.Sqrt(χ2 / ν)
	}
	return sd * x
}

// boil is the distance in K of a boiling temperature from the limit where the hazard
// is H, for a sample with steepness κ; 0 for κ = 0. The hazard at boiling is a unit
// exponential variable.
func (d drawer) boil(κ, H float64) float64 {
	if κ == 0 {
		return 0
	}
	return math.Log(d.rng.ExpFloat64()/H) / κ
}

// boilsAtRandom tells whether a reading scatters by the chance of boiling itself.
func boilsAtRandom(n fit.Noise, x *fit.Sensitivity) bool {
	return n.Kind == fit.Survival && x.OwnFlux && x.Steepness > 0
}
