package svg

import (
	"fmt"
	"html"
	"strconv"
	"strings"

	"limsup/validate/plot"
)

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

// crowd draws a crowd as one path.
func (w *writer) crowd(s *plot.Series, heaps []plot.Heap) {
	var d strings.Builder
	for _, h := range heaps {
		d.WriteString(markerOutline(s.Style.Marker, w.x0+(w.x1-w.x0)*h.X, w.y0+(w.y1-w.y0)*h.Y, smallest+(largest-smallest)*h.Size))
	}
	look := map[string]string{"filled": "fill:currentColor", "open": "fill:var(--paper);stroke:currentColor;stroke-width:.8", "stroked": "fill:none;stroke:currentColor;stroke-width:.9"}[markerClass(s.Style)]
	name := html.EscapeString(s.Name)
	w.printf("<g class=\"crowd %s\"><path style=\"%s\" d=\"%s\" data-rows=\"%d\" data-series=\"%s\"><title>%s: %d rows in %d marks</title></path></g>\n",
		s.Style.Colour.Of().Name, look, d.String(), len(s.X), name, name, len(s.X), len(heaps))
}

// markerPath draws a marker about a place.
func markerPath(m plot.Marker, x, y float64) string { return markerOutline(m, x, y, markerSize) }

// markerOutline draws a marker of half-width r.
func markerOutline(m plot.Marker, x, y, r float64) string {
	corners, closed := m.Outline()
	if corners == nil {
		return fmt.Sprintf("M%s %sa%s %s 0 1 0 %s 0a%s %s 0 1 0 -%s 0Z", num(x-r), num(y), num(r), num(r), num(2*r), num(r), num(r), num(2*r))
	}
	var b strings.Builder
	op := "M"
	for i, c := range corners {
		if i > 0 && c == corners[i-1] {
			op = "M"
			continue
		}
		fmt.Fprintf(&b, "%s%s %s", op, num(x+r*c[0]), num(y-r*c[1]))
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
