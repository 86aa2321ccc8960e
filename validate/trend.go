package validate

import "fmt"

// Trend is a test of residuals against a quantity. The residuals are standardised,
// those of left-out rows where there are any.
type Trend struct {
	Against string // "pressure", "reduced temperature", "log10 flux"
	Test    string // name of the test, or "" with a Reason
	N       int
	Rho     float64 // rank correlation
	P       float64 // two-sided
	Tested  bool
	Reason  string // why there is no test
}

// Normality is a test of the residuals, as in Trend, against a normal distribution.
type Normality struct {
	Test   string
	N      int
	W      float64
	P      float64
	Tested bool
	Reason string
}

// Names of the tests.
const (
	spearmanName = "Spearman rank correlation"
	shapiroName  = "Shapiro-Wilk"
)

// fluxTie is the difference of log10 J up to which two rows count as having one flux:
// a hundred times the error of a limit in its own flux.
const fluxTie = 1e-6

// residualsFor returns the blind standardised residuals of boiled rows and a quantity.
func (a *Assessment) residualsFor(quantity func(r *Residual) (float64, bool)) (x, z []float64) {
	for i := range a.Rows {
		r := &a.Rows[i]
		v, known := quantity(r)
		if s, ok := r.Blind(); ok && known && !r.Intact {
			x, z = append(x, v), append(z, s)
		}
	}
	return x, z
}

func (a *Assessment) trends() []Trend {
	obs := a.Data.Observations
	var out []Trend
	for _, t := range []struct {
		against  string
		tie      float64
		quantity func(r *Residual) (float64, bool)
	}{
		{"pressure", 0, func(r *Residual) (float64, bool) { return obs[r.Index].Pressure, true }},
		// Of the prediction: the reading would correlate with its own error.
		{"reduced temperature", 0, func(r *Residual) (float64, bool) {
			return r.Predicted / obs[r.Index].Record.CriticalTemperature.Value, true
		}},
		{"log10 flux", fluxTie, func(r *Residual) (float64, bool) { return r.Log10Flux, r.HasFlux }},
	} {
		x, z := a.residualsFor(t.quantity)
		tr := Trend{Against: t.against, N: len(x)}
		if tr.Rho, tr.P, tr.Tested = Spearman(x, z, t.tie); tr.Tested {
			tr.Test = spearmanName
		} else {
			tr.Reason = noTest(len(x), 4, "all rows have the same "+t.against)
		}
		out = append(out, tr)
	}
	return out
}

func (a *Assessment) normality() Normality {
	_, z := a.residualsFor(func(*Residual) (float64, bool) { return 0, true })
	n := Normality{N: len(z)}
	if n.W, n.P, n.Tested = ShapiroWilk(z); n.Tested {
		n.Test = shapiroName
	} else if len(z) > shapiroMost {
		n.Reason = fmt.Sprintf("the p-value is known up to %d rows", shapiroMost)
	} else {
		n.Reason = noTest(len(z), shapiroLeast, "the residuals do not differ")
	}
	return n
}

func noTest(n, least int, same string) string {
	switch {
	case n == 0:
		return "no standardised residuals"
	case n < least:
		return fmt.Sprintf("fewer than %d rows with a standardised residual", least)
	}
	return same
}
