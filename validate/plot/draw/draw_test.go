package draw

import (
	"bytes"
	"encoding/xml"
	"errors"
	"image/png"
	"io"
	"math"
	"strings"
	"testing"

	"golang.org/x/image/font/sfnt"
	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/font/liberation"

	figure "limsup/validate/plot"
)

// sample has every shape, every marker and every dash, a matrix, and names that are
// awkward.
func sample() *figure.Figure {
	var series []figure.Series
	for m := figure.Circle; m <= figure.Plus; m++ {
		series = append(series, figure.Series{Name: "marker <&> " + string(rune('a'+int(m))), Shape: figure.Points, X: []float64{1, 2 + float64(m)}, Y: []float64{float64(m), 3},
			Style: figure.Style{Marker: m, Colour: figure.First, Open: m%2 == 0}})
	}
	for d := figure.Solid; d <= figure.LongDashed; d++ {
		series = append(series, figure.Series{Name: "line", X: []float64{1, 9}, Y: []float64{0, float64(d)}, Style: figure.Style{Dash: d, Colour: figure.Colour(int(d))}})
	}
	for m := figure.Circle; m <= figure.Plus; m++ {
		series = append(series, figure.Series{Name: "crowd", Shape: figure.Crowd, X: []float64{2, 2, 7 + float64(m)}, Y: []float64{1, 1, float64(m)}, Style: figure.Style{Marker: m, Colour: figure.Second, Open: m%2 == 0}})
	}
	series = append(series,
		figure.Series{Name: "band", Shape: figure.Band, X: []float64{1, 2}, Y: []float64{0, 1}, X2: []float64{2, 3}, Y2: []float64{0, 1}},
		figure.Series{Name: "level", Shape: figure.Level, Y: []float64{2}}, figure.Series{Name: "upright", Shape: figure.Upright, X: []float64{4}})
	return &figure.Figure{ID: "sample", Title: "Sample", Panels: []figure.Panel{
		{Title: "linear", X: figure.Axis{Label: "T/K"}, Y: figure.Axis{Label: "y"}, Series: series},
		{Title: "logarithmic", X: figure.Axis{Label: "v", Log: true}, Y: figure.Axis{Label: "y"}, Series: series},
		{Title: "matrix", X: figure.Axis{Categories: []string{"a", "b"}}, Y: figure.Axis{Categories: []string{"b", "a"}},
			Matrix: &figure.Matrix{Value: [][]float64{{-0.5, 1}, {1, 0}}, Known: [][]bool{{true, true}, {true, false}}}},
	}}
}

func write(t *testing.T, f *figure.Figure, format string) []byte {
	t.Helper()
	var b bytes.Buffer
	if err := Write(&b, f, format); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

// TestFormats: each format is one of its kind, and comes out the same twice.
func TestFormats(t *testing.T) {
	for _, format := range Formats() {
		t.Run(format, func(t *testing.T) {
			got := write(t, sample(), format)
			if again := write(t, sample(), format); !bytes.Equal(got, again) {
				t.Error("a second file differs from the first")
			}
			switch format {
			case "svg":
				d := xml.NewDecoder(bytes.NewReader(got))
				texts := ""
				for {
					tok, err := d.Token()
					if err == io.EOF {
						break
					}
					if err != nil {
						t.Fatal(err)
					}
					if c, ok := tok.(xml.CharData); ok {
						texts += string(c)
					}
				}
				for _, s := range []string{"Sample", "marker <&> a", "T/K", "−0.50"} {
					if !strings.Contains(texts, s) {
						t.Errorf("the text %q is missing", s)
					}
				}
			case "png":
				img, err := png.Decode(bytes.NewReader(got))
				if err != nil {
					t.Fatal(err)
				}
				b := img.Bounds()
				// Two panels beside each other on paper, at the resolution of the package.
				if want := 2 * 11 / 2.54 * dotsPerInch; math.Abs(float64(b.Dx())-want) > 1 {
					t.Errorf("width %d, want %.0f", b.Dx(), want)
				}
				if r, _, _, a := img.At(0, 0).RGBA(); r != 0xffff || a != 0xffff {
					t.Error("the ground is not white")
				}
			case "pdf":
				if !bytes.HasPrefix(got, []byte("%PDF-")) || !bytes.Contains(got, []byte("CreationDate (D:20000101000000)")) {
					t.Errorf("no PDF with a constant date: %.20q", got)
				}
			}
		})
	}
}

// TestRefusals: an unknown format, a number that is none, a figure without panels.
func TestRefusals(t *testing.T) {
	var format *FormatError
	if err := Write(io.Discard, sample(), "gif"); !errors.As(err, &format) {
		t.Errorf("gif: %v", err)
	}
	f := sample()
	f.Panels[0].Series[0].X[0] = math.NaN()
	var number *figure.NumberError
	if err := Write(io.Discard, f, "png"); !errors.As(err, &number) {
		t.Errorf("NaN: %v", err)
	}
	f = sample()
	f.Panels[1].Series[0].X = []float64{0, 1}
	if err := Write(io.Discard, f, "png"); !errors.As(err, &number) {
		t.Errorf("0 on a logarithmic axis: %v", err)
	}
	var empty *figure.EmptyError
	if err := Write(io.Discard, &figure.Figure{}, "png"); !errors.As(err, &empty) {
		t.Errorf("no panel: %v", err)
	}
}

// TestGlyphs: the font has every sign that the figures print by themselves.
func TestGlyphs(t *testing.T) {
	face := font.NewCache(liberation.Collection()).Lookup(font.Font{Typeface: "Liberation", Variant: "Sans"}, 10)
	var buffer sfnt.Buffer
	for _, r := range "μΔσ−³*–…()/[]%’“”°\u2009" {
		if i, err := face.Face.GlyphIndex(&buffer, r); err != nil || i == 0 {
			t.Errorf("no glyph for %q (%v)", r, err)
		}
	}
}
