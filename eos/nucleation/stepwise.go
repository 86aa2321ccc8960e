package nucleation

import (
	"math"

	"gonum.org/v1/gonum/integrate/quad"
)

// This file sums the steady flux over embryo sizes. Embryos grow and shrink by
// single molecules; with f(n) the rate at which molecules evaporate into an
// embryo of n of them and c(n) = N·exp(−ΔG(n)/kT) its equilibrium number, the
// steady flux is (R. Becker and W. Döring, Ann. Phys. 416 (1935) 719)
//
//	J = [∫dn/(f(n)c(n))]⁻¹.
//
// The bubble of n molecules is in mechanical equilibrium, P_b = P_l + 2σ/r, and
// holds an ideal vapour, n = P_b·V/kT. Its free energy is
//
//	ΔG(n) = (4/3)πr²σ + n·kT·ln(P_b/P_v),   dΔG/dn = kT·ln(P_b/P_v),
//
// with P_v the pressure of chemical equilibrium, and f(n) = 4πr²P_v/√(2πmkT): what
// evaporates is set by the liquid and balances what returns at P_b = P_v.
// Measured by ρ = r/r* everything depends on W and x = P_l/P_v alone:
//
//	ΔG/kT = g(ρ) = W[ρ² + 2/(1−x)·(xρ³ + (1−x)ρ²)·ln(x + (1−x)/ρ)]
//	J/J_closed = √(πB/(3W))/K,   K = ∫exp(g − W)·(x + (2/3)(1−x)/ρ)dρ,
//
// where J_closed is the flux with B = (2+x)/3: its closed form takes g as a
// parabola about ρ = 1. The factor tends to 1 as W grows.

// nodes and weights of the Gauss–Legendre rule on [−1, 1]. Doubling their number
// changes the factor by less than 1e-13 for W from 5 to 1e5, and by 2e-13 at 1e6,
// where rounding of the exponent shows (TestStepwiseNodes).
const stepwiseNodes = 96

var stepwiseX, stepwiseW = legendre(stepwiseNodes)

func legendre(n int) (x, w []float64) {
	x, w = make([]float64, n), make([]float64, n)
	quad.Legendre{}.FixedLocations(x, w, -1, 1)
	return x, w
}

// largestW is the barrier above which ln(J/J_closed) is continued as 1/W: the next
// term is below 1e-6 of it, and the peak would become too narrow for steps of ρ.
const largestW = 1e6

// stepwiseFactor returns ln(J/J_closed) and its derivatives with respect to W
// and to x = P_l/P_v, −2 < x < 1.
func stepwiseFactor(W, x float64) (ln, dW, dx float64) {
	if W > largestW {
		k := largestW / W
		ln, _, dx = stepwiseSum(largestW, x, stepwiseX, stepwiseW)
		return k * ln, -k * ln / W, k * dx
	}
	return stepwiseSum(W, x, stepwiseX, stepwiseW)
}

func stepwiseSum(W, x float64, nodes, weights []float64) (ln, dW, dx float64) {
	lo, hi, single := stepwiseRange(W, x)
	mid, half := 0.5*(lo+hi), 0.5*(hi-lo)
	var K, KW, Kx float64
	for i, z := range nodes {
		ρ := mid + half*z
		h, hx := stepwiseExponent(ρ, x)
		weight := x + (2./3)*(1-x)/ρ
		e := weights[i] * math.Exp(W*h)
		K += e * weight
		KW += e * weight * h
		Kx += e * (weight*W*hx + 1 - (2./3)/ρ)
	}
	K, KW, Kx = K*half, KW*half, Kx*half
	if single { // the lower end moves with W and x: n(ρ) = 1 there
		slope := (2 + 2*W/(1-x)*x*lo*lo*lo) / lo // dn/dρ
		h, _ := stepwiseExponent(lo, x)
		e := math.Exp(W*h) * (x + (2./3)*(1-x)/lo) / slope
		KW += e / W
		Kx += e * 2 * W * lo * lo * lo / ((1 - x) * (1 - x))
	}
	b := (2 + x) / 3
	ln = 0.5*math.Log(math.Pi*b/(3*W)) - math.Log(K)
	return ln, -0.5/W - KW/K, 0.5/(2+x) - Kx/K
}

// stepwiseExponent is h = (g − W)/W at ρ and its derivative with respect to x.
func stepwiseExponent(ρ, x float64) (h, hx float64) {
	u := x + (1-x)/ρ // P_b/P_v
	d := ρ - 1
	lnu := math.Log1p((1 - x) * -d / ρ)
	n := ρ * ρ * (x*ρ + 1 - x) / (1 - x)
	dn := ρ * ρ * ρ / ((1 - x) * (1 - x)) // ∂/∂x of (xρ³ + (1−x)ρ²)/(1−x)
	h = d*(ρ+1) + 2*n*lnu
	hx = 2*dn*lnu + 2*n*(1-1/ρ)/u
	return h, hx
}

// stepwiseDepth is how far below its top, in units of kT, the integrand of K is
// followed: e⁻⁴⁵ is below the rounding of the sum.
const stepwiseDepth = 45

// stepwiseRange is the interval of ρ about 1 that the sum needs: from an embryo
// of one molecule, or where g has fallen far enough, to the other side.
// single tells that lo is the embryo of one molecule. For a liquid under tension
// the interval ends where n(r) does, at ρ = −(2/3)(1−x)/x.
func stepwiseRange(W, x float64) (lo, hi float64, single bool) {
	// n = 2W/(1−x)·ρ²(xρ + 1−x) = 1, by Newton steps from the root for ρ → 0; they
	// go on until the next would be below rounding, since the slopes rest on n = 1.
	// Below a few kT an embryo is no thermodynamic object; the range is kept open there.
	first := 1 / math.Sqrt(2*W)
	for range 20 {
		n := 2 * W / (1 - x) * first * first * (x*first + 1 - x)
		step := (n - 1) * first / (2*n + 2*W/(1-x)*x*first*first*first)
		first -= step
		if math.Abs(step) < 1e-8*first {
			break
		}
	}
	single = first > 0 && first < 0.8
	if !single {
		first = 0.8
	}
	last := math.Inf(1)
	if x < 0 {
		last = -(2. / 3) * (1 - x) / x
	}
	end := func(towards float64) float64 {
		step := towards * math.Min(0.02, 0.5/math.Sqrt(W))
		ρ := 1.0
		for {
			next := ρ + step
			if next <= first {
				return first
			}
			if next >= last {
				return last
			}
			ρ = next
			if h, _ := stepwiseExponent(ρ, x); W*h < -stepwiseDepth {
				return ρ
			}
			step *= 1.1
		}
	}
	lo, hi = end(-1), end(+1)
	return lo, hi, single && lo == first
}
