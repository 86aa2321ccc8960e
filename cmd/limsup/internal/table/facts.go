package table

import (
	"bytes"
	"io"
	"strings"
)

// Fact is one line of a key–value block. Value is text already (see [Number]); Unit is a UCUM code.
type Fact struct {
	Label, Value, Unit string
}

// Facts is a small key–value block.
type Facts []Fact

// Render writes the labels in one column and the values, with their units, in a second one, wrapped at width
// (0 or less: no limit). Errors: the writer's.
func (f Facts) Render(w io.Writer, width int) error {
	labels := make([]string, len(f))
	widest := 0
	for i, fact := range f {
		labels[i] = grounded(visible(fact.Label, ""))
		widest = max(widest, displayWidth(labels[i]))
	}
	if width > 0 {
		widest = min(widest, max(width/2, leastWidth/2))
	}
	var out bytes.Buffer
	for i, fact := range f {
		value := visible(fact.Value, "")
		if fact.Unit != "" && fact.Unit != "1" {
			value += "\u00a0" + readableUnit(visible(fact.Unit, "")) // a number is not parted from its unit
		}
		label, lines := []string{labels[i]}, []string{value}
		if width > 0 {
			label = wrap(labels[i], widest, true)
			lines = wrap(value, max(width-widest-gap, leastWidth/2), false)
		}
		for n := range max(len(label), len(lines)) {
			left, right := "", ""
			if n < len(label) {
				left = label[n]
			}
			if n < len(lines) {
				right = strings.ReplaceAll(lines[n], "\u00a0", " ")
			}
			fill := strings.Repeat(" ", widest-displayWidth(left)+gap)
			out.WriteString(strings.TrimRight(isolate(left)+fill+isolate(right), " ") + "\n")
		}
	}
	_, err := w.Write(out.Bytes())
	return err
}

// Paragraph writes text wrapped between words at width (0 or less: no limit; widths below 20 count as 20). Line ends
// in text are kept; words wider than the line stay whole, so that addresses and file names can be copied. Other
// control characters are made visible. Errors: the writer's.
func Paragraph(w io.Writer, text string, width int) error {
	var out bytes.Buffer
	for line := range strings.SplitSeq(text, "\n") {
		if err := paragraph(&out, "", line, width); err != nil {
			return err
		}
	}
	_, err := w.Write(out.Bytes())
	return err
}

// paragraph wraps one line of text after a mark; further lines are indented by as much as the mark is wide.
func paragraph(w io.Writer, mark, text string, width int) error {
	lines := []string{visible(text, "")}
	if width > 0 {
		lines = wrap(lines[0], max(width, leastWidth)-len(mark), false)
	}
	var b strings.Builder
	for n, line := range lines {
		if n == 0 {
			b.WriteString(mark)
		} else {
			b.WriteString(strings.Repeat(" ", len(mark)))
		}
		b.WriteString(strings.TrimRight(line, " ") + "\n")
	}
	_, err := io.WriteString(w, b.String())
	return err
}
