package leastsq

import (
	"math"
	"math/rand/v2"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distmv"
	"gonum.org/v1/gonum/stat/samplemv"
)

// decades each way over which starts of a parameter without finite bounds spread.
const decades = 2

// spread returns count starts of a scrambled Halton sequence. u in (0, 1) maps
//
//	between two finite bounds     L + u(U−L)
//	above a lower bound           L + (θ₀−L)·10^(2(2u−1)), likewise below an upper one
//	without bounds                θ₀·10^(2(2u−1))
//
// with θ₀ the given start, or its scale where the difference is zero.
func (b *box) spread(count int, seed uint64) [][]float64 {
	if count <= 0 {
		return nil
	}
	n := len(b.start)
	u := mat.NewDense(count, n, nil)
	src := rand.NewPCG(seed, 0x6c696d737570)
	samplemv.Halton{Kind: samplemv.Owen, Q: distmv.NewUnitUniform(n, nil), Src: src}.Sample(u)
	xs := make([][]float64, count)
	for k := range xs {
		xs[k] = make([]float64, n)
		for i := range n {
			xs[k][i] = b.place(i, u.At(k, i))
		}
	}
	return xs
}

func (b *box) place(i int, u float64) float64 {
	lo, hi, x := b.lower[i], b.upper[i], b.start[i]
	f := math.Pow(10, decades*(2*u-1))
	away := func(from float64, sign float64) float64 {
		if x != from {
			return from + (x-from)*f
		}
		return from + sign*b.scale[i]*f
	}
	switch {
	case lo == hi:
		x = lo
	case !math.IsInf(lo, 0) && !math.IsInf(hi, 0):
		x = lo + u*(hi-lo)
	case !math.IsInf(lo, 0):
		x = away(lo, 1)
	case !math.IsInf(hi, 0):
		x = away(hi, -1)
	case x != 0:
		x *= f
	default:
		x = b.scale[i] * (2*u - 1) * 10
	}
	return math.Min(math.Max(x, lo), hi)
}
