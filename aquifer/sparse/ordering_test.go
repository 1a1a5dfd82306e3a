package sparse

import (
	"context"
	"math/rand/v2"
	"slices"
	"testing"
)

// fill eliminates a graph node by node in the given order and returns the rows below each column of L.
func fill(g *graph, order []int32) []map[int32]bool {
	position := invert(order)
	columns := make([]map[int32]bool, g.n)
	for j := range columns {
		columns[j] = map[int32]bool{}
		for _, u := range g.all(order[j]) {
			if i := position[u]; i > int32(j) {
				columns[j][i] = true
			}
		}
	}
	for j := range columns {
		parent := int32(g.n)
		for i := range columns[j] {
			parent = min(parent, i)
		}
		for i := range columns[j] {
			if i != parent {
				columns[parent][i] = true
			}
		}
	}
	return columns
}

func naturalGraph(p *Pattern) *graph {
	rows := make([]int32, p.N)
	for i := range rows {
		rows[i] = int32(i)
	}
	return newGraph(p, rows)
}

// entriesOfL counts the entries of L without amalgamation.
func entriesOfL(g *graph, order []int32) int {
	parent := eliminationTree(g, order, invert(order))
	by := postorder(parent)
	order, parent = compose(order, by), relabel(parent, by)
	sum := 0
	for _, c := range columnCounts(g, order, invert(order), parent) {
		sum += int(c)
	}
	return sum
}

func TestStructureEqualsElimination(t *testing.T) {
	for _, n := range []int{1, 2, 3, 4, 5, 10, 11, 50, 150} {
		for _, share := range []float64{0, 0.03, 0.2, 1} {
			p := randomDominant(n, share, uint64(n)+9)
			s := mustAnalyse(t, p, Options{})
			g := naturalGraph(p.Pattern)
			if sorted := slices.Sorted(slices.Values(s.order)); !slices.Equal(sorted, g.row) {
				t.Fatalf("n %d share %g: the order is no permutation", n, share)
			}
			columns := fill(g, s.order)
			exact := 0
			for j, column := range columns {
				exact += 1 + len(column)
				k := s.nodes.of[j]
				below := s.rowsBelow(k)
				for i := range column {
					if s.nodes.of[i] == k {
						continue
					}
					if _, found := slices.BinarySearch(below, i); !found {
						t.Fatalf("n %d share %g: entry (%d, %d) of L has no place", n, share, i, j)
					}
				}
			}
			if counted := entriesOfL(g, s.order); counted != exact {
				t.Errorf("n %d share %g: %d entries counted, %d by elimination", n, share, counted, exact)
			}
			if s.NonZeros() < int64(exact) {
				t.Errorf("n %d share %g: %d entries stored, L has %d", n, share, s.NonZeros(), exact)
			}
		}
	}
}

// rowsBelow returns the positions of the rows of supernode k below its columns.
func (s *Symbolic) rowsBelow(k int32) []int32 {
	position := map[int32]int32{}
	for a := s.nodes.parent[k]; a >= 0; a = s.nodes.parent[a] {
		for i := s.nodes.first[a]; i < s.nodes.first[a+1]; i++ {
			position[s.schedule.first[a]+i-s.nodes.first[a]] = i
		}
	}
	var below []int32
	for _, place := range s.schedule.rows[s.rowPtr[k]:s.rowPtr[k+1]] {
		below = append(below, position[place])
	}
	return below
}

// A node of degree one never makes fill, and a tree always has one: minimum degree must find an order without fill.
func TestMinimumDegreeMakesNoFillInTrees(t *testing.T) {
	random := rand.New(rand.NewPCG(3, 4))
	for _, n := range []int{1, 2, 3, 10, 100, 3000} {
		for range 5 {
			var i, j []int32
			for v := 1; v < n; v++ {
				i, j = append(i, int32(v)), append(j, int32(random.IntN(v)))
			}
			p, _ := NewPattern(n, i, j)
			g := naturalGraph(p)
			var m minDegree
			if got, want := entriesOfL(g, m.order(n, g.start, g.to)), 2*n-1; got != want {
				t.Errorf("a tree of %d nodes: %d entries, want %d", n, got, want)
			}
		}
	}
}

// Numbers of a halo are never in the order, and memory is reused from call to call.
func TestMinimumDegreeLeavesHaloAlone(t *testing.T) {
	var m minDegree
	for side := 3; side < 25; side++ {
		p := jitteredMesh(side, side, 1, uint64(side))
		g := naturalGraph(p.Pattern)
		variables := side * side / 2
		order := m.order(variables, g.start, g.to)
		for k, v := range slices.Sorted(slices.Values(order)) {
			if int(v) != k {
				t.Fatalf("side %d: %v is no permutation of the first %d", side, order, variables)
			}
		}
		if len(order) != variables {
			t.Fatalf("side %d: %d numbers ordered of %d", side, len(order), variables)
		}
	}
}

func TestDissectionFillsLessThanMinimumDegree(t *testing.T) {
	for _, grade := range []float64{1, 1000} {
		p := jitteredMesh(150, 150, grade, 4)
		g, order := dissect(context.Background(), p.Pattern, p.x, p.y, 2)
		dissected := entriesOfL(g, order)
		natural := naturalGraph(p.Pattern)
		var m minDegree
		plain := entriesOfL(natural, m.order(natural.n, natural.start, natural.to))
		if dissected > plain {
			t.Errorf("grade %g: %d entries by dissection, %d by minimum degree", grade, dissected, plain)
		}
	}
}

func TestSmallestCover(t *testing.T) {
	random := rand.New(rand.NewPCG(5, 6))
	var b bipartite
	for trial := range 300 {
		left, right := 1+random.IntN(12), 1+random.IntN(12)
		var i, j []int32
		for v := range left {
			for u := range right {
				if random.Float64() < 0.25 {
					i, j = append(i, int32(v)), append(j, int32(left+u))
				}
			}
		}
		p, _ := NewPattern(left+right, i, j)
		g := naturalGraph(p)
		side := make([]uint8, left+right)
		for u := range right {
			side[left+u] = sideRight
		}
		var boundary []int32
		for v := range int32(left) {
			if len(g.all(v)) > 0 {
				boundary = append(boundary, v)
			}
		}
		cover := b.smallestCover(g, side, make([]int32, left+right), boundary)
		matched := 0
		for v := range b.left {
			if u := b.mateOfLeft[v]; u >= 0 {
				if b.mateOfRight[u] != int32(v) {
					t.Fatalf("trial %d: mates do not agree", trial)
				}
				matched++
			}
		}
		for k := range i {
			if !slices.Contains(cover, i[k]) && !slices.Contains(cover, j[k]) {
				t.Fatalf("trial %d: edge %d-%d is not covered", trial, i[k], j[k])
			}
		}
		// No cover is smaller than a matching, so equality proves both optimal.
		if len(cover) != matched {
			t.Fatalf("trial %d: cover of %d, matching of %d", trial, len(cover), matched)
		}
	}
}

func TestMoverKeepsSidesApart(t *testing.T) {
	var m mover
	for seed := range uint64(30) {
		p := jitteredMesh(20, 25, 1, seed)
		n := p.Pattern.N
		g := naturalGraph(p.Pattern)
		side := make([]uint8, n)
		var between []int32
		count := [3]int{}
		for v := range n {
			switch {
			case p.x[v] < 8+float64(seed%5):
				side[v] = sideLeft
			case p.x[v] < 11+float64(seed%5):
				side[v] = sideBetween
				between = append(between, int32(v))
			default:
				side[v] = sideRight
			}
			count[side[v]]++
		}
		left, right := m.improve(g, side, make([]int32, n), between, count[sideLeft], count[sideRight])
		now := [3]int{}
		for v := range int32(n) {
			now[side[v]]++
			for _, u := range g.all(v) {
				if side[v]+side[u] == sideLeft+sideRight && side[v] != side[u] {
					t.Fatalf("seed %d: %d and %d meet across the separator", seed, v, u)
				}
			}
		}
		if now[sideLeft] != left || now[sideRight] != right {
			t.Errorf("seed %d: sides of %d and %d, told %d and %d", seed, now[sideLeft], now[sideRight], left, right)
		}
		if now[sideBetween] >= count[sideBetween] {
			t.Errorf("seed %d: a separator of %d, three nodes thick, became %d", seed, count[sideBetween], now[sideBetween])
		}
	}
}

func TestPlanHoldsEverySupernodeOnce(t *testing.T) {
	p := jitteredMesh(130, 140, 1, 2)
	s := mustAnalyse(t, p, Options{})
	next := int32(0)
	for task := range s.plan.first {
		if s.plan.first[task] != next {
			t.Fatalf("task %d starts at %d, want %d", task, s.plan.first[task], next)
		}
		next = s.plan.last[task] + 1
		if up := s.plan.parent[task]; up >= 0 && int(up) <= task {
			t.Fatalf("task %d waits for task %d", up, task)
		}
	}
	if int(next) != len(s.nodes.rows) {
		t.Errorf("tasks end at %d of %d supernodes", next, len(s.nodes.rows))
	}
	if len(s.plan.first) < 4 {
		t.Errorf("%d tasks leave nothing to share", len(s.plan.first))
	}
}
