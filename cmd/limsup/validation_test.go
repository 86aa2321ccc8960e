package main

import (
	"context"
	"encoding/json"
	"errors"
	"io"
	"math"
	"os"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"testing"
)

// grid is a small comparison: two equations that come close, one that is set aside.
var grid = []string{"compare", "--data", published, "--variant", "soave", "--variant", "redlich-kwong", "--variant", "van-der-waals; tune=none"}

// quick is one without a variant that searches long, and nested adds an outer loop.
var quick = []string{"compare", "--data", published, "--variant", "soave", "--variant", "berthelot", "--variant", "van-der-waals; tune=none"}
var nested = []string{"compare", "--data", published, "--variant", "soave", "--variant", "berthelot", "--variant", "redlich-kwong; tune=none", "--nested", "--folds", "5", "--keep", "50%"}

// long is a number in full precision. Its last digits depend on the steps of the search.
var long = regexp.MustCompile(`-?\d+\.\d{6,}(e[-+]?\d+)?|-?\d(\.\d+)?e-\d+`)

// goldenWithin compares text with a file under testdata, numbers in full precision
// within a tolerance and all else exactly, spaces and rules of tables apart.
func goldenWithin(t *testing.T, name, got string, tol float64) {
	t.Helper()
	file := filepath.Join("testdata", name)
	want, err := os.ReadFile(file)
	if *update || err != nil {
		golden(t, name, got)
		return
	}
	plain := func(s string) string {
		return strings.Join(strings.Fields(long.ReplaceAllString(rules.ReplaceAllString(s, "-"), "#")), " ")
	}
	if plain(got) != plain(string(want)) {
		golden(t, name, got)
		return
	}
	g, w := long.FindAllString(got, -1), long.FindAllString(string(want), -1)
	for i := range g {
		x, err1 := strconv.ParseFloat(g[i], 64)
		y, err2 := strconv.ParseFloat(w[i], 64)
		if err1 != nil || err2 != nil || !(math.Abs(x-y) <= tol*math.Max(1, math.Abs(y))) {
			t.Errorf("%s: %s, want %s within %g", file, g[i], w[i], tol)
		}
	}
}

// rules are the lines below the headers of tables, whose length follows the cells.
var rules = regexp.MustCompile("[-─]{3,}")

// searchTolerance is what the end of a search is known to, relative or in kelvin: the
// residuals of left-out rows agree with those of another search within 1e-6 K.
const searchTolerance = 1e-6

// TestGoldenValidation holds every kind of table of validate and compare.
func TestGoldenValidation(t *testing.T) {
	model := filepath.Join(t.TempDir(), "lab.json")
	if _, message, code := invoke(t, "calibrate", "--data", demo, "--out", model); code != 0 {
		t.Fatal(message)
	}
	for _, tt := range []struct {
		name    string
		columns string
		args    []string
	}{
		{"validate-80", "80", []string{"validate", "--data", published}},
		{"validate-160", "160", []string{"validate", "--data", demo, "--tune", "prefactor", "--tune", "offset/method", "--folds", "10"}},
		{"validate-model-80", "80", []string{"validate", "--data", published, "--model", model}},
		{"validate-own-80", "80", []string{"validate", "--data", demo, "--model", model}},
		{"validate-untuned-80", "80", []string{"validate", "--data", published, "--tune", "none", "--equation", "peng-robinson"}},
		{"validate.json", "80", []string{"validate", "--data", published, "--format", "json"}},
		{"validate.csv", "80", []string{"validate", "--data", published, "--format", "csv"}},
		{"validate.md", "80", []string{"validate", "--data", published, "--format", "markdown"}},
		{"compare-80", "80", grid},
		{"compare-200", "200", quick},
		{"compare-nested-100", "100", nested},
		{"compare.json", "80", append([]string{"--format", "json"}, nested...)},
		{"compare.csv", "80", append([]string{"--format", "csv"}, quick...)},
		{"compare.md", "80", append([]string{"--format", "markdown"}, quick...)},
		{"compare-demo-160", "160", []string{"compare", "--data", demo, "--variant", "soave", "--variant", "properties=correlation", "--variant", "limit=spinodal", "--variant", "soave; tune=prefactor; tune=offset/method"}},
	} {
		t.Run(tt.name, func(t *testing.T) {
			t.Setenv("COLUMNS", tt.columns)
			out, message, code := invoke(t, tt.args...)
			if code != 0 || message != "" {
				t.Errorf("status %d: %s", code, message)
			}
			goldenWithin(t, tt.name+".golden", out, searchTolerance)
			if strings.HasSuffix(tt.name, ".json") && !json.Valid([]byte(out)) {
				t.Error("not JSON")
			}
		})
	}
}

// TestValidationKeys reads the fixed keys of both commands.
func TestValidationKeys(t *testing.T) {
	out, _, _ := invoke(t, "validate", "--data", published, "--format", "json")
	var v struct {
		Residuals []struct {
			File, Fluid, Method                                               string
			Line                                                              int
			P, Measured, Predicted, Residual, Standardised, Leverage, LeftOut *float64
		}
		Raw []map[string]any `json:"-"`
	}
	var raw map[string]any
	if err := json.Unmarshal([]byte(out), &raw); err != nil {
		t.Fatal(err)
	}
	if err := json.Unmarshal([]byte(out), &v); err != nil {
		t.Fatal(err)
	}
	has := func(what any, keys ...string) {
		t.Helper()
		m, ok := what.(map[string]any)
		for _, k := range keys {
			if _, there := m[k]; !ok || !there {
				t.Errorf("no key %q", k)
			}
		}
	}
	first := func(list any) any {
		t.Helper()
		l, ok := list.([]any)
		if !ok || len(l) == 0 {
			t.Fatalf("not a list: %v", list)
		}
		return l[0]
	}
	has(first(raw["residuals"]), "file", "line", "fluid", "method", "pressure_Pa", "measured_K", "predicted_K", "residual_K", "standardised", "leverage", "left_out_K")
	has(first(raw["groups"]), "by", "group", "n", "bias_K", "rmse_K", "worst_K")
	has(raw["cross_validation"], "folds", "rmse_K", "untuned_rmse_K", "difference_K", "difference_se_K")
	has(first(raw["coverage"]), "nominal", "observed")
	row := first(raw["residuals"]).(map[string]any)
	if d := row["measured_K"].(float64) - row["predicted_K"].(float64) - row["residual_K"].(float64); math.Abs(d) > 1e-10 {
		t.Errorf("measured − predicted − residual = %g K", d)
	}

	out, _, _ = invoke(t, append([]string{"--format", "json"}, quick...)...)
	raw = nil
	if err := json.Unmarshal([]byte(out), &raw); err != nil {
		t.Fatal(err)
	}
	has(raw, "rows_used", "variants", "excluded")
	has(first(raw["variants"]), "variant", "parameters", "rmse_K", "cv_rmse_K", "cv_se_K", "aicc", "bic", "coverage_95", "tuned")
}

func TestBadValidationCalls(t *testing.T) {
	for _, tt := range []struct {
		code int
		says string
		args []string
	}{
		{2, "needs --data", []string{"validate"}},
		{2, "--model and --tune exclude each other", []string{"validate", "--data", published, "--model", "m.json", "--tune", "slope"}},
		{2, "--model and --folds exclude each other", []string{"validate", "--data", published, "--model", "m.json", "--folds", "rows"}},
		{2, "--tune none and --noise exclude each other", []string{"validate", "--data", published, "--tune", "none", "--noise", "student"}},
		{2, "--model and --equation exclude each other", []string{"validate", "--data", published, "--model", "m.json", "--equation", "soave"}},
		{2, "no such file", []string{"validate", "--data", published, "--model", "absent.json"}},
		{2, "folds \"weekday\"", []string{"validate", "--data", published, "--folds", "weekday"}},
		{2, "predicts none of the rows", []string{"validate", "--data", published, "--tune", "none", "--equation", "van-der-waals"}},
		{2, "needs --data", []string{"compare"}},
		{2, "--variant \"soav\"", []string{"compare", "--data", published, "--variant", "soav"}},
		{2, "joined by semicolons", []string{"compare", "--data", published, "--variant", "colour=red"}},
		{2, "--keep", []string{"compare", "--data", published, "--keep", "most"}},
		{2, "a share from 0 to 1", []string{"compare", "--data", published, "--keep", "150%"}},
		{2, "folds \"pressure\"", append([]string{"--folds", "pressure"}, grid...)},
		{2, "one or more that can predict", []string{"compare", "--data", published, "--variant", "van-der-waals; tune=none"}},
	} {
		_, message, code := invoke(t, tt.args...)
		if code != tt.code || !strings.Contains(message, tt.says) {
			t.Errorf("limsup %q\n  status %d, %q\n  want %d, …%s…", tt.args, code, message, tt.code, tt.says)
		}
	}
}

// TestInterruptedComparison stops before the first variant: what is finished (the
// published rules) is printed, the rest is named, and the status tells of it.
func TestInterruptedComparison(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	var out strings.Builder
	err := run(ctx, &out, io.Discard, append([]string{"limsup"}, grid...))
	if !errors.Is(err, context.Canceled) || status(err) != statusInternal {
		t.Errorf("%v, status %d", err, status(err))
	}
	for _, want := range []string{"Interrupted before these were finished: soave; soave + threshold; redlich-kwong + threshold.", "linear rule"} {
		if !strings.Contains(strings.Join(strings.Fields(out.String()), " "), want) {
			t.Errorf("does not say %q:\n%s", want, out.String())
		}
	}
}
