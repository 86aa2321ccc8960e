package campaign

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"gonum.org/v1/gonum/mat"

	"limsup/data/quantity"
	"limsup/fit/design"
)

// This file puts into words why a measurement was chosen: what is new about it
// beside what was measured before (the lever), and what it does to the parameters.

// history is what has been measured so far.
type history struct {
	fluids, methods, batches []string
	pressures                []float64
	rates, holds, volumes    []float64
	flux                     []float64 // log₁₀J
	states                   []Candidate
}

// explain writes the sentences of the singles, compared with now, and of the groups,
// compared with the batch without them.
func (p *Plan) explain(own, batch *design.Problem) error {
	var before history
	if p.Data != nil && !p.Fresh {
		for i := range p.Data.Observations {
			o := &p.Data.Observations[i]
			q := o.FluxQuery()
			x, err := p.Model.Predict(q)
			c := Candidate{Record: o.Record, Method: o.Method, Batch: o.Batch, Pressure: o.Pressure, Volume: o.Volume, HeatingRate: o.HeatingRate, HoldingTime: o.HoldingTime}
			before.add(&c, x.Log10Flux, err == nil && x.HasFlux)
		}
	}
	count := make([]int, len(p.Readings))
	now, err := own.Evaluate(count)
	if err != nil {
		return err
	}
	for i := range p.Singles[:min(len(p.Singles), singlesFollowed)] {
		s := &p.Singles[i]
		count[s.Reading]++
		after, err := own.Evaluate(count)
		if err != nil {
			return err
		}
		count[s.Reading]--
		s.Why = p.why(&before, &p.Readings[s.Reading], now.Covariance, after.Covariance)
	}
	all, err := batch.Evaluate(p.Count)
	if err != nil {
		return err
	}
	for i := range p.Groups {
		g := &p.Groups[i]
		r := &p.Readings[g.Reading]
		without := slices.Clone(p.Count)
		without[g.Reading] = 0
		rest, err := batch.Evaluate(without)
		if err != nil {
			return err
		}
		g.Why = p.why(&before, r, rest.Covariance, all.Covariance)
		before.add(&r.Candidate, r.Log10J, r.HasFlux)
	}
	return nil
}

func (h *history) add(c *Candidate, flux float64, has bool) {
	h.fluids, h.methods, h.batches = append(h.fluids, c.Record.Key), append(h.methods, c.Method), append(h.batches, c.Batch)
	h.pressures = append(h.pressures, c.Pressure)
	h.rates, h.holds, h.volumes = append(h.rates, c.HeatingRate), append(h.holds, c.HoldingTime), append(h.volumes, c.Volume)
	if has {
		h.flux = append(h.flux, flux)
	}
	h.states = append(h.states, *c)
}

// apart tells whether x differs from every stated value of a list by a factor.
func apart(x float64, list []float64, factor float64) (differs, any bool) {
	differs = true
	for _, y := range list {
		if y != 0 {
			any = true
			if r := x / y; r > 1/factor && r < factor {
				differs = false
			}
		}
	}
	return differs && x != 0, any
}

// lever says what is new about a candidate, "" if nothing is. first is set when
// nothing was measured before.
func (h *history) lever(r *Reading) string {
	c := &r.Candidate
	if len(h.states) == 0 {
		return ""
	}
	ordinal := func(list []float64) string {
		var kinds []float64
		for _, y := range list {
			if d, _ := apart(y, kinds, 10); d {
				kinds = append(kinds, y)
			}
		}
		if len(kinds) == 1 {
			return "a second"
		}
		return "another"
	}
	if !slices.Contains(h.fluids, c.Record.Key) {
		return "another fluid (" + c.Record.Key + ")"
	}
	if d, any := apart(c.HeatingRate, h.rates, 10); d && any {
		return fmt.Sprintf("%s heating rate (%s)", ordinal(h.rates), Rate(c.HeatingRate))
	}
	if d, any := apart(c.HoldingTime, h.holds, 10); d && any {
		return fmt.Sprintf("%s holding time (%.3g s)", ordinal(h.holds), c.HoldingTime)
	}
	if d, any := apart(c.Volume, h.volumes, 10); d && any {
		return fmt.Sprintf("%s droplet size (%s)", ordinal(h.volumes), Size(c.Volume))
	}
	if !slices.Contains(h.methods, c.Method) && c.Method != "" {
		return "another method (" + c.Method + ")"
	}
	if r.HasFlux && len(h.flux) > 0 {
		nearest := math.Inf(1)
		for _, f := range h.flux {
			nearest = math.Min(nearest, math.Abs(f-r.Log10J))
		}
		if nearest > 1 {
			return fmt.Sprintf("a flux %.1f decades from those measured", nearest)
		}
	}
	if d, _ := apart(c.Pressure, h.pressures, 1.2); d {
		return fmt.Sprintf("%s pressure (%s)", ordinal(h.pressures), Pressure(c.Pressure))
	}
	return ""
}

// Thresholds of the sentences: correlations below the first are of no concern, and
// separating a pair, measured by √(1 − r²), by less than the second share is not
// worth a word.
const (
	noteworthyCorrelation = 0.5
	noteworthyChange      = 0.02
)

// why compares the covariance without and with a measurement.
func (p *Plan) why(h *history, r *Reading, without, with *mat.SymDense) string {
	lever := h.lever(r)
	subject := lever
	if subject == "" {
		subject = r.Subject()
	}
	if p.Tell != nil {
		return capital(fmt.Sprintf("%s: the variants differ by %.2g K there, %.1f times the standard deviation of a reading.", subject, math.Abs(r.Difference), math.Abs(r.Difference)/r.U))
	}
	gains := p.narrowed(without, with)
	if a, b, from, to := p.separated(without, with); a != "" {
		now, before := correlations(to, from)
		return capital(fmt.Sprintf("%s separates %s from %s: correlation %s instead of %s%s.", subject, a, b, now, before, gains))
	}
	return capital(subject + ": " + p.moves(r) + gains + ".")
}

// correlations writes two correlations with two digits of what the larger one
// misses to ±1.
func correlations(to, from float64) (string, string) {
	digits := 2
	for x := 1 - math.Max(math.Abs(to), math.Abs(from)); x > 0 && x < 0.1 && digits < 8; x *= 10 {
		digits++
	}
	return fmt.Sprintf("%.*f", digits, to), fmt.Sprintf("%.*f", digits, from)
}

// moves says what a reading tells when it separates nothing.
func (p *Plan) moves(r *Reading) string {
	g := p.space.gradient(&r.sensitivity)
	at, most := -1, 0.0
	for i, d := range g {
		if x := math.Abs(d) * p.space.params[i].Before; x > most {
			at, most = i, x
		}
	}
	if at < 0 {
		return "it tells about the spread of the readings only"
	}
	return fmt.Sprintf("its limit moves by %.2g K per present uncertainty of %s, and a reading scatters by %.2g K", most, p.space.params[at].Label, r.U)
}

// narrowed names the location whose uncertainty falls most.
func (p *Plan) narrowed(before, after *mat.SymDense) string {
	best, at := 0.0, -1
	for i, x := range p.space.params {
		if x.Spread {
			continue
		}
		if g := 1 - math.Sqrt(after.At(i, i)/before.At(i, i)); g > best+1e-9 {
			best, at = g, i
		}
	}
	if at < 0 || best < 1e-4 {
		return ""
	}
	if best > 0.95 { // what is left without it is the bounds
		return fmt.Sprintf("; without it %s is hardly determined", p.space.params[at].Label)
	}
	return fmt.Sprintf("; the uncertainty of %s is %s smaller", p.space.params[at].Label, percent(best))
}

// pairsLimit bounds the parameters whose pairs are looked at.
const pairsLimit = 60

// separated finds the correlated pair that is drawn apart most.
func (p *Plan) separated(before, after *mat.SymDense) (a, b string, from, to float64) {
	n := min(len(p.space.params), pairsLimit)
	most := noteworthyChange
	for i := range n {
		for j := i + 1; j < n; j++ {
			if p.space.params[i].Spread || p.space.params[j].Spread {
				continue
			}
			rb := before.At(i, j) / math.Sqrt(before.At(i, i)*before.At(j, j))
			ra := after.At(i, j) / math.Sqrt(after.At(i, i)*after.At(j, j))
			if math.Abs(rb) < noteworthyCorrelation {
				continue
			}
			if gain := math.Sqrt((1-ra*ra)/math.Max(1-rb*rb, 1e-14)) - 1; gain > most+1e-9 {
				most, a, b, from, to = gain, p.space.params[i].Label, p.space.params[j].Label, rb, ra
			}
		}
	}
	return a, b, from, to
}

// Subject names the state of a candidate: "n-pentane at 101.325 kPa by droplet".
func (c *Candidate) Subject() string {
	t := c.Record.Key + " at " + Pressure(c.Pressure)
	if c.Method != "" {
		t += " by " + c.Method
	}
	return t
}

// Conditions names the sample and its timing: "0.8 mm, 2 K/s"; "" if none is stated.
func (c *Candidate) Conditions() string {
	var parts []string
	if c.Volume > 0 {
		parts = append(parts, Size(c.Volume))
	}
	if c.HeatingRate > 0 {
		parts = append(parts, Rate(c.HeatingRate))
	}
	if c.HoldingTime > 0 {
		parts = append(parts, fmt.Sprintf("%.4g s held", c.HoldingTime))
	}
	return strings.Join(parts, ", ")
}

// Size is a sample volume for a person: the diameter of a droplet down to 0.1 mm,
// else the volume.
func Size(V float64) string {
	if d := math.Cbrt(6 * V / math.Pi); d >= 1e-4*(1-1e-9) {
		return fmt.Sprintf("%.3g mm", d*1e3)
	}
	switch {
	case V >= 1e-12:
		return fmt.Sprintf("%.3g nL", V*1e12)
	case V >= 1e-15:
		return fmt.Sprintf("%.3g pL", V*1e15)
	}
	return fmt.Sprintf("%.3g fL", V*1e18)
}

// Rate is a heating rate for a person.
func Rate(β float64) string { return quantityText(β, "K/s") }

// Pressure is a pressure for a person.
func Pressure(P float64) string { return quantityText(P/1e3, "kPa") }

func quantityText(v float64, unit string) string {
	u, err := quantity.ParseUnit(unit)
	if err != nil {
		return fmt.Sprintf("%.6g %s", v, unit)
	}
	text := fmt.Sprintf("%.6g", v)
	return text + " " + u.String()
}

func percent(x float64) string { return fmt.Sprintf("%.2g %%", 100*x) }

// capital begins a sentence; the names of fluids keep their small letters.
func capital(s string) string {
	if strings.HasPrefix(s, "a ") || strings.HasPrefix(s, "another ") {
		return "A" + s[1:]
	}
	return s
}
