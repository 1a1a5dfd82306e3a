package sparse

import (
	"runtime"
	"sync"
	"sync/atomic"
)

// workerCount resolves Options.Workers.
func workerCount(workers int) int {
	if workers > 0 {
		return workers
	}
	return runtime.GOMAXPROCS(0)
}

// runFixed calls do(0..count-1), each once, on up to workers goroutines, and returns when all are done.
func runFixed(workers, count int, do func(k int)) {
	workers = min(workers, count)
	if workers <= 1 {
		for k := range count {
			do(k)
		}
		return
	}
	var next atomic.Int64
	var group sync.WaitGroup
	group.Add(workers)
	work := func() {
		defer group.Done()
		for k := int(next.Add(1)) - 1; k < count; k = int(next.Add(1)) - 1 {
			do(k)
		}
	}
	for range workers - 1 {
		go work()
	}
	work()
	group.Wait()
}

// crew runs the tasks of a forest, children before parents, on a fixed number of workers. A task may share loops with
// workers that have nothing else to do. Which worker does what has no influence on results.
type crew struct {
	mutex   sync.Mutex
	wake    *sync.Cond
	parent  []int32
	pending []int32 // children of each task that are not done
	ready   []int32
	left    int
	loops   []*sharedLoop
	workers int
	do      func(w *worker, task int32)
}

type sharedLoop struct {
	do                func(w *worker, k int)
	next, count, done int
}

// run works off all tasks; starts lists those without children, the first to be started last in the list.
func (c *crew) run(starts []int32, free func() *worker, release func(*worker)) {
	c.wake = sync.NewCond(&c.mutex)
	c.ready = append(c.ready, starts...)
	c.left = len(c.parent)
	var group sync.WaitGroup
	for range c.workers - 1 {
		group.Add(1)
		go func() {
			defer group.Done()
			w := free()
			c.work(w)
			release(w)
		}()
	}
	w := free()
	c.work(w)
	release(w)
	group.Wait()
}

func (c *crew) work(w *worker) {
	c.mutex.Lock()
	defer c.mutex.Unlock()
	for c.left > 0 {
		if c.help(w) {
			continue
		}
		if len(c.ready) == 0 {
			c.wake.Wait()
			continue
		}
		t := c.ready[len(c.ready)-1]
		c.ready = c.ready[:len(c.ready)-1]
		c.mutex.Unlock()
		c.do(w, t)
		c.mutex.Lock()
		c.left--
		if p := c.parent[t]; p >= 0 {
			if c.pending[p]--; c.pending[p] == 0 {
				c.ready = append(c.ready, p)
				c.wake.Signal()
			}
		}
		if c.left == 0 {
			c.wake.Broadcast()
		}
	}
}

// help takes one step of a shared loop; the mutex is held on entry and return.
func (c *crew) help(w *worker) bool {
	for _, l := range c.loops {
		if l.next < l.count {
			c.step(w, l)
			return true
		}
	}
	return false
}

func (c *crew) step(w *worker, l *sharedLoop) {
	k := l.next
	l.next++
	c.mutex.Unlock()
	l.do(w, k)
	c.mutex.Lock()
	if l.done++; l.done == l.count {
		c.wake.Broadcast()
	}
}

// share runs do(0..count-1) with the help of idle workers and returns when all are done.
func (c *crew) share(w *worker, count int, do func(w *worker, k int)) {
	if c.workers == 1 || count <= 1 {
		for k := range count {
			do(w, k)
		}
		return
	}
	l := &sharedLoop{do: do, count: count}
	c.mutex.Lock()
	defer c.mutex.Unlock()
	c.loops = append(c.loops, l)
	c.wake.Broadcast()
	for l.next < l.count {
		c.step(w, l)
	}
	for l.done < l.count {
		c.wake.Wait()
	}
	for k, other := range c.loops {
		if other == l {
			c.loops = append(c.loops[:k], c.loops[k+1:]...)
			break
		}
	}
}
