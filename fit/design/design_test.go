package design_test

import (
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"gonum.org/v1/gonum/mat"
	"pgregory.net/rapid"

	"limsup/fit/design"
)

// problem draws a problem of up to 4 parameters with a prior that determines them,
// candidates of one or two rows, and any criterion.
func problem(t *rapid.T) *design.Problem {
	p := rapid.IntRange(1, 4).Draw(t, "p")
	row := rapid.SliceOfN(rapid.Float64Range(-3, 3), p, p)
	q := &design.Problem{Prior: mat.NewSymDense(p, nil)}
	for i := range p {
		q.Prior.SetSym(i, i, rapid.Float64Range(0.1, 2).Draw(t, "prior"))
	}
	for range rapid.IntRange(1, 6).Draw(t, "candidates") {
		c := design.Candidate{Rows: rapid.SliceOfN(row, 1, 2).Draw(t, "rows")}
		q.Candidates = append(q.Candidates, c)
	}
	q.Criterion.Kind = rapid.SampledFrom([]design.Kind{design.Determinant, design.Linear}).Draw(t, "kind")
	if rapid.Bool().Draw(t, "one direction") {
		d := make([]float64, p)
		d[rapid.IntRange(0, p-1).Draw(t, "direction")] = 1
		q.Criterion.Directions = [][]float64{d}
	}
	return q
}

// direct is Φ and the covariance by plain inversion.
func direct(q *design.Problem, count []int) (float64, *mat.Dense) {
	p := q.Prior.SymmetricDim()
	m := mat.NewDense(p, p, nil)
	m.Copy(q.Prior)
	for i, n := range count {
		for _, f := range q.Candidates[i].Rows {
			for a := range p {
				for b := range p {
					m.Set(a, b, m.At(a, b)+float64(n)*f[a]*f[b])
				}
			}
		}
	}
	var c mat.Dense
	if err := c.Inverse(m); err != nil {
		panic(err)
	}
	if d := q.Criterion.Directions; len(d) == 1 {
		v := mat.NewVecDense(p, d[0])
		return 0.5 * math.Log(mat.Inner(v, &c, v)), &c
	}
	if q.Criterion.Kind == design.Determinant {
		ld, _ := mat.LogDet(&c)
		return ld / float64(2*p), &c
	}
	return 0.5 * math.Log(mat.Trace(&c)/float64(p)), &c
}

// The condition of the drawn problems stays below 1e5, so 1e-9 leaves four decades
// above the rounding of an inversion.
const closeEnough = 1e-9

// What a single measurement, a batch and its evaluation state is what plain
// inversion gives, and no exchange is undone by its order.
func TestValuesAgreeWithInversion(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		q := problem(t)
		ranked, err := q.Rank()
		if err != nil {
			t.Fatal(err)
		}
		for i, s := range ranked {
			count := make([]int, len(q.Candidates))
			count[s.Candidate] = 1
			if v, _ := direct(q, count); math.Abs(v-s.Value) > closeEnough {
				t.Errorf("candidate %d: Φ %.15g, by inversion %.15g", s.Candidate, s.Value, v)
			}
			if i > 0 && s.Value < ranked[i-1].Value-2e-9 {
				t.Errorf("rank %d is better than the one above it", i)
			}
			if s.Gain < 0 || s.Gain > 1 {
				t.Errorf("gain %g", s.Gain)
			}
		}
		n := rapid.IntRange(1, 5).Draw(t, "n")
		b, err := q.Choose(n)
		if err != nil {
			t.Fatal(err)
		}
		v, c := direct(q, b.Count)
		if math.Abs(v-b.Value) > closeEnough {
			t.Errorf("batch: Φ %.15g, by inversion %.15g", b.Value, v)
		}
		if !mat.EqualApprox(c, b.Covariance, 1e-7) {
			t.Errorf("covariance %v, by inversion %v", mat.Formatted(b.Covariance), mat.Formatted(c))
		}
		count := make([]int, len(q.Candidates))
		for _, s := range b.Steps {
			count[s.Candidate]++
			if v, _ := direct(q, count); !s.Determined || math.Abs(v-s.Value) > closeEnough {
				t.Errorf("step: Φ %.15g, by inversion %.15g", s.Value, v)
			}
		}
		if !slices.Equal(count, b.Count) {
			t.Errorf("steps add up to %v, counts are %v", count, b.Count)
		}
	})
}

// No batch beats the bound, a chosen one beats an evenly spaced one, and the best of
// all batches, found by trying each, is reached within the stated slack.
func TestChoiceAgainstAllBatches(t *testing.T) {
	missed, tried := 0, 0
	rapid.Check(t, func(t *rapid.T) {
		q := problem(t)
		n := rapid.IntRange(1, 4).Draw(t, "n")
		b, err := q.Choose(n)
		if err != nil {
			t.Fatal(err)
		}
		best := math.Inf(1)
		var walk func(count []int, at, left int)
		walk = func(count []int, at, left int) {
			if at == len(count)-1 {
				count[at] = left
				v, _ := direct(q, count)
				best = math.Min(best, v)
				return
			}
			for k := 0; k <= left; k++ {
				count[at] = k
				walk(count, at+1, left-k)
			}
		}
		walk(make([]int, len(q.Candidates)), 0, n)
		if best < b.Bound-closeEnough {
			t.Fatalf("a batch reaches %.12g, below the bound %.12g", best, b.Bound)
		}
		spaced, err := q.Spaced(n)
		if err != nil {
			t.Fatal(err)
		}
		e, err := q.Evaluate(spaced)
		if err != nil {
			t.Fatal(err)
		}
		if b.Value > e.Value+2e-9 || b.Value > b.Greedy+2e-9 {
			t.Fatalf("chosen %.12g, evenly spaced %.12g, greedy %.12g", b.Value, e.Value, b.Greedy)
		}
		tried++
		if b.Value > best+2e-9 {
			missed++
			// An exchange of one member at a time can end above the best; over 30 000 draws it
			// did so 8 times, by at most 0.038 in Φ.
			if b.Value > best+0.1 {
				t.Fatalf("chosen %.12g, best of all %.12g", b.Value, best)
			}
		}
	})
	if missed > 1+tried/100 {
		t.Errorf("missed the best batch in %d of %d problems", missed, tried)
	}
}

// 400 problems that do not change, three measurements of 12 candidates in three
// parameters: the best of all batches is reached in each. (Measured: without
// exchanges three are missed.)
func TestExchangesReachTheBest(t *testing.T) {
	rng := rand.New(rand.NewPCG(11, 12))
	exchanges := 0
	for k := range 400 {
		q := &design.Problem{Prior: mat.NewSymDense(3, nil), Criterion: design.Criterion{Kind: []design.Kind{design.Determinant, design.Linear}[k%2]}}
		for i := range 3 {
			q.Prior.SetSym(i, i, 0.01)
		}
		for range 12 {
			q.Candidates = append(q.Candidates, design.Candidate{Rows: [][]float64{{rng.NormFloat64(), rng.NormFloat64(), rng.NormFloat64()}}})
		}
		b, err := q.Choose(3)
		if err != nil {
			t.Fatal(err)
		}
		exchanges += b.Exchanges
		best, count := math.Inf(1), make([]int, 12)
		for i := range 12 {
			for j := range i + 1 {
				for l := range j + 1 {
					clear(count)
					count[i]++
					count[j]++
					count[l]++
					v, _ := direct(q, count)
					best = math.Min(best, v)
				}
			}
		}
		if b.Value > best+1e-8 {
			t.Errorf("problem %d: chosen %.9g, best %.9g", k, b.Value, best)
		}
	}
	if exchanges == 0 {
		t.Error("no exchange was ever made")
	}
}

// Four readings of a quadratic cannot be shared out in thirds: theory allows
// det M = 4³·4/27 (a third each at −1, 0, 1), the best four reach less, and the bound lies
// at or below theory, not far.
func TestBound(t *testing.T) {
	_, c := grid(-1, 1, 20, func(x float64) []float64 { return []float64{1, x, x * x} })
	b, err := (&design.Problem{Candidates: c, Criterion: design.Criterion{Kind: design.Determinant}}).Choose(4)
	if err != nil {
		t.Fatal(err)
	}
	theory := -math.Log(64*4.0/27) / 6
	if !(b.Bound <= theory+1e-12 && theory < b.Value) {
		t.Errorf("bound %.6f, theory %.6f, reached %.6f", b.Bound, theory, b.Value)
	}
	// One point doubled: det M = 2·1·1·4 = 8 for readings at −1, 0, 1 with Vandermonde determinant 2.
	if want := -math.Log(8) / 6; math.Abs(b.Value-want) > 1e-12 {
		t.Errorf("reached %.9f, by hand %.9f", b.Value, want)
	}
	if b.Value-b.Bound > 0.2 {
		t.Errorf("bound %.6f is far from %.6f", b.Bound, b.Value)
	}
}

// A batch does not depend on the units of the parameters.
func TestUnitsDoNotMatter(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		q := problem(t)
		n := rapid.IntRange(1, 4).Draw(t, "n")
		unit := []float64{1e-6, 1e3, 1, 1e9}
		other := &design.Problem{Criterion: q.Criterion}
		p := q.Prior.SymmetricDim()
		other.Prior = mat.NewSymDense(p, nil)
		for i := range p {
			other.Prior.SetSym(i, i, q.Prior.At(i, i)/(unit[i]*unit[i]))
		}
		for _, c := range q.Candidates {
			var k design.Candidate
			for _, r := range c.Rows {
				s := make([]float64, p)
				for i := range s {
					s[i] = r[i] / unit[i]
				}
				k.Rows = append(k.Rows, s)
			}
			other.Candidates = append(other.Candidates, k)
		}
		if len(q.Criterion.Directions) == 0 && q.Criterion.Kind == design.Linear {
			return // a mean over parameters of different units is a matter of units
		}
		a, errA := q.Choose(n)
		b, errB := other.Choose(n)
		if errA != nil || errB != nil {
			t.Fatal(errA, errB)
		}
		ea, err := q.Evaluate(b.Count)
		if err != nil {
			t.Fatal(err)
		}
		if math.Abs(ea.Value-a.Value) > 1e-8 {
			t.Errorf("in other units the batch is %v instead of %v, worth %.12g instead of %.12g", b.Count, a.Count, ea.Value, a.Value)
		}
	})
}

func TestRepeats(t *testing.T) {
	// One parameter known to 1 before, a reading good to 1: after n, u = 1/√(1+n). One more
	// lowers it by 1 − √((1+n)/(2+n)), below 5 % from n = 9 on (√(10/11) = 0.9535; √(9/10) = 0.9487).
	q := &design.Problem{Prior: mat.NewSymDense(1, []float64{1}), Candidates: []design.Candidate{{Rows: [][]float64{{1}}}},
		Criterion: design.Criterion{Kind: design.Linear}}
	r, err := q.Repeat(0, 0.05, 100)
	if err != nil {
		t.Fatal(err)
	}
	if r.Enough != 9 || r.Bounded || len(r.Mean) != 10 {
		t.Errorf("enough at %d of %d, bounded %v; want 9 of 10", r.Enough, len(r.Mean), r.Bounded)
	}
	for n, u := range r.Mean {
		if want := 1 / math.Sqrt(1+float64(n)); math.Abs(u-want) > 1e-14 {
			t.Errorf("u after %d = %.15g, want %.15g", n, u, want)
		}
	}
	if r, err := q.Repeat(0, 0.001, 5); err != nil || !r.Bounded || r.Enough != 5 {
		t.Errorf("with at most 5 repeats: %+v, %v", r, err)
	}
}

// Sample sizes: the first row solved by hand with t(0.975; 17) = 2.1098 and t(0.975; 16) =
// 2.1199 (published tables of Student's t): 2.1098/√18 = 0.4973 ≤ 0.5 < 2.1199/√17 = 0.5142. The
// others likewise: t(0.975; 4) = 2.7764, t(0.975; 3) = 3.1824; t(0.95; 12) = 1.7823, t(0.95; 11) = 1.7959.
func TestSampleSize(t *testing.T) {
	for _, tt := range []struct {
		sd, half, level float64
		want            int
	}{
		{1, 0.5, 0.95, 18},
		{0.4, 0.5, 0.95, 5}, // 2.7764·0.4/√5 = 0.4967; 3.1824·0.4/2 = 0.636
		{1, 0.5, 0.90, 13},  // 1.7823/√13 = 0.4943; 1.7959/√12 = 0.5184
		{0.001, 1, 0.95, 2}, // never fewer than two
		{0, 0.5, 0.95, 2},   // readings that do not scatter
	} {
		if n, err := design.SampleSize(tt.sd, tt.half, tt.level); err != nil || n != tt.want {
			t.Errorf("SampleSize(%g, %g, %g) = %d, %v; want %d", tt.sd, tt.half, tt.level, n, err, tt.want)
		}
	}
	for _, bad := range [][3]float64{{-1, 1, 0.9}, {1, 0, 0.9}, {1, 1, 1}, {math.NaN(), 1, 0.9}, {1, math.Inf(1), 0.9}, {1e6, 1, 0.95}} {
		var e *design.InputError
		if n, err := design.SampleSize(bad[0], bad[1], bad[2]); !errors.As(err, &e) {
			t.Errorf("SampleSize(%v) = %d, %v; want an *InputError", bad, n, err)
		}
	}
}

// Power: Φ(z) values of published tables of the normal distribution; 1.96 + 1.2816 standard
// uncertainties are found in 90 % of all cases.
func TestPower(t *testing.T) {
	for _, tt := range []struct{ u, want, tol float64 }{
		{1 / 3.2415, 0.9, 1e-4},
		{1 / 1.95996, 0.5, 1e-4},
		{math.Inf(1), 0.05, 1e-12},
		{1e-3, 1, 1e-12},
	} {
		if p := design.Power(tt.u, 0.95); math.Abs(p-tt.want) > tt.tol {
			t.Errorf("Power(%g) = %.6f, want %.6f", tt.u, p, tt.want)
		}
	}
}

func TestLimitOfTimes(t *testing.T) {
	q := &design.Problem{Candidates: []design.Candidate{
		{Rows: [][]float64{{10}}, Most: 2}, {Rows: [][]float64{{1}}}}, Criterion: design.Criterion{Kind: design.Determinant}}
	b, err := q.Choose(5)
	if err != nil || !slices.Equal(b.Count, []int{2, 3}) {
		t.Errorf("counts %v, %v; want 2 and 3", b, err)
	}
	if s, err := q.Spaced(9); err != nil || !slices.Equal(s, []int{2, 7}) {
		t.Errorf("evenly spaced %v, %v; want 2 and 7", s, err)
	}
}

func TestErrors(t *testing.T) {
	one := []design.Candidate{{Rows: [][]float64{{1, 0}}}}
	two := append(one, design.Candidate{Rows: [][]float64{{0, 1}}})
	d := design.Criterion{Kind: design.Determinant}
	nan := mat.NewSymDense(2, []float64{math.NaN(), 0, 0, 1})
	for _, tt := range []struct {
		name     string
		q        design.Problem
		n        int
		singular bool
	}{
		{"no candidate", design.Problem{Criterion: d}, 1, false},
		{"no criterion", design.Problem{Candidates: two}, 2, false},
		{"no rows", design.Problem{Candidates: []design.Candidate{{}}, Criterion: d}, 1, false},
		{"rows of unequal length", design.Problem{Candidates: append(one, design.Candidate{Rows: [][]float64{{1}}}), Criterion: d}, 1, false},
		{"a row with an infinity", design.Problem{Candidates: []design.Candidate{{Rows: [][]float64{{math.Inf(1), 1}}}}, Criterion: d}, 1, false},
		{"a prior that is not a number", design.Problem{Prior: nan, Candidates: two, Criterion: d}, 1, false},
		{"a negative number of times", design.Problem{Candidates: []design.Candidate{{Rows: [][]float64{{1}}, Most: -1}}, Criterion: d}, 1, false},
		{"a direction of the wrong length", design.Problem{Candidates: two, Criterion: design.Criterion{Kind: design.Linear, Directions: [][]float64{{1}}}}, 2, false},
		{"a direction of nothing", design.Problem{Candidates: two, Criterion: design.Criterion{Kind: design.Linear, Directions: [][]float64{{0, 0}}}}, 2, false},
		{"no measurement", design.Problem{Candidates: two, Criterion: d}, 0, false},
		{"a parameter that nothing tells of", design.Problem{Candidates: one, Criterion: d}, 1, true},
		{"too small a batch", design.Problem{Candidates: two, Criterion: d}, 1, true},
	} {
		t.Run(tt.name, func(t *testing.T) {
			_, err := tt.q.Choose(tt.n)
			var in *design.InputError
			var sing *design.SingularError
			if tt.singular && !errors.As(err, &sing) || !tt.singular && !errors.As(err, &in) {
				t.Errorf("error %v", err)
			}
		})
	}
	if _, err := (&design.Problem{Candidates: two, Criterion: d}).Rank(); !errors.As(err, new(*design.SingularError)) {
		t.Errorf("rank without a prior: %v", err)
	}
}

func ExampleProblem_Rank() {
	// A line through readings at 0 is known; where to read next to know its value at 10?
	prior := mat.NewSymDense(2, []float64{4, 0, 0, 0.01}) // four readings at 0, and a slope known to ±10
	p := design.Problem{Prior: prior, Candidates: []design.Candidate{{Rows: [][]float64{{1, 1}}}, {Rows: [][]float64{{1, 5}}}},
		Criterion: design.Criterion{Kind: design.Linear, Directions: [][]float64{{1, 10}}}}
	r, err := p.Rank()
	if err != nil {
		fmt.Println(err)
		return
	}
	for _, s := range r {
		fmt.Printf("candidate %d leaves u = %.2f\n", s.Candidate, math.Exp(s.Value))
	}
	// Output:
	// candidate 1 leaves u = 2.06
	// candidate 0 leaves u = 10.90
}
