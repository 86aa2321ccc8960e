package main

import (
	"bytes"
	"context"
	"encoding/json"
	"fmt"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"

	"github.com/urfave/cli/v2"

	"limsup/validate"
	"limsup/validate/share"
)

// programKey makes the binary of the tests behave as limsup ("whole"), or as a limsup
// that stops in the middle of a share and waits to be killed ("halfway").
const programKey = "LIMSUP_TEST_PROGRAM"

func TestMain(m *testing.M) {
	switch os.Getenv(programKey) {
	case "whole":
		main()
	case "halfway":
		halfway()
	}
	os.Exit(m.Run())
}

// halfwayWork does half of the jobs and says so.
type halfwayWork struct{ comparisonWork }

func (w halfwayWork) Run(ctx context.Context, first, last int) ([]json.RawMessage, error) {
	if _, err := w.comparisonWork.Run(ctx, first, (first+last)/2); err != nil {
		return nil, err
	}
	fmt.Println("halfway")
	select {}
}

func halfway() {
	app := newApp(os.Stdout, os.Stderr)
	app.Command("compare").Action = func(c *cli.Context) error {
		s, _, err := sharing(c)
		if err != nil {
			return err
		}
		o, err := compareOptions(c)
		if err != nil {
			return err
		}
		lib, err := library(c)
		if err != nil {
			return err
		}
		set, err := readData(c, lib)
		if err != nil {
			return err
		}
		jobs, err := validate.NewJobs(set, lib, o)
		if err != nil {
			return err
		}
		return writePart(c, share.Compare, s, halfwayWork{comparisonWork{jobs}})
	}
	fmt.Fprintln(os.Stderr, app.Run(os.Args))
	os.Exit(1)
}

// study is a comparison with an outer loop, short enough for a test, of a copy of the
// published limits.
func study(t *testing.T) (data string, args []string) {
	t.Helper()
	data = filepath.Join(t.TempDir(), "limits.csv")
	text, err := os.ReadFile(published)
	if err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(data, text, 0o644); err != nil {
		t.Fatal(err)
	}
	return data, []string{"compare", "--data", data, "--fluids", "../../data/fluid/library/n-pentane.toml", "--variant", "soave", "--variant", "van-der-waals; tune=none", "--folds", "3", "--nested", "--seed", "5"}
}

// do runs a command that must succeed, and returns what it prints.
func do(t *testing.T, args ...string) string {
	t.Helper()
	out, message, code := invoke(t, args...)
	if code != 0 {
		t.Fatalf("limsup %q: status %d, %s", args, code, message)
	}
	return out
}

// inShares writes the parts of a command.
func inShares(t *testing.T, n int, args []string) []string {
	t.Helper()
	dir := t.TempDir()
	var parts []string
	for k := 1; k <= n; k++ {
		name := filepath.Join(dir, fmt.Sprintf("part-%d.json", k))
		if out := do(t, append(args, "--share", fmt.Sprintf("%d/%d", k, n), "--out", name)...); out != "" {
			t.Errorf("a share prints %q", out)
		}
		parts = append(parts, name)
	}
	return parts
}

// TestGather compares gathered parts with the single run, byte for byte, in every
// format, on the screen and in a file. The data are gone by then.
func TestGather(t *testing.T) {
	data, args := study(t)
	formats := []string{"table", "csv", "json", "markdown"}
	want := map[string]string{}
	for _, f := range formats {
		want[f] = do(t, append(args, "--format", f)...)
	}
	one, three := inShares(t, 1, args), inShares(t, 3, args)
	many := inShares(t, 40, args) // more shares than jobs
	if err := os.Remove(data); err != nil {
		t.Fatal(err)
	}
	for _, parts := range [][]string{one, {three[2], three[0], three[1]}, many} {
		for _, f := range formats {
			if got := do(t, append([]string{"gather", "--format", f}, parts...)...); got != want[f] {
				t.Errorf("%d parts as %s: %s", len(parts), f, firstDifference(got, want[f]))
			}
		}
	}
	file := filepath.Join(t.TempDir(), "all.json")
	if got := do(t, "gather", three[0], three[1], "--out", file, "--format", "json", three[2]); got != "" {
		t.Errorf("prints %q besides --out", got)
	}
	if got, err := os.ReadFile(file); err != nil || string(got) != want["json"] {
		t.Errorf("--out: %v, %s", err, firstDifference(string(got), want["json"]))
	}
	// A share is the same whenever it is computed, and to standard output, too.
	if err := os.WriteFile(data, nil, 0o644); err != nil {
		t.Fatal(err)
	}
	text, err := os.ReadFile(published)
	if err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(data, text, 0o644); err != nil {
		t.Fatal(err)
	}
	second, err := os.ReadFile(three[1])
	if err != nil {
		t.Fatal(err)
	}
	if got := do(t, append(args, "--share", "2/3", "--quiet")...); got != string(second) {
		t.Errorf("share 2/3 comes out otherwise: %s", firstDifference(got, string(second)))
	}
}

// TestGatherBootstrap does the same for a bootstrap of a calibration by a plan file, with
// the model file that the command writes.
func TestGatherBootstrap(t *testing.T) {
	dir := t.TempDir()
	t.Chdir(dir)
	write := func(name, text string) {
		if err := os.WriteFile(name, []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	write("drops.csv", "fluid,temperature/K,pressure/kPa,batch\nn-pentane,419.8,101.3,a\nn-hexane,455.1,101.3,a\nn-heptane,487.2,101.3,b\npropane,326.3,101.3,b\nisobutane,361.4,101.3,b\n")
	write("plan.toml", "[model]\nequation = \"peng-robinson\"\n\n[[parameter]]\nname = \"threshold\"\n")
	for _, resample := range []string{"rows", "batch", "parametric"} {
		args := []string{"calibrate", "--data", "drops.csv", "--plan", "plan.toml", "--limit", "kinetic", "--bootstrap", "70", "--resample", resample, "--level", "80%", "--folds", "none", "--profile", "threshold"}
		formats := []string{"table", "json"}
		want := map[string]string{}
		for _, f := range formats {
			want[f] = do(t, append(args, "--format", f, "--out", "model.json")...)
		}
		model, err := os.ReadFile("model.json")
		if err != nil {
			t.Fatal(err)
		}
		for _, n := range []int{1, 3} {
			parts := inShares(t, n, args)
			for _, name := range []string{"drops.csv", "plan.toml", "model.json"} {
				if err := os.Rename(name, name+".away"); err != nil {
					t.Fatal(err)
				}
			}
			for _, f := range formats {
				if got := do(t, append([]string{"gather", "--format", f, "--out", "model.json"}, parts...)...); got != want[f] {
					t.Errorf("%s, %d parts as %s: %s", resample, n, f, firstDifference(got, want[f]))
				}
			}
			if got, err := os.ReadFile("model.json"); err != nil || !bytes.Equal(got, model) {
				t.Errorf("%s, %d parts: the model file differs, %v", resample, n, err)
			}
			for _, name := range []string{"drops.csv", "plan.toml", "model.json"} {
				if err := os.Rename(name+".away", name); err != nil {
					t.Fatal(err)
				}
			}
		}
	}
	parts := inShares(t, 2, []string{"calibrate", "--data", "drops.csv", "--bootstrap", "9"})
	text, err := os.ReadFile(parts[1])
	if err != nil {
		t.Fatal(err)
	}
	for _, change := range [][2]string{{`"Index":4`, `"Index":5`}, {`"Values":[`, `"Values":[1,`}, {`"HasLimit":[true`, `"HasLimit":[true,true`}, {`"Failure"`, `"failed"`}} {
		bent := strings.Replace(string(text), change[0], change[1], 1)
		if bent == string(text) {
			t.Fatalf("no %s in a part", change[0])
		}
		write("bent.json", bent)
		if out, message, code := invoke(t, "gather", parts[0], "bent.json"); code != statusInput || out != "" || !strings.Contains(message, "gathered parts: not a usable part") {
			t.Errorf("%s: status %d, %q", change[1], code, message)
		}
	}
}

// TestGatherRefuses names the parts that do not belong together; nothing is printed.
func TestGatherRefuses(t *testing.T) {
	data, args := study(t)
	parts := inShares(t, 3, args)
	with := func(k int, change ...string) string {
		name := filepath.Join(t.TempDir(), "other.json")
		do(t, append(append(args, change...), "--share", fmt.Sprintf("%d/3", k), "--out", name)...)
		return name
	}
	args[len(args)-1] = "6" // of --seed
	seeded := with(3)
	args[len(args)-1] = "5"
	text, err := os.ReadFile(data)
	if err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(data, append(text, "# another\n"...), 0o644); err != nil {
		t.Fatal(err)
	}
	otherData := with(2)
	if err := os.WriteFile(data, text, 0o644); err != nil {
		t.Fatal(err)
	}
	bent := func(old, new string) string {
		text, err := os.ReadFile(parts[1])
		if err != nil {
			t.Fatal(err)
		}
		name := filepath.Join(t.TempDir(), "bent.json")
		if err := os.WriteFile(name, bytes.Replace(text, []byte(old), []byte(new), 1), 0o644); err != nil {
			t.Fatal(err)
		}
		return name
	}
	for _, tt := range []struct {
		name  string
		parts []string
		says  []string
	}{
		{"no part", nil, []string{"needs the files of the parts"}},
		{"missing", parts[:2], []string{"share 3/3 is missing: run the command again with --share 3/3"}},
		{"doubled", append(parts, parts[0]), []string{parts[0] + ": share 1/3 is already there in " + parts[0]}},
		{"other data", []string{parts[0], otherData, parts[2]}, []string{otherData + ": foreign part: data of SHA-256 ", "share 2/3 is missing"}},
		{"other seed", []string{parts[0], parts[1], seeded}, []string{"foreign part: seed 6, but 5 in " + parts[0]}},
		{"other plan", []string{parts[0], parts[1], with(3, "--keep", "80%")}, []string{"foreign part: plan (", "--keep=80%"}},
		{"other kind", []string{parts[0], bent(`"kind":"compare"`, `"kind":"bootstrap"`), parts[2]}, []string{"foreign part: kind bootstrap, but compare"}},
		{"no part at all", []string{parts[0], published, parts[2]}, []string{published + ": not a usable part"}},
		{"no file", []string{"absent.json"}, []string{"absent.json: no such file"}},
		{"bent result", []string{parts[0], bent(`"left_out":{`, `"left_out":{"x":1,`), parts[2]}, []string{"gathered parts: not a usable part: the result of job"}},
		{"lost residual", []string{parts[0], bent(`"tuned_K":[`, `"tuned_K":[0.5,`), parts[2]}, []string{"a column of"}},
	} {
		out, message, code := invoke(t, append([]string{"gather"}, tt.parts...)...)
		if code != statusInput || out != "" {
			t.Errorf("%s: status %d, printed %q", tt.name, code, out)
		}
		for _, s := range tt.says {
			if !strings.Contains(message, s) {
				t.Errorf("%s: %q does not say %q", tt.name, message, s)
			}
		}
	}
}

// TestGatherForeignFlag refuses a plan with a flag that is not part of plans, which
// could write files.
func TestGatherForeignFlag(t *testing.T) {
	for _, name := range []string{"out", "share", "format", "quiet", "h", "colour"} {
		w := &share.Whole{Kind: share.Compare, Plan: []share.Flag{{Name: name, Values: []string{"x"}}}}
		if args, err := argsOf(w, newApp(io.Discard, io.Discard).Command("compare")); err == nil {
			t.Errorf("--%s became %q", name, args)
		}
	}
}

// program makes a file that runs this binary as limsup.
func program(t *testing.T, kind string) string {
	t.Helper()
	self, err := os.Executable()
	if err != nil {
		t.Fatal(err)
	}
	name := filepath.Join(t.TempDir(), "limsup")
	text := "#!/bin/sh\n" + programKey + "=" + kind + " exec '" + self + "' \"$@\"\n"
	if err := os.WriteFile(name, []byte(text), 0o755); err != nil {
		t.Fatal(err)
	}
	return name
}

// TestKilledShare kills a share in the middle with SIGKILL: nothing stands under its
// name, and when it is repeated the parts gather to what the single run prints.
func TestKilledShare(t *testing.T) {
	_, args := study(t)
	dir := t.TempDir()
	part := func(k int) string { return filepath.Join(dir, fmt.Sprintf("part-%d.json", k)) }
	call := func(k int) []string { return append(args, "--share", fmt.Sprintf("%d/2", k), "--out", part(k)) }
	do(t, call(1)...)
	victim := exec.Command(program(t, "halfway"), call(2)...)
	out, err := victim.StdoutPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := victim.Start(); err != nil {
		t.Fatal(err)
	}
	word := make([]byte, len("halfway"))
	if _, err := io.ReadFull(out, word); err != nil || string(word) != "halfway" {
		t.Errorf("%q, %v", word, err)
	}
	if err := victim.Process.Kill(); err != nil {
		t.Fatal(err)
	}
	if err := victim.Wait(); err == nil || victim.ProcessState.Exited() {
		t.Fatalf("it was not killed: %v", err)
	}
	if _, err := os.Stat(part(2)); !os.IsNotExist(err) {
		t.Errorf("something stands under the name of the part: %v", err)
	}
	if _, message, code := invoke(t, "gather", part(1)); code != statusInput || !strings.Contains(message, "share 2/2 is missing") {
		t.Errorf("status %d, %s", code, message)
	}
	do(t, call(2)...)
	if got, want := do(t, "gather", part(1), part(2)), do(t, args...); got != want {
		t.Error(firstDifference(got, want))
	}
}

// TestArray runs the script for Slurm, task by task with the variable that Slurm sets,
// and gathers what it leaves. (.ci/slurm-test runs it under Slurm itself.)
func TestArray(t *testing.T) {
	_, args := study(t)
	dir := t.TempDir()
	args[4] = absolute(t, args[4]) // of --fluids: the script runs in dir
	script := do(t, append([]string{"share", "--engine", "slurm", "--parts", "3", "--folder", "the parts", "--program", program(t, "whole"), "--"}, args...)...)
	sh := func(index string) ([]byte, error) {
		c := exec.Command("/bin/sh", "-c", script)
		c.Dir = dir
		c.Env = append(os.Environ(), "SLURM_ARRAY_TASK_ID="+index)
		return c.CombinedOutput()
	}
	if out, err := sh(""); err == nil || !strings.Contains(string(out), "start this script with sbatch") {
		t.Errorf("without the variable: %v, %s", err, out)
	}
	var parts []string
	for _, index := range []string{"3", "1", "2"} {
		if out, err := sh(index); err != nil {
			t.Fatalf("%v: %s", err, out)
		}
		parts = append(parts, filepath.Join(dir, "the parts", "part-"+index+".json"))
	}
	if got, want := do(t, append([]string{"gather"}, parts...)...), do(t, args...); got != want {
		t.Error(firstDifference(got, want))
	}
}

func absolute(t *testing.T, name string) string {
	t.Helper()
	a, err := filepath.Abs(name)
	if err != nil {
		t.Fatal(err)
	}
	return a
}

// TestGoldenShare holds the jobs for both engines.
func TestGoldenShare(t *testing.T) {
	command := []string{"--", "compare", "--data", "my drops.csv", "--variant", "soave; tune=threshold", "--nested"}
	golden(t, "share-slurm.golden", do(t, append([]string{"share", "--engine", "slurm", "--cpus", "2", "--memory", "500"}, command...)...))
	golden(t, "share-kubernetes.golden", do(t, append([]string{"share", "--engine", "kubernetes", "--image", "registry.example/limsup:1", "--claim", "drops"}, command...)...))
	do(t, append([]string{"share", "--engine", "slurm", "--"}, "calibrate", "--data", "drops.csv", "--bootstrap", "1000")...)
	file := filepath.Join(t.TempDir(), "job.sh")
	do(t, append([]string{"share", "--engine", "slurm", "--cpus", "2", "--memory", "500", "--out", file}, command...)...)
	text, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	golden(t, "share-slurm.golden", string(text))
}

func TestBadShareCalls(t *testing.T) {
	slurm := []string{"share", "--engine", "slurm"}
	for _, tt := range []struct {
		says string
		args []string
	}{
		{"needs --engine slurm or kubernetes", []string{"share", "--", "compare", "--data", "a.csv"}},
		{"needs the command to divide", slurm},
		{`"check" cannot be computed in shares`, append(slurm, "--", "check", "--data", "a.csv")},
		{"did you mean compare?", append(slurm, "--", "compair", "--data", "a.csv")},
		{"divided by the replicates of --bootstrap", append(slurm, "--", "calibrate", "--data", "a.csv")},
		{"--share needs --bootstrap", []string{"calibrate", "--data", published, "--share", "1/3"}},
		{"1 to 1000000 replicates", []string{"calibrate", "--data", published, "--share", "1/3", "--bootstrap", "0"}},
		{"one of rows, fluid", []string{"calibrate", "--data", published, "--share", "1/3", "--bootstrap", "9", "--resample", "days"}},
		{"limsup compare needs --data", append(slurm, "--", "compare")},
		{"stands after two hyphens, with its flags: limsup share --engine slurm -- COMMAND --data ...", append(slurm, "compare", "--data", "a.csv")},
		{"-- COMMAND --bootstrap ...", append(slurm, "calibrate", "--bootstrap", "9")},
		{"limsup share has no flag --part; did you mean --parts", append(slurm, "--part", "9", "--", "compare", "--data", "a.csv")},
		{"limsup compare has no flag --dat", append(slurm, "--", "compare", "--dat", "a.csv")},
		{`"b.csv" is left over`, append(slurm, "--", "compare", "--data", "a.csv", "b.csv")},
		{"limsup compare --share: the job sets", append(slurm, "--", "compare", "--data", "a.csv", "--share", "1/2")},
		{"limsup compare --format: the job sets", append(slurm, "--", "compare", "--data", "a.csv", "--format", "json")},
		{"--data needs a value", append(slurm, "--", "compare", "--data")},
		{`--engine "sun": want slurm or kubernetes`, []string{"share", "--engine", "sun", "--", "compare", "--data", "a.csv"}},
		{`--parts "0"`, append(slurm, "--parts", "0", "--", "compare", "--data", "a.csv")},
		{"1 ≤ K ≤ N", []string{"compare", "--data", published, "--share", "4/3"}},
		{"--share and --format exclude each other", []string{"compare", "--data", published, "--share", "1/3", "--format", "table"}},
		{"no such file", []string{"compare", "--data", "absent.csv", "--share", "1/3"}},
	} {
		out, message, code := invoke(t, tt.args...)
		if code != statusInput || out != "" || !strings.Contains(message, tt.says) {
			t.Errorf("limsup %q: status %d, %q, %q; want …%s…", tt.args, code, out, message, tt.says)
		}
	}
}
