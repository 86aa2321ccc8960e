package main

import (
	"fmt"
	"os/exec"
	"path/filepath"
	"slices"
	"strings"
	"testing"
)

// complete asks a shell for the completions of the last of words; ok is false where the shell is not installed.
func complete(t *testing.T, shell, script string, words []string) (found []string, ok bool) {
	t.Helper()
	program, err := exec.LookPath(shell)
	if err != nil {
		t.Logf("no %s on this machine", shell)
		return nil, false
	}
	var quoted []string
	for _, w := range words {
		quoted = append(quoted, "'"+w+"'")
	}
	list := strings.Join(quoted, " ")
	var args []string
	switch shell {
	case "bash": // which splits at = as well
		args = []string{"--norc", "-c", fmt.Sprintf("source %s\nCOMP_WORDS=(%s)\nCOMP_CWORD=%d\n_limsup\nprintf '%%s\\n' \"${COMPREPLY[@]}\"", script, strings.ReplaceAll(list, "=", "' = '"), len(words)-1+2*strings.Count(list, "="))}
	case "zsh": // the functions of its completion system are replaced by ones that print what they are given
		args = []string{"-f", "-c", fmt.Sprintf("compdef() {}\ncompset() {}\n_files() { print -- FILES }\ncompadd() { shift; print -l -- \"$@\" }\n_describe() { local e; for e in \"${entries[@]}\"; do print -- \"${e%%%%:*}\"; done }\n"+
			"source %s\nwords=(%s)\nCURRENT=%d\n_limsup", script, list, len(words))}
	case "fish":
		args = []string{"--no-config", "-c", fmt.Sprintf("source %s\ncomplete -C %q", script, strings.Join(words, " "))}
	}
	out, err := exec.Command(program, args...).CombinedOutput()
	if err != nil {
		t.Errorf("%s %q: %v\n%s", shell, words, err, out)
	}
	last := words[len(words)-1]
	if _, value, ok := strings.Cut(last, "="); ok && shell != "fish" {
		last = value
	}
	for _, line := range strings.Split(string(out), "\n") {
		line, _, _ = strings.Cut(line, "\t")
		if line != "" && strings.HasPrefix(line, last) { // zsh chooses by the beginning itself
			found = append(found, line)
		}
	}
	slices.Sort(found)
	return found, true
}

func TestCompletion(t *testing.T) {
	dir := t.TempDir()
	for _, shell := range []string{"bash", "zsh", "fish"} {
		script := filepath.Join(dir, shell)
		if _, message, code := invoke(t, "completion", shell, "--out", script); code != 0 {
			t.Fatal(message)
		}
		for _, tt := range []struct {
			words []string
			want  []string
		}{
			{[]string{"pred"}, []string{"predict"}},
			{[]string{"f"}, []string{"fluids", "flux"}},
			{[]string{"--quiet", "com"}, []string{"compare", "completion"}},
			{[]string{"predict", "--equ"}, []string{"--equation"}},
			{[]string{"predict", "--equation", "so"}, []string{"soave"}},
			{[]string{"predict", "--fluid", "n-pen"}, []string{"n-pentane"}},
			{[]string{"--format", "csv", "predict", "--pres"}, []string{"--pressure"}},
			{[]string{"predict", "--fluid", "help", "--method", "x", "--kinetics", "ch"}, []string{"chemical"}},
			{[]string{"predict", "--temperature", "c"}, nil},
			{[]string{"plot", "iso"}, []string{"isotherm"}},
			{[]string{"help", "emb"}, []string{"embryo"}},
			{[]string{"completion", "z"}, []string{"zsh"}},
			{[]string{"calibrate", "--folds", "me"}, []string{"method"}},
		} {
			got, ok := complete(t, shell, script, append([]string{"limsup"}, tt.words...))
			if ok && !slices.Equal(got, tt.want) {
				t.Errorf("%s completes %q with %q, want %q", shell, tt.words, got, tt.want)
			}
		}
		want := []string{"peng-robinson"}
		if shell == "fish" { // which completes the whole word
			want = []string{"--equation=peng-robinson"}
		}
		if got, ok := complete(t, shell, script, []string{"limsup", "predict", "--equation=pe"}); ok && !slices.Equal(got, want) {
			t.Errorf("%s completes --equation=pe with %q, want %q", shell, got, want)
		}
	}
}
