package campaign_test

import (
	"math"
	"strings"
	"testing"

	"limsup/data/fluid"
	"limsup/eos"
	"limsup/fit"
	"limsup/fit/design/campaign"
)

// Water at 280 °C, released to atmospheric pressure without heat: from the steam table
// (saturated liquid u₁ = 1228 kJ/kg, s₁ = 3.068 kJ/(kg·K); at 100 °C u = 419 + 2087x, s = 1.307
// + 6.048x, v = 0.001 + 1.672x m³/kg; from memory, IAPWS-IF97 rounded) x = 0.291 and the work
// u₁ − u₂ − P₀(v₂ − v₁) = 1228 − 1026 − 49 = 153 kJ/kg. The bound lies above it, and close to
// RT·ln(P_sat/P₀)/M = 0.4615·553.15·ln(64.2/1.013) = 1059 kJ/kg, which the vapour's imperfection
// lowers (fugacity coefficient about 0.8 at saturation: −57 kJ/kg); 15 % holds both.
func TestStoredEnergyOfWater(t *testing.T) {
	lib, err := fluid.Builtin()
	if err != nil {
		t.Fatal(err)
	}
	water, err := lib.Find("water")
	if err != nil {
		t.Fatal(err)
	}
	m, err := fit.Untuned(fit.DefaultVariant())
	if err != nil {
		t.Fatal(err)
	}
	r := &campaign.Reading{Candidate: campaign.Candidate{Record: water, Pressure: campaign.Ambient, Volume: 1e-9}, Expected: 553.15}
	s, err := campaign.Store(m, r)
	if err != nil {
		t.Fatal(err)
	}
	if s.SpecificEnergy < 153e3 {
		t.Errorf("bound %.4g J/kg is below the adiabatic work 153 kJ/kg", s.SpecificEnergy)
	}
	if math.Abs(s.SpecificEnergy/1059e3-1) > 0.15 {
		t.Errorf("bound %.4g J/kg, by hand about 1059 kJ/kg", s.SpecificEnergy)
	}
	// The equation puts 1 µL of water at 280 °C at about 0.5 to 0.75 mg (steam table: 0.750 g/mL;
	// Soave's equation is known to state the density of water a third too small).
	if s.Mass < 0.45e-6 || s.Mass > 0.76e-6 {
		t.Errorf("mass %.3g kg", s.Mass)
	}
	if math.Abs(s.Energy-s.Mass*s.SpecificEnergy) > 1e-12*s.Energy {
		t.Errorf("energy %g is not mass times specific energy", s.Energy)
	}
}

// The bound grows with temperature, is the work of an isothermal expansion ∫P dv − P₀Δv of
// the equation itself, and vanishes where the liquid boils at ambient pressure.
func TestStoredEnergyIsTheExpansionWork(t *testing.T) {
	lib, err := fluid.Builtin()
	if err != nil {
		t.Fatal(err)
	}
	pentane, err := lib.Find("n-pentane")
	if err != nil {
		t.Fatal(err)
	}
	m, err := fit.Untuned(fit.DefaultVariant())
	if err != nil {
		t.Fatal(err)
	}
	model, err := eos.Untuned("soave", fit.Substance(pentane))
	if err != nil {
		t.Fatal(err)
	}
	last := 0.0
	for _, T := range []float64{320, 360, 400, 420} {
		for _, P := range []float64{campaign.Ambient, 1e6} {
			s, err := campaign.Store(m, &campaign.Reading{Candidate: campaign.Candidate{Record: pentane, Pressure: P}, Expected: T})
			if err != nil {
				t.Fatal(err)
			}
			vl, err := model.Liquid(T, P)
			if err != nil {
				t.Fatal(err)
			}
			vv, err := model.Vapour(T, campaign.Ambient)
			if err != nil {
				t.Fatal(err)
			}
			// ∫(P − P₀)dv along the equation, unstable states included, by the trapezium rule in ln v with
			// 40 000 steps: relative error below 1e-6 (halving the steps changes it by 4e-7).
			const n = 40_000
			work := 0.0
			f := func(i int) float64 {
				v := vl * math.Pow(vv/vl, float64(i)/n)
				p, err := model.Pressure(T, v)
				if err != nil {
					t.Fatal(err)
				}
				return (p - campaign.Ambient) * v
			}
			for i := range n {
				work += 0.5 * (f(i) + f(i+1)) * math.Log(vv/vl) / n
			}
			if got := s.SpecificEnergy * pentane.MolarMass.Value; math.Abs(got-work) > 1e-5*work {
				t.Errorf("T %g, P %g: %.8g J/mol, by integration %.8g", T, P, got, work)
			}
			if P == campaign.Ambient {
				if s.SpecificEnergy <= last {
					t.Errorf("the bound does not grow at %g K", T)
				}
				last = s.SpecificEnergy
			}
		}
	}
	cold, err := campaign.Store(m, &campaign.Reading{Candidate: campaign.Candidate{Record: pentane, Pressure: campaign.Ambient}, Expected: 300})
	if err != nil || cold.SpecificEnergy != 0 || cold.Expansion != 0 {
		t.Errorf("below the boiling temperature: %+v, %v", cold, err)
	}
}

func TestPrecautions(t *testing.T) {
	all := strings.Join(campaign.Precautions([]campaign.Stored{{Fluid: "n-hexane", Flammable: true, Toxic: true}, {Fluid: "r-134a", Asphyxiant: true}, {Fluid: "n-hexane", Flammable: true}}), "\n")
	for _, want := range []string{"hearing and eye protection", "second containment", "Burns or feeds fire: n-hexane.", "Harmful or toxic: n-hexane.", "Displaces air: r-134a.", "safety rules of the laboratory", "licensed practice"} {
		if !strings.Contains(all, want) {
			t.Errorf("no %q in\n%s", want, all)
		}
	}
	if plain := strings.Join(campaign.Precautions(nil), "\n"); strings.Contains(plain, "Burns") || strings.Contains(plain, "Harmful or toxic") {
		t.Error("precautions for fluids that are not there")
	}
}
