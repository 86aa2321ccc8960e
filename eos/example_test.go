package eos_test

import (
	"errors"
	"fmt"
	"log"

	"limsup/eos"
)

// pentane is n-pentane (rounded constants).
var pentane = eos.Substance{Name: "n-pentane", CriticalT: 469.7, CriticalP: 3.3675e6, Acentric: 0.251, MolarMass: 0.07215}

func ExampleModel() {
	equation, err := eos.EquationByName("soave")
	if err != nil {
		log.Fatal(err)
	}
	tuning := equation.Untuned()
	tuning.Covolume = 1.02
	for _, u := range []eos.Tuning{equation.Untuned(), tuning} {
		model, err := eos.NewModel(equation, pentane, u)
		if err != nil {
			log.Fatal(err)
		}
		v, err := model.Liquid(298.15, 101325)
		if err != nil {
			log.Fatal(err)
		}
		fmt.Printf("covolume x %.2f: liquid %.1f cm3/mol, critical point %.2f K and %.4f MPa\n", u.Covolume, 1e6*v, model.Tc, model.Pc/1e6)
	}
	// Output:
	// covolume x 1.00: liquid 127.3 cm3/mol, critical point 469.70 K and 3.3675 MPa
	// covolume x 1.02: liquid 130.7 cm3/mol, critical point 464.73 K and 3.2665 MPa
}

func ExampleModel_Saturation() {
	model, err := eos.Untuned("peng-robinson", pentane)
	if err != nil {
		log.Fatal(err)
	}
	s, err := model.Saturation(400)
	if err != nil {
		log.Fatal(err)
	}
	fmt.Printf("%.4f MPa, liquid %.1f and vapour %.0f cm3/mol, dP/dT %.2f kPa/K\n", s.P/1e6, 1e6*s.Vl, 1e6*s.Vv, s.DPDT/1e3)

	_, err = model.Saturation(500)
	var domain *eos.DomainError
	fmt.Println(errors.As(err, &domain))
	fmt.Println(err)
	// Output:
	// 1.0411 MPa, liquid 146.0 and vapour 2477 cm3/mol, dP/dT 20.42 kPa/K
	// true
	// saturation pressure of n-pentane (peng-robinson): temperature 500 K is outside 70.455 to 469.7 K
}

func ExampleModel_Spinodal() {
	model, err := eos.Untuned("soave", pentane)
	if err != nil {
		log.Fatal(err)
	}
	for _, T := range []float64{400, 440} {
		liquid, vapour, err := model.Spinodal(T)
		if err != nil {
			log.Fatal(err)
		}
		fmt.Printf("%g K: the liquid is unstable below %.3f MPa, the vapour above %.3f MPa\n", T, liquid.P/1e6, vapour.P/1e6)
	}
	// Output:
	// 400 K: the liquid is unstable below -3.437 MPa, the vapour above 1.713 MPa
	// 440 K: the liquid is unstable below 1.113 MPa, the vapour above 2.465 MPa
}

func ExampleModel_LiquidSpinodalTemperature() {
	model, err := eos.Untuned("soave", pentane)
	if err != nil {
		log.Fatal(err)
	}
	for _, P := range []float64{-5e6, 0, 101325, 1e6} { // the first under tension
		limit, err := model.LiquidSpinodalTemperature(P)
		if err != nil {
			log.Fatal(err)
		}
		fmt.Printf("%9.0f Pa: %.2f K, %.4f Tc\n", P, limit.T, limit.T/model.Tc)
	}
	// Output:
	// -5000000 Pa: 388.77 K, 0.8277 Tc
	//         0 Pa: 428.80 K, 0.9129 Tc
	//    101325 Pa: 429.77 K, 0.9150 Tc
	//   1000000 Pa: 438.80 K, 0.9342 Tc
}

func ExampleModel_Isotherm() {
	model, err := eos.Untuned("soave", pentane)
	if err != nil {
		log.Fatal(err)
	}
	iso, err := model.Isotherm(400)
	if err != nil {
		log.Fatal(err)
	}
	for _, v := range []float64{0.15e-3, 0.18e-3, 0.5e-3, 1.5e-3, 5e-3} {
		p, err := iso.At(v)
		if err != nil {
			log.Fatal(err)
		}
		fmt.Printf("%4.0f cm3/mol %7.3f MPa %7.1f J/mol  %s\n", 1e6*p.V, p.P/1e6, p.Mu, p.State)
	}
	// Output:
	// 150 cm3/mol   8.526 MPa  1170.4 J/mol  subcooled liquid
	//  180 cm3/mol  -1.811 MPa  -492.6 J/mol  superheated liquid (metastable)
	//  500 cm3/mol   0.987 MPa   668.0 J/mol  unstable
	// 1500 cm3/mol   1.459 MPa   786.3 J/mol  supersaturated vapour (metastable)
	// 5000 cm3/mol   0.592 MPa -1621.7 J/mol  superheated vapour
}

// A cubic equation of one's own: Clausius's volume dependence with the
// attraction of Soave's form and a slope linear in the acentric factor.
func ExampleEquation() {
	mine := eos.Equation{Name: "mine", D1: 0.5, D2: 0.5, Alpha: eos.AlphaSoave, Slope: [3]float64{0.45, 1.5, 0}}
	model, err := eos.NewModel(mine, pentane, mine.Untuned())
	if err != nil {
		log.Fatal(err)
	}
	fmt.Printf("Zc %.4f, liquid unstable from %.4f Tc at zero pressure\n", model.PC*model.XC, model.ZeroPressureSpinodalTemperature()/model.Tc)

	mine.D1 = -1
	_, err = eos.NewModel(mine, pentane, mine.Untuned())
	fmt.Println(err)
	// Output:
	// Zc 0.3333, liquid unstable from 0.9096 Tc at zero pressure
	// n-pentane (mine): delta1 = -1, want between -1 and 1000
}
