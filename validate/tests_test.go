package validate

import (
	"fmt"
	"math"
	"testing"

	"gonum.org/v1/gonum/floats/scalar"
	"gonum.org/v1/gonum/stat/distuv"
	"pgregory.net/rapid"
)

// Worked samples with published statistics; the tolerances are half a unit of the last
// digit printed.
func TestShapiroWilkAgainstPublishedValues(t *testing.T) {
	for _, tt := range []struct {
		name       string
		x          []float64
		W, p       float64
		tolW, tolP float64
	}{
		// Weights of eleven men, the example of Shapiro and Wilk (1965); W and p as printed in
		// the manual of SciPy 1.11, scipy.stats.shapiro (single precision; data from memory).
		{"weights of men", []float64{148, 154, 158, 160, 161, 162, 166, 170, 182, 195, 236}, 0.7888146948631716, 0.006703814061898823, 1e-6, 1e-6},
		// Fuel consumption of 32 cars, Motor Trend 1974, data set mtcars of R; W and p as R
		// prints them (data and results from memory).
		{"mtcars mpg", []float64{21, 21, 22.8, 21.4, 18.7, 18.1, 14.3, 24.4, 22.8, 19.2, 17.8, 16.4, 17.3, 15.2, 10.4, 10.4, 14.7, 32.4, 30.4, 33.9,
			21.5, 15.5, 15.2, 13.3, 19.2, 27.3, 26, 30.4, 15.8, 19.7, 15, 21.4}, 0.94756, 0.1229, 5e-6, 5e-5},
		// n = 3 in closed form: W = (x3 − x1)²/(2·SS); for 0, 1, 5: 25/28, p = (6/π)(asin√W − asin√¾).
		{"three", []float64{5, 0, 1}, 25.0 / 28, 6 / math.Pi * (math.Asin(math.Sqrt(25.0/28)) - math.Asin(math.Sqrt(0.75))), 1e-14, 1e-13},
	} {
		W, p, ok := ShapiroWilk(tt.x)
		if !ok || !scalar.EqualWithinAbs(W, tt.W, tt.tolW) || !scalar.EqualWithinAbs(p, tt.p, tt.tolP) {
			t.Errorf("%s: W %.10g, p %.10g, %v; want %.10g, %.10g", tt.name, W, p, ok, tt.W, tt.p)
		}
	}
}

// Under normality the p-value is uniform, which covers every sample size at which the
// approximation changes. 1000 samples each: the share below 5 % has standard error 0.7 %;
// four of them, and 0.5 % for the approximation itself.
func TestShapiroWilkIsUniformUnderNormality(t *testing.T) {
	for _, n := range []int{3, 4, 5, 6, 11, 12, 40} {
		low := 0
		for s := range 1000 {
			if _, p, ok := ShapiroWilk(normals(n, uint64(1000*n+s))); ok && p < 0.05 {
				low++
			}
		}
		if math.Abs(float64(low)/1000-0.05) > 4*0.007+0.005 {
			t.Errorf("n = %d: %d of 1000 samples below 5 %%", n, low)
		}
	}
}

func normals(n int, seed uint64) []float64 {
	src := distuv.Normal{Mu: 3, Sigma: 2, Src: source(seed)}
	x := make([]float64, n)
	for i := range x {
		x[i] = src.Rand()
	}
	return x
}

func TestShapiroWilkRefuses(t *testing.T) {
	for _, x := range [][]float64{nil, {1, 2}, {7, 7, 7, 7}, make([]float64, 5001)} {
		if _, _, ok := ShapiroWilk(x); ok {
			t.Errorf("a statistic for %d values", len(x))
		}
	}
}

func TestShapiroWilkDoesNotDependOnScaleAndOrder(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		x := rapid.SliceOfN(rapid.Float64Range(-10, 10), 3, 60).Draw(t, "x")
		a, b := rapid.Float64Range(0.1, 10).Draw(t, "a"), rapid.Float64Range(-5, 5).Draw(t, "b")
		W, p, ok := ShapiroWilk(x)
		y := make([]float64, len(x))
		for i, v := range x {
			y[len(x)-1-i] = b - a*v
		}
		W2, _, ok2 := ShapiroWilk(y)
		if !ok || !ok2 {
			return // nearly equal values: where the line is drawn depends on b
		}
		if !(W > 0 && W <= 1 && p >= 0 && p <= 1) {
			t.Fatalf("W %g, p %g", W, p)
		}
		// Rounding of a sum of squares, enlarged by cancellation where values nearly agree.
		lo, hi := math.Inf(1), math.Inf(-1)
		for _, v := range x {
			lo, hi = math.Min(lo, v), math.Max(hi, v)
		}
		tol := 1e-12 * (1 + math.Pow(100/(hi-lo), 2))
		if math.Abs(W-W2) > tol {
			t.Fatalf("W %.17g and %.17g", W, W2)
		}
	})
}

func TestSpearmanAgainstPublishedValues(t *testing.T) {
	// Intelligence quotient against hours of television per week of ten people: ρ = −29/165,
	// p = 0.627188 by the t distribution. Source: the worked example of the English Wikipedia
	// article on Spearman's rank correlation coefficient (from memory).
	iq := []float64{106, 100, 86, 101, 99, 103, 97, 113, 112, 110}
	tv := []float64{7, 27, 2, 50, 28, 29, 20, 12, 6, 17}
	rho, p, ok := Spearman(iq, tv, 0)
	if !ok || math.Abs(rho+29.0/165) > 1e-14 || math.Abs(p-0.627188) > 5e-7 {
		t.Errorf("ρ %.10g, p %.10g, %v; want −29/165, 0.627188", rho, p, ok)
	}
	// Exact for five pairs, by counting: ρ = 0.9 needs one exchange of neighbours, of which
	// there are four among 120 orders, the perfect order one; both signs: 10/120.
	rho, p, _ = Spearman([]float64{1, 2, 3, 4, 5}, []float64{1, 2, 3, 5, 4}, 0)
	if math.Abs(rho-0.9) > 1e-14 || math.Abs(p-10.0/120) > 1e-14 {
		t.Errorf("ρ %.10g, p %.10g; want 0.9, 10/120", rho, p)
	}
	// Ties share their mean rank: ranks 1½ 1½ 3 4 against 1 2 3 4 have Σd² = ½, and the
	// correlation of the ranks is 4.5/√(4.5·5).
	rho, _, _ = Spearman([]float64{2, 2, 3, 4}, []float64{1, 2, 3, 4}, 0)
	if want := 4.5 / math.Sqrt(4.5*5); math.Abs(rho-want) > 1e-14 {
		t.Errorf("ρ with ties %.10g; want %.10g", rho, want)
	}
	// Values within the tie of the first of them are one value.
	if _, _, ok := Spearman([]float64{1, 1.1, 1.2, 1.3}, []float64{1, 2, 3, 4}, 0.5); ok {
		t.Error("a correlation with values that are all tied")
	}
	for _, n := range []int{0, 3} {
		if _, _, ok := Spearman(make([]float64, n), make([]float64, n), 0); ok {
			t.Errorf("a correlation of %d pairs", n)
		}
	}
}

func TestSpearmanSymmetries(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		n := rapid.IntRange(4, 30).Draw(t, "n")
		if n < exactBelow {
			n = min(n, 6) // 9! permutations are slow a hundred times over
		}
		x := rapid.SliceOfN(rapid.Float64Range(-5, 5), n, n).Draw(t, "x")
		y := rapid.SliceOfN(rapid.Float64Range(-5, 5), n, n).Draw(t, "y")
		rho, p, ok := Spearman(x, y, 0)
		back, q, ok2 := Spearman(y, x, 0)
		minus := make([]float64, n)
		for i := range x {
			minus[i] = -x[i]
		}
		turned, r, ok3 := Spearman(minus, y, 0)
		if ok != ok2 || ok != ok3 {
			t.Fatal("not symmetric in being defined")
		}
		if !ok {
			return
		}
		if math.Abs(rho) > 1 || p < 0 || p > 1 {
			t.Fatalf("ρ %g, p %g", rho, p)
		}
		if math.Abs(rho-back) > 1e-12 || math.Abs(rho+turned) > 1e-12 || math.Abs(p-q) > 1e-9 || math.Abs(p-r) > 1e-9 {
			t.Fatalf("ρ %g %g %g, p %g %g %g", rho, back, turned, p, q, r)
		}
	})
}

// Source: R. G. Newcombe, Statistics in Medicine 17 (1998) 857, Table I, method 3 (from
// memory), to the four decimals printed.
func TestWilsonAgainstPublishedValues(t *testing.T) {
	for _, tt := range []struct {
		k, n      int
		low, high float64
	}{
		{81, 263, 0.2553, 0.3662}, {15, 148, 0.0624, 0.1605}, {0, 20, 0, 0.1611}, {1, 29, 0.0061, 0.1718},
	} {
		low, high := Wilson(tt.k, tt.n, 0.95)
		if math.Abs(low-tt.low) > 5e-5 || math.Abs(high-tt.high) > 5e-5 {
			t.Errorf("%d of %d: %.5f to %.5f; want %.4f to %.4f", tt.k, tt.n, low, high, tt.low, tt.high)
		}
	}
	if low, high := Wilson(0, 0, 0.95); low != 0 || high != 1 {
		t.Errorf("none of none: %g to %g", low, high)
	}
}

// Half widths of t intervals from the tables of Student's t: t(0.975; 10) = 2.228, the
// normal one 1.960 (common practice).
func TestCoverageCounts(t *testing.T) {
	const many = 1e6
	got := coverage([]float64{level(2.22, 1, 10), level(2.24, 1, 10), level(-1.95, 1, many), level(-1.97, 1, many)})
	if len(got) != 3 || got[2].Inside != 2 || got[2].Rows != 4 || got[2].Observed != 0.5 || got[0].Inside != 0 {
		t.Errorf("%+v", got)
	}
	if coverage(nil) != nil {
		t.Error("coverage of nothing")
	}
}

func ExampleSpearman() {
	pressure := []float64{100, 200, 300, 400, 500}
	residual := []float64{-1.2, -0.3, 0.1, 0.4, 1.1}
	rho, p, ok := Spearman(pressure, residual, 0)
	fmt.Printf("%.2f %.4f %v\n", rho, p, ok)
	// Output: 1.00 0.0167 true
}

func ExampleWilson() {
	low, high := Wilson(19, 20, 0.95)
	fmt.Printf("%.3f to %.3f\n", low, high)
	// Output: 0.764 to 0.991
}
