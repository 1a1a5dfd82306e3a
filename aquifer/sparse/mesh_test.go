package sparse

import (
	"math"
	"math/rand/v2"
)

// problem is a test matrix with the places of its rows.
type problem struct {
	Matrix
	x, y []float64
}

// jitteredMesh makes a Laplacian on a jittered grid of columns x rows nodes whose cells are cut by a random diagonal,
// 7 entries a row. Conductances are log-normal over about six decades. Rows are numbered at random. grade > 1 draws nodes
// towards wells so that cell sizes span about that ratio. One side is held.
func jitteredMesh(columns, rows int, grade float64, seed uint64) problem {
	random := rand.New(rand.NewPCG(seed, 1))
	n := columns * rows
	number := random.Perm(n)
	at := func(c, r int) int32 { return int32(number[r*columns+c]) }
	x, y := make([]float64, n), make([]float64, n)
	for r := range rows {
		for c := range columns {
			k := at(c, r)
			x[k] = squeeze(float64(c)+0.6*(random.Float64()-0.5), float64(columns), grade)
			y[k] = squeeze(float64(r)+0.6*(random.Float64()-0.5), float64(rows), grade)
		}
	}
	var i, j []int32
	link := func(a, b int32) { i, j = append(i, a), append(j, b) }
	for r := range rows {
		for c := range columns {
			if c+1 < columns {
				link(at(c, r), at(c+1, r))
			}
			if r+1 < rows {
				link(at(c, r), at(c, r+1))
			}
			if c+1 < columns && r+1 < rows {
				if random.IntN(2) == 0 {
					link(at(c, r), at(c+1, r+1))
				} else {
					link(at(c+1, r), at(c, r+1))
				}
			}
		}
	}
	values := make([]float64, len(i))
	for k := range values {
		values[k] = math.Exp(1.5 * random.NormFloat64() * 1.5)
	}
	var held []int32
	for r := range rows {
		held = append(held, at(0, r))
	}
	return laplacian(n, i, j, values, held, x, y)
}

// squeeze maps [0, size] onto itself so that steps shrink towards the middle by the ratio grade.
func squeeze(s, size, grade float64) float64 {
	if grade <= 1 {
		return s
	}
	u := 2*s/size - 1
	k := math.Log(grade)
	return size / 2 * (1 + math.Copysign(math.Expm1(k*math.Abs(u))/math.Expm1(k), u))
}

// laplacian assembles conductances between pairs, and a conductance of one on the diagonal of held rows.
func laplacian(n int, i, j []int32, conductance []float64, held []int32, x, y []float64) problem {
	p, slots := NewPattern(n, i, j)
	values := make([]float64, len(p.Index))
	for k, c := range conductance {
		values[slots.Pair[k]] -= c
		values[slots.Diagonal[i[k]]] += c
		values[slots.Diagonal[j[k]]] += c
	}
	for _, h := range held {
		values[slots.Diagonal[h]]++
	}
	return problem{Matrix{p, values}, x, y}
}

func randomVector(n int, seed uint64) []float64 {
	random := rand.New(rand.NewPCG(seed, 2))
	x := make([]float64, n)
	for i := range x {
		x[i] = random.NormFloat64()
	}
	return x
}
