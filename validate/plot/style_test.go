package plot

import (
	"image/color"
	"math"
	"testing"
)

// TestGroupStyles: the styles of methods in one figure differ in more than colour.
func TestGroupStyles(t *testing.T) {
	for i := range 7 {
		for k := range i {
			a, b := groupStyle(i), groupStyle(k)
			if a.Marker == b.Marker {
				t.Errorf("groups %d and %d share a marker", k, i)
			}
			if i < 5 && a.Dash == b.Dash {
				t.Errorf("groups %d and %d share a dash", k, i)
			}
		}
	}
}

// deficiencies turn linear sRGB into what a reader without one kind of cone sees:
// G. M. Machado, M. M. Oliveira and L. A. F. Fernandes, IEEE Trans. Vis. Comput.
// Graph. 15 (2009) 1291, severity 1 (from memory; each row sums to 1, so that grey
// stays grey).
var deficiencies = map[string][3][3]float64{
	"none": {{1, 0, 0}, {0, 1, 0}, {0, 0, 1}},
	"protanopia": {{0.152286, 1.052583, -0.204868}, {0.114503, 0.786281, 0.099216},
		{-0.003882, -0.048116, 1.051998}},
	"deuteranopia": {{0.367322, 0.860646, -0.227968}, {0.280085, 0.672501, 0.047413},
		{-0.011820, 0.042940, 0.968881}},
	"tritanopia": {{1.255528, -0.076749, -0.178779}, {-0.078411, 0.930809, 0.147602},
		{0.004733, 0.691367, 0.303900}},
}

// lab is the CIE 1976 L*a*b* colour of linear sRGB (matrix and white D65 of IEC
// 61966-2-1, from memory).
func lab(v [3]float64) [3]float64 {
	for i := range v {
		v[i] = math.Min(1, math.Max(0, v[i]))
	}
	x := (0.4124*v[0] + 0.3576*v[1] + 0.1805*v[2]) / 0.9505
	y := 0.2126*v[0] + 0.7152*v[1] + 0.0722*v[2]
	z := (0.0193*v[0] + 0.1192*v[1] + 0.9505*v[2]) / 1.089
	f := func(t float64) float64 {
		if t > 216.0/24389 {
			return math.Cbrt(t)
		}
		return (24389.0/27*t + 16) / 116
	}
	return [3]float64{116*f(y) - 16, 500 * (f(x) - f(y)), 200 * (f(y) - f(z))}
}

func seen(c color.RGBA, m [3][3]float64) [3]float64 {
	v := [3]float64{linearLight(c.R), linearLight(c.G), linearLight(c.B)}
	var out [3]float64
	for i := range m {
		for k := range v {
			out[i] += m[i][k] * v[k]
		}
	}
	return lab(out)
}

// TestColourBlind: the four colours of methods stay apart for every kind of colour
// vision. A difference of 2.3 is just noticeable side by side (M. Mahy et al., Color
// Res. Appl. 19 (1994) 105, from memory); six times that is asked for (measured: 16.1
// at the smallest, green and sky blue without S cones), and markers and dashes differ
// besides.
func TestColourBlind(t *testing.T) {
	const want = 14
	for name, m := range deficiencies {
		for i := range m {
			if sum := m[i][0] + m[i][1] + m[i][2]; math.Abs(sum-1) > 2e-6 { // six decimals each
				t.Errorf("%s: row %d sums to %g", name, i, sum)
			}
		}
		for a := First; a <= Fourth; a++ {
			for b := First; b < a; b++ {
				for page, pair := range map[string][2]color.RGBA{"light": {a.Of().Light, b.Of().Light}, "dark": {a.Of().Dark, b.Of().Dark}} {
					x, y := seen(pair[0], m), seen(pair[1], m)
					if d := math.Hypot(math.Hypot(x[0]-y[0], x[1]-y[1]), x[2]-y[2]); d < want {
						t.Errorf("%s, %s page: %s and %s differ by %.1f, want %d", name, page, a.Of().Name, b.Of().Name, d, want)
					}
				}
			}
		}
	}
}
