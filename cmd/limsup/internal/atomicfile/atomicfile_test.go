package atomicfile

import (
	"errors"
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

func text(s string) func(io.Writer) error {
	return func(w io.Writer) error { _, err := io.WriteString(w, s); return err }
}

// names lists the files of a folder.
func names(t *testing.T, dir string) string {
	t.Helper()
	entries, err := os.ReadDir(dir)
	if err != nil {
		t.Fatal(err)
	}
	var out []string
	for _, e := range entries {
		out = append(out, e.Name())
	}
	return strings.Join(out, " ")
}

func content(t *testing.T, name string) string {
	t.Helper()
	b, err := os.ReadFile(name)
	if err != nil {
		t.Fatal(err)
	}
	return string(b)
}

func TestWriteReplaces(t *testing.T) {
	dir := t.TempDir()
	file := filepath.Join(dir, "model.json")
	for _, s := range []string{"first", "second, longer"} {
		if err := Write(file, text(s)); err != nil {
			t.Fatal(err)
		}
		if got := content(t, file); got != s {
			t.Errorf("%q, want %q", got, s)
		}
	}
	if got := names(t, dir); got != "model.json" {
		t.Errorf("left in the folder: %s", got)
	}
}

// TestFailureKeepsOldFile: an error half way leaves the old bytes and no other file.
func TestFailureKeepsOldFile(t *testing.T) {
	dir := t.TempDir()
	file := filepath.Join(dir, "model.json")
	if err := Write(file, text("old")); err != nil {
		t.Fatal(err)
	}
	broken := errors.New("half way")
	err := Write(file, func(w io.Writer) error {
		if _, err := io.WriteString(w, "new but"); err != nil {
			return err
		}
		return broken
	})
	if err != broken {
		t.Errorf("error %v, want the one of the caller", err)
	}
	if got := content(t, file); got != "old" {
		t.Errorf("%q, want the old bytes", got)
	}
	if got := names(t, dir); got != "model.json" {
		t.Errorf("left in the folder: %s", got)
	}
}

func TestModeAndLink(t *testing.T) {
	dir := t.TempDir()
	file, link := filepath.Join(dir, "real.json"), filepath.Join(dir, "link.json")
	if err := os.WriteFile(file, []byte("old"), 0o600); err != nil {
		t.Fatal(err)
	}
	if err := os.Symlink("real.json", link); err != nil {
		t.Fatal(err)
	}
	if err := Write(link, text("new")); err != nil {
		t.Fatal(err)
	}
	info, err := os.Stat(file)
	if err != nil || info.Mode().Perm() != 0o600 || content(t, file) != "new" {
		t.Errorf("mode %v, %q, %v", info.Mode(), content(t, file), err)
	}
	if l, err := os.Lstat(link); err != nil || l.Mode()&os.ModeSymlink == 0 {
		t.Error("the link was replaced")
	}
}

func TestRefused(t *testing.T) {
	dir := t.TempDir()
	for _, name := range []string{dir, filepath.Join(dir, "absent", "model.json")} {
		err := Write(name, text("x"))
		var w *WriteError
		if !errors.As(err, &w) || w.Name != name {
			t.Errorf("%s: %v", name, err)
		}
	}
}
