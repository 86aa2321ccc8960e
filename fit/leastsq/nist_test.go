package leastsq

import (
	"fmt"
	"math"
	"os"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// strd is one data set with its certified answer.
type strd struct {
	name         string
	starts       [2][]float64
	certified    []float64
	deviation    []float64
	rss          float64
	observations int
	y            []float64
	x            [][]float64
	text         [][]string // the rows as printed
}

var parameterLine = regexp.MustCompile(`^\s*b\d+\s*=\s+(\S+)\s+(\S+)\s+(\S+)\s+(\S+)\s*$`)

func readStrd(t testing.TB, path string) *strd {
	t.Helper()
	raw, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	s := &strd{name: strings.TrimSuffix(filepath.Base(path), ".dat")}
	number := func(text string) float64 {
		v, err := strconv.ParseFloat(text, 64)
		if err != nil {
			t.Fatalf("%s: %v", s.name, err)
		}
		return v
	}
	inData := false
	for line := range strings.Lines(string(raw)) {
		line = strings.TrimRight(line, " \r\n")
		switch m := parameterLine.FindStringSubmatch(line); {
		case m != nil:
			s.starts[0] = append(s.starts[0], number(m[1]))
			s.starts[1] = append(s.starts[1], number(m[2]))
			s.certified = append(s.certified, number(m[3]))
			s.deviation = append(s.deviation, number(m[4]))
		case strings.HasPrefix(line, "Residual Sum of Squares:"):
			s.rss = number(strings.TrimSpace(strings.TrimPrefix(line, "Residual Sum of Squares:")))
		case strings.HasPrefix(line, "Number of Observations:"):
			s.observations = int(number(strings.TrimSpace(strings.TrimPrefix(line, "Number of Observations:"))))
		case strings.HasPrefix(line, "Data:") && len(s.certified) > 0:
			inData = true
		case inData && strings.TrimSpace(line) != "":
			var row []float64
			for _, f := range strings.Fields(line) {
				row = append(row, number(f))
			}
			if s.name == "Nelson" {
				row[0] = math.Log(row[0])
			}
			s.text = append(s.text, strings.Fields(line))
			s.y = append(s.y, row[0])
			s.x = append(s.x, row[1:])
		}
	}
	if len(s.y) != s.observations || len(s.y) == 0 || len(s.certified) == 0 || s.rss == 0 {
		t.Fatalf("%s: %d rows read of %d, %d parameters", s.name, len(s.y), s.observations, len(s.certified))
	}
	return s
}

// problem of a data set from start k, 0 or 1.
func (s *strd) problem(k int) Problem {
	model := nistModels[s.name]
	p := Problem{Size: len(s.y)}
	for i, v := range s.starts[k] {
		p.Params = append(p.Params, Param{Name: fmt.Sprintf("b%d", i+1), Start: v})
	}
	b := make([]num, len(p.Params))
	at := func(theta []float64, along int) {
		for i, v := range theta {
			b[i] = c(v)
		}
		if along >= 0 {
			b[along].Emag = 1
		}
	}
	p.Residuals = func(dst, theta []float64) error {
		at(theta, -1)
		for i, x := range s.x {
			dst[i] = model(b, x).Real - s.y[i]
		}
		return nil
	}
	if strings.HasPrefix(s.name, "Lanczos") {
		p.Residuals = lanczosResiduals(s.text)
	}
	p.Jacobian = func(dst *mat.Dense, theta []float64) error {
		for j := range theta {
			at(theta, j)
			for i, x := range s.x {
				dst.Set(i, j, model(b, x).Emag)
			}
		}
		return nil
	}
	return p
}

// digits is the log relative error: the number of agreeing decimal digits, 15 at most.
func digits(got, want float64) float64 {
	if got == want {
		return 15
	}
	return math.Max(0, math.Min(15, -math.Log10(math.Abs(got-want)/math.Abs(want))))
}

func TestStRD(t *testing.T) {
	paths, err := filepath.Glob("testdata/nist-strd/*.dat")
	if err != nil || len(paths) != 27 || len(nistModels) != 27 {
		t.Fatalf("%d files, %d models, %v; want 27 of each", len(paths), len(nistModels), err)
	}
	for _, path := range paths {
		s := readStrd(t, path)
		for k := range s.starts {
			t.Run(fmt.Sprintf("%s/start%d", s.name, k+1), func(t *testing.T) {
				r, err := Solve(s.problem(k), Settings{})
				if err != nil {
					t.Fatal(err)
				}
				parameters, deviations := 15.0, 15.0
				for i, v := range r.X {
					parameters = math.Min(parameters, digits(v, s.certified[i]))
					deviations = math.Min(deviations, digits(r.StdErr[i], s.deviation[i]))
				}
				sum := digits(2*r.Value, s.rss)
				t.Logf("digits: parameters %.1f, standard deviations %.1f, sum of squares %.1f; %d iterations, %d evaluations, %s; %s",
					parameters, deviations, sum, r.Iterations, r.Evaluations, r.Method, r.Reason)
				if parameters < 6 || deviations < 4 || !r.Converged {
					t.Errorf("parameters %v\nwant       %v\ndeviations %v\nwant       %v\n%+v", r.X, s.certified, r.StdErr, s.deviation, r.Warnings)
				}
			})
		}
	}
}
