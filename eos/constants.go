package eos

// Constants of the SI (BIPM, The International System of Units, 9th edition
// 2019, section 2.2: k and N_A are exact by definition, R is their product).
const (
	// Boltzmann is the Boltzmann constant k in J/K, exact.
	Boltzmann = 1.380649e-23
	// Avogadro is the Avogadro constant N_A in 1/mol, exact.
	Avogadro = 6.02214076e23
	// GasConstant is the molar gas constant R = k·N_A in J/(mol·K), exact.
	GasConstant = 8.31446261815324
)
