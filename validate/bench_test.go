package validate

import (
	"fmt"
	"testing"

	"limsup/data/measure"
	"limsup/eos/nucleation"
	"limsup/fit"
)

// BenchmarkCompare compares the default grid on the published limits, with and without
// the outer loop.
func BenchmarkCompare(b *testing.B) {
	lib := library(b)
	set := published(b, lib)
	for _, nested := range []bool{false, true} {
		b.Run(fmt.Sprintf("nested=%v", nested), func(b *testing.B) {
			for b.Loop() {
				if _, err := Compare(b.Context(), set, lib, CompareOptions{Keep: DefaultKeep, Nested: nested, Folds: "8"}); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}

// BenchmarkVariants follows the time of a comparison over three decades of variants,
// each tuned to 16 rows and without each of four parts of them.
func BenchmarkVariants(b *testing.B) {
	lib := library(b)
	all := published(b, lib)
	set := &measure.Set{Rows: all.Rows[:16], Files: all.Files}
	var grid []Candidate
	for δ := range 17 {
		for _, k := range []nucleation.Kinetics{nucleation.Mechanical, nucleation.Chemical} {
			for _, form := range []nucleation.EmbryoPressure{nucleation.Exact, nucleation.Poynting} {
				for _, t := range []fit.Tension{fit.TensionCorrelation, fit.CorrespondingStates, fit.TensionFromParachor} {
					for _, e := range []string{"soave", "peng-robinson", "redlich-kwong", "berthelot", "van-der-waals"} {
						grid = append(grid, Candidate{Plan: fit.Plan{
							Variant: fit.Variant{Equation: e, Tension: t, EmbryoPressure: form, Kinetics: k},
							Fixed:   []fit.Setting{{Name: fit.Tolman, Value: 1e-3 * float64(δ)}},
							Terms:   []fit.Term{{Name: fit.Threshold}},
						}})
					}
				}
			}
		}
	}
	for _, n := range []int{1, 10, 100, 1000} {
		b.Run(fmt.Sprint(n), func(b *testing.B) {
			for b.Loop() {
				r, err := Compare(b.Context(), set, lib, CompareOptions{Candidates: grid[:n], Folds: "4", Keep: DefaultKeep})
				if err != nil {
					b.Fatal(err)
				}
				if len(r.Entries) < n {
					b.Fatalf("%d of %d variants compared", len(r.Entries), n)
				}
			}
		})
	}
}
