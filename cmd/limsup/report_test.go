package main

import (
	"bytes"
	"encoding/json"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"golang.org/x/net/html"
)

const demoData = "../../data/demo/droplets.csv"

var demoTerms = []string{"--tune", "prefactor", "--tune", "slope/fluid", "--tune", "offset/method"}

// drawnPoints reads the points of a series back from the drawings of a page whose
// ids start with a prefix: number, number, what the point says.
func drawnPoints(t *testing.T, page, prefix string) (x, y []float64, text []string) {
	t.Helper()
	doc, err := html.Parse(strings.NewReader(page))
	if err != nil {
		t.Fatal(err)
	}
	get := func(n *html.Node, key string) string {
		for _, a := range n.Attr {
			if a.Key == key {
				return a.Val
			}
		}
		return ""
	}
	var visit func(n *html.Node, inside, points bool)
	visit = func(n *html.Node, inside, points bool) {
		if n.Data == "svg" && strings.HasPrefix(get(n, "id"), prefix) {
			inside = true
		}
		if strings.HasPrefix(get(n, "class"), "points ") {
			points = true
		}
		if inside && points && n.Data == "path" {
			for _, k := range []struct {
				key string
				to  *[]float64
			}{{"data-x", &x}, {"data-y", &y}} {
				v, err := strconv.ParseFloat(get(n, k.key), 64)
				if err != nil {
					t.Fatal(err)
				}
				*k.to = append(*k.to, v)
			}
			text = append(text, n.FirstChild.FirstChild.Data)
		}
		for c := n.FirstChild; c != nil; c = c.NextSibling {
			visit(c, inside, points)
		}
	}
	visit(doc, false, false)
	return x, y, text
}

// TestFiguresAgreeWithJSON reads the points of the demonstration's figures back and
// compares them with what calibrate prints as JSON.
func TestFiguresAgreeWithJSON(t *testing.T) {
	data := []string{"--data", demoData}
	text, message, code := invoke(t, append(append([]string{"calibrate", "--format", "json"}, data...), demoTerms...)...)
	if code != 0 {
		t.Fatal(code, message)
	}
	var j calibrationJSON
	if err := json.Unmarshal([]byte(text), &j); err != nil {
		t.Fatal(err)
	}
	page, message, code := invoke(t, append(append([]string{"report"}, data...), demoTerms...)...)
	if code != 0 {
		t.Fatal(code, message)
	}
	for _, fig := range []struct {
		id     string
		values func(r *calibratedRowJSON) (x, y float64)
	}{
		{"residuals-1", func(r *calibratedRowJSON) (float64, float64) { return r.Pressure / 1e6, r.Residual }},
		{"prediction-1", func(r *calibratedRowJSON) (float64, float64) { return r.Measured, r.Predicted }},
	} {
		xs, ys, texts := drawnPoints(t, page, fig.id)
		if len(xs) != len(j.Residuals) || len(xs) == 0 {
			t.Fatalf("%s: %d points, %d residuals", fig.id, len(xs), len(j.Residuals))
		}
		at := map[string]int{}
		for i, s := range texts {
			place, _, _ := strings.Cut(s, ": ")
			at[place] = i
		}
		for k := range j.Residuals {
			r := &j.Residuals[k]
			place := filepath.Base(r.File) + ":" + strconv.Itoa(r.Line)
			i, ok := at[place]
			if !ok {
				t.Errorf("%s: no point says it is %s", fig.id, place)
				continue
			}
			// Both are printed with all their digits; a residual is a difference of
			// temperatures, of which one may be summed in another order.
			x, y := fig.values(r)
			if math.Abs(xs[i]-x) > 1e-15*math.Abs(x) || math.Abs(ys[i]-y) > 1e-12*r.Measured {
				t.Errorf("%s, %s: (%.17g, %.17g), calibrate prints (%.17g, %.17g)", fig.id, place, xs[i], ys[i], x, y)
			}
		}
	}
	for i := range j.Parameters { // the parameter table holds each estimate
		if p := &j.Parameters[i]; !strings.Contains(page, ">"+p.Name+"<") {
			t.Errorf("parameter %s is not on the page", p.Name)
		}
	}
	if !strings.Contains(page, "Tuning is "+string(j.Verdict)) {
		t.Errorf("the verdict %q is not on the page", j.Verdict)
	}
}

// TestReportOfModel: on the rows that a model was calibrated on, the tuning is
// repeated; on others, and with priors, the page says why not. Twice the same bytes.
func TestReportOfModel(t *testing.T) {
	dir := t.TempDir()
	model := filepath.Join(dir, "lab.json")
	if _, message, code := invoke(t, append([]string{"calibrate", "--data", demoData, "--out", model}, demoTerms...)...); code != 0 {
		t.Fatal(code, message)
	}
	page := filepath.Join(dir, "report.html")
	if out, message, code := invoke(t, "report", "--data", demoData, "--model", model, "--out", page); code != 0 || out != "" {
		t.Fatal(code, out, message)
	}
	first, err := os.ReadFile(page)
	if err != nil {
		t.Fatal(err)
	}
	direct, _, _ := invoke(t, append([]string{"report", "--data", demoData}, demoTerms...)...)
	for _, s := range []string{`id="profile-1"`, `id="correlation-1"`, `id="fold-table"`, "Tuning is "} {
		if !bytes.Contains(first, []byte(s)) || !strings.Contains(direct, s) {
			t.Errorf("a page lacks %s", s)
		}
	}
	if bytes.Contains(first, []byte("Not drawn")) {
		t.Error("a figure is missing although the tuning can be repeated")
	}
	again, _, _ := invoke(t, "report", "--data", demoData, "--model", model)
	if again != string(first) {
		t.Error("the same command gives another page")
	}

	if testing.Short() {
		return // the rest tunes five more times
	}
	other := filepath.Join(dir, "more.csv")
	text, err := os.ReadFile(demoData)
	if err != nil {
		t.Fatal(err)
	}
	lines := strings.SplitAfter(string(text), "\n")
	if err := os.WriteFile(other, []byte(strings.Join(lines[:40], "")), 0o600); err != nil {
		t.Fatal(err)
	}
	out, message, code := invoke(t, "report", "--data", other, "--model", model)
	if code != 0 {
		t.Fatal(code, message)
	}
	for _, s := range []string{"The model was taken as it is", "Not drawn", "profile: the model was taken as it is", "its verdict on left-out rows was:"} {
		if !strings.Contains(out, s) {
			t.Errorf("the page on other rows lacks %q", s)
		}
	}

	prior := filepath.Join(dir, "prior.json")
	if _, message, code := invoke(t, "calibrate", "--data", demoData, "--tune", "prefactor", "--prior", "prefactor=-4+-0.01", "--out", prior); code != 0 {
		t.Fatal(code, message)
	}
	if out, _, code := invoke(t, "report", "--data", demoData, "--model", prior); code != 0 || !strings.Contains(out, "the tuning cannot be repeated from the model file alone") {
		t.Errorf("status %d; the page does not say why a tuning with a prior is not repeated", code)
	}
	if out, _, code := invoke(t, "report", "--data", demoData, "--tune", "none"); code != 0 || !strings.Contains(out, "untuned") {
		t.Errorf("untuned: status %d", code)
	}
}

// TestPlotFiles draws every kind, in every format for one of them.
func TestPlotFiles(t *testing.T) {
	dir := t.TempDir()
	signs := map[string]string{"svg": "<?xml", "png": "\x89PNG", "pdf": "%PDF"}
	draw := func(name string, args ...string) {
		t.Helper()
		file := filepath.Join(dir, name)
		if out, message, code := invoke(t, append(args, "--out", file)...); code != 0 || out != "" {
			t.Errorf("%q: status %d, %q, %s", args, code, out, message)
			return
		}
		text, err := os.ReadFile(file)
		if err != nil {
			t.Fatal(err)
		}
		if sign := signs[strings.TrimPrefix(filepath.Ext(name), ".")]; !bytes.HasPrefix(text, []byte(sign)) {
			t.Errorf("%s starts with %.10q, want %q", name, text, sign)
		}
	}
	for _, kind := range []string{"map", "residuals", "prediction", "flux", "isotherm", "potential", "embryo", "profile", "correlation"} {
		draw(kind+".svg", "plot", kind, "--data", demoData)
	}
	draw("a.png", "plot", "--fluid", "water", "isotherm", "--temperature", "300 degC")
	draw("a.pdf", "--temperature", "410 K", "--fluid", "n-pentane", "plot", "embryo", "--pressure", "1 atm")
	draw("b.svg", "plot", "map", "--fluid", "n-hexane", "--data", demoData, "--tune", "none")
}

// TestBadPlotCalls: every unusable call is refused with the status of bad input.
func TestBadPlotCalls(t *testing.T) {
	out := filepath.Join(t.TempDir(), "a.svg")
	for _, tt := range []struct {
		says string
		args []string
	}{
		{"takes one argument", []string{"plot", "--out", out}},
		{"takes one argument", []string{"plot", "map", "flux", "--out", out}},
		{`did you mean residuals?`, []string{"plot", "residual", "--out", out}},
		{"needs --out", []string{"plot", "map", "--fluid", "water"}},
		{"ends in .svg", []string{"plot", "map", "--fluid", "water", "--out", "a.gif"}},
		{"needs --fluid", []string{"plot", "map", "--out", out}},
		{"needs --data", []string{"plot", "residuals", "--out", out}},
		{"leave nothing to profile", []string{"plot", "profile", "--data", demoData, "--tune", "none", "--out", out}},
		{"one --fluid", []string{"plot", "map", "--data", demoData, "--fluid", "water", "--fluid", "ethane", "--out", out}},
		{"nothing to draw", []string{"plot", "isotherm", "--fluid", "n-pentane", "--temperature", "600 K", "--out", out}},
		{"nothing to draw", []string{"plot", "correlation", "--out", out}},
		{"needs --data", []string{"report"}},
		{"flags only", []string{"report", "x"}},
		{"has no flag", []string{"report", "--format", "json"}},
	} {
		if _, message, code := invoke(t, tt.args...); code != 2 || !strings.Contains(message, tt.says) {
			t.Errorf("%q: status %d, %q; want 2, %q", tt.args, code, message, tt.says)
		}
		if _, err := os.Stat(out); err == nil {
			t.Fatalf("%q left a file behind", tt.args)
		}
	}
}
