package table

import (
	"bytes"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"pgregory.net/rapid"
)

func TestVisible(t *testing.T) {
	for _, tt := range []struct{ name, in, want string }{
		{"plain", "n-pentane 100 °C", "n-pentane 100 °C"},
		{"escape", "\x1b[31m", `\x1b[31m`},
		{"null, bell, delete", "\x00\a\x7f", `\x00\x07\x7f`},
		{"line ends", "a\r\nb\tc", `a\r\nb\tc`},
		{"C1 control sequence introducer", "\u009b2J", `\u009b2J`},
		{"right-to-left override", "\u202egpj.exe", `\u202egpj.exe`},
		{"isolates and marks", "\u2066\u2069\u200e\u200f\u061c", `\u2066\u2069\u200e\u200f\u061c`},
		{"zero-width space, byte-order mark, soft hyphen", "\u200b\ufeff\u00ad", `\u200b\ufeff\u00ad`},
		{"line separators", "\u2028\u2029", `\u2028\u2029`},
		{"private use", "\ue000\U000f0000", `\ue000\U000f0000`},
		{"tag characters", "\U000e0041", `\U000e0041`},
		{"broken UTF-8", "a\xff\xc3", `a\xff\xc3`},
		{"replacement character itself", "\ufffd", "\ufffd"},
		{"joiners stay", "می\u200cخواهم 👨‍👩‍👧", "می\u200cخواهم 👨‍👩‍👧"},
		{"no-break and ideographic space", "1\u00a0K\u3000x", "1\u00a0K\u3000x"},
	} {
		if got := visible(tt.in, ""); got != tt.want {
			t.Errorf("%s: %q, want %q", tt.name, got, tt.want)
		}
	}
}

func TestDisplayWidth(t *testing.T) {
	// Widths from UAX 11 (East Asian Width) and, for clusters, the usual practice of terminals.
	for s, want := range map[string]int{
		"": 0, "abc": 3, "水": 2, "ｗ": 2, "é": 1, "e\u0301": 1, "👨‍👩‍👧": 2, "👍🏽": 2, "שלום": 4, "·°µ": 3, "─": 1, "👩‍🔬 x": 4,
	} {
		if got := displayWidth(s); got != want {
			t.Errorf("displayWidth(%q) = %d, want %d", s, got, want)
		}
	}
}

func TestIsolate(t *testing.T) {
	for in, want := range map[string]string{
		"abc": "abc", "שלום": "שלום\u200e", "a שלום b": "a שלום b\u200e", "שלום\u200e[a]": "שלום\u200e[a]", "سلام": "سلام\u200e",
	} {
		if got := isolate(in); got != want {
			t.Errorf("isolate(%q) = %q, want %q", in, got, want)
		}
	}
}

func TestGrounded(t *testing.T) {
	for in, want := range map[string]string{
		"": "", "abc": "abc", "e\u0301": "e\u0301", "\u0301": "◌\u0301", "a \u0301b": "a ◌\u0301b", "\u0e33": "◌\u0e33", "水": "水", "\u200dx": "◌\u200dx",
	} {
		if got := grounded(in); got != want {
			t.Errorf("grounded(%q) = %q, want %q", in, got, want)
		}
	}
}

func TestWrap(t *testing.T) {
	for _, tt := range []struct {
		in    string
		width int
		cut   bool
		want  []string
	}{
		{"", 5, true, []string{""}},
		{"one two three", 7, true, []string{"one two", "three"}},
		{"one two three", 13, true, []string{"one two three"}},
		{"abcdefgh ij", 3, true, []string{"abc", "def", "gh", "ij"}},
		{"abcdefgh ij", 3, false, []string{"abcdefgh", "ij"}},
		{"水水水", 5, true, []string{"水水", "水"}},
		{"水水", 1, true, []string{"水", "水"}},
		{"a\u00a0b c", 3, true, []string{"a\u00a0b", "c"}},
		{"👨‍👩‍👧👨‍👩‍👧", 3, true, []string{"👨‍👩‍👧", "👨‍👩‍👧"}},
	} {
		if diff := cmp.Diff(tt.want, wrap(tt.in, tt.width, tt.cut)); diff != "" {
			t.Errorf("wrap(%q, %d, %t) (-want +got):\n%s", tt.in, tt.width, tt.cut, diff)
		}
	}
}

func TestWrapKeepsEverythingButSpaces(t *testing.T) {
	squeeze := func(s string) string { return strings.Join(strings.FieldsFunc(s, breakable), "") }
	rapid.Check(t, func(r *rapid.T) {
		s := visible(rapid.String().Draw(r, "text"), "")
		width := rapid.IntRange(2, 40).Draw(r, "width")
		lines := wrap(s, width, true)
		if got := squeeze(strings.Join(lines, " ")); got != squeeze(s) {
			r.Fatalf("%q wrapped at %d became %q", s, width, lines)
		}
		for _, line := range lines {
			if n := displayWidth(line); n > width {
				r.Fatalf("%q takes %d of %d", line, n, width)
			}
		}
	})
}

func TestShorten(t *testing.T) {
	for _, tt := range []struct {
		in    string
		width int
		want  string
	}{{"pentane", 7, "pentane"}, {"pentane", 4, "pen…"}, {"水水水", 4, "水…"}, {"pentane", 0, "…"}} {
		if got := shorten(tt.in, tt.width); got != tt.want {
			t.Errorf("shorten(%q, %d) = %q, want %q", tt.in, tt.width, got, tt.want)
		}
	}
}

func TestMarkdownText(t *testing.T) {
	for in, want := range map[string]string{
		"a|b":             `a\|b`,
		"<i>x</i> & y":    "&lt;i&gt;x&lt;/i&gt; &amp; y",
		"one\ntwo\r\nx":   "one two x",
		"J* and _em_":     `J\* and \_em\_`,
		"u_temperature":   "u_temperature",
		`back\slash|pipe`: `back\\slash\|pipe`,
		"\x1b[0m":         `\\x1b\[0m`,
	} {
		if got := markdownText(in); got != want {
			t.Errorf("markdownText(%q) = %q, want %q", in, got, want)
		}
	}
	for in, want := range map[string]string{
		"# x": `\# x`, "- x": `\- x`, "1. x": `1\. x`, "12) x": `12\) x`, "1.5 K": `1\.5 K`, "text": "text", "": "", "2026": "2026",
	} {
		if got := markdownParagraph(in); got != want {
			t.Errorf("markdownParagraph(%q) = %q, want %q", in, got, want)
		}
	}
}

func TestParagraph(t *testing.T) {
	for _, tt := range []struct {
		text  string
		width int
		want  string
	}{
		{"no measurable gain: the tuned model is not better", 25, "no measurable gain: the\ntuned model is not better\n"},
		{"first\nsecond", 80, "first\nsecond\n"},
		{"a-very-long-file-name-without-spaces.csv is kept", 20, "a-very-long-file-name-without-spaces.csv\nis kept\n"},
		{"as long as it gets, no limit at all", 0, "as long as it gets, no limit at all\n"},
		{"\x1b[1mbold", 80, "\\x1b[1mbold\n"},
		{"", 80, "\n"},
	} {
		var out bytes.Buffer
		if err := Paragraph(&out, tt.text, tt.width); err != nil || out.String() != tt.want {
			t.Errorf("Paragraph(%q, %d) = %q, %v; want %q", tt.text, tt.width, out.String(), err, tt.want)
		}
	}
}

func TestFacts(t *testing.T) {
	facts := Facts{
		{"critical temperature", "469.7", "K"},
		{"水", "H2O", ""},
		{"flux", "1e12", "m-3.s-1"},
		{"factor", "1.02", "1"},
		{"remark", "a value that is too long for a single line", ""},
		{"", "no label \x1b", ""},
	}
	for width, want := range map[int]string{
		0: "critical temperature  469.7 K\n水                    H2O\nflux                  1e12 m⁻³·s⁻¹\nfactor                1.02\n" +
			"remark                a value that is too long for a single line\n                      no label \\x1b\n",
		44: "critical temperature  469.7 K\n水                    H2O\nflux                  1e12 m⁻³·s⁻¹\nfactor                1.02\n" +
			"remark                a value that is too\n                      long for a single line\n                      no label \\x1b\n",
		24: "critical      469.7 K\ntemperature\n水            H2O\nflux          1e12 m⁻³·s⁻¹\nfactor        1.02\n" +
			"remark        a value\n              that is\n              too long\n              for a\n              single\n              line\n              no label\n              \\x1b\n",
	} {
		var out bytes.Buffer
		if err := facts.Render(&out, width); err != nil {
			t.Fatal(err)
		}
		if diff := cmp.Diff(want, out.String()); diff != "" {
			t.Errorf("width %d (-want +got):\n%s", width, diff)
		}
	}
}
