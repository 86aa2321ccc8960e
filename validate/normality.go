package validate

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/stat/distuv"
)

// The range of sample sizes for which the p-value of ShapiroWilk was fitted.
const (
	shapiroLeast = 3
	shapiroMost  = 5000
)

// Constants of P. Royston, Remark AS R94, Applied Statistics 44 (1995) 547: polynomial
// coefficients, constant term first (from memory, and compared with another
// transcription of the table).
var (
	roystonLast     = []float64{0, 0.221157, -0.147981, -2.071190, 4.434685, -2.706056} // last weight, in 1/√n
	roystonNextLast = []float64{0, 0.042981, -0.293762, -1.752461, 5.682633, -3.582633} // last but one, in 1/√n
	roystonGamma    = []float64{-2.273, 0.459}                                          // in n
	roystonMeanS    = []float64{0.5440, -0.39978, 0.025054, -6.714e-4}                  // in n ≤ 11
	roystonSdS      = []float64{1.3822, -0.77857, 0.062767, -0.0020322}                 // in n ≤ 11
	roystonMean     = []float64{-1.5861, -0.31082, -0.083751, 0.0038915}                // in ln n
	roystonSd       = []float64{-0.4803, -0.082676, 0.0030302}                          // in ln n
)

// ShapiroWilk returns the statistic W of S. S. Shapiro and M. B. Wilk, Biometrika 52
// (1965) 591, of a sample and its p-value against a normal distribution of unknown
// mean and variance, by Royston's approximation (AS R94). A small p speaks against
// normality. ok is false outside 3 to 5000 values, or when they do not differ.
func ShapiroWilk(sample []float64) (W, p float64, ok bool) {
	n := len(sample)
	if n < shapiroLeast || n > shapiroMost {
		return 0, 0, false
	}
	x := slices.Clone(sample)
	slices.Sort(x)
	if scale := math.Max(math.Abs(x[0]), math.Abs(x[n-1])); x[n-1]-x[0] <= 1e-12*scale {
		return 0, 0, false
	}
	a := shapiroWeights(n)
	mean := 0.0
	for _, v := range x {
		mean += v
	}
	mean /= float64(n)
	var ax, ss float64
	for i, v := range x {
		ax += float64(a[i] * (v - mean))
		ss += float64((v - mean) * (v - mean))
	}
	W = math.Min(1, ax*ax/ss)
	return W, shapiroP(W, n), true
}

// shapiroWeights are antisymmetric, of length one.
func shapiroWeights(n int) []float64 {
	a := make([]float64, n)
	if n == 3 {
		a[0], a[2] = -math.Sqrt(0.5), math.Sqrt(0.5)
		return a
	}
	m := make([]float64, n)
	mm := 0.0
	for i := range m {
		m[i] = distuv.UnitNormal.Quantile((float64(i+1) - 0.375) / (float64(n) + 0.25))
		mm += float64(m[i] * m[i])
	}
	u := 1 / math.Sqrt(float64(n))
	last := polynomial(roystonLast, u) + m[n-1]/math.Sqrt(mm)
	rest, norm, kept := mm-2*m[n-1]*m[n-1], 1-2*last*last, 1
	a[n-1] = last
	if n > 5 {
		next := polynomial(roystonNextLast, u) + m[n-2]/math.Sqrt(mm)
		rest, norm, kept = rest-2*m[n-2]*m[n-2], norm-2*next*next, 2
		a[n-2] = next
	}
	scale := math.Sqrt(rest / norm)
	for i := n / 2; i < n-kept; i++ {
		a[i] = m[i] / scale
	}
	for i := range n / 2 {
		a[i] = -a[n-1-i]
	}
	if n%2 == 1 {
		a[n/2] = 0
	}
	return a
}

func shapiroP(W float64, n int) float64 {
	if n == 3 { // exact
		return math.Min(1, math.Max(0, 6/math.Pi*(math.Asin(math.Sqrt(W))-math.Asin(math.Sqrt(0.75)))))
	}
	if W == 1 {
		return 1
	}
	y, N := math.Log(1-W), float64(n)
	var mean, sd float64
	if n <= 11 {
		γ := polynomial(roystonGamma, N)
		if y >= γ {
			return 0
		}
		y = -math.Log(γ - y)
		mean, sd = polynomial(roystonMeanS, N), math.Exp(polynomial(roystonSdS, N))
	} else {
		mean, sd = polynomial(roystonMean, math.Log(N)), math.Exp(polynomial(roystonSd, math.Log(N)))
	}
	return distuv.UnitNormal.Survival((y - mean) / sd)
}

func polynomial(c []float64, x float64) float64 {
	s := 0.0
	for i := len(c) - 1; i >= 0; i-- {
		s = float64(s*x) + c[i]
	}
	return s
}
