package table

import (
	"bytes"
	"strconv"
	"strings"
	"unicode"
)

// markdown writes a pipe table with full precision; the pipes line up in the source as well.
func (t *Table) markdown(out *bytes.Buffer) {
	if t.Title != "" {
		out.WriteString("**" + markdownText(t.Title) + "**\n\n")
	}
	if t.Caption != "" {
		out.WriteString(markdownParagraph(t.Caption) + "\n\n")
	}
	var m marks
	grid := [][]string{make([]string, len(t.Columns))}
	widths := make([]int, len(t.Columns))
	for j, c := range t.Columns {
		grid[0][j] = markdownText(c.header())
		widths[j] = max(3, displayWidth(grid[0][j]))
	}
	for _, row := range t.Rows {
		line := make([]string, len(row))
		for j, cell := range row {
			line[j] = cell.markdown() + markdownText(m.of(cell))
			widths[j] = max(widths[j], displayWidth(line[j]))
		}
		grid = append(grid, line)
	}
	for i, line := range grid {
		for j, text := range line {
			fill := strings.Repeat(" ", widths[j]-displayWidth(text))
			if t.Columns[j].right() {
				text = fill + text
			} else {
				text += fill
			}
			out.WriteString("| " + text + " ")
		}
		out.WriteString("|\n")
		if i > 0 {
			continue
		}
		for j, c := range t.Columns {
			if c.right() {
				out.WriteString("| " + strings.Repeat("-", widths[j]-1) + ": ")
			} else {
				out.WriteString("| :" + strings.Repeat("-", widths[j]-1) + " ")
			}
		}
		out.WriteString("|\n")
	}
	for _, text := range m.texts {
		out.WriteString("\n" + markdownText(m.letters[text]) + " " + markdownText(text) + "\n")
	}
	for _, text := range t.Notes {
		out.WriteString("\n" + markdownParagraph(text) + "\n")
	}
}

// right says whether the column is aligned to the right.
func (c Column) right() bool { return c.Kind == KindNumber || c.Kind == KindInteger }

func (c Cell) markdown() string {
	switch c.kind {
	case cellText:
		return isolate(markdownText(c.text))
	case cellNumber:
		return exact(c.num)
	case cellInteger:
		return strconv.FormatInt(c.int, 10)
	case cellBool:
		return yesNo(c.yes)
	}
	return "-"
}

// markdownText escapes what Markdown or HTML would interpret inside a line; line ends become spaces.
func markdownText(s string) string {
	s = strings.NewReplacer("\r\n", " ", "\n", " ", "\r", " ", "\t", " ").Replace(s)
	in := []rune(visible(s, ""))
	word := func(i int) bool {
		return i >= 0 && i < len(in) && (unicode.IsLetter(in[i]) || unicode.IsDigit(in[i]))
	}
	var b strings.Builder
	for i, r := range in {
		switch {
		case r == '&':
			b.WriteString("&amp;")
		case r == '<':
			b.WriteString("&lt;")
		case r == '>':
			b.WriteString("&gt;")
		case r == '_' && word(i-1) && word(i+1):
			b.WriteRune(r) // inside a word an underscore is only an underscore
		case strings.ContainsRune("\\|`*_[]~$", r):
			b.WriteRune('\\')
			b.WriteRune(r)
		default:
			b.WriteRune(r)
		}
	}
	return b.String()
}

// markdownParagraph escapes a text that starts a block: heading, list and rule signs lose their effect.
func markdownParagraph(s string) string {
	s = strings.TrimSpace(markdownText(s))
	if s != "" && strings.ContainsRune("#+-=", rune(s[0])) {
		return `\` + s
	}
	digits := len(s) - len(strings.TrimLeft(s, "0123456789"))
	if digits > 0 && digits < len(s) && (s[digits] == '.' || s[digits] == ')') {
		return s[:digits] + `\` + s[digits:]
	}
	return s
}

func yesNo(b bool) string {
	if b {
		return "yes"
	}
	return "no"
}
