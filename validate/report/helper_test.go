package report

import (
	"bytes"
	"encoding/csv"
	"strings"
	"sync"
	"testing"

	"golang.org/x/net/html"

	"limsup/data/fluid"
	"limsup/data/measure"
	"limsup/fit"
	"limsup/validate"
	"limsup/validate/plot"
)

// made is a page with the report behind it.
type made struct {
	report *Report
	page   []byte
	err    error
}

var (
	demoOnce    = sync.OnceValue(makeDemo)
	hostileOnce = sync.OnceValue(makeHostile)
	manyOnce    = sync.OnceValue(makeMany)
)

// demo is the report on the demonstration data (synthetic).
func demo(t *testing.T) (*Report, []byte) { return demoOnce().get(t) }

// hostile is the same with names that try to break out of the page.
func hostile(t *testing.T) (*Report, []byte) { return hostileOnce().get(t) }

// many is a page on more rows than are shown one by one.
func many(t *testing.T) (*Report, []byte) { return manyOnce().get(t) }

// makeMany judges the model of the demonstration on its rows again and again, each time
// a little warmer.
func makeMany() *made {
	of := demoOnce()
	if of.err != nil {
		return of
	}
	c := of.report.Calibration
	d := *c.Data
	d.Observations = nil
	for k := 0; len(d.Observations) <= plot.Many; k++ {
		for _, o := range c.Data.Observations {
			o.Temperature += 0.01 * float64(k)
			d.Observations = append(d.Observations, o)
		}
	}
	a, err := validate.AssessModel(&d, c.Model())
	if err != nil {
		return &made{err: err}
	}
	r := &Report{Assessment: a, Seed: 1, Version: "under test"}
	r.Figures, r.Absent = plot.All(a, nil, "nothing was tuned", nil)
	var b bytes.Buffer
	if err := Write(&b, r); err != nil {
		return &made{err: err}
	}
	return &made{r, b.Bytes(), nil}
}

func (m *made) get(t *testing.T) (*Report, []byte) {
	t.Helper()
	if m.err != nil {
		t.Fatal(m.err)
	}
	return m.report, m.page
}

const demoFile = "../../data/demo/droplets.csv"

func makeDemo() *made {
	lib, err := fluid.Builtin()
	if err != nil {
		return &made{err: err}
	}
	set, err := measure.ReadFile(demoFile, measure.Options{})
	if err != nil {
		return &made{err: err}
	}
	return makeReport(set, lib)
}

// makeReport tunes to a set and writes the page.
func makeReport(set *measure.Set, lib *fluid.Library) *made {
	fail := func(err error) *made { return &made{err: err} }
	plan := fit.Plan{Terms: []fit.Term{{Name: fit.Prefactor}, {Name: fit.Slope, By: fit.ByFluid}, {Name: fit.Offset, By: fit.ByMethod}}, Seed: 1}
	d, err := fit.Prepare(set, lib, plan)
	if err != nil {
		return fail(err)
	}
	c, err := fit.Calibrate(d, plan, fit.Options{})
	if err != nil {
		return fail(err)
	}
	folds, err := validate.NewFolds("rows", d.Observations, 1)
	if len(plot.ByRows(d.Observations)) > 1 {
		folds, err = validate.NewFolds("fluid", d.Observations, 1)
	}
	if err != nil {
		return fail(err)
	}
	cv, err := validate.CrossValidate(d, plan, folds, c)
	if err != nil {
		return fail(err)
	}
	r := &Report{Assessment: validate.Assess(c, cv), Calibration: c, Warnings: c.Warnings, Seed: 1, Version: "under test"}
	if r.Effects, err = c.Model().SideEffects(c.Queries()); err != nil {
		return fail(err)
	}
	r.Figures, r.Absent = plot.All(r.Assessment, c, "", nil)
	var b bytes.Buffer
	if err := Write(&b, r); err != nil {
		return fail(err)
	}
	return &made{r, b.Bytes(), nil}
}

// hostileNames try the ways out of text: elements, attributes, templates, direction,
// length.
var hostileNames = []string{
	`<script>alert(1)</script>`,
	`"><img src=x onerror=alert(1)>`,
	`' onmouseover='alert(1)`,
	`</title></desc></svg><script>alert(2)</script>`,
	`{{.}} ${x} &lt;b&gt; &#x202e;`,
	"قطرة שלום " + "\u202e" + "desrever",
	"👩‍🔬🧪 é",
	strings.Repeat("verylongname", 30),
	"--><!-- ]]> */ }",
}

func makeHostile() *made {
	fail := func(err error) *made { return &made{err: err} }
	lib, err := fluid.Builtin()
	if err != nil {
		return fail(err)
	}
	pentane, err := lib.Find("n-pentane")
	if err != nil {
		return fail(err)
	}
	record := *pentane
	record.Key = `<b onclick="alert(3)">n-pentane</b>`
	record.Aliases = nil
	lib = lib.With(&record)
	text, err := measureText(record.Key)
	if err != nil {
		return fail(err)
	}
	set, err := measure.ReadCSV(strings.NewReader(text), `"><script>alert(4)</script>.csv`, measure.Options{})
	if err != nil {
		return fail(err)
	}
	return makeReport(set, lib)
}

// measureText is a file of n-pentane readings, invented for this test, one of each
// hostile method at three pressures.
func measureText(key string) (string, error) {
	var b strings.Builder
	w := csv.NewWriter(&b)
	rows := [][]string{{"fluid", "method", "batch", "pressure/kPa", "temperature/K", "volume/nL", "heating_rate/(K/s)"}}
	for i, p := range []struct{ p, t string }{{"101.325", "42"}, {"300", "42"}, {"600", "42"}} {
		for k, n := range hostileNames {
			tenth := string(rune('0' + (3*i+5*k)%10))
			rows = append(rows, []string{key, n, hostileNames[(k+1)%len(hostileNames)], p.p, p.t + []string{"0", "3", "7"}[i] + "." + tenth, "100", "2"})
		}
	}
	if err := w.WriteAll(rows); err != nil {
		return "", err
	}
	return b.String(), nil
}

// parse reads a page as a browser would.
func parse(t *testing.T, page []byte) *html.Node {
	t.Helper()
	n, err := html.Parse(bytes.NewReader(page))
	if err != nil {
		t.Fatal(err)
	}
	return n
}

// each visits the elements below n.
func each(n *html.Node, visit func(*html.Node)) {
	if n.Type == html.ElementNode {
		visit(n)
	}
	for c := n.FirstChild; c != nil; c = c.NextSibling {
		each(c, visit)
	}
}

func attribute(n *html.Node, key string) string {
	for _, a := range n.Attr {
		if a.Key == key {
			return a.Val
		}
	}
	return ""
}

// content is the text below n.
func content(n *html.Node) string {
	if n.Type == html.TextNode {
		return n.Data
	}
	var b strings.Builder
	for c := n.FirstChild; c != nil; c = c.NextSibling {
		b.WriteString(content(c))
	}
	return b.String()
}
