package adjoint

import (
	"context"
	"encoding/binary"
	"fmt"
	"math"

	"springbound/aquifer"
)

// Functional is a watched quantity J = c'h + d'Q + e.
type Functional struct {
	Name     string
	Quantity aquifer.Quantity // c and e
	Direct   []float64        // d, one a well; nil is none
}

// Value evaluates J.
func (f Functional) Value(h, rates []float64) float64 {
	v := f.Quantity.Value(h)
	for w, d := range f.Direct {
		v += d * rates[w]
	}
	return v
}

// blockWidth is how many adjoint right-hand sides go through the factor together: wide enough for the factor to be read
// once for many, narrow enough that a million nodes need 256 MB.
const blockWidth = 32

// Solved holds the adjoint solutions of a list of functionals where they are wanted.
type Solved struct {
	At       [][]float64 // per functional: z at the wanted nodes [unit per m³/d]
	Distinct int         // how many different right-hand sides were solved
}

// System solves with the matrix of a model, or of one of its settled states.
type System interface {
	SolveFree(ctx context.Context, block []float64, k int) error
	SolveAt(ctx context.Context, quantities []aquifer.Quantity, nodes []int32) ([][]float64, error)
}

// Solve makes one adjoint solve per distinct functional and returns z at the wanted nodes; each, where not nil, gets every functional's
// whole field over the nodes, in the functionals' order of first appearance. Without it only what the wanted nodes need is solved.
// Prescribed nodes have z = 0.
func Solve(ctx context.Context, m *aquifer.Model, system System, fs []Functional, wanted []int32, each func(functional int, z []float64) error, progress func(done, total int)) (*Solved, error) {
	n := m.Unknowns()
	first := map[string]int{}
	var distinct []int // functional that stands for the k-th right-hand side
	same := make([]int, len(fs))
	for i := range fs {
		k := signature(m, fs[i].Quantity)
		d, ok := first[k]
		if !ok {
			d = len(distinct)
			first[k] = d
			distinct = append(distinct, i)
		}
		same[i] = d
	}
	at := make([][]float64, len(distinct))
	users := make([][]int, len(distinct))
	for i, d := range same {
		users[d] = append(users[d], i)
	}
	width := min(blockWidth, len(distinct))
	var block []float64
	if each != nil {
		block = make([]float64, n*width)
	}
	for start := 0; start < len(distinct); start += width {
		if err := ctx.Err(); err != nil {
			return nil, fmt.Errorf("adjoint: stopped after %d of %d solves: %w", start, len(distinct), err)
		}
		k := min(width, len(distinct)-start)
		quantities := make([]aquifer.Quantity, k)
		for c := range quantities {
			quantities[c] = fs[distinct[start+c]].Quantity
		}
		found, err := solveBlock(ctx, m, system, quantities, wanted, block)
		if err != nil {
			return nil, err
		}
		for c, values := range found {
			for _, v := range values {
				if math.IsNaN(v) || math.IsInf(v, 0) {
					return nil, fmt.Errorf("adjoint: the influence of %s is not finite", fs[distinct[start+c]].Name)
				}
			}
			at[start+c] = values
			if each != nil {
				field := m.Spread(block[c*n : (c+1)*n])
				for _, i := range users[start+c] {
					if err := each(i, field); err != nil {
						return nil, err
					}
				}
			}
		}
		if progress != nil {
			progress(start+k, len(distinct))
		}
	}
	out := &Solved{Distinct: len(distinct)}
	for i := range fs {
		out.At = append(out.At, at[same[i]])
	}
	return out, nil
}

// solveBlock returns z of each quantity at the wanted nodes; where there is a block, whole fields are left in it.
func solveBlock(ctx context.Context, m *aquifer.Model, system System, quantities []aquifer.Quantity, wanted []int32, block []float64) ([][]float64, error) {
	if block == nil {
		return system.SolveAt(ctx, quantities, wanted)
	}
	n, k := m.Unknowns(), len(quantities)
	clear(block[:n*k])
	for c, q := range quantities {
		for i, node := range q.Nodes {
			if u := m.Unknown(node); u >= 0 {
				block[c*n+int(u)] += q.Weights[i]
			}
		}
	}
	if err := system.SolveFree(ctx, block[:n*k], k); err != nil {
		return nil, err
	}
	found := make([][]float64, k)
	for c := range found {
		found[c] = make([]float64, len(wanted))
		for i, node := range wanted {
			if u := m.Unknown(node); u >= 0 {
				found[c][i] = block[c*n+int(u)]
			}
		}
	}
	return found, nil
}

// signature is equal for quantities with the same weights on unknown heads.
func signature(m *aquifer.Model, q aquifer.Quantity) string {
	var b []byte
	for i, n := range q.Nodes {
		if m.Unknown(n) < 0 || q.Weights[i] == 0 {
			continue
		}
		b = binary.LittleEndian.AppendUint32(b, uint32(n))
		b = binary.LittleEndian.AppendUint64(b, math.Float64bits(q.Weights[i]))
	}
	return string(b)
}
