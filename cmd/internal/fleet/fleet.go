// Package fleet runs many units through one pipeline: bounded workers, results
// in fixed slots, so that the outcome does not depend on who finished first.
package fleet

import (
	"context"
	"fmt"
	"runtime"
	"sync"
)

// Each calls do for every index below n, on at most jobs goroutines (all cores
// where jobs is not positive), and returns each call's error in its slot. A
// panic in do becomes that slot's error: one unit's trouble stays its own. When
// ctx ends, the indexes not yet begun get its error.
func Each(ctx context.Context, n, jobs int, do func(ctx context.Context, i int) error) []error {
	if jobs <= 0 {
		jobs = runtime.GOMAXPROCS(0)
	}
	errs := make([]error, n)
	next := make(chan int)
	var wg sync.WaitGroup
	for range min(jobs, n) {
		wg.Go(func() {
			for i := range next {
				errs[i] = guarded(ctx, i, do)
			}
		})
	}
	for i := range n {
		next <- i
	}
	close(next)
	wg.Wait()
	return errs
}

func guarded(ctx context.Context, i int, do func(context.Context, int) error) (err error) {
	if err := ctx.Err(); err != nil {
		return err
	}
	defer func() {
		if p := recover(); p != nil {
			err = fmt.Errorf("the program met a case that it does not handle (%v); please report it with the file", p)
		}
	}()
	return do(ctx, i)
}
