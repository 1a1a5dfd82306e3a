package sparse

import (
	"fmt"
	"math"
)

// Pattern is the lower triangle, diagonal included, of a symmetric N x N matrix in compressed columns. Column j holds
// the rows Index[Ptr[j]:Ptr[j+1]] in ascending order, so its first entry is the diagonal. Entries are kept whatever
// their value: a zero stays. A Pattern must not be changed once it is in use.
type Pattern struct {
	N     int
	Ptr   []int   // N+1
	Index []int32 // rows
}

// Slots tells an assembler where to add: Pair[k] is the place in Values of the k-th pair given to NewPattern,
// Diagonal[i] the place of the diagonal entry of row i.
type Slots struct {
	Pair     []int32
	Diagonal []int32
}

// NewPattern builds the pattern of an n x n matrix from pairs (i[k], j[k]) in any order and either orientation, with
// any number of repetitions; every diagonal entry is present whether listed or not. It panics on an index outside
// [0, n) or slices of different length. Two bucket sorts, O(n + pairs).
func NewPattern(n int, i, j []int32) (*Pattern, Slots) {
	if n < 0 || len(i) != len(j) || n > math.MaxInt32-1 || len(i) > math.MaxInt32-n {
		panic(fmt.Sprintf("sparse: NewPattern of %d rows with %d and %d indices", n, len(i), len(j)))
	}
	for k := range i {
		if uint(i[k]) >= uint(n) || uint(j[k]) >= uint(n) {
			panic(fmt.Sprintf("sparse: pair %d is (%d, %d), outside of %d rows", k, i[k], j[k], n))
		}
	}
	byColumn, start := sortPairs(n, i, j)
	slots := Slots{Pair: make([]int32, len(i)), Diagonal: make([]int32, n)}
	p := &Pattern{N: n, Ptr: make([]int, n+1), Index: make([]int32, 0, n+len(i))}
	for c := range n {
		p.Ptr[c] = len(p.Index)
		slots.Diagonal[c] = int32(len(p.Index))
		p.Index = append(p.Index, int32(c))
		for _, k := range byColumn[start[c]:start[c+1]] {
			if r := max(i[k], j[k]); r != p.Index[len(p.Index)-1] {
				p.Index = append(p.Index, r)
			}
			slots.Pair[k] = int32(len(p.Index) - 1)
		}
	}
	p.Ptr[n] = len(p.Index)
	return p, slots
}

// sortPairs orders pair numbers by the smaller index, then by the larger; start[c] is the first with smaller index c.
func sortPairs(n int, i, j []int32) (order, start []int32) {
	count := make([]int32, n+1)
	for k := range i {
		count[max(i[k], j[k])+1]++
	}
	for c := range n {
		count[c+1] += count[c]
	}
	byRow := make([]int32, len(i))
	for k := range i {
		r := max(i[k], j[k])
		byRow[count[r]] = int32(k)
		count[r]++
	}
	clear(count)
	for k := range i {
		count[min(i[k], j[k])+1]++
	}
	for c := range n {
		count[c+1] += count[c]
	}
	start = append([]int32(nil), count...)
	order = make([]int32, len(i))
	for _, k := range byRow {
		c := min(i[k], j[k])
		order[count[c]] = k
		count[c]++
	}
	return order, start
}

// check panics where a hand-made pattern breaks the rules that the type states.
func (p *Pattern) check() {
	if p.N < 0 || len(p.Ptr) != p.N+1 || p.Ptr[0] != 0 || p.Ptr[p.N] != len(p.Index) || len(p.Index) > math.MaxInt32/2 {
		panic(fmt.Sprintf("sparse: pattern of %d rows has %d column starts and %d entries", p.N, len(p.Ptr), len(p.Index)))
	}
	for j := range p.N {
		a, b := p.Ptr[j], p.Ptr[j+1]
		if a >= b || b > len(p.Index) || int(p.Index[a]) != j {
			panic(fmt.Sprintf("sparse: column %d does not start with its diagonal", j))
		}
		for k := a + 1; k < b; k++ {
			if p.Index[k] <= p.Index[k-1] || int(p.Index[k]) >= p.N {
				panic(fmt.Sprintf("sparse: rows of column %d are not ascending in range", j))
			}
		}
	}
}
