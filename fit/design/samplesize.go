package design

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// SampleSize is the smallest number n ≥ 2 of repeats of a reading with standard
// deviation sd whose mean has a two-sided interval at the given level of at most
// ± half, when the standard deviation is found from the same readings:
//
//	t(1 − (1−level)/2, n−1)·sd/√n ≤ half
//
// with Student's t (GUM, JCGM 100:2008, G.3). It is the interval expected when the
// readings scatter by sd; half of all samples of that size scatter by more. Errors
// that the readings share do not average out and are not in sd.
//
// Errors: *InputError; also for more than a million readings.
func SampleSize(sd, half, level float64) (int, error) {
	if !(sd >= 0 && half > 0 && level > 0 && level < 1) || math.IsInf(sd, 0) || math.IsInf(half, 0) {
		return 0, &InputError{"sample size", "a standard deviation of 0 or more, a half-width > 0 and a level between 0 and 1"}
	}
	const most = 1_000_000
	enough := func(n int) bool {
		t := distuv.StudentsT{Mu: 0, Sigma: 1, Nu: float64(n - 1)}.Quantile(0.5 + level/2)
		return t*sd/math.Sqrt(float64(n)) <= half
	}
	hi := 2
	for !enough(hi) { // t/√n falls with n
		if hi *= 2; hi > 2*most {
			return 0, &InputError{"sample size", fmt.Sprintf("a half-width that %d readings can reach", most)}
		}
	}
	lo := hi / 2
	if hi == 2 {
		return 2, nil
	}
	for hi-lo > 1 {
		if mid := (lo + hi) / 2; enough(mid) {
			hi = mid
		} else {
			lo = mid
		}
	}
	if hi > most {
		return 0, &InputError{"sample size", fmt.Sprintf("a half-width that %d readings can reach", most)}
	}
	return hi, nil
}

// Power is the probability that a quantity that is truly 1, estimated with the
// standard uncertainty u and a normal error, is found different from 0 at a
// two-sided level: Φ(1/u − z) + Φ(−1/u − z), z the normal quantile of
// 1 − (1−level)/2. u = +Inf gives 1 − level.
func Power(u, level float64) float64 {
	n := distuv.UnitNormal
	z := n.Quantile(0.5 + level/2)
	d := 1 / u
	return n.CDF(d-z) + n.CDF(-d-z)
}
