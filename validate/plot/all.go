package plot

import (
	"fmt"
	"sort"

	"limsup/data/fluid"
	"limsup/fit"
	"limsup/validate"
)

// Kinds lists the kinds of figure in the order in which a report shows them.
func Kinds() []string {
	return []string{"map", "residuals", "prediction", "flux", "isotherm", "potential", "embryo", "profile", "correlation"}
}

// Absent is a figure that could not be drawn, and why.
type Absent struct {
	Kind, Reason string
}

// mapsShown is the number of fluids of which All draws a map.
const mapsShown = 6

// All builds every kind of figure of a model on its measurements: a map of each
// fluid, at most six, those with most rows first; flux, isotherm, potential and
// embryo of the first of them. c is the calibration behind the model, or nil, for
// the reason noProfile. told, if not nil, hears how many of the profiles' points are done.
func All(a *validate.Assessment, c *fit.Calibration, noProfile string, told func(done, total int)) ([]*Figure, []Absent) {
	var out []*Figure
	var absent []Absent
	add := func(kind string, f *Figure, err error) {
		if err == nil {
			err = f.Check()
		}
		if err != nil {
			absent = append(absent, Absent{kind, err.Error()})
			return
		}
		out = append(out, f)
	}
	records := ByRows(a.Data.Observations)
	for i, r := range records {
		if i == mapsShown {
			absent = append(absent, Absent{"map", fmt.Sprintf("%d further fluids with fewer rows have no map here; limsup plot map --fluid draws them one by one", len(records)-mapsShown)})
			break
		}
		f, err := LimitMap(&Input{a.Model, r, a})
		add("map", f, err)
	}
	add("residuals", Residuals(a), nil)
	add("prediction", Prediction(a), nil)
	if len(records) > 0 {
		in := &Input{a.Model, records[0], a}
		f, err := Flux(in, State{})
		add("flux", f, err)
		f, err = Isotherm(in, State{})
		add("isotherm", f, err)
		f, err = Potential(in, State{})
		add("potential", f, err)
		f, err = Embryo(in, State{})
		add("embryo", f, err)
	}
	if c != nil {
		f, err := Profiles(c, told)
		add("profile", f, err)
	} else {
		absent = append(absent, Absent{"profile", noProfile})
	}
	f, err := Correlation(a.Model)
	add("correlation", f, err)
	return out, absent
}

// ByRows returns the fluids of observations, those with most rows first, then by key.
func ByRows(obs []fit.Observation) []*fluid.Record {
	count := map[string]int{}
	var out []*fluid.Record
	for i := range obs {
		if count[obs[i].Record.Key]++; count[obs[i].Record.Key] == 1 {
			out = append(out, obs[i].Record)
		}
	}
	sort.SliceStable(out, func(i, j int) bool {
		a, b := out[i].Key, out[j].Key
		if count[a] != count[b] {
			return count[a] > count[b]
		}
		return a < b
	})
	return out
}
