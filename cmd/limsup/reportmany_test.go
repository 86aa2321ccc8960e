package main

import (
	"bytes"
	"encoding/csv"
	"fmt"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"golang.org/x/net/html"

	"limsup/validate/plot"
)

// repeated writes the demonstration rows (synthetic) n times, each time 0.01 K warmer.
func repeated(t *testing.T, n int) string {
	t.Helper()
	text, err := os.ReadFile(demoData)
	if err != nil {
		t.Fatal(err)
	}
	r := csv.NewReader(bytes.NewReader(text))
	r.Comment = '#'
	rows, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	column := -1
	for i, name := range rows[0] {
		if strings.HasPrefix(name, "temperature/") {
			column = i
		}
	}
	var b bytes.Buffer
	w := csv.NewWriter(&b)
	w.Write(rows[0])
	for k := range n {
		for _, row := range rows[1:] {
			T, err := strconv.ParseFloat(row[column], 64)
			if err != nil {
				t.Fatal(err)
			}
			again := append([]string{}, row...)
			again[column] = strconv.FormatFloat(T+0.01*float64(k), 'f', 4, 64)
			w.Write(again)
		}
	}
	w.Flush()
	name := filepath.Join(t.TempDir(), "many.csv")
	if err := os.WriteFile(name, b.Bytes(), 0o600); err != nil {
		t.Fatal(err)
	}
	return name
}

// rowsOfTables counts the rows in the body of each table, by id.
func rowsOfTables(t *testing.T, page string) map[string]int {
	t.Helper()
	doc, err := html.Parse(strings.NewReader(page))
	if err != nil {
		t.Fatal(err)
	}
	count := map[string]int{}
	var visit func(n *html.Node, table string)
	visit = func(n *html.Node, table string) {
		switch n.Data {
		case "table":
			for _, a := range n.Attr {
				if a.Key == "id" {
					table = a.Val
				}
			}
		case "tr":
			if n.Parent.Data == "tbody" {
				count[table]++
			}
		}
		for c := n.FirstChild; c != nil; c = c.NextSibling {
			visit(c, table)
		}
	}
	visit(doc, "")
	return count
}

// TestReportOfManyRows: the page of many rows shows those farthest off, says how many
// of how many they are and what lists all, and stays small.
func TestReportOfManyRows(t *testing.T) {
	var size []int
	for _, n := range []int{20, 60} { // 2240 and 6720 rows
		page, message, code := invoke(t, "report", "--data", repeated(t, n), "--tune", "none")
		if code != 0 {
			t.Fatal(code, message)
		}
		size = append(size, len(page))
		rows := 112 * n
		for _, want := range []string{
			fmt.Sprintf("Residuals of %d of all %d rows: those with the largest standardised residuals", plot.Listed, rows),
			fmt.Sprintf("The other %d rows are not in this table. All rows: limsup validate --format csv, with the same data and model.", rows-plot.Listed),
			fmt.Sprintf("The %d rows that share marks in the figure are not in this table. All rows: limsup validate --format csv, with the same data and model.", rows-plot.Listed),
		} {
			if !strings.Contains(page, want) {
				t.Errorf("the page of %d rows lacks %q", rows, want)
			}
		}
		count := rowsOfTables(t, page)
		// The figures' tables have their lines besides: the one of no error, two ends of
		// the diagonal.
		for id, want := range map[string]int{"row-table": plot.Listed, "residuals-numbers-1": plot.Listed + 1, "residuals-numbers-3": plot.Listed + 1, "prediction-numbers-1": plot.Listed + 2} {
			if count[id] != want {
				t.Errorf("%s of %d rows has %d, want %d", id, rows, count[id], want)
			}
		}
	}
	// A row drawn and listed by itself takes some 4 kB (measured: 84 MB for 20 000).
	if grown := size[1] - size[0]; grown > 4480*100 {
		t.Errorf("the page grows by %d bytes for 4480 rows", grown)
	}
}
