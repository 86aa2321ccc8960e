package campaign

import (
	"fmt"
	"math"
	"slices"
	"sort"

	"limsup/data/fluid"
	"limsup/data/measure"
	"limsup/fit"
)

// Setup is one way in which the laboratory can reach a limit. Every volume is
// combined with every heating rate and holding time.
type Setup struct {
	Method, Batch string
	Volumes       []float64 // of the sample, m³; none: not stated
	HeatingRates  []float64 // K/s
	HoldingTimes  []float64 // s
	UTemperature  float64   // standard uncertainty of a reading, K
	UPressure     float64   // Pa
	Fluids        []string  // keys or names; none: those of the grid
	Pressures     []float64 // Pa; none: those of the grid
	Most          int       // times that one candidate can be measured; 0: any
}

// Grid is all that the laboratory can do.
type Grid struct {
	Fluids    []string  // keys or names
	Pressures []float64 // Pa, absolute
	Setups    []Setup
}

// Candidate is one measurement that can be made.
type Candidate struct {
	Record                  *fluid.Record
	Method, Batch           string
	Pressure                float64 // Pa
	Volume                  float64 // m³; 0: not stated
	HeatingRate             float64 // K/s; 0: none
	HoldingTime             float64 // s; 0: none
	UTemperature, UPressure float64 // K, Pa
	Most                    int
}

// Row is the candidate as a row of measurements without its reading.
func (c *Candidate) Row() measure.Row {
	return measure.Row{File: "plan", Fluid: c.Record.Key, Key: c.Record.Key, Pressure: c.Pressure, Method: c.Method, Batch: c.Batch,
		UTemperature: c.UTemperature, HasUTemperature: c.UTemperature > 0, UPressure: c.UPressure, HasUPressure: c.UPressure > 0,
		Volume: c.Volume, HeatingRate: c.HeatingRate, HoldingTime: c.HoldingTime}
}

// Query asks a model for the limit of the candidate.
func (c *Candidate) Query() fit.Query {
	o := fit.Observation{Row: c.Row(), Record: c.Record}
	return o.FluxQuery()
}

// check finds what is wrong with a setup.
func (s *Setup) check() string {
	for _, list := range [...]struct {
		name string
		v    []float64
	}{{"volumes", s.Volumes}, {"heating rates", s.HeatingRates}, {"holding times", s.HoldingTimes}} {
		for _, x := range list.v {
			if !(x > 0) || math.IsInf(x, 0) {
				return list.name + " above 0"
			}
		}
	}
	switch timed := len(s.HeatingRates) > 0 || len(s.HoldingTimes) > 0; {
	case len(s.HeatingRates) > 0 && len(s.HoldingTimes) > 0:
		return "heating rates or holding times, not both: they are two setups"
	case timed && len(s.Volumes) == 0:
		return "a droplet size beside the heating rate or holding time: both are needed for the flux of a reading"
	case !(s.UTemperature >= 0) || !(s.UPressure >= 0) || math.IsInf(s.UTemperature, 0) || math.IsInf(s.UPressure, 0):
		return "standard uncertainties of 0 or more"
	case s.Most < 0:
		return "a number of times of 0 or more"
	}
	return ""
}

// Expand combines fluids, pressures and setups, in the order in which they are
// given. Each candidate occurs once.
//
// Errors: *InputError, *fluid.UnknownError.
func (g *Grid) Expand(lib *fluid.Library) ([]Candidate, error) {
	if len(g.Setups) == 0 {
		return nil, &InputError{"candidates", "at least one way to measure"}
	}
	var out []Candidate
	for i := range g.Setups {
		s := &g.Setups[i]
		what := fmt.Sprintf("setup %d", i+1)
		if s.Method != "" {
			what += " (" + s.Method + ")"
		}
		if bad := s.check(); bad != "" {
			return nil, &InputError{what, bad}
		}
		names, pressures := s.Fluids, s.Pressures
		if len(names) == 0 {
			names = g.Fluids
		}
		if len(pressures) == 0 {
			pressures = g.Pressures
		}
		if len(names) == 0 || len(pressures) == 0 {
			return nil, &InputError{what, "a fluid and a pressure"}
		}
		for _, name := range names {
			r, err := lib.Find(name)
			if err != nil {
				return nil, err
			}
			for _, P := range pressures {
				if P == 0 || math.IsNaN(P) || math.IsInf(P, 0) {
					return nil, &InputError{what, "absolute pressures that are not 0"}
				}
				for _, V := range orNone(s.Volumes) {
					for _, β := range orNone(s.HeatingRates) {
						for _, τ := range orNone(s.HoldingTimes) {
							c := Candidate{r, s.Method, s.Batch, P, V, β, τ, s.UTemperature, s.UPressure, s.Most}
							if !slices.Contains(out, c) {
								out = append(out, c)
							}
						}
					}
				}
			}
		}
	}
	return out, nil
}

func orNone(x []float64) []float64 {
	if len(x) == 0 {
		return []float64{0}
	}
	return x
}

// GridOf is what a laboratory has shown that it can do: the fluids, pressures and
// methods of its data, each method with the median of its sample volumes, heating
// rates, holding times and uncertainties.
func GridOf(d *fit.Data) Grid {
	var g Grid
	at := map[string]int{}
	type seen struct {
		volume, rate, hold, uT, uP []float64
		fluids                     []string
	}
	var of []seen
	note := func(list *[]float64, x float64) {
		if x > 0 {
			*list = append(*list, x)
		}
	}
	for i := range d.Observations {
		o := &d.Observations[i]
		if !slices.Contains(g.Fluids, o.Record.Key) {
			g.Fluids = append(g.Fluids, o.Record.Key)
		}
		if !slices.Contains(g.Pressures, o.Pressure) {
			g.Pressures = append(g.Pressures, o.Pressure)
		}
		k, ok := at[o.Method]
		if !ok {
			k = len(of)
			at[o.Method] = k
			of = append(of, seen{})
			g.Setups = append(g.Setups, Setup{Method: o.Method})
		}
		s := &of[k]
		note(&s.volume, o.Volume)
		note(&s.rate, o.HeatingRate)
		note(&s.hold, o.HoldingTime)
		note(&s.uT, o.UTemperature)
		note(&s.uP, o.UPressure)
		if !slices.Contains(s.fluids, o.Record.Key) {
			s.fluids = append(s.fluids, o.Record.Key)
		}
	}
	sort.Float64s(g.Pressures)
	for k := range g.Setups {
		s, x := &g.Setups[k], &of[k]
		s.UTemperature, s.UPressure, s.Fluids = median(x.uT), median(x.uP), x.fluids
		if len(x.volume) == 0 {
			continue
		}
		switch { // the way in which most rows were timed
		case len(x.rate) > 0 && len(x.rate) >= len(x.hold):
			s.HeatingRates = []float64{median(x.rate)}
		case len(x.hold) > 0:
			s.HoldingTimes = []float64{median(x.hold)}
		}
		s.Volumes = []float64{median(x.volume)}
	}
	return g
}

// median is the lower of the two middle values of an even number; 0 of none.
func median(x []float64) float64 {
	if len(x) == 0 {
		return 0
	}
	s := slices.Clone(x)
	sort.Float64s(s)
	return s[(len(s)-1)/2]
}
