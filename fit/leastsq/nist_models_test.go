package leastsq

import (
	"math"
	"math/big"

	"gonum.org/v1/gonum/num/dual"
)

// The 27 models of the data sets, as printed in their files, on dual numbers:
// one evaluation gives a value and its exact derivative along one parameter.

type num = dual.Number

func c(v float64) num { return num{Real: v} }

func add(a ...num) num {
	s := a[0]
	for _, v := range a[1:] {
		s = dual.Add(s, v)
	}
	return s
}

func mul(a ...num) num {
	s := a[0]
	for _, v := range a[1:] {
		s = dual.Mul(s, v)
	}
	return s
}

func neg(a num) num              { return dual.Scale(-1, a) }
func sub(a, b num) num           { return dual.Sub(a, b) }
func div(a, b num) num           { return dual.Mul(a, dual.Inv(b)) }
func exp(a num) num              { return dual.Exp(a) }
func scale(f float64, a num) num { return dual.Scale(f, a) }
func square(a num) num           { return dual.Mul(a, a) }

// poly is b₀ + b₁x + b₂x² …
func poly(x float64, b ...num) num {
	s := c(0)
	for i := len(b) - 1; i >= 0; i-- {
		s = add(scale(x, s), b[i])
	}
	return s
}

func gauss(b []num, x float64) num {
	peak := func(h, m, w num) num { return mul(h, exp(neg(square(div(sub(c(x), m), w))))) }
	return add(mul(b[0], exp(scale(-x, b[1]))), peak(b[2], b[3], b[4]), peak(b[5], b[6], b[7]))
}

func lanczos(b []num, x float64) num {
	return add(mul(b[0], exp(scale(-x, b[1]))), mul(b[2], exp(scale(-x, b[3]))), mul(b[4], exp(scale(-x, b[5]))))
}

func chwirut(b []num, x float64) num {
	return div(exp(scale(-x, b[0])), add(b[1], scale(x, b[2])))
}

func saturating(b []num, x float64) num { return mul(b[0], sub(c(1), exp(scale(-x, b[1])))) }

func cubic(b []num, x float64) num {
	return div(poly(x, b[0], b[1], b[2], b[3]), poly(x, c(1), b[4], b[5], b[6]))
}

// nistModels by name of the data set; x are the predictors of one row.
var nistModels = map[string]func(b []num, x []float64) num{
	"Bennett5": func(b []num, x []float64) num {
		return mul(b[0], dual.Pow(add(b[1], c(x[0])), neg(dual.Inv(b[2]))))
	},
	"BoxBOD":   func(b []num, x []float64) num { return saturating(b, x[0]) },
	"Chwirut1": func(b []num, x []float64) num { return chwirut(b, x[0]) },
	"Chwirut2": func(b []num, x []float64) num { return chwirut(b, x[0]) },
	"DanWood":  func(b []num, x []float64) num { return mul(b[0], exp(scale(math.Log(x[0]), b[1]))) },
	"ENSO": func(b []num, x []float64) num {
		ω := 2 * math.Pi * x[0]
		wave := func(k, s, p num) num {
			φ := scale(ω, dual.Inv(p))
			return add(mul(k, dual.Cos(φ)), mul(s, dual.Sin(φ)))
		}
		return add(b[0], wave(b[1], b[2], c(12)), wave(b[4], b[5], b[3]), wave(b[7], b[8], b[6]))
	},
	"Eckerle4": func(b []num, x []float64) num {
		return mul(div(b[0], b[1]), exp(scale(-0.5, square(div(sub(c(x[0]), b[2]), b[1])))))
	},
	"Gauss1": func(b []num, x []float64) num { return gauss(b, x[0]) },
	"Gauss2": func(b []num, x []float64) num { return gauss(b, x[0]) },
	"Gauss3": func(b []num, x []float64) num { return gauss(b, x[0]) },
	"Hahn1":  func(b []num, x []float64) num { return cubic(b, x[0]) },
	"Kirby2": func(b []num, x []float64) num {
		return div(poly(x[0], b[0], b[1], b[2]), poly(x[0], c(1), b[3], b[4]))
	},
	"Lanczos1": func(b []num, x []float64) num { return lanczos(b, x[0]) },
	"Lanczos2": func(b []num, x []float64) num { return lanczos(b, x[0]) },
	"Lanczos3": func(b []num, x []float64) num { return lanczos(b, x[0]) },
	"MGH09": func(b []num, x []float64) num {
		return div(mul(b[0], add(c(x[0]*x[0]), scale(x[0], b[1]))), add(c(x[0]*x[0]), scale(x[0], b[2]), b[3]))
	},
	"MGH10": func(b []num, x []float64) num {
		return mul(b[0], exp(div(b[1], add(c(x[0]), b[2]))))
	},
	"MGH17": func(b []num, x []float64) num {
		return add(b[0], mul(b[1], exp(scale(-x[0], b[3]))), mul(b[2], exp(scale(-x[0], b[4]))))
	},
	"Misra1a": func(b []num, x []float64) num { return saturating(b, x[0]) },
	"Misra1b": func(b []num, x []float64) num {
		return mul(b[0], sub(c(1), dual.Inv(square(add(c(1), scale(x[0]/2, b[1]))))))
	},
	"Misra1c": func(b []num, x []float64) num {
		return mul(b[0], sub(c(1), dual.Inv(dual.Sqrt(add(c(1), scale(2*x[0], b[1]))))))
	},
	"Misra1d": func(b []num, x []float64) num {
		return div(scale(x[0], mul(b[0], b[1])), add(c(1), scale(x[0], b[1])))
	},
	"Nelson": func(b []num, x []float64) num { // of log y
		return sub(b[0], mul(scale(x[0], b[1]), exp(scale(-x[1], b[2]))))
	},
	"Rat42": func(b []num, x []float64) num {
		return div(b[0], add(c(1), exp(sub(b[1], scale(x[0], b[2])))))
	},
	"Rat43": func(b []num, x []float64) num {
		return div(b[0], dual.Pow(add(c(1), exp(sub(b[1], scale(x[0], b[2])))), dual.Inv(b[3])))
	},
	"Roszman1": func(b []num, x []float64) num {
		return sub(sub(b[0], scale(x[0], b[1])), scale(1/math.Pi, dual.Atan(div(b[2], sub(c(x[0]), b[3])))))
	},
	"Thurber": func(b []num, x []float64) num { return cubic(b, x[0]) },
}

// lanczosResiduals evaluates the three-exponential model with 160 bits. The
// residuals of Lanczos1 are 1e-13 beside values of 2.5: in double precision the
// rounding of y, x and exp, 2e-16 of 2.5, is half a percent of them and leaves the
// standard deviations three digits, whatever the solver.
func lanczosResiduals(rows [][]string) func(dst, theta []float64) error {
	const bits = 160
	wide := func(text string) *big.Float {
		v, _, err := big.ParseFloat(text, 10, bits, big.ToNearestEven)
		if err != nil {
			panic(err)
		}
		return v
	}
	var ys, xs []*big.Float
	for _, row := range rows {
		ys, xs = append(ys, wide(row[0])), append(xs, wide(row[1]))
	}
	return func(dst, theta []float64) error {
		for i := range dst {
			sum := new(big.Float).SetPrec(bits).Neg(ys[i])
			for k := 0; k < len(theta); k += 2 {
				a := new(big.Float).SetPrec(bits).SetFloat64(-theta[k+1])
				e := wideExp(a.Mul(a, xs[i]))
				sum.Add(sum, e.Mul(e, new(big.Float).SetFloat64(theta[k])))
			}
			dst[i], _ = sum.Float64()
		}
		return nil
	}
}

// wideExp is exp by its series at a/1024, squared ten times.
func wideExp(a *big.Float) *big.Float {
	r := new(big.Float).SetMantExp(a, -10)
	if v, _ := r.Float64(); math.Abs(v) > 1 {
		return new(big.Float).SetPrec(a.Prec()).SetFloat64(math.Exp(1024 * v))
	}
	sum := new(big.Float).SetPrec(a.Prec()).SetInt64(1)
	term := new(big.Float).Copy(sum)
	for n := int64(1); n < 40; n++ { // 1/40! < 2^-159
		term.Mul(term, r)
		term.Quo(term, new(big.Float).SetInt64(n))
		sum.Add(sum, term)
	}
	for range 10 {
		sum.Mul(sum, sum)
	}
	return sum
}
