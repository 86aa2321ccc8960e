package svg

import (
	"encoding/xml"
	"errors"
	"io"
	"math"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"limsup/validate/plot"
)

// texts are the contents of the elements <text> of a drawing, which must be XML.
func texts(t interface{ Fatal(...any) }, drawing string) []string {
	d := xml.NewDecoder(strings.NewReader(drawing))
	var out []string
	inside := false
	for {
		tok, err := d.Token()
		if err == io.EOF {
			return out
		}
		if err != nil {
			t.Fatal(err, drawing)
		}
		switch k := tok.(type) {
		case xml.StartElement:
			if inside = k.Name.Local == "text"; inside {
				out = append(out, "")
			}
		case xml.EndElement:
			inside = false
		case xml.CharData:
			if inside {
				out[len(out)-1] += string(k)
			}
		}
	}
}

// TestNumbersInFull: however long the numbers along the axes are, none is cut.
func TestNumbersInFull(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		v := func(name string) []float64 {
			size := math.Pow(10, rapid.Float64Range(-6, 8).Draw(t, name+" size"))
			return []float64{size * rapid.Float64Range(-1, 1).Draw(t, name), size * rapid.Float64Range(-1, 1).Draw(t, name)}
		}
		f := &plot.Figure{ID: "f", Title: "f", Panels: []plot.Panel{{X: plot.Axis{Label: "x"}, Y: plot.Axis{Label: "y"},
			Series: []plot.Series{{Name: "s", X: v("x"), Y: v("y")}}}}}
		s, err := Panel(f, 0)
		if err != nil {
			t.Fatal(err)
		}
		written := map[string]bool{}
		for _, k := range texts(t, s) {
			written[k] = true
		}
		x, y := f.Panels[0].Scales()
		for _, k := range append(x.Ticks, y.Ticks...) {
			if k.Label != "" && !written[k.Label] {
				t.Fatalf("the number %q is not on the axis", k.Label)
			}
		}
	})
}

// TestNames: any name comes out as text that XML reads back, cut with an ellipsis
// only where it is a category.
func TestNames(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		name := plot.Visible(rapid.StringN(1, 60, -1).Draw(t, "name"))
		f := &plot.Figure{ID: "f", Title: name, Panels: []plot.Panel{{Title: name, X: plot.Axis{Label: "x"}, Y: plot.Axis{Label: "y", Categories: []string{name}},
			Series: []plot.Series{{Name: name, Shape: plot.Points, X: []float64{1}, Y: []float64{0}, Text: []string{name}}}}}}
		s, err := Panel(f, 0)
		if err != nil {
			t.Fatal(err)
		}
		if strings.Contains(name, "\ufffe") || strings.Contains(name, "\uffff") {
			return // not in XML at all; in HTML they are
		}
		for _, k := range texts(t, s) {
			if k == name || strings.HasSuffix(k, "…") && strings.HasPrefix(name, strings.TrimSuffix(k, "…")) {
				return
			}
		}
		t.Fatalf("%q is no text of the drawing", name)
	})
}

// TestMarkers: each marker has a path of its own, about its place.
func TestMarkers(t *testing.T) {
	seen := map[string]bool{}
	for m := plot.Circle; m <= plot.Plus; m++ {
		p := markerPath(m, 100, 50)
		if seen[p] || !strings.HasPrefix(p, "M") {
			t.Errorf("marker %d: %q", m, p)
		}
		seen[p] = true
	}
	if got := markerPath(plot.Cross, 100, 50); strings.Count(got, "M") != 2 || strings.Count(got, "L") != 2 || strings.HasSuffix(got, "Z") {
		t.Errorf("a cross is two strokes, not %q", got)
	}
}

// TestRefusal: a number that is none is an error, not a drawing.
func TestRefusal(t *testing.T) {
	f := &plot.Figure{ID: "f", Panels: []plot.Panel{{Series: []plot.Series{{Name: "s", X: []float64{math.NaN()}, Y: []float64{1}}}}}}
	var e *plot.NumberError
	if _, err := Panel(f, 0); !errors.As(err, &e) {
		t.Errorf("%v", err)
	}
}

// TestCrowd: a crowd is one path with a mark for each heap, however many its rows, and
// says how many they are.
func TestCrowd(t *testing.T) {
	for m := plot.Circle; m <= plot.Plus; m++ {
		s := plot.Series{Name: "a <b>", Shape: plot.Crowd, Style: plot.Style{Marker: m}}
		for i := range 30000 {
			s.X, s.Y = append(s.X, float64(i%100)), append(s.Y, float64(i%7))
		}
		f := &plot.Figure{ID: "f", Panels: []plot.Panel{{Series: []plot.Series{s}}}}
		drawing, err := Panel(f, 0)
		if err != nil {
			t.Fatal(err)
		}
		texts(t, drawing) // is XML
		_, crowd, ok := strings.Cut(drawing, `<g class="crowd ink">`)
		if !ok || strings.Count(crowd, "<path") != 1 {
			t.Fatalf("marker %d: no crowd of one path", m)
		}
		_, d, _ := strings.Cut(crowd, ` d="`)
		d, rest, _ := strings.Cut(d, `"`)
		heaps := len(f.Panels[0].Heaps()[0])
		if got, want := strings.Count(d, "M"), heaps*strings.Count(markerPath(m, 0, 0), "M"); got != want {
			t.Errorf("marker %d: %d strokes, want %d for %d heaps", m, got, want, heaps)
		}
		if want := ` data-rows="30000" data-series="a &lt;b&gt;"><title>a &lt;b&gt;: 30000 rows in `; !strings.HasPrefix(rest, want) {
			t.Errorf("marker %d: %.120q, want %q", m, rest, want)
		}
	}
}
