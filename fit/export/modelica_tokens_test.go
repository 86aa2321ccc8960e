package export

import (
	"fmt"
	"strings"
	"unicode"
)

// This file splits Modelica into words and signs.

type moToken struct {
	kind byte // i identifier or keyword, n number, s string, o operator, 0 end
	text string
	line int
}

func moTokens(src string) []moToken {
	var out []moToken
	line := 1
	for i := 0; i < len(src); {
		start := i
		c := rune(src[i])
		switch {
		case c == '\n':
			line++
			i++
			continue
		case unicode.IsSpace(c):
			i++
			continue
		case strings.HasPrefix(src[i:], "//"):
			for i < len(src) && src[i] != '\n' {
				i++
			}
			continue
		case unicode.IsLetter(c) || c == '_':
			for i < len(src) && (unicode.IsLetter(rune(src[i])) || unicode.IsDigit(rune(src[i])) || src[i] == '_') {
				i++
			}
			out = append(out, moToken{'i', src[start:i], line})
		case unicode.IsDigit(c):
			// UNSIGNED-NUMBER: digits [. digits] [e [+-] digits]
			for i < len(src) && unicode.IsDigit(rune(src[i])) {
				i++
			}
			if i < len(src) && src[i] == '.' {
				for i++; i < len(src) && unicode.IsDigit(rune(src[i])); i++ {
				}
			}
			if i < len(src) && src[i] == 'e' {
				if i++; src[i] == '+' || src[i] == '-' {
					i++
				}
				for i < len(src) && unicode.IsDigit(rune(src[i])) {
					i++
				}
			}
			out = append(out, moToken{'n', src[start:i], line})
		case c == '"':
			for i++; src[i] != '"'; i++ {
				if src[i] == '\\' {
					i++
				}
			}
			i++
			out = append(out, moToken{'s', src[start:i], line})
		default:
			n := 1
			for _, op := range []string{":=", "==", "<>", "<=", ">="} {
				if strings.HasPrefix(src[i:], op) {
					n = 2
				}
			}
			if n == 1 && !strings.ContainsRune("()[]{},;:.+-*/^<>=", c) {
				panic(moError{fmt.Sprintf("line %d: character %q", line, c)})
			}
			i += n
			out = append(out, moToken{'o', src[start:i], line})
		}
	}
	return append(out, moToken{0, "end of file", line})
}
