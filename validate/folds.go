package validate

import (
	"fmt"
	"math"
	"math/rand/v2"
	"sort"
	"strconv"

	"limsup/fit"
)

// Folds assigns each observation to the part of the data that is left out together
// with it.
type Folds struct {
	Kind  string   // "rows", "fluid", "method", "batch", "pressure", or a number
	Names []string // of the folds
	Of    []int    // per observation: index into Names
}

// FoldKinds lists the words that NewFolds takes besides a number.
func FoldKinds() []string { return []string{"rows", "fluid", "method", "batch", "pressure"} }

// DefaultFolds is "fluid" for data of two or more fluids, else "rows".
func DefaultFolds(obs []fit.Observation) string {
	for i := range obs {
		if obs[i].Record.Key != obs[0].Record.Key {
			return "fluid"
		}
	}
	return "rows"
}

// pressureBand is how far apart, relatively, two pressures may be and still count
// as one: set pressures scatter by less.
const pressureBand = 0.02

// NewFolds divides observations: each row, each fluid, method, batch or pressure on
// its own, or K parts of nearly equal size drawn with the seed.
//
// Errors: *fit.OptionError for an unknown word, a K outside 2…n, or data of one
// fold.
func NewFolds(kind string, obs []fit.Observation, seed uint64) (*Folds, error) {
	f := &Folds{Kind: kind, Of: make([]int, len(obs))}
	var label func(i int) string
	switch kind {
	case "rows":
		for i := range obs {
			f.Of[i] = i
			f.Names = append(f.Names, obs[i].At())
		}
		return f.checked()
	case "fluid":
		label = func(i int) string { return obs[i].Record.Key }
	case "method":
		label = func(i int) string { return obs[i].Method }
	case "batch":
		label = func(i int) string { return obs[i].Batch }
	case "pressure":
		bands := pressureBands(obs)
		label = func(i int) string { return bands[i] }
	default:
		k, err := strconv.Atoi(kind)
		if err != nil {
			return nil, &fit.OptionError{Option: "folds", Value: kind, Want: "rows, fluid, method, batch, pressure or a number"}
		}
		if k < 2 || k > len(obs) {
			return nil, &fit.OptionError{Option: "folds", Value: kind, Want: fmt.Sprintf("2 to %d, the number of usable rows", len(obs))}
		}
		order := rand.New(rand.NewPCG(seed, 0x6c696d737570)).Perm(len(obs))
		for position, i := range order {
			f.Of[i] = position % k
		}
		for j := range k {
			f.Names = append(f.Names, fmt.Sprintf("part %d of %d", j+1, k))
		}
		return f.checked()
	}
	at := map[string]int{}
	for i := range obs {
		g := label(i)
		if g == "" {
			g = "(none)"
		}
		j, ok := at[g]
		if !ok {
			j = len(f.Names)
			at[g] = j
			f.Names = append(f.Names, g)
		}
		f.Of[i] = j
	}
	return f.checked()
}

func (f *Folds) checked() (*Folds, error) {
	if len(f.Names) < 2 {
		return nil, &fit.OptionError{Option: "folds", Value: f.Kind, Want: "data that can be divided: here there is only one"}
	}
	return f, nil
}

// pressureBands names the pressure of each observation, joining neighbours closer
// than pressureBand.
func pressureBands(obs []fit.Observation) []string {
	order := make([]int, len(obs))
	for i := range order {
		order[i] = i
	}
	sort.SliceStable(order, func(a, b int) bool { return obs[order[a]].Pressure < obs[order[b]].Pressure })
	names := make([]string, len(obs))
	name, last := "", math.Inf(-1)
	for _, i := range order {
		P := obs[i].Pressure
		if P-last > pressureBand*math.Abs(P) {
			name = fmt.Sprintf("%.4g kPa", P/1e3)
		}
		names[i], last = name, P
	}
	return names
}
