package export

import (
	"embed"
	"fmt"
	"io"
	"slices"
	"strings"
	"text/template"

	"limsup/fit"
	"limsup/fit/export/internal/kernel"
	"limsup/fit/export/internal/translate"
)

// argument is an argument or a result of an exported function.
type argument struct {
	Name string // as in package kernel
	Unit string // UCUM
	Doc  string
}

// entry is a function that exported code offers.
type entry struct {
	Kernel string // the function of package kernel
	Doc    string
	Args   []argument
	Out    []argument
	// Kinetic entries exist for a kinetic limit only, Limit entries have the stated range.
	Kinetic, Limit bool
}

// entries are the functions that exported code offers, in their order.
func entries() []entry {
	p := argument{"pressure", "Pa", "absolute pressure; negative for a liquid under tension"}
	t := argument{"temperature", "K", "temperature"}
	u := argument{"uncertainty", "K", "standard uncertainty of a new measurement of the limit"}
	return []entry{
		{Kernel: "limitTemperature", Limit: true, Args: []argument{p}, Out: []argument{t, u},
			Doc: "Limit of superheat at a pressure inside the stated range, with its standard uncertainty."},
		{Kernel: "limitAnywhere", Limit: true, Args: []argument{p}, Out: []argument{t, u},
			Doc: "The same at any pressure: outside the stated range it is an extrapolation, and its uncertainty is too small."},
		{Kernel: "spinodalTemperature", Args: []argument{p}, Out: []argument{t},
			Doc: "Spinodal of the liquid: the highest temperature at which it can exist at a pressure by the equation of state."},
		{Kernel: "saturationTemperature", Args: []argument{p}, Out: []argument{t}, Doc: "Boiling temperature at a pressure."},
		{Kernel: "saturationPressure", Args: []argument{t}, Out: []argument{p}, Doc: "Vapour pressure at a temperature."},
		{Kernel: "surfaceTension", Kinetic: true, Args: []argument{t}, Out: []argument{{"tension", "N/m", "surface tension of a flat surface, with the factor of the model"}}, Doc: "Surface tension at a temperature."},
		{Kernel: "log10Flux", Kinetic: true, Args: []argument{t, p}, Out: []argument{{"logarithm", "1", "log10 of the flux in m-3.s-1"}}, Doc: "Logarithm of the nucleation flux in a superheated liquid."},
		{Kernel: "pressureAt", Args: []argument{t, {"volume", "m3/mol", "molar volume, more than the covolume"}}, Out: []argument{p}, Doc: "Pressure by the equation of state, below its critical temperature."},
	}
}

// sourceFluid is a fluid in exported code.
type sourceFluid struct {
	Key   string
	Index int // from 0
	Row   []float64
	Tests []expected
}

// sourceData is what the templates of all languages are filled with.
type sourceData struct {
	Prefix   string
	Package  string // the prefix as the name of a Modelica package
	Header   []string
	Fluids   []sourceFluid
	Width    int // columns of the longest row
	Entries  []entry
	Body     string // the functions of package kernel
	Statuses []string
}

//go:embed templates/*.tmpl
var templates embed.FS

// source writes source code.
func (s *subject) source(w io.Writer, form Form) error {
	d, err := s.sourceData()
	if err != nil {
		return err
	}
	var roots []string
	for _, e := range d.Entries {
		roots = append(roots, e.Kernel)
	}
	program, err := translate.Load(kernel.Sources, known(d.Fluids), roots)
	if err != nil {
		return err
	}
	if d.Body, err = program.Functions(translate.Language(form), d.Prefix); err != nil {
		return err
	}
	name := string(form) + ".tmpl"
	t, err := template.New(name).Funcs(functions()).ParseFS(templates, "templates/"+name)
	if err != nil {
		return err
	}
	return t.Execute(w, d)
}

// known are the choosing columns that are the same in all rows.
func known(fluids []sourceFluid) map[int]float64 {
	out := map[int]float64{}
	for _, k := range kernel.Options() {
		v := fluids[0].Row[k]
		if !slices.ContainsFunc(fluids, func(f sourceFluid) bool { return f.Row[k] != v }) {
			out[k] = v
		}
	}
	return out
}

// testStates is the number of stored states per fluid.
const testStates = 6

func (s *subject) sourceData() (*sourceData, error) {
	d := &sourceData{Prefix: s.o.Prefix, Package: packageName(s.o.Prefix), Statuses: statuses()}
	for _, e := range entries() {
		if !e.Kinetic || s.model.Variant.Limit == fit.Kinetic {
			d.Entries = append(d.Entries, e)
		}
	}
	for i, r := range s.o.Records {
		row, err := s.row(r)
		if err != nil {
			return nil, &FluidError{r.Key, err}
		}
		f := sourceFluid{Key: r.Key, Index: i, Row: row}
		for k := range testStates {
			P := s.low + (s.high-s.low)*float64(k)/(testStates-1)
			x := s.at(r, P)
			if x.HasU {
				row[kernel.KHasU] = 1
			}
			f.Tests = append(f.Tests, x)
			if s.low == s.high {
				break
			}
		}
		d.Fluids = append(d.Fluids, f)
		d.Width = max(d.Width, len(row))
	}
	d.Header = s.header()
	return d, nil
}

// statuses are the meanings of the numbers 0 to 5.
func statuses() []string {
	return []string{
		kernel.Fine:         "fine",
		kernel.OutOfRange:   "the pressure is outside the stated range",
		kernel.NoLimit:      "no kinetic limit: the flux stays below the threshold up to the spinodal",
		kernel.NoState:      "outside the domain of the equation of state or of a correlation",
		kernel.NotConverged: "the search did not end",
		kernel.NoFluid:      "no such fluid",
	}
}

// packageName is a prefix as a name of a Modelica package: "My_lab_" for "my_lab_".
func packageName(prefix string) string {
	return strings.ToUpper(prefix[:1]) + strings.TrimRight(prefix[1:], "_")
}

// header is the text at the top of exported code, one paragraph per element.
func (s *subject) header() []string {
	out := []string{
		"Superheat limits: " + s.title() + ".",
		"Written by limsup" + after(" ", s.o.Version) + ". Change the model and export again rather than edit this file. Temperatures are in K, pressures in Pa and absolute.",
		"Fluids: " + strings.Join(keys(s.o.Records), ", ") + ".",
		s.rangeText(),
	}
	out = append(out, s.provenance()...)
	out = append(out, s.parameterTexts()...)
	var legend []string
	for _, c := range kernel.Columns() {
		legend = append(legend, fmt.Sprintf("%d %s%s", c.Index, c.Name, after(" in ", unit(c.Unit))))
	}
	out = append(out, "Columns of the constants of a fluid, counted from 0: "+strings.Join(legend, "; ")+". The coefficients of correlations follow.")
	return append(out, s.o.Cautions...)
}

// functions of the templates.
func functions() template.FuncMap {
	return template.FuncMap{
		"snake":   translate.Snake,
		"decimal": translate.Decimal,
		"quote":   func(s string) string { return fmt.Sprintf("%q", s) },
		"single":  func(s string) string { return strings.ReplaceAll(s, "'", "''") }, // inside apostrophes
		"inc":     func(i int) int { return i + 1 },
		"list":    func(s ...string) []string { return s },
		"wrap": func(lead string, width int, paragraphs []string) string {
			var b strings.Builder
			for i, p := range paragraphs {
				if i > 0 {
					b.WriteString(strings.TrimRight(lead, " ") + "\n")
				}
				for _, l := range translate.Wrap(p, width-len(lead)) {
					b.WriteString(lead + l + "\n")
				}
			}
			return strings.TrimRight(b.String(), "\n")
		},
		"rows":   rows,
		"chunks": chunks,
		"pad":    pad,
		"uncertainty": func(x expected) float64 {
			if x.HasU {
				return x.U
			}
			return -1
		},
	}
}

// rows prints numbers, three a line, which Fortran's 132 columns hold.
func rows(lead, suffix, tail string, c []float64) string {
	var b strings.Builder
	for i, v := range c {
		switch {
		case i%3 == 0 && i > 0:
			b.WriteString("," + tail + "\n" + lead)
		case i%3 == 0:
			b.WriteString(lead)
		default:
			b.WriteString(", ")
		}
		b.WriteString(translate.Decimal(v) + suffix)
	}
	return b.String()
}

// chunk is a part of a row, with the numbers of its columns counted from 1.
type chunk struct {
	First, Last int
	Values      []float64
}

// chunks splits a row into parts that a Fortran statement can hold.
func chunks(c []float64) []chunk {
	var out []chunk
	for i := 0; i < len(c); i += 200 {
		last := min(i+200, len(c))
		out = append(out, chunk{i + 1, last, c[i:last]})
	}
	return out
}

// pad fills a row with zeros.
func pad(c []float64, width int) []float64 {
	return append(slices.Clone(c), make([]float64, width-len(c))...)
}
