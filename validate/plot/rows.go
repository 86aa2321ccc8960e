package plot

import (
	"fmt"
	"path/filepath"
	"sort"
	"strconv"
	"strings"
	"unicode"

	"limsup/fit"
	"limsup/validate"
)

// unnamedMethod stands for rows that state no method.
const unnamedMethod = "method not stated"

// methods are the methods of the rows in alphabetical order, with their styles.
func methods(obs []fit.Observation) (names []string, style map[string]Style) {
	style = map[string]Style{}
	for i := range obs {
		m := methodOf(&obs[i])
		if _, ok := style[m]; !ok {
			names = append(names, m)
			style[m] = Style{}
		}
	}
	sort.Strings(names)
	for i, m := range names {
		style[m] = groupStyle(i)
	}
	return names, style
}

func methodOf(o *fit.Observation) string {
	if o.Method == "" {
		return unnamedMethod
	}
	return Visible(o.Method)
}

// Place is the short place of a row: "drops.csv:12".
func Place(o *fit.Observation) string {
	if o.Where != "" {
		return Visible(filepath.Base(o.File) + ":" + o.Where)
	}
	return Visible(fmt.Sprintf("%s:%d", filepath.Base(o.File), o.Line))
}

// Visible writes control characters and those that steer the direction of text as
// escapes, so that a name from a file cannot turn the words around it.
func Visible(s string) string {
	var b strings.Builder
	for _, r := range s {
		switch {
		case r == unicode.ReplacementChar:
			b.WriteString(`\ufffd`)
		case unicode.Is(unicode.Bidi_Control, r), unicode.IsControl(r), r == '\u2028', r == '\u2029':
			fmt.Fprintf(&b, `\u%04x`, r)
		default:
			b.WriteRune(r)
		}
	}
	return b.String()
}

// significant prints a number for a sentence.
func significant(v float64, digits int) string {
	return strings.ReplaceAll(strconv.FormatFloat(v, 'g', digits, 64), "-", "−")
}

// fixed prints a number with decimals, for a sentence.
func fixed(v float64, decimals int) string {
	return strings.ReplaceAll(strconv.FormatFloat(v, 'f', decimals, 64), "-", "−")
}

// rowText describes a row behind a point.
func rowText(o *fit.Observation, r *validate.Residual) string {
	var b strings.Builder
	fmt.Fprintf(&b, "%s: %s, %s", Place(o), Visible(o.Record.Key), methodOf(o))
	if o.Batch != "" {
		b.WriteString(", " + Visible(o.Batch))
	}
	word := "measured"
	if o.Outcome != 0 {
		word = "intact at"
	}
	fmt.Fprintf(&b, "\n%s %s K at %s kPa", word, fixed(o.Temperature, 2), significant(o.Pressure/1e3, 6))
	if r != nil {
		fmt.Fprintf(&b, "\npredicted %s K, residual %s K", fixed(r.Predicted, 2), fixed(r.Residual, 2))
		if z, ok := r.Standardised(); ok {
			fmt.Fprintf(&b, ", standardised %s", fixed(z, 2))
		}
	}
	return b.String()
}

// residualAt finds the residual of an observation; nil without an assessment.
func residualAt(a *validate.Assessment, i int) *validate.Residual {
	if a == nil {
		return nil
	}
	return &a.Rows[i]
}

// pointsByMethod are series of the rows that keep allows, one for each method and,
// apart from them, one for its intact rows; coordinates come from at.
func pointsByMethod(obs []fit.Observation, a *validate.Assessment, keep func(i int) bool, at func(i int) (x, y float64)) []Series {
	names, style := methods(obs)
	var out []Series
	for _, intact := range []bool{false, true} {
		for _, m := range names {
			s := Series{Name: m, Shape: Points, Style: style[m]}
			if intact {
				s.Name, s.Style.Open = m+", intact (the limit lies above)", true
			}
			for i := range obs {
				if methodOf(&obs[i]) != m || (obs[i].Outcome != 0) != intact || !keep(i) {
					continue
				}
				x, y := at(i)
				s.X, s.Y = append(s.X, x), append(s.Y, y)
				s.Text = append(s.Text, rowText(&obs[i], residualAt(a, i)))
			}
			if len(s.X) > 0 {
				out = append(out, s)
			}
		}
	}
	return out
}
