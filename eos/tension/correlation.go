package tension

import (
	"cmp"
	"fmt"
	"math"
	"slices"
)

// Func is a model of surface tension for one fluid.
type Func interface {
	// Sigma returns σ in N/m and dσ/dT in N/(m·K) at T in K, 0 < T < Tc(). σ is
	// positive and both are finite when err is nil.
	Sigma(T float64) (sigma, dsigmadT float64, err error)
	// Tc is the temperature in K at which σ reaches zero, the upper end of Sigma.
	Tc() float64
}

// Term is one term s·θⁿ of a PowerSum.
type Term struct {
	Coefficient float64 // s, N/m
	Exponent    float64 // n
}

// PowerSum is the form
//
//	σ = Σ sᵢ·θ^nᵢ,  θ = 1 − T/Tc,
//
// of A. Mulero, I. Cachadina and M. I. Parra, J. Phys. Chem. Ref. Data 41 (2012)
// 043105. A one-term sum with n ≈ 11/9 is the rule of van der Waals and Guggenheim;
// the form of Somayajulu has the exponents 5/4, 9/4 and 13/4.
//
// Obtain one from NewPowerSum. A sum with terms of opposite sign can turn negative
// just below Tc; NewPowerSum finds where.
type PowerSum struct {
	CriticalTemperature float64 // K
	Terms               []Term
	above, below        float64 // σ > 0 between these temperatures, K
}

const (
	powerSumForm = "power-sum"
	// referenceTr is the reduced temperature at which a fit must be positive. The
	// interval in which it holds is the one around this point; every published fit
	// covers it or ends not far below, and superheat limits lie above it.
	referenceTr = 0.7
	// gridPerDecade and smallestTheta set the search for roots where there can be more
	// than one (see signChanges); these are then far apart on a logarithmic grid. θ below one unit
	// in the last place of Tr = 1 does not occur.
	gridPerDecade = 40
	smallestTheta = 1e-16
)

// NewPowerSum checks the constants and finds the interval in which σ is positive.
// Tc is in K; the terms are copied.
//
// Errors: *ParameterError when Tc, a coefficient or an exponent is not finite or Tc or
// an exponent not positive (σ must vanish at Tc) or when there is no term;
// *NonPositiveError when σ(0.7·Tc) ≤ 0.
func NewPowerSum(Tc float64, terms ...Term) (*PowerSum, error) {
	p := &PowerSum{CriticalTemperature: Tc, Terms: append([]Term(nil), terms...)}
	if !(Tc > 0 && Tc < 1e6) {
		return nil, &ParameterError{powerSumForm, "critical temperature in K", Tc, "> 0 and < 1e6"}
	}
	if len(terms) == 0 {
		return nil, &ParameterError{powerSumForm, "number of terms", 0, ">= 1"}
	}
	for i, t := range terms {
		if !(math.Abs(t.Coefficient) < 1e3) {
			return nil, &ParameterError{powerSumForm, fmt.Sprintf("coefficient %d in N/m", i+1), t.Coefficient, "between -1000 and 1000"}
		}
		if !(t.Exponent > 0 && t.Exponent <= 20) {
			return nil, &ParameterError{powerSumForm, fmt.Sprintf("exponent %d", i+1), t.Exponent, "> 0 and <= 20"}
		}
	}
	if σ, _ := p.value(referenceTr * Tc); !(σ > 0) {
		return nil, &NonPositiveError{Form: powerSumForm, T: referenceTr * Tc, Sigma: σ}
	}
	if n := p.signChanges(); n > 0 {
		p.below = p.edge(smallestTheta, n, Tc)
		p.above = p.edge(1, n, 0)
	} else {
		p.below = Tc
	}
	return p, nil
}

// signChanges counts the changes of sign of the coefficients in the order of their
// exponents. By Descartes' rule, which holds for real exponents too, the sum has at
// most as many roots θ > 0.
func (p *PowerSum) signChanges() int {
	sorted := slices.SortedFunc(slices.Values(p.Terms), func(a, b Term) int { return cmp.Compare(a.Exponent, b.Exponent) })
	last, n := 0.0, 0
	for _, t := range sorted {
		if t.Coefficient*last < 0 {
			n++
		}
		if t.Coefficient != 0 {
			last = math.Copysign(1, t.Coefficient)
		}
	}
	return n
}

// edge returns the first temperature at which σ ≤ 0, going from the reference
// temperature to that of thetaEnd, or otherwise if there is none. A single root shows at
// the end itself; for more the way is cut into a grid.
func (p *PowerSum) edge(thetaEnd float64, roots int, otherwise float64) float64 {
	start := 1 - referenceTr
	n := 1
	if roots > 1 {
		n = int(math.Ceil(math.Abs(math.Log10(thetaEnd/start)) * gridPerDecade))
	}
	good := referenceTr * p.CriticalTemperature
	for i := 1; i <= n; i++ {
		θ := start * math.Pow(thetaEnd/start, float64(i)/float64(n))
		T := math.Min(p.CriticalTemperature*(1-θ), math.Nextafter(p.CriticalTemperature, 0))
		T = math.Max(T, p.CriticalTemperature*smallestTheta)
		σ, _ := p.value(T)
		if σ > 0 {
			good = T
			continue
		}
		for bad := T; ; { // bisect to neighbouring floating-point numbers
			mid := good + (bad-good)/2
			if mid == good || mid == bad {
				return bad
			}
			if σ, _ := p.value(mid); σ > 0 {
				good = mid
			} else {
				bad = mid
			}
		}
	}
	return otherwise
}

// value is the sum and its slope without checks. All powers share one logarithm:
// an error of one unit in the last place of n·lnθ costs n·|lnθ|·1.1e-16, below
// 1e-14 for n·|lnθ| < 90.
func (p *PowerSum) value(T float64) (sigma, slope float64) {
	θ := (p.CriticalTemperature - T) / p.CriticalTemperature
	lnθ := math.Log(θ)
	for _, t := range p.Terms {
		s := t.Coefficient * math.Exp(t.Exponent*lnθ)
		sigma += s
		slope -= s * t.Exponent
	}
	return sigma, slope / (p.CriticalTemperature - T)
}

// Sigma is described at Func. It allocates nothing unless it fails.
//
// Errors: *RangeError outside 0 < T < CriticalTemperature; *NonPositiveError where the
// sum is not positive.
func (p *PowerSum) Sigma(T float64) (sigma, dsigmadT float64, err error) {
	if !(T > 0 && T < p.CriticalTemperature) {
		return 0, 0, &RangeError{powerSumForm, T, p.CriticalTemperature}
	}
	sigma, dsigmadT = p.value(T)
	if !(sigma > 0) || p.below > 0 && T >= p.below || T <= p.above {
		return 0, 0, &NonPositiveError{powerSumForm, T, sigma, p.above, p.below}
	}
	return sigma, dsigmadT, nil
}

// PositiveBelow is the temperature in K up to which σ stays positive, going up from
// 0.7·CriticalTemperature: CriticalTemperature itself for most fluids, less where
// negative terms win near the critical point. It is the lowest floating-point number at which the
// sum is not positive.
func (p *PowerSum) PositiveBelow() float64 { return p.Tc() }

// PositiveAbove is the same going down: the temperature in K at and below which the
// sum is not positive, 0 for most fluids.
func (p *PowerSum) PositiveAbove() float64 { return p.above }

// Tc is PositiveBelow, so that a solver that keeps below it stays where σ exists.
func (p *PowerSum) Tc() float64 {
	if p.below > 0 {
		return p.below
	}
	return p.CriticalTemperature
}

// DIPPR106 is the form
//
//	σ = A·θ^(B + C·Tr + D·Tr² + E·Tr³),  Tr = T/Tc, θ = 1 − Tr,
//
// equation 106 of the DIPPR collection, also that of the VDI Heat Atlas (2010).
type DIPPR106 struct {
	CriticalTemperature float64 // K
	A                   float64 // N/m
	B, C, D, E          float64
}

const dippr106Form = "dippr-106"

// NewDIPPR106 checks the constants. Tc is in K, a in N/m.
//
// Errors: *ParameterError when a constant is not finite, Tc or a is not positive, or
// the exponent is not positive at Tc (σ would not vanish there).
func NewDIPPR106(Tc, a, b, c, d, e float64) (*DIPPR106, error) {
	if !(Tc > 0 && Tc < 1e6) {
		return nil, &ParameterError{dippr106Form, "critical temperature in K", Tc, "> 0 and < 1e6"}
	}
	if !(a > 0 && a < 1e3) {
		return nil, &ParameterError{dippr106Form, "A in N/m", a, "> 0 and < 1000"}
	}
	for i, v := range [...]float64{b, c, d, e} {
		if !(math.Abs(v) <= 100) {
			return nil, &ParameterError{dippr106Form, "BCDE"[i : i+1], v, "between -100 and 100"}
		}
	}
	if sum := b + c + d + e; !(sum > 0) {
		return nil, &ParameterError{dippr106Form, "B+C+D+E", sum, "> 0"}
	}
	return &DIPPR106{Tc, a, b, c, d, e}, nil
}

// Sigma is described at Func. It allocates nothing unless it fails.
//
// Errors: *RangeError outside 0 < T < CriticalTemperature; *NonPositiveError where the
// value is not positive, which needs constants that NewDIPPR106 refuses.
func (f *DIPPR106) Sigma(T float64) (sigma, dsigmadT float64, err error) {
	if !(T > 0 && T < f.CriticalTemperature) {
		return 0, 0, &RangeError{dippr106Form, T, f.CriticalTemperature}
	}
	x := T / f.CriticalTemperature
	θ := (f.CriticalTemperature - T) / f.CriticalTemperature
	n := f.B + x*(f.C+x*(f.D+x*f.E))
	dn := f.C + x*(2*f.D+3*x*f.E)
	lnθ := math.Log(θ)
	sigma = f.A * math.Exp(n*lnθ)
	if !(sigma > 0 && sigma < math.MaxFloat64) {
		return 0, 0, &NonPositiveError{Form: dippr106Form, T: T, Sigma: sigma, PositiveBelow: f.CriticalTemperature}
	}
	return sigma, sigma * (dn*lnθ - n/θ) / f.CriticalTemperature, nil
}

// PositiveBelow is the critical temperature: the form has one sign.
func (f *DIPPR106) PositiveBelow() float64 { return f.CriticalTemperature }

// Tc is the critical temperature of the fit in K.
func (f *DIPPR106) Tc() float64 { return f.CriticalTemperature }
