package table

// marks gives each different note text its letter, in the order in which the notes are met.
type marks struct {
	letters map[string]string
	texts   []string
}

// of returns the marks of a cell: "", "[a]" or "[a][c]".
func (m *marks) of(c Cell) string {
	out := ""
	for _, text := range c.notes {
		letter, ok := m.letters[text]
		if !ok {
			if m.letters == nil {
				m.letters = map[string]string{}
			}
			letter = "[" + letters(len(m.texts)) + "]"
			m.letters[text] = letter
			m.texts = append(m.texts, text)
		}
		out += letter
	}
	return out
}

// letters counts a, b, …, z, aa, ab, …
func letters(n int) string {
	out := ""
	for n++; n > 0; n = (n - 1) / 26 {
		out = string(rune('a'+(n-1)%26)) + out
	}
	return out
}
