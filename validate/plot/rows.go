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
	method := methodNames()
	for i := range obs {
		m := method(&obs[i])
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

// methodNames is methodOf for many rows, which works out each name once.
func methodNames() func(o *fit.Observation) string {
	known := map[string]string{}
	return func(o *fit.Observation) string {
		m, ok := known[o.Method]
		if !ok {
			m = methodOf(o)
			known[o.Method] = m
		}
		return m
	}
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
