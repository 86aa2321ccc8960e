package plot

import (
	"fmt"
	"math"
	"slices"

	"limsup/data/fluid"
	"limsup/eos"
	"limsup/eos/nucleation"
	"limsup/fit"
	"limsup/validate"
)

// sweep is the number of states along a line.
const sweep = 61

// Input is what the figures of one fluid are drawn from.
type Input struct {
	Model  *fit.Model
	Record *fluid.Record
	// Assessment, if not nil, holds measurements; those of Record are shown.
	Assessment *validate.Assessment
}

// observations are all rows of the input.
func (in *Input) observations() []fit.Observation {
	if in.Assessment == nil {
		return nil
	}
	return in.Assessment.Data.Observations
}

func (in *Input) mine(i int) bool {
	return in.Assessment.Data.Observations[i].Record.Key == in.Record.Key
}

// EmptyError reports a figure without anything to draw.
type EmptyError struct {
	Figure, About string // the figure's id; the fluid or the model
	Reason        string // why, if Err is nil
	Err           error
}

func (e *EmptyError) Error() string {
	s := fmt.Sprintf("figure %s: %s: nothing to draw: ", e.Figure, e.About)
	if e.Err != nil {
		return s + e.Err.Error()
	}
	return s + e.Reason
}

// Unwrap returns the cause, if there is one.
func (e *EmptyError) Unwrap() error { return e.Err }

// equation is the equation of state of the fluid, also where the flux is not known.
func (in *Input) equation() (*fit.Physics, error) {
	q := fit.Query{Record: in.Record}
	return fit.NewEquationPhysics(in.Model.Variant, in.Record, in.Model.Values(&q))
}

// condition is a way to reach the limit: a method with the flux of its rows.
type condition struct {
	name  string
	query fit.Query
	style Style
}

// conditions are those of the rows of the fluid: each method at its offset and at
// the flux of the middle one of its rows; without rows, the threshold.
func (in *Input) conditions() []condition {
	obs := in.observations()
	names, style := methods(obs)
	method := methodNames()
	var out []condition
	for _, m := range names {
		var rows []int
		for i := range obs {
			if in.mine(i) && method(&obs[i]) == m {
				rows = append(rows, i)
			}
		}
		if len(rows) == 0 {
			continue
		}
		c := condition{m, fit.Query{Record: in.Record, Method: obs[rows[0]].Method}, style[m]}
		var own []int
		for _, i := range rows {
			if obs[i].OwnFlux {
				own = append(own, i)
			}
		}
		if 2*len(own) > len(rows) {
			// Of one kind, so that their targets can be compared.
			kind := obs[own[0]].Target.PerKelvin
			own = slices.DeleteFunc(own, func(i int) bool { return obs[i].Target.PerKelvin != kind })
			slices.SortStableFunc(own, func(a, b int) int {
				switch d := obs[a].Target.LnJ - obs[b].Target.LnJ; {
				case d < 0:
					return -1
				case d > 0:
					return 1
				}
				return 0
			})
			c.query.Target, c.query.OwnFlux = obs[own[len(own)/2]].Target, true
		}
		out = append(out, c)
	}
	if len(out) == 0 {
		out = append(out, condition{"", fit.Query{Record: in.Record}, groupStyle(0)})
	}
	return out
}

// LimitMap shows saturation, spinodal and limit of a fluid in the plane of
// temperature and pressure, with its measurements.
//
// Errors: *EmptyError; those of the equation of state.
func LimitMap(in *Input) (*Figure, error) {
	ph, err := in.equation()
	if err != nil {
		return nil, err
	}
	m := &ph.Model
	obs := in.observations()
	low, top := 0.03*m.Pc, 0.995*m.Pc
	lo, hi := math.Inf(1), math.Inf(-1) // of the measurements
	for i := range obs {
		if in.mine(i) {
			lo, hi = math.Min(lo, obs[i].Pressure), math.Max(hi, obs[i].Pressure)
		}
	}
	low = math.Min(low, lo)
	f := &Figure{ID: "map-" + slug(in.Record.Key), Kind: "map", Title: "Limit map of " + Visible(in.Record.Key),
		Caption: "Between the saturation line and the spinodal the liquid is superheated. It boils by itself at its limit, which lies close to the spinodal at low pressure and runs into the critical point with it. Measured points should scatter about the limit line of their own method, inside its band: the interval that holds 95 % of new readings at that pressure."}
	whole := Panel{Title: "up to the critical point", X: Axis{Label: "T/K"}, Y: Axis{Label: "P/MPa"}}
	sat := Series{Name: "saturation", Style: Style{Colour: Ink}}
	for _, P := range geometric(math.Max(low, 0.03*m.Pc), top, sweep) {
		if s, err := m.SaturationTemperature(P); err == nil {
			sat.X, sat.Y = append(sat.X, s.T), append(sat.Y, P/mega)
		}
	}
	lines, err := in.limitLines(f, m, low, top, true)
	whole.Series = append(append(whole.Series, sat), lines...)
	whole.Series = append(whole.Series, Series{Name: "critical point", Shape: Points, X: []float64{m.Tc}, Y: []float64{m.Pc / mega},
		Text: []string{fmt.Sprintf("critical point of the equation: %s K, %s MPa", fixed(m.Tc, 2), fixed(m.Pc/mega, 3))}, Style: Style{Colour: Ink, Marker: Plus}})
	if whole.Series = dropEmpty(whole.Series); len(whole.Series) == 1 {
		return nil, &EmptyError{Figure: f.ID, About: in.Record.Key, Reason: "no line of the fluid could be computed", Err: err}
	}
	f.Panels = []Panel{whole}
	if obs == nil || lo > hi {
		return f, nil
	}
	measured := pointsByMethod(f, obs, in.Assessment, in.mine, func(i int) (float64, float64) { return obs[i].Temperature, obs[i].Pressure / mega })
	f.Panels[0].Series = append(f.Panels[0].Series, measured...)
	pad := math.Max(0.08*(hi-lo), 0.02*math.Abs(hi))
	near := Panel{Title: "the measured range, enlarged", X: whole.X, Y: whole.Y}
	if lines, err = in.limitLines(f, m, lo-pad, math.Min(hi+pad, top), false); err == nil {
		near.Series = append(lines, measured...)
		f.Panels = append(f.Panels, near)
	}
	return f, nil
}

// limitLines are the spinodal and the predicted limits between two pressures, with
// a note in f about limits that end if note is set. err is why a limit is missing.
func (in *Input) limitLines(f *Figure, m *eos.Model, low, top float64, note bool) (out []Series, err error) {
	spin := Series{Name: "spinodal of the liquid", Style: Style{Colour: Ink, Dash: Dotted}}
	for _, P := range linear(low, top, sweep) {
		if s, err := m.LiquidSpinodalTemperature(P); err == nil {
			spin.X, spin.Y = append(spin.X, s.T), append(spin.Y, P/mega)
		}
	}
	var bands, lines []Series
	for _, c := range in.conditions() {
		line, band, why := in.limitLine(c, low, top)
		if why != nil {
			err = why
		}
		switch n := len(line.X); {
		case n == 0 && note:
			f.Notes = append(f.Notes, fmt.Sprintf("There is no %s to draw: %s.", line.Name, why))
		case why != nil && note:
			f.Notes = append(f.Notes, fmt.Sprintf("The line “%s” is drawn where that limit exists, from %s MPa to %s MPa.", line.Name, significant(line.Y[0], 3), significant(line.Y[n-1], 3)))
		}
		bands, lines = append(bands, band), append(lines, line)
	}
	return dropEmpty(append(append(bands, spin), lines...)), err
}

// limitLine is the predicted limit under a condition, with the interval of new
// readings where the model knows its uncertainty. why is the error of the first
// state that has no limit, or nil.
func (in *Input) limitLine(c condition, low, top float64) (line, band Series, why error) {
	kind := string(in.Model.Variant.Limit) + " limit"
	if c.name != "" {
		kind += ", " + c.name
	}
	line = Series{Name: kind, Style: c.style}
	band = Series{Name: kind + ", 95 % of new readings", Shape: Band, Style: c.style}
	for _, P := range linear(low, top, sweep) {
		q := c.query
		q.Pressure = P
		x, err := in.Model.Predict(q)
		if err != nil {
			if why == nil {
				why = err
			}
			continue
		}
		line.X, line.Y = append(line.X, x.Temperature), append(line.Y, P/mega)
		if x.HasU {
			band.X, band.Y = append(band.X, x.Low), append(band.Y, P/mega)
			band.X2, band.Y2 = append(band.X2, x.High), append(band.Y2, P/mega)
		}
	}
	return line, band, why
}

// dropEmpty leaves out series without points.
func dropEmpty(s []Series) []Series {
	return slices.DeleteFunc(s, func(x Series) bool { return len(x.X) == 0 && len(x.Y) == 0 })
}

func linear(a, b float64, n int) []float64 {
	out := make([]float64, n)
	for i := range out {
		out[i] = a + (b-a)*float64(i)/float64(n-1)
	}
	return out
}

func geometric(a, b float64, n int) []float64 {
	out := make([]float64, n)
	for i := range out {
		out[i] = a * math.Pow(b/a, float64(i)/float64(n-1))
	}
	return out
}

// slug makes an identifier of a fluid's key: bytes other than letters and digits of
// ASCII, and hyphens, become hexadecimal numbers, so that keys stay apart.
func slug(s string) string {
	var out []byte
	for i := range len(s) {
		switch c := s[i]; {
		case c >= 'a' && c <= 'z', c >= 'A' && c <= 'Z', c >= '0' && c <= '9', c == '-':
			out = append(out, c)
		default:
			out = fmt.Appendf(out, "_%02x", c)
		}
	}
	return string(out)
}

// commonPressure is the pressure with most rows of the fluid, the lowest of equals;
// without rows one standard atmosphere.
func (in *Input) commonPressure() float64 {
	obs := in.observations()
	count := map[float64]int{}
	best := 101325.0
	for i := range obs {
		if in.mine(i) {
			count[obs[i].Pressure]++
		}
	}
	for i := range obs {
		P := obs[i].Pressure
		if n := count[P]; n > count[best] || n > 0 && n == count[best] && P < best {
			best = P
		}
	}
	return best
}

// limitAt is the limit at P under the first condition, without its offset.
func (in *Input) limitAt(P float64) (T float64, target nucleation.Target, own bool, err error) {
	c := in.conditions()[0]
	q := c.query
	q.Pressure, q.Method = P, ""
	x, err := in.Model.Predict(q)
	if err != nil {
		q.OrSpinodal = true
		if x, err = in.Model.Predict(q); err != nil {
			return 0, q.Target, q.OwnFlux, err
		}
	}
	return x.Temperature, q.Target, q.OwnFlux, nil
}
