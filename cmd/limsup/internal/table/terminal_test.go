package table

import (
	"bytes"
	"errors"
	"os"
	"path/filepath"
	"testing"
)

func TestWidth(t *testing.T) {
	for _, tt := range []struct {
		name, columns string
		size          int
		err           error
		want          int
	}{
		{"terminal", "", 132, nil, 132},
		{"COLUMNS wins", "72", 132, nil, 72},
		{"COLUMNS without sense", "wide", 132, nil, 132},
		{"COLUMNS not positive", "0", 132, nil, 132},
		{"no terminal", "", 0, nil, pipeWidth},
		{"terminal of unknown size", "", 80, errors.New("no size"), pipeWidth},
	} {
		if got := width(tt.columns, func() (int, error) { return tt.size, tt.err }); got != tt.want {
			t.Errorf("%s: width %d, want %d", tt.name, got, tt.want)
		}
	}
}

func TestNotATerminal(t *testing.T) {
	file, err := os.Create(filepath.Join(t.TempDir(), "out"))
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	t.Setenv("COLUMNS", "")
	if IsTerminal(file) || IsTerminal(&bytes.Buffer{}) || IsTerminal((*os.File)(nil)) {
		t.Error("a file, a buffer or nothing taken for a terminal")
	}
	if ColourAllowed(file) {
		t.Error("colour allowed in a file")
	}
	if got := Width(file); got != 100 {
		t.Errorf("Width(file) = %d, want 100", got)
	}
	t.Setenv("COLUMNS", "61")
	if got := Width(&bytes.Buffer{}); got != 61 {
		t.Errorf("Width with COLUMNS=61 is %d", got)
	}
}

func TestColourAllowed(t *testing.T) {
	for _, tt := range []struct {
		terminal      bool
		noColor, kind string
		want          bool
	}{
		{true, "", "xterm-256color", true},
		{true, "", "", true},
		{true, "1", "xterm", false},
		{true, "0", "xterm", false}, // any value that is not empty
		{true, "", "dumb", false},
		{false, "", "xterm", false},
	} {
		if got := colourAllowed(tt.terminal, tt.noColor, tt.kind); got != tt.want {
			t.Errorf("%+v: %t", tt, got)
		}
	}
}
