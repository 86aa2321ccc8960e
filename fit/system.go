package fit

import (
	"fmt"
	"runtime"
	"sync"
)

// system evaluates the predicted limits of all observations at given parameters.
// Rows are evaluated in parallel; each writes its own element only, and sums are
// taken afterwards in row order, so results do not depend on the number of
// processors.
type system struct {
	plan    *Plan
	obs     []Observation
	lay     *layout
	workers int

	at    []float64    // θ of the values below; nil before the first evaluation
	limit []limitValue // per observation
	guess []float64    // start temperatures for the next evaluation
	cells []*Physics
}

// RowError reports an observation whose limit could not be computed.
type RowError struct {
	At    string // file:line
	Fluid string
	Err   error
}

func (e *RowError) Error() string { return e.At + ": " + e.Fluid + ": " + e.Err.Error() }

// Unwrap returns the cause.
func (e *RowError) Unwrap() error { return e.Err }

// rowsPerWorker is the number of rows below which starting another goroutine
// costs more than it saves (a limit takes a few microseconds).
const rowsPerWorker = 128

func newSystem(p *Plan, obs []Observation, l *layout, workers int) *system {
	if workers <= 0 {
		workers = runtime.GOMAXPROCS(0)
	}
	s := &system{plan: p, obs: obs, lay: l, workers: workers,
		limit: make([]limitValue, len(obs)), guess: make([]float64, len(obs)), cells: make([]*Physics, len(l.cells))}
	copy(s.guess, startGuesses(obs))
	return s
}

// startGuesses are the limits at the start values.
func startGuesses(obs []Observation) []float64 {
	g := make([]float64, len(obs))
	for i := range obs {
		g[i] = obs[i].Start
	}
	return g
}

// evaluate brings the predicted limits to θ.
func (s *system) evaluate(theta []float64) error {
	if s.at != nil && equal(s.at, theta) {
		return nil
	}
	s.at = nil
	for c := range s.lay.cells {
		cell := &s.lay.cells[c]
		ph, err := NewPhysics(s.plan.Variant, s.obs[cell.first].Record, s.lay.values(cell, theta))
		if err != nil {
			return fmt.Errorf("parameters of %s: %w", s.obs[cell.first].Record.Key, err)
		}
		s.cells[c] = ph
	}
	n := len(s.obs)
	workers := max(1, min(s.workers, n/rowsPerWorker))
	failed := make([]error, workers)
	var wg sync.WaitGroup
	for w := range workers {
		lo, hi := w*n/workers, (w+1)*n/workers
		run := func() {
			for i := lo; i < hi; i++ {
				o := &s.obs[i]
				l, err := s.cells[s.lay.cellOf[i]].limitOrSpinodal(o.Pressure, o.Target, o.OwnFlux, s.guess[i])
				if err != nil {
					failed[w] = &RowError{o.At(), o.Record.Key, err}
					return
				}
				s.limit[i] = l
			}
		}
		if workers == 1 {
			run()
			break
		}
		wg.Add(1)
		go func() { defer wg.Done(); run() }()
	}
	wg.Wait()
	for _, err := range failed {
		if err != nil {
			return err
		}
	}
	for i := range s.guess {
		s.guess[i] = s.limit[i].T
	}
	s.at = append(s.at, theta...)
	return nil
}

func equal(a, b []float64) bool {
	for i := range a {
		if a[i] != b[i] {
			return false
		}
	}
	return true
}

// residual is measured − predicted − offset of observation i at the θ of the last
// evaluation. A decompression row, which observes a pressure at a given
// temperature, is compared along the line of limits: its reading is the point
// (T, P), and the limit at P is subtracted from T.
func (s *system) residual(i int) float64 {
	return s.obs[i].Temperature - s.limit[i].T - s.lay.offset(i, s.at)
}

// stated is the variance of observation i from its stated uncertainties alone.
func (s *system) stated(i int) float64 {
	o := &s.obs[i]
	u, v := o.UTemperature, o.UPressure*s.limit[i].dTdP
	return float64(u*u) + float64(v*v)
}
