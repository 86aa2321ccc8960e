package eos

import (
	"fmt"
	"math"
	"slices"
)

// AlphaForm names how the attraction depends on temperature.
type AlphaForm string

// The two families of α(Tr) that the published equations use.
const (
	// AlphaPower is α = Tr^(−n).
	AlphaPower AlphaForm = "power"
	// AlphaSoave is α = (1 + m(1−√Tr))², G. Soave, Chem. Eng. Sci. 27 (1972) 1197,
	// with m a polynomial of the acentric factor.
	AlphaSoave AlphaForm = "soave"
)

// Equation is one entry of the table of equations: all that distinguishes one
// cubic equation of state from another.
type Equation struct {
	Name   string
	D1, D2 float64 // δ₁, δ₂
	Alpha  AlphaForm
	// Exponent is n of AlphaPower.
	Exponent float64
	// Slope holds m₀, m₁, m₂ of AlphaSoave: m = m₀ + m₁ω + m₂ω².
	Slope [3]float64
}

// Equations returns the built-in equations. Adding one is adding an entry here.
//
// Sources: J. D. van der Waals (1873); D. Berthelot (1899); O. Redlich and
// J. N. S. Kwong, Chem. Rev. 44 (1949) 233; G. Soave, Chem. Eng. Sci. 27 (1972)
// 1197; D.-Y. Peng and D. B. Robinson, Ind. Eng. Chem. Fundam. 15 (1976) 59.
// (Citations from memory; the constants are those of the project's design.)
func Equations() []Equation {
	return []Equation{
		{Name: "van-der-waals", Alpha: AlphaPower},
		{Name: "berthelot", Alpha: AlphaPower, Exponent: 1},
		{Name: "redlich-kwong", D1: 1, Alpha: AlphaPower, Exponent: 0.5},
		{Name: "soave", D1: 1, Alpha: AlphaSoave, Slope: [3]float64{0.480, 1.574, -0.176}},
		{Name: "peng-robinson", D1: 1 + math.Sqrt2, D2: 1 - math.Sqrt2, Alpha: AlphaSoave, Slope: [3]float64{0.37464, 1.54226, -0.26992}},
	}
}

// EquationNames returns the names of the built-in equations in their order.
func EquationNames() []string {
	var names []string
	for _, e := range Equations() {
		names = append(names, e.Name)
	}
	return names
}

// EquationByName returns a built-in equation.
func EquationByName(name string) (Equation, error) {
	all := Equations()
	if i := slices.IndexFunc(all, func(e Equation) bool { return e.Name == name }); i >= 0 {
		return all[i], nil
	}
	return Equation{}, &UnknownEquationError{Name: name, Known: EquationNames()}
}

// UnknownEquationError reports an equation that is not in the table.
type UnknownEquationError struct {
	Name  string
	Known []string
}

func (e *UnknownEquationError) Error() string {
	return fmt.Sprintf("equation %q is not known, want one of %v", e.Name, e.Known)
}

// Substance holds the constants of a pure fluid that an equation needs.
type Substance struct {
	Name      string
	CriticalT float64 // critical temperature in K
	CriticalP float64 // critical pressure in Pa
	Acentric  float64 // acentric factor ω
	MolarMass float64 // kg/mol, used for nucleation only
}

// Tuning holds the factors by which an equation departs from its published form.
type Tuning struct {
	Attraction float64 // factor on a
	Covolume   float64 // factor on b
	// Slope is a factor on the exponent n or on the slope m of α; for an equation
	// with n = 0 (van der Waals) it is the exponent itself.
	Slope float64
}

// Untuned returns the tuning that leaves the equation as published.
func (e *Equation) Untuned() Tuning {
	t := Tuning{Attraction: 1, Covolume: 1, Slope: 1}
	if e.slopeIsExponent() {
		t.Slope = 0
	}
	return t
}

func (e *Equation) slopeIsExponent() bool { return e.Alpha == AlphaPower && e.Exponent == 0 }
