package sparse

import "testing"

// What is handed on is blank and of the wanted length, and never more than twice as large.
func TestRecyclerGivesZeros(t *testing.T) {
	var r recycler
	dirty := func(n int) []float64 {
		m := r.take(n)
		for i := range m {
			if m[i] != 0 {
				t.Fatalf("entry %d of %d is %v", i, n, m[i])
			}
			m[i] = 7
		}
		return m
	}
	large := dirty(1000)
	r.give(large)
	r.give(dirty(90))
	if m := dirty(600); len(m) != 600 || &m[0] != &large[0] {
		t.Errorf("600 entries: %d, and not those that 1,000 left", len(m))
	}
	if m := dirty(1000); cap(m) < 1000 || &m[0] == &large[0] {
		t.Error("memory in use was given out again")
	}
	if m := dirty(40); cap(m) > 80 || len(r.free) != 1 {
		t.Errorf("40 entries took memory for %d; %d left", cap(m), len(r.free))
	}
	if m := r.take(0); len(m) != 0 {
		t.Errorf("%d entries", len(m))
	}
}
