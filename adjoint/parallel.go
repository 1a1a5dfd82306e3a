package adjoint

import (
	"runtime"
	"sync"
)

// inParallel runs n independent jobs on the given number of workers (0 = all processors). Each job writes only what is its own.
func inParallel(n, workers int, do func(i int)) {
	if workers <= 0 {
		workers = runtime.GOMAXPROCS(0)
	}
	workers = min(workers, n)
	var wg sync.WaitGroup
	for w := range workers {
		wg.Add(1)
		go func() {
			defer wg.Done()
			for i := w; i < n; i += workers {
				do(i)
			}
		}()
	}
	wg.Wait()
}
