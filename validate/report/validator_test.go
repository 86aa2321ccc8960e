package report

import (
	"os"
	"os/exec"
	"path/filepath"
	"testing"
)

// TestValidHTML gives the pages to the Nu HTML Checker of the W3C
// (https://validator.github.io/validator/), whose archive LIMSUP_HTML_VALIDATOR names.
// Errors and warnings fail alike.
func TestValidHTML(t *testing.T) {
	if testing.Short() {
		t.Log("the pages are checked in full runs only")
		return
	}
	archive := os.Getenv("LIMSUP_HTML_VALIDATOR")
	if archive == "" {
		if os.Getenv("CI") != "" {
			t.Fatal("LIMSUP_HTML_VALIDATOR names no validator")
		}
		t.Log("no validator here, so the pages are not checked; .ci/run installs one")
		return
	}
	dir := t.TempDir()
	args := []string{"-Xss8m", "-jar", archive, "--Werror", "--stdout"}
	for name, get := range map[string]func(*testing.T) (*Report, []byte){"demo": demo, "hostile": hostile, "many": many} {
		_, page := get(t)
		file := filepath.Join(dir, name+".html")
		if err := os.WriteFile(file, page, 0o600); err != nil {
			t.Fatal(err)
		}
		args = append(args, file)
	}
	if out, err := exec.Command("java", args...).CombinedOutput(); err != nil || len(out) > 0 {
		t.Errorf("%v\n%s", err, out)
	}
}
