package main

import (
	"bytes"
	"context"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
)

// badCase is a file of testdata/bad: a command line, the files it reads, and after
// the last mark what the program answers, all of it, to the letter:
//
//	limsup check --data drops.csv
//	-- drops.csv --
//	(the bytes of the file)
//	-- status 2 --
//	(standard output, then messages)
type badCase struct {
	command string
	files   [][2]string // name and text
	status  string
	answer  string
}

func parseBadCase(text string) (c badCase, head string, err error) {
	command, rest, _ := strings.Cut(text, "\n")
	c.command = command
	head = command + "\n"
	name := ""
	var body strings.Builder
	flush := func() {
		if name != "" {
			c.files = append(c.files, [2]string{name, body.String()})
		}
		body.Reset()
	}
	for line := range strings.Lines(rest) {
		mark, ok := strings.CutPrefix(line, "-- ")
		if mark, ok2 := strings.CutSuffix(strings.TrimRight(mark, "\n"), " --"); ok && ok2 && c.status == "" {
			flush()
			if s, found := strings.CutPrefix(mark, "status "); found {
				c.status, name = s, ""
				continue
			}
			name = mark
		} else {
			body.WriteString(line)
		}
		if c.status == "" {
			head += line
		}
	}
	if c.status == "" {
		flush()
		return c, head, fmt.Errorf("no line \"-- status N --\"")
	}
	c.answer = body.String()
	return c, head, nil
}

// voices are words with which an answer voices a doubt.
var voices = []string{"arning", "xcluded", "not used", "critical pressure", "quantum", "held at its floor", "do not act", "outside the vapour pressure correlation"}

// fewestBadCases keeps the collection from shrinking unseen.
const fewestBadCases = 200

// TestBadInputs gives the program every input of testdata/bad: files, models and
// command lines that are wrong, or that can be read and look wrong. The answer is
// held word by word.
func TestBadInputs(t *testing.T) {
	t.Setenv("COLUMNS", "100")
	names, err := filepath.Glob("testdata/bad/*.txt")
	if err != nil {
		t.Fatal(err)
	}
	if len(names) < fewestBadCases {
		t.Errorf("%d inputs, want at least %d", len(names), fewestBadCases)
	}
	home, err := os.Getwd()
	if err != nil {
		t.Fatal(err)
	}
	kinds := map[string]int{}
	for _, file := range names {
		base := strings.TrimSuffix(filepath.Base(file), ".txt")
		t.Run(base, func(t *testing.T) {
			text, err := os.ReadFile(filepath.Join(home, file))
			if err != nil {
				t.Fatal(err)
			}
			c, head, err := parseBadCase(string(text))
			if err != nil && !*update {
				t.Fatal(err)
			}
			t.Chdir(t.TempDir())
			for _, f := range c.files {
				if err := os.WriteFile(f[0], []byte(f[1]), 0o644); err != nil {
					t.Fatal(err)
				}
			}
			args := words(t, c.command)
			var out, messages bytes.Buffer
			err = run(context.Background(), &out, &messages, args)
			if err != nil { // as main does
				fmt.Fprintln(&messages, "limsup: "+describe(err))
			}
			answer, code := out.String()+messages.String(), status(err)
			status := fmt.Sprint(code)
			kinds[base[:strings.Index(base, "-")]]++
			if *update {
				if err := os.WriteFile(filepath.Join(home, file), []byte(head+"-- status "+status+" --\n"+answer), 0o644); err != nil {
					t.Fatal(err)
				}
				return
			}
			if status != c.status || answer != c.answer {
				t.Errorf("%s\nstatus %s, want %s\n%s", c.command, status, c.status, firstDifference(answer, c.answer))
			}
			// Whatever the collection says: bad input is no internal error, a doubt comes
			// with a result, and nothing escapes the terminal.
			doubt := strings.HasPrefix(base, "doubt-")
			switch {
			case code == statusInternal, !doubt && code == statusDone, doubt && code != statusDone:
				t.Errorf("status %d", code)
			case doubt && !slices.ContainsFunc(voices, func(s string) bool { return strings.Contains(answer, s) }):
				t.Error("no doubt is voiced")
			}
			if i := strings.IndexFunc(answer, func(r rune) bool { return r < ' ' && r != '\n' || r == 0x7f || r == 0xfffd }); i >= 0 {
				t.Errorf("control character in the answer at byte %d", i)
			}
		})
	}
	for _, kind := range []string{"data", "doubt", "fluid", "model", "plan", "call"} {
		t.Logf("%s: %d", kind, kinds[kind])
		if kinds[kind] == 0 {
			t.Errorf("no bad input of the kind %q", kind)
		}
	}
}
