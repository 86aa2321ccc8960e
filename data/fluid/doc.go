// Package fluid holds what limsup knows about a pure fluid: its critical point,
// acentric factor, surface tension and saturation properties, each value with its
// unit and its source.
//
//	T     temperature, K;  Tc critical, Tb boiling at 101 325 Pa
//	P     pressure, Pa;  Pc critical, Psat of saturation
//	ω     acentric factor, −1 − lg(Psat(0.7·Tc)/Pc)
//	M     molar mass, kg/mol
//	σ     surface tension, N/m
//	ρ     density of the saturated liquid or vapour, kg/m³
//	τ     1 − T/Tc
//
// Builtin is the library that comes with the program; Parse reads records of the
// same form from a user's TOML file and Library.With adds them. A Record can also be
// written and read as JSON, as part of a calibrated model.
//
// A correlation is never evaluated outside its range and nothing is estimated where
// a record has no value: both are errors. The package contains no equation of state.
package fluid
