package main

import (
	"bytes"
	"context"
	"errors"
	"math"
	"slices"
	"strconv"
	"strings"
	"testing"

	"limsup/data/quantity"
	"limsup/fit"
)

// FuzzArgs runs command lines, one argument a line. Whatever they say, the program
// answers without panicking, calls nothing internal that the user got wrong, and
// prints nothing that steers a terminal. Lines that would write files, read
// measurements or compute for long are not run.
func FuzzArgs(f *testing.F) {
	for _, line := range []string{
		"predict\n--fluid\nn-pentane\n--pressure\n0.5 MPa", "predict\n--fluid=water\n--temperature=147 degC\n--format=json",
		"--pressure\n-3 MPa\npredict\n--fluid\n1,3-butadiene", "predict\n--fluid\nwater\n--from\n1 bar\n--to\n2 bar\n--count\n3\n--set\nthreshold=9",
		"isotherm\n--fluid\nargon\n--temperature\n120 K\n--count\n3", "embryo\n--fluid\nwater\n--temperature\n20 Cel\n--pressure\n10 kPa\n--count\n2",
		"flux\n--fluid\nn-hexane\n--pressure\n1 atm\n--kinetics\nstepwise\n--count\n2", "fluids\n--search\nbutane\n--format\nmarkdown",
		"predict\n--fluid\nneon\n--pressure\n1 atm\n--properties\ncorrelation\n--equation\npeng-robinson", "help\npredict", "--version", "completion\nzsh",
		"calibrate\n--tune\nslope/fluid/pooled\n--bounds\nthreshold=5..20\n--prior\nslope=1+-0.1\n--anchor\nvapour-pressure=1%\n--noise\nstudent=4",
		"--\n--\n-\n--=\n-x=\n--fluid", "predict\n--fluid\n\x1b[2J\n--pressure\n1\u202ebar", "plan\n--help", "predict\n--set\nslope[n-pentane]=1.2\n--fluid\nn-pentane\n--pressure\n1 atm\n--limit\nspinodal",
	} {
		f.Add(line)
	}
	f.Fuzz(func(t *testing.T, text string) {
		args := strings.Split(text, "\n")
		if len(args) > 30 || costly(args) {
			return
		}
		var out, messages bytes.Buffer
		err := run(context.Background(), &out, &messages, append([]string{"limsup"}, args...))
		if err != nil {
			if status(err) == statusInternal {
				t.Fatalf("%q: internal error %v (%T)", args, err, err)
			}
			if describe(err) == "" && out.Len() == 0 {
				t.Fatalf("%q: fails in silence", args)
			}
			messages.WriteString(describe(err))
		}
		clean(t, "output", strings.ReplaceAll(strings.ReplaceAll(out.String(), "\r\n", "\n"), "\t", " "))
		clean(t, "messages", messages.String())
		if strings.Contains(out.String(), "NaN") && !strings.Contains(text, "NaN") {
			t.Fatalf("%q prints NaN", args)
		}
	})
}

// costly tells whether args write a file, read measurements, or compute for long.
func costly(args []string) bool {
	for i, a := range args {
		name, value, valued := strings.Cut(strings.TrimLeft(a, "-"), "=")
		if !valued && i+1 < len(args) {
			value = args[i+1]
		}
		switch {
		case !strings.HasPrefix(a, "-"):
		case name == "count":
			if n, err := strconv.ParseInt(value, 0, 64); err == nil && n > 100 {
				return true
			}
		case slices.Contains([]string{"data", "out", "o", "part", "into", "script", "model", "fluids", "plan"}, name):
			return true
		}
	}
	return false
}

// FuzzParse takes command lines apart: no argument is lost, none appears from nowhere,
// and putting the parts together and taking them apart again changes nothing.
func FuzzParse(f *testing.F) {
	for _, line := range []string{"predict\n--fluid\nwater", "--fluid\nwater\npredict\nrest", "--help\npredict", "-3\n--pressure\n-3 MPa", "--\n--fluid\n--", "--fluid=\n=\n-", "--version\n--versions", ""} {
		f.Add(line)
	}
	app := newApp(&bytes.Buffer{}, &bytes.Buffer{})
	f.Fuzz(func(t *testing.T, text string) {
		args := strings.Split(text, "\n")
		line, err := parse(app, args)
		var usage *usageError
		if err != nil && !errors.As(err, &usage) {
			t.Fatalf("%T", err)
		}
		got := append(slices.Clone(line.flags), line.rest...)
		if line.command != "" {
			got = append(got, line.command)
		}
		// marks that are not kept: --help and --version, the first --, and a command of no letters
		dropped := 0
		want := slices.Clone(args)
		slices.Sort(got)
		slices.Sort(want)
		for len(want) > 0 {
			if len(got) > 0 && got[0] == want[0] {
				got, want = got[1:], want[1:]
				continue
			}
			switch want[0] {
			case "--", "", "-h", "--help", "-help", "--version", "-version":
				dropped++
				want = want[1:]
			default:
				t.Fatalf("%q: %q is lost; %+v", args, want[0], line)
			}
		}
		if len(got) > 0 {
			t.Fatalf("%q: %q from nowhere", args, got)
		}
		if err != nil || line.command == "" || line.command[0] == '-' {
			return // after a --, a command may look like a flag; no command does
		}
		again, err := parse(app, line.ordered())
		if err != nil || again.command != line.command || !slices.Equal(again.flags, line.flags) || !slices.Equal(again.rest, line.rest) {
			t.Fatalf("%q: %+v, again %+v, %v", args, line, again, err)
		}
	})
}

// FuzzPlanFlags reads the values of the flags of a plan: typed errors, finite numbers.
func FuzzPlanFlags(f *testing.F) {
	for _, s := range []string{"threshold=12", "slope[n-pentane]=1.2", "slope[a=b]=1", "threshold=5..20", "threshold=-5..-1", "slope=1+-0.1", "slope[x]=1+-0.1", "vapour-pressure=1%", "liquid-density=0.02",
		"student=4", "student=estimate", "survival", "slope/fluid/pooled", "offset/method", "=", "[]=", "a..b", "+-", "%", "x=1e999", "x=NaN", "x=0x1p4", "student=nan"} {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, s string) {
		finite := func(err error, vs ...float64) {
			t.Helper()
			var usage *usageError
			var number *quantity.Error
			var option *fit.OptionError
			if err != nil && !errors.As(err, &usage) && !errors.As(err, &number) && !errors.As(err, &option) {
				t.Fatalf("%q: %v (%T)", s, err, err)
			}
			for _, v := range vs {
				if err == nil && (math.IsNaN(v) || math.IsInf(v, 0)) {
					t.Fatalf("%q: %g", s, v)
				}
			}
		}
		set, err := parseSetting("set", s)
		finite(err, set.Value)
		bound, err := parseBound(s)
		finite(err, bound.Lower, bound.Upper)
		prior, err := parsePrior(s)
		finite(err, prior.Mean, prior.Spread)
		anchor, err := parseAnchor(s)
		finite(err, anchor.Relative)
		noise, err := parseNoise(s)
		if err == nil && noise.Degrees != 0 { // of infinite degrees a plan has to say whether it takes them
			_, err = fit.Plan{Noise: noise}.Complete()
			finite(err, 0)
		}
		term, err := fit.ParseTerm(s)
		finite(err)
		if err == nil {
			back := term.Name
			if term.By != fit.Shared {
				back += "/" + string(term.By)
			}
			if term.Pooled {
				back += "/pooled"
			}
			if again, err := fit.ParseTerm(back); err != nil || again != term {
				t.Fatalf("%q: %+v, again %+v, %v", s, term, again, err)
			}
		}
	})
}
