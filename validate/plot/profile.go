package plot

import (
	"fmt"
	"math"
	"sort"

	"gonum.org/v1/gonum/stat/distuv"

	"limsup/fit"
)

// Profiles shows for each location parameter how far twice the log likelihood
// falls when the parameter is held away from its estimate and the other locations are
// tuned anew, beside the parabola of the standard uncertainty. The curve and its level
// are those of fit.Calibration.Profile. told, if not nil, hears how
// many of the points are done.
//
// Errors: *EmptyError without a parameter that has an uncertainty.
func Profiles(c *fit.Calibration, told func(done, total int)) (*Figure, error) {
	f := &Figure{ID: "profile", Kind: "profile", Title: "Profile likelihoods",
		Caption: "How much worse the data fit, in units of −2Δln L, when one parameter is held and the others are tuned again, spreads apart. Where the curve crosses the level line lie the ends of a 95 % interval. A curve that follows the dashed parabola vindicates the standard uncertainty; a lopsided or flat one does not, and then the interval of the curve is to be used."}
	var names []int
	for i := range c.Parameters[:c.Locations] {
		if e := &c.Parameters[i]; e.HasU && e.Role == fit.RoleValue {
			names = append(names, i)
		}
	}
	if len(names) == 0 {
		return nil, &EmptyError{Figure: f.ID, About: c.Plan.Variant.Name(), Reason: "no estimate of a location has an uncertainty"}
	}
	if len(names) > most {
		f.Notes = append(f.Notes, fmt.Sprintf("The first %d of %d parameters are shown.", most, len(names)))
		names = names[:most]
	}
	at := sides(len(c.Data.Observations))
	total := len(names) * (len(at[0]) + len(at[1]))
	for n, i := range names {
		e := &c.Parameters[i]
		before := n * total / len(names)
		points, failed := profile(c, e, at, func(done int) {
			if told != nil {
				told(before+done, total)
			}
		})
		if failed != nil {
			f.Notes = append(f.Notes, fmt.Sprintf("The profile of %s cannot be followed further: %s.", Visible(e.Label()), failed))
		}
		if len(points.X) < 3 {
			continue
		}
		curve := join(&points, e.Value)
		parabola := Series{Name: "parabola of the standard uncertainty", Style: Style{Colour: Quiet, Dash: Dashed}}
		for _, x := range linear(curve.X[0], curve.X[len(curve.X)-1], 41) {
			z := (x - e.Value) / e.U
			parabola.X, parabola.Y = append(parabola.X, x), append(parabola.Y, z*z)
		}
		unit := e.Unit
		label := Visible(e.Label())
		if unit != "" && unit != "1" {
			label += "/" + unit
		}
		f.Panels = append(f.Panels, Panel{Title: Visible(e.Label()), X: Axis{Label: label}, Y: Axis{Label: "−2Δln L"}, Series: []Series{
			{Name: "95 % level", Shape: Level, Y: []float64{level(c, e)}, Style: Style{Colour: Ink, Dash: Dotted}},
			parabola, curve, points}})
	}
	if len(f.Panels) == 0 {
		return nil, &EmptyError{Figure: f.ID, About: c.Plan.Variant.Name(), Reason: "no profile has three points"}
	}
	return f, nil
}

// sides are the distances from an estimate at which it is held, in units of its
// standard uncertainty, outwards. Many rows take long, and their profile is near to
// its parabola, so that fewer points, interpolated by join, show it as well.
func sides(rows int) [2][]float64 {
	if rows > Many {
		return [2][]float64{{0, 1.25, 2.5}, {-1.25, -2.5}}
	}
	return [2][]float64{{0, 0.5, 1, 1.5, 2, 2.5}, {-0.5, -1, -1.5, -2, -2.5}}
}

// level is the height at which a profile ends a 95 % interval: t² of Student's law.
func level(c *fit.Calibration, e *fit.Estimate) float64 {
	ν := e.Degrees
	if ν == 0 {
		ν = float64(c.Degrees)
	}
	t := distuv.StudentsT{Mu: 0, Sigma: 1, Nu: ν}.Quantile(0.975)
	return t * t
}

// profile follows the likelihood of one parameter to both sides of its estimate; told
// hears how many points are done. failed is why the profile ends early, or nil.
func profile(c *fit.Calibration, e *fit.Estimate, sides [2][]float64, told func(done int)) (points Series, failed error) {
	points = Series{Name: "tuned with the parameter held", Shape: Points, Style: Style{Colour: First, Marker: Circle}}
	done := 0
	for _, side := range sides {
		var values []float64
		for _, k := range side {
			if x := e.Value + k*e.U; x > e.Lower && x < e.Upper {
				values = append(values, x)
			}
		}
		rises, err := c.ProfileCurve(e.Label(), values, func(k int) { told(done + k) })
		if err != nil {
			failed = err
		}
		done += len(side)
		for k, r := range rises {
			points.X, points.Y = append(points.X, values[k]), append(points.Y, 2*r)
		}
	}
	sort.Sort(byX(points))
	return points, failed
}

// byX orders the points of a series from left to right.
type byX Series

func (s byX) Len() int           { return len(s.X) }
func (s byX) Less(i, j int) bool { return s.X[i] < s.X[j] }
func (s byX) Swap(i, j int) {
	s.X[i], s.X[j] = s.X[j], s.X[i]
	s.Y[i], s.Y[j] = s.Y[j], s.Y[i]
}

// join draws a curve through the points of a profile. The root of a profile with
// the sign of the distance from the estimate is nearly a straight line, so it is
// interpolated, and squared again (D. M. Bates and D. G. Watts, Nonlinear Regression
// Analysis and its Applications, 1988, chapter 6, from memory).
func join(points *Series, estimate float64) Series {
	curve := Series{Name: "profile", Style: Style{Colour: First}}
	root := func(i int) float64 {
		return math.Copysign(math.Sqrt(points.Y[i]), points.X[i]-estimate)
	}
	const parts = 8
	for i := range points.X[1:] {
		for k := range parts {
			t := float64(k) / parts
			z := (1-t)*root(i) + t*root(i+1)
			curve.X, curve.Y = append(curve.X, (1-t)*points.X[i]+t*points.X[i+1]), append(curve.Y, z*z)
		}
	}
	last := len(points.X) - 1
	curve.X, curve.Y = append(curve.X, points.X[last]), append(curve.Y, points.Y[last])
	return curve
}
