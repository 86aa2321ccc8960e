package nucleation_test

import (
	"errors"
	"fmt"
	"math"

	"limsup/eos"
	"limsup/eos/nucleation"
	"limsup/eos/tension"
)

// pentane is n-pentane under the Soave equation, with the tension of Mulero,
// Cachadina and Parra (2012).
func pentane() (*nucleation.Fluid, error) {
	model, err := eos.Untuned("soave", eos.Substance{
		Name: "n-pentane", CriticalT: 469.7, CriticalP: 3.3675e6, Acentric: 0.251,
	})
	if err != nil {
		return nil, err
	}
	sigma, err := tension.NewPowerSum(469.7,
		tension.Term{Coefficient: 0.08015, Exponent: 1.408},
		tension.Term{Coefficient: 0.004384, Exponent: 1.031},
		tension.Term{Coefficient: -0.03437, Exponent: 1.818})
	if err != nil {
		return nil, err
	}
	return nucleation.New(nucleation.Config{Model: model, MolarMass: 0.07215, Tension: sigma})
}

func ExampleNew() {
	f, err := pentane()
	if err != nil {
		fmt.Println(err)
		return
	}
	c := f.Config() // with the defaults filled in
	lo, hi := f.Range()
	fmt.Println(f.Name(), c.EmbryoPressure, c.Kinetics)
	fmt.Printf("%.1f K to %.1f K\n", lo, hi)

	_, err = nucleation.New(nucleation.Config{Model: c.Model, MolarMass: 0.07215, Tension: c.Tension, TolmanLength: 0.1})
	fmt.Println(err)
	// Output:
	// n-pentane exact mechanical
	// 70.5 K to 469.7 K
	// n-pentane (soave): tolman length in m = 0.1, want between -1e-6 and 1e-6
}

func ExampleFluid_Flux() {
	f, err := pentane()
	if err != nil {
		fmt.Println(err)
		return
	}
	for _, T := range []float64{410, 415, 420} {
		x, err := f.Flux(T, 101325)
		if err != nil {
			fmt.Println(err)
			return
		}
		fmt.Printf("%g K: log10 J = %.1f, barrier %.0f kT\n", T, x.Log10J(), x.Barrier)
	}
	_, err = f.Flux(300, 101325)
	var stable *nucleation.NotMetastableError
	if errors.As(err, &stable) {
		fmt.Printf("300 K: not superheated, saturation is at %.0f Pa\n", stable.Saturation)
	}
	// Output:
	// 410 K: log10 J = -37.8, barrier 176 kT
	// 415 K: log10 J = -6.6, barrier 104 kT
	// 420 K: log10 J = 12.4, barrier 61 kT
	// 300 K: not superheated, saturation is at 72457 Pa
}

func ExampleFluid_KineticLimit() {
	f, err := pentane()
	if err != nil {
		fmt.Println(err)
		return
	}
	l, err := f.KineticLimit(101325, nucleation.Threshold(12), 0)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("%.1f K; one decade of J* more: %+.2f K; surface tension +1 %%: %+.2f K\n",
		l.T, l.DThreshold, 0.01*l.Gradient[nucleation.SurfaceTension])

	// A droplet of 0.5 µL heated at 1 K/s, half of which have boiled:
	h, err := f.KineticLimit(101325, nucleation.Heated(0.5e-9, 1), l.T)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("%.1f K at J = %.1e m-3s-1\n", h.T, math.Exp(h.LnJ))

	_, err = f.KineticLimit(101325, nucleation.Threshold(50), 0)
	var no *nucleation.NoLimitError
	if errors.As(err, &no) {
		fmt.Printf("none for log10 J* = 50: log10 J reaches %.1f at the spinodal, %.1f K\n", no.Reached, no.End)
	}
	// Output:
	// 419.9 K; one decade of J* more: +0.34 K; surface tension +1 %: +0.27 K
	// 419.2 K at J = 1.0e+10 m-3s-1
	// none for log10 J* = 50: log10 J reaches 30.2 at the spinodal, 429.8 K
}

func ExampleFluid_Embryo() {
	f, err := pentane()
	if err != nil {
		fmt.Println(err)
		return
	}
	for _, P := range []float64{101325, 1.9e6} {
		e, err := f.Embryo(420, P)
		if err != nil {
			fmt.Println(err)
			return
		}
		fmt.Printf("%s of radius %.1f nm with %.0f molecules at %.2f MPa, barrier %.0f kT\n",
			e.Kind, 1e9*e.Radius, e.Molecules, 1e-6*e.Pressure, e.BarrierOverKT)
	}
	// Output:
	// bubble of radius 5.1 nm with 174 molecules at 1.38 MPa, barrier 61 kT
	// droplet of radius 2.6 nm with 269 molecules at 4.38 MPa, barrier 16 kT
}
