// Package report writes a calibration, or a model judged on measurements, as one
// page of HTML that needs nothing else: no script, no network, no fonts. It reads on
// a phone, on a screen in light or dark, and on paper.
//
// The order is that of a reader's questions: the verdict, what it rests on, the
// parameters, the residuals, the figures. The cautions stand at the top, and in
// short beside the numbers. All texts from files pass through html/template or are
// escaped by plot/svg.
//
// The package computes nothing but what a table needs, and the same report gives the
// same bytes: there is no date in it.
package report

import (
	_ "embed"
	"fmt"
	"html/template"
	"io"
	"strings"

	"limsup/data/caution"
	"limsup/fit"
	"limsup/validate"
	"limsup/validate/plot"
	"limsup/validate/plot/svg"
)

// Report is what a page shows.
type Report struct {
	Assessment  *validate.Assessment
	Calibration *fit.Calibration // nil for a model that was taken as it is
	NoCV        string           // why there is no cross-validation
	Stored      string           // verdict that the model file holds, for a model as it is
	Effects     []fit.SideEffect
	Warnings    []string
	Figures     []*plot.Figure
	Absent      []plot.Absent
	Seed        uint64
	Version     string // of limsup
}

//go:embed page.html
var pageText string

//go:embed page.css
var pageStyle string

var pageTemplate = template.Must(template.New("page").Parse(pageText))

// page is what the template reads.
type page struct {
	Title      string
	Style      template.CSS
	Cautions   []string
	Short      string
	Verdict    string
	Reason     string
	Key        []fact
	Job        []fact
	Warnings   []string
	Parameters *table
	Effects    *table
	NoEffects  string
	Groups     *table
	Coverage   *table
	NoCoverage string
	Tests      *table
	Worst      []string
	Rows       *table
	Excluded   *table
	Folds      *table
	NoFolds    string
	Figures    []figure
	Absent     []plot.Absent
	Version    string
}

// fact is a labelled value.
type fact struct{ Label, Value string }

// figure is a figure of the page.
type figure struct {
	*plot.Figure
	Drawings []drawing
	Legend   []entry
	Numbers  []*table
	Limits   bool // it shows predicted limits, and carries the short caution
}

type drawing struct {
	Title string
	SVG   template.HTML
}

type entry struct {
	Swatch template.HTML
	Name   string
}

// Write writes the page.
//
// Errors: *plot.NumberError for a figure that cannot be drawn; those of w.
func Write(w io.Writer, r *Report) error {
	p := &page{Title: "Superheat limits: report", Style: template.CSS(svg.Style() + pageStyle),
		Cautions: caution.Sentences(), Short: caution.Short(), Warnings: visibleAll(r.Warnings), Absent: r.Absent, Version: r.Version}
	p.Verdict, p.Reason = r.verdict()
	p.Key, p.Job = r.keyFacts(), r.jobFacts()
	p.Parameters = r.parameters()
	p.Effects, p.NoEffects = r.effects()
	p.Groups, p.Tests, p.Rows = r.groups(), r.tests(), r.rows()
	p.Coverage, p.NoCoverage = r.coverage()
	p.Excluded = r.excluded()
	p.Folds, p.NoFolds = r.folds()
	for _, f := range r.Assessment.Worst {
		o := &r.Assessment.Data.Observations[f.Index]
		p.Worst = append(p.Worst, plot.Visible(strings.Replace(f.Text, o.At(), plot.Place(o), 1)))
	}
	for _, f := range r.Figures {
		x, err := newFigure(f)
		if err != nil {
			return err
		}
		p.Figures = append(p.Figures, x)
	}
	return pageTemplate.Execute(w, p)
}

func newFigure(f *plot.Figure) (figure, error) {
	x := figure{Figure: f, Limits: f.Kind == "map" || f.Kind == "flux" || f.Kind == "prediction"}
	for i := range f.Panels {
		s, err := svg.Panel(f, i)
		if err != nil {
			return x, err
		}
		title := ""
		if len(f.Panels) > 1 {
			title = f.Panels[i].Title
		}
		x.Drawings = append(x.Drawings, drawing{title, template.HTML(s)})
		x.Numbers = append(x.Numbers, numbers(f, i))
	}
	for _, s := range f.Legend() {
		x.Legend = append(x.Legend, entry{template.HTML(svg.Swatch(&s)), s.Name})
	}
	return x, nil
}

// verdict is the first sentence of the page, and its reason.
func (r *Report) verdict() (verdict, reason string) {
	a := r.Assessment
	if cv := a.CrossValidation; cv != nil {
		return map[validate.Verdict]string{
			validate.Better: "Tuning is better than the untuned model.",
			validate.NoGain: "Tuning brings no measurable gain over the untuned model.",
			validate.Worse:  "Tuning is worse than the untuned model.",
		}[cv.Verdict], sentence(cv.Reason)
	}
	if a.Refitted {
		return "There is no verdict.", sentence(r.NoCV)
	}
	verdict = "The model was taken as it is; its error on these rows is the verdict."
	reason = fmt.Sprintf("On %d rows that boiled it errs by %s K (root mean square) with a bias of %s K.", a.Boiled, decimal(a.RMSE, 2), decimal(a.Bias, 2))
	if r.Stored != "" {
		reason += " When it was calibrated, its verdict on left-out rows was: " + r.Stored + "."
	}
	return verdict, reason
}
