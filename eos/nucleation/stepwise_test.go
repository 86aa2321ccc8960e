package nucleation

import (
	"fmt"
	"math"
	"testing"

	"limsup/eos"
)

// sizes is the flux through size space in SI units, straight from its definition:
// f(n) from kinetic theory, c(n) from the free energy, the radius of the bubble of n
// molecules by bisection. It shares nothing with the package but its formulas.
type sizes struct {
	T, Pl, Pv, σ, N, m float64
}

// radius of the bubble of n molecules in mechanical equilibrium, n·kT = (P_l + 2σ/r)·(4/3)πr³.
// n rises with r up to last (all r for P_l ≥ 0).
func (s sizes) radius(n, last float64) float64 {
	lo, hi := 0.0, last
	for range 200 {
		r := 0.5 * (lo + hi)
		if (s.Pl+2*s.σ/r)*4./3*math.Pi*r*r*r < n*eos.Boltzmann*s.T {
			lo = r
		} else {
			hi = r
		}
	}
	return 0.5 * (lo + hi)
}

// lnRate is ln f(n)c(n): evaporation into the bubble of n molecules, 4πr²P_v/√(2πmkT),
// times N·exp(−ΔG/kT), with ΔG = 4πr²σ − V(P_b − P_l) + n·kT·ln(P_b/P_v).
func (s sizes) lnRate(n, last float64) float64 {
	kT := eos.Boltzmann * s.T
	r := s.radius(n, last)
	pb := s.Pl + 2*s.σ/r
	V := 4. / 3 * math.Pi * r * r * r
	ΔG := 4*math.Pi*r*r*s.σ - V*(pb-s.Pl) + n*kT*math.Log(pb/s.Pv)
	return math.Log(4*math.Pi*r*r*s.Pv/math.Sqrt(2*math.Pi*s.m*kT)) + math.Log(s.N) - ΔG/kT
}

// sum is ln J from Σ 1/(f(n)c(n)) over n = 1, 2, ... It stops 60 kT down the far
// side of the barrier or, under tension, at the largest bubble in mechanical equilibrium.
func (s sizes) sum() float64 {
	last, nmax := s.largest()
	lowest := math.Inf(1)
	var terms []float64
	for n := 1.0; n <= nmax; n++ {
		l := s.lnRate(n, last)
		terms = append(terms, l)
		lowest = math.Min(lowest, l)
		if l > lowest+60 && n > 10 && l > terms[len(terms)-2] {
			break
		}
	}
	total := 0.0
	for _, l := range terms {
		total += math.Exp(lowest - l)
	}
	return lowest - math.Log(total)
}

// largest is the radius at which n(r) has its maximum, and that n.
func (s sizes) largest() (r, n float64) {
	if s.Pl >= 0 {
		return 1e-6, math.Inf(1)
	}
	r = -4 * s.σ / (3 * s.Pl) // dn/dr = 0
	return r, s.molecules(r)
}

func (s sizes) molecules(r float64) float64 {
	return (s.Pl + 2*s.σ/r) * 4. / 3 * math.Pi * r * r * r / (eos.Boltzmann * s.T)
}

// integral is ln J from ∫dn/(f(n)c(n)) = ∫(dn/dr)dr/(fc) by Simpson's rule with 4000 steps
// from the bubble of one molecule to the largest, or to 2r* where it is long past.
func (s sizes) integral() float64 {
	last, _ := s.largest()
	hi := math.Min(last, 4*s.σ/(s.Pv-s.Pl))
	lo := s.radius(1, last)
	const steps = 4000
	lnRate := func(r float64) float64 { // that of the sum, without its bisection
		kT := eos.Boltzmann * s.T
		pb := s.Pl + 2*s.σ/r
		ΔG := 4./3*math.Pi*r*r*s.σ + s.molecules(r)*kT*math.Log(pb/s.Pv)
		return math.Log(4*math.Pi*r*r*s.Pv/math.Sqrt(2*math.Pi*s.m*kT)) + math.Log(s.N) - ΔG/kT
	}
	top := lnRate(2 * s.σ / (s.Pv - s.Pl))
	total := 0.0
	for i := range steps + 1 {
		r := lo + (hi-lo)*float64(i)/steps
		w := 2.
		switch {
		case i == 0 || i == steps:
			w = 1
		case i%2 == 1:
			w = 4
		}
		slope := (4*math.Pi*r*r*s.Pl + 16./3*math.Pi*r*s.σ) / (eos.Boltzmann * s.T)
		total += w * slope * math.Exp(top-lnRate(r))
	}
	return top - math.Log(total*(hi-lo)/(3*steps))
}

func sizesOf(t tb, f *Fluid, T, P float64) sizes {
	t.Helper()
	e, err := f.Embryo(T, P)
	if err != nil {
		t.Fatal(err)
	}
	m := f.Config().Model
	v, err := m.Liquid(T, P)
	if err != nil {
		t.Fatal(err)
	}
	return sizes{T, P, e.Pressure, e.Tension, eos.Avogadro / v, f.Config().MolarMass / eos.Avogadro}
}

// TestStepwiseSum compares the stepwise flux with the direct sum over whole numbers of
// molecules and with the fine integral.
//
// The sum over a smooth peak equals its integral to far below 1e-3 (measured: 5e-12
// for x > −0.6). Under more tension the sum ends at the largest bubble, where n(r) has
// its maximum and the integrand over n the end of a square root: the sum is then
// coarse (measured: 6e-4 in ln J at x = −0.97, 3e-3 at −1.3), and only the integral,
// taken over r, is compared. The tolerance of the integral, 1e-10, is that of the
// barrier from P_v − P_l, 1e-15·W·P_v/ΔP, with a margin (measured: 5e-12).
func TestStepwiseSum(t *testing.T) {
	pentane := named(t, "n-pentane")
	f := untuned(t, "soave", pentane, Config{Kinetics: Stepwise})
	var worstSum, worstIntegral float64
	for _, P := range []float64{-1.1e6, -1e6, -5e5, 0, atmosphere, 1e6, 2e6} {
		for _, decades := range []float64{22, 12, -60} {
			l, err := f.KineticLimit(P, Threshold(decades), 0)
			if err != nil {
				t.Fatal(err)
			}
			s := sizesOf(t, f, l.T, P)
			x := s.Pl / s.Pv
			at := fmt.Sprintf("%g Pa, W %.3g, x %.3g", P, l.Barrier, x)
			a, b := l.LnJ-s.sum(), l.LnJ-s.integral()
			t.Logf("%s: sum %.2g, integral %.2g", at, a, b)
			if x > -0.6 {
				worstSum = math.Max(worstSum, math.Abs(a))
				if !(math.Abs(a) <= 1e-3) {
					t.Errorf("%s: ln J differs from the sum over molecules by %.3g", at, a)
				}
			}
			worstIntegral = math.Max(worstIntegral, math.Abs(b))
			if !(math.Abs(b) <= 1e-10) {
				t.Errorf("%s: ln J differs from the integral over molecules by %.3g", at, b)
			}
		}
	}
	t.Logf("worst: sum %.2g, integral %.2g", worstSum, worstIntegral)
}

// TestStepwiseHeld: where B reaches its floor, neither the mechanical nor the
// stepwise flux has a step, and the liquid under more tension is marked.
func TestStepwiseHeld(t *testing.T) {
	pentane := named(t, "n-pentane")
	for _, k := range []Kinetics{Mechanical, Stepwise} {
		f := untuned(t, "soave", pentane, Config{Kinetics: k})
		const T = 390
		lo, hi := -4e6, 0.0 // P_l/P_v = −1.7 between
		for range 60 {
			P := 0.5 * (lo + hi)
			x, err := f.Flux(T, P)
			if err != nil {
				t.Fatal(err)
			}
			e, err := f.Embryo(T, P)
			if err != nil {
				t.Fatal(err)
			}
			if x.Held != (P/e.Pressure < -1.7) || e.Held != x.Held {
				t.Fatalf("%s at P_l/P_v = %.17g: held %t, %t in the embryo", k, P/e.Pressure, x.Held, e.Held)
			}
			if x.Held {
				lo = P
			} else {
				hi = P
			}
		}
		a, err := f.Flux(T, lo)
		if err != nil {
			t.Fatal(err)
		}
		b, err := f.Flux(T, hi)
		if err != nil {
			t.Fatal(err)
		}
		if !a.Held || b.Held {
			t.Fatalf("held %t below and %t above", a.Held, b.Held)
		}
		within(t, string(k)+" ln J across the floor of B", a.LnJ, b.LnJ, 1e-10)
		e, err := f.Embryo(T, lo)
		if err != nil {
			t.Fatal(err)
		}
		within(t, "P_l/P_v at the floor of B", lo/e.Pressure, -1.7, 1e-12)
	}
	c := untuned(t, "soave", pentane, Config{Kinetics: Chemical})
	x, err := c.Flux(390, -4e6)
	if err != nil || x.Held {
		t.Errorf("with B = 1 nothing is held: %v, %v", x.Held, err)
	}
}

// TestChemicalMechanical: the two closed forms differ by √B alone, and B is as defined.
func TestChemicalMechanical(t *testing.T) {
	pentane := named(t, "n-pentane")
	a := untuned(t, "soave", pentane, Config{})
	b := untuned(t, "soave", pentane, Config{Kinetics: Chemical})
	for _, P := range []float64{-1.5e6, 0, atmosphere, 1e6} {
		const T = 415
		x, err := a.Flux(T, P)
		if err != nil {
			t.Fatal(err)
		}
		y, err := b.Flux(T, P)
		if err != nil {
			t.Fatal(err)
		}
		e, err := a.Embryo(T, P)
		if err != nil {
			t.Fatal(err)
		}
		B := 1 - (1-P/e.Pressure)/3
		within(t, fmt.Sprintf("ln J chemical − mechanical at %g Pa", P), y.LnJ-x.LnJ, 0.5*math.Log(B), 1e-13*math.Abs(x.LnJ)+1e-13)
	}
}

// TestStepwiseTends to the closed form: ln(J/J_closed) → 0 as 1/W.
func TestStepwiseTends(t *testing.T) {
	for _, x := range []float64{-1.5, -0.5, 0, 0.3, 0.9} {
		a, _, _ := stepwiseFactor(1e4, x)
		b, _, _ := stepwiseFactor(1e5, x)
		c, _, _ := stepwiseFactor(1e6, x)
		if math.Abs(c) > 1e-5 || math.Abs(b/c-10) > 0.1 || math.Abs(a/b-10) > 1 {
			t.Errorf("x %g: ln of the factor %.4g, %.4g, %.4g at W = 1e4, 1e5, 1e6: not as 1/W", x, a, b, c)
		}
	}
}

// TestStepwiseHuge: a barrier of any size, as next to saturation, has its factor.
func TestStepwiseHuge(t *testing.T) {
	for _, x := range []float64{-1.7, -0.5, 0, 0.9} {
		a, aW, ax := stepwiseFactor(1e6, x)
		b, bW, bx := stepwiseFactor(math.Nextafter(1e6, 2e6), x)
		if math.Abs(a-b) > 1e-12 || deviation(aW, bW) > 1e-2 || math.Abs(ax-bx) > 1e-12 {
			t.Errorf("x %g: the factor jumps from %g, %g, %g to %g, %g, %g", x, a, aW, ax, b, bW, bx)
		}
		for _, W := range []float64{1e8, 1e20, 1e300, math.Inf(1)} {
			if l, dW, dx := stepwiseFactor(W, x); !(math.Abs(l) < 1e-6 && math.Abs(dW) < 1e-13 && math.Abs(dx) < 1e-5) {
				t.Errorf("W %g x %g: %g, %g, %g", W, x, l, dW, dx)
			}
		}
	}
}

// TestStepwiseDerivatives compares the derivatives of the factor with differences.
// Tolerance 1e-9; measured 1.3e-11 and 9.3e-11, the truncation of the differences.
func TestStepwiseDerivatives(t *testing.T) {
	var worstW, worstX float64
	for _, W := range []float64{3, 5, 10, 20, 60, 200, 1e3, 1e4} {
		for _, x := range []float64{-1.5, -1, -0.5, -0.1, -1e-3, 0, 1e-3, 0.1, 0.3, 0.6, 0.9} {
			ln, dW, dx := stepwiseFactor(W, x)
			if math.IsNaN(ln + dW + dx) {
				t.Fatalf("W %g x %g: %g %g %g", W, x, ln, dW, dx)
			}
			fW := fivePoint(func(W float64) float64 { l, _, _ := stepwiseFactor(W, x); return l }, W, 1e-3*W)
			fx := fivePoint(func(x float64) float64 { l, _, _ := stepwiseFactor(W, x); return l }, x, 1e-4)
			eW, ex := math.Abs(dW-fW)*W, math.Abs(dx-fx)
			worstW, worstX = math.Max(worstW, eW), math.Max(worstX, ex)
			if eW > 1e-9 {
				t.Errorf("W %g x %g: ∂/∂lnW = %.12g, differences %.12g", W, x, dW*W, fW*W)
			}
			if ex > 1e-9 {
				t.Errorf("W %g x %g: ∂/∂x = %.12g, differences %.12g", W, x, dx, fx)
			}
		}
	}
	t.Logf("worst: ∂/∂lnW %.2g, ∂/∂x %.2g", worstW, worstX)
}

// TestStepwiseNodes measures what the number of nodes costs.
func TestStepwiseNodes(t *testing.T) {
	nodes, weights := legendre(2 * stepwiseNodes)
	var worst, worstW, worstX float64
	for _, W := range []float64{5, 7, 10, 20, 40, 60, 100, 300, 1e3, 1e4, 1e5, 1e6} {
		for _, x := range []float64{-1.7, -1.5, -1, -0.5, -0.1, 0, 0.1, 0.5, 0.9, 0.99} {
			a, aW, ax := stepwiseFactor(W, x)
			b, bW, bx := stepwiseSum(W, x, nodes, weights)
			worst = math.Max(worst, math.Abs(a-b))
			worstW = math.Max(worstW, math.Abs(aW-bW)*W)
			worstX = math.Max(worstX, math.Abs(ax-bx))
			// At 1e6 it is rounding of W(ρ−1)… in the exponent (measured: 2e-13, and no
			// less between 192 and 300 nodes).
			if !(math.Abs(a-b) < math.Max(1e-13, 4e-19*W)) {
				t.Errorf("W %g x %g: doubling the nodes changes the factor by %.2g", W, x, b-a)
			}
		}
	}
	t.Logf("worst: factor %.2g, ∂/∂lnW %.2g, ∂/∂x %.2g", worst, worstW, worstX)
}
