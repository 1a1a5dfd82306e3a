package mesh

import (
	"runtime"
	"sync"
	"sync/atomic"
)

// parallelShare is how many items one task takes. It is fixed, so that tasks are the same for any number of processors.
const parallelShare = 1 << 12

// inParallel calls do for shares of 0 to n that follow each other, on all processors. What the calls write must not overlap, nor
// depend on their order.
func inParallel(n int, do func(from, to int)) {
	tasks := (n + parallelShare - 1) / parallelShare
	workers := min(runtime.GOMAXPROCS(0), tasks)
	if workers < 2 {
		for i := range tasks {
			do(i*parallelShare, min(n, (i+1)*parallelShare))
		}
		return
	}
	var next atomic.Int32
	var wait sync.WaitGroup
	for range workers {
		wait.Go(func() {
			for i := int(next.Add(1)) - 1; i < tasks; i = int(next.Add(1)) - 1 {
				do(i*parallelShare, min(n, (i+1)*parallelShare))
			}
		})
	}
	wait.Wait()
}
