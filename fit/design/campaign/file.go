package campaign

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"math"
	"strings"

	"github.com/pelletier/go-toml/v2"
	"github.com/pelletier/go-toml/v2/unstable"

	"limsup/data/quantity"
)

// This file reads candidates from TOML:
//
//	fluid = ["n-pentane", "n-hexane"]
//	pressure = ["101.325 kPa", "1 MPa"]
//
//	[[setup]]
//	method = "droplet"
//	diameter = ["0.5 mm", "1 mm"]      # or volume = [...]
//	heating_rate = ["2 K/s"]           # or holding_time = [...]
//	u_temperature = "0.3 K"
//	u_pressure = "2 kPa"
//	most = 10                          # of each candidate
//	fluid = ["n-pentane"]              # instead of the fluids above
//	pressure = ["0.5 MPa"]             # instead of the pressures above
//
// The typed texts below convert themselves while the file is decoded, so that an
// error about a unit has the place of its text.

// They are structs, so that a bare number is no quantity.

// si is a value in SI units.
type si struct{ value float64 }

func (s si) number() float64 { return s.value }

type (
	pressureText  struct{ si }
	diameterText  struct{ si }
	volumeText    struct{ si }
	rateText      struct{ si }
	timeText      struct{ si }
	kelvinText    struct{ si }
	deviationText struct{ si }
)

// convert reads a quantity and refuses what is not above its floor.
func convert(to *float64, text []byte, d quantity.Dimension, difference, positive bool) error {
	q, err := quantity.Parse(string(text))
	if err != nil {
		return err
	}
	v, err := q.In(d)
	if difference {
		v, err = q.DifferenceIn(d)
	}
	if err != nil {
		return err
	}
	if positive && !(v > 0) {
		return fmt.Errorf("%s is not above 0", q)
	}
	*to = v
	return nil
}

// UnmarshalText reads an absolute pressure, which may be negative but not 0.
func (p *pressureText) UnmarshalText(b []byte) error {
	if err := convert(&p.value, b, quantity.Pressure, false, false); err != nil {
		return err
	}
	if p.value == 0 {
		return errors.New("a pressure of 0; pressures are absolute")
	}
	return nil
}

// UnmarshalText reads a diameter.
func (p *diameterText) UnmarshalText(b []byte) error {
	return convert(&p.value, b, quantity.Length, false, true)
}

// UnmarshalText reads a volume.
func (p *volumeText) UnmarshalText(b []byte) error {
	return convert(&p.value, b, quantity.Volume, false, true)
}

// UnmarshalText reads a heating rate.
func (p *rateText) UnmarshalText(b []byte) error {
	return convert(&p.value, b, quantity.HeatingRate, false, true)
}

// UnmarshalText reads a time.
func (p *timeText) UnmarshalText(b []byte) error {
	return convert(&p.value, b, quantity.Time, false, true)
}

// UnmarshalText reads a difference of temperature.
func (p *kelvinText) UnmarshalText(b []byte) error {
	return convert(&p.value, b, quantity.Temperature, true, true)
}

// UnmarshalText reads a standard uncertainty of pressure.
func (p *deviationText) UnmarshalText(b []byte) error {
	return convert(&p.value, b, quantity.Pressure, true, true)
}

type setupFile struct {
	Method       string         `toml:"method"`
	Batch        string         `toml:"batch"`
	Fluid        []string       `toml:"fluid"`
	Pressure     []pressureText `toml:"pressure"`
	Diameter     []diameterText `toml:"diameter"`
	Volume       []volumeText   `toml:"volume"`
	HeatingRate  []rateText     `toml:"heating_rate"`
	HoldingTime  []timeText     `toml:"holding_time"`
	UTemperature kelvinText     `toml:"u_temperature"`
	UPressure    deviationText  `toml:"u_pressure"`
	Most         int            `toml:"most"`
}

type gridFile struct {
	Fluid    []string       `toml:"fluid"`
	Pressure []pressureText `toml:"pressure"`
	Setup    []setupFile    `toml:"setup"`
}

// maxFile is the largest file that is read, in bytes: far more than anybody writes
// by hand.
const maxFile = 1 << 20

// ReadGrid reads candidates from TOML; name is what errors call the file. Keys that
// are not known are refused.
//
// Errors: FileErrors with line and column; those of r.
func ReadGrid(r io.Reader, name string) (Grid, error) {
	data, err := io.ReadAll(io.LimitReader(r, maxFile+1))
	if err != nil {
		return Grid{}, err
	}
	if len(data) > maxFile {
		return Grid{}, FileErrors{{File: name, Message: fmt.Sprintf("more than %d bytes; a file of candidates is a page of text", maxFile)}}
	}
	data = bytes.TrimPrefix(data, []byte("\ufeff"))
	var f gridFile
	d := toml.NewDecoder(bytes.NewReader(data))
	d.DisallowUnknownFields()
	if err := d.Decode(&f); err != nil {
		return Grid{}, tomlErrors(name, data, err)
	}
	g := Grid{Fluids: f.Fluid, Pressures: numbers(f.Pressure)}
	if len(f.Setup) == 0 {
		return Grid{}, FileErrors{{File: name, Message: "no [[setup]]: at least one way to measure is needed"}}
	}
	var bad FileErrors
	for i := range f.Setup {
		s := &f.Setup[i]
		out := Setup{Method: s.Method, Batch: s.Batch, Fluids: s.Fluid, Pressures: numbers(s.Pressure), Volumes: numbers(s.Volume),
			HeatingRates: numbers(s.HeatingRate), HoldingTimes: numbers(s.HoldingTime),
			UTemperature: s.UTemperature.value, UPressure: s.UPressure.value, Most: s.Most}
		for _, d := range s.Diameter {
			out.Volumes = append(out.Volumes, Sphere(d.value))
		}
		what := ""
		switch {
		case len(s.Volume) > 0 && len(s.Diameter) > 0:
			what = "diameter or volume, not both"
		case len(out.Fluids) == 0 && len(g.Fluids) == 0:
			what = "a fluid, here or at the top of the file"
		case len(out.Pressures) == 0 && len(g.Pressures) == 0:
			what = "a pressure, here or at the top of the file"
		default:
			what = out.check()
		}
		if what != "" {
			line, column := header(data, i)
			bad = append(bad, &FileError{File: name, Line: line, Column: column, Message: "setup: want " + what})
		}
		g.Setups = append(g.Setups, out)
	}
	if len(bad) > 0 {
		return Grid{}, bad
	}
	return g, nil
}

// Sphere is the volume in m³ of a droplet of diameter d in m.
func Sphere(d float64) float64 { return math.Pi / 6 * d * d * d }

func numbers[T interface{ number() float64 }](x []T) []float64 {
	var out []float64
	for _, v := range x {
		out = append(out, v.number())
	}
	return out
}

// tomlErrors gives the errors of the decoder their places.
func tomlErrors(name string, data []byte, err error) FileErrors {
	var strict *toml.StrictMissingError
	if errors.As(err, &strict) {
		var out FileErrors
		for i := range strict.Errors {
			e := &strict.Errors[i]
			line, column := e.Position()
			key := strings.Join(e.Key(), ".")
			message := fmt.Sprintf("unknown key %q", key)
			known := []string{"fluid", "pressure", "setup"}
			if len(e.Key()) > 1 {
				known = []string{"method", "batch", "fluid", "pressure", "diameter", "volume", "heating_rate", "holding_time", "u_temperature", "u_pressure", "most"}
			}
			if near := quantity.Near(e.Key()[len(e.Key())-1], known); len(near) > 0 {
				message += "; did you mean " + strings.Join(near, " or ") + "?"
			} else {
				message += "; the keys here are " + strings.Join(known, ", ")
			}
			out = append(out, &FileError{File: name, Line: line, Column: column, Message: message, Err: e})
		}
		return out
	}
	f := &FileError{File: name, Message: strings.TrimPrefix(err.Error(), "toml: "), Err: err}
	var at *toml.DecodeError
	if errors.As(err, &at) {
		f.Line, f.Column = at.Position()
	} else {
		f.Line, f.Column = bareNumber(data)
	}
	return FileErrors{f}
}

// bareNumber is the place of the first number that is not a count: the decoder
// does not say where a number stood that should have been a quantity.
func bareNumber(data []byte) (line, column int) {
	var p unstable.Parser
	p.Reset(data)
	var find func(n *unstable.Node) bool
	find = func(n *unstable.Node) bool {
		switch n.Kind {
		case unstable.Integer, unstable.Float:
			before := data[:n.Raw.Offset]
			line, column = bytes.Count(before, []byte("\n"))+1, len(before)-bytes.LastIndexByte(before, '\n')
			return true
		case unstable.KeyValue:
			key := ""
			for it := n.Key(); it.Next(); {
				key = string(it.Node().Data)
			}
			return key != "most" && find(n.Value())
		case unstable.Array, unstable.InlineTable:
			for it := n.Children(); it.Next(); {
				if find(it.Node()) {
					return true
				}
			}
		}
		return false
	}
	for p.NextExpression() {
		if find(p.Expression()) {
			return line, column
		}
	}
	return 0, 0
}

// header is the place of the i-th [[setup]] of a text that is valid TOML; 0 where
// it was written as an array of inline tables.
func header(data []byte, i int) (line, column int) {
	for n, text := range strings.Split(string(data), "\n") {
		trimmed := strings.TrimSpace(text)
		rest, ok := strings.CutPrefix(trimmed, "[[")
		if !ok || !strings.HasPrefix(strings.TrimSpace(rest), "setup") {
			continue
		}
		if i == 0 {
			return n + 1, strings.Index(text, "[[") + 1
		}
		i--
	}
	return 0, 0
}
