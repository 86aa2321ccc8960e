package main

import (
	"fmt"

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
