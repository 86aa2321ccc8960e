package leastsq_test

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"

	"limsup/fit/leastsq"
)

// A straight line through the calibration of a thermometer: correction b = y1 +
// y2 (t − 20 °C). JCGM 100:2008 (GUM), example H.3, prints y1 = −0.1712(29) °C,
// y2 = 0.00218(67), r = −0.930, s = 0.0035 °C; data from memory.
func ExampleSolve() {
	t := []float64{21.521, 22.012, 22.512, 23.003, 23.507, 23.999, 24.513, 25.002, 25.503, 26.010, 26.511}
	b := []float64{-0.171, -0.169, -0.166, -0.159, -0.164, -0.165, -0.156, -0.157, -0.159, -0.161, -0.160}
	r, err := leastsq.Solve(leastsq.Problem{
		Params: []leastsq.Param{{Name: "y1"}, {Name: "y2"}},
		Size:   len(t),
		Residuals: func(dst, y []float64) error {
			for i := range dst {
				dst[i] = y[0] + y[1]*(t[i]-20) - b[i]
			}
			return nil
		},
	}, leastsq.Settings{})
	if err != nil { // no start could be evaluated, or the problem makes no sense
		fmt.Println(err)
		return
	}
	if !r.Converged { // an answer that is not an optimum says why
		fmt.Println(r.Reason)
		return
	}
	id := leastsq.Identify(r)
	fmt.Printf("y1 %.4f (%.4f), y2 %.5f (%.5f), r %.3f\n", r.X[0], r.StdErr[0], r.X[1], r.StdErr[1], id.Correlation.At(0, 1))
	fmt.Printf("s %.4f\n", math.Sqrt(2*r.Value/float64(r.DegreesOfFreedom())))
	// Output:
	// y1 -0.1712 (0.0029), y2 0.00218 (0.00067), r -0.930
	// s 0.0035
}

// Lifetimes of which some are only known to exceed a value: the rate of an
// exponential law is events over total time, 9/359 per week, with standard error
// rate/3. The ends of the interval solve 359λ − 9 ln λ = minimum + χ²/2 (bisection in
// Python: 0.0120463, 0.0451930). E. J. Freireich et al., Blood 21 (1963) 699, 6-MP arm; data from memory.
func ExampleMinimize() {
	const events, weeks = 9, 359
	o := leastsq.Objective{
		Params: []leastsq.Param{{Name: "rate", Start: 1, Lower: 1e-6, Upper: 10}},
		Size:   21,
		Eval: func(theta, grad []float64, curv *mat.SymDense) (float64, error) {
			λ := theta[0]
			if grad != nil {
				grad[0] = weeks - events/λ
			}
			if curv != nil {
				curv.SetSym(0, 0, events/(λ*λ))
			}
			return weeks*λ - events*math.Log(λ), nil
		},
	}
	r, err := leastsq.Minimize(o, leastsq.Settings{})
	if err != nil || !r.Converged {
		fmt.Println(r, err)
		return
	}
	iv, err := leastsq.Profile(o, r, 0, 0.95, leastsq.Settings{})
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("rate %.6f, standard error %.6f\n", r.X[0], r.StdErr[0])
	fmt.Printf("95 %% from %.4f to %.4f\n", iv.Lower, iv.Upper)
	// Output:
	// rate 0.025070, standard error 0.008357
	// 95 % from 0.0120 to 0.0452
}

// One-way random effects by maximum likelihood: the yield of five samples from
// each of six batches. −2 ln L = 327.327060, variance between batches 1388.3333,
// within 2451.25. Data: Davies and Goldsmith, Statistical Methods in Research and
// Production, 4th edition 1972, from memory; answers recomputed from the closed
// form for balanced batches.
func ExampleMinimize_randomEffects() {
	yields := [][]float64{
		{1545, 1440, 1440, 1520, 1580}, {1540, 1555, 1490, 1560, 1495}, {1595, 1550, 1605, 1510, 1560},
		{1445, 1440, 1595, 1465, 1545}, {1595, 1630, 1515, 1635, 1625}, {1520, 1455, 1450, 1480, 1445},
	}
	r, err := leastsq.Minimize(leastsq.Objective{
		Params: []leastsq.Param{
			{Name: "mean", Start: 1500},
			{Name: "between", Start: 1000, Upper: math.Inf(1)},
			{Name: "within", Start: 1000, Lower: 1, Upper: math.Inf(1)},
		},
		Size: 30,
		// With w within and c = within + 5 between a batch of sum of squares S about
		// its mean ȳ adds ½[4 ln w + ln c + S/w + 5(ȳ−µ)²/c] + (5/2) ln 2π.
		Eval: func(θ, grad []float64, curv *mat.SymDense) (float64, error) {
			µ, w, c := θ[0], θ[2], θ[2]+5*θ[1]
			f, dµ, dw, dc := 0.0, 0.0, 0.0, 0.0
			for _, batch := range yields {
				mean, s := 0.0, 0.0
				for _, y := range batch {
					mean += y / 5
				}
				for _, y := range batch {
					s += (y - mean) * (y - mean)
				}
				d := mean - µ
				f += 0.5*(4*math.Log(w)+math.Log(c)+s/w+5*d*d/c) + 2.5*math.Log(2*math.Pi)
				dµ -= 5 * d / c
				dw += 0.5 * (4/w - s/(w*w))
				dc += 0.5 * (1/c - 5*d*d/(c*c))
			}
			if grad != nil {
				grad[0], grad[1], grad[2] = dµ, 5*dc, dw+dc
			}
			if curv != nil { // expected information
				curv.SetSym(0, 0, 30/c)
				iw, ic := 12/(w*w), 3/(c*c)
				curv.SetSym(1, 1, 25*ic)
				curv.SetSym(1, 2, 5*ic)
				curv.SetSym(2, 2, iw+ic)
			}
			return f, nil
		},
	}, leastsq.Settings{})
	if err != nil || !r.Converged {
		fmt.Println(r, err)
		return
	}
	fmt.Printf("mean %.1f, between %.4f, within %.2f, −2 ln L %.6f\n", r.X[0], r.X[1], r.X[2], 2*r.Value)
	// Output:
	// mean 1527.5, between 1388.3333, within 2451.25, −2 ln L 327.327060
}

// Two factors of which only the product acts: no uncertainty, and the reason.
func ExampleIdentify() {
	x := []float64{1, 2, 3, 4}
	r, err := leastsq.Solve(leastsq.Problem{
		Params: []leastsq.Param{{Name: "a", Start: 1}, {Name: "b", Start: 1}},
		Size:   len(x),
		Residuals: func(dst, θ []float64) error {
			for i := range dst {
				dst[i] = θ[0]*θ[1]*x[i] - 6*x[i] + math.Cos(9*x[i])
			}
			return nil
		},
	}, leastsq.Settings{})
	if err != nil || !r.Converged {
		fmt.Println(r, err)
		return
	}
	id := leastsq.Identify(r)
	fmt.Printf("rank %d of %d: %s\n", id.Rank, len(r.X), r.CovarianceReason)
	fmt.Printf("direction %.2f\n", id.Null[0].Share)
	// Output:
	// rank 1 of 2: a and b cannot be told apart
	// direction [1.00 -1.00]
}
