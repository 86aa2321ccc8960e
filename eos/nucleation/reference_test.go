package nucleation

import (
	"errors"
	"fmt"
	"math"
	"strings"
	"testing"

	"limsup/eos"
)

// halfUnit is half a unit of the last printed digit of a number.
func halfUnit(cell string) float64 {
	mantissa, exponent, _ := strings.Cut(cell, "e")
	e := 0.0
	if exponent != "" {
		_, _ = fmt.Sscan(exponent, &e)
	}
	if _, decimals, ok := strings.Cut(mantissa, "."); ok {
		e -= float64(len(decimals))
	}
	return 0.5 * math.Pow(10, e)
}

func TestHalfUnit(t *testing.T) {
	for cell, want := range map[string]float64{"-9757.236094": 5e-7, "-1357329668": 0.5, "4.489e-08": 5e-12, "3125367150": 0.5} {
		if got := halfUnit(cell); deviation(got, want) > 1e-12 {
			t.Errorf("halfUnit(%s) = %g, want %g", cell, got, want)
		}
	}
}

// TestCubicChecks compares embryo, flux and limit with an independent computation;
// see testdata/README.md.
//
// Bubble pressure, radius and barrier carry ten digits, so 5e-10 relative is what the
// table can tell; the tolerance 1e-8 leaves the difference of two pressures close to
// saturation some room (measured: 4.4e-10 at worst). log₁₀J has half a unit of its
// last digit and, where that is smaller than 1e-7, the latter. Limits are printed to 1e-8 K;
// 1e-6 K is the accuracy of the table's own root finder (measured: 5e-9 K).
func TestCubicChecks(t *testing.T) {
	_, fluids := records(t)
	const rel, decades, kelvin = 1e-8, 1e-7, 1e-6
	var worst struct{ pressure, radius, barrier, flux, limit float64 }
	var bubbles, limits, blanks int
	for _, row := range table(t, "cubic_checks.csv") {
		T, P := number(t, row["T_K"]), number(t, row["P_Pa"])
		f := untuned(t, row["equation"], fluids[row["fluid"]], Config{})
		at := fmt.Sprintf("%s %s %g K %g Pa", row["fluid"], row["equation"], T, P)

		x, err := f.Flux(T, P)
		if row["bubble_exact_Pa"] == "" {
			blanks++
			var no *NotMetastableError
			var phase *eos.PhaseError
			if !errors.As(err, &no) && !errors.As(err, &phase) {
				t.Errorf("%s: flux %v, error %v; want that the liquid is not superheated", at, x, err)
			}
			if e, err := f.Embryo(T, P); err == nil && e.Kind != Droplet {
				t.Errorf("%s: a %s in a state that is no superheated liquid", at, e.Kind)
			}
		} else {
			bubbles++
			e, err := f.Embryo(T, P)
			if err != nil {
				t.Errorf("%s: %v", at, err)
				continue
			}
			if e.Kind != Bubble {
				t.Errorf("%s: %s, want bubble", at, e.Kind)
			}
			for _, c := range []struct {
				name      string
				got       float64
				worst     *float64
				tolerance float64
			}{
				{"bubble_exact_Pa", e.Pressure, &worst.pressure, rel},
				{"radius_m", e.Radius, &worst.radius, rel},
				{"barrier_over_kT", e.BarrierOverKT, &worst.barrier, rel},
			} {
				d := deviation(c.got, number(t, row[c.name]))
				*c.worst = math.Max(*c.worst, d)
				if d > c.tolerance {
					t.Errorf("%s: %s = %.12g, table %s, off by %.2g", at, c.name, c.got, row[c.name], d)
				}
			}
			want := row["log10_flux_mechanical"]
			// A relative error of P_v is magnified by 2P_v/ΔP in W; 32ε for the two computations (measured: 16ε).
			tol := math.Max(decades, halfUnit(want)+64*0x1p-52*math.Abs(x.Log10J())*e.Pressure/math.Abs(e.Pressure-P))
			worst.flux = math.Max(worst.flux, math.Abs(x.Log10J()-number(t, want))/tol)
			within(t, at+": log10 J", x.Log10J(), number(t, want), tol)
			if x.LnJ != e.LnJ || x.Barrier != e.BarrierOverKT {
				t.Errorf("%s: embryo and flux differ: %v, %v", at, x, e)
			}
		}

		l, err := f.KineticLimit(P, Threshold(12), 0)
		if row["kinetic_T_K"] == "" {
			var no *NoLimitError
			if !errors.As(err, &no) {
				t.Errorf("%s: limit %.10g K, error %v; want no kinetic limit", at, l.T, err)
			} else if s := number(t, row["spinodal_T_K"]); !no.Spinodal || math.Abs(no.End-s) > 1e-7 {
				t.Errorf("%s: %v; want the spinodal at %.10g K", at, no, s)
			}
			continue
		}
		if err != nil {
			t.Errorf("%s: %v", at, err)
			continue
		}
		limits++
		want := number(t, row["kinetic_T_K"])
		worst.limit = math.Max(worst.limit, math.Abs(l.T-want))
		within(t, at+": kinetic limit", l.T, want, kelvin)
		// A limit is good to 1e-12 of T (see limitTolerance).
		within(t, at+": ln J at the limit", l.LnJ, 12*math.Ln10, 1e-12*l.T*l.DT)
	}
	t.Logf("%d bubbles, %d blanks, %d limits; worst: pressure %.2g, radius %.2g, barrier %.2g, flux %.2g of its tolerance, limit %.2g K",
		bubbles, blanks, limits, worst.pressure, worst.radius, worst.barrier, worst.flux, worst.limit)
	if bubbles < 100 || blanks < 50 || limits < 100 {
		t.Errorf("%d bubbles, %d blanks, %d limits: the table has been cut", bubbles, blanks, limits)
	}
}
