package export

import (
	"fmt"
	"io"
	"math"

	"limsup/data/fluid"
)

// This file writes limits as Chebyshev series of pressure,
//
//	T(P) = Σ cₖ·cos(k·arccos x),  x = (2P − P₁ − P₂)/(P₂ − P₁).

const (
	// mostTerms bounds a series; a smooth limit needs 5 to 20.
	mostTerms = 65
	// seriesSafety is the part of the tolerance that a series may err by at the
	// pressures at which it is checked.
	seriesSafety = 0.5
)

// seriesColumns are what a series is made of.
var seriesColumns = []struct {
	name, unit string
	of         func(*expected) (float64, bool)
}{
	{"temperature", "K", tableColumns[0].of},
	{"standard_uncertainty", "K", tableColumns[1].of},
	{"spinodal", "K", tableColumns[3].of},
}

func (s *subject) series(w io.Writer) error {
	head := []string{"fluid", "quantity", "unit", "from/Pa", "to/Pa", "order", "coefficient"}
	comments := s.comments("Limits of superheat as Chebyshev series of pressure")
	comments = append(comments, s.rangeText(),
		"With x = (2 P - from - to)/(to - from) the value is the sum of coefficient * cos(order * arccos(x)).")
	var rows [][]string
	for _, r := range s.o.Records {
		if _, err := s.row(r); err != nil {
			return &FluidError{r.Key, err}
		}
		if s.low == s.high {
			return &ToleranceError{r.Key, "series", "the range is one pressure; give a range to extend it", s.low, s.high}
		}
		for _, col := range seriesColumns {
			if x := s.at(r, s.low); col.name == "standard_uncertainty" && x.Status == 0 && !x.HasU {
				continue
			}
			c, worst, err := s.chebyshev(r, col.of)
			if err != nil {
				return err
			}
			comments = append(comments, fmt.Sprintf("%s, %s: %d terms; largest deviation from the model %s %s.", r.Key, col.name, len(c), number(roundUp(worst*statedMargin)), col.unit))
			for k, v := range c {
				rows = append(rows, []string{r.Key, col.name, col.unit, number(s.low), number(s.high), fmt.Sprint(k), number(v)})
			}
		}
	}
	return list(w, comments, head, rows)
}

// chebyshev finds the shortest of the series of 5, 9, 17, ... terms that meets the tolerance, less its
// trailing terms that do not matter, and its largest deviation.
func (s *subject) chebyshev(r *fluid.Record, of func(*expected) (float64, bool)) (c []float64, worst float64, err error) {
	at := func(x float64) (float64, error) {
		P := 0.5 * (s.low + s.high + x*(s.high-s.low))
		e := s.at(r, math.Min(math.Max(P, s.low), s.high))
		v, ok := of(&e)
		if !ok {
			return 0, &ToleranceError{r.Key, "series", fmt.Sprintf("there is no limit at %.6g Pa: %s", P, statuses()[e.Status]), s.low, s.high}
		}
		return v, nil
	}
	for n := 5; n <= mostTerms; n = 2*n - 1 {
		values := make([]float64, n)
		for j := range values {
			if values[j], err = at(math.Cos(math.Pi * float64(j) / float64(n-1))); err != nil {
				return nil, 0, err
			}
		}
		c = extrema(values)
		// Checked at points that are not among those of the series, thick where it turns.
		worst = 0
		checks := 8 * n
		for j := range checks + 1 {
			x := math.Cos(math.Pi * float64(j) / float64(checks))
			v, err := at(x)
			if err != nil {
				return nil, 0, err
			}
			worst = math.Max(worst, math.Abs(v-sumChebyshev(c, x)))
		}
		if worst <= seriesSafety*s.o.Tolerance {
			return c, worst, nil
		}
	}
	return nil, 0, &ToleranceError{r.Key, "series", fmt.Sprintf("%d terms still err by %.3g K; narrow the range or allow more with a larger tolerance", len(c), worst), s.low, s.high}
}

// extrema turns values at x_j = cos(πj/N), j = 0…N, into the coefficients of the
// polynomial through them.
func extrema(values []float64) []float64 {
	n := len(values) - 1
	c := make([]float64, n+1)
	for k := range c {
		sum := 0.0
		for j, v := range values {
			weight := 1.0
			if j == 0 || j == n {
				weight = 0.5
			}
			sum += weight * v * math.Cos(math.Pi*float64(j*k%(2*n))/float64(n))
		}
		c[k] = 2 * sum / float64(n)
		if k == 0 || k == n {
			c[k] /= 2
		}
	}
	return c
}

// sumChebyshev is Σ cₖTₖ(x) by the recurrence of Clenshaw.
func sumChebyshev(c []float64, x float64) float64 {
	var b1, b2 float64
	for k := len(c) - 1; k > 0; k-- {
		b1, b2 = c[k]+2*x*b1-b2, b1
	}
	return c[0] + x*b1 - b2
}
