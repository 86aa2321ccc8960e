package campaign_test

import (
	"bytes"
	"errors"
	"fmt"
	"math"
	"strings"
	"testing"

	"limsup/data/fluid"
	"limsup/fit/design/campaign"
)

const goodGrid = `# what the laboratory can do
fluid = ["n-pentane", "n-hexane"]
pressure = ["101.325 kPa", "1 MPa"]

[[setup]]
method = "droplet"
diameter = ["0.5 mm", "1 mm"]
heating_rate = ["2 K/s"]
u_temperature = "0.3 K"
u_pressure = "2 kPa"
most = 10

[[setup]]
method = "capillary"
volume = ["10 uL"]
holding_time = ["1 min"]
u_temperature = "0.2 Cel"
fluid = ["n-pentane"]
pressure = ["-2 MPa"]
`

func TestReadGrid(t *testing.T) {
	g, err := campaign.ReadGrid(strings.NewReader(goodGrid), "can.toml")
	if err != nil {
		t.Fatal(err)
	}
	lib, err := fluid.Builtin()
	if err != nil {
		t.Fatal(err)
	}
	c, err := g.Expand(lib)
	if err != nil {
		t.Fatal(err)
	}
	if len(c) != 2*2*2+1 {
		t.Fatalf("%d candidates", len(c))
	}
	d, k := c[0], c[8]
	if d.Record.Key != "n-pentane" || d.Pressure != 101325 || math.Abs(d.Volume-math.Pi/6*1.25e-10) > 1e-24 || d.HeatingRate != 2 || d.UTemperature != 0.3 || d.UPressure != 2000 || d.Most != 10 {
		t.Errorf("droplet %+v", d)
	}
	if k.Pressure != -2e6 || k.HoldingTime != 60 || math.Abs(k.Volume-1e-8) > 1e-22 || k.UTemperature != 0.2 || k.Most != 0 {
		t.Errorf("capillary %+v", k)
	}
}

// Each bad file is refused with its place.
func TestReadGridErrors(t *testing.T) {
	for _, tt := range []struct{ name, old, new, want string }{
		{"unknown key", "heating_rate =", "heating_rte =", `can.toml:8:1: unknown key "setup.heating_rte"; did you mean heating_rate`},
		{"unknown key at the top", "fluid = [\"n-pentane\", \"n-hexane\"]", "colour = 1\nfluid = [\"n-pentane\"]", `can.toml:2:1: unknown key "colour"; the keys here are fluid, pressure, setup`},
		{"unit of another kind", `"1 mm"`, `"1 K"`, "can.toml:7:23: unit \"K\""},
		{"no unit", `"2 K/s"`, `"2"`, "can.toml:8:17: quantity"},
		{"number instead of a quantity", `["2 K/s"]`, `[2]`, "can.toml:8:17: "},
		{"negative diameter", `"0.5 mm"`, `"-0.5 mm"`, "can.toml:7:13: -0.5 mm is not above 0"},
		{"pressure of zero", `"-2 MPa"`, `"0 MPa"`, "can.toml:19:13: a pressure of 0"},
		{"uncertainty of zero", `"0.3 K"`, `"0 K"`, "can.toml:9:17: 0 K is not above 0"},
		{"size missing", "diameter = [\"0.5 mm\", \"1 mm\"]\n", "", "can.toml:5:1: setup: want a droplet size"},
		{"diameter and volume", "most = 10", "volume = [\"1 uL\"]", "can.toml:5:1: setup: want diameter or volume, not both"},
		{"heated and held", "most = 10", "holding_time = [\"1 s\"]", "can.toml:5:1: setup: want heating rates or holding times"},
		{"a negative number of times", "most = 10", "most = -1", "can.toml:5:1: setup: want a number of times"},
		{"no fluid", "fluid = [\"n-pentane\", \"n-hexane\"]\n", "", "can.toml:4:1: setup: want a fluid"},
		{"no pressure", "pressure = [\"101.325 kPa\", \"1 MPa\"]\n", "", "can.toml:4:1: setup: want a pressure"},
		{"not TOML", "[[setup]]\nmethod = \"droplet\"", "[[setup\nmethod = \"droplet\"", "can.toml:5:8: "},
		{"no setup", goodGrid, "fluid = [\"n-pentane\"]\n", "can.toml: no [[setup]]"},
	} {
		t.Run(tt.name, func(t *testing.T) {
			text := strings.Replace(goodGrid, tt.old, tt.new, 1)
			if text == goodGrid {
				t.Fatal("nothing replaced")
			}
			_, err := campaign.ReadGrid(strings.NewReader(text), "can.toml")
			var es campaign.FileErrors
			if !errors.As(err, &es) || !strings.HasPrefix(err.Error(), tt.want) {
				t.Errorf("error %v\nwant %s...", err, tt.want)
			}
		})
	}
}

func TestExpandErrors(t *testing.T) {
	lib, err := fluid.Builtin()
	if err != nil {
		t.Fatal(err)
	}
	s := campaign.Setup{UTemperature: 0.3}
	for _, tt := range []struct {
		name string
		g    campaign.Grid
	}{
		{"nothing", campaign.Grid{}},
		{"no fluid", campaign.Grid{Pressures: []float64{1e5}, Setups: []campaign.Setup{s}}},
		{"a pressure of 0", campaign.Grid{Fluids: []string{"water"}, Pressures: []float64{0}, Setups: []campaign.Setup{s}}},
		{"a negative uncertainty", campaign.Grid{Fluids: []string{"water"}, Pressures: []float64{1e5}, Setups: []campaign.Setup{{UTemperature: -1}}}},
		{"an infinite volume", campaign.Grid{Fluids: []string{"water"}, Pressures: []float64{1e5}, Setups: []campaign.Setup{{Volumes: []float64{math.Inf(1)}}}}},
	} {
		var e *campaign.InputError
		if _, err := tt.g.Expand(lib); !errors.As(err, &e) {
			t.Errorf("%s: %v", tt.name, err)
		}
	}
	g := campaign.Grid{Fluids: []string{"n-pentan"}, Pressures: []float64{1e5}, Setups: []campaign.Setup{s}}
	if _, err := g.Expand(lib); !errors.As(err, new(*fluid.UnknownError)) {
		t.Errorf("unknown fluid: %v", err)
	}
	g.Fluids = []string{"n-pentane", "pentane"}
	if c, err := g.Expand(lib); err != nil || len(c) != 1 {
		t.Errorf("the same candidate twice: %d, %v", len(c), err)
	}
}

func FuzzReadGrid(f *testing.F) {
	f.Add([]byte(goodGrid))
	f.Add([]byte("[[setup]]\nmost = 1\n"))
	f.Add([]byte("setup = [{diameter = [\"1 mm\"]}]"))
	f.Fuzz(func(t *testing.T, data []byte) {
		g, err := campaign.ReadGrid(bytes.NewReader(data), "f")
		if err != nil {
			if err.Error() == "" {
				t.Error("an error without a text")
			}
			return
		}
		for _, s := range g.Setups {
			for _, v := range append(append(append([]float64{}, s.Volumes...), s.HeatingRates...), s.HoldingTimes...) {
				if !(v > 0) || math.IsInf(v, 0) {
					t.Errorf("accepted %g", v)
				}
			}
			if !(s.UTemperature >= 0) || !(s.UPressure >= 0) || s.Most < 0 {
				t.Errorf("accepted %+v", s)
			}
		}
	})
}

func ExampleReadGrid() {
	g, err := campaign.ReadGrid(strings.NewReader(`
fluid = ["n-pentane"]
pressure = ["1 atm", "1 MPa"]
[[setup]]
method = "droplet"
diameter = ["1 mm"]
heating_rate = ["2 K/s"]
u_temperature = "0.3 K"
`), "can-do.toml")
	if err != nil {
		fmt.Println(err)
		return
	}
	lib, err := fluid.Builtin()
	if err != nil {
		fmt.Println(err)
		return
	}
	candidates, err := g.Expand(lib)
	if err != nil {
		fmt.Println(err)
		return
	}
	for _, c := range candidates {
		fmt.Printf("%s, %s\n", c.Subject(), c.Conditions())
	}
	// Output:
	// n-pentane at 101.325 kPa by droplet, 1 mm, 2 K/s
	// n-pentane at 1000 kPa by droplet, 1 mm, 2 K/s
}
