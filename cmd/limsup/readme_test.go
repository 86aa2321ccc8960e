package main

import (
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
)

// TestReadme runs every command of README.md, in the order of the page, and
// compares what it prints with what the page shows. With -update it rewrites the
// page.
func TestReadme(t *testing.T) {
	root, err := filepath.Abs("../..")
	if err != nil {
		t.Fatal(err)
	}
	page, err := os.ReadFile(filepath.Join(root, "README.md"))
	if err != nil {
		t.Fatal(err)
	}
	dir := t.TempDir() // the commands write files
	if err := os.Symlink(filepath.Join(root, "data"), filepath.Join(dir, "data")); err != nil {
		t.Fatal(err)
	}
	t.Chdir(dir)
	t.Setenv("COLUMNS", "80")
	block := regexp.MustCompile("(?s)```console\n\\$ ([^\n]*)\n(.*?)```")
	commands := 0
	got := block.ReplaceAllStringFunc(string(page), func(s string) string {
		m := block.FindStringSubmatch(s)
		commands++
		args := words(t, m[1])
		if args[0] != "limsup" {
			t.Errorf("%q is not a command of limsup", m[1])
			return s
		}
		out, message, _ := invoke(t, args[1:]...)
		text := out
		if message != "" {
			text += "limsup: " + message + "\n"
		}
		if text != m[2] && !*update {
			t.Errorf("README.md shows something else than `%s` prints: %s", m[1], firstDifference(text, m[2]))
		}
		return "```console\n$ " + m[1] + "\n" + text + "```"
	})
	if commands < 8 {
		t.Errorf("%d commands found in README.md", commands)
	}
	if *update {
		if err := os.WriteFile(filepath.Join(root, "README.md"), []byte(got), 0o644); err != nil {
			t.Fatal(err)
		}
	}
}

// words splits a command line as a shell would: at spaces, double quotes keep
// them.
func words(t *testing.T, line string) []string {
	t.Helper()
	var out []string
	for i, part := range strings.Split(line, `"`) {
		if i%2 == 1 {
			out = append(out, part)
			continue
		}
		out = append(out, strings.Fields(part)...)
	}
	return out
}
