package main

import (
	"fmt"
	"io"
	"slices"
	"strings"

	"github.com/urfave/cli/v2"

	"limsup/cmd/limsup/internal/atomicfile"
	"limsup/cmd/limsup/internal/engine"
	"limsup/data/quantity"
	"limsup/validate/share"
)

func shareCommand() *cli.Command {
	return &cli.Command{
		Name:      "share",
		Usage:     "write a job that computes a command in shares on a cluster",
		ArgsUsage: "-- COMMAND --flag value ... (the command to divide, with its flags, after two hyphens)",
		Description: "Prints a batch script with a Slurm job array, or the manifest of a Kubernetes Indexed Job. Each task computes one share and writes its part into a folder; limsup gather joins the parts. A share does not depend on where, when or how often it is computed, so a task that was killed is simply repeated.\n\n" +
			"The names of files are used where the shares run: in Slurm relative to the folder of sbatch, in Kubernetes relative to the mounted volume.\n\n" +
			"Examples: limsup share --engine slurm --parts 8 --out job.sh -- compare --data drops.csv --nested\n" +
			"          limsup share --engine slurm --parts 20 --out job.sh -- calibrate --data drops.csv --bootstrap 10000\n" +
			"          limsup share --engine kubernetes --parts 8 --image registry.example/limsup:1 --claim drops --out job.yaml -- compare --data drops.csv",
		Flags: []cli.Flag{
			&cli.StringFlag{Name: "engine", Usage: "`ENGINE` that runs the shares: " + strings.Join(engine.Names(), " or ")},
			&cli.IntFlag{Name: "parts", Value: 8, Usage: "`NUMBER` of shares"},
			&cli.IntFlag{Name: "cpus", Value: 1, Usage: "`NUMBER` of processors for each share"},
			&cli.IntFlag{Name: "memory", Usage: "memory for each share in `MIB` (default: as the engine has it)"},
			&cli.StringFlag{Name: "name", Usage: "`NAME` of the job (default: limsup- and the command)"},
			&cli.StringFlag{Name: "folder", Value: "parts", Usage: "`FOLDER` of the parts; one for each computation"},
			&cli.StringFlag{Name: "program", Value: "limsup", Usage: "`PATH` of limsup where the shares run"},
			&cli.StringFlag{Name: "image", Usage: "container `IMAGE` with limsup and /bin/sh (kubernetes)"},
			&cli.StringFlag{Name: "claim", Usage: "persistent volume claim `NAME` with the measurements (kubernetes)"},
			outFlag("the job"),
		},
		Action: func(c *cli.Context) error {
			if !c.IsSet("engine") {
				return &usageError{"limsup share needs --engine " + strings.Join(engine.Names(), " or ")}
			}
			words := c.Args().Slice()
			if err := checkDivided(words); err != nil {
				return err
			}
			t := engine.Task{Command: words, Program: c.String("program"), Parts: c.Int("parts"), CPUs: c.Int("cpus"), Memory: c.Int("memory"),
				Name: c.String("name"), Folder: c.String("folder"), Image: c.String("image"), Claim: c.String("claim")}
			if t.Name == "" {
				t.Name = "limsup-" + words[0]
			}
			write := func(w io.Writer) error { return engine.Write(w, c.String("engine"), t) }
			if name := c.String("out"); name != "" {
				return atomicfile.Write(name, write)
			}
			return write(c.App.Writer)
		},
	}
}

// ofDivided explains a flag that limsup share does not have, but a command that it
// divides: the two hyphens are missing. Else it is empty.
func ofDivided(c *cli.Context, name string) string {
	if c.Command == nil || c.Command.Name != "share" {
		return ""
	}
	has := func(k *cli.Command, flag string) bool {
		return slices.ContainsFunc(k.Flags, func(f cli.Flag) bool { return slices.Contains(f.Names(), flag) })
	}
	for _, k := range newApp(io.Discard, io.Discard).Commands {
		if has(k, "share") && has(k, name) {
			return fmt.Sprintf("limsup share has no flag --%s: the command to divide stands after two hyphens, with its flags: limsup share --engine slurm -- COMMAND --%s ...", name, name)
		}
	}
	return ""
}

// checkDivided refuses a command that cannot be computed in shares, or whose flags it
// would refuse itself.
func checkDivided(words []string) error {
	if len(words) == 0 {
		return &usageError{"limsup share needs the command to divide after two hyphens: limsup share --engine slurm -- compare --data drops.csv"}
	}
	var divisible []string
	app := newApp(io.Discard, io.Discard)
	for _, k := range app.Commands {
		if slices.ContainsFunc(k.Flags, func(f cli.Flag) bool { return f.Names()[0] == "share" }) {
			divisible = append(divisible, k.Name)
		}
		k.Action = func(c *cli.Context) error {
			for _, name := range apart {
				if c.IsSet(name) {
					return &usageError{fmt.Sprintf("%s --%s: the job sets --share and --out itself; give --format and --out to limsup gather", commandName(c), name)}
				}
			}
			if c.Command.Name == dividedCommand[share.Bootstrap] && !c.IsSet("bootstrap") {
				return &usageError{commandName(c) + " is divided by the replicates of --bootstrap NUMBER"}
			}
			if len(c.StringSlice("data")) == 0 {
				return &usageError{commandName(c) + " needs --data FILE"}
			}
			return noArguments(c)
		}
	}
	if !slices.Contains(divisible, words[0]) {
		return &usageError{fmt.Sprintf("%q cannot be computed in shares%s; commands that can: %s", words[0], suggest("", quantity.Near(words[0], divisible)), strings.Join(divisible, ", "))}
	}
	args, err := arrange(app, words)
	if err != nil {
		return err
	}
	return app.Run(append([]string{"limsup"}, args...))
}
