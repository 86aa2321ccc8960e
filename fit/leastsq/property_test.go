package leastsq

import (
	"math"
	"slices"
	"testing"

	"gonum.org/v1/gonum/mat"
	"pgregory.net/rapid"
)

// linear is a random linear problem r = A θ − b with a well-conditioned A: an
// identity block with entries of 4 on top of rows in (−1, 1).
type linear struct {
	m, n int
	a    *mat.Dense
	b    []float64
}

func drawLinear(t *rapid.T) linear {
	n := rapid.IntRange(1, 5).Draw(t, "n")
	l := linear{m: n + rapid.IntRange(1, 20).Draw(t, "extra"), n: n}
	l.a = mat.NewDense(l.m, n, nil)
	for i := range l.m {
		for j := range n {
			v := rapid.Float64Range(-1, 1).Draw(t, "a")
			if i == j {
				v += 4
			}
			l.a.Set(i, j, v)
		}
		l.b = append(l.b, rapid.Float64Range(-10, 10).Draw(t, "b"))
	}
	return l
}

func (l linear) problem(lower, upper float64) Problem {
	p := Problem{Size: l.m}
	for range l.n {
		p.Params = append(p.Params, Param{Start: math.Max(lower, math.Min(upper, 1)), Lower: lower, Upper: upper})
	}
	p.Residuals = func(dst, θ []float64) error {
		for i := range dst {
			dst[i] = -l.b[i]
			for j, v := range θ {
				dst[i] += l.a.At(i, j) * v
			}
		}
		return nil
	}
	p.Jacobian = func(dst *mat.Dense, _ []float64) error {
		dst.Copy(l.a)
		return nil
	}
	return p
}

// agree allows the rounding of a solution of size s to a problem of condition
// below about 100, and the part of it, a few 1e-9 standard errors, that the
// tolerance of the search leaves.
func agree(a, b, s, tol float64) bool { return math.Abs(a-b) <= tol*math.Max(1, s) }

func TestLinearEqualsClosedForm(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		l := drawLinear(t)
		p := l.problem(math.Inf(-1), math.Inf(1))
		// Difference quotients carry ε·10/(6e-6·0.1) = 4e-9 of rounding, times the residuals.
		tol := 1e-8
		if rapid.Bool().Draw(t, "differences") {
			p.Jacobian = nil
			tol = 1e-6
		}
		r, err := Solve(p, Settings{})
		if err != nil || !r.Converged {
			t.Fatal(r, err)
		}
		var want mat.VecDense
		if err := want.SolveVec(l.a, mat.NewVecDense(l.m, l.b)); err != nil {
			t.Fatal(err)
		}
		var info mat.SymDense
		info.SymOuterK(1, l.a.T())
		var inv mat.Dense
		if err := inv.Inverse(&info); err != nil {
			t.Fatal(err)
		}
		s2 := 2 * r.Value / float64(l.m-l.n)
		for i, v := range r.X {
			if !agree(v, want.AtVec(i), mat.Norm(&want, 2), tol) {
				t.Errorf("θ %v, want %v", r.X, want.RawVector().Data)
			}
			if got, w := r.StdErr[i], math.Sqrt(s2*inv.At(i, i)); !agree(got, w, w, tol) {
				t.Errorf("standard error %d %g, want %g", i, got, w)
			}
		}
	})
}

// The optimum between bounds is recognised by its meaning (Karush, Kuhn, Tucker):
// no gradient inside, and a gradient that presses against the bound at it.
func TestBounds(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		l := drawLinear(t)
		lo := rapid.Float64Range(-1, 0.5).Draw(t, "lower")
		hi := lo + rapid.Float64Range(0.01, 1).Draw(t, "width")
		p := l.problem(lo, hi)
		if rapid.Bool().Draw(t, "differences") {
			p.Jacobian = nil
		}
		inner := p.Residuals
		p.Residuals = func(dst, θ []float64) error {
			for _, v := range θ {
				if !(v >= lo && v <= hi) {
					t.Errorf("%v evaluated outside %g and %g", θ, lo, hi)
				}
			}
			return inner(dst, θ)
		}
		r, err := Solve(p, Settings{Starts: 2, Seed: 7})
		if err != nil || !r.Converged {
			t.Fatal(r, err)
		}
		// A gradient of 1e-5 is 1e-6 in θ, where the smallest curvature is about 10.
		for i, g := range r.Gradient {
			switch r.AtBound[i] {
			case AtLower:
				if r.X[i] != lo || g < -1e-5 {
					t.Errorf("θ[%d] = %g, gradient %g at the lower bound", i, r.X[i], g)
				}
			case AtUpper:
				if r.X[i] != hi || g > 1e-5 {
					t.Errorf("θ[%d] = %g, gradient %g at the upper bound", i, r.X[i], g)
				}
			default:
				if math.Abs(g) > 1e-5 {
					t.Errorf("θ[%d] = %g, gradient %g inside", i, r.X[i], g)
				}
			}
			if (r.AtBound[i] == Inside) != (r.NoStdErr[i] == "") && r.CovarianceReason == "" {
				t.Errorf("θ[%d]: %v, %q", i, r.AtBound[i], r.NoStdErr[i])
			}
		}
	})
}

func TestFallbacksStayBetweenBounds(t *testing.T) {
	// |θ − 0.3| + |θ' + 0.2| has kinks on which the smooth searches come to rest.
	for _, rows := range [][]Param{
		{{Start: 0.9, Lower: 0.25, Upper: 1}, {Start: 0, Lower: -0.25, Upper: 0.125}},
		{{Start: 0.9, Lower: 0.25, Upper: math.Inf(1)}, {Start: 0, Lower: math.Inf(-1), Upper: 0.125}},
	} {
		r, err := Minimize(Objective{Params: rows, Eval: func(θ, grad []float64, curv *mat.SymDense) (float64, error) {
			f := 0.0
			for i, at := range []float64{0.3, -0.2} {
				if θ[i] < rows[i].Lower || θ[i] > rows[i].Upper {
					t.Fatalf("%v evaluated", θ)
				}
				f += math.Abs(θ[i] - at)
				if grad != nil {
					grad[i] = math.Copysign(1, θ[i]-at)
				}
				if curv != nil {
					curv.SetSym(i, i, 1)
				}
			}
			return f, nil
		}}, Settings{})
		if err != nil {
			t.Fatal(err)
		}
		// The simplex comes to rest at 1e-12 of the value; 1e-6 is far below the 0.1 of its start.
		if r.Converged || math.Abs(r.X[0]-0.3) > 1e-6 || math.Abs(r.X[1]+0.2) > 1e-6 {
			t.Errorf("%v, converged %v: %s", r.X, r.Converged, r.Reason)
		}
	}
}

func decay(rows []int, unit float64) Problem {
	return Problem{
		Params: []Param{{Name: "height", Start: 1 * unit}, {Name: "rate", Start: 0.1}},
		Size:   len(rows),
		Residuals: func(dst, θ []float64) error {
			for k, i := range rows {
				x := float64(i) / 4
				dst[k] = θ[0]/unit*math.Exp(-θ[1]*x) - (3*math.Exp(-0.4*x) + 0.05*math.Sin(float64(7*i)))
			}
			return nil
		},
	}
}

func order(n int) []int {
	rows := make([]int, n)
	for i := range rows {
		rows[i] = i
	}
	return rows
}

// Neither the order of the rows nor the unit of a parameter moves the optimum.
// 1e-8: what the difference quotients (1e-10 of the columns) and the tolerance leave.
func TestOrderAndUnitsDoNotMatter(t *testing.T) {
	want, err := Solve(decay(order(32), 1), Settings{})
	if err != nil || !want.Converged {
		t.Fatal(want, err)
	}
	if math.Abs(want.X[0]-3) > 0.1 || math.Abs(want.X[1]-0.4) > 0.1 {
		t.Errorf("θ %v is far from the truth 3, 0.4", want.X)
	}
	rapid.Check(t, func(t *rapid.T) {
		rows := rapid.Permutation(order(32)).Draw(t, "rows")
		unit := math.Pow(10, rapid.Float64Range(-12, 12).Draw(t, "decades"))
		r, err := Solve(decay(rows, unit), Settings{})
		if err != nil || !r.Converged {
			t.Fatal(r, err)
		}
		for i, u := range []float64{unit, 1} {
			if math.Abs(r.X[i]/u/want.X[i]-1) > 1e-8 || math.Abs(r.StdErr[i]/u/want.StdErr[i]-1) > 1e-8 {
				t.Errorf("θ %v ± %v, want %v ± %v in units %g", r.X, r.StdErr, want.X, want.StdErr, unit)
			}
		}
		if !slices.Equal(r.AtBound, want.AtBound) {
			t.Error(r.AtBound)
		}
	})
}
