package main

import (
	"encoding/csv"
	"fmt"
	"os"
	"path/filepath"
	"strings"
)

const (
	coolProp  = "CoolProp (commit ea27c6394887)"
	chemicals = "the Python library chemicals (commit 82faef900dcf)"
)

// rows reads a CSV file as one map per row.
func rows(dir, name string) ([]map[string]string, error) {
	f, err := os.Open(filepath.Join(dir, name))
	if err != nil {
		return nil, err
	}
	defer f.Close()
	all, err := csv.NewReader(f).ReadAll()
	if err != nil {
		return nil, fmt.Errorf("%s: %w", name, err)
	}
	var out []map[string]string
	for _, rec := range all[1:] {
		m := map[string]string{}
		for i, h := range all[0] {
			m[h] = rec[i]
		}
		out = append(out, m)
	}
	return out, nil
}

// citations expands the BibTeX keys of the tables.
type citations map[string]string

func readCitations(dir string) (citations, error) {
	rs, err := rows(dir, "sources.csv")
	if err != nil {
		return nil, err
	}
	c := citations{}
	for _, r := range rs {
		// Slips of the carrier in the names of journals are mended here.
		journal := strings.NewReplacer("Therrmophys.", "Thermophys.", "Phys. Chem Ref.", "Phys. Chem. Ref.").Replace(r["journal_or_book"])
		if strings.HasSuffix(journal, "Thermophys") {
			journal += "."
		}
		parts := []string{authors(r["authors"])}
		vol, pages, _ := strings.Cut(r["volume_pages"], " ")
		year, status, _ := strings.Cut(r["year"], ", ")
		place := strings.TrimSpace(journal + " " + vol)
		place = strings.TrimSpace(fmt.Sprintf("%s (%s) %s", place, year, strings.ReplaceAll(strings.ReplaceAll(pages, " -- ", "-"), "--", "-")))
		if journal == "" {
			parts[0] += " " + place
		} else {
			parts = append(parts, place)
		}
		if status != "" {
			parts = append(parts, strings.ToLower(status)+" when the carrier recorded it")
		}
		if r["doi"] != "" {
			parts = append(parts, "doi:"+r["doi"])
		}
		c[r["bibtex_key"]] = strings.Join(parts, ", ")
	}
	return c, nil
}

// authors turns a BibTeX list into "A, B and C", first names first.
func authors(s string) string {
	list := strings.Split(s, " and ")
	for i, a := range list {
		if last, first, ok := strings.Cut(a, ", "); ok {
			list[i] = first + " " + last
		}
	}
	n := len(list)
	if n == 1 {
		return list[0]
	}
	return strings.Join(list[:n-1], ", ") + " and " + list[n-1]
}

// expand turns a source of the tables into a citation with its carrier.
func (c citations) expand(s string) (string, error) {
	carrier, rest, ok := strings.Cut(s, ": ")
	if before, after, computed := strings.Cut(s, " and chemicals: "); computed {
		if before != "computed from adopted Tc, Pc" {
			return "", fmt.Errorf("source %q: unknown wording", s)
		}
		return "computed from the critical point and the vapour pressure, " + after + ", by way of " + chemicals, nil
	}
	switch {
	case ok && carrier == "CoolProp" && strings.HasPrefix(rest, "EOS "):
		keys, suffix, saturation := strings.Cut(strings.TrimPrefix(rest, "EOS "), " (")
		var cited []string
		for _, k := range strings.Split(keys, ",") {
			if c[k] == "" {
				return "", fmt.Errorf("source %q: no citation for %s", s, k)
			}
			cited = append(cited, c[k])
		}
		out := strings.Join(cited, "; ")
		if saturation {
			if suffix != "saturation superancillary)" {
				return "", fmt.Errorf("source %q: unknown wording", s)
			}
			return out + "; saturation expansion of this equation of state in " + coolProp, nil
		}
		return out + "; equation of state in " + coolProp, nil
	case ok && carrier == "CoolProp":
		fit, fromChemicals := strings.CutSuffix(rest, "; range from chemicals")
		out := fit + "; by way of " + coolProp
		if fromChemicals {
			out += ", range by way of " + chemicals
		}
		return out, nil
	case ok && carrier == "chemicals" && rest == "heos_constants":
		return "table heos_constants of " + chemicals + ", origin not stated there", nil
	case ok && carrier == "chemicals":
		return rest + "; by way of " + chemicals, nil
	}
	return "", fmt.Errorf("source %q: unknown carrier", s)
}
