package table

import (
	"fmt"
	"strings"
	"unicode"
	"unicode/utf8"

	"github.com/clipperhouse/uax29/v2/graphemes"
	"github.com/mattn/go-runewidth"
	"golang.org/x/text/unicode/bidi"
)

const (
	ellipsis        = "…"
	leftToRightMark = "\u200e"
	dottedCircle    = "\u25cc"
)

// clusters counts display columns per grapheme cluster, independent of locale and environment.
var clusters = &runewidth.Condition{StrictEmojiNeutral: true}

// displayWidth is the number of terminal columns s takes.
func displayWidth(s string) int { return clusters.StringWidth(s) }

// visible replaces everything that has no glyph of its own, or that steers a terminal or the direction of text, by an
// escape that shows it; runes in keep pass.
func visible(s, keep string) string {
	var b strings.Builder
	for i := 0; i < len(s); {
		r, n := utf8.DecodeRuneInString(s[i:])
		switch {
		case r == utf8.RuneError && n == 1:
			fmt.Fprintf(&b, `\x%02x`, s[i])
		case unicode.IsPrint(r), unicode.Is(unicode.Zs, r), joiner(r), strings.ContainsRune(keep, r):
			b.WriteRune(r)
		case r == '\t':
			b.WriteString(`\t`)
		case r == '\n':
			b.WriteString(`\n`)
		case r == '\r':
			b.WriteString(`\r`)
		case r < 0x80:
			fmt.Fprintf(&b, `\x%02x`, r)
		case r <= 0xffff:
			fmt.Fprintf(&b, `\u%04x`, r)
		default:
			fmt.Fprintf(&b, `\U%08x`, r)
		}
		i += n
	}
	return b.String()
}

// joiner says whether r is U+200C or U+200D, which pass: Persian, Indic scripts and emoji are misspelt without them.
func joiner(r rune) bool { return r == '\u200c' || r == '\u200d' }

// isolate closes a line of text that contains right-to-left letters with a left-to-right mark (no width), lest a
// terminal that reorders text moves the numbers of the next columns as well.
func isolate(s string) string {
	open := false // a right-to-left letter without a mark after it
	for _, r := range s {
		if p, _ := bidi.LookupRune(r); p.Class() == bidi.R || p.Class() == bidi.AL {
			open = true
		} else if string(r) == leftToRightMark {
			open = false
		}
	}
	if open {
		return s + leftToRightMark
	}
	return s
}

// grounded puts a dotted circle under marks that would otherwise combine with the blank before a cell or a word,
// where they would take no column of their own.
func grounded(s string) string {
	if isASCII(s) {
		return s
	}
	var b strings.Builder
	for g := graphemes.FromString(" " + s); g.Next(); {
		r, n := utf8.DecodeRuneInString(g.Value())
		b.WriteRune(r)
		if breakable(r) && n < len(g.Value()) {
			b.WriteString(dottedCircle)
		}
		b.WriteString(g.Value()[n:])
	}
	return b.String()[1:]
}

func isASCII(s string) bool {
	for i := range len(s) {
		if s[i] >= 0x80 {
			return false
		}
	}
	return true
}

// breakable says whether a line may end at r.
func breakable(r rune) bool {
	return unicode.IsSpace(r) && r != '\u00a0' && r != '\u2007' && r != '\u202f'
}

// wrap breaks s into lines of at most width columns, between words where it can. Longer words are cut between
// grapheme clusters if cut is set and stand on a line of their own otherwise. The result has at least one line.
func wrap(s string, width int, cut bool) []string {
	if displayWidth(s) <= width {
		return []string{s}
	}
	var lines []string
	line, used := "", 0
	for _, word := range strings.FieldsFunc(s, breakable) {
		n := displayWidth(word)
		if used > 0 && used+1+n <= width {
			line, used = line+" "+word, used+1+n
			continue
		}
		if used > 0 {
			lines = append(lines, line)
		}
		line, used = word, n
		for cut && used > width {
			head := prefix(line, width)
			if len(head) == len(line) {
				break // a single cluster wider than the column
			}
			lines = append(lines, head)
			line = line[len(head):]
			used = displayWidth(line)
		}
	}
	return append(lines, line)
}

// prefix returns the longest run of whole grapheme clusters that fits width, but at least one cluster.
func prefix(s string, width int) string {
	end, used := 0, 0
	for g := graphemes.FromString(s); g.Next(); {
		used += displayWidth(g.Value())
		if used > width && end > 0 {
			break
		}
		end = g.End()
	}
	return s[:end]
}

// shorten cuts s to width columns and ends it with an ellipsis; what is already short enough stays.
func shorten(s string, width int) string {
	if displayWidth(s) <= width {
		return s
	}
	return clusters.Truncate(s, max(width, 1), ellipsis)
}

// longestWord is the width below which wrap without cutting cannot go.
func longestWord(s string) int {
	longest := 0
	for _, word := range strings.FieldsFunc(s, breakable) {
		longest = max(longest, displayWidth(word))
	}
	return longest
}

// markBrokenUTF8 replaces each byte that is not part of valid UTF-8 by a visible `\xff`.
func markBrokenUTF8(s string) string {
	if utf8.ValidString(s) {
		return s
	}
	var b strings.Builder
	for i := 0; i < len(s); {
		r, n := utf8.DecodeRuneInString(s[i:])
		if r == utf8.RuneError && n == 1 {
			fmt.Fprintf(&b, `\x%02x`, s[i])
		} else {
			b.WriteRune(r)
		}
		i += n
	}
	return b.String()
}
