package fit

import (
	"fmt"
	"math"

	"limsup/data/fluid"
	"limsup/eos"
)

const (
	// nearCritical is the share of the critical pressure above which a prediction is
	// marked. Fluctuations spoil a cubic equation and the flat interface of an embryo
	// within a few percent of the critical temperature; the limit is within 2 % of it from
	// about 0.9 of the critical pressure on (common practice).
	nearCritical = 0.9
	// quantum is the value of de Boer's parameter above which a fluid is marked: argon
	// 0.19, methane 0.24, neon 0.59, hydrogen 1.9 (see DeBoer).
	quantum = 0.4
	planck  = 6.62607015e-34 // J s, exact
)

// DeBoer is the parameter of J. de Boer, Physica 14 (1948) 139, Λ = h/(σ√(mε)), which
// compares the wavelength of a molecule with the size of its field of force. Diameter σ and
// depth ε are those of a Lennard-Jones fluid with the critical point of the record,
// kTc = 1.31 ε and Pc = 0.13 ε/σ³ (paper and numbers from memory).
func DeBoer(r *fluid.Record) float64 {
	ε := eos.Boltzmann * r.CriticalTemperature.Value / 1.31
	σ := math.Cbrt(0.13 * ε / r.CriticalPressure.Value)
	m := r.MolarMass.Value / eos.Avogadro
	return planck / (σ * math.Sqrt(m*ε))
}

// doubt adds what makes a prediction doubtful whatever its parameters.
func (p *Prediction) doubt(r *fluid.Record) {
	if part := p.Pressure / r.CriticalPressure.Value; part > nearCritical {
		p.Warnings = append(p.Warnings, fmt.Sprintf("%.2f of the critical pressure of %s: so close to the critical point neither a cubic equation nor the theory of nucleation holds", part, r.Key))
	}
	if Λ := DeBoer(r); Λ > quantum {
		p.Warnings = append(p.Warnings, fmt.Sprintf("%s is a quantum fluid (de Boer's parameter %.2f, argon has 0.19): the zero-point motion of its molecules is not in the model", r.Key, Λ))
	}
}
