package validate

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"

	"limsup/fit"
)

// This file holds the information criteria. So that all members of a comparison are
// weighed by one measure of noise, whatever noise they were tuned with, the likelihood
// is that of normal errors with the stated uncertainties and one spread common to all
// rows, taken where the likelihood is largest:
//
//	ln L = max_s Σ ln N(e_i; 0, v_i + s²)        (ln Φ(−e_i/√(v_i+s²)) for intact rows)
//
// n is the number of rows, k the number of free locations plus one for s. Where pools,
// priors or anchors hold locations, each counts by the share that the rows determine:
// the sum of the leverages takes the place of their number (F. Vaida and S. Blanchard,
// Biometrika 92 (2005) 351; from memory).

// reading is a residual with the stated variance of its reading.
type reading struct {
	e, v   float64 // K, K²
	intact bool
}

// logLikelihood is ln L at the extra variance q in K².
func logLikelihood(rows []reading, q float64) float64 {
	sum := 0.0
	for _, r := range rows {
		v := r.v + q
		if r.intact {
			sum += math.Log(math.Max(distuv.UnitNormal.Survival(r.e/math.Sqrt(v)), math.SmallestNonzeroFloat64))
			continue
		}
		sum -= 0.5*math.Log(2*math.Pi*v) + 0.5*r.e*r.e/v
	}
	return sum
}

// maximumLikelihood returns ln L at the best spread s ≥ 0 in K. ok is false when ln L
// has no bound: a row without stated uncertainty is met exactly by all.
//
// s is sought up to twice the largest residual: for boiled rows alone it lies at or
// below the largest, since each term falls beyond its own e² − v. The interval is
// scanned, because ln L may have more than one maximum when v differ, and each peak of the
// scan that comes close to the highest is refined by golden section.
func maximumLikelihood(rows []reading) (lnL, spread float64, ok bool) {
	top, least := 0.0, math.Inf(1)
	for _, r := range rows {
		top, least = math.Max(top, r.e*r.e), math.Min(least, r.v)
	}
	if len(rows) == 0 || top+least == 0 {
		return 0, 0, false
	}
	top = math.Max(4*top, 1e-12*least)
	const scan = 64
	at := func(i int) float64 { // from 1e-12 of the top, evenly in ln q; s = √q
		if i <= 0 && least > 0 {
			return 0
		}
		return top * math.Pow(10, -12*(1-float64(min(max(i, 0), scan))/scan))
	}
	var grid [scan + 1]float64
	lnL = math.Inf(-1)
	for i := range grid {
		grid[i] = logLikelihood(rows, at(i))
		lnL = math.Max(lnL, grid[i])
	}
	q, highest := 0.0, lnL
	for i, l := range grid {
		peak := (i == 0 || l >= grid[i-1]) && (i == scan || l >= grid[i+1])
		if !peak || l < highest-nearTop {
			continue
		}
		// The grid point stands unless the search finds better: at the end of the interval it
		// is the maximum itself.
		if l >= lnL {
			lnL, q = l, at(i)
		}
		if l, x := golden(func(q float64) float64 { return logLikelihood(rows, q) }, at(i-1), at(i+1)); l > lnL {
			lnL, q = l, x
		}
	}
	return lnL, math.Sqrt(q), true
}

// nearTop is how far below the highest point of the scan the top of another peak is
// looked for: steps of a factor 1.54 in q leave at most (n/16)·(ln 1.54)² ≈ 0.012n, the curvature of
// n rows, less than 1 for 80 rows; with more rows a second peak so close in height is an accident.
const nearTop = 1

// golden finds a maximum of f between lo and hi by golden section.
func golden(f func(float64) float64, lo, hi float64) (value, at float64) {
	ratio := (math.Sqrt(5) - 1) / 2
	a, b := hi-ratio*(hi-lo), lo+ratio*(hi-lo)
	la, lb := f(a), f(b)
	for range 45 { // 0.618⁴⁵ is the square root of rounding
		if la < lb {
			lo, a, la = a, b, lb
			b = lo + ratio*(hi-lo)
			lb = f(b)
		} else {
			hi, b, lb = b, a, la
			a = hi - ratio*(hi-lo)
			la = f(a)
		}
	}
	if lb > la {
		return lb, b
	}
	return la, a
}

// criteria returns
//
//	AICc = −2 ln L + 2k + 2k(k+1)/(n−k−1)   (C. M. Hurvich and C.-L. Tsai, Biometrika 76 (1989) 297)
//	BIC  = −2 ln L + k ln n                 (G. Schwarz, Annals of Statistics 6 (1978) 461)
//
// (citations from memory). ok is false for n ≤ k + 1, where the first is not defined.
func criteria(lnL, k float64, n int) (aicc, bic float64, ok bool) {
	N := float64(n)
	if N-k-1 <= 0 {
		return 0, 0, false
	}
	return -2*lnL + 2*k + 2*k*(k+1)/(N-k-1), -2*lnL + k*math.Log(N), true
}

// parameters is the number of free locations of a calibration as criteria count them.
func parameters(c *fit.Calibration) float64 {
	held := len(c.Plan.Priors) > 0 || len(c.Plan.Anchors) > 0
	free, leverage := 0.0, 0.0
	for i := range c.Parameters[:c.Locations] {
		p := &c.Parameters[i]
		held = held || p.Role == fit.RolePoolMean
		if p.AtBound == "" {
			free++
		}
	}
	if !held {
		return free
	}
	for i := range c.Rows {
		leverage += c.Rows[i].Leverage
	}
	return leverage
}
