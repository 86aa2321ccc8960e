package plot

import (
	"errors"
	"math"
	"testing"

	"pgregory.net/rapid"
)

// TestScales: an axis holds all its data, and its ticks are few, in order, inside
// and labelled apart.
func TestScales(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		log := rapid.Bool().Draw(t, "log")
		var gen *rapid.Generator[float64]
		if log {
			gen = rapid.Custom(func(t *rapid.T) float64 { return math.Pow(10, rapid.Float64Range(-3, 5).Draw(t, "exponent")) })
		} else {
			size := math.Pow(10, rapid.Float64Range(-3, 5).Draw(t, "size"))
			gen = rapid.Custom(func(t *rapid.T) float64 { return size * rapid.Float64Range(-1, 1).Draw(t, "part") })
		}
		v := rapid.SliceOfN(gen, 1, 20).Draw(t, "values")
		s := scale(&Axis{Log: log}, v)
		for _, x := range v {
			if p := s.Place(x); !(p >= 0 && p <= 1) {
				t.Fatalf("%g is at %g of %g..%g", x, p, s.Low, s.High)
			}
		}
		labels := map[string]bool{}
		last := math.Inf(-1)
		for _, k := range s.Ticks {
			if k.Value <= last || s.Place(k.Value) < -1e-9 || s.Place(k.Value) > 1+1e-9 {
				t.Fatalf("tick %g in %g..%g after %g", k.Value, s.Low, s.High, last)
			}
			last = k.Value
			if k.Label == "" {
				continue
			}
			if labels[k.Label] {
				t.Fatalf("label %q twice in %g..%g", k.Label, s.Low, s.High)
			}
			labels[k.Label] = true
		}
		if n := len(labels); !log && (n < 3 || n > 9) || log && (n < 1 || n > 12) {
			t.Fatalf("%d labels in %g..%g", n, s.Low, s.High)
		}
	})
}

func TestTickText(t *testing.T) {
	for _, tt := range []struct {
		v        float64
		decimals int
		want     string
	}{
		{0, 1, "0.0"}, {-0.0001, 2, "0.00"}, {-1.5, 1, "−1.5"}, {1234, 0, "1234"}, {12345, 0, "12\u2009345"},
		{-123456, 0, "−123\u2009456"}, {2.5e7, 0, "2.5e+07"}, {-2e-7, 3, "−2e−07"},
	} {
		if got := TickText(tt.v, tt.decimals); got != tt.want {
			t.Errorf("TickText(%g, %d) = %q, want %q", tt.v, tt.decimals, got, tt.want)
		}
	}
}

func TestVisible(t *testing.T) {
	for in, want := range map[string]string{
		"n-pentane": "n-pentane", "a\tb": `a\u0009b`, "x\u202ey": `x\u202ey`, "\u2066x": `\u2066x`,
		"a\x00": `a\u0000`, "é🧪שלום": "é🧪שלום", "bad\xff": `bad\ufffd`,
	} {
		if got := Visible(in); got != want {
			t.Errorf("Visible(%q) = %q, want %q", in, got, want)
		}
	}
}

// TestCheck: what cannot be drawn is refused by name.
func TestCheck(t *testing.T) {
	for name, s := range map[string]Series{
		"infinite": {X: []float64{math.Inf(1)}, Y: []float64{1}},
		"nan":      {X: []float64{1}, Y: []float64{math.NaN()}},
		"zero":     {X: []float64{0}, Y: []float64{1}},
		"pairs":    {X: []float64{1, 2}, Y: []float64{1}},
		"border":   {Shape: Band, X: []float64{1}, Y: []float64{1}, X2: []float64{1}},
	} {
		s.Name = name
		f := &Figure{ID: "f", Panels: []Panel{{X: Axis{Log: true}, Series: []Series{s}}}}
		var e *NumberError
		if err := f.Check(); !errors.As(err, &e) || e.Series != name {
			t.Errorf("%s: %v", name, err)
		}
	}
}
