package eos

import (
	"maps"
	"slices"
	"testing"
)

// operations are the steps of an inner loop, at states of a superheated liquid.
// Each returns a number so that no call can be dropped.
func operations(t testing.TB) map[string]func() float64 {
	m := untuned(t, "soave", pentane)
	const T, P = 420, 1e5
	tau, _ := m.Tau(T)
	p := P * m.B / (GasConstant * T)
	xl, ok := m.Form.Liquid(p, tau, 0)
	lnf := m.Form.LnFugacity(xl, tau)
	xv, ok2 := m.VapourOfFugacity(lnf, tau, 0)
	if !ok || !ok2 {
		t.Fatal("no embryo at the state of the benchmark")
	}
	iso, err := m.Isotherm(T)
	if err != nil {
		t.Fatal(err)
	}
	must := func(v float64, err error) float64 {
		if err != nil {
			t.Fatal(err)
		}
		return v
	}
	return map[string]func() float64{
		"LnFugacity":       func() float64 { return must(m.LnFugacity(T, 1e-3)) },
		"Pressure":         func() float64 { return must(m.Pressure(T, 1e-3)) },
		"Liquid":           func() float64 { return must(m.Liquid(T, P)) },
		"LiquidStretched":  func() float64 { return must(m.Liquid(300, -1e7)) },
		"Vapour":           func() float64 { return must(m.Vapour(T, P)) },
		"LiquidBracketed":  func() float64 { x, _ := m.liquidBracketed(p, tau); return x },
		"VapourBracketed":  func() float64 { x, _ := m.vapourBracketed(p, tau); return x },
		"VapourOfFugacity": func() float64 { x, _ := m.VapourOfFugacity(lnf, tau, 0); return x },
		"VapourOfFugacityGuess": func() float64 {
			x, _ := m.VapourOfFugacity(lnf, tau, 1.01*xv)
			return x
		},
		"VapourOfFugacityBracketed": func() float64 { x, _ := m.vapourOfFugacityBracketed(lnf, tau); return x },
		"LiquidOfFugacity":          func() float64 { x, _ := m.LiquidOfFugacity(lnf, tau); return x },
		"Saturation":                func() float64 { s, err := m.Saturation(T); return must(s.P, err) },
		"SaturationNearCritical":    func() float64 { s, err := m.Saturation(0.9999 * m.Tc); return must(s.P, err) },
		"SaturationTemperature":     func() float64 { s, err := m.SaturationTemperature(P); return must(s.T, err) },
		"Spinodal":                  func() float64 { l, _, err := m.Spinodal(T); return must(l.P, err) },
		"LiquidSpinodalTemperature": func() float64 { s, err := m.LiquidSpinodalTemperature(P); return must(s.T, err) },
		"VapourSpinodalTemperature": func() float64 { s, err := m.VapourSpinodalTemperature(P); return must(s.T, err) },
		"Isotherm":                  func() float64 { i, err := m.Isotherm(T); return must(i.T, err) },
		"IsothermState": func() float64 {
			pt, err := iso.At(2e-4)
			if pt.State != SuperheatedLiquid {
				t.Fatal(pt)
			}
			return must(pt.Mu, err)
		},
	}
}

// Nothing on the way to a number allocates (package comment).
func TestNoAllocations(t *testing.T) {
	for name, op := range operations(t) {
		if n := testing.AllocsPerRun(20, func() { sink = op() }); n != 0 {
			t.Errorf("%s: %g allocations a call", name, n)
		}
	}
}

var sink float64

func BenchmarkModel(b *testing.B) {
	all := operations(b)
	for _, name := range slices.Sorted(maps.Keys(all)) {
		op := all[name]
		b.Run(name, func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				sink = op()
			}
		})
	}
}
