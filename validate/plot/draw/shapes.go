package draw

import (
	"image/color"
	"math"
	"strconv"
	"strings"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg"
	vgdraw "gonum.org/v1/plot/vg/draw"

	figure "limsup/validate/plot"
)

var white = color.RGBA{255, 255, 255, 255}

// tint mixes a colour with white; without transparency all three formats agree.
func tint(c color.RGBA, share float64) color.RGBA {
	mix := func(v uint8) uint8 { return uint8(math.Round(255 - share*(255-float64(v)))) }
	return color.RGBA{mix(c.R), mix(c.G), mix(c.B), 255}
}

// Half-widths in points: of a marker, and of the marks of a crowd.
const (
	markerSize        = 2.6
	smallest, largest = 0.6, 1.5
)

// series is a plotter of one series.
type series struct {
	*figure.Series
	heaps []figure.Heap // of a crowd
}

// Plot implements plot.Plotter.
func (s *series) Plot(c vgdraw.Canvas, p *plot.Plot) {
	tx, ty := p.Transforms(&c)
	at := func(xs, ys []float64) []vg.Point {
		out := make([]vg.Point, len(xs))
		for i := range xs {
			out[i] = vg.Point{X: tx(xs[i]), Y: ty(ys[i])}
		}
		return out
	}
	line := lineStyle(s.Style)
	switch s.Shape {
	case figure.Band:
		a, b := at(s.X, s.Y), at(s.X2, s.Y2)
		for i := len(b) - 1; i >= 0; i-- {
			a = append(a, b[i])
		}
		c.FillPolygon(tint(s.Style.Colour.Of().Light, 0.2), a)
	case figure.Line:
		c.StrokeLines(line, at(s.X, s.Y))
	case figure.Level:
		c.StrokeLine2(line, c.Min.X, ty(s.Y[0]), c.Max.X, ty(s.Y[0]))
	case figure.Upright:
		c.StrokeLine2(line, tx(s.X[0]), c.Min.Y, tx(s.X[0]), c.Max.Y)
	case figure.Points:
		for i := range s.X {
			y := s.Y[i]
			if s.Shift != nil {
				y += s.Shift[i]
			}
			marker(&c, s.Style, vg.Point{X: tx(s.X[i]), Y: ty(y)}, markerSize)
		}
	case figure.Crowd:
		for _, h := range s.heaps {
			at := vg.Point{X: c.X(h.X), Y: c.Y(h.Y)}
			marker(&c, s.Style, at, vg.Length(smallest+(largest-smallest)*h.Size))
		}
	}
}

func marker(c *vgdraw.Canvas, s figure.Style, at vg.Point, size vg.Length) {
	ink := s.Colour.Of().Light
	corners, closed := s.Marker.Outline()
	var p vg.Path
	if corners == nil {
		p.Move(vg.Point{X: at.X + size, Y: at.Y})
		p.Arc(at, size, 0, 2*math.Pi)
		p.Close()
	}
	move := true
	for i, k := range corners {
		if i > 0 && k == corners[i-1] {
			move = true
			continue
		}
		q := vg.Point{X: at.X + vg.Length(k[0])*size, Y: at.Y + vg.Length(k[1])*size}
		if move {
			p.Move(q)
		} else {
			p.Line(q)
		}
		move = false
	}
	if closed && corners != nil {
		p.Close()
	}
	c.SetLineDash(nil, 0)
	if closed {
		c.SetColor(ink)
		if s.Open {
			c.SetColor(white)
		}
		c.Fill(p)
	}
	switch {
	case s.Open || !closed:
		c.SetLineWidth(min(1, size/2))
		c.SetColor(ink)
	case size < markerSize: // a border would eat it up
		return
	default:
		c.SetLineWidth(0.5)
		c.SetColor(white)
	}
	c.Stroke(p)
}

// grid draws thin lines at the labelled ticks.
type grid struct{ x, y figure.Scale }

// Plot implements plot.Plotter.
func (g *grid) Plot(c vgdraw.Canvas, p *plot.Plot) {
	tx, ty := p.Transforms(&c)
	s := vgdraw.LineStyle{Color: tint(figure.Ink.Of().Light, 0.12), Width: 0.5}
	for _, t := range g.x.Ticks {
		if t.Label != "" {
			c.StrokeLine2(s, tx(t.Value), c.Min.Y, tx(t.Value), c.Max.Y)
		}
	}
	for _, t := range g.y.Ticks {
		if t.Label != "" {
			c.StrokeLine2(s, c.Min.X, ty(t.Value), c.Max.X, ty(t.Value))
		}
	}
}

// cells draws a matrix.
type cells struct{ *figure.Matrix }

// Plot implements plot.Plotter.
func (m *cells) Plot(c vgdraw.Canvas, p *plot.Plot) {
	tx, ty := p.Transforms(&c)
	style := textStyle(7.5)
	style.XAlign, style.YAlign = vgdraw.XCenter, vgdraw.YCenter
	for r, row := range m.Value {
		for k, v := range row {
			if !m.Known[r][k] {
				continue
			}
			colour := figure.First
			if v < 0 {
				colour = figure.Second
			}
			x0, x1, y0, y1 := tx(float64(k)-0.48), tx(float64(k)+0.48), ty(float64(r)-0.48), ty(float64(r)+0.48)
			c.FillPolygon(tint(colour.Of().Light, 0.55*v*v), []vg.Point{{X: x0, Y: y0}, {X: x1, Y: y0}, {X: x1, Y: y1}, {X: x0, Y: y1}})
			c.FillText(style, vg.Point{X: (x0 + x1) / 2, Y: (y0 + y1) / 2}, strings.ReplaceAll(strconv.FormatFloat(v, 'f', 2, 64), "-", "−"))
		}
	}
}

// drawEntry draws an entry of the legend.
func drawEntry(c vgdraw.Canvas, s *figure.Series, x, y vg.Length) {
	const width, gap = 24, 6
	middle := y + 3
	switch s.Shape {
	case figure.Band:
		c.FillPolygon(tint(s.Style.Colour.Of().Light, 0.2), []vg.Point{{X: x, Y: middle - 4}, {X: x + width, Y: middle - 4}, {X: x + width, Y: middle + 4}, {X: x, Y: middle + 4}})
	case figure.Points, figure.Crowd:
		marker(&c, s.Style, vg.Point{X: x + width/2, Y: middle}, markerSize)
	default:
		c.StrokeLine2(lineStyle(s.Style), x, middle, x+width, middle)
	}
	c.FillText(textStyle(8.5), vg.Point{X: x + width + gap, Y: y}, s.Name)
}
