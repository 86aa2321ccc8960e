package main

import (
	"fmt"
	"strings"
	"unicode/utf8"

	"github.com/urfave/cli/v2"

	"limsup/data/fluid"
)

// warnRecords says on standard error what in the records of a user's file does not
// fit together. It is not a note that --quiet silences.
func warnRecords(c *cli.Context, records []*fluid.Record) {
	for _, r := range records {
		for _, w := range r.Warnings() {
			fmt.Fprintln(c.App.ErrWriter, "limsup: warning: "+visible(w))
		}
	}
}

// longestLine bounds a line of a message in bytes: input that is repeated may be of any length.
const longestLine = 1000

// brief cuts the lines of a message that are too long.
func brief(s string) string {
	if len(s) <= longestLine {
		return s
	}
	lines := strings.Split(s, "\n")
	for i, l := range lines {
		if len(l) <= longestLine {
			continue
		}
		cut := longestLine
		for !utf8.RuneStart(l[cut]) {
			cut--
		}
		lines[i] = fmt.Sprintf("%s... (%d bytes more)", l[:cut], len(l)-cut)
	}
	return strings.Join(lines, "\n")
}
