package campaign

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"

	"limsup/fit/design"
)

// Droplets is one line of a sample-size table.
type Droplets struct {
	Half  float64 // half-width of the interval, K
	Level float64
	// Mean is the number of alike droplets whose mean, with the standard deviation
	// found from them, lies within ± Half of the limit at that state. It needs no model.
	Mean int
	// Planned is the number of further droplets, chosen as in a batch, after which the
	// first quantity of the plan is known to ± Half through the model; Reached is
	// false where MostPlanned do not suffice.
	Planned int
	Reached bool
}

// MostPlanned is the largest batch that is looked at for a sample-size table.
const MostPlanned = 200

// HalfWidths and Levels are the usual lines of a sample-size table.
func HalfWidths() []float64 { return []float64{2, 1, 0.5, 0.3, 0.2, 0.1} }

// Levels are the usual levels of confidence.
func Levels() []float64 { return []float64{0.90, 0.95, 0.99} }

// SampleSizes says how many droplets a half-width in kelvin takes, for a reading
// (an index into Readings) and, where the first quantity is a limit, through the
// model.
//
// Errors: *InputError, *design.SingularError.
func (p *Plan) SampleSizes(reading int, halves, levels []float64) ([]Droplets, error) {
	if reading < 0 || reading >= len(p.Readings) {
		return nil, &InputError{"sample size", "one of the readings"}
	}
	var path []float64 // standard uncertainty after 0, 1, 2, … chosen droplets
	if len(p.Quantities) > 0 && p.Quantities[0].state != nil {
		q := p.problem(design.Criterion{Kind: design.Linear, Directions: [][]float64{p.Quantities[0].direction}}, boundsSupport)
		count := make([]int, len(p.Readings))
		for range MostPlanned + 1 {
			e, err := q.Evaluate(count)
			if err != nil {
				return nil, err
			}
			path = append(path, e.Mean())
			b, err := q.Next(count)
			if err != nil {
				return nil, err
			}
			if b < 0 {
				break
			}
			count[b]++
		}
	}
	var out []Droplets
	for _, h := range halves {
		for _, l := range levels {
			n, err := design.SampleSize(p.Readings[reading].U, h, l)
			if err != nil {
				return nil, err
			}
			d := Droplets{Half: h, Level: l, Mean: n}
			for k, u := range path {
				// The droplets add to the degrees of freedom of the model.
				ν := math.Max(1, float64(p.degrees()+k))
				if (distuv.StudentsT{Mu: 0, Sigma: 1, Nu: ν}).Quantile(0.5+l/2)*u <= h {
					d.Planned, d.Reached = k, true
					break
				}
			}
			out = append(out, d)
		}
	}
	return out, nil
}

// degrees of freedom of the model before the batch.
func (p *Plan) degrees() int {
	if !p.Fresh {
		return p.Model.Degrees
	}
	n := 0
	for i := range p.space.params {
		if !p.space.params[i].Spread {
			n++
		}
	}
	return -n
}
