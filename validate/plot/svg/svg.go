// Package svg writes the panels of a figure as SVG for a page of HTML.
//
// Text is text; colours are classes (see Style), so that one drawing serves light,
// dark and printed pages; there is a view box and no size, so that the page decides
// how wide a panel is. A panel is an image with a name and a description for those
// who do not see it. Every marker carries a <title>, shown on hovering, and every
// series its numbers in full precision as attributes data-x and data-y (separated by
// spaces for a line), so that they can be read back.
//
// Lengths are in units of the view box, which are pixels at the natural size, y
// downwards. Nothing of a name is trusted: all text is escaped.
package svg

import (
	"fmt"
	"html"
	"image/color"
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
	boldness                 = 1.12 // how much wider bold letters are
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
	for k := range p.Series {
		w.series(&p.Series[k])
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
		if s.Shape == plot.Points {
			fmt.Fprintf(&b, " (%d points)", len(s.X))
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

func dashes(s plot.Style) string {
	p := s.Dash.Pattern()
	if p == nil {
		return ""
	}
	parts := make([]string, len(p))
	for i, v := range p {
		parts[i] = num(v * s.LineWidth())
	}
	return ` stroke-dasharray="` + strings.Join(parts, " ") + `"`
}

func markerClass(s plot.Style) string {
	if _, closed := s.Marker.Outline(); !closed {
		return "stroked"
	}
	if s.Open {
		return "open"
	}
	return "filled"
}

// markerPath draws a marker about a place.
func markerPath(m plot.Marker, x, y float64) string {
	corners, closed := m.Outline()
	if corners == nil {
		r := markerSize
		return fmt.Sprintf("M%s %sa%s %s 0 1 0 %s 0a%s %s 0 1 0 -%s 0Z", num(x-r), num(y), num(r), num(r), num(2*r), num(r), num(r), num(2*r))
	}
	var b strings.Builder
	op := "M"
	for i, c := range corners {
		if i > 0 && c == corners[i-1] {
			op = "M"
			continue
		}
		fmt.Fprintf(&b, "%s%s %s", op, num(x+markerSize*c[0]), num(y-markerSize*c[1]))
		op = "L"
	}
	if closed {
		b.WriteString("Z")
	}
	return b.String()
}

// matrix draws cells from the top row down.
func (w *writer) matrix(p *plot.Panel) {
	n := len(p.Matrix.Value)
	side := (w.x1 - w.x0) / float64(n)
	for r, row := range p.Matrix.Value {
		for c, v := range row {
			if !p.Matrix.Known[r][c] {
				continue
			}
			x, y := w.x0+float64(c)*side, w.y0-float64(r+1)*side
			class, text := "first", strings.ReplaceAll(strconv.FormatFloat(v, 'f', 2, 64), "-", "−")
			if v < 0 {
				class = "second"
			}
			strength := 0.55 * v * v
			w.printf("<g class=\"cell %s\"><path d=\"M%s %sh%sv%sh-%sZ\" fill-opacity=\"%s\" data-row=\"%d\" data-column=\"%d\" data-value=\"%s\"><title>%s and %s: %s</title></path>",
				class, num(x+0.5), num(y+0.5), num(side-1), num(side-1), num(side-1), num(strength), r+1, c+1, full(v),
				html.EscapeString(p.Y.Categories[r]), html.EscapeString(p.X.Categories[c]), text)
			if size := min(11, 0.31*side); size >= 5 {
				w.printf(`<text x="%s" y="%s" style="font-size:%spx" text-anchor="middle" aria-hidden="true">%s</text>`, num(x+side/2), num(y+side/2+0.35*size), num(size), text)
			}
			w.WriteString("</g>\n")
		}
	}
}

// Swatch returns the sign of a series in a legend, hidden from those who do not see it.
func Swatch(s *plot.Series) string {
	w := &writer{}
	w.printf(`<svg class="swatch" viewBox="0 0 34 14" aria-hidden="true" focusable="false">`)
	class := s.Style.Colour.Of().Name
	switch s.Shape {
	case plot.Band:
		w.printf(`<path class="area %s" d="M1 2H33V12H1Z"/>`, class)
	case plot.Points:
		w.printf(`<g class="points %s"><path class="%s" d="%s"/></g>`, class, markerClass(s.Style), markerPath(s.Style.Marker, 17, 7))
	default:
		w.printf(`<path class="line %s" stroke-width="%s"%s d="M1 7H33"/>`, class, num(s.Style.LineWidth()), dashes(s.Style))
	}
	w.WriteString("</svg>")
	return w.String()
}

// Style returns the rules for the classes of the drawings, with the colours of light
// pages, of dark ones where the reader prefers them, and of paper.
func Style() string {
	var b strings.Builder
	vars := func(dark bool) string {
		var v strings.Builder
		for _, c := range plot.Colours() {
			p := c.Of()
			rgb := p.Light
			if dark {
				rgb = p.Dark
			}
			fmt.Fprintf(&v, "--%s:%s;", p.Name, hex(rgb))
		}
		return v.String()
	}
	fmt.Fprintf(&b, ":root{%s}\n@media screen and (prefers-color-scheme:dark){:root{%s}}\n", vars(false), vars(true))
	for _, c := range plot.Colours() {
		n := c.Of().Name
		fmt.Fprintf(&b, ".plot .%s,.swatch .%s{color:var(--%s)}\n", n, n, n)
	}
	b.WriteString(`.plot{display:block;width:100%;height:auto;overflow:visible}
.plot text{font-size:12px;fill:var(--ink);unicode-bidi:isolate}
.plot .label{font-weight:600}
.grid{stroke:var(--ink);stroke-opacity:.13;fill:none;stroke-width:.8}
.axis{stroke:var(--ink);fill:none;stroke-width:1}
.line{fill:none;stroke:currentColor;stroke-linejoin:round}
.area{fill:currentColor;fill-opacity:.2;stroke:none}
.points .filled{fill:currentColor;stroke:var(--paper);stroke-width:.7}
.points .open{fill:var(--paper);stroke:currentColor;stroke-width:1.5}
.points .stroked{fill:none;stroke:currentColor;stroke-width:1.8}
.points path:hover{stroke:var(--ink);stroke-width:2}
.cell path{fill:currentColor}
.swatch{width:34px;height:14px;flex:none}
`)
	return b.String()
}

func hex(c color.RGBA) string { return fmt.Sprintf("#%02x%02x%02x", c.R, c.G, c.B) }
