package validate

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// Coverage tells how many rows that a model had not seen lie inside its prediction
// intervals.
type Coverage struct {
	Nominal  float64 // 0.5, 0.8, 0.95
	Observed float64 // share of the rows inside
	Inside   int
	Rows     int
	// Low and High are the 95 % interval of the true share by E. B. Wilson, JASA 22
	// (1927) 209. It takes rows as independent; those of one fold share a model.
	Low, High float64
}

// nominals are the levels that are reported.
var nominals = [...]float64{0.5, 0.8, 0.95}

// level is that of the narrowest two-sided Student's t interval ±t·u that holds e.
func level(e, u, degrees float64) float64 {
	return 2*distuv.StudentsT{Mu: 0, Sigma: 1, Nu: degrees}.CDF(math.Abs(e)/u) - 1
}

// coverage counts the rows inside the intervals; levels are those of the narrowest
// interval that holds each row.
func coverage(levels []float64) []Coverage {
	if len(levels) == 0 {
		return nil
	}
	var out []Coverage
	for _, nominal := range nominals {
		c := Coverage{Nominal: nominal, Rows: len(levels)}
		for _, l := range levels {
			if l <= nominal {
				c.Inside++
			}
		}
		c.Observed = float64(c.Inside) / float64(c.Rows)
		c.Low, c.High = Wilson(c.Inside, c.Rows, 0.95)
		out = append(out, c)
	}
	return out
}

// Wilson returns the score interval of a proportion, k of n, at a two-sided level:
//
//	(k + z²/2 ± z√(k(n−k)/n + z²/4))/(n + z²)
//
// For n = 0 it is 0 to 1.
func Wilson(k, n int, level float64) (low, high float64) {
	if n <= 0 {
		return 0, 1
	}
	z := distuv.UnitNormal.Quantile(0.5 + level/2)
	K, N := float64(k), float64(n)
	half := z * math.Sqrt(K*(N-K)/N+z*z/4)
	return math.Max(0, (K+z*z/2-half)/(N+z*z)), math.Min(1, (K+z*z/2+half)/(N+z*z))
}
