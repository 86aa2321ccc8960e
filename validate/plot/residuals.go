package plot

import (
	"math"

	"limsup/validate"
)

// pascals per unit of the pressure axes.
const mega = 1e6

// Residuals shows the residuals against pressure, reduced temperature and method.
func Residuals(a *validate.Assessment) *Figure {
	obs := a.Data.Observations
	all := func(int) bool { return true }
	residual := func(i int) float64 { return a.Rows[i].Residual }
	zero := Series{Name: "no error", Shape: Level, Y: []float64{0}, Style: Style{Colour: Ink, Width: 0.8}}
	f := &Figure{ID: "residuals", Kind: "residuals", Title: "Residuals",
		Caption: "Measured less predicted limit of each row. Look for a slope or a bow against pressure and reduced temperature (the model misses a dependence) and for a method that stands off to one side (a bias, for which offset/method is the parameter). A good model leaves a level cloud about zero. Open markers are rows that stayed intact: their limit lies above the reading, so that only a large positive residual speaks against the model."}
	label := "(measured − predicted)/K"
	f.Panels = append(f.Panels,
		Panel{Title: "against pressure", X: Axis{Label: "P/MPa"}, Y: Axis{Label: label},
			Series: append([]Series{zero}, pointsByMethod(f, obs, a, all, func(i int) (float64, float64) { return obs[i].Pressure / mega, residual(i) })...)},
		Panel{Title: "against reduced temperature", X: Axis{Label: "T/Tc"}, Y: Axis{Label: label},
			Series: append([]Series{zero}, pointsByMethod(f, obs, a, all, func(i int) (float64, float64) {
				return obs[i].Temperature / obs[i].Record.CriticalTemperature.Value, residual(i)
			})...)})
	names, _ := methods(obs)
	method := methodNames()
	at := map[string]float64{}
	for i, m := range names {
		at[m] = float64(i)
	}
	p := Panel{Title: "by method", X: Axis{Label: label}, Y: Axis{Label: "method", Categories: names},
		Series: pointsByMethod(f, obs, a, all, func(i int) (float64, float64) { return residual(i), at[method(&obs[i])] })}
	for k := range p.Series {
		s := &p.Series[k]
		for i := range s.X {
			s.Shift = append(s.Shift, scatter(i))
		}
	}
	up := zero
	up.Shape, up.X, up.Y = Upright, []float64{0}, nil
	p.Series = append([]Series{up}, p.Series...)
	f.Panels = append(f.Panels, p)
	return f
}

// scatter spreads the points of a category over its width without randomness: the
// fractional parts of multiples of the golden ratio fill an interval evenly.
func scatter(i int) float64 {
	_, part := math.Modf(float64(i+1) * (math.Sqrt(5) - 1) / 2)
	return 0.5 * (part - 0.5)
}

// Prediction shows predicted against measured limits.
func Prediction(a *validate.Assessment) *Figure {
	obs := a.Data.Observations
	lo, hi := math.Inf(1), math.Inf(-1)
	for i := range obs {
		lo = math.Min(lo, math.Min(obs[i].Temperature, a.Rows[i].Predicted))
		hi = math.Max(hi, math.Max(obs[i].Temperature, a.Rows[i].Predicted))
	}
	f := &Figure{ID: "prediction", Kind: "prediction", Title: "Predicted against measured",
		Caption: "Each row once; on the line the prediction equals the reading. A limit is a large number, so that even a poor model looks good here: what counts is the distance from the line, which the residuals show enlarged. Points far off the line name their row when pointed at."}
	if len(obs) == 0 {
		f.Notes = append(f.Notes, "There is no row to show.")
		return f
	}
	f.Panels = []Panel{{X: Axis{Label: "measured T/K"}, Y: Axis{Label: "predicted T/K"},
		Series: append([]Series{{Name: "predicted = measured", X: []float64{lo, hi}, Y: []float64{lo, hi}, Style: Style{Colour: Ink, Width: 0.8}}},
			pointsByMethod(f, obs, a, func(int) bool { return true }, func(i int) (float64, float64) { return obs[i].Temperature, a.Rows[i].Predicted })...)}}
	return f
}
