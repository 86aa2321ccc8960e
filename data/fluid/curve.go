package fluid

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/interp"
)

// curve is a positive property of temperature: its value in SI and dln(value)/dT in 1/K.
type curve interface {
	at(T float64) (v, dlnvdT float64)
}

// minPoints is the least number of rows of a table: a cubic spline without artificial
// end conditions needs four.
const minPoints = 4

// axis maps T to the variable in which a property is close to a straight line:
// x increases with T.
type axis interface {
	x(T float64) (x, dxdT float64)
}

// reciprocal is x = −1/T, for the logarithm of a vapour pressure.
type reciprocal struct{}

func (reciprocal) x(T float64) (x, dxdT float64) { return -1 / T, 1 / (T * T) }

// cubeRoot is x = −(1 − T/Tc)^⅓, for densities, whose difference along saturation goes
// to zero about as τ^⅓.
type cubeRoot struct{ tc float64 }

func (c cubeRoot) x(T float64) (x, dxdT float64) {
	τ := (c.tc - T) / c.tc
	x = -math.Cbrt(τ)
	return x, -x / (3 * (c.tc - T))
}

// table interpolates with the cubic spline that has no knot at the second and the last
// but one point, in ln(value) if logarithmic.
type table struct {
	axis        axis
	logarithmic bool
	spline      interp.NotAKnotCubic
}

func (t *table) at(T float64) (v, dlnvdT float64) {
	x, dxdT := t.axis.x(T)
	v = t.spline.Predict(x)
	dlnvdT = t.spline.PredictDerivative(x) * dxdT
	if t.logarithmic {
		return math.Exp(v), dlnvdT
	}
	return v, dlnvdT / v
}

// pointError is a defect of a table at one row, counted from 0.
type pointError struct {
	row  int
	text string
}

func (e *pointError) Error() string { return e.text }

// newTable fits a spline through (T, value) rows, value in SI. sign is the direction
// in which the property must go with temperature: +1 or −1.
//
// Errors: *pointError.
func newTable(T, v []float64, a axis, logarithmic bool, sign float64) (*table, error) {
	if len(T) < minPoints {
		return nil, fmt.Errorf("%d rows, want at least %d", len(T), minPoints)
	}
	t := &table{axis: a, logarithmic: logarithmic}
	xs, ys := make([]float64, len(T)), make([]float64, len(T))
	for i := range T {
		if !(T[i] > 0) {
			return nil, &pointError{i, fmt.Sprintf("temperature %.10g K is not positive", T[i])}
		}
		if !(v[i] > 0) {
			return nil, &pointError{i, fmt.Sprintf("value %.10g is not positive", v[i])}
		}
		xs[i], _ = a.x(T[i])
		if ys[i] = v[i]; logarithmic {
			ys[i] = math.Log(v[i])
		}
		if i == 0 {
			continue
		}
		if !(T[i] > T[i-1] && xs[i] > xs[i-1]) {
			return nil, &pointError{i, fmt.Sprintf("temperature %.10g K does not rise above the row before it", T[i])}
		}
		if !(sign*ys[i] > sign*ys[i-1]) {
			return nil, &pointError{i, fmt.Sprintf("value at %.10g K does not %s from the row before it", T[i], map[bool]string{true: "rise", false: "fall"}[sign > 0])}
		}
	}
	if err := t.spline.Fit(xs, ys); err != nil {
		return nil, err
	}
	// Between the rows a typing error shows as a slope of the wrong sign.
	const steps = 4
	for i := 1; i < len(T); i++ {
		for k := range steps {
			v, slope := t.at(T[i-1] + (T[i]-T[i-1])*(float64(k)+0.5)/steps)
			if !(v > 0 && v < math.MaxFloat64 && sign*slope > 0) {
				return nil, &pointError{i, fmt.Sprintf("rows are not smooth: the curve turns back between %.10g and %.10g K", T[i-1], T[i])}
			}
		}
	}
	return t, nil
}

// wagner is ln(P/Pc) = (Tc/T)·Σ cᵢ·τ^eᵢ.
type wagner struct {
	tc, pc float64
	c, e   [4]float64
}

// wagnerExponents are those of the two usual forms.
func wagnerExponents(form string) (e [4]float64, ok bool) {
	switch form {
	case "wagner-2.5-5":
		return [4]float64{1, 1.5, 2.5, 5}, true
	case "wagner-3-6":
		return [4]float64{1, 1.5, 3, 6}, true
	}
	return e, false
}

func (w *wagner) at(T float64) (p, dlnpdT float64) {
	τ := (w.tc - T) / w.tc
	var f, df float64 // the sum and its derivative with respect to τ
	for i, c := range w.c {
		q := c * math.Pow(τ, w.e[i]-1)
		f += q * τ
		df += q * w.e[i]
	}
	f *= w.tc / T
	return w.pc * math.Exp(f), -(f + df) / T
}

// rackett is ρ = A/B^(1+(1−T/C)^D), equation 105 of the DIPPR collection; factor
// converts A to kg/m³.
type rackett struct {
	a, lnb, c, d, factor float64
}

func (r *rackett) at(T float64) (rho, dlnrhodT float64) {
	θ := (r.c - T) / r.c
	k := math.Pow(θ, r.d)
	rho = r.factor * r.a * math.Exp(-r.lnb*(1+k))
	return rho, r.lnb * r.d * k / (r.c - T)
}

// monotone checks a closed form over its range as newTable does its spline.
func monotone(c curve, lo, hi, sign float64) error {
	const steps = 200
	for i := range steps + 1 {
		T := lo + (hi-lo)*float64(i)/steps
		if i == steps {
			T = math.Nextafter(hi, lo)
		}
		v, slope := c.at(T)
		if !(v > 0 && v < math.MaxFloat64 && sign*slope > 0 && math.Abs(slope) <= math.MaxFloat64) {
			way := "rise"
			if sign < 0 {
				way = "fall"
			}
			return fmt.Errorf("value %.6g with slope %.3g 1/K at %.6g K: want a positive value that must %s over the whole range", v, slope, T, way)
		}
	}
	return nil
}
