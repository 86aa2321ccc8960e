// Package draw writes a figure into a file of its own: SVG, PNG or PDF, by gonum
// plot, in the colours of a light page.
//
// Panels stand beside each other, two to a row, with the legend below. Fonts are
// Liberation Sans; a name in letters that this font does not have comes out as boxes
// in PNG and PDF. The same figure gives the same bytes.
package draw

import (
	"bytes"
	"fmt"
	"io"
	"math"
	"regexp"
	"strings"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/vg"
	vgdraw "gonum.org/v1/plot/vg/draw"
	"gonum.org/v1/plot/vg/vgimg"
	"gonum.org/v1/plot/vg/vgpdf"
	"gonum.org/v1/plot/vg/vgsvg"

	figure "limsup/validate/plot"
)

// FormatError reports a format that figures are not written in.
type FormatError struct{ Format string }

func (e *FormatError) Error() string {
	return fmt.Sprintf("figure format %q: want one of %s", e.Format, strings.Join(Formats(), ", "))
}

// Formats lists the formats.
func Formats() []string { return []string{"svg", "png", "pdf"} }

// Sizes on paper.
const (
	panelWidth  = 11 * vg.Centimeter
	panelHeight = 8.2 * vg.Centimeter
	legendLine  = 13
	titleLine   = 22
	pad         = 8
	dotsPerInch = 200
)

// canvas is one of the formats.
type canvas interface {
	vg.CanvasSizer
	io.WriterTo
}

// Write draws a figure.
//
// Errors: *FormatError, *figure.NumberError; those of w.
func Write(w io.Writer, f *figure.Figure, format string) error {
	if err := f.Check(); err != nil {
		return err
	}
	columns := min(2, len(f.Panels))
	if columns == 0 {
		return &figure.EmptyError{Figure: f.ID, About: f.Title, Reason: "it has no panel"}
	}
	rows := (len(f.Panels) + columns - 1) / columns
	legend := f.Legend()
	perRow := columns // entries of the legend beside each other
	legendRows := (len(legend) + perRow - 1) / perRow
	width := panelWidth * vg.Length(columns)
	bodyHeight := panelHeight * vg.Length(rows)
	height := titleLine + bodyHeight + legendLine*vg.Length(legendRows) + 2*pad
	c, err := newCanvas(format, width, height)
	if err != nil {
		return err
	}
	page := vgdraw.New(c)
	page.SetColor(figure.Ink.Of().Light)
	if format == "png" {
		page.SetColor(white)
		page.Fill(page.Rectangle.Path())
	}
	page.FillText(textStyle(11), vg.Point{X: pad, Y: height - titleLine + 4}, f.Title)
	for i := range f.Panels {
		x, y := vg.Length(i%columns)*panelWidth, height-titleLine-vg.Length(i/columns+1)*panelHeight
		box := vgdraw.Canvas{Canvas: c, Rectangle: vg.Rectangle{Min: vg.Point{X: x + pad, Y: y + pad}, Max: vg.Point{X: x + panelWidth - pad, Y: y + panelHeight - pad}}}
		panel(&f.Panels[i]).Draw(box)
	}
	for i := range legend {
		x := vg.Length(i%perRow)*panelWidth + 2*pad
		y := height - titleLine - bodyHeight - legendLine*vg.Length(i/perRow+1) + 4
		drawEntry(page, &legend[i], x, y)
	}
	if format == "pdf" {
		return writeUndated(w, c)
	}
	_, err = c.WriteTo(w)
	return err
}

// dates are those that the writer of PDF takes from the clock.
var dates = regexp.MustCompile(`(/(?:CreationDate|ModDate) \(D:)\d{14}\)`)

// writeUndated writes a PDF whose dates are a constant of the same length, so that
// the places of its objects stay what its index says.
func writeUndated(w io.Writer, c io.WriterTo) error {
	var b bytes.Buffer
	if _, err := c.WriteTo(&b); err != nil {
		return err
	}
	_, err := w.Write(dates.ReplaceAll(b.Bytes(), []byte("${1}20000101000000)")))
	return err
}

func newCanvas(format string, w, h vg.Length) (canvas, error) {
	switch format {
	case "svg":
		return vgsvg.New(w, h), nil
	case "png":
		return vgimg.PngCanvas{Canvas: vgimg.NewWith(vgimg.UseWH(w, h), vgimg.UseDPI(dotsPerInch))}, nil
	case "pdf":
		return vgpdf.New(w, h), nil
	}
	return nil, &FormatError{format}
}

func textStyle(size vg.Length) vgdraw.TextStyle {
	f := font.Font{Typeface: "Liberation", Variant: "Sans", Size: size}
	return vgdraw.TextStyle{Color: figure.Ink.Of().Light, Font: f, Handler: plot.DefaultTextHandler}
}

// panel turns a panel into a plot.
func panel(p *figure.Panel) *plot.Plot {
	x, y := p.Scales()
	longest := 26
	if p.Matrix != nil {
		longest = 36
	}
	g := plot.New()
	g.BackgroundColor = nil
	g.Title.Text = p.Title
	g.Title.TextStyle = aligned(textStyle(9), g.Title.TextStyle)
	g.Title.Padding = 3
	for _, a := range []struct {
		axis  *plot.Axis
		scale *figure.Scale
		from  *figure.Axis
	}{{&g.X, &x, &p.X}, {&g.Y, &y, &p.Y}} {
		a.axis.Min, a.axis.Max = a.scale.Low, a.scale.High
		if a.scale.Log {
			a.axis.Scale = plot.LogScale{}
		}
		a.axis.Tick.Marker = plot.ConstantTicks(ticks(a.scale, len(a.from.Categories) > 0, longest))
		a.axis.Tick.Label = aligned(textStyle(8.5), a.axis.Tick.Label)
		a.axis.Tick.Length = 3
		a.axis.Tick.LineStyle = lineStyle(figure.Style{Colour: figure.Ink, Width: 0.6})
		a.axis.LineStyle = lineStyle(figure.Style{Colour: figure.Ink, Width: 0.6})
		a.axis.Label.Text = a.from.Label
		a.axis.Label.TextStyle = aligned(textStyle(9), a.axis.Label.TextStyle)
		a.axis.Padding = 2
	}
	if p.Matrix != nil {
		g.X.Width, g.Y.Width = 0, 0
		g.X.Tick.Length, g.Y.Tick.Length = 0, 0
		g.Add(&cells{p.Matrix})
		return g
	}
	g.Add(&grid{x, y})
	heaps := p.Heaps()
	for i := range p.Series {
		g.Add(&series{&p.Series[i], heaps[i]})
	}
	// A plot widens its axes for what it is given; here the panel decides.
	g.X.Min, g.X.Max, g.Y.Min, g.Y.Max = x.Low, x.High, y.Low, y.High
	return g
}

// aligned keeps the alignment and rotation of the style that a text has.
func aligned(s, place vgdraw.TextStyle) vgdraw.TextStyle {
	s.XAlign, s.YAlign, s.Rotation = place.XAlign, place.YAlign, place.Rotation
	return s
}

// ticks are those of a scale; names are cut to most characters.
func ticks(s *figure.Scale, names bool, most int) []plot.Tick {
	out := make([]plot.Tick, len(s.Ticks))
	for i, t := range s.Ticks {
		if names {
			t.Label = shorten(t.Label, most)
		}
		out[i] = plot.Tick{Value: t.Value, Label: t.Label}
	}
	return out
}

func shorten(s string, most int) string {
	if r := []rune(s); len(r) > most {
		return string(r[:most-1]) + "…"
	}
	return s
}

func lineStyle(s figure.Style) vgdraw.LineStyle {
	w := vg.Points(s.LineWidth() * 0.8)
	l := vgdraw.LineStyle{Color: s.Colour.Of().Light, Width: w}
	for _, d := range s.Dash.Pattern() {
		l.Dashes = append(l.Dashes, vg.Length(math.Max(d*float64(w), 0.5)))
	}
	return l
}
