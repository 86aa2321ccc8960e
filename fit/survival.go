package fit

import "math"

// This file holds the law of a single boiling event. A sample of volume V that sees
// the flux J has survived with probability
//
//	S = exp(−H),   H = (V/β)∫J dT (heated at the rate β),   H = V J t (held for t).
//
// Near the limit T_m, where H has the value H_m (ln 2 at a median, 1 at a mean
// waiting time), ln J is a straight line of T with slope κ = dlnJ/dT, so that
//
//	H(T) = H_m exp[κ(T − T_m)],   density of T: κ H e^(−H),
//
// an extreme-value law of smallest values (Gumbel). Held until it boils at the time t,
// a sample has the density H e^(−H) of ln t, the same function of T: rows that are
// heated and rows that are held share one likelihood. Curvature of ln J changes H by
// about (dlnκ/dT)/κ, 1.4 % for n-pentane, as much as 2 mK (TestHazardIsLogLinear).
//
// A reading is the temperature of boiling and a normal error of standard deviation
// s. In units of 1/κ, u = ln H, x = κ(reading − T_m − offset) + ln H_m, ρ = κ s:
//
//	boiled: g(x) = ∫ exp(u − e^u) φ((x−u)/ρ)/ρ du,   intact: g(x) = ∫ exp(−e^u) φ((x−u)/ρ)/ρ du.
//
// With w the integrand as a weight, a = 1 (boiled) or 0 (intact) and q = a − e^u,
//
//	dln g/dx = E_w[q],   d²ln g/dx² = E_w[−e^u] + var_w[q] ≤ 0,
//	dln g/d(ρ²) = ½[d²ln g/dx² + (dln g/dx)²]   (heat equation).

// The integrand is analytic and log-concave. The trapezoidal rule about its mode,
// for which such integrands converge exponentially, uses steps of stepScale standard
// deviations of the normal curve at the mode, at most stepMost, out to where the
// integrand has fallen by e^(−cutoff). TestBlurredAccuracy measures the error of
// ln g against far finer steps: below 1e-8 for ρ from 1e-3 to 300.
const (
	stepScale = 0.5
	stepMost  = 0.33
	cutoff    = 23
)

// blurred returns ln g and its first two derivatives in x. ρ ≥ 0.
func blurred(x, ρ float64, intact bool) (ln, first, second float64) {
	if ρ < 1e-6 { // the change of ln g is of the order of ρ²
		e := math.Exp(math.Min(x, 300))
		if intact {
			return -e, -e, -e
		}
		return x - e, 1 - e, -e
	}
	if intact && ρ > 4 {
		return blurredSurvival(x, ρ)
	}
	a := 1.0
	if intact {
		a = 0
	}
	return integrate(x, ρ, a)
}

// mode of a·u − e^u − (x−u)²/(2ρ²). Its slope is a falling concave function, so that
// Newton's method from the right of the zero converges from one side.
func mode(x, ρ, a float64) float64 {
	ρ2 := ρ * ρ
	u := math.Min(x+a*ρ2, math.Log(1+math.Max(x, 0)/ρ2))
	for range 60 {
		e := math.Exp(u)
		step := (a - e + (x-u)/ρ2) / (e + 1/ρ2)
		u += step
		if math.Abs(step) < 1e-3/math.Sqrt(e+1/ρ2) { // any point near the mode serves as a centre
			break
		}
	}
	return u
}

func integrate(x, ρ, a float64) (ln, first, second float64) {
	u0 := mode(x, ρ, a)
	e0 := math.Exp(u0)
	σ := 1 / math.Sqrt(e0+1/(ρ*ρ))
	h := math.Min(stepScale*σ, stepMost)
	z0, dz := (x-u0)/ρ, h/ρ
	top := a*u0 - e0 - 0.5*z0*z0
	// Sums of w, w·e^u and w·e^2u, relative to the mode.
	s0, s1, s2 := 1.0, e0, e0*e0
	for _, sign := range [2]float64{1, -1} {
		e, grow := e0, math.Exp(sign*h)
		for k := 1.0; ; k++ {
			e *= grow
			z := z0 - sign*k*dz
			l := a*(u0+sign*k*h) - e - 0.5*z*z - top
			if !(l >= -cutoff) {
				break
			}
			w := math.Exp(l)
			s0 += w
			w *= e
			s1 += w
			s2 += w * e
		}
	}
	m := s1 / s0
	v := math.Max(0, s2/s0-m*m)
	return top + math.Log(s0*h/(ρ*math.Sqrt(2*math.Pi))), a - m, v - m
}

// blurredSurvival is the intact case for a wide blur, by parts: with Φ the normal
// distribution function and g₁ the density of the boiled case,
//
//	g = ∫ exp(u − e^u) Φ((u−x)/ρ) du,   g′ = −g₁,   g″ = −g₁′,
//
// whose integrand is as narrow as the extreme-value law, however wide the blur.
func blurredSurvival(x, ρ float64) (ln, first, second float64) {
	d, d1, _ := integrate(x, ρ, 1)
	// The mode lies between those of the two factors' product: start from that of the
	// density, which is close for wide blurs.
	u0 := math.Max(mode(x, ρ, 1), 0)
	at := func(u float64) float64 {
		lnΦ, _ := lnNormal((u - x) / ρ)
		return u - math.Exp(u) + lnΦ
	}
	top := at(u0)
	sum := 1.0
	const h = stepMost
	for _, sign := range [2]float64{1, -1} {
		for k := 1.0; ; k++ {
			l := at(u0+sign*k*h) - top
			if !(l >= -cutoff) {
				break
			}
			sum += math.Exp(l)
		}
	}
	ln = top + math.Log(sum*h)
	ratio := math.Exp(d - ln)
	return ln, -ratio, -ratio*d1 - ratio*ratio
}

// boiling is the density of a residual r in K with error variance v in K² of a row
// with steepness κ in 1/K and hazard H_m at its limit.
func boiling(r, v, κ, hazard float64, intact bool) density {
	ln, first, second := blurred(κ*r+math.Log(hazard), κ*math.Sqrt(v), intact)
	d := density{nll: -ln, dr: -κ * first, dv: -0.5 * κ * κ * (second + first*first), irr: math.Max(0, -κ*κ*second)}
	d.hrr = d.irr
	if !intact {
		d.nll -= math.Log(κ)
	}
	return d
}

// Moments of ln H of a boiled sample, that is of the logarithm of a unit exponential
// variable: mean −γ (Euler) and variance π²/6.
const (
	meanLogHazard     = -0.57721566490153286061
	varianceLogHazard = math.Pi * math.Pi / 6
)
