package main

import (
	"os"

	"github.com/urfave/cli/v2"

	"limsup/cmd/limsup/internal/progress"
	"limsup/cmd/limsup/internal/table"
)

// startProgress shows how far work called what, as in "comparing variants", has
// come: on a terminal only, not before it takes a second, and not with --quiet.
// Pass Set of the result to what counts the work, and Stop it before anything is
// printed.
func startProgress(c *cli.Context, what string) *progress.Bar {
	w := c.App.ErrWriter
	return progress.Start(w, what, table.IsTerminal(w) && os.Getenv("TERM") != "dumb" && !c.Bool("quiet"))
}
