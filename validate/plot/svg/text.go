package svg

// advance is a generous estimate of how wide a character is at the size of the
// drawings, in units of the view box: a page does not know its reader's fonts.
// It errs on the wide side, for DejaVu Sans; the test in a browser watches over it.
func advance(r rune) float64 {
	switch {
	case r < 0x20 || r == '\u2009':
		return 3
	case r >= 0x2e80: // ideographs, emoji
		return 1.5 * fontSize
	}
	switch r {
	case 'i', 'j', 'l', '.', ',', ':', ';', '\'', '|', '!', ' ', 'I':
		return 0.4 * fontSize
	case 'f', 't', 'r', '(', ')', '[', ']', '/', '\\', '-', '"':
		return 0.48 * fontSize
	case 'm', 'w', 'M', 'W', '@', '%', '…', '<', '>', '+', '=', '−', 'μ', 'Δ', 'Q', 'O', 'G', '&':
		return fontSize
	}
	if r >= 'A' && r <= 'Z' || r > 0x24f {
		return 0.82 * fontSize
	}
	return 0.65 * fontSize
}

// textWidth estimates the width of a text.
func textWidth(s string) float64 {
	w := 0.0
	for _, r := range s {
		w += advance(r)
	}
	return w
}

// shorten cuts a text so that it fits into a width; what is cut is in the table.
func shorten(s string, width float64) string {
	if textWidth(s) <= width {
		return s
	}
	w := advance('…')
	for i, r := range s {
		if w += advance(r); w > width {
			return s[:i] + "…"
		}
	}
	return s
}
