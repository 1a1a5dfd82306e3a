package sparse

import "sync"

// recycler hands update matrices that are done with on to later tasks, so that a factorisation touches little more memory
// than it holds at once. Which memory a task gets has no influence on results.
type recycler struct {
	mutex sync.Mutex
	free  [][]float64
}

// roomiest is by how much a recycled matrix may be too large: more would starve the large ones.
const roomiest = 2

// take returns n zeros.
func (r *recycler) take(n int) []float64 {
	r.mutex.Lock()
	best := -1
	for k, m := range r.free {
		if c := cap(m); c >= n && c <= roomiest*n && (best < 0 || c < cap(r.free[best])) {
			best = k
		}
	}
	var out []float64
	if best >= 0 {
		last := len(r.free) - 1
		out = r.free[best][:n]
		r.free[best], r.free[last] = r.free[last], nil
		r.free = r.free[:last]
	}
	r.mutex.Unlock()
	if best < 0 {
		out = make([]float64, n)
		preferHugePages(out)
		return out
	}
	clear(out)
	return out
}

func (r *recycler) give(m []float64) {
	r.mutex.Lock()
	r.free = append(r.free, m)
	r.mutex.Unlock()
}
