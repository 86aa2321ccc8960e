// Package svg writes the panels of a figure as SVG for a page of HTML.
//
// Text is text; colours are classes (see Style), so that one drawing serves light,
// dark and printed pages; there is a view box and no size, so that the page decides
// how wide a panel is. A panel is an image with a name and a description for those
// who do not see it. Every marker carries a <title>, shown on hovering, and every
// series its numbers in full precision as attributes data-x and data-y (separated by
// spaces for a line), so that they can be read back. A crowd is one path with the
// number of its rows as data-rows.
//
// Lengths are in units of the view box, which are pixels at the natural size, y
// downwards. Nothing of a name is trusted: all text is escaped.
package svg

import (
	"fmt"
	"html"
	"strconv"
	"strings"

	"limsup/validate/plot"
)

// Sizes of a panel.
const (
	Width  = 380.0
	Height = 290.0

	left, right, top, bottom = 50.0, 12.0, 30.0, 42.0
	fontSize                 = 12.0
	markerSize               = 3.6
	smallest, largest        = 0.8, 2.1 // marks of a crowd
	boldness                 = 1.12     // how much wider bold letters are
)

// frame maps axis values to places in the view box.
type frame struct {
	x, y           plot.Scale
	x0, x1, y0, y1 float64 // left, right, bottom, top of the plane
}

func (f *frame) at(x, y float64) (px, py float64) {
	return f.x0 + (f.x1-f.x0)*f.x.Place(x), f.y0 + (f.y1-f.y0)*f.y.Place(y)
}

// writer collects the drawing.
type writer struct {
	strings.Builder
	frame
}

// Panel returns panel i of a figure as an SVG element.
//
// Errors: *plot.NumberError.
func Panel(f *plot.Figure, i int) (string, error) {
	if err := f.Check(); err != nil {
		return "", err
	}
	p := &f.Panels[i]
	w := &writer{}
	w.x, w.y = p.Scales()
	height := Height
	w.x0, w.x1, w.y0, w.y1 = left, Width-right, Height-bottom, top
	longest := 0.0
	for _, t := range w.y.Ticks {
		longest = max(longest, textWidth(t.Label))
	}
	w.x0 = max(left, 14+longest)
	switch { // names may be cut, numbers never
	case p.Matrix != nil:
		w.x0 = min(w.x0, 200)
	case len(p.Y.Categories) > 0:
		w.x0 = min(w.x0, 170)
	}
	if n := len(p.Y.Categories); p.Matrix != nil && n > 0 {
		side := (w.x1 - w.x0) / float64(n)
		if side > 44 {
			side = 44
			w.x1 = w.x0 + side*float64(n)
		}
		w.y0 = top + side*float64(n)
		height = w.y0 + bottom
	}
	id := f.ID + "-" + strconv.Itoa(i+1)
	name := f.Title
	if p.Title != "" {
		name += ", " + p.Title
	}
	w.printf(`<svg class="plot" id="%s" viewBox="0 0 %s %s" role="img" aria-labelledby="%s-title %s-desc">`, id, num(Width), num(height), id, id)
	w.printf("\n<title id=\"%s-title\">%s</title><desc id=\"%s-desc\">%s</desc>\n", id, html.EscapeString(name), id, html.EscapeString(describe(p)))
	w.axes(p)
	if p.Matrix != nil {
		w.matrix(p)
	}
	heaps := p.Heaps()
	for k := range p.Series {
		if p.Series[k].Shape == plot.Crowd {
			w.crowd(&p.Series[k], heaps[k])
		} else {
			w.series(&p.Series[k])
		}
	}
	w.WriteString("</svg>")
	return w.String(), nil
}

// describe says in words what a panel holds.
func describe(p *plot.Panel) string {
	var b strings.Builder
	if p.Matrix != nil {
		fmt.Fprintf(&b, "A matrix of %d by %d cells: %s.", len(p.Y.Categories), len(p.X.Categories), strings.Join(p.Y.Categories, ", "))
		return b.String()
	}
	x, y := p.Scales()
	fmt.Fprintf(&b, "Across: %s", p.X.Label)
	extent(&b, &p.X, &x)
	fmt.Fprintf(&b, ". Upwards: %s", p.Y.Label)
	extent(&b, &p.Y, &y)
	b.WriteString(". Shown: ")
	for i := range p.Series {
		s := &p.Series[i]
		if i > 0 {
			b.WriteString("; ")
		}
		n := s.Name
		if n == "" {
			n = "a guide line"
		}
		b.WriteString(n)
		switch s.Shape {
		case plot.Points:
			fmt.Fprintf(&b, " (%d points)", len(s.X))
		case plot.Crowd:
			fmt.Fprintf(&b, " (%d rows in shared marks)", len(s.X))
		}
	}
	b.WriteString(". The table below the figure has the numbers.")
	return b.String()
}

func extent(b *strings.Builder, a *plot.Axis, s *plot.Scale) {
	if len(a.Categories) == 0 {
		fmt.Fprintf(b, " from %s to %s", strconv.FormatFloat(s.Low, 'g', 4, 64), strconv.FormatFloat(s.High, 'g', 4, 64))
	}
}

func (w *writer) printf(format string, args ...any) { fmt.Fprintf(w, format, args...) }

// num prints a length.
func num(v float64) string {
	s := strconv.FormatFloat(v, 'f', 2, 64)
	s = strings.TrimRight(strings.TrimRight(s, "0"), ".")
	if s == "-0" {
		return "0"
	}
	return s
}

// full prints a number so that it reads back as the same one.
func full(v float64) string { return strconv.FormatFloat(v, 'g', -1, 64) }

func list(v []float64) string {
	s := make([]string, len(v))
	for i, x := range v {
		s[i] = full(x)
	}
	return strings.Join(s, " ")
}

func (w *writer) axes(p *plot.Panel) {
	w.WriteString("<g aria-hidden=\"true\">")
	var grid strings.Builder
	if p.Matrix == nil {
		for _, t := range w.x.Ticks {
			if t.Label != "" && len(p.X.Categories) == 0 {
				x, _ := w.at(t.Value, w.y.Low)
				fmt.Fprintf(&grid, "M%s %sV%s", num(x), num(w.y0), num(w.y1))
			}
		}
		for _, t := range w.y.Ticks {
			if t.Label != "" {
				_, y := w.at(w.x.Low, t.Value)
				fmt.Fprintf(&grid, "M%s %sH%s", num(w.x0), num(y), num(w.x1))
			}
		}
	}
	if grid.Len() > 0 {
		w.printf(`<path class="grid" d="%s"/>`, grid.String())
	}
	var ticks strings.Builder
	for _, t := range w.x.Ticks {
		x, _ := w.at(t.Value, w.y.Low)
		length := 4.0
		if t.Label == "" {
			length = 2.5
		}
		if p.Matrix == nil {
			fmt.Fprintf(&ticks, "M%s %sv%s", num(x), num(w.y0), num(length))
		}
		if t.Label != "" {
			w.printf(`<text class="tick" x="%s" y="%s" text-anchor="middle">%s</text>`, num(x), num(w.y0+17), html.EscapeString(t.Label))
		}
	}
	for _, t := range w.y.Ticks {
		_, y := w.at(w.x.Low, t.Value)
		if len(p.Y.Categories) == 0 {
			length := 4.0
			if t.Label == "" {
				length = 2.5
			}
			fmt.Fprintf(&ticks, "M%s %sh-%s", num(w.x0), num(y), num(length))
		}
		if t.Label != "" {
			label := t.Label
			if len(p.Y.Categories) > 0 {
				label = shorten(label, w.x0-10)
			}
			w.printf(`<text class="tick" x="%s" y="%s" text-anchor="end">%s</text>`, num(w.x0-7), num(y+4), html.EscapeString(label))
		}
	}
	if p.Matrix == nil {
		w.printf(`<path class="axis" d="M%s %sH%s M%s %sV%s%s"/>`, num(w.x0), num(w.y0), num(w.x1), num(w.x0), num(w.y0), num(w.y1), ticks.String())
	}
	w.printf(`<text class="label" x="%s" y="%s" text-anchor="end">%s</text>`, num(w.x1), num(w.y0+35), html.EscapeString(shorten(p.X.Label, 1/boldness*w.x1)))
	w.printf(`<text class="label" x="4" y="16">%s</text>`, html.EscapeString(shorten(p.Y.Label, 1/boldness*(Width-4))))
	w.WriteString("</g>\n")
}

func (w *writer) series(s *plot.Series) {
	name := html.EscapeString(s.Name)
	class := s.Style.Colour.Of().Name
	switch s.Shape {
	case plot.Band:
		var d strings.Builder
		w.polyline(&d, s.X, s.Y)
		for i := len(s.X2) - 1; i >= 0; i-- {
			x, y := w.at(s.X2[i], s.Y2[i])
			fmt.Fprintf(&d, "L%s %s", num(x), num(y))
		}
		w.printf("<path class=\"area %s\" d=\"%sZ\" data-series=\"%s\" data-x=\"%s\" data-y=\"%s\" data-x2=\"%s\" data-y2=\"%s\"><title>%s</title></path>\n",
			class, d.String(), name, list(s.X), list(s.Y), list(s.X2), list(s.Y2), name)
	case plot.Line:
		var d strings.Builder
		w.polyline(&d, s.X, s.Y)
		w.path(s, d.String(), "data-x=\""+list(s.X)+"\" data-y=\""+list(s.Y)+"\"", name)
	case plot.Level:
		_, y := w.at(w.x.Low, s.Y[0])
		w.path(s, fmt.Sprintf("M%s %sH%s", num(w.x0), num(y), num(w.x1)), "data-y=\""+full(s.Y[0])+"\"", name)
	case plot.Upright:
		x, _ := w.at(s.X[0], w.y.Low)
		w.path(s, fmt.Sprintf("M%s %sV%s", num(x), num(w.y0), num(w.y1)), "data-x=\""+full(s.X[0])+"\"", name)
	case plot.Points:
		w.printf("<g class=\"points %s\" data-series=\"%s\">\n", class, name)
		for i := range s.X {
			sx, sy := s.X[i], s.Y[i]
			if s.Shift != nil {
				sy += s.Shift[i]
			}
			x, y := w.at(sx, sy)
			text := s.Name + ": " + full(s.X[i]) + ", " + full(s.Y[i])
			if s.Text != nil {
				text = s.Text[i]
			}
			w.printf("<path class=\"%s\" d=\"%s\" data-x=\"%s\" data-y=\"%s\"><title>%s</title></path>\n",
				markerClass(s.Style), markerPath(s.Style.Marker, x, y), full(s.X[i]), full(s.Y[i]), html.EscapeString(text))
		}
		w.WriteString("</g>\n")
	}
}

func (w *writer) polyline(d *strings.Builder, xs, ys []float64) {
	for i := range xs {
		x, y := w.at(xs[i], ys[i])
		op := "L"
		if i == 0 {
			op = "M"
		}
		fmt.Fprintf(d, "%s%s %s", op, num(x), num(y))
	}
}

func (w *writer) path(s *plot.Series, d, data, name string) {
	title := ""
	if name != "" {
		title = "<title>" + name + "</title>"
	}
	w.printf("<path class=\"line %s\" stroke-width=\"%s\"%s d=\"%s\" data-series=\"%s\" %s>%s</path>\n",
		s.Style.Colour.Of().Name, num(s.Style.LineWidth()), dashes(s.Style), d, name, data, title)
}
