package main

import (
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// modelOfTests is a model file whose calibration never took place.
const modelOfTests = "../../fit/modelfile/testdata/synthetic.json"

func TestExport(t *testing.T) {
	file := filepath.Join(t.TempDir(), "lab.c")
	if out, message, code := invoke(t, "export", "--model", modelOfTests, "--as", "c", "--out", file, "--prefix", "lab_"); code != statusDone || out != "" {
		t.Fatalf("status %d, %q, %q", code, message, out)
	}
	source, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{
		"int lab_limit_temperature(int fluid, double pressure, double *temperature, double *uncertainty);",
		"fluid-a, fluid-b", "synthetic.json", "0123456789abcdef0123456789abcdef0123456789abcdef0123456789abcdef",
		"no measurable gain", "not a safe operating limit", "101325",
	} {
		if !strings.Contains(strings.ReplaceAll(string(source), "\n// ", " "), want) {
			t.Errorf("the source does not contain %q", want)
		}
	}
	out, message, code := invoke(t, "export", "--model", modelOfTests, "--as", "table", "--fluid", "fluid-b", "--from", "0.2 MPa", "--to", "1 MPa", "--tolerance", "100 mK")
	if code != statusDone || !strings.Contains(out, "asked for: 0.1 K") || !strings.Contains(out, "\nfluid-b,200000,") || strings.Contains(out, "\nfluid-a,") {
		t.Errorf("status %d, %q\n%s", code, message, out)
	}
}

func TestExportBadCalls(t *testing.T) {
	for _, tt := range []struct {
		args []string
		code int
		want string
	}{
		{nil, statusInput, `--as ""`},
		{[]string{"--as", "fortan", "--model", modelOfTests}, statusInput, "did you mean fortran?"},
		{[]string{"--as", "c"}, statusInput, "needs --fluid"},
		{[]string{"--as", "c", "--model", modelOfTests, "extra"}, statusInput, "left over"},
		{[]string{"--as", "c", "--model", modelOfTests, "--from", "1 MPa"}, statusInput, "both --from and --to"},
		{[]string{"--as", "c", "--model", modelOfTests, "--from", "1 MPa", "--to", "1 MPa"}, statusInput, "the lower pressure first"},
		{[]string{"--as", "c", "--model", modelOfTests, "--from", "1 MPa", "--to", "300 K"}, statusInput, "--to"},
		{[]string{"--as", "table", "--model", modelOfTests, "--tolerance", "0.1"}, statusInput, "the unit K or mK"},
		{[]string{"--as", "table", "--model", modelOfTests, "--tolerance", "0 K"}, statusInput, "more than 0 K"},
		{[]string{"--as", "c", "--model", modelOfTests, "--prefix", "Lab"}, statusInput, `prefix "Lab"`},
		{[]string{"--as", "c", "--model", modelOfTests, "--fluid", "fluid-c"}, statusInput, "fluid-c"},
		{[]string{"--as", "c", "--surface-tension", "corresponding-states", "--fluid", "carbon-dioxide"}, statusInput, "carbon-dioxide"},
		{[]string{"--as", "series", "--equation", "van-der-waals", "--fluid", "n-pentane"}, statusNoAnswer, "no kinetic limit"},
	} {
		out, message, code := invoke(t, append([]string{"export"}, tt.args...)...)
		if code != tt.code || !strings.Contains(message, tt.want) || out != "" {
			t.Errorf("limsup export %q\nstatus %d, %q, %q\nwant %d, …%s…", tt.args, code, message, out, tt.code, tt.want)
		}
	}
}
