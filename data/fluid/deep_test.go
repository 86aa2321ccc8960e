package fluid

import (
	"strings"
	"testing"
)

// TestDeepKeys: keys and lists nested a hundred thousand deep take no time to speak of;
// with paths of any length they took a minute.
func TestDeepKeys(t *testing.T) {
	for _, text := range []string{
		"a" + strings.Repeat(".a", 100_000) + " = 1",
		"[a" + strings.Repeat(".a", 100_000) + "]",
		"a = " + strings.Repeat("[", 5_000) + strings.Repeat("]", 5_000),
	} {
		records, err := Parse(strings.NewReader(text), "deep.toml")
		if err == nil || records != nil || len(err.Error()) > 4000 {
			t.Errorf("%.20s...: %d records, error %v", text, len(records), err != nil)
		}
	}
	// a place below the limit is still found
	if p := locate([]byte(strings.Repeat("a.", 300) + "b = [1, [2, 3]]")).find(strings.Repeat("a.", 300) + "b[1][1]"); p.line != 1 || p.column < 600 {
		t.Errorf("place %+v", p)
	}
}
