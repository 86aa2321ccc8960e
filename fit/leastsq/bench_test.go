package leastsq

import (
	"fmt"
	"testing"

	"gonum.org/v1/gonum/mat"
)

func BenchmarkSolve(b *testing.B) {
	for _, rows := range []int{32, 1000} {
		b.Run(fmt.Sprintf("decay/rows=%d", rows), func(b *testing.B) {
			p := decay(order(rows), 1)
			b.ReportAllocs()
			for b.Loop() {
				if r, err := Solve(p, Settings{}); err != nil || !r.Converged {
					b.Fatal(r, err)
				}
			}
		})
	}
}

func BenchmarkMinimize(b *testing.B) {
	o := decay(order(32), 1).Objective(0.05)
	b.ReportAllocs()
	for b.Loop() {
		if r, err := Minimize(o, Settings{}); err != nil || !r.Converged {
			b.Fatal(r, err)
		}
	}
}

// BenchmarkStep is one factorisation and one damped step: no allocation.
func BenchmarkStep(b *testing.B) {
	p := decay(order(1000), 1)
	bx, err := newBox(p.Params)
	if err != nil {
		b.Fatal(err)
	}
	g := newGaussNewton(p, bx)
	grad, step, d := make([]float64, 2), make([]float64, 2), make([]float64, 2)
	x, free := []float64{1, 0.1}, []int{0, 1}
	var _ mat.Matrix = g.jac
	b.ReportAllocs()
	for b.Loop() {
		g.value(x)
		g.derive(grad, x)
		if !g.adopt(d) || !g.solve(step, free, 1e-3) {
			b.Fatal("no step")
		}
	}
}
