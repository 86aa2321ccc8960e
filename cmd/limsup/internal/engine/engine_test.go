package engine

import (
	"encoding/json"
	"errors"
	"os"
	"os/exec"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

func task() Task {
	return Task{Command: []string{"compare", "--data", "drops.csv"}, Program: "limsup", Parts: 4, CPUs: 1, Name: "limsup-compare", Folder: "parts"}
}

func TestRefuses(t *testing.T) {
	cluster := func(x *Task) { x.Image, x.Claim = "limsup:1", "drops" }
	for _, tt := range []struct {
		engine, setting string
		change          func(x *Task)
	}{
		{"sun", "engine", func(*Task) {}},
		{"slurm", "parts", func(x *Task) { x.Parts = 0 }},
		{"slurm", "parts", func(x *Task) { x.Parts = 100_001 }},
		{"slurm", "cpus", func(x *Task) { x.CPUs = 0 }},
		{"slurm", "memory", func(x *Task) { x.Memory = -1 }},
		{"slurm", "name", func(x *Task) { x.Name = "Limsup" }},
		{"slurm", "name", func(x *Task) { x.Name = "a\n#SBATCH --uid=0" }},
		{"slurm", "name", func(x *Task) { x.Name = strings.Repeat("a", 64) }},
		{"slurm", "program", func(x *Task) { x.Program = "" }},
		{"slurm", "folder", func(x *Task) { x.Folder = "" }},
		{"slurm", "folder", func(x *Task) { x.Folder = "-p" }},
		{"slurm", "image", func(x *Task) { x.Image = "limsup:1" }},
		{"slurm", "claim", func(x *Task) { x.Claim = "drops" }},
		{"slurm", "command", func(x *Task) { x.Command = append(x.Command, "a\nb") }},
		{"slurm", "command", func(x *Task) { x.Command = append(x.Command, "a\xff") }},
		{"slurm", "command", func(x *Task) { x.Folder = "a\x7f" }},
		{"kubernetes", "image", func(x *Task) { x.Claim = "drops" }},
		{"kubernetes", "image", func(x *Task) { cluster(x); x.Image = "limsup 1" }},
		{"kubernetes", "claim", func(x *Task) { x.Image = "limsup:1" }},
		{"kubernetes", "claim", func(x *Task) { cluster(x); x.Claim = "Drops_1" }},
		{"kubernetes", "command", func(x *Task) { cluster(x); x.Command = append(x.Command, "a\u2028b") }},
	} {
		x := task()
		tt.change(&x)
		var b strings.Builder
		err := Write(&b, tt.engine, x)
		var bad *TaskError
		if !errors.As(err, &bad) || bad.Setting != tt.setting || b.Len() > 0 {
			t.Errorf("%s %+v: %v", tt.engine, x, err)
		}
	}
}

// word draws text that can stand in a command.
func word(t *rapid.T) string {
	return rapid.StringOf(rapid.OneOf(rapid.SampledFrom([]rune(`'"\$() ;&|<>*?~#!-=`+"`")), rapid.Rune())).Filter(func(s string) bool {
		return !strings.ContainsFunc(s, odd)
	}).Draw(t, "word")
}

// TestShell lets a shell take quoted words apart again.
func TestShell(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		words := []string{word(t), word(t), word(t)}
		out, err := exec.Command("/bin/sh", "-c", `printf '%s\n' `+line(words)).Output()
		if err != nil {
			t.Fatal(err)
		}
		if want := strings.Join(words, "\n") + "\n"; string(out) != want {
			t.Fatalf("%q became %q", words, out)
		}
	})
}

// expand does what Kubernetes does with a word that names no variable that is set:
// two dollar signs become one, a reference to a variable that is not set stays. Source: Kubernetes, API
// reference, Container.args (from memory).
func expand(s string) string {
	var b strings.Builder
	for i := 0; i < len(s); i++ {
		b.WriteByte(s[i])
		if s[i] == '$' && i+1 < len(s) && s[i+1] == '$' {
			i++
		}
	}
	return b.String()
}

// TestVerbatim follows a word through YAML and Kubernetes.
func TestVerbatim(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		w := word(t)
		quoted, err := yaml(verbatim(w))
		if err != nil {
			t.Fatal(err)
		}
		var s string
		if err := json.Unmarshal([]byte(quoted), &s); err != nil {
			t.Fatal(err)
		}
		if strings.Contains(strings.ReplaceAll(s, "$$", ""), "$") {
			t.Fatalf("%q is expanded", s)
		}
		if got := expand(s); got != w {
			t.Fatalf("%q became %q", w, got)
		}
	})
}

// TestIndex runs the shell text of the manifest with the variable that Kubernetes sets.
// .ci/manifest-test does the same with what a YAML parser finds in the manifest.
func TestIndex(t *testing.T) {
	var b strings.Builder
	x := task()
	x.Image, x.Claim = "limsup:1", "drops"
	if err := Write(&b, "kubernetes", x); err != nil {
		t.Fatal(err)
	}
	_, text, ok := strings.Cut(b.String(), "            - |\n")
	text, _, ok2 := strings.Cut(text, "            - share\n")
	if !ok || !ok2 {
		t.Fatal("no shell text in the manifest")
	}
	c := exec.Command("/bin/sh", "-euc", strings.ReplaceAll(text, "              ", ""), "share", "parts", "echo", "compare", "--data", "my drops.csv")
	c.Dir = t.TempDir()
	c.Env = append(os.Environ(), "JOB_COMPLETION_INDEX=3")
	out, err := c.CombinedOutput()
	if want := "compare --data my drops.csv --share 4/4 --out parts/part-4.json\n"; err != nil || string(out) != want {
		t.Errorf("%v, %q, want %q", err, out, want)
	}
	if info, err := os.Stat(c.Dir + "/parts"); err != nil || !info.IsDir() {
		t.Errorf("no folder of parts: %v", err)
	}
}

func TestRetries(t *testing.T) {
	for parts, want := range map[int]int{1: 3, 100_000: 300_000} {
		if got := (&Task{Parts: parts}).Retries(); got != want {
			t.Errorf("%d parts: %d", parts, got)
		}
	}
}
