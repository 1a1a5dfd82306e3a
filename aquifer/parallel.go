package aquifer

import (
	"context"
	"runtime"
	"sync"
)

// inParallel runs n independent jobs on the given number of workers (0 = all processors). Each job writes only what is its own, so
// the outcome does not depend on the number. The error returned is that of the lowest job that failed.
func inParallel(ctx context.Context, n, workers int, do func(ctx context.Context, i int) error) error {
	if workers <= 0 {
		workers = runtime.GOMAXPROCS(0)
	}
	workers = min(workers, n)
	errs := make([]error, n)
	next := make(chan int)
	var wg sync.WaitGroup
	for range workers {
		wg.Add(1)
		go func() {
			defer wg.Done()
			for i := range next {
				if errs[i] = ctx.Err(); errs[i] == nil {
					errs[i] = do(ctx, i)
				}
			}
		}()
	}
	for i := range n {
		next <- i
	}
	close(next)
	wg.Wait()
	for _, err := range errs {
		if err != nil {
			return err
		}
	}
	return nil
}
