// Package jobs does numbered jobs on several processors.
//
// Each job writes what it finds under its own number, so that the result does not depend
// on the number of workers; this package adds nothing up and keeps no results.
package jobs

import (
	"context"
	"runtime"
	"sync"
)

// Run does the jobs 0 to n − 1, at most so many at a time as there are workers, or as
// there are processors with workers ≤ 0. It returns when all that were begun are done.
// After each of them done, unless nil, is told how many are done by then, one call at a
// time.
//
// Errors: that of ctx, after whose end no further job is begun.
func Run(ctx context.Context, n, workers int, job func(k int), done func(count int)) error {
	if workers <= 0 {
		workers = runtime.GOMAXPROCS(0)
	}
	next := make(chan int)
	var wg sync.WaitGroup
	var mu sync.Mutex
	count := 0
	for range min(n, workers) {
		wg.Add(1)
		go func() {
			defer wg.Done()
			for k := range next {
				job(k)
				if done != nil {
					mu.Lock()
					count++
					done(count)
					mu.Unlock()
				}
			}
		}()
	}
	var stopped error
	for k := range n {
		if stopped = ctx.Err(); stopped != nil {
			break
		}
		next <- k
	}
	close(next)
	wg.Wait()
	return stopped
}
