package tension

import (
	"fmt"
	"math"

	"limsup/eos"
)

// Parachor is the surface tension of D. B. Macleod (1923) and S. Sugden (1924),
//
//	σ = [𝒫·(ρ_l − ρ_v)]⁴,
//
// with the saturated molar densities of an equation of state and the parachor 𝒫
// fixed so that σ equals a known value at one reference temperature:
//
//	σ(T) = σ_ref·[Δρ(T)/Δρ(T_ref)]⁴.
//
// The covolume of the equation cancels. Near the critical point a cubic equation
// has Δρ ~ (Tc−T)^½, so σ ~ (Tc−T)² instead of the (Tc−T)^1.26 of nature; that is
// the model, not an error of the computation.
type Parachor struct {
	model    eos.Model
	tref     float64
	sigma    float64 // σ_ref
	lnref    float64 // ln Δρ(T_ref)
	slopeRef float64 // dlnΔρ/dlnτ at T_ref
}

// NewParachor fixes the parachor at tref in K, where the tension is sigma in N/m.
//
// Errors: *eos.DomainError when tref is not below the model's critical point;
// *ParameterError when sigma is not positive and finite.
func NewParachor(m eos.Model, tref, sigma float64) (*Parachor, error) {
	if !(sigma > 0 && sigma < math.MaxFloat64) {
		return nil, fmt.Errorf("parachor of %s: %w", m.Fluid, &ParameterError{"parachor", "tension at the reference temperature in N/m", sigma, "> 0 and finite"})
	}
	p := &Parachor{model: m, tref: tref, sigma: sigma}
	var err error
	if p.lnref, p.slopeRef, err = m.DensityDifference(tref); err != nil {
		return nil, fmt.Errorf("parachor of %s: %w", m.Fluid, err)
	}
	return p, nil
}

// Value is the parachor 𝒫 in (N/m)^¼·m³/mol.
func (p *Parachor) Value() float64 {
	return math.Sqrt(math.Sqrt(p.sigma)) * p.model.B / math.Exp(p.lnref)
}

// Tc is the critical temperature that the equation implies.
func (p *Parachor) Tc() float64 { return p.model.Tc }

// Sigma is described at Func.
func (p *Parachor) Sigma(T float64) (sigma, slope float64, err error) {
	ln, dlntau, err := p.model.DensityDifference(T)
	if err != nil {
		return 0, 0, err
	}
	_, dlntaudT := p.model.Tau(T)
	r := math.Exp(ln - p.lnref)
	sigma = p.sigma * r * r * r * r
	return sigma, 4 * sigma * dlntau * dlntaudT, nil
}

// TuningGradient is ∂lnσ/∂(attraction, covolume, slope) at T: the change at T less
// that at the reference temperature, where σ is held.
func (p *Parachor) TuningGradient(T float64) (g [3]float64, err error) {
	_, s, err := p.model.DensityDifference(T)
	if err != nil {
		return g, err
	}
	a, c, l := p.model.TauGradient(T)
	ar, cr, lr := p.model.TauGradient(p.tref)
	return [3]float64{4 * (s*a - p.slopeRef*ar), 4 * (s*c - p.slopeRef*cr), 4 * (s*l - p.slopeRef*lr)}, nil
}
