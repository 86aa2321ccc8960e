// Command mutate breaks the physics and the statistics of this module on purpose,
// one line at a time, and runs the tests that should notice: what they let pass is
// not tested. The breakages are in list.tsv; the files themselves are not touched,
// the compiler sees the broken text by way of an overlay. The tests must pass without
// a breakage; the table then names the first test that fails with each.
//
//	go run ./.ci/mutate [-only N] from the top folder
package main

import (
	"encoding/json"
	"flag"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"strings"
)

// mutation is one line of list.tsv.
type mutation struct {
	what, file, old, new string
	packages             []string
}

func main() {
	only := flag.Int("only", 0, "try one `NUMBER` of the list")
	flag.Parse()
	list, err := read(filepath.Join(".ci", "mutate", "list.tsv"))
	if err != nil {
		fmt.Fprintln(os.Stderr, "mutate:", err)
		os.Exit(2)
	}
	dir, err := os.MkdirTemp("", "mutate")
	if err != nil {
		fmt.Fprintln(os.Stderr, "mutate:", err)
		os.Exit(2)
	}
	defer os.RemoveAll(dir)
	if err := sound(list, *only); err != nil {
		fmt.Fprintln(os.Stderr, "mutate:", err)
		os.RemoveAll(dir)
		os.Exit(2)
	}
	caught, tried := 0, 0
	for i, m := range list {
		if *only > 0 && *only != i+1 {
			continue
		}
		tried++
		by, err := try(dir, m)
		if err != nil {
			fmt.Fprintf(os.Stderr, "mutate: %d, %s: %v\n", i+1, m.what, err)
			os.RemoveAll(dir)
			os.Exit(2)
		}
		if by == "" {
			by = "NOT CAUGHT"
		} else {
			caught++
		}
		fmt.Printf("%2d  %-62s  %-32s  %s\n", i+1, m.what, m.file, by)
	}
	fmt.Printf("%d of %d breakages caught\n", caught, tried)
	if caught < tried {
		os.RemoveAll(dir)
		os.Exit(1)
	}
}

// test runs the tests of a package, "./fit", or some of them, "./fit:Noise|Likelihood".
func test(what string, flags ...string) ([]byte, error) {
	folder, some, _ := strings.Cut(what, ":")
	args := append([]string{"test", "-vet=off", "-run", some}, flags...)
	return exec.Command("go", append(args, folder)...).CombinedOutput()
}

// sound runs the tests without any breakage: one that fails anyway catches nothing.
func sound(list []mutation, only int) error {
	seen := map[string]bool{}
	for i, m := range list {
		for _, p := range m.packages {
			if seen[p] || only > 0 && only != i+1 {
				continue
			}
			seen[p] = true
			if out, err := test(p); err != nil {
				return fmt.Errorf("the tests fail without a breakage: %s", out)
			}
		}
	}
	return nil
}

// read takes the list: what, file, text, replacement, packages, separated by tabs.
func read(name string) ([]mutation, error) {
	text, err := os.ReadFile(name)
	if err != nil {
		return nil, err
	}
	var out []mutation
	for i, line := range strings.Split(string(text), "\n") {
		if line == "" || line[0] == '#' {
			continue
		}
		f := strings.Split(line, "\t")
		if len(f) != 5 {
			return nil, fmt.Errorf("%s:%d: %d fields, want 5", name, i+1, len(f))
		}
		out = append(out, mutation{f[0], f[1], f[2], f[3], strings.Fields(f[4])})
	}
	return out, nil
}

var failed = regexp.MustCompile(`(?m)^\s*--- FAIL: (\S+)`)

// try returns the first test that fails with the breakage, "" if none does.
func try(dir string, m mutation) (string, error) {
	source, err := os.ReadFile(m.file)
	if err != nil {
		return "", err
	}
	if n := strings.Count(string(source), m.old); n != 1 {
		return "", fmt.Errorf("%s holds %q %d times, want once", m.file, m.old, n)
	}
	broken := filepath.Join(dir, "broken.go")
	if err := os.WriteFile(broken, []byte(strings.Replace(string(source), m.old, m.new, 1)), 0o644); err != nil {
		return "", err
	}
	path, err := filepath.Abs(m.file)
	if err != nil {
		return "", err
	}
	text, err := json.Marshal(map[string]map[string]string{"Replace": {path: broken}})
	if err != nil {
		return "", err
	}
	overlay := filepath.Join(dir, "overlay.json")
	if err := os.WriteFile(overlay, text, 0o644); err != nil {
		return "", err
	}
	for _, p := range m.packages {
		folder, _, _ := strings.Cut(p, ":")
		if out, err := exec.Command("go", "build", "-overlay", overlay, folder).CombinedOutput(); err != nil {
			return "", fmt.Errorf("does not compile: %s", out)
		}
		out, err := test(p, "-failfast", "-overlay", overlay)
		if err == nil {
			continue
		}
		by := failed.FindStringSubmatch(string(out))
		if by == nil {
			return "", fmt.Errorf("the tests of %s stopped without a failure: %s", p, out)
		}
		return by[1] + " in " + p, nil
	}
	return "", nil
}
