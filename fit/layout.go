package fit

import (
	"fmt"
	"math"
	"slices"
	"sort"
)

// Role tells what a free parameter is.
type Role string

// The roles of free parameters.
const (
	RoleValue      Role = "value"         // a parameter, shared or of one group
	RolePoolMean   Role = "pooled mean"   // the mean that groups share
	RolePoolSpread Role = "pooled spread" // the standard deviation of the groups about it
)

// Free is one free parameter of a calibration.
type Free struct {
	Name  string
	By    By
	Group string // "" for a shared parameter
	Role  Role
	Unit  string

	Start, Lower, Upper float64

	pool int // index into layout.pools of a pooled value or mean, else -1
}

// Label names a parameter in messages: "slope[n-pentane]".
func (f *Free) Label() string {
	switch {
	case f.Role != RoleValue:
		return f.Name + "[" + string(f.Role) + "]"
	case f.Group != "":
		return f.Name + "[" + f.Group + "]"
	}
	return f.Name
}

// pool ties group values to their shared normal distribution.
type pool struct {
	mean   int   // index into θ, or −1: the mean is zero by definition
	spread int   // index into ψ
	values []int // indices into θ
}

// layout maps observations to free parameters: θ are the locations, ψ the spreads.
type layout struct {
	theta []Free
	psi   []Free
	pools []pool

	index  [][locations]int32   // per observation: index into θ, or -1
	fixed  [][locations]float64 // per observation: the value where index is -1
	spread []int32              // per observation: index into ψ, or -1
	sd     []float64            // per observation: the spread where spread is -1

	cellOf []int32 // per observation
	cells  []cell

	degrees    int               // index into ψ of the degrees of freedom of the noise, or −1
	references map[string]string // of offsets: parameter scope → group held at zero
	priors     []priorOn
}

// cell is a combination of fluid and parameters that observations share, so that
// a fluid is built once for all of them.
type cell struct {
	first int // an observation of the cell
	index [physicals]int32
}

// priorOn is a prior on one element of θ.
type priorOn struct {
	at           int
	mean, spread float64
}

// TooFewError reports data that cannot determine the free parameters.
type TooFewError struct {
	Rows, Parameters int
	Reason           string
}

func (e *TooFewError) Error() string {
	return fmt.Sprintf("calibration: %d usable rows for %d free parameters: %s", e.Rows, e.Parameters, e.Reason)
}

// newLayout lays out the free parameters of a complete plan over observations.
func newLayout(p *Plan, obs []Observation) (*layout, error) {
	n := len(obs)
	l := &layout{index: make([][locations]int32, n), fixed: make([][locations]float64, n),
		spread: make([]int32, n), sd: make([]float64, n), cellOf: make([]int32, n), degrees: -1, references: map[string]string{}}
	for i, name := range locationNames {
		if err := l.place(p, obs, name, func(o, at int, value float64) {
			l.index[o][i] = int32(at)
			l.fixed[o][i] = value
		}); err != nil {
			return nil, err
		}
	}
	if err := l.placeSpread(p, obs); err != nil {
		return nil, err
	}
	if err := l.placeDegrees(p); err != nil {
		return nil, err
	}
	for _, r := range p.Priors {
		hit := false
		for at, f := range l.theta {
			if f.Name == r.Name && f.Role == RoleValue && (r.Group == "" || r.Group == f.Group) {
				l.priors = append(l.priors, priorOn{at, r.Mean, r.Spread})
				hit = true
			}
		}
		if !hit {
			return nil, &OptionError{"prior of " + r.Name, r.Group, "a parameter that is tuned (and a group that the data hold)"}
		}
	}
	l.buildCells(obs)
	return l, nil
}

// groups returns the groups of the observations in ascending order and their counts.
func groups(obs []Observation, by By) ([]string, map[string]int) {
	count := map[string]int{}
	for i := range obs {
		count[groupOf(by, &obs[i].Row)]++
	}
	names := make([]string, 0, len(count))
	for g := range count {
		names = append(names, g)
	}
	sort.Strings(names)
	return names, count
}

// place lays out one location parameter.
func (l *layout) place(p *Plan, obs []Observation, name string, set func(o, at int, value float64)) error {
	q, err := parameterOf(name, &p.Variant)
	if err != nil {
		return err
	}
	t, free := p.term(name)
	if !free {
		for o := range obs {
			set(o, -1, p.value(q, ""))
		}
		return nil
	}
	lo, hi := p.bounds(q)
	names, count := groups(obs, t.By)
	reference := ""
	if name == Offset && t.By != Shared && len(names) < 2 {
		return &OptionError{"tune", t.String(), fmt.Sprintf("data with two or more of its groups; here all rows have %s %q", t.By, names[0])}
	}
	if name == Offset && t.By != Shared && !t.Pooled {
		reference = names[0]
		for _, g := range names {
			if count[g] > count[reference] {
				reference = g
			}
		}
		if r := p.References[string(t.By)]; count[r] > 0 {
			reference = r
		}
		l.references[string(t.By)] = reference
	}
	at := map[string]int{}
	for _, g := range names {
		if g == reference && reference != "" {
			at[g] = -1
			continue
		}
		at[g] = len(l.theta)
		start := p.value(q, g)
		if !(start >= lo && start <= hi) {
			return &OptionError{"start of " + name, fmt.Sprintf("%.10g", start), fmt.Sprintf("%.10g to %.10g", lo, hi)}
		}
		l.theta = append(l.theta, Free{Name: name, By: t.By, Group: g, Role: RoleValue, Unit: q.Unit, Start: start, Lower: lo, Upper: hi, pool: -1})
	}
	if t.Pooled {
		l.addPool(q, t, names, at, lo, hi, p.value(q, ""))
	}
	for o := range obs {
		g := groupOf(t.By, &obs[o].Row)
		value := 0.0
		set(o, at[g], value)
	}
	return nil
}

// addPool adds the mean and the spread of pooled groups. Offsets are scattered about
// zero: their mean is the level of all readings, which other parameters hold.
func (l *layout) addPool(q Parameter, t Term, names []string, at map[string]int, lo, hi, start float64) {
	k := len(l.pools)
	pl := pool{mean: -1, spread: len(l.psi)}
	for _, g := range names {
		if i := at[g]; i >= 0 {
			pl.values = append(pl.values, i)
			l.theta[i].pool = k
		}
	}
	if t.Name != Offset {
		pl.mean = len(l.theta)
		l.theta = append(l.theta, Free{Name: t.Name, By: t.By, Role: RolePoolMean, Unit: q.Unit, Start: start, Lower: lo, Upper: hi, pool: k})
	}
	width := hi - lo
	l.psi = append(l.psi, Free{Name: t.Name, By: t.By, Role: RolePoolSpread, Unit: q.Unit, Start: 0.05 * width, Lower: 1e-6 * width, Upper: width, pool: k})
	l.pools = append(l.pools, pl)
}

func (l *layout) placeSpread(p *Plan, obs []Observation) error {
	q, err := parameterOf(Spread, &p.Variant)
	if err != nil {
		return err
	}
	t, free := p.term(Spread)
	if !free {
		for o := range obs {
			l.spread[o], l.sd[o] = -1, p.value(q, "")
		}
		return nil
	}
	lo, hi := p.bounds(q)
	names, _ := groups(obs, t.By)
	at := map[string]int{}
	for _, g := range names {
		at[g] = len(l.psi)
		l.psi = append(l.psi, Free{Name: Spread, By: t.By, Group: g, Role: RoleValue, Unit: q.Unit, Start: p.value(q, g), Lower: lo, Upper: hi, pool: -1})
	}
	for o := range obs {
		l.spread[o] = int32(at[groupOf(t.By, &obs[o].Row)])
	}
	return nil
}

// placeDegrees lays out the degrees of freedom of Student noise.
func (l *layout) placeDegrees(p *Plan) error {
	t, free := p.term(DegreesOfNoise)
	if !free {
		return nil
	}
	if p.Noise.Kind != Student {
		return &OptionError{"tune", t.String(), "student noise; " + string(p.Noise.Kind) + " noise has no degrees of freedom"}
	}
	q, err := parameterOf(DegreesOfNoise, &p.Variant)
	if err != nil {
		return err
	}
	lo, hi := p.bounds(q)
	l.degrees = len(l.psi)
	l.psi = append(l.psi, Free{Name: DegreesOfNoise, Role: RoleValue, Unit: q.Unit, Start: clamp(p.Noise.Degrees, lo, hi), Lower: lo, Upper: hi, pool: -1})
	return nil
}

// buildCells groups the observations by fluid and parameters.
func (l *layout) buildCells(obs []Observation) {
	type key struct {
		fluid string
		index [physicals]int32
	}
	at := map[key]int32{}
	for o := range obs {
		k := key{fluid: obs[o].Record.Key}
		copy(k.index[:], l.index[o][:physicals])
		c, ok := at[k]
		if !ok {
			c = int32(len(l.cells))
			at[k] = c
			l.cells = append(l.cells, cell{o, k.index})
		}
		l.cellOf[o] = c
	}
}

// values are the parameters of a cell at θ.
func (l *layout) values(c *cell, theta []float64) Values {
	var v Values
	for i, f := range v.fields() {
		if at := c.index[i]; at >= 0 {
			*f = theta[at]
		} else {
			*f = l.fixed[c.first][i]
		}
	}
	return v
}

// offset is the method bias of an observation at θ.
func (l *layout) offset(o int, theta []float64) float64 {
	if at := l.index[o][locOffset]; at >= 0 {
		return theta[at]
	}
	return l.fixed[o][locOffset]
}

// sdOf is the spread of an observation at ψ.
func (l *layout) sdOf(o int, psi []float64) float64 {
	if at := l.spread[o]; at >= 0 {
		return psi[at]
	}
	return l.sd[o]
}

// starts are the start values of free parameters.
func starts(f []Free) []float64 {
	x := make([]float64, len(f))
	for i := range f {
		x[i] = f[i].Start
	}
	return x
}

// touched tells which elements of θ influence at least one observation.
func (l *layout) touched(obs []Observation) []bool {
	t := make([]bool, len(l.theta))
	for o := range l.index {
		for i, at := range l.index[o] {
			if at < 0 || i == locThresh && obs[o].OwnFlux {
				continue
			}
			t[at] = true
		}
	}
	for _, p := range l.pools {
		if p.mean >= 0 && slices.ContainsFunc(p.values, func(i int) bool { return t[i] }) {
			t[p.mean] = true
		}
	}
	return t
}

// finite guards the numbers handed to the search.
func finite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }
