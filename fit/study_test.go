package fit_test

import (
	"errors"
	"flag"
	"fmt"
	"math"
	"math/rand/v2"
	"runtime"
	"sync"
	"testing"

	"limsup/data/fluid"
	"limsup/data/measure"
	"limsup/fit"
	"limsup/fit/leastsq"
)

// Simulation studies: data are drawn from a known truth many times, and the share of
// 95 % intervals that hold it is counted. The test runs few replicates; with
// -study 1000 the band is the one that the tool promises, 93 % to 97 %.
// DEVELOPERS.md records a run.
var (
	study     = flag.Int("study", 0, "`replicates` of the long simulation studies, e.g. 1000")
	studySeed = flag.Uint64("study.seed", 1, "seed of the simulation studies")
)

// counted is how often the intervals of one quantity held the truth.
type counted struct{ inside, n int }

// studyCase draws one data set and returns, for each quantity, whether its interval
// holds the truth.
type studyCase struct {
	name string
	run  func(t testing.TB, lib *fluid.Library, rng *rand.Rand) (map[string]bool, error)
}

var studyFluids = []string{"n-pentane", "benzene", "r-134a", "n-hexane"}

// studySet are rows without readings: four fluids, three pressures, repeats each.
func studySet(repeats int, add func(r *measure.Row, k int)) *measure.Set {
	set := &measure.Set{}
	for _, key := range studyFluids {
		for _, P := range []float64{101325, 4e5, 9e5} {
			for k := range repeats {
				r := measure.Row{File: "study", Line: len(set.Rows) + 1, Fluid: key, Key: key, Pressure: P, UTemperature: 0.3, HasUTemperature: true, Temperature: 1}
				if add != nil {
					add(&r, k)
				}
				set.Rows = append(set.Rows, r)
			}
		}
	}
	return set
}

// fill puts limits of the model plus errors into the rows.
func fillStudy(lib *fluid.Library, m *fit.Model, set *measure.Set, e func(x fit.Prediction, s fit.Sensitivity) float64) error {
	for i := range set.Rows {
		rec, err := lib.Find(set.Rows[i].Key)
		if err != nil {
			return err
		}
		o := fit.Observation{Row: set.Rows[i], Record: rec}
		s, err := m.Sensitivity(o.FluxQuery())
		if err != nil {
			return err
		}
		set.Rows[i].Temperature = s.Temperature + e(s.Prediction, s)
	}
	return nil
}

// calibrateStudy tunes the plan to one drawn set.
func calibrateStudy(lib *fluid.Library, set *measure.Set, p fit.Plan) (*fit.Calibration, error) {
	d, err := fit.Prepare(set, lib, p)
	if err != nil {
		return nil, err
	}
	return fit.Calibrate(d, p, fit.Options{Workers: 1})
}

// checkStudy calibrates and looks where the truths are: of parameters, of the limit
// of a state that was not measured, and of a new reading there.
func checkStudy(lib *fluid.Library, set *measure.Set, truth *fit.Model, p fit.Plan, names []string, reading func(limit float64, κ float64) float64, more func(q *fit.Query)) (map[string]bool, error) {
	c, err := calibrateStudy(lib, set, p)
	if err != nil {
		return nil, err
	}
	out := map[string]bool{}
	for i := range c.Parameters {
		e := &c.Parameters[i]
		for _, n := range names {
			if e.Label() == n {
				q := fit.Query{}
				v := truth.Values(&q)
				want := map[string]float64{fit.Threshold: v.Threshold, fit.Prefactor: v.Prefactor, fit.Slope: v.Slope, fit.SurfaceTension: v.SurfaceTension}[n]
				lo, hi, ok := e.Interval(0.95)
				out[n] = ok && lo <= want && want <= hi
			}
		}
	}
	rec, err := lib.Find("n-pentane")
	if err != nil {
		return nil, err
	}
	q := fit.Query{Record: rec, Pressure: 2.5e5, OrSpinodal: true}
	if more != nil {
		more(&q)
	}
	at, err := truth.Sensitivity(q)
	if err != nil {
		return nil, err
	}
	x, err := c.Model().Predict(q)
	if err != nil {
		return nil, err
	}
	out["limit"] = x.HasU && x.LimitLow <= at.Temperature && at.Temperature <= x.LimitHigh
	if reading != nil {
		y := reading(at.Temperature, at.Steepness)
		out["reading"] = x.HasU && x.Low <= y && y <= x.High
	}
	return out, nil
}

func untuned(settings ...fit.Setting) *fit.Model {
	m, err := fit.Untuned(fit.DefaultVariant(), settings...)
	if err != nil {
		panic(err)
	}
	return m
}

var studyCases = []studyCase{
	{"gaussian", func(t testing.TB, lib *fluid.Library, rng *rand.Rand) (map[string]bool, error) {
		truth := untuned(fit.Setting{Name: fit.Threshold, Value: 11}, fit.Setting{Name: fit.Slope, Value: 0.97})
		set := studySet(2, nil)
		e := func() float64 { return math.Hypot(0.3, 0.6) * rng.NormFloat64() }
		if err := fillStudy(lib, truth, set, func(fit.Prediction, fit.Sensitivity) float64 { return e() }); err != nil {
			return nil, err
		}
		return checkStudy(lib, set, truth, fit.Plan{Terms: terms(t, "threshold", "slope")}, []string{"threshold", "slope"},
			func(T, _ float64) float64 { return T + 0.6*rng.NormFloat64() }, nil)
	}},
	{"gaussian, a dozen rows, by profile", func(t testing.TB, lib *fluid.Library, rng *rand.Rand) (map[string]bool, error) {
		wanted := map[string]float64{fit.Threshold: 11, fit.Slope: 0.97}
		truth := untuned(fit.Setting{Name: fit.Threshold, Value: 11}, fit.Setting{Name: fit.Slope, Value: 0.97})
		set := studySet(1, nil)
		if err := fillStudy(lib, truth, set, func(fit.Prediction, fit.Sensitivity) float64 { return math.Hypot(0.3, 0.6) * rng.NormFloat64() }); err != nil {
			return nil, err
		}
		p := fit.Plan{Terms: terms(t, "threshold", "slope")}
		c, err := calibrateStudy(lib, set, p)
		if err != nil {
			return nil, err
		}
		out := map[string]bool{}
		for name, want := range wanted {
			r, err := c.Profile(name, 0.95)
			var lower *leastsq.LowerMinimumError
			if errors.As(err, &lower) && len(c.Warnings) > 0 {
				continue // estimates against the spinodal, and said so: no interval is given
			}
			if err != nil {
				return nil, err
			}
			out[name] = (r.LowerEnd == leastsq.Unbounded || r.Lower <= want) && (r.UpperEnd == leastsq.Unbounded || want <= r.Upper)
		}
		return out, nil
	}},
	{"student, one row in ten with five times the error", func(t testing.TB, lib *fluid.Library, rng *rand.Rand) (map[string]bool, error) {
		truth := untuned(fit.Setting{Name: fit.Threshold, Value: 11}, fit.Setting{Name: fit.Slope, Value: 0.97})
		set := studySet(3, nil)
		e := func() float64 {
			s := math.Hypot(0.3, 0.6)
			if rng.IntN(10) == 0 {
				s *= 5
			}
			return s * rng.NormFloat64()
		}
		if err := fillStudy(lib, truth, set, func(fit.Prediction, fit.Sensitivity) float64 { return e() }); err != nil {
			return nil, err
		}
		return checkStudy(lib, set, truth, fit.Plan{Terms: terms(t, "threshold", "slope"), Noise: fit.Noise{Kind: fit.Student}}, []string{"threshold", "slope"}, nil, nil)
	}},
	{"survival", func(t testing.TB, lib *fluid.Library, rng *rand.Rand) (map[string]bool, error) {
		truth := untuned(fit.Setting{Name: fit.Prefactor, Value: -1}, fit.Setting{Name: fit.Slope, Value: 0.97})
		set := studySet(3, func(r *measure.Row, k int) {
			r.Volume, r.HeatingRate, r.UTemperature = 1e-10, 1, 0.1
			if k == 1 {
				r.Volume, r.HeatingRate = 1e-15, 1e5
			}
		})
		draw := func(κ float64) float64 {
			return math.Log(rng.ExpFloat64()/math.Ln2)/κ + 0.1*rng.NormFloat64() + 0.15*rng.NormFloat64()
		}
		if err := fillStudy(lib, truth, set, func(_ fit.Prediction, s fit.Sensitivity) float64 { return draw(s.Steepness) }); err != nil {
			return nil, err
		}
		return checkStudy(lib, set, truth, fit.Plan{Terms: terms(t, "prefactor", "slope"), Noise: fit.Noise{Kind: fit.Survival}}, []string{"prefactor", "slope"},
			func(T, κ float64) float64 {
				return T + math.Log(rng.ExpFloat64()/math.Ln2)/κ + 0.15*rng.NormFloat64()
			},
			func(q *fit.Query) {
				o := fit.Observation{Row: measure.Row{Volume: 1e-10, HeatingRate: 1}, Record: q.Record}
				f := o.FluxQuery()
				q.Target, q.OwnFlux, q.Hazard = f.Target, f.OwnFlux, f.Hazard
			})
	}},
}

// replicates runs a job for each replicate on all processors, each with its own
// random numbers.
func replicates(n int, job func(k int, rng *rand.Rand)) {
	var wg sync.WaitGroup
	next := make(chan int)
	for range runtime.GOMAXPROCS(0) {
		wg.Add(1)
		go func() {
			defer wg.Done()
			for k := range next {
				job(k, rand.New(rand.NewPCG(*studySeed, uint64(k))))
			}
		}()
	}
	for k := range n {
		next <- k
	}
	close(next)
	wg.Wait()
}

func TestCoverage(t *testing.T) {
	lib := library(t)
	for _, tt := range studyCases {
		t.Run(tt.name, func(t *testing.T) {
			n := 100
			// three standard deviations of a binomial share
			lo, hi := 0.95-3*math.Sqrt(0.95*0.05/float64(n)), 1.0
			if *study > 0 {
				n, lo, hi = *study, 0.93, 0.97
			}
			got := make([]map[string]bool, n)
			errs := make([]error, n)
			replicates(n, func(k int, rng *rand.Rand) { got[k], errs[k] = tt.run(t, lib, rng) })
			total := map[string]counted{}
			failed := 0
			for k := range got {
				if errs[k] != nil {
					failed++
					t.Logf("replicate %d: %v", k, errs[k])
				}
				for name, in := range got[k] {
					c := total[name]
					c.n++
					if in {
						c.inside++
					}
					total[name] = c
				}
			}
			if failed > 0 {
				t.Errorf("%d of %d replicates failed", failed, n)
			}
			text := ""
			for name, c := range total {
				share := float64(c.inside) / float64(c.n)
				text += fmt.Sprintf(" %s %.1f %%", name, 100*share)
				if share < lo || share > hi {
					t.Errorf("%s: %d of %d intervals hold the truth", name, c.inside, c.n)
				}
			}
			t.Log(text)
		})
	}
}

// TestPooledSpread: over many data sets the estimated variance between fluids of a
// pooled slope averages to the truth, and its root, the spread, within 10 %.
func TestPooledSpread(t *testing.T) {
	lib := library(t)
	const τ = 0.2 // 1 K, beside 0.34 K of the mean of three readings
	keys := []string{"n-pentane", "benzene", "r-134a", "n-hexane", "n-heptane", "cyclohexane", "toluene", "diethyl-ether", "methanol", "propane", "n-butane", "isobutane"}
	n := 40
	if *study > 0 {
		n = *study
	}
	squares, spreads, inside := make([]float64, n), make([]float64, n), make([]bool, n)
	errs := make([]error, n)
	replicates(n, func(k int, rng *rand.Rand) {
		set := &measure.Set{}
		fill := func() error {
			for _, key := range keys {
				truth := untuned(fit.Setting{Name: fit.Slope, Value: 1 + τ*rng.NormFloat64()})
				part := &measure.Set{}
				for _, P := range []float64{101325, 4e5, 9e5} {
					part.Rows = append(part.Rows, measure.Row{File: "study", Line: len(set.Rows) + len(part.Rows) + 1, Fluid: key, Key: key, Pressure: P, UTemperature: 0.3, HasUTemperature: true, Temperature: 1})
				}
				if err := fillStudy(lib, truth, part, func(fit.Prediction, fit.Sensitivity) float64 { return math.Hypot(0.3, 0.5) * rng.NormFloat64() }); err != nil {
					return err
				}
				set.Rows = append(set.Rows, part.Rows...)
			}
			return nil
		}
		if errs[k] = fill(); errs[k] != nil {
			return
		}
		p := fit.Plan{Terms: terms(t, "slope/fluid/pooled"), Fixed: []fit.Setting{{Name: fit.Threshold, Value: 12}}}
		d, err := fit.Prepare(set, lib, p)
		if err != nil {
			errs[k] = err
			return
		}
		c, err := fit.Calibrate(d, p, fit.Options{Workers: 1})
		if err != nil {
			errs[k] = err
			return
		}
		for i := range c.Parameters {
			switch e := &c.Parameters[i]; e.Role {
			case fit.RolePoolSpread:
				spreads[k], squares[k] = e.Value, e.Value*e.Value
			case fit.RolePoolMean:
				lo, hi, ok := e.Interval(0.95)
				inside[k] = ok && lo <= 1 && 1 <= hi
			}
		}
	})
	mean, root, held := 0.0, 0.0, 0
	for k := range n {
		if errs[k] != nil {
			t.Fatal(errs[k])
		}
		mean += squares[k] / float64(n) / (τ * τ)
		root += spreads[k] / float64(n) / τ
		if inside[k] {
			held++
		}
	}
	t.Logf("mean of τ̂²/τ² %.3f, of τ̂/τ %.3f; the mean is inside %.1f %% of its intervals", mean, root, 100*float64(held)/float64(n))
	// τ̂² scatters by √(2/11) = 43 % or a little more in one data set.
	if tol := math.Max(0.1, 3*0.45/math.Sqrt(float64(n))); math.Abs(mean-1) > tol {
		t.Errorf("mean of τ̂²/τ² is %.3f, want 1 ± %.2f", mean, tol)
	}
	if *study > 0 && math.Abs(root-1) > 0.1 {
		t.Errorf("mean of τ̂/τ is %.3f, want 1 ± 0.1", root)
	}
}
