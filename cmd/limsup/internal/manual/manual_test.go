package manual

import (
	"bytes"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/urfave/cli/v2"
)

// awkward holds every character that one of the four languages treats as special.
const awkward = "it's 50% \"of\" $HOME `x` \\n .TH [a-z]* {b} ~ # ! & ; ω − < > |"

func guide() Guide {
	return Guide{Titles: []string{"Flags", "More"}, Group: func(f string) string {
		if f == "seed" {
			return "More"
		}
		return ""
	}, Words: func(f string) []string {
		if f == "text" {
			return []string{"it's", "a$b", "c`d"}
		}
		return nil
	}, Args: func(string) []string { return nil }}
}

func example() *Program {
	c := &cli.Command{Name: "do", Usage: "do it", ArgsUsage: "THING (what to do)",
		Description: "First paragraph, " + awkward + "\n\n.Second paragraph.\n\nExamples: prog do --text \"a b\" --file x.csv\n   prog do --seed 3",
		Flags: []cli.Flag{
			&cli.StringFlag{Name: "text", Usage: "`TEXT` with " + awkward},
			&cli.StringFlag{Name: "file", Usage: "read `FILE`"},
			&cli.StringFlag{Name: "format", Value: "b", Usage: "a `FORM`: a, b, c or d (there is no e)"},
			&cli.BoolFlag{Name: "fast", Aliases: []string{"f"}, Usage: "do it fast: a, b"},
			&cli.IntFlag{Name: "seed", Value: 1, Usage: "a `NUMBER`"},
			&cli.IntFlag{Name: "zero", Usage: "a `NUMBER`"},
			&cli.StringFlag{Name: "unseen", Hidden: true},
		}}
	return &Program{Name: "prog", Usage: "a program, " + awkward, About: []string{"'Quoted at the start."}, Version: "v1",
		Statuses: []Entry{{"0", "done"}}, Environment: []Entry{{"HOME", awkward}},
		Commands: []*Command{NewCommand("prog", c, guide())}}
}

func TestNewCommand(t *testing.T) {
	c := example().Commands[0]
	want := &Command{Program: "prog", Name: "do", Usage: "do it", Arguments: "THING",
		About:    []string{"Arguments: what to do.", "First paragraph, " + awkward, ".Second paragraph."},
		Examples: []string{`prog do --text "a b" --file x.csv`, "prog do --seed 3"},
		Groups: []Group{{"Flags", []Flag{
			{Name: "text", Value: "TEXT", Usage: "TEXT with " + strings.ReplaceAll(awkward, "`", ""), Words: []string{"it's", "a$b", "c`d"}},
			{Name: "file", Value: "FILE", Usage: "read FILE", File: true},
			{Name: "format", Value: "FORM", Usage: "a FORM: a, b, c or d (there is no e) (default: b)", Words: []string{"a", "b", "c", "d"}},
			{Name: "fast", Short: "f", Usage: "do it fast: a, b"},
			{Name: "zero", Value: "NUMBER", Usage: "a NUMBER"},
		}}, {"More", []Flag{{Name: "seed", Value: "NUMBER", Usage: "a NUMBER (default: 1)"}}}}}
	if diff := cmp.Diff(want, c); diff != "" {
		t.Error(diff)
	}
}

func TestPage(t *testing.T) {
	c := &Command{Program: "prog", Name: "do", Usage: "do it", About: []string{"One two three four five six seven eight nine."},
		Examples: []string{`prog do --text "a b c" --file somewhere.csv --fast --seed 3`},
		Groups:   []Group{{"Flags", []Flag{{Name: "text", Value: "TEXT", Usage: "the text that is to be written"}, {Name: "a-long-name", Value: "VALUE", Usage: "beside it"}}}}}
	want := `prog do: do it

  prog do [--flag value ...]

One two three four five six seven eight
nine.

Example
  prog do --text "a b c" \
      --file somewhere.csv --fast \
      --seed 3

Flags
  --text TEXT           the text that is to
                        be written
  --a-long-name VALUE   beside it
`
	page, _, _ := strings.Cut(c.Page(40), "\nFlags may stand")
	if diff := cmp.Diff(want, page); diff != "" {
		t.Error(diff)
	}
}

// run feeds text to a program; one that is not installed here is reported and passed over.
func run(t *testing.T, text, name string, args ...string) (out string, found bool) {
	t.Helper()
	path, err := exec.LookPath(name)
	if err != nil {
		t.Logf("no %s on this machine", name)
		return "", false
	}
	file := filepath.Join(t.TempDir(), "text")
	if err := os.WriteFile(file, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	c := exec.Command(path, append(args, file)...)
	both, err := c.CombinedOutput()
	if err != nil {
		t.Errorf("%s: %v\n%s\n%s", name, err, both, text)
	}
	return string(both), true
}

// The scripts are read by their shells without a complaint, whatever the texts hold.
func TestScriptsAreSyntacticallySound(t *testing.T) {
	for _, shell := range Shells() {
		script, ok := example().Completion(shell)
		if !ok || !strings.Contains(script, "--text") && shell != "fish" {
			t.Errorf("%s: %q", shell, script)
		}
		if out, _ := run(t, script, shell, "-n"); out != "" {
			t.Errorf("%s: %s", shell, out)
		}
	}
	if _, ok := example().Completion("csh"); ok {
		t.Error("a script for an unknown shell")
	}
}

// Words come back from a shell as they are.
func TestAwkwardWords(t *testing.T) {
	bash, _ := example().Completion("bash")
	out, found := run(t, bash+`
COMP_WORDS=(prog do --text "")
COMP_CWORD=3
_prog
printf '%s\n' "${COMPREPLY[@]}"
`, "bash")
	if want := "it's\na$b\nc`d\n"; found && out != want {
		t.Errorf("bash completes %q, want %q", out, want)
	}
}

// Readers of manual pages accept the page, and show the awkward text as it is.
func TestMan(t *testing.T) {
	page := example().Man()
	if again := example().Man(); page != again {
		t.Error("two pages of one program differ")
	}
	if i := bytes.IndexFunc([]byte(page), func(r rune) bool { return r > '~' || r < ' ' && r != '\n' }); i >= 0 {
		t.Errorf("byte %q in the page", page[i])
	}
	// There is no date on purpose (the same program writes the same page), which would be the only complaint.
	run(t, strings.Replace(page, `"1" ""`, `"1" "December 1, 2026"`, 1), "mandoc", "-T", "lint", "-W", "warning")
	out, found := run(t, page, "mandoc", "-T", "utf8", "-O", "width=400")
	plain := strings.Join(strings.Fields(withoutOverstrike(out)), " ")
	for _, want := range []string{awkward, ".Second paragraph.", "'Quoted at the start.", `prog do --text "a b" --file x.csv`, "-f, --fast", "prog do THING [--flag value ...]"} {
		if found && !strings.Contains(plain, want) {
			t.Errorf("%q is not on the page:\n%s", want, plain)
		}
	}
}

// withoutOverstrike takes out the backspaces with which terminals show bold and underlined text.
func withoutOverstrike(s string) string {
	r := []rune(s)
	var out []rune
	for i := 0; i < len(r); i++ {
		if i+1 < len(r) && r[i+1] == '\b' {
			i++
			continue
		}
		out = append(out, r[i])
	}
	return string(out)
}
