package plot

import (
	"errors"
	"math"
	"sort"
	"strings"
	"sync"
	"testing"

	"limsup/data/fluid"
	"limsup/data/measure"
	"limsup/fit"
	"limsup/validate"
)

// demo is a calibration of the demonstration data (synthetic).
var demo = sync.OnceValues(func() (*fit.Calibration, error) {
	lib, err := fluid.Builtin()
	if err != nil {
		return nil, err
	}
	set, err := measure.ReadFile("../../data/demo/droplets.csv", measure.Options{})
	if err != nil {
		return nil, err
	}
	plan := fit.Plan{Terms: []fit.Term{{Name: fit.Prefactor}, {Name: fit.Offset, By: fit.ByMethod}}}
	d, err := fit.Prepare(set, lib, plan)
	if err != nil {
		return nil, err
	}
	return fit.Calibrate(d, plan, fit.Options{})
})

func calibrated(t *testing.T) (*fit.Calibration, *validate.Assessment, *Input) {
	t.Helper()
	c, err := demo()
	if err != nil {
		t.Fatal(err)
	}
	a := validate.Assess(c, nil)
	for _, r := range ByRows(c.Data.Observations) {
		if r.Key == "n-pentane" {
			return c, a, &Input{a.Model, r, a}
		}
	}
	t.Fatal("no n-pentane")
	return nil, nil, nil
}

// find returns the series of a name in a panel; there may be several.
func find(t *testing.T, p *Panel, name string) []Series {
	t.Helper()
	var out []Series
	for _, s := range p.Series {
		if s.Name == name {
			out = append(out, s)
		}
	}
	if len(out) == 0 {
		t.Fatalf("panel %q has no series %q", p.Title, name)
	}
	return out
}

// at interpolates x at y.
func at(s *Series, y float64) (float64, bool) {
	for i := 1; i < len(s.X); i++ {
		if (s.Y[i-1]-y)*(s.Y[i]-y) <= 0 && s.Y[i] != s.Y[i-1] {
			return s.X[i-1] + (s.X[i]-s.X[i-1])*(y-s.Y[i-1])/(s.Y[i]-s.Y[i-1]), true
		}
	}
	return 0, false
}

// TestLimitMap: saturation, limit and spinodal in their order at every pressure, the
// band about its line, the points those of the rows.
func TestLimitMap(t *testing.T) {
	_, a, in := calibrated(t)
	f, err := LimitMap(in)
	if err != nil || f.Check() != nil || len(f.Panels) != 2 {
		t.Fatal(err, f)
	}
	whole := &f.Panels[0]
	sat, spin := find(t, whole, "saturation")[0], find(t, whole, "spinodal of the liquid")[0]
	line, band := find(t, whole, "kinetic limit, droplet")[0], find(t, whole, "kinetic limit, droplet, 95 % of new readings")[0]
	compared := 0
	for i, P := range line.Y {
		low, ok := at(&sat, P)
		high, ok2 := at(&spin, P)
		if ok && ok2 {
			compared++
			if !(low < line.X[i] && line.X[i] < high) {
				t.Errorf("at %g MPa: saturation %g, limit %g, spinodal %g", P, low, line.X[i], high)
			}
		}
		if !(band.X[i] < line.X[i] && line.X[i] < band.X2[i]) || band.Y[i] != P || band.Y2[i] != P {
			t.Errorf("at %g MPa: limit %g outside its band %g..%g", P, line.X[i], band.X[i], band.X2[i])
		}
	}
	if compared < 50 {
		t.Errorf("only %d pressures were compared", compared)
	}
	// The points of a method scatter about its own line: their mean distance is the
	// bias of its rows, but for the flux, which differs from row to row by about a
	// decade, of which some three make a kelvin (measured: 0.03 K beyond the bias).
	for _, name := range []string{"droplet", "pulse-heated wire"} {
		line, points := find(t, &f.Panels[1], "kinetic limit, "+name)[0], find(t, &f.Panels[1], name)[0]
		sum := 0.0
		for i := range points.X {
			T, ok := at(&line, points.Y[i])
			if !ok {
				t.Fatalf("the line of %s does not reach %g MPa", name, points.Y[i])
			}
			sum += points.X[i] - T
		}
		bias, rows := 0.0, 0.0
		for i := range a.Data.Observations {
			if o := &a.Data.Observations[i]; o.Record.Key == "n-pentane" && o.Method == name && o.Outcome == 0 {
				bias, rows = bias+a.Rows[i].Residual, rows+1
			}
		}
		if d := sum/rows - bias/rows; math.Abs(d) > 0.1 {
			t.Errorf("the points of %s lie %g K beside their line on average, their rows have a bias of %g K", name, sum/rows, bias/rows)
		}
	}
	n := 0
	for k := range f.Panels {
		for _, name := range []string{"droplet", "pulse-heated wire"} {
			for _, s := range find(t, &f.Panels[k], name) {
				n += len(s.X)
				for i := range s.X {
					if !strings.Contains(s.Text[i], "n-pentane") || !strings.Contains(s.Text[i], fixed(s.X[i], 2)) {
						t.Errorf("point %d of %s says %q", i, name, s.Text[i])
					}
				}
			}
		}
	}
	want := 0
	for i := range a.Data.Observations {
		if o := &a.Data.Observations[i]; o.Record.Key == "n-pentane" && o.Outcome == 0 {
			want += 2 // in both panels
		}
	}
	if n != want {
		t.Errorf("%d points, want %d", n, want)
	}
}

// TestIsothermMeaning: pressure falls with volume where the state may exist, rises
// where it is unstable; the stretches meet at saturation and at the spinodals.
func TestIsothermMeaning(t *testing.T) {
	_, _, in := calibrated(t)
	f, err := Isotherm(in, State{})
	if err != nil || f.Check() != nil {
		t.Fatal(err)
	}
	p := &f.Panels[0]
	slope := func(s *Series, sign float64) {
		for i := 1; i < len(s.X); i++ {
			if !(s.X[i] > s.X[i-1]) || !(sign*(s.Y[i]-s.Y[i-1]) > 0) {
				t.Errorf("%s: from (%g, %g) to (%g, %g)", s.Name, s.X[i-1], s.Y[i-1], s.X[i], s.Y[i])
			}
		}
	}
	meta, stable, unstable := find(t, p, "metastable"), find(t, p, "isotherm, stable"), find(t, p, "unstable")[0]
	slope(&unstable, 1)
	for i := range meta {
		slope(&meta[i], -1)
		slope(&stable[i], -1)
	}
	sat, ends := find(t, p, "saturated phases")[0], find(t, p, "limits of stability")[0]
	last := len(meta[0].X) - 1
	for _, x := range []struct{ got, want float64 }{
		{stable[0].X[last], sat.X[0]}, {meta[0].X[0], sat.X[0]}, {meta[0].X[last], ends.X[0]}, {unstable.X[0], ends.X[0]},
		{unstable.X[last], ends.X[1]}, {meta[1].X[0], ends.X[1]}, {meta[1].X[last], sat.X[1]}, {stable[1].X[0], sat.X[1]},
		{stable[0].Y[last], sat.Y[0]}, {stable[1].Y[0], sat.Y[0]}, {sat.Y[0], sat.Y[1]},
	} {
		if math.Abs(x.got-x.want) > 1e-9*math.Abs(x.want) { // geometric steps end within rounding
			t.Errorf("a stretch ends at %.12g, want %.12g", x.got, x.want)
		}
	}
	// The binodal lies outside the spinodal at every pressure that both reach.
	bin, spin := find(t, p, "binodal")[0], find(t, p, "spinodals")[0]
	if b, ok := at(&bin, 2); !ok {
		t.Error("the binodal does not reach 2 MPa")
	} else if s, ok := at(&spin, 2); !ok || !(b < s) {
		t.Errorf("at 2 MPa the liquid of the binodal has %g, of the spinodal %g", b, s)
	}
}

// TestPotentialMeaning: both branches are zero at saturation; on a metastable branch
// the potential lies above the stable phase at the same pressure.
func TestPotentialMeaning(t *testing.T) {
	_, _, in := calibrated(t)
	f, err := Potential(in, State{})
	if err != nil || f.Check() != nil {
		t.Fatal(err)
	}
	p := &f.Panels[0]
	meta, stable := find(t, p, "metastable"), find(t, p, "isotherm, stable")
	swap := func(s *Series) *Series { return &Series{X: s.Y, Y: s.X} }
	above := 0
	for i, other := range []int{1, 0} {
		for k := range meta[i].X {
			mu, ok := at(swap(&stable[other]), meta[i].X[k])
			if !ok {
				continue
			}
			above++
			// Interpolated between 61 points of a smooth curve: a part in a thousand of
			// the range is more than enough.
			if meta[i].Y[k] < mu-1e-3*math.Abs(stable[1].Y[len(stable[1].Y)-1]) {
				t.Errorf("metastable at %g MPa: %g below %g of the stable phase", meta[i].X[k], meta[i].Y[k], mu)
			}
		}
	}
	if above < 20 {
		t.Errorf("only %d states were compared", above)
	}
	// RT·ln(f/f_sat) with a ln f equal to about 1e-12: 1e-8 J/mol of 4e3.
	if mu := stable[0].Y[len(stable[0].Y)-1]; math.Abs(mu) > 1e-6 {
		t.Errorf("saturated liquid at %g J/mol", mu)
	}
}

// TestFluxAndEmbryo: the limit stands where the curve crosses the threshold; the
// marked radius is where the free energy is largest.
func TestFluxAndEmbryo(t *testing.T) {
	_, _, in := calibrated(t)
	f, err := Flux(in, State{P: 101325})
	if err != nil || f.Check() != nil {
		t.Fatal(err)
	}
	p := &f.Panels[0]
	curve, limit := find(t, p, "flux")[0], find(t, p, "kinetic limit at the threshold")[0]
	T, ok := at(&curve, find(t, p, "threshold")[0].Y[0])
	if !ok || math.Abs(T-limit.X[0]) > 0.02 { // chords of 0.2 K: curvature 0.2²/8 of some K per decade²
		t.Errorf("the curve crosses the threshold at %g K, the limit is %g K", T, limit.X[0])
	}
	if n := len(find(t, p, "droplet")[0].X); n != 4 { // rows of the file at this pressure
		t.Errorf("%d droplets at 1 atm, want 4", n)
	}
	e, err := Embryo(in, State{P: 101325})
	if err != nil || e.Check() != nil {
		t.Fatal(err)
	}
	p = &e.Panels[0]
	marks := find(t, p, "critical radius r*")[0]
	for i, s := range p.Series[:3] {
		for k := range s.X {
			if s.Y[k] > marks.Y[i]*(1+1e-12) {
				t.Errorf("%s: ΔG(%g nm) = %g above the barrier %g", s.Name, s.X[k], s.Y[k], marks.Y[i])
			}
		}
		if i > 0 && !(marks.Y[i] > marks.Y[i-1] && marks.X[i] > marks.X[i-1]) {
			t.Errorf("further from the limit the barrier goes from %g to %g", marks.Y[i-1], marks.Y[i])
		}
	}
}

// TestProfiles: zero at the estimate, rising on both sides, near the parabola of the
// standard uncertainty close to it.
func TestProfiles(t *testing.T) {
	c, _, _ := calibrated(t)
	var told []int
	f, err := Profiles(c, func(done, total int) {
		if total != 11*c.Locations { // eleven values of each
			t.Errorf("%d of %d points", done, total)
		}
		told = append(told, done)
	})
	if err != nil || f.Check() != nil {
		t.Fatal(err)
	}
	for i, done := range told {
		if done != i {
			t.Errorf("told %v", told)
			break
		}
	}
	if len(told) != 11*c.Locations {
		t.Errorf("told %d times", len(told))
	}
	if len(f.Panels) != c.Locations {
		t.Fatalf("%d panels, want %d", len(f.Panels), c.Locations)
	}
	for k := range f.Panels {
		p := &f.Panels[k]
		e := &c.Parameters[k]
		s := find(t, p, "tuned with the parameter held")[0]
		for i := range s.X {
			z := (s.X[i] - e.Value) / e.U
			switch {
			case math.Abs(z) < 1e-9:
				if s.Y[i] > 1e-6 { // the settling of the search
					t.Errorf("%s: %g at the estimate", p.Title, s.Y[i])
				}
			case math.Abs(z) < 1.1 && math.Abs(s.Y[i]-z*z) > 0.35*z*z:
				// The model is not linear.
				t.Errorf("%s at %.2f u: %g, parabola %g", p.Title, z, s.Y[i], z*z)
			}
			if i > 0 && (s.X[i]-e.Value)*(s.Y[i]-s.Y[i-1]) < -1e-4*math.Abs(s.X[i]-e.Value) && z > 0.1 {
				t.Errorf("%s falls away from the estimate at %.2f u", p.Title, z)
			}
		}
		curve := find(t, p, "profile")[0]
		// The curve crosses its level where Profile says that the interval ends; between its
		// points it is interpolated, to a hundredth of the level here.
		r, err := c.Profile(e.Label(), 0.95)
		if err != nil {
			t.Fatal(err)
		}
		top := find(t, p, "95 % level")[0].Y[0]
		for _, end := range []float64{r.Lower, r.Upper} {
			i := sort.SearchFloat64s(curve.X, end)
			if i == 0 || i == len(curve.X) {
				t.Errorf("%s: the curve does not reach the end %g of the interval", p.Title, end)
				continue
			}
			part := (end - curve.X[i-1]) / (curve.X[i] - curve.X[i-1])
			if y := curve.Y[i-1] + part*(curve.Y[i]-curve.Y[i-1]); math.Abs(y-top) > 0.01*top {
				t.Errorf("%s: the curve is at %g where the interval ends, the level at %g", p.Title, y, top)
			}
		}
		if curve.X[0] != s.X[0] || curve.X[len(curve.X)-1] != s.X[len(s.X)-1] {
			t.Errorf("%s: the curve does not span its points", p.Title)
		}
	}
}

// TestCorrelation: the matrix is that of the covariance, first parameter at the top.
func TestCorrelation(t *testing.T) {
	c, a, _ := calibrated(t)
	f, err := Correlation(a.Model)
	if err != nil || f.Check() != nil {
		t.Fatal(err)
	}
	p := &f.Panels[0]
	n := len(p.X.Categories)
	if n != len(c.Parameters) {
		t.Fatalf("%d parameters, want %d", n, len(c.Parameters))
	}
	for r := range n {
		for k := range n {
			i := n - 1 - r
			want := c.Covariance.At(i, k) / (c.Parameters[i].U * c.Parameters[k].U)
			if math.Abs(p.Matrix.Value[r][k]-want) > 1e-12 {
				t.Errorf("%s and %s: %g, want %g", p.Y.Categories[r], p.X.Categories[k], p.Matrix.Value[r][k], want)
			}
		}
	}
	m, err := fit.Untuned(fit.DefaultVariant())
	if err != nil {
		t.Fatal(err)
	}
	var empty *EmptyError
	if _, err := Correlation(m); !errors.As(err, &empty) {
		t.Errorf("untuned: %v", err)
	}
}

// TestWithoutData: the figures of a fluid need no measurements, and above the critical
// point an isotherm has no metastable part to show.
func TestWithoutData(t *testing.T) {
	_, _, with := calibrated(t)
	m, err := fit.Untuned(fit.DefaultVariant())
	if err != nil {
		t.Fatal(err)
	}
	in := &Input{Model: m, Record: with.Record}
	for name, build := range map[string]func() (*Figure, error){
		"map": func() (*Figure, error) { return LimitMap(in) }, "flux": func() (*Figure, error) { return Flux(in, State{}) },
		"isotherm": func() (*Figure, error) { return Isotherm(in, State{T: 430}) }, "embryo": func() (*Figure, error) { return Embryo(in, State{P: -1e5}) },
	} {
		f, err := build()
		if err == nil {
			err = f.Check()
		}
		if err != nil {
			t.Errorf("%s: %v", name, err)
		}
	}
	var empty *EmptyError
	if _, err := Isotherm(in, State{T: 600}); !errors.As(err, &empty) {
		t.Errorf("above the critical temperature: %v", err)
	}
	spinodal := fit.DefaultVariant()
	spinodal.Limit = fit.Spinodal
	if in.Model, err = fit.Untuned(spinodal); err != nil {
		t.Fatal(err)
	}
	if e, err := Embryo(in, State{}); err != nil || e.Check() != nil {
		t.Errorf("embryo of a spinodal model: %v", err)
	}
	f, err := LimitMap(in)
	if err != nil {
		t.Fatal(err)
	}
	a, b := find(t, &f.Panels[0], "spinodal limit")[0], find(t, &f.Panels[0], "spinodal of the liquid")[0]
	for i := range a.X {
		if math.Abs(a.X[i]-b.X[i]) > 1e-9*b.X[i] {
			t.Errorf("the spinodal limit at %g MPa is %g K, the spinodal %g K", a.Y[i], a.X[i], b.X[i])
		}
	}
}
