package jobs_test

import (
	"context"
	"errors"
	"fmt"
	"runtime"
	"slices"
	"sync/atomic"
	"testing"

	"limsup/fit/jobs"
)

func ExampleRun() {
	squares := make([]int, 5)
	err := jobs.Run(context.Background(), len(squares), 0, func(k int) { squares[k] = k * k }, nil)
	fmt.Println(squares, err)
	// Output: [0 1 4 9 16] <nil>
}

// TestRun does every job once, with no more at a time than workers, and counts in order.
func TestRun(t *testing.T) {
	for _, tt := range []struct{ n, workers int }{{0, 3}, {1, 3}, {50, 1}, {50, 3}, {3, 50}, {50, 0}} {
		times := make([]int, tt.n)
		var now, most atomic.Int64
		var counts []int
		err := jobs.Run(context.Background(), tt.n, tt.workers, func(k int) {
			at := now.Add(1)
			for m := most.Load(); at > m && !most.CompareAndSwap(m, at); m = most.Load() {
			}
			for range 100 {
				runtime.Gosched() // lets others begin, if there are any
			}
			times[k]++
			now.Add(-1)
		}, func(count int) { counts = append(counts, count) })
		if err != nil {
			t.Errorf("%+v: %v", tt, err)
		}
		if slices.ContainsFunc(times, func(n int) bool { return n != 1 }) {
			t.Errorf("%+v: jobs were done %v times, want each once", tt, times)
		}
		if tt.workers > 0 && most.Load() > int64(tt.workers) {
			t.Errorf("%+v: %d at a time", tt, most.Load())
		}
		if len(counts) != tt.n || !slices.IsSorted(counts) || tt.n > 0 && counts[tt.n-1] != tt.n {
			t.Errorf("%+v: counted %v", tt, counts)
		}
	}
}

// TestStopped begins no job after the end of the context. With one worker that job 2 keeps
// from the next, job 3 may have been handed out already, and no further one.
func TestStopped(t *testing.T) {
	ctx, stop := context.WithCancel(context.Background())
	var done atomic.Int64
	err := jobs.Run(ctx, 100, 1, func(k int) {
		if k == 2 {
			stop()
		}
		done.Add(1)
	}, nil)
	if !errors.Is(err, context.Canceled) {
		t.Errorf("error %v, want that of the context", err)
	}
	if n := done.Load(); n < 3 || n > 4 {
		t.Errorf("%d jobs done, want 3 or 4", n)
	}
}
