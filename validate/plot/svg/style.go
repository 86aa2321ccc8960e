package svg

import (
	"fmt"
	"image/color"
	"strings"

	"limsup/validate/plot"
)

// Swatch returns the sign of a series in a legend, hidden from those who do not see it.
func Swatch(s *plot.Series) string {
	w := &writer{}
	w.printf(`<svg class="swatch" viewBox="0 0 34 14" aria-hidden="true" focusable="false">`)
	class := s.Style.Colour.Of().Name
	switch s.Shape {
	case plot.Band:
		w.printf(`<path class="area %s" d="M1 2H33V12H1Z"/>`, class)
	case plot.Points, plot.Crowd:
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
