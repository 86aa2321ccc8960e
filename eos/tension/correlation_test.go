package tension_test

import (
	"errors"
	"fmt"
	"math"
	"testing"

	"gonum.org/v1/gonum/diff/fd"
	"limsup/eos/tension"
	"pgregory.net/rapid"
)

var (
	_ tension.Func = (*tension.PowerSum)(nil)
	_ tension.Func = (*tension.DIPPR106)(nil)
	_ tension.Func = (*tension.CorrespondingStates)(nil)
	_ tension.Func = (*tension.Parachor)(nil)
)

// fit is a published power-sum: Mulero, Cachadina and Parra, J. Phys. Chem. Ref. Data 41
// (2012) 043105 as carried by CoolProp (commit ea27c6394887), unless noted.
type fit struct {
	name  string
	Tc    float64
	terms []tension.Term
}

func fits() []fit {
	return []fit{
		{"water", 647.096, []tension.Term{{-0.1306, 2.471}, {0.2151, 1.233}}},
		{"n-butane", 425.125, []tension.Term{{0.05138, 1.209}}},
		{"n-pentane", 469.7, []tension.Term{{0.08015, 1.408}, {0.004384, 1.031}, {-0.03437, 1.818}}},
		{"n-hexane", 507.82, []tension.Term{{0.210952, 1.0962}, {-0.158485, 1.05893}}},
		{"n-heptane", 540.13, []tension.Term{{0.07765, 1.319}, {-0.02599, 1.6}}},
		{"n-octane", 569.32, []tension.Term{{0.34338, 1.6607}, {-0.50634, 1.9632}, {0.2238, 2.3547}}},
		{"toluene", 591.75, []tension.Term{{0.06897, 1.291}}},
		{"methanol", 513.38, []tension.Term{{0.22421, 1.3355}, {-0.21408, 1.677}, {0.083233, 4.4402}}},
		{"benzene", 562.02, []tension.Term{{0.07298, 1.232}, {-0.0007802, 0.8635}, {-0.0001756, 0.3065}}},
		{"sulfur-hexafluoride", 318.723, []tension.Term{{0.0538, 1.271}, {-4.064e-05, 0.2116}}},
		{"sulfur-dioxide", 430.64, []tension.Term{{0.0803, 0.928}, {0.0139, 1.57}, {-0.0114, 0.364}}},
		{"hydrogen", 33.145, []tension.Term{{-1.4165, 0.63882}, {0.746383, 0.659804}, {0.675625, 0.619149}}},
		{"r-22", 369.295, []tension.Term{{3.0587, 1.41809}, {-2.99856, 1.42291}}},
		{"r-1234ze(e)", 382.51, []tension.Term{{0.06158, 1.281}, {-0.8247, 6.505}}}, // from the tables of `chemicals`, commit 82faef900dcf
	}
}

func powerSum(t testing.TB, name string) *tension.PowerSum {
	t.Helper()
	for _, f := range fits() {
		if f.name == name {
			p, err := tension.NewPowerSum(f.Tc, f.terms...)
			if err != nil {
				t.Fatal(err)
			}
			return p
		}
	}
	t.Fatalf("no fit for %s", name)
	return nil
}

// The fit for water against the IAPWS surface tension of ordinary water (R1-76, revised
// 2014). Source of the values: the package python3-iapws 1.5.2, evaluated at T.
func TestWaterAgainstIAPWS(t *testing.T) {
	table := []struct{ T, sigma float64 }{
		{373.15, 0.0589119}, {383.15, 0.056962}, {393.15, 0.0549682}, {403.15, 0.0529321}, {413.15, 0.0508559},
		{423.15, 0.0487413}, {433.15, 0.0465907}, {443.15, 0.0444062}, {453.15, 0.0421902}, {463.15, 0.0399454},
		{473.15, 0.0376745}, {483.15, 0.0353805}, {493.15, 0.0330666}, {503.15, 0.0307364}, {513.15, 0.0283938},
		{523.15, 0.026043}, {533.15, 0.0236889}, {543.15, 0.0213368}, {553.15, 0.0189929}, {563.15, 0.0166644},
		{573.15, 0.0143596}, {583.15, 0.0120888}, {593.15, 0.00986435}, {603.15, 0.0077026}, {613.15, 0.00562548},
		{623.15, 0.0036654}, {633.15, 0.00187718}, {640.00, 0.000808823},
	}
	// Measured: the two fits differ by 0.21 mN/m (0.7 %) at most, at 513 K.
	const tolerance = 0.22e-3
	w := powerSum(t, "water")
	worst, at := 0.0, 0.0
	for _, row := range table {
		got, _, err := w.Sigma(row.T)
		if err != nil {
			t.Fatal(err)
		}
		if d := got - row.sigma; math.Abs(d) > math.Abs(worst) {
			worst, at = d, row.T
		}
	}
	t.Logf("largest deviation %.3g mN/m at %g K", 1e3*worst, at)
	if math.Abs(worst) > tolerance {
		t.Errorf("fit minus IAPWS = %g N/m at %g K, want within %g", worst, at, tolerance)
	}
}

// Fits of different authors for the same fluid, near the boiling point. linear: J. J. Jasper,
// J. Phys. Chem. Ref. Data 1 (1972) 841, σ/(mN/m) = a − b·(T/K − 273.15), as printed in
// Lange's Handbook, 16th edition; dippr: VDI Heat Atlas, 2nd edition (2010). Both by way of `chemicals`.
func TestAgainstOtherFits(t *testing.T) {
	type row struct {
		name string
		a, b float64 // linear
		tc   float64 // dippr
		A, B float64
		rel  float64 // measured largest difference of the three, rounded up
	}
	for _, r := range []row{
		{"n-butane", 14.87, 0.1206, 425.13, 0.05203, 1.21961, 0.02},
		{"n-pentane", 18.25, 0.1121, 469.66, 0.05202, 1.20435, 0.04},
		{"n-hexane", 20.44, 0.1022, 507.79, 0.055, 1.26769, 0.02},
		{"n-heptane", 22.1, 0.098, 541.23, 0.05422, 1.25287, 0.025},
		{"n-octane", 23.52, 0.0951, 569.57, 0.05277, 1.2321, 0.02},
		{"toluene", 30.9, 0.1189, 591.75, 0.06676, 1.24386, 0.02},
	} {
		t.Run(r.name, func(t *testing.T) {
			p := powerSum(t, r.name)
			d, err := tension.NewDIPPR106(r.tc, r.A, r.B, 0, 0, 0)
			if err != nil {
				t.Fatal(err)
			}
			for T := 255.0; T <= 300; T += 15 {
				if r.name == "n-butane" && T > 272.65 { // end of the linear fit
					continue
				}
				a, _, err1 := p.Sigma(T)
				b, _, err2 := d.Sigma(T)
				if err := errors.Join(err1, err2); err != nil {
					t.Fatal(err)
				}
				c := 1e-3 * (r.a - r.b*(T-273.15))
				hi, lo := max(a, b, c), min(a, b, c)
				if hi/lo-1 > r.rel {
					t.Errorf("at %g K: power-sum %.5g, dippr-106 %.5g, linear %.5g N/m: %.2g apart, want %g", T, a, b, c, hi/lo-1, r.rel)
				}
			}
		})
	}
}

// A form with all five constants: methanol and water, VDI Heat Atlas, 2nd edition (2010), by way of `chemicals`.
func TestDIPPR106WithAllConstants(t *testing.T) {
	for _, r := range []struct {
		name              string
		tc, a, b, c, d, e float64
		T, want, rel      float64
	}{
		{"methanol", 513.38, 0.04372, 0.8646, -0.07327, -0.51872, 0.66269, 298.15, 22.07e-3, 0.01}, // Jasper: 24.00 − 0.0773·25
		{"water", 647.1, 0.15488, 1.64129, -0.75986, -0.85291, 1.14113, 373.15, 58.91e-3, 0.015},   // IAPWS by python3-iapws 1.5.2; measured 1.2 %
	} {
		f, err := tension.NewDIPPR106(r.tc, r.a, r.b, r.c, r.d, r.e)
		if err != nil {
			t.Fatal(err)
		}
		got, _, err := f.Sigma(r.T)
		if err != nil || math.Abs(got/r.want-1) > r.rel {
			t.Errorf("%s: σ(%g K) = %.5g N/m, %v; want %g within %g", r.name, r.T, got, err, r.want, r.rel)
		}
	}
}

// The value against the sum written out with math.Pow.
func TestPowerSumAccuracy(t *testing.T) {
	for _, f := range fits() {
		p := powerSum(t, f.name)
		for tr := 0.45; tr < 0.99; tr += 0.01 {
			T := tr * f.Tc
			got, slope, err := p.Sigma(T)
			if err != nil {
				var np *tension.NonPositiveError
				if errors.As(err, &np) && T >= p.PositiveBelow() {
					continue
				}
				t.Fatal(err)
			}
			var want, size, wantSlope, slopeSize float64
			for _, k := range f.terms {
				s := k.Coefficient * math.Pow(1-T/f.Tc, k.Exponent)
				d := -k.Coefficient * k.Exponent * math.Pow(1-T/f.Tc, k.Exponent-1) / f.Tc
				want, size = want+s, size+math.Abs(s)
				wantSlope, slopeSize = wantSlope+d, slopeSize+math.Abs(d)
			}
			// 1 − T/Tc itself is wrong by up to 1.1e-16/θ in the written-out sum.
			tol := 1e-14 + 2.2e-16*7/(1-tr)
			if math.Abs(got-want) > tol*size {
				t.Errorf("%s: σ(%g) = %.17g, want %.17g", f.name, T, got, want)
			}
			if math.Abs(slope-wantSlope) > tol*slopeSize {
				t.Errorf("%s: dσ/dT(%g) = %.17g, want %.17g", f.name, T, slope, wantSlope)
			}
		}
	}
}

// checkSlope compares dσ/dT with a central difference of step h, whose error is
// h²|σ‴|/6 + 1e-16·size/h; for σ ~ θⁿ with n below 7 at θ > 0.03, h = 1e-5·Tc that is
// below 1e-6 of the slope.
func checkSlope(t interface {
	Errorf(string, ...any)
	Fatal(...any)
}, name string, f tension.Func, T, Tc, size float64) {
	_, slope, err := f.Sigma(T)
	if err != nil {
		t.Fatal(name, err)
	}
	h := 1e-5 * Tc
	num := fd.Derivative(func(T float64) float64 {
		s, _, err := f.Sigma(T)
		if err != nil {
			t.Fatal(name, err)
		}
		return s
	}, T, &fd.Settings{Formula: fd.Central, Step: h})
	if !(math.Abs(num-slope) <= 1e-6*math.Abs(slope)+1e-15*size/h) {
		t.Errorf("%s: dσ/dT(%g K) = %g, difference quotient %g", name, T, slope, num)
	}
}

func TestSlopeAgainstDifferences(t *testing.T) {
	for _, f := range fits() {
		p := powerSum(t, f.name)
		size := 0.0
		for _, k := range f.terms {
			size += math.Abs(k.Coefficient)
		}
		for tr := 0.5; tr < 0.97; tr += 0.02 {
			if T := tr * f.Tc; T*1.0001 < p.PositiveBelow() {
				checkSlope(t, f.name, p, T, f.Tc, size)
			}
		}
	}
	rapid.Check(t, func(t *rapid.T) {
		tc := rapid.Float64Range(5, 900).Draw(t, "Tc")
		f, err := tension.NewDIPPR106(tc, rapid.Float64Range(0.01, 0.2).Draw(t, "A"), rapid.Float64Range(0.7, 2).Draw(t, "B"),
			rapid.Float64Range(-0.8, 1).Draw(t, "C"), rapid.Float64Range(-0.3, 0.5).Draw(t, "D"), rapid.Float64Range(0.5, 1).Draw(t, "E"))
		if err != nil {
			t.Fatal(err)
		}
		T := tc * rapid.Float64Range(0.3, 0.96).Draw(t, "Tr")
		sigma, slope, err := f.Sigma(T)
		if err != nil {
			t.Fatal(err)
		}
		if math.Abs(slope)*tc > 0.1*sigma { // else the slope passes zero and has no relative error
			checkSlope(t, "dippr-106", f, T, tc, sigma)
		}
	})
}

// Below PositiveBelow the fit is positive, at it and above it is refused.
func TestPositiveBelow(t *testing.T) {
	for _, tt := range []struct {
		name string
		gap  float64 // Tc − PositiveBelow in K, from the closed form where there are two terms
	}{
		{"water", 0}, {"n-pentane", 0}, {"r-22", 0}, {"n-octane", 0},
		{"n-hexane", 507.82 * math.Pow(0.158485/0.210952, 1/(1.0962-1.05893))},
		{"sulfur-hexafluoride", 318.723 * math.Pow(4.064e-05/0.0538, 1/(1.271-0.2116))},
	} {
		p := powerSum(t, tt.name)
		got := p.CriticalTemperature - p.PositiveBelow()
		// One unit in the last place of T bounds what the subtraction can resolve.
		if math.Abs(got-tt.gap) > 1e-9*tt.gap+2e-13 {
			t.Errorf("%s: positive to %.12g K below Tc, want %.12g", tt.name, got, tt.gap)
		}
	}
	for _, f := range fits() {
		p := powerSum(t, f.name)
		top := p.PositiveBelow()
		if p.Tc() != top || top > f.Tc || top < 0.95*f.Tc {
			t.Errorf("%s: upper end %g K", f.name, top)
		}
		for i := range 2000 { // dense towards the end
			T := top - 0.5*top*math.Pow(10, -float64(i)/200)
			if T <= p.PositiveAbove() {
				continue
			}
			if s, _, err := p.Sigma(T); err != nil || s <= 0 {
				t.Fatalf("%s: σ(%.17g K) = %g, %v; positive below %.17g", f.name, T, s, err, top)
			}
		}
		_, _, err := p.Sigma(top)
		var np *tension.NonPositiveError
		var re *tension.RangeError
		switch {
		case top == f.Tc && !errors.As(err, &re), top < f.Tc && !errors.As(err, &np):
			t.Errorf("%s: at the upper end: %v", f.name, err)
		}
	}
	// θ₀ solves 0.8247·θ^(6.505−1.281) = 0.06158; the cold side of r-1234ze(e).
	want := 382.51 * (1 - math.Pow(0.06158/0.8247, 1/(6.505-1.281)))
	if got := powerSum(t, "r-1234ze(e)").PositiveAbove(); math.Abs(got-want) > 1e-9*want {
		t.Errorf("r-1234ze(e): positive above %.12g K, want %.12g", got, want)
	}
}

func TestErrors(t *testing.T) {
	p := powerSum(t, "benzene")
	for _, T := range []float64{-1, 0, 562.02, 600, math.NaN(), math.Inf(1)} {
		s, d, err := p.Sigma(T)
		var re *tension.RangeError
		if !errors.As(err, &re) || s != 0 || d != 0 {
			t.Errorf("σ(%g) = %g, %g, %v; want *RangeError", T, s, d, err)
		}
	}
	_, _, err := p.Sigma(562.01)
	var np *tension.NonPositiveError
	if !errors.As(err, &np) || !(np.Sigma < 0) || np.PositiveBelow != p.PositiveBelow() {
		t.Errorf("benzene at 562.01 K: %v; want *NonPositiveError", err)
	}
	nan := math.NaN()
	for i, make := range []func() (any, error){
		func() (any, error) { return tension.NewPowerSum(0, tension.Term{Coefficient: 1, Exponent: 1}) },
		func() (any, error) { return tension.NewPowerSum(500) },
		func() (any, error) { return tension.NewPowerSum(500, tension.Term{Coefficient: nan, Exponent: 1}) },
		func() (any, error) { return tension.NewPowerSum(500, tension.Term{Coefficient: 1}) },
		func() (any, error) { return tension.NewDIPPR106(nan, 0.05, 1.2, 0, 0, 0) },
		func() (any, error) { return tension.NewDIPPR106(500, -0.05, 1.2, 0, 0, 0) },
		func() (any, error) { return tension.NewDIPPR106(500, 0.05, 1.2, math.Inf(1), 0, 0) },
		func() (any, error) { return tension.NewDIPPR106(500, 0.05, -1.2, 0, 0, 0) },
		func() (any, error) { return tension.NewCorrespondingStates(500, 3e6, 500) },
		func() (any, error) { return tension.NewCorrespondingStates(500, -3e6, 300) },
		func() (any, error) { return tension.NewCorrespondingStates(nan, 3e6, 300) },
		func() (any, error) { return tension.NewCorrespondingStates(500, 1.2e5, 200) },
	} {
		var pe *tension.ParameterError
		if _, err := make(); !errors.As(err, &pe) {
			t.Errorf("constructor %d: %v; want *ParameterError", i, err)
		}
	}
	if _, err := tension.NewPowerSum(500, tension.Term{Coefficient: -0.05, Exponent: 1.2}); !errors.As(err, &np) {
		t.Errorf("negative sum: %v; want *NonPositiveError", err)
	}
}

// The terms of the caller stay the caller's.
func TestTermsAreCopied(t *testing.T) {
	terms := []tension.Term{{0.05138, 1.209}}
	p, err := tension.NewPowerSum(425.125, terms...)
	if err != nil {
		t.Fatal(err)
	}
	before, _, _ := p.Sigma(300)
	terms[0].Coefficient = 1
	if after, _, _ := p.Sigma(300); after != before {
		t.Errorf("σ changed from %g to %g with the caller's slice", before, after)
	}
}

func TestSigmaAllocatesNothing(t *testing.T) {
	w := powerSum(t, "water")
	d, _ := tension.NewDIPPR106(510.05, 0.08432, 1.28714, 0, 0, 0)
	c, _ := tension.NewCorrespondingStates(469.7, 3367519, 309.209)
	for _, f := range []tension.Func{w, d, c} {
		if n := testing.AllocsPerRun(100, func() { _, _, _ = f.Sigma(400) }); n != 0 {
			t.Errorf("%T: %g allocations per call", f, n)
		}
	}
}

func BenchmarkSigma(b *testing.B) {
	d, _ := tension.NewDIPPR106(510.05, 0.08432, 1.28714, 0, 0, 0)
	for _, f := range []tension.Func{powerSum(b, "n-pentane"), d} {
		b.Run(fmt.Sprintf("%T", f), func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				_, _, _ = f.Sigma(400)
			}
		})
	}
}

func ExampleNewPowerSum() {
	// n-butane: Mulero, Cachadina and Parra, J. Phys. Chem. Ref. Data 41 (2012) 043105.
	f, err := tension.NewPowerSum(425.125, tension.Term{Coefficient: 0.05138, Exponent: 1.209})
	if err != nil {
		fmt.Println(err)
		return
	}
	sigma, slope, err := f.Sigma(300)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("%.2f mN/m, %.3f mN/(m K)\n", 1e3*sigma, 1e3*slope)
	_, _, err = f.Sigma(430)
	fmt.Println(err)
	// Output:
	// 11.71 mN/m, -0.113 mN/(m K)
	// surface tension (power-sum): temperature 430 K is outside 0 to 425.125 K, the critical temperature of the fit
}
