package report

import (
	"bytes"
	"fmt"
	"regexp"
	"strconv"
	"strings"
	"testing"

	"golang.org/x/net/html"

	"limsup/data/caution"
	"limsup/validate/plot"
	"limsup/validate/plot/svg"
)

// TestHostileNames: every name comes out as text, nothing of it as markup.
func TestHostileNames(t *testing.T) {
	r, page := hostile(t)
	doc := parse(t, page)
	texts := map[string]bool{}
	each(doc, func(n *html.Node) {
		switch n.Data {
		case "script", "img", "iframe", "object", "embed", "form", "b":
			t.Errorf("the page has an element <%s>", n.Data)
		}
		for _, a := range n.Attr {
			if strings.HasPrefix(strings.ToLower(a.Key), "on") {
				t.Errorf("<%s> has a handler %s=%q", n.Data, a.Key, a.Val)
			}
		}
		texts[strings.TrimSpace(content(n))] = true
	})
	for _, name := range append([]string{r.Assessment.Data.Observations[0].Record.Key}, hostileNames...) {
		if !texts[plot.Visible(name)] {
			t.Errorf("%q is not the text of any element", plot.Visible(name))
		}
	}
	if bytes.ContainsRune(page, '\u202e') {
		t.Error("a character that turns the direction of text reached the page")
	}
	if !texts["Limit map of "+plot.Visible(r.Assessment.Data.Observations[0].Record.Key)] {
		t.Error("the limit map does not name its fluid")
	}
}

// TestNothingFromElsewhere: the page names no resource outside of itself, and forbids
// its own loading.
func TestNothingFromElsewhere(t *testing.T) {
	_, page := demo(t)
	each(parse(t, page), func(n *html.Node) {
		for _, a := range n.Attr {
			switch a.Key {
			case "src", "srcset", "poster", "action", "background", "data":
				t.Errorf("<%s> loads %s=%q", n.Data, a.Key, a.Val)
			case "href":
				if !strings.HasPrefix(a.Val, "#") && a.Val != "data:," {
					t.Errorf("<%s> points to %q", n.Data, a.Val)
				}
			}
		}
	})
	for _, bad := range []string{"@import", "url(", "http:", "https:"} {
		if i := bytes.Index(page, []byte(bad)); i >= 0 {
			t.Errorf("the page has %q: %q", bad, page[i:min(len(page), i+40)])
		}
	}
	if !bytes.Contains(page, []byte(`content="default-src 'none'; style-src 'unsafe-inline'; img-src data:"`)) {
		t.Error("the page has no policy against loading")
	}
}

// TestStructure: landmarks, headings in steps of one, unique ids, references that
// exist, heads of tables with a scope, names for images.
func TestStructure(t *testing.T) {
	for name, get := range map[string]func(*testing.T) (*Report, []byte){"demo": demo, "hostile": hostile, "many": many} {
		t.Run(name, func(t *testing.T) {
			_, page := get(t)
			doc := parse(t, page)
			ids, landmarks, level := map[string]int{}, map[string]int{}, 0
			each(doc, func(n *html.Node) {
				if id := attribute(n, "id"); id != "" {
					ids[id]++
				}
			})
			each(doc, func(n *html.Node) {
				switch n.Data {
				case "header", "main", "nav", "footer":
					landmarks[n.Data]++
				case "h1", "h2", "h3", "h4":
					l := int(n.Data[1] - '0')
					if l > level+1 {
						t.Errorf("heading %q jumps from level %d to %d", content(n), level, l)
					}
					level = l
				case "th":
					if s := attribute(n, "scope"); s != "col" && s != "row" {
						t.Errorf("table head %q has no scope", content(n))
					}
				case "svg":
					if attribute(n, "aria-hidden") != "true" && (attribute(n, "role") != "img" || attribute(n, "aria-labelledby") == "") {
						t.Error("a drawing has no name")
					}
				}
				for _, key := range []string{"aria-labelledby", "href"} {
					v := attribute(n, key)
					if key == "href" && !strings.HasPrefix(v, "#") {
						continue
					}
					for _, id := range strings.Fields(v) {
						if ids[strings.TrimPrefix(id, "#")] != 1 {
							t.Errorf("<%s> refers to %q, which occurs %d times", n.Data, id, ids[strings.TrimPrefix(id, "#")])
						}
					}
				}
			})
			for id, n := range ids {
				if n > 1 {
					t.Errorf("id %q occurs %d times", id, n)
				}
			}
			for _, l := range []string{"header", "main", "nav", "footer"} {
				if landmarks[l] != 1 {
					t.Errorf("%d elements <%s>, want 1", landmarks[l], l)
				}
			}
		})
	}
}

// TestVerdictAndCautions: cautions come first, the verdict second, and the short
// caution stands by the numbers.
func TestVerdictAndCautions(t *testing.T) {
	r, page := demo(t)
	text := string(page)
	verdict, _ := r.verdict()
	at := -1
	for _, s := range append(caution.Sentences(), verdict, "Parameters with standard uncertainties", "Residuals by group", "Limit map of") {
		i := strings.Index(text, html.EscapeString(s))
		if i <= at {
			t.Errorf("%q stands at %d, want after %d", s, i, at)
		}
		at = i
	}
	if n, want := strings.Count(text, html.EscapeString(caution.Short())), 3+4+2; n < want { // verdict, residuals, foot; four maps; prediction, flux
		t.Errorf("the short caution occurs %d times, want at least %d", n, want)
	}
}

// TestKindsOfFigure: the demonstration shows every kind, each with a caption and numbers.
func TestKindsOfFigure(t *testing.T) {
	r, page := demo(t)
	if len(r.Absent) > 0 {
		t.Errorf("absent: %v", r.Absent)
	}
	kinds := map[string]bool{}
	for _, f := range r.Figures {
		kinds[f.Kind] = true
		if len(f.Caption) < 80 {
			t.Errorf("figure %s: the caption says too little: %q", f.ID, f.Caption)
		}
	}
	for _, k := range plot.Kinds() {
		if !kinds[k] {
			t.Errorf("no figure of kind %s", k)
		}
	}
	doc := parse(t, page)
	panels, tables := 0, 0
	each(doc, func(n *html.Node) {
		if n.Data == "svg" && attribute(n, "class") == "plot" {
			panels++
		}
		if n.Data == "table" && strings.Contains(attribute(n, "id"), "-numbers-") {
			tables++
		}
	})
	want := 0
	for _, f := range r.Figures {
		want += len(f.Panels)
	}
	if panels != want || tables != want {
		t.Errorf("%d drawings and %d tables of numbers, want %d of each", panels, tables, want)
	}
}

// TestNumbersBehindFigures reads the markers and lines of every drawing back and
// compares them with the figure and with the table below it.
func TestNumbersBehindFigures(t *testing.T) {
	r, page := demo(t)
	doc := parse(t, page)
	drawn := map[string]map[string][][2]string{} // panel → series → points
	cells := map[string]map[string][][2]string{}
	each(doc, func(n *html.Node) {
		switch {
		case n.Data == "svg" && attribute(n, "class") == "plot":
			m := map[string][][2]string{}
			drawn[attribute(n, "id")] = m
			each(n, func(e *html.Node) {
				name := attribute(e, "data-series")
				if e.Data == "g" && name != "" {
					each(e, func(p *html.Node) {
						if p.Data == "path" {
							m[name] = append(m[name], [2]string{attribute(p, "data-x"), attribute(p, "data-y")})
							if p.FirstChild == nil || content(p.FirstChild) == "" {
								t.Errorf("a mark of %q says nothing when pointed at", name)
							}
						}
					})
				}
				if e.Data == "path" && name != "" {
					xs, ys := strings.Fields(attribute(e, "data-x")), strings.Fields(attribute(e, "data-y"))
					for i := range max(len(xs), len(ys)) {
						m[name] = append(m[name], [2]string{pick(xs, i), pick(ys, i)})
					}
				}
			})
		case n.Data == "table" && strings.Contains(attribute(n, "id"), "-numbers-"):
			m := map[string][][2]string{}
			cells[strings.Replace(attribute(n, "id"), "-numbers-", "-", 1)] = m
			each(n, func(e *html.Node) {
				if e.Data != "tr" || e.Parent.Data != "tbody" {
					return
				}
				var row []string
				for c := e.FirstChild; c != nil; c = c.NextSibling {
					if c.Type == html.ElementNode {
						row = append(row, strings.ReplaceAll(content(c), "all", ""))
					}
				}
				m[content(e.FirstChild)] = append(m[content(e.FirstChild)], [2]string{row[1], row[2]})
			})
		}
	})
	for _, f := range r.Figures {
		for i := range f.Panels {
			p, id := &f.Panels[i], fmt.Sprintf("%s-%d", f.ID, i+1)
			if p.Matrix != nil {
				compareMatrix(t, doc, id, p.Matrix)
				continue
			}
			want := map[string][][2]string{}
			for _, s := range p.Series {
				for k := range max(len(s.X), len(s.Y)) {
					want[s.Name] = append(want[s.Name], [2]string{number(s.X, k), number(s.Y, k)})
				}
			}
			delete(want, "")
			delete(drawn[id], "")
			compare(t, id+" drawn", drawn[id], want)
			for name, pts := range want { // the table names categories instead of counting them
				for k := range pts {
					if len(p.Y.Categories) > 0 && pts[k][1] != "" {
						n, err := strconv.Atoi(pts[k][1])
						if err != nil {
							t.Fatal(err)
						}
						want[name][k][1] = p.Y.Categories[n]
					}
				}
			}
			compare(t, id+" table", cells[id], want)
		}
	}
}

// compareMatrix reads the cells of a drawing back.
func compareMatrix(t *testing.T, doc *html.Node, id string, m *plot.Matrix) {
	t.Helper()
	var got []string
	each(doc, func(n *html.Node) {
		if n.Data == "svg" && attribute(n, "id") == id {
			each(n, func(e *html.Node) {
				if v := attribute(e, "data-value"); v != "" {
					got = append(got, v)
				}
			})
		}
	})
	var want []string
	for _, row := range m.Value {
		for _, v := range row {
			want = append(want, strconv.FormatFloat(v, 'g', -1, 64))
		}
	}
	if strings.Join(got, " ") != strings.Join(want, " ") {
		t.Errorf("%s: cells %v, want %v", id, got, want)
	}
}

func pick(s []string, i int) string {
	if i < len(s) {
		return s[i]
	}
	return ""
}

func number(v []float64, i int) string {
	if i < len(v) {
		return strconv.FormatFloat(v[i], 'g', -1, 64)
	}
	return ""
}

func compare(t *testing.T, what string, got, want map[string][][2]string) {
	t.Helper()
	if len(got) != len(want) {
		t.Errorf("%s: %d series, want %d", what, len(got), len(want))
	}
	for name, w := range want {
		g := got[name]
		if len(g) != len(w) {
			t.Errorf("%s: %q has %d points, want %d", what, name, len(g), len(w))
			continue
		}
		for i := range w {
			if g[i] != w[i] {
				t.Errorf("%s: %q point %d is %v, want %v", what, name, i, g[i], w[i])
				break
			}
		}
	}
}

// TestSameBytes: the same report gives the same page.
func TestSameBytes(t *testing.T) {
	r, page := demo(t)
	var b bytes.Buffer
	if err := Write(&b, r); err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(b.Bytes(), page) {
		t.Error("a second page differs")
	}
	again := makeDemo()
	if again.err != nil || !bytes.Equal(again.page, page) {
		t.Errorf("a second calibration gives another page (%v)", again.err)
	}
}

// TestContrast computes the contrast of every colour of text and of every mark with
// the backgrounds it stands on, in light and in dark.
func TestContrast(t *testing.T) {
	style := svg.Style() + pageStyle
	variable := regexp.MustCompile(`--([a-z]+):(#[0-9a-f]{3,6})`)
	light, dark := map[string]string{}, map[string]string{}
	for _, block := range regexp.MustCompile(`(@media screen and \(prefers-color-scheme:dark\)\{)?:root\{([^}]*)\}`).FindAllStringSubmatch(style, -1) {
		into := light
		if block[1] != "" {
			into = dark
		}
		for _, v := range variable.FindAllStringSubmatch(block[2], -1) {
			into[v[1]] = v[2]
		}
	}
	if len(light) != len(dark) || len(light) < 12 {
		t.Fatalf("%d light colours, %d dark ones", len(light), len(dark))
	}
	// WCAG 2.2 (from memory): 4.5 for text (1.4.3), 3 for what is needed to
	// understand a graphic (1.4.11).
	for name, set := range map[string]map[string]string{"light": light, "dark": dark} {
		check := func(front, back string, want float64) {
			if c := contrast(t, set[front], set[back]); c < want {
				t.Errorf("%s: %s %s on %s %s has contrast %.2f, want %g", name, front, set[front], back, set[back], c, want)
			}
		}
		for _, text := range []string{"ink", "faint", "link", "warn"} {
			check(text, "paper", 4.5)
		}
		check("ink", "warnbg", 4.5)
		check("ink", "soft", 4.5)
		check("faint", "soft", 4.5)
		for _, c := range plot.Colours() {
			check(c.Of().Name, "paper", 3)
		}
	}
}

func contrast(t *testing.T, a, b string) float64 {
	x, y := luminance(t, a), luminance(t, b)
	if x < y {
		x, y = y, x
	}
	return (x + 0.05) / (y + 0.05)
}

func luminance(t *testing.T, hex string) float64 {
	t.Helper()
	hex = strings.TrimPrefix(hex, "#")
	if len(hex) == 3 {
		hex = string([]byte{hex[0], hex[0], hex[1], hex[1], hex[2], hex[2]})
	}
	v, err := strconv.ParseUint(hex, 16, 32)
	if err != nil || len(hex) != 6 {
		t.Fatalf("colour %q: %v", hex, err)
	}
	return plot.Luminance(uint8(v>>16), uint8(v>>8), uint8(v))
}
