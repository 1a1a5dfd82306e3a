package aquifer

import (
	"container/heap"
	"context"
	"fmt"
	"math"

	"springbound/aquifer/mesh"
	"springbound/aquifer/sparse"
)

// patchNodes is how many nodes the local problem may hold: on a mesh that grows by 0.15 a distance that is a circle of about
// a hundred edge lengths at the node, where the discrete logarithm has settled to the exact one.
const patchNodes = 600

// Radius is the logarithm that stands between a node's head and the head around it.
type Radius struct {
	LogR0   float64 // natural logarithm of the equivalent radius in metres, in the isotropic frame
	Mean    float64 // T* = sqrt(det T), averaged by angle where the node lies on a border between two [m²/d]
	Angle   float64 // interior angle at the node, 2 pi inside [rad]
	Patch   int     // nodes in the local problem
	stretch float64 // (Tx/Ty)^(1/4) >= 1: how a circle deforms in the isotropic frame
}

// Below returns the drawdown at a bore of the given radius below that at the node, per unit rate [d/m²]:
// ln(r0/rw)/(angle T*). Under anisotropy the bore counts as the mean of the half axes of its image.
func (r Radius) Below(bore float64) float64 {
	effective := bore * (r.stretch + 1/r.stretch) / 2
	return (r.LogR0 - math.Log(effective)) / (r.Angle * r.Mean)
}

// EquivalentRadius finds the equivalent radius at any node that has a head to be found, also where no well was asked for; the mesh is as it
// is there.
func (m *Model) EquivalentRadius(ctx context.Context, node int32) (Radius, error) {
	return m.equivalentRadius(ctx, node)
}

// equivalentRadius solves the local discrete problem: a unit sink at the node, the logarithm as boundary data on a patch that
// spans the graded zone, cut before the nearest change of transmissivity or bend of the outline. Then ln r0 = -angle T* u(node).
// The neighbour-only formula (Peaceman 1978, SPE Journal 18(3), in the form for any control volume) is the patch of one ring;
// on graded meshes it does not converge, the patch does.
func (m *Model) equivalentRadius(ctx context.Context, node int32) (Radius, error) {
	r := m.around(node)
	inside, rim := m.patch(node, r)
	r.Patch = len(inside) + len(rim)
	metric := m.metricAt(node)
	logAt := func(n int32) float64 {
		return -math.Log(metric(m.Mesh.X[n]-m.Mesh.X[node], m.Mesh.Y[n]-m.Mesh.Y[node])) / (r.Angle * r.Mean)
	}
	if len(inside) == 1 {
		sum, weighted := 0.0, 0.0
		m.eachCoupling(node, func(other int32, c float64) {
			sum += c
			weighted += c * logAt(other)
		})
		r.LogR0 = -(weighted + 1) / sum * r.Angle * r.Mean
		return r, r.check(m, node)
	}
	u, err := m.solvePatch(ctx, inside, node, logAt)
	if err != nil {
		return r, err
	}
	r.LogR0 = -u * r.Angle * r.Mean
	return r, r.check(m, node)
}

func (r Radius) check(m *Model, node int32) error {
	if math.IsNaN(r.LogR0) || math.IsInf(r.LogR0, 0) {
		return fmt.Errorf("aquifer: the equivalent radius at (%.2f, %.2f) is not finite", m.Mesh.X[node], m.Mesh.Y[node])
	}
	return nil
}

// around measures the interior angle and the mean transmissivity by angle at a node.
func (m *Model) around(node int32) Radius {
	r := Radius{stretch: 1}
	weighted := 0.0
	metric := m.tensorAt(node)
	for _, t := range m.Mesh.NodeTriangles(node) {
		angle := m.angleAt(t, node, metric)
		r.Angle += angle
		weighted += angle * m.regions[m.Mesh.Region[t]].mean
	}
	r.Mean = weighted / r.Angle
	if math.Abs(r.Angle-2*math.Pi) < 1e-9 { // rounding of a sum of angles: inside the domain
		r.Angle = 2 * math.Pi
	}
	half := math.Hypot((metric.Txx-metric.Tyy)/2, metric.Txy)
	centre := (metric.Txx + metric.Tyy) / 2
	r.stretch = math.Pow((centre+half)/(centre-half), 0.25)
	return r
}

// tensorAt is the tensor of the first triangle around a node.
func (m *Model) tensorAt(node int32) mesh.Tensor {
	return m.regions[m.Mesh.Region[m.Mesh.NodeTriangles(node)[0]]].tensor
}

// metricAt returns the length of a vector in the frame where the tensor at the node is isotropic, area preserved.
func (m *Model) metricAt(node int32) func(dx, dy float64) float64 {
	t := m.tensorAt(node)
	root := math.Sqrt(t.Txx*t.Tyy - t.Txy*t.Txy)
	return func(dx, dy float64) float64 {
		return math.Sqrt((t.Tyy*dx*dx - 2*t.Txy*dx*dy + t.Txx*dy*dy) / root)
	}
}

// angleAt is the angle of triangle t at the node, in the frame of the tensor [rad].
func (m *Model) angleAt(t, node int32, tensor mesh.Tensor) float64 {
	k := m.corner(t, node)
	a, b := m.Mesh.Triangles[3*t+int32(k+1)%3], m.Mesh.Triangles[3*t+int32(k+2)%3]
	ax, ay := m.Mesh.X[a]-m.Mesh.X[node], m.Mesh.Y[a]-m.Mesh.Y[node]
	bx, by := m.Mesh.X[b]-m.Mesh.X[node], m.Mesh.Y[b]-m.Mesh.Y[node]
	root := math.Sqrt(tensor.Txx*tensor.Tyy - tensor.Txy*tensor.Txy)
	dot := (tensor.Tyy*ax*bx - tensor.Txy*(ax*by+ay*bx) + tensor.Txx*ay*by) / root
	return math.Atan2(ax*by-ay*bx, dot)
}

func (m *Model) corner(t, node int32) int {
	for k := 0; k < 3; k++ {
		if m.Mesh.Triangles[3*t+int32(k)] == node {
			return k
		}
	}
	panic("aquifer: node is not a corner of its triangle")
}

// eachCoupling visits the conductances between a node and its neighbours, a shared edge once a triangle.
func (m *Model) eachCoupling(node int32, visit func(other int32, c float64)) {
	for _, t := range m.Mesh.NodeTriangles(node) {
		k := m.corner(t, node)
		b, c := (k+1)%3, (k+2)%3
		visit(m.Mesh.Triangles[3*int(t)+b], m.conductance[3*int(t)+c])
		visit(m.Mesh.Triangles[3*int(t)+c], m.conductance[3*int(t)+b])
	}
}

type reachItem struct {
	dist float64
	node int32
}

type reachQueue []reachItem

func (q reachQueue) Len() int { return len(q) }
func (q reachQueue) Less(i, j int) bool {
	return q[i].dist < q[j].dist || q[i].dist == q[j].dist && q[i].node < q[j].node
}
func (q reachQueue) Swap(i, j int) { q[i], q[j] = q[j], q[i] }
func (q *reachQueue) Push(x any)   { *q = append(*q, x.(reachItem)) }
func (q *reachQueue) Pop() any {
	old := *q
	last := old[len(old)-1]
	*q = old[:len(old)-1]
	return last
}

// patch grows outward from the node by distance and stops before the first node where the logarithm ends to hold. It returns the nodes
// to solve for, the first of them the node, and the rim where the logarithm is given.
func (m *Model) patch(node int32, r Radius) (inside, rim []int32) {
	metric := m.metricAt(node)
	seen := map[int32]bool{node: true}
	q := &reachQueue{{0, node}}
	uniform := m.uniformAround(node, node)
	for q.Len() > 0 && len(inside) < m.patchNodes {
		item := heap.Pop(q).(reachItem)
		if item.node != node && (!uniform || !m.uniformAround(item.node, node) || !m.onStraightOutline(item.node, node)) {
			break
		}
		inside = append(inside, item.node)
		if !uniform {
			break
		}
		m.eachCoupling(item.node, func(o int32, _ float64) {
			if !seen[o] {
				seen[o] = true
				heap.Push(q, reachItem{metric(m.Mesh.X[o]-m.Mesh.X[node], m.Mesh.Y[o]-m.Mesh.Y[node]), o})
			}
		})
	}
	in := make(map[int32]bool, len(inside))
	for _, n := range inside {
		in[n] = true
	}
	onRim := map[int32]bool{}
	for _, n := range inside {
		m.eachCoupling(n, func(o int32, _ float64) {
			if !in[o] && !onRim[o] {
				onRim[o] = true
				rim = append(rim, o)
			}
		})
	}
	return inside, rim
}

// uniformAround tells whether all triangles at n have the tensor of the first triangle at reference.
func (m *Model) uniformAround(n, reference int32) bool {
	want := m.tensorAt(reference)
	for _, t := range m.Mesh.NodeTriangles(n) {
		if m.regions[m.Mesh.Region[t]].tensor != want {
			return false
		}
	}
	return true
}

// straight is how far, relative to its distance, an outline node may lie off the ray that the outline leaves the node on:
// rounding of split points on a straight segment.
const straight = 1e-9

// onStraightOutline tells whether n is inside the domain, or on an outline that runs straight out from the node.
func (m *Model) onStraightOutline(n, node int32) bool {
	if !m.onOutline[n] {
		return true
	}
	if !m.onOutline[node] {
		return false
	}
	dx, dy := m.Mesh.X[n]-m.Mesh.X[node], m.Mesh.Y[n]-m.Mesh.Y[node]
	for _, t := range m.Mesh.NodeTriangles(node) {
		k := m.corner(t, node)
		for _, side := range [2]int{(k + 1) % 3, (k + 2) % 3} {
			if m.Mesh.Neighbours[3*int(t)+side] >= 0 {
				continue
			}
			o := m.Mesh.Triangles[3*int(t)+3-k-side]
			ox, oy := m.Mesh.X[o]-m.Mesh.X[node], m.Mesh.Y[o]-m.Mesh.Y[node]
			if math.Abs(dx*oy-dy*ox) <= straight*math.Hypot(dx, dy)*math.Hypot(ox, oy) && dx*ox+dy*oy > 0 {
				return true
			}
		}
	}
	return false
}

// solvePatch solves the local problem and returns u at the node (inside[0]).
func (m *Model) solvePatch(ctx context.Context, inside []int32, node int32, logAt func(int32) float64) (float64, error) {
	local := make(map[int32]int32, len(inside))
	x, y := make([]float64, len(inside)), make([]float64, len(inside))
	for i, n := range inside {
		local[n] = int32(i)
		x[i], y[i] = m.Mesh.X[n], m.Mesh.Y[n]
	}
	var pi, pj []int32
	var pc []float64
	diag := make([]float64, len(inside))
	rhs := make([]float64, len(inside))
	rhs[0] = 1 // u is the drawdown of a unit rate
	for i, n := range inside {
		m.eachCoupling(n, func(o int32, c float64) {
			diag[i] += c
			j, ok := local[o]
			switch {
			case !ok:
				rhs[i] += c * logAt(o)
			case j > int32(i):
				pi, pj, pc = append(pi, int32(i)), append(pj, j), append(pc, c)
			}
		})
	}
	pattern, slots := sparse.NewPattern(len(inside), pi, pj)
	values := make([]float64, len(pattern.Index))
	for i, d := range diag {
		values[slots.Diagonal[i]] += d
	}
	for k, c := range pc {
		values[slots.Pair[k]] -= c
	}
	symbolic, err := sparse.Analyse(ctx, pattern, x, y, sparse.Options{Workers: 1})
	if err != nil {
		return 0, err
	}
	factor, err := symbolic.Factor(ctx, values)
	if err != nil {
		return 0, fmt.Errorf("aquifer: local problem at (%.2f, %.2f): %w", m.Mesh.X[node], m.Mesh.Y[node], err)
	}
	if err := factor.Solve(ctx, rhs, 1); err != nil {
		return 0, err
	}
	return rhs[0], nil
}
