package design_test

import (
	"fmt"
	"math"
	"slices"
	"testing"

	"limsup/fit/design"
)

// grid makes a candidate of each x from lo in n equal steps to hi; its reading has
// the gradient g and a standard uncertainty of 1.
func grid(lo, hi float64, n int, g func(x float64) []float64) (x []float64, c []design.Candidate) {
	for i := range n + 1 {
		at := lo + (hi-lo)*float64(i)/float64(n)
		x = append(x, at)
		c = append(c, design.Candidate{Rows: [][]float64{g(at)}})
	}
	return x, c
}

// support lists the chosen x in ascending order, each as often as chosen.
func support(x []float64, b *design.Batch) []float64 {
	var s []float64
	for i, n := range b.Count {
		for range n {
			s = append(s, x[i])
		}
	}
	return s
}

// Locally optimal designs with a closed form. Each grid holds the optimum as one of
// its points, so that the answer is exact but for the rounding of the grid.
func TestTextbookDesigns(t *testing.T) {
	const (
		θ  = 0.5 // decay rate
		K  = 1.5 // Michaelis constant
		hi = 4.5 // largest concentration
	)
	unit := func(p, i int) []float64 { e := make([]float64, p); e[i] = 1; return e }
	for _, tt := range []struct {
		name       string
		lo, hi     float64
		steps      int
		gradient   func(x float64) []float64
		criterion  design.Criterion
		n          int
		want       []float64
		efficiency float64 // exp Φ of the theory, 0 where not stated
	}{
		{
			// y = exp(−θt): dy/dθ = −t·exp(−θt) is largest where t = 1/θ. (G. E. P. Box and H. L. Lucas,
			// Biometrika 46 (1959) 77, citation from memory; d/dt of t·exp(−θt) is zero there.)
			// The information of one reading there is 1/(θe)², hence u = θe.
			name: "exponential decay, rate only", hi: 10, steps: 1000,
			gradient:  func(t float64) []float64 { return []float64{-t * math.Exp(-θ*t)} },
			criterion: design.Criterion{Kind: design.Determinant}, n: 1, want: []float64{1 / θ}, efficiency: θ * math.E,
		},
		{
			// The same with four readings: all at 1/θ, and half the uncertainty.
			name: "exponential decay, rate only, four readings", hi: 10, steps: 1000,
			gradient:  func(t float64) []float64 { return []float64{-t * math.Exp(-θ*t)} },
			criterion: design.Criterion{Kind: design.Linear}, n: 4, want: []float64{2, 2, 2, 2}, efficiency: θ * math.E / 2,
		},
		{
			// y = a·exp(−θt), both unknown: det M of readings at t₁, t₂ is a²·exp(−2θ(t₁+t₂))·(t₂−t₁)², largest for
			// t₁ = 0 and t₂ = 1/θ (Box and Lucas, as above; by differentiation). With a = 3: det M = 9e⁻²/θ².
			name: "exponential decay, amplitude and rate", hi: 10, steps: 1000,
			gradient:  func(t float64) []float64 { return []float64{math.Exp(-θ * t), -3 * t * math.Exp(-θ*t)} },
			criterion: design.Criterion{Kind: design.Determinant}, n: 2, want: []float64{0, 1 / θ}, efficiency: math.Sqrt(θ * math.E / 3),
		},
		{
			// y = Vx/(K+x): equal numbers at x_max and at x_max·K/(2K+x_max) (R. G. Duggleby, J. Theor. Biol. 81 (1979)
			// 671; L. Endrenyi, Kinetic Data Analysis, 1981; citations from memory. Derivation: det M of x and x_max is
			// proportional to [x(x_max−x)/(K+x)²]², whose logarithm is stationary where x_max(K − x) = 2Kx.)
			name: "Michaelis and Menten", hi: hi, steps: 1000,
			gradient:  func(x float64) []float64 { return []float64{x / (K + x), -2 * x / ((K + x) * (K + x))} },
			criterion: design.Criterion{Kind: design.Determinant}, n: 12,
			want: append(slices.Repeat([]float64{hi * K / (2*K + hi)}, 6), slices.Repeat([]float64{hi}, 6)...),
		},
		{
			// A quadratic on [−1, 1]: equal numbers at −1, 0, 1 (K. Smith, Biometrika 12 (1918) 1; citation from memory).
			name: "quadratic", lo: -1, hi: 1, steps: 200,
			gradient:  func(x float64) []float64 { return []float64{1, x, x * x} },
			criterion: design.Criterion{Kind: design.Determinant}, n: 6, want: []float64{-1, -1, 0, 0, 1, 1},
		},
		{
			// A line on [−1, 1] extrapolated to x₀ = 2: shares (x₀+1)/2x₀ = 3/4 at 1 and 1/4 at −1, variance x₀²/n
			// (P. G. Hoel and A. Levine, Ann. Math. Stat. 35 (1964) 1553; citation from memory).
			name: "extrapolation of a line", lo: -1, hi: 1, steps: 20,
			gradient:  func(x float64) []float64 { return []float64{1, x} },
			criterion: design.Criterion{Kind: design.Linear, Directions: [][]float64{{1, 2}}}, n: 8,
			want: []float64{-1, -1, 1, 1, 1, 1, 1, 1}, efficiency: math.Sqrt(4.0 / 8),
		},
		{
			// Whether a line or a quadratic: the coefficient of x² with the line as nuisance; −1, 0, 1 in shares 1/4, 1/2, 1/4,
			// where the distance of x² from the best line, ½, is reached with alternating sign (A. C. Atkinson and V. V. Fedorov,
			// Biometrika 62 (1975) 57; citation from memory). u = 2/√n.
			name: "line against quadratic", lo: -1, hi: 1, steps: 20,
			gradient:  func(x float64) []float64 { return []float64{x * x, 1, x} },
			criterion: design.Criterion{Kind: design.Linear, Directions: [][]float64{unit(3, 0)}}, n: 8,
			want: []float64{-1, -1, 0, 0, 0, 0, 1, 1}, efficiency: 2 / math.Sqrt(8),
		},
	} {
		t.Run(tt.name, func(t *testing.T) {
			x, c := grid(tt.lo, tt.hi, tt.steps, tt.gradient)
			b, err := (&design.Problem{Candidates: c, Criterion: tt.criterion}).Choose(tt.n)
			if err != nil {
				t.Fatal(err)
			}
			got := support(x, b)
			if len(got) != len(tt.want) {
				t.Fatalf("chose %v, want %v", got, tt.want)
			}
			for i := range got {
				if math.Abs(got[i]-tt.want[i]) > 1e-12*tt.hi {
					t.Errorf("chose %v, want %v", got, tt.want)
					break
				}
			}
			if tt.efficiency != 0 && math.Abs(b.Mean()/tt.efficiency-1) > 1e-9 {
				t.Errorf("mean standard uncertainty %.12g, theory %.12g", b.Mean(), tt.efficiency)
			}
			// The optimum among all designs with these shares: the equivalence theorem (J. Kiefer and
			// J. Wolfowitz, Can. J. Math. 12 (1960) 363, from memory) makes the bound meet the value.
			if b.Slack() > 1e-6 {
				t.Errorf("a better batch could save %.3g of the uncertainty; none should", b.Slack())
			}
		})
	}
}

func ExampleProblem_Choose() {
	// When to read a decaying signal y = a·exp(−θt), near a = 1 and θ = 0.1 per second, with readings
	// good to 0.01 at any whole second up to a minute?
	var c []design.Candidate
	for t := 0.0; t <= 60; t++ {
		e := math.Exp(-0.1 * t)
		c = append(c, design.Candidate{Rows: [][]float64{{e / 0.01, -t * e / 0.01}}})
	}
	p := design.Problem{Candidates: c, Criterion: design.Criterion{Kind: design.Determinant}}
	b, err := p.Choose(4)
	if err != nil {
		fmt.Println(err)
		return
	}
	for i, n := range b.Count {
		if n > 0 {
			fmt.Printf("%d readings at %d s\n", n, i)
		}
	}
	fmt.Printf("u(θ) = %.5f per second\n", b.Uncertainty([]float64{0, 1}))
	// Output:
	// 2 readings at 0 s
	// 2 readings at 10 s
	// u(θ) = 0.00205 per second
}
