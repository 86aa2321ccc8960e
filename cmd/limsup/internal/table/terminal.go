package table

import (
	"io"
	"os"
	"strconv"

	"golang.org/x/term"
)

const pipeWidth = 100 // width assumed where there is no terminal

// Width returns the display columns to lay out for: the environment variable COLUMNS if it is a positive integer,
// else the width of the terminal w writes to, else 100.
func Width(w io.Writer) int {
	return width(os.Getenv("COLUMNS"), func() (int, error) {
		if !IsTerminal(w) {
			return 0, nil
		}
		columns, _, err := term.GetSize(int(w.(*os.File).Fd()))
		return columns, err
	})
}

func width(columns string, size func() (int, error)) int {
	if n, err := strconv.Atoi(columns); err == nil && n > 0 {
		return n
	}
	if n, err := size(); err == nil && n > 0 {
		return n
	}
	return pipeWidth
}

// IsTerminal says whether w is a file connected to a terminal.
func IsTerminal(w io.Writer) bool {
	f, ok := w.(*os.File)
	return ok && f != nil && term.IsTerminal(int(f.Fd()))
}

// ColourAllowed says whether w may receive colour: it is a terminal, NO_COLOR is unset or empty, TERM is not "dumb".
func ColourAllowed(w io.Writer) bool {
	return colourAllowed(IsTerminal(w), os.Getenv("NO_COLOR"), os.Getenv("TERM"))
}

func colourAllowed(terminal bool, noColor, kind string) bool {
	return terminal && noColor == "" && kind != "dumb"
}
