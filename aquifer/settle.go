package aquifer

import (
	"context"
	"errors"
	"fmt"
	"math"
	"sort"

	"github.com/paulmach/orb"

	"springbound/aquifer/sparse"
)

// Settled is a steady state with the features that act in it: a spring below its outlet gives nothing, a river or lake below its bed and
// leakage below the confining layer's base give what they give at that level.
type Settled struct {
	Heads []float64     // at every node [m]
	Off   []SwitchedOff // in the order of the exchanges and their nodes
	Steps int           // Newton steps taken; 0 where the linear state holds

	model  *Model
	matrix sparse.Matrix
	factor *sparse.Factor
}

// SwitchedOff is an exchange at a node that does not answer to the head any more.
type SwitchedOff struct{ Exchange, Entry int }

// NoSteadyState says that nothing that fixes the head is left in a part of the aquifer.
type NoSteadyState struct {
	At    [2]float64
	Rates float64 // net rate of the sinks [m³/d]
}

func (e *NoSteadyState) Error() string {
	return fmt.Sprintf("no steady state at these rates: with %.6g m³/d pumped, nothing that fixes the head is left in the part around (%.1f, %.1f)", e.Rates, e.At[0], e.At[1])
}

// flow is what exchange entry k gives to the aquifer under head h [m³/d]: C (level - max(h, lowest)).
func (e *Exchange) flow(k int, h float64) float64 {
	if z := e.Lowest[k]; h < z { // false where none is stated
		h = z
	}
	return e.Conductance[k] * (e.Level[k] - h)
}

// mostSteps bounds the Newton steps: each lowers a strictly convex piecewise quadratic whose pieces are finitely many, and a few steps reach the
// last piece; more than this is a numerical failure.
const mostSteps = 200

// Settle finds the steady state under the sinks. It minimises
//
//	phi(h) = 1/2 h'K h - b'h + sum_e psi_e(h),   psi_e' = -(flow of e into the aquifer)
//
// with K the conductances between nodes and b what does not answer to the head: strictly convex and piecewise quadratic, since every flow falls with
// the head. Newton steps with an exact line search end after finitely many (Sun 1997, J. Optim. Theory Appl. 93: piecewise quadratic
// programming by Newton's method). Errors: *NoSteadyState.
func (m *Model) Settle(ctx context.Context, sinks []Sink) (*Settled, error) {
	h, err := m.Heads(ctx, sinks)
	if err != nil {
		return nil, err
	}
	s := &Settled{Heads: h, model: m, matrix: m.matrix, factor: m.factor}
	off := m.offAt(h)
	if len(off) == 0 {
		return s, nil
	}
	for s.Steps = 1; s.Steps <= mostSteps; s.Steps++ {
		if err := ctx.Err(); err != nil {
			return nil, fmt.Errorf("aquifer: stopped after %d steps towards a steady state: %w", s.Steps-1, err)
		}
		next, values, factor, err := m.solveWith(ctx, sinks, off)
		if err != nil {
			return nil, err
		}
		reached := m.offAt(next)
		if equalOff(reached, off) {
			s.Heads, s.Off, s.factor = next, off, factor
			s.matrix = sparse.Matrix{Pattern: m.pattern, Values: values}
			return s, nil
		}
		s.Heads = m.lineSearch(s.Heads, next, sinks)
		if now := m.offAt(s.Heads); !equalOff(now, off) {
			off = now
		} else {
			off = reached
		}
	}
	return nil, fmt.Errorf("aquifer: no steady state found in %d steps", mostSteps)
}

// offAt lists the entries whose head is below their lowest.
func (m *Model) offAt(h []float64) []SwitchedOff {
	var off []SwitchedOff
	for i := range m.Exchanges {
		e := &m.Exchanges[i]
		for k, n := range e.Nodes {
			if h[n] < e.Lowest[k] && m.free[n] >= 0 {
				off = append(off, SwitchedOff{i, k})
			}
		}
	}
	return off
}

func equalOff(a, b []SwitchedOff) bool {
	if len(a) != len(b) {
		return false
	}
	for i := range a {
		if a[i] != b[i] {
			return false
		}
	}
	return true
}

// solveWith solves the linear problem in which the listed entries give a constant flow.
func (m *Model) solveWith(ctx context.Context, sinks []Sink, off []SwitchedOff) (h, values []float64, factor *sparse.Factor, err error) {
	if err := m.stillFixed(off, sinks); err != nil {
		return nil, nil, nil, err
	}
	values = append([]float64(nil), m.matrix.Values...)
	b := m.switchedSide(sinks, off)
	for _, o := range off {
		e := &m.Exchanges[o.Exchange]
		i := m.free[e.Nodes[o.Entry]]
		values[m.slots.Diagonal[i]] -= e.Conductance[o.Entry]
	}
	m.Factorisations++
	factor, err = m.symbolic.Factor(ctx, values)
	if err != nil {
		var indefinite *sparse.NotPositiveDefinite
		if errors.As(err, &indefinite) {
			return nil, nil, nil, m.noSteadyState(m.nodeOf[indefinite.Row], sinks)
		}
		return nil, nil, nil, err
	}
	m.solves++
	if err := factor.Solve(ctx, b, 1); err != nil {
		return nil, nil, nil, err
	}
	return m.spread(b), values, factor, nil
}

// switchedSide is the right-hand side in which the listed entries give their constant flow.
func (m *Model) switchedSide(sinks []Sink, off []SwitchedOff) []float64 {
	b := m.rightHandSide(sinks)
	for _, o := range off {
		e := &m.Exchanges[o.Exchange]
		b[m.free[e.Nodes[o.Entry]]] -= e.Conductance[o.Entry] * e.Lowest[o.Entry]
	}
	return b
}

// Residual is the scaled residual of the balance at all unknowns, with the features that act in this state [-].
func (s *Settled) Residual(sinks []Sink) float64 {
	x := make([]float64, len(s.model.nodeOf))
	for i, n := range s.model.nodeOf {
		x[i] = s.Heads[n]
	}
	return s.matrix.Residual(x, s.model.switchedSide(sinks, s.Off))
}

func (m *Model) noSteadyState(node int32, sinks []Sink) error {
	total := 0.0
	for _, s := range sinks {
		total += s.Rate
	}
	return &NoSteadyState{At: m.At(node), Rates: total}
}

// stillFixed tells whether every part has a prescribed head or an exchange that answers.
func (m *Model) stillFixed(off []SwitchedOff, sinks []Sink) error {
	fixed := make([]bool, m.Mesh.Parts)
	part := func(n int32) int { return m.Mesh.Regions[m.Mesh.Region[m.Mesh.NodeTriangles(n)[0]]].Part }
	for _, e := range m.HeadEdges {
		for _, n := range e.Nodes {
			fixed[part(n)] = true
		}
	}
	next := 0
	for i := range m.Exchanges {
		for k, n := range m.Exchanges[i].Nodes {
			if next < len(off) && off[next] == (SwitchedOff{i, k}) {
				next++
				continue
			}
			fixed[part(n)] = true
		}
	}
	for p, ok := range fixed {
		if ok {
			continue
		}
		for _, r := range m.Mesh.Regions {
			if r.Part == p {
				if t, found := m.Mesh.Locate(r.At); found {
					return m.noSteadyState(m.Mesh.Triangles[3*t], sinks)
				}
			}
		}
	}
	return nil
}

// lineSearch returns the point between from and to where phi is least along the way: its derivative is piecewise linear and does not fall.
func (m *Model) lineSearch(from, to []float64, sinks []Sink) []float64 {
	slope, curve := m.linearAlong(from, to, sinks) // derivative of the part without switching: slope + curve t
	type knot struct{ at, slope, curve float64 }   // what an entry adds to both beyond at
	var knots []knot
	for i := range m.Exchanges {
		e := &m.Exchanges[i]
		for k, n := range e.Nodes {
			d := to[n] - from[n]
			if m.free[n] < 0 || d == 0 {
				continue
			}
			c, z := e.Conductance[k], e.Lowest[k]
			// acting: the derivative is d C (h + t d - level); off: d C (lowest - level)
			actSlope, actCurve, offSlope := d*c*(from[n]-e.Level[k]), d*d*c, d*c*(z-e.Level[k])
			if math.IsNaN(z) {
				slope, curve = slope+actSlope, curve+actCurve
				continue
			}
			at := (z - from[n]) / d
			if from[n] >= z { // acts at the start
				slope, curve = slope+actSlope, curve+actCurve
				if d < 0 && at > 0 {
					knots = append(knots, knot{at, offSlope - actSlope, -actCurve})
				}
			} else {
				slope += offSlope
				if d > 0 && at > 0 {
					knots = append(knots, knot{at, actSlope - offSlope, actCurve})
				}
			}
		}
	}
	sort.SliceStable(knots, func(a, b int) bool { return knots[a].at < knots[b].at })
	t, next := 0.0, 0
	for {
		end := math.Inf(1)
		if next < len(knots) {
			end = knots[next].at
		}
		if curve > 0 {
			if root := -slope / curve; root <= end {
				t = math.Max(t, root)
				break
			}
		}
		if math.IsInf(end, 1) {
			t = 1
			break
		}
		t = math.Max(t, end)
		slope, curve = slope+knots[next].slope, curve+knots[next].curve
		next++
	}
	out := make([]float64, len(from))
	for n := range out {
		out[n] = from[n] + t*(to[n]-from[n])
	}
	return out
}

// linearAlong gives the derivative of the energy without exchanges along from + t (to - from), as slope + curve t.
func (m *Model) linearAlong(from, to []float64, sinks []Sink) (slope, curve float64) {
	m.eachEdge(func(a, b int32, c float64) {
		df, d := from[a]-from[b], (to[a]-to[b])-(from[a]-from[b])
		slope += c * df * d
		curve += c * d * d
	})
	for _, f := range m.Inflows {
		for k, n := range f.Nodes {
			slope -= f.Flow[k] * (to[n] - from[n])
		}
	}
	for _, s := range sinks {
		slope += s.Rate * (to[s.Node] - from[s.Node])
	}
	return slope, curve
}

// SolveFree solves A x = b in place for k right-hand sides over the unknowns, with A of the features that act in this state.
func (s *Settled) SolveFree(ctx context.Context, block []float64, k int) error {
	s.model.solves += k
	return s.factor.Solve(ctx, block, k)
}

// isOff tells which entries of exchange i do not answer.
func (s *Settled) isOff(i int) map[int]bool {
	var out map[int]bool
	for _, o := range s.Off {
		if o.Exchange == i {
			if out == nil {
				out = map[int]bool{}
			}
			out[o.Entry] = true
		}
	}
	return out
}

// Outflow is the flow out of the aquifer through exchange i in this state, as a quantity: entries that do not answer are constants.
func (s *Settled) Outflow(i int) Quantity {
	e := &s.model.Exchanges[i]
	off := s.isOff(i)
	if off == nil {
		return e.Outflow()
	}
	g := gather{}
	constant := 0.0
	for k, n := range e.Nodes {
		if off[k] {
			constant -= e.Conductance[k] * (e.Level[k] - e.Lowest[k])
			continue
		}
		g[n] += e.Conductance[k]
		constant -= e.Conductance[k] * e.Level[k]
	}
	return g.quantity(constant)
}

// Outlets lists every feature whose flow answers to heads as Model.Outlets does, as they act in this state.
func (s *Settled) Outlets() []Outlet {
	out := s.model.Outlets()
	first := len(s.model.HeadEdges)
	for i := range s.model.Exchanges {
		out[first+i].Outflow = s.Outflow(i)
	}
	return out
}

// ReachOutflow is Model.ReachOutflow in this state: where the river has lost contact its flow is a constant.
func (s *Settled) ReachOutflow(river int, reach orb.LineString) (Quantity, error) {
	lost := map[int32]float64{} // node to the level below which nothing more is given
	for _, o := range s.Off {
		if e := &s.model.Exchanges[o.Exchange]; e.Kind == RiverFeature && e.Index == river {
			lost[e.Nodes[o.Entry]] = e.Lowest[o.Entry]
		}
	}
	q, err := s.model.ReachOutflow(river, reach)
	if err != nil || len(lost) == 0 {
		return q, err
	}
	out := Quantity{Constant: q.Constant}
	for i, n := range q.Nodes {
		if z, ok := lost[n]; ok {
			out.Constant += q.Weights[i] * z
			continue
		}
		out.Nodes, out.Weights = append(out.Nodes, n), append(out.Weights, q.Weights[i])
	}
	return out, nil
}
