package plot

import (
	"image/color"
	"math"
)

// This file holds the look of the figures.
//
// The hues are those that M. Okabe and K. Ito proposed for readers with any kind
// of colour vision ("Color universal design", 2002, revised 2008; values from
// memory; also recommended by B. Wong, Nature Methods 8 (2011) 441). Their yellow
// and sky blue are too light on white and their blue and black too dark on black,
// so that each role takes one of the eight for light and one for dark pages.
// Colour is never the only sign: series that share a panel differ in dash or
// marker as well, and stay apart in grey.

// Colour is the role of a colour.
type Colour int

// The roles.
const (
	Ink    Colour = iota // text and theory
	First                // blue, on dark sky blue
	Second               // vermilion, on dark orange
	Third                // bluish green
	Fourth               // reddish purple
	Quiet                // grey: what is in the background
	colours
)

// Palette gives a role its colours on light and on dark pages, and its name in
// style sheets.
type Palette struct {
	Name        string
	Light, Dark color.RGBA
}

var palette = [colours]Palette{
	Ink:    {"ink", rgb(0x1a1a1a), rgb(0xececec)},
	First:  {"first", rgb(0x0072b2), rgb(0x56b4e9)},
	Second: {"second", rgb(0xd55e00), rgb(0xe69f00)},
	Third:  {"third", rgb(0x009e73), rgb(0x009e73)},
	Fourth: {"fourth", rgb(0xcc79a7), rgb(0xcc79a7)},
	Quiet:  {"quiet", rgb(0x767676), rgb(0x8f8f8f)},
}

// Of returns the colours of a role.
func (c Colour) Of() Palette { return palette[c] }

// Colours lists the roles.
func Colours() []Colour {
	out := make([]Colour, colours)
	for i := range out {
		out[i] = Colour(i)
	}
	return out
}

func rgb(v uint32) color.RGBA {
	return color.RGBA{uint8(v >> 16), uint8(v >> 8), uint8(v), 255}
}

// Dash is a line style.
type Dash int

// The line styles.
const (
	Solid Dash = iota
	Dashed
	Dotted
	DashDotted
	LongDashed
	dashes
)

// Pattern returns lengths of stroke and gap in units of the line width; nil is solid.
func (d Dash) Pattern() []float64 {
	return [dashes][]float64{nil, {4, 2.5}, {1.2, 2}, {5, 2, 1.2, 2}, {9, 3}}[d]
}

// Marker is the shape of a point.
type Marker int

// The markers.
const (
	Circle Marker = iota
	Square
	Triangle
	Diamond
	Inverted
	Cross
	Plus
	markers
)

// Outline returns the corners of a marker of half-width 1, y upwards, and whether
// they enclose an area. A circle has none. Two corners in a row that equal each
// other lift the pen.
func (m Marker) Outline() (corners [][2]float64, closed bool) {
	switch m {
	case Square:
		return [][2]float64{{-.88, -.88}, {.88, -.88}, {.88, .88}, {-.88, .88}}, true
	case Triangle:
		return [][2]float64{{0, 1.15}, {1.05, -.75}, {-1.05, -.75}}, true
	case Diamond:
		return [][2]float64{{0, 1.25}, {1.1, 0}, {0, -1.25}, {-1.1, 0}}, true
	case Inverted:
		return [][2]float64{{0, -1.15}, {1.05, .75}, {-1.05, .75}}, true
	case Cross:
		return [][2]float64{{-.9, -.9}, {.9, .9}, {.9, .9}, {-.9, .9}, {.9, -.9}}, false
	case Plus:
		return [][2]float64{{-1.1, 0}, {1.1, 0}, {1.1, 0}, {0, -1.1}, {0, 1.1}}, false
	}
	return nil, true
}

// Style is the look of a series.
type Style struct {
	Colour Colour
	Dash   Dash
	Marker Marker
	Open   bool    // a marker that is not filled
	Width  float64 // of a line in points; 0: 1.4
}

// LineWidth is the width of a line in points.
func (s Style) LineWidth() float64 {
	if s.Width > 0 {
		return s.Width
	}
	return 1.4
}

// groupStyle is the style of the i-th method (or other group) of a figure: the
// colour repeats after four, colour and marker together after 28.
func groupStyle(i int) Style {
	return Style{Colour: First + Colour(i%4), Marker: Marker(i % int(markers)), Dash: []Dash{Solid, LongDashed, DashDotted, Dashed, Dotted}[i%int(dashes)]}
}

// Luminance is the relative luminance of a colour of sRGB, 0 for black to 1 for
// white (IEC 61966-2-1, with the coefficients of ITU-R BT.709; both from memory).
func Luminance(r, g, b uint8) float64 {
	return 0.2126*linearLight(r) + 0.7152*linearLight(g) + 0.0722*linearLight(b)
}

// linearLight undoes the transfer curve of sRGB.
func linearLight(v uint8) float64 {
	x := float64(v) / 255
	if x <= 0.04045 {
		return x / 12.92
	}
	return math.Pow((x+0.055)/1.055, 2.4)
}
