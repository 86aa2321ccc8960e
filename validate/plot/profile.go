package plot

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/gonum/stat/distuv"

	"limsup/fit"
)

// heldWidth is the part of a standard uncertainty within which a profiled parameter
// is held. The hold adds (shift/width)² to twice the objective; the search balances
// it against the slope of the profile, about 5/u at 2.5 u, so that the shift is about
// 2.5·heldWidth² u, and its error in −2Δln L about 1e-5.
const heldWidth = 1e-3

// Profiles shows for each location parameter how far twice the log likelihood
// falls when the parameter is held away from its estimate and all others are tuned
// anew, beside the parabola of the standard uncertainty. told, if not nil, hears how
// many of the points are done.
//
// Errors: *EmptyError without a parameter that has an uncertainty.
func Profiles(c *fit.Calibration, told func(done, total int)) (*Figure, error) {
	f := &Figure{ID: "profile", Kind: "profile", Title: "Profile likelihoods",
		Caption: "How much worse the data fit, in units of −2Δln L, when one parameter is held and all others are tuned again. Where the curve crosses the level line lie the ends of a 95 % interval. A curve that follows the dashed parabola vindicates the standard uncertainty; a lopsided or flat one does not, and then the interval of the curve is to be used."}
	limit := distuv.ChiSquared{K: 1}.Quantile(0.95)
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
			f.Notes = append(f.Notes, fmt.Sprintf("The profile of %s ends where the tuning with it held has no smooth answer: %s.", Visible(e.Label()), failed))
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
			{Name: "95 % level", Shape: Level, Y: []float64{limit}, Style: Style{Colour: Ink, Dash: Dotted}},
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

// profile tunes the plan with one parameter held on both sides of its estimate; told
// hears how many are done. failed is why the profile ends early, or nil.
func profile(c *fit.Calibration, e *fit.Estimate, sides [2][]float64, told func(done int)) (points Series, failed error) {
	points = Series{Name: "tuned with the parameter held", Shape: Points, Style: Style{Colour: First, Marker: Circle}}
	type point struct{ x, drop float64 }
	var found []point
	done := 0
	for _, side := range sides {
		warm := c
		for _, k := range side {
			told(done)
			done++
			x := e.Value + k*e.U
			if x <= e.Lower || x >= e.Upper {
				continue
			}
			held, err := hold(c, e, x, warm)
			if err == nil {
				err = smooth(c, held)
			}
			if err != nil {
				failed = err
				break
			}
			warm = held
			found = append(found, point{x, -2 * held.LogLik})
		}
	}
	slices.SortFunc(found, func(a, b point) int { return cmp.Compare(a.x, b.x) })
	lowest := math.Inf(1)
	for _, p := range found {
		lowest = math.Min(lowest, p.drop)
	}
	for _, p := range found {
		points.X, points.Y = append(points.X, p.x), append(points.Y, p.drop-lowest)
	}
	return points, failed
}

// unsmoothError says why a held tuning is no point of a profile.
type unsmoothError string

func (e unsmoothError) Error() string { return string(e) }

// smooth refuses a tuning that did not converge, or in which the spinodal stands in
// for the kinetic limit of a row that had one at the estimates: there the likelihood
// is that of another model.
func smooth(c, held *fit.Calibration) error {
	if !held.Converged {
		return unsmoothError("the search does not converge")
	}
	if c.Plan.Variant.Limit == fit.Kinetic {
		for i := range held.Rows {
			if held.Rows[i].Log10Flux == 0 && c.Rows[i].Log10Flux != 0 {
				return unsmoothError("the flux of " + Visible(c.Data.Observations[i].Record.Key) + " does not reach its target before the spinodal")
			}
		}
	}
	return nil
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

// hold tunes with a parameter held at x by a prior that is much narrower than its
// uncertainty, which works for one value of a group as well.
func hold(c *fit.Calibration, e *fit.Estimate, x float64, warm *fit.Calibration) (*fit.Calibration, error) {
	p := c.Plan
	p.Priors = append(slices.Clone(p.Priors), fit.Prior{Name: e.Name, Group: e.Group, Mean: x, Spread: heldWidth * e.U})
	return fit.Calibrate(c.Data, p, fit.Options{Warm: warm})
}
