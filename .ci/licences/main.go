// Command licences compares the licences of all modules that a build of this module
// uses, tests and tools included, with list.tsv beside it, so that a new dependency or a
// changed licence is seen. It reads the licence files of the module cache.
//
//	go run ./.ci/licences [-update] from the top folder
package main

import (
	"bytes"
	"crypto/sha256"
	"encoding/json"
	"errors"
	"flag"
	"fmt"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"sort"
	"strings"
)

func main() {
	update := flag.Bool("update", false, "rewrite the list")
	flag.Parse()
	got, err := list()
	if err == nil {
		err = compare(got, filepath.Join(".ci", "licences", "list.tsv"), *update)
	}
	if err != nil {
		fmt.Fprintln(os.Stderr, "licences:", err)
		os.Exit(1)
	}
}

// list is a line for each module: path, licence, digest of the licence's text.
func list() (string, error) {
	out, err := exec.Command("go", "list", "-deps", "-test", "-json=Module", "./...", "tool").Output()
	if err != nil {
		return "", fmt.Errorf("go list: %w", err)
	}
	lines := map[string]string{}
	d := json.NewDecoder(bytes.NewReader(out))
	for {
		var p struct{ Module *struct{ Path, Dir string } }
		if err := d.Decode(&p); errors.Is(err, io.EOF) {
			break
		} else if err != nil {
			return "", err
		}
		if p.Module == nil || p.Module.Path == "limsup" || lines[p.Module.Path] != "" {
			continue
		}
		name, digest, err := licence(p.Module.Dir)
		if err != nil {
			return "", fmt.Errorf("%s: %w", p.Module.Path, err)
		}
		lines[p.Module.Path] = p.Module.Path + "\t" + name + "\t" + digest
	}
	sorted := make([]string, 0, len(lines))
	for _, l := range lines {
		sorted = append(sorted, l)
	}
	sort.Strings(sorted)
	return strings.Join(sorted, "\n") + "\n", nil
}

// kinds are told by sentences that their texts all hold, in this order.
var kinds = []struct{ name, text string }{
	{"Apache-2.0", "apache license version 2.0"},
	{"CC-BY-4.0", "creative commons attribution 4.0 international public license"},
	{"MPL-2.0", "mozilla public license version 2.0"},
	{"FTL or GPL-2.0", "freetype-go software is subject to your choice"},
	{"GPL", "gnu general public license"},
	{"LGPL", "gnu lesser general public license"},
	{"BSD-3-Clause", "nor the names of"},
	{"BSD-3-Clause", "neither the name of"},
	{"BSD-2-Clause", "redistributions in binary form must reproduce"},
	{"ISC", "permission to use, copy, modify, and/or distribute this software"},
	{"MIT", "permission is hereby granted, free of charge"},
}

var blanks = regexp.MustCompile(`[\s,]+`)

// licence names the licence of a module by its licence files.
func licence(dir string) (name, digest string, err error) {
	entries, err := os.ReadDir(dir)
	if err != nil {
		return "", "", err
	}
	h := sha256.New()
	var names []string
	for _, e := range entries {
		upper := strings.ToUpper(e.Name())
		if e.IsDir() || !strings.HasPrefix(upper, "LICEN") && !strings.HasPrefix(upper, "COPYING") && !strings.HasPrefix(upper, "UNLICENSE") || strings.HasSuffix(upper, ".GO") {
			continue
		}
		text, err := os.ReadFile(filepath.Join(dir, e.Name()))
		if err != nil {
			return "", "", err
		}
		h.Write(text)
		plain := blanks.ReplaceAllString(strings.ToLower(string(text)), " ")
		kind := "unknown"
		for _, k := range kinds {
			if strings.Contains(plain, blanks.ReplaceAllString(k.text, " ")) {
				kind = k.name
				break
			}
		}
		if kind == "unknown" && len(text) < 200 {
			continue // where to find it
		}
		if kind == "unknown" {
			return "", "", fmt.Errorf("licence in %s not recognised: add it to the kinds of this program", e.Name())
		}
		names = append(names, kind)
	}
	if len(names) == 0 {
		return "", "", errors.New("no licence file")
	}
	return strings.Join(names, " + "), fmt.Sprintf("%x", h.Sum(nil))[:16], nil
}

// compare holds the list against the file, or rewrites it.
func compare(got, file string, update bool) error {
	if update {
		return os.WriteFile(file, []byte(got), 0o644)
	}
	want, err := os.ReadFile(file)
	if err != nil {
		return err
	}
	known := map[string]bool{}
	for _, l := range strings.Split(strings.TrimSpace(string(want)), "\n") {
		known[l] = true
	}
	var news []string
	for _, l := range strings.Split(strings.TrimSpace(got), "\n") {
		if !known[l] {
			news = append(news, "new or changed: "+l)
		}
		delete(known, l)
	}
	gone := make([]string, 0, len(known))
	for l := range known {
		gone = append(gone, "no longer used: "+l)
	}
	sort.Strings(gone)
	if news = append(news, gone...); len(news) > 0 {
		return fmt.Errorf("%s does not agree; read the licences, then go run ./.ci/licences -update\n%s", file, strings.Join(news, "\n"))
	}
	return nil
}
