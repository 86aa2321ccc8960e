package nucleation

import (
	"errors"
	"math"
	"testing"

	"limsup/eos"
)

// waterDroplets are the radius of a droplet of water in equilibrium with vapour of
// the saturation ratio S at 0 °C, and the number of its molecules. Source: the book of
// R. R. Rogers and M. K. Yau on cloud physics, 3rd ed. 1989, table of
// droplets of pure water (from memory).
var waterDroplets = []struct{ S, radius, molecules float64 }{
	{1.01, 1.208e-7, 2.468e8},
	{1.10, 1.261e-8, 2.807e5},
	{1.5, 2.964e-9, 3.645e3},
	{2, 1.734e-9, 730},
	{3, 1.094e-9, 183},
	{4, 8.671e-10, 91},
	{5, 7.468e-10, 58},
	{10, 5.221e-10, 20},
}

// TestWaterDroplets checks the Kelvin equation against that table. The equation of
// state enters through the liquid volume only, Pl − P = (RT/v)ln S, so it is
// scaled to the volume of water at 0 °C, 18.02 cm³/mol (999.84 kg/m³; from memory): equal factors
// on a and b leave τ and so Tc as they are and multiply every volume.
//
// The table rests on Kelvin's form: 0.2 % covers the tension (75.6 mN/m here; the
// table's is not known) and its rounding (measured: 0.07 %). The exact droplet is
// smaller by the compression of the equation's liquid, 200 MPa at S = 10: 1.5 %
// (measured: 1.2 %). The number of molecules may be off by 3 % for the volume of a
// sphere, and by half a molecule.
func TestWaterDroplets(t *testing.T) {
	water := named(t, "water")
	equation, err := eos.EquationByName("soave")
	if err != nil {
		t.Fatal(err)
	}
	const T = 273.15
	plain, err := eos.Untuned("soave", water.Substance)
	if err != nil {
		t.Fatal(err)
	}
	s, err := plain.Saturation(T)
	if err != nil {
		t.Fatal(err)
	}
	k := 18.02e-6 / s.Vl
	m, err := eos.NewModel(equation, water.Substance, eos.Tuning{Attraction: k, Covolume: k, Slope: 1})
	if err != nil {
		t.Fatal(err)
	}
	f, err := New(Config{Model: m, MolarMass: water.MolarMass, Tension: water.tension})
	if err != nil {
		t.Fatal(err)
	}
	if s, err = m.Saturation(T); err != nil {
		t.Fatal(err)
	}
	within(t, "liquid volume", s.Vl, 18.02e-6, 1e-12)
	for _, c := range waterDroplets {
		e, err := f.Embryo(T, c.S*s.P)
		if err != nil {
			t.Fatal(err)
		}
		t.Logf("S %g: radius %+.2f %%, molecules %+.2f %%", c.S, 100*(e.Radius/c.radius-1), 100*(e.Molecules/c.molecules-1))
		kelvin := 2 * e.Tension / (e.Approximate - e.P)
		t.Logf("S %g: radius by Kelvin %+.2f %%", c.S, 100*(kelvin/c.radius-1))
		within(t, "radius by Kelvin", kelvin, c.radius, 2e-3*c.radius)
		within(t, "radius", e.Radius, c.radius, 1.5e-2*c.radius)
		within(t, "molecules", e.Molecules, c.molecules, 0.03*c.molecules+0.5)
		if e.Kind != Droplet {
			t.Errorf("%s, want droplet", e.Kind)
		}
	}
}

// TestKelvin: the exact pressure in a droplet and Kelvin's tend to the same value
// at small supersaturation of a cold vapour; the formula is checked by hand.
func TestKelvin(t *testing.T) {
	f := untuned(t, "soave", named(t, "n-pentane"), Config{})
	m := f.Config().Model
	const T = 0.35 * 469.7
	s, err := m.Saturation(T)
	if err != nil {
		t.Fatal(err)
	}
	last := math.Inf(1)
	for _, S := range []float64{8, 4, 2, 1.5, 1.1, 1.02} {
		e, err := f.Embryo(T, S*s.P)
		if err != nil {
			t.Fatal(err)
		}
		if want := S*s.P + eos.GasConstant*T/s.Vl*math.Log(S); deviation(e.Approximate, want) > 1e-13 {
			t.Errorf("S %g: Kelvin pressure %.17g, by hand %.17g", S, e.Approximate, want)
		}
		d := deviation(e.Approximate, e.Pressure)
		t.Logf("S %g: Kelvin/exact − 1 = %.3g", S, e.Approximate/e.Pressure-1)
		if !(d < last) {
			t.Errorf("S %g: the two differ by %g, not less than %g", S, d, last)
		}
		last = d
		// flux by hand: J = N·(P/kT)·v·√(2σ/πm)·e^−W, the molecule's mass and volume
		kT := eos.Boltzmann * T
		v, err := m.Vapour(T, e.P)
		if err != nil {
			t.Fatal(err)
		}
		mass := 72.14878e-3 / eos.Avogadro
		inside := 4. / 3 * math.Pi * math.Pow(e.Radius, 3) / e.Molecules
		want := math.Log(eos.Avogadro/v*e.P/kT*inside*math.Sqrt(2*e.Tension/(math.Pi*mass))) - e.BarrierOverKT
		if math.Abs(e.LnJ-want) > 1e-12*e.BarrierOverKT+1e-12 {
			t.Errorf("S %g: ln J = %g, by hand %g", S, e.LnJ, want)
		}
	}
	if last > 1e-4 {
		t.Errorf("at S = 1.02 the two still differ by %g", last)
	}
}

// TestNoDroplet: states of a vapour that have no droplet give typed errors.
func TestNoDroplet(t *testing.T) {
	pentane := named(t, "n-pentane")
	f := untuned(t, "soave", pentane, Config{})
	m := f.Config().Model
	s, err := m.Saturation(400)
	if err != nil {
		t.Fatal(err)
	}
	_, spinodal, err := m.Spinodal(400)
	if err != nil {
		t.Fatal(err)
	}
	var phase *eos.PhaseError
	if e, err := f.Embryo(400, 1.01*spinodal.P); !errors.As(err, &phase) || phase.Phase != "vapour" {
		t.Errorf("beyond the vapour spinodal: %v, %v", e, err)
	}
	// On the line itself, and a rounding error above, there is no embryo of finite size.
	for _, P := range []float64{s.P, math.Nextafter(s.P, 1e9), s.P * (1 + 1e-15)} {
		e, err := f.Embryo(400, P)
		var no *NotMetastableError
		var state *StateError
		if err == nil {
			if name := unusable(e); name != "" {
				t.Errorf("at saturation: %s", name)
			}
		} else if !errors.As(err, &no) && !errors.As(err, &state) {
			t.Errorf("at saturation: %v", err)
		}
	}
	// A Tolman length larger than any droplet there.
	g := untuned(t, "soave", pentane, Config{TolmanLength: 5e-9})
	var state *StateError
	if e, err := g.Embryo(400, s.P+0.9*(spinodal.P-s.P)); !errors.As(err, &state) {
		t.Errorf("2δ > r: %v, %v", e, err)
	}
	// With correlations there is no droplet at all.
	h := untuned(t, "soave", pentane, Config{Correlations: textbook{pentane.Substance}})
	var no *NotMetastableError
	if e, err := h.Embryo(400, 2*s.P); !errors.As(err, &no) || no.Phase != "liquid" {
		t.Errorf("a compressed liquid by correlation: %v, %v", e, err)
	}
}
