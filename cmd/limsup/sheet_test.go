package main

import (
	"encoding/csv"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"
)

// workbook writes the demonstration data into the named sheets of a new workbook.
func workbook(t *testing.T, sheets ...string) string {
	t.Helper()
	text, err := os.Open(demo)
	if err != nil {
		t.Fatal(err)
	}
	defer text.Close()
	r := csv.NewReader(text)
	r.Comment = '#'
	records, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	f := excelize.NewFile()
	defer f.Close()
	for _, s := range sheets {
		if _, err := f.NewSheet(s); err != nil {
			t.Fatal(err)
		}
		for i, record := range records {
			row := make([]any, len(record))
			for j, field := range record {
				if v, err := strconv.ParseFloat(field, 64); err == nil {
					row[j] = v
				} else if field != "" {
					row[j] = field
				}
			}
			if err := f.SetSheetRow(s, "A"+strconv.Itoa(i+3), &row); err != nil { // as in the text file, after two comments
				t.Fatal(err)
			}
		}
	}
	name := filepath.Join(t.TempDir(), "drops.xlsx")
	if err := f.SaveAs(name); err != nil {
		t.Fatal(err)
	}
	return name
}

// A calibration on a workbook is that on the same numbers as text.
func TestCalibrateOnWorkbook(t *testing.T) {
	args := []string{"calibrate", "--folds", "none", "--rows", "--format", "csv", "--data"}
	want, _, _ := invoke(t, append(args, demo)...)
	got, message, code := invoke(t, append(args, workbook(t, "drops"))...)
	if got != want || code != 0 {
		t.Errorf("status %d, %s: %s", code, message, firstDifference(got, want))
	}
}

func TestSheetFlag(t *testing.T) {
	name := workbook(t, "monday", "tuesday")
	for _, tt := range []struct {
		code int
		says string
		args []string
	}{
		{0, "112 rows", []string{"--sheet", "Tuesday"}},
		{2, `drops.xlsx: 2 sheets have a header of measurements: "monday", "tuesday"; expected the name of the one to read`, nil},
		{2, `drops.xlsx: there is no sheet "wednesday"; expected one of the sheets "Sheet1", "monday", "tuesday"`, []string{"--sheet", "wednesday"}},
	} {
		out, message, code := invoke(t, append([]string{"check", "--data", name}, tt.args...)...)
		if code != tt.code || !strings.Contains(out+message, tt.says) {
			t.Errorf("%q: status %d, %s", tt.args, code, out+message)
		}
	}
	if _, message, code := invoke(t, "check", "--data", demo, "--sheet", "x"); code != 2 || message != "--sheet goes with a workbook, and no file of --data ends in .xlsx or .xlsm" {
		t.Errorf("status %d, %s", code, message)
	}
}
