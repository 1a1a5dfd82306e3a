package convex

import "math"

// proofTree records a search: how the tree was split and, for each leaf, prices of the rows that bound the cost there. Any prices
// give a valid bound, so that nothing here needs to be believed.
type proofTree struct {
	nodes []proofNode
	sign  float64 // -1 for a maximisation, whose costs were turned
}

// proofNode is a node of the record.
type proofNode struct {
	column    int
	low, high float64
	down, up  int       // children; 0 for a leaf
	prices    []float64 // of the rows, of a minimisation
	empty     bool      // the prices prove that there is nothing, whatever the cost
}

// start makes the root.
func (t *proofTree) start(rows int) {
	if t != nil {
		t.nodes = []proofNode{{prices: make([]float64, rows)}}
	}
}

// leaf takes the prices of the linear programme for node k.
func (t *proofTree) leaf(k int, l *nodeLP, end lpEnd) {
	if t == nil {
		return
	}
	e, s := l.e, l.t.s
	y := make([]float64, e.rows)
	for i := range y {
		switch {
		case end == lpEmpty && i < len(e.proof):
			y[i] = -e.proof[i] * s.row[i]
		case end != lpEmpty && e.place[e.n+i] != Basic:
			y[i] = e.d[e.n+i] * s.row[i] / s.costFactor
		}
		if y[i] > 0 && !finite(e.trueLow[e.n+i]) || y[i] < 0 && !finite(e.trueUp[e.n+i]) {
			y[i] = 0
		}
	}
	t.nodes[k].prices, t.nodes[k].empty = y, end == lpEmpty
}

// split records the children of node k, which keep its prices until they have their own.
func (t *proofTree) split(k int, l *nodeLP, c candidate, down, up *mixedNode) {
	if t == nil {
		return
	}
	t.leaf(k, l, lpOptimal)
	n := &t.nodes[k]
	prices := n.prices
	n.column, n.low, n.high, n.down, n.up = c.column, c.low, c.high, len(t.nodes), len(t.nodes)+1
	n.prices = nil
	down.proof, up.proof = n.down, n.up
	t.nodes = append(t.nodes, proofNode{prices: prices}, proofNode{prices: prices})
}

// leafBound returns the least cost that the prices allow within the box and the limits of the rows:
//
//	sum over columns of min (c - A'y) x  +  sum over rows of min y r
//
// With empty set the cost is left out, and the result is +Inf when it is above zero beyond rounding and beyond what values as large as
// the largest bound make of the prices that meet an infinite one, which no x allows, and -Inf otherwise.
func leafBound(p *Problem, sign float64, n *proofNode, b *box, u yardstick) float64 {
	var sum twofold
	terms, explained := 0.0, 0.0
	ok := true
	take := func(price, lower, upper, own, size float64) {
		bound := lower
		if price < 0 {
			bound = upper
		}
		if price == 0 {
			return
		}
		if !finite(bound) {
			ok = ok && math.Abs(price) <= CertifiedNegligible*own
			explained += math.Abs(price) * size
			return
		}
		sum.addProduct(price, bound)
		terms += math.Abs(price * bound)
	}
	d, own := make([]twofold, len(b.lo)), make([]float64, len(b.lo))
	if !n.empty {
		for j, c := range p.columns {
			d[j].add(sign * c.Cost)
			own[j] = math.Abs(c.Cost)
		}
	}
	for i, y := range n.prices {
		if y == 0 {
			continue
		}
		take(y, p.rowLower[i], p.rowUpper[i], 0, 0)
		for j, a := range p.row(i) {
			if a != 0 {
				d[j].addProduct(-y, a)
				own[j] += math.Abs(y * a)
			}
		}
	}
	for j := range d {
		take(d[j].value(), b.lo[j], b.hi[j], own[j], u.most*u.col[j])
	}
	v := sum.value()
	switch {
	case !ok || math.IsNaN(v):
		return math.Inf(-1)
	case !n.empty:
		return v
	case v > CertifiedProof*terms && explained <= CertifiedStray*v:
		return math.Inf(1)
	}
	return math.Inf(-1)
}
