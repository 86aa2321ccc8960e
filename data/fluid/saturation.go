package fluid

import (
	"errors"
	"fmt"
	"math"

	"limsup/data/quantity"
)

// SaturationPressure is a correlation of the vapour pressure of the liquid.
type SaturationPressure struct {
	// Form is "table" (ln P interpolated against 1/T) or the equation of W. Wagner with
	// the exponents 1, 1.5, 2.5, 5 ("wagner-2.5-5") or 1, 1.5, 3, 6 ("wagner-3-6"):
	// ln(P/Pc) = (Tc/T)·(a·τ + b·τ^1.5 + c·τ^2.5 + d·τ^5), τ = 1 − T/Tc.
	Form         string
	Points       [][2]float64 // table: T in K, P in Unit
	Tc, Pc       float64      // wagner: K and Unit
	Coefficients []float64    // wagner: a, b, c, d
	Unit         string       // UCUM code of pressure
	Lo, Hi       float64      // range, K; that of the table if Form is "table"
	Source, Note string
	fluid        string
	c            curve
}

// At returns P in Pa and dlnP/dT in 1/K at T in K. It allocates nothing unless it
// fails and may be called concurrently.
//
// Errors: *RangeError outside the range; never extrapolated.
func (s *SaturationPressure) At(T float64) (p, dlnpdT float64, err error) {
	if !(T >= s.Lo && T <= s.Hi) || s.c == nil {
		return 0, 0, &RangeError{s.fluid, "vapour pressure", T, s.Lo, s.Hi}
	}
	p, dlnpdT = s.c.at(T)
	return p, dlnpdT, nil
}

// Range is the interval of temperature in K in which At answers.
func (s *SaturationPressure) Range() (lo, hi float64) { return s.Lo, s.Hi }

func (s *SaturationPressure) build(fluid string) error {
	s.fluid = fluid
	u, err := unitOf(s.Unit, quantity.Pressure)
	if err != nil {
		return err
	}
	factor := u.ToSI
	if s.Form == "table" {
		T, v := columns(s.Points, factor)
		t, err := newTable(T, v, reciprocal{}, true, +1)
		if err != nil {
			return err
		}
		s.c, s.Lo, s.Hi = t, T[0], T[len(T)-1]
		return nil
	}
	e, _ := wagnerExponents(s.Form)
	w := &wagner{tc: s.Tc, pc: factor(s.Pc), e: e}
	copy(w.c[:], s.Coefficients)
	if !(s.Hi < s.Tc) {
		return fmt.Errorf("range ends at %.10g K, want it below Tc = %.10g K", s.Hi, s.Tc)
	}
	s.c = w
	return monotone(w, s.Lo, s.Hi, +1)
}

// Density is a correlation of the density of the saturated liquid or vapour.
type Density struct {
	// Form is "table" (ρ interpolated against (1 − T/Tc)^⅓ with the Tc of the record) or,
	// for liquid, "rackett": ρ = A/B^(1+(1−T/C)^D), equation 105 of the DIPPR collection.
	Form         string
	Points       [][2]float64 // table: T in K, ρ in Unit
	Coefficients []float64    // rackett: A in Unit, B, C in K, D
	Unit         string       // UCUM code of density, per mass or per mole
	Lo, Hi       float64      // range, K; that of the table if Form is "table"
	Source, Note string
	fluid        string
	property     string
	c            curve
}

// amountDensity is mol/m³.
const amountDensity = quantity.Amount - quantity.Volume

// At returns ρ in kg/m³ and dlnρ/dT in 1/K at T in K. It allocates nothing unless it
// fails and may be called concurrently.
//
// Errors: *RangeError outside the range; never extrapolated.
func (d *Density) At(T float64) (rho, dlnrhodT float64, err error) {
	if !(T >= d.Lo && T <= d.Hi) || d.c == nil {
		return 0, 0, &RangeError{d.fluid, d.property, T, d.Lo, d.Hi}
	}
	rho, dlnrhodT = d.c.at(T)
	return rho, dlnrhodT, nil
}

// Range is the interval of temperature in K in which At answers.
func (d *Density) Range() (lo, hi float64) { return d.Lo, d.Hi }

// build prepares the correlation. property is "liquid density" or "vapour density";
// tc and molarMass are those of the record, in K and kg/mol.
func (d *Density) build(fluid, property string, tc, molarMass float64) error {
	d.fluid, d.property = fluid, property
	factor, err := density(d.Unit, molarMass)
	if err != nil {
		return err
	}
	if d.Form == "table" {
		T, v := columns(d.Points, factor)
		for i := range T {
			if !(T[i] < tc) {
				return &pointError{i, fmt.Sprintf("temperature %.10g K is not below the critical temperature, %.10g K", T[i], tc)}
			}
		}
		sign := -1.0
		if property == "vapour density" {
			sign = 1
		}
		t, err := newTable(T, v, cubeRoot{tc}, false, sign)
		if err != nil {
			return err
		}
		d.c, d.Lo, d.Hi = t, T[0], T[len(T)-1]
		return nil
	}
	k := d.Coefficients
	if !(k[1] > 0 && k[1] < 1) {
		return errors.New("the constant B is not between 0 and 1")
	}
	if !(d.Hi <= k[2]) {
		return fmt.Errorf("range ends at %.10g K, want it at or below C = %.10g K", d.Hi, k[2])
	}
	r := &rackett{a: k[0], lnb: math.Log(k[1]), c: k[2], d: k[3], factor: factor(1)}
	if d.Hi == r.c {
		return errors.New("range ends at C, where the slope is infinite; end it below")
	}
	d.c = r
	return monotone(r, d.Lo, d.Hi, -1)
}

// density converts a unit of density, per mass or per mole, to kg/m³.
func density(unit string, molarMass float64) (func(float64) float64, error) {
	u, err := unitOf(unit, quantity.Density, amountDensity)
	if err != nil {
		return nil, err
	}
	if u.Dimension() == amountDensity {
		return func(v float64) float64 { return u.ToSI(v) * molarMass }, nil
	}
	return u.ToSI, nil
}

// columns splits rows into temperatures and converted values.
func columns(points [][2]float64, factor func(float64) float64) (T, v []float64) {
	T, v = make([]float64, len(points)), make([]float64, len(points))
	for i, p := range points {
		T[i], v[i] = p[0], factor(p[1])
	}
	return T, v
}
