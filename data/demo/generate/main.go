// Command generate writes the demonstration measurements of limsup: superheat
// limits of an invented laboratory, drawn from a model whose parameters are the
// constants below, so that whoever calibrates on them can compare with the truth.
//
//	go run ./data/demo/generate -out data/demo/droplets.csv
//
// The scenario: the (made-up) Grebe Island Bubble Laboratory heats droplets of
// four liquids in a host liquid at 2 K/s, and thin layers of the same liquids on
// a pulse-heated wire at 100 000 K/s, at four pressures, three or four times each.
// Its wire thermometry reads 1.5 K high. A few droplets reached the top of the
// oven without boiling.
//
// A sample of volume V heated at the rate β boils where the hazard ∫J dT·V/β
// reaches a unit exponential variable E, that is, with J growing exponentially,
// where J = E·β·(dlnJ/dT)/V. The reading adds a normal error of the stated
// uncertainty and another of an unstated spread.
package main

import (
	"bytes"
	"flag"
	"fmt"
	"io"
	"log"
	"math"
	"math/rand/v2"
	"os"

	"limsup/data/fluid"
	"limsup/eos"
	"limsup/eos/nucleation"
)

// The truth behind the demonstration data. No real measurement is in it.
const (
	truePrefactor      = -2.5 // decades
	trueSurfaceTension = 1.03 // factor on the surface tension
	trueOffset         = 1.5  // K, of the pulse-heated wire against the droplets
	trueSpread         = 0.35 // K, beyond the stated uncertainty
	seed               = 20_26
)

// method is one way of the laboratory to reach a limit.
type method struct {
	name                string
	heatingRate         float64 // K/s
	uncertainty, offset float64 // K
	repeats             int
	oven                float64 // K above the median limit at which heating stops; 0: never
}

func main() {
	out := flag.String("out", "", "file to write (default: standard output)")
	flag.Parse()
	var b bytes.Buffer
	if err := generate(&b); err != nil {
		log.Fatal(err)
	}
	if *out == "" {
		if _, err := os.Stdout.Write(b.Bytes()); err != nil {
			log.Fatal(err)
		}
		return
	}
	if err := os.WriteFile(*out, b.Bytes(), 0o644); err != nil {
		log.Fatal(err)
	}
}

// generate writes the whole file.
func generate(w io.Writer) error {
	lib, err := fluid.Builtin()
	if err != nil {
		return err
	}
	rng := rand.New(rand.NewPCG(seed, 1))
	fmt.Fprint(w, `# SYNTHETIC DATA of an invented laboratory, for trying limsup. No value here was measured.
# Made by data/demo/generate; its source says which parameters are behind the numbers.
fluid,method,batch,droplet,pressure/kPa,temperature/Cel,u_temperature/K,diameter/mm,volume/nL,heating_rate/(K/s),outcome,note
`)
	methods := []method{
		{name: "droplet", heatingRate: 2, uncertainty: 0.3, repeats: 4, oven: 0.55},
		{name: "pulse-heated wire", heatingRate: 1e5, uncertainty: 0.8, offset: trueOffset, repeats: 3},
	}
	number := 0
	for _, key := range []string{"n-pentane", "n-hexane", "cyclohexane", "diethyl-ether"} {
		f, err := truth(lib, key)
		if err != nil {
			return err
		}
		for k, P := range []float64{101.325e3, 300e3, 600e3, 1000e3} {
			for _, m := range methods {
				for range m.repeats {
					number++
					if err := m.droplet(w, rng, f, key, number, k, P); err != nil {
						return err
					}
				}
			}
		}
	}
	return nil
}

// truth is a fluid with the parameters that the data hide.
func truth(lib *fluid.Library, key string) (*nucleation.Fluid, error) {
	r, err := lib.Find(key)
	if err != nil {
		return nil, err
	}
	m, err := eos.Untuned("soave", eos.Substance{Name: r.Key, CriticalT: r.CriticalTemperature.Value, CriticalP: r.CriticalPressure.Value,
		Acentric: r.AcentricFactor.Value, MolarMass: r.MolarMass.Value})
	if err != nil {
		return nil, err
	}
	σ, err := r.Tension()
	if err != nil {
		return nil, err
	}
	return nucleation.New(nucleation.Config{Model: m, MolarMass: r.MolarMass.Value, Tension: σ, TensionFactor: trueSurfaceTension, Prefactor: truePrefactor})
}

// droplet draws one observation and writes its row.
func (m *method) droplet(w io.Writer, rng *rand.Rand, f *nucleation.Fluid, key string, number, series int, P float64) error {
	// droplets of 0.4 mm to 1.1 mm; layers of 0.5 pL to 2 pL on the wire
	diameter, volume := "", ""
	var V float64
	if m.name == "droplet" {
		d := round(0.4+0.7*rng.Float64(), 3)
		V = math.Pi / 6 * d * d * d * 1e-9
		diameter = fmt.Sprint(d)
	} else {
		v := round(0.0005+0.0015*rng.Float64(), 5)
		V = v * 1e-12
		volume = fmt.Sprint(v)
	}
	draw := func(E float64) (float64, error) {
		l, err := f.KineticLimit(P, nucleation.Target{LnJ: math.Log(E * m.heatingRate / V), PerKelvin: true}, 0)
		return l.T, err
	}
	T, err := draw(rng.ExpFloat64())
	if err != nil {
		return err
	}
	median, err := draw(math.Ln2)
	if err != nil {
		return err
	}
	reading := T + m.offset + m.uncertainty*rng.NormFloat64() + trueSpread*rng.NormFloat64()
	outcome, note := "boiled", ""
	if m.oven > 0 && reading > median+m.oven {
		reading, outcome, note = median+m.oven, "intact", "oven at its limit"
	}
	_, err = fmt.Fprintf(w, "%s,%s,series %d,%d,%s,%.2f,%s,%s,%s,%s,%s,%s\n", key, m.name, series+1, number, fmt.Sprint(P/1e3), reading-273.15,
		fmt.Sprint(m.uncertainty), diameter, volume, fmt.Sprint(m.heatingRate), outcome, note)
	return err
}

func round(x float64, digits int) float64 {
	p := math.Pow(10, float64(digits))
	return math.Round(x*p) / p
}
